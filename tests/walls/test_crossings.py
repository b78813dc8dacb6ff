"""Where and when a charge meets a wall: against lines, circles and swings known exactly."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from driftwell.constants import SPEED_OF_LIGHT
from driftwell.walls.form import WallForm
from tests.cases import field, wall
from tests.moving import ION_RATIO, Floats, events, ions, loop, to_end
from tests.running import quantity, vector

SIZES = st.floats(1e-6, 10.0)
SHARES = st.floats(-1.0, 1.0)
VECTORS = st.tuples(SHARES, SHARES, SHARES)
SPEEDS = st.floats(1.0, 1e9)
"""Proper speeds, m/s: from a crawl to gamma = 3.5."""


def direction(vector_of: tuple[float, float, float]) -> Floats:
    """The unit vector along one that is not too short."""
    length = math.hypot(*vector_of)
    assume(length > 0.1)
    return np.array(vector_of) / length


def velocity(proper: Floats) -> Floats:
    """The speed that goes with a proper one."""
    gamma = math.sqrt(1.0 + float(proper @ proper) / SPEED_OF_LIGHT**2)
    return proper / gamma


def sphere_like(start: Floats, along: Floats, radius: float) -> float:
    """Distance along a line to where it leaves a circle or sphere about the origin."""
    a, b, c = along @ along, start @ along, start @ start - radius**2
    return float((-b + math.sqrt(b * b - a * c)) / a)


def lost(
    form: WallForm, start: Floats, proper: Floats, distance: float, steps: float
) -> tuple[float, Floats]:
    """Time and place where a free charge is lost; a step is `distance` over `steps`."""
    speed = float(np.linalg.norm(velocity(proper)))
    duration = 1.2 * distance / speed
    moving = to_end(loop(ions(start, proper), duration, distance / speed / steps, walls=[form]))
    found = events(moving)
    assert [0] == list(found.surface)
    assert [0] == list(found.direction)
    assert [0] == list(moving.charges.alive)
    # places are rounded, and over one step that is this much of a slope
    size = np.abs(found.position).max() + np.abs(start).max()
    rounding = 1e-13 + 2e-15 * size * steps / distance
    assert proper == pytest.approx(found.velocity[0], abs=rounding * np.linalg.norm(proper))
    return float(found.time[0]), found.position[0]


def expect(
    form: WallForm, start: Floats, proper: Floats, distance: float, steps: float, size: float
) -> None:
    """The wall is met `distance` along the path; `size` of everything sets the rounding."""
    time, place = lost(form, start, proper, distance, steps)
    speed = float(np.linalg.norm(velocity(proper)))
    expected = start + distance * proper / np.linalg.norm(proper)
    assert expected == pytest.approx(place, abs=3e-13 * size)
    assert distance / speed == pytest.approx(time, abs=3e-13 * size / speed)


STEPS = st.floats(0.3, 30.0)
"""Steps to the wall: from less than half a step on."""
FEW = settings(max_examples=30, deadline=None)


@FEW
@given(SIZES, VECTORS, VECTORS, VECTORS, SPEEDS, STEPS)
def test_a_sphere_is_met_where_a_line_leaves_it(
    radius: float, centre: Any, start: Any, along: Any, speed: float, steps: float
) -> None:
    """From anywhere within 0.9 of its radius, in any direction, at any speed and step."""
    middle = 3.0 * radius * np.array(centre)
    begin = 0.5 * radius * np.array(start)
    course = direction(along)
    distance = sphere_like(begin, course, radius)
    form = wall("sphere", radius=quantity(radius, "m"), centre=vector(middle, "m"))
    expect(form, middle + begin, speed * course, distance, steps, 10.0 * radius)


@FEW
@given(SIZES, VECTORS, VECTORS, VECTORS, SPEEDS, STEPS, st.sampled_from("xyz"))
def test_a_tube_is_met_where_a_line_leaves_its_circle(
    radius: float, centre: Any, start: Any, along: Any, speed: float, steps: float, axis: str
) -> None:
    """Across its axis as a circle, wherever that is along it."""
    k = "xyz".index(axis)
    middle = 3.0 * radius * np.array(centre)
    begin = 0.6 * radius * np.array(start)
    course = direction(along)
    across = np.arange(3) != k
    assume(np.linalg.norm(course[across]) > 0.1)
    distance = sphere_like(begin[across], course[across], radius)
    form = wall("cylinder", radius=quantity(radius, "m"), axis=axis, centre=vector(middle, "m"))
    expect(form, middle + begin, speed * course, distance, steps, 30.0 * radius)


@FEW
@given(SIZES, st.tuples(*[st.floats(0.2, 1.0)] * 3), VECTORS, VECTORS, VECTORS, SPEEDS, STEPS)
def test_a_box_is_met_on_the_face_a_line_reaches_first(
    size: float, sides: Any, centre: Any, start: Any, along: Any, speed: float, steps: float
) -> None:
    """From anywhere within 0.9 of it."""
    half = 0.5 * size * np.array(sides)
    middle = 3.0 * size * np.array(centre)
    begin = 0.9 * half * np.array(start)
    course = direction(along)
    with np.errstate(all="ignore"):
        faces = np.where(course != 0.0, (np.sign(course) * half - begin) / course, np.inf)
    form = wall("box", size=vector(2.0 * half, "m"), centre=vector(middle, "m"))
    expect(form, middle + begin, speed * course, float(faces.min()), steps, 10.0 * size)


@FEW
@given(SIZES, VECTORS, VECTORS, VECTORS, VECTORS, SPEEDS, STEPS)
def test_a_plane_is_met_from_both_sides(
    size: float, at: Any, normal: Any, start: Any, along: Any, speed: float, steps: float
) -> None:
    """Whichever way its normal points."""
    place, begin = size * np.array(at), size * np.array(start)
    across, course = direction(normal), direction(along)
    towards = float(course @ across)
    gap = float((place - begin) @ across)
    assume(abs(gap) > 1e-3 * size)
    assume(abs(towards) > 0.1)
    course = course * math.copysign(1.0, gap * towards)
    distance = abs(gap / towards)
    form = wall("plane", at=vector(place, "m"), normal=list(map(float, normal)))
    expect(form, begin, speed * course, distance, steps, 30.0 * size)


@pytest.mark.parametrize("steps", [0.4, 1.0, 7.3, 50.0])
def test_the_nearer_of_several_walls_is_the_one_met(steps: float) -> None:
    """Several in one step, in any order of the list; what lies behind is not reached."""
    walls = [
        wall("plane", name="far", at=["0", "0", "30 mm"]),
        wall("sphere", name="near", radius="10 mm"),
        wall("box", name="middle", size=["60 mm", "60 mm", "40 mm"]),
    ]
    start, proper = np.array([1e-3, 2e-3, 0.0]), np.array([0.0, 0.0, 1e4])
    gap = math.sqrt(1e-4 - 5e-6)
    for turn in range(3):
        order = walls[turn:] + walls[:turn]
        moving = to_end(loop(ions(start, proper), 1e-5, gap / 1e4 / steps, walls=order))
        found = events(moving)
        assert ["near"] == [order[s].name for s in found.surface]
        slower = math.hypot(1.0, 1e4 / SPEED_OF_LIGHT)  # gamma of a proper velocity
        assert slower * gap / 1e4 == pytest.approx(found.time[0], rel=1e-13, abs=0.0)


def flown(form: WallForm, start: Floats, proper: Floats, duration: float, steps: int) -> bool:
    """Whether a free charge still flies after a time."""
    moving = to_end(loop(ions(start, proper), duration, duration / steps, walls=[form]))
    return bool(moving.charges.alive[0])


@pytest.mark.parametrize("steps", [1, 3, 40])
@pytest.mark.parametrize("outward", [1.0, -1.0])
def test_what_is_aimed_at_an_opening_passes(outward: float, steps: int) -> None:
    """A micrometre inside the edge of a hole or slit passes, a micrometre outside does not."""
    across = np.array([1.0, 2.0, -2.0]) / 3.0
    in_plane = np.array([2.0, 1.0, 2.0]) / 3.0
    along = np.array([2.0, -2.0, -1.0]) / 3.0
    place = np.array([1e-3, -2e-3, 0.5e-3])
    keys: dict[str, Any] = {"at": vector(place, "m"), "normal": [1, 2, -2]}
    hole = wall("plane", hole={"radius": "1 mm"}, **keys)
    slit = wall("plane", slit={"width": "2 mm", "along": [2.0, -2.0, -1.0]}, **keys)
    proper = outward * 1e4 * (across + 0.3 * in_plane)
    for form, shift in ((hole, 0.0), (slit, 0.0), (slit, 0.5)):
        for edge in (-1.0, 1.0):
            for aside, passes in ((0.999e-3, True), (1.001e-3, False)):
                aim = place + edge * aside * in_plane + shift * along
                start = aim - 3e-7 * proper
                assert passes == flown(form, start, proper, 1e-6, steps)


@pytest.mark.parametrize("steps", [10, 31, 100])
def test_a_tube_of_a_length_is_met_from_outside_and_left_through_its_ends(steps: int) -> None:
    """Flying at its middle stops, flying by beyond its end or down its bore does not."""
    tube = wall("cylinder", radius="2 mm", length="6 mm", axis="x")

    def flies(start: list[float], proper: list[float]) -> bool:
        return flown(tube, np.array(start), np.array(proper), 1e-6, steps)

    assert not flies([2.9e-3, -5e-3, 0.0], [0.0, 1e4, 0.0])
    assert flies([3.1e-3, -5e-3, 0.0], [0.0, 1e4, 0.0])
    assert flies([-5e-3, 1.9e-3, 0.0], [1e4, 0.0, 0.0])
    assert flies([-5e-3, 2.1e-3, 0.0], [1e4, 0.0, 0.0])
    assert flies([0.0, 0.0, 0.0], [8e3, 3e3, 0.0])
    assert not flies([0.0, 0.0, 0.0], [1e4, 8e3, 0.0])
    assert not flies([-5e-3, 0.0, 0.0], [1e4, 3e3, 0.0])


@pytest.mark.parametrize("outward", [1.0, -1.0])
@pytest.mark.parametrize("normal", [1.0, -1.0])
def test_a_charge_that_begins_on_a_plane_has_not_met_it(outward: float, normal: float) -> None:
    """It leaves to either side, at once or when it is pushed, and is lost when it comes back."""
    form = wall("plane", at=["1 mm", "2 mm", "3 mm"], normal=[0, 0, normal])
    start = np.array([1e-3, 2e-3, 3e-3])
    assert flown(form, start, np.array([1e3, 0.0, outward * 1e4]), 1e-6, 10)
    assert flown(form, start, np.array([1e3, 0.0, 0.0]), 1e-6, 10)
    pull = field("uniform-electric", strength=quantity(outward * 1e3, "V/m"))
    pushed = to_end(loop(ions(start), 1e-6, 1e-7, walls=[form], fields=[pull]))
    assert 1 == pushed.charges.alive[0]
    speed = 0.5 * ION_RATIO * 1e3 * 1e-6  # back after the time of the flight
    thrown = loop(
        ions(start, [0.0, 0.0, -outward * speed]), 2e-6, 3e-8, walls=[form], fields=[pull]
    )
    found = events(to_end(thrown))
    assert 1e-6 == pytest.approx(found.time[0], rel=1e-10, abs=0.0)
    assert outward * speed == pytest.approx(found.velocity[0, 2], rel=1e-10, abs=0.0)


def test_a_parabola_is_met_exactly_in_whatever_step() -> None:
    """The cubic through a step's ends is the path itself in a steady pull.

    z = a t^2 / 2 for v << c: at 1 km/s gamma - 1 is 6e-12, of which the tolerances are small
    multiples.
    """
    pull = field("uniform-electric", strength="1 kV/m")
    acceleration = ION_RATIO * 1e3
    gap = 0.5 * acceleration * 1e-12
    form = wall("plane", at=["0", "0", quantity(gap, "m")])
    for step in (1.7e-6, 0.9e-6, 0.31e-6, 0.07e-6):
        moving = to_end(loop(ions([0.0, 0.0, 0.0]), 1.7e-6, step, walls=[form], fields=[pull]))
        found = events(moving)
        assert 1e-6 == pytest.approx(found.time[0], rel=1e-11, abs=0.0)
        assert acceleration * 1e-6 == pytest.approx(found.velocity[0, 2], rel=3e-11, abs=0.0)


def crossing_errors(scheme: str, steps: list[int]) -> tuple[Floats, Floats]:
    """Errors of time (over the period) and speed (relative) where a swing meets a plane.

    z = a cos(w t) in an axial well, met 0.13 periods after the start on the way down: in the
    middle of a step, where the path is known least, if a period has 50, 150, 250, ... steps.
    """
    period, height = 2e-5, 1e-3
    angle = 2.0 * math.pi * 0.13
    well = field("static-quadrupole", axial_frequency={"species": "barium", "value": "50 kHz"})
    form = wall("plane", at=["0", "0", quantity(height * math.cos(angle), "m")])
    speed = -height * 2.0 * math.pi / period * math.sin(angle)
    times, speeds = [], []
    for number in steps:
        start = ions([0.0, 0.0, height], mass=137.905)
        moving = loop(
            start, 0.2 * period, period / number, walls=[form], fields=[well], scheme=scheme
        )
        found = events(to_end(moving))
        times.append(abs(found.time[0] / period - 0.13))
        speeds.append(abs(found.velocity[0, 2] / speed - 1.0))
    return np.array(times), np.array(speeds)


@pytest.mark.parametrize(
    ("scheme", "orders"),
    [
        ("kick-drift-kick", (2.0, 2.0)),
        ("composed-4", (4.0, 4.0)),
        ("midpoint-rotation", (2.0, 4.0)),
    ],
)
def test_crossings_are_found_to_the_order_of_the_scheme(
    scheme: str, orders: tuple[float, float]
) -> None:
    """Fitted slope of the errors of time and of speed against the step, within 0.1.

    In the middle of a step, where midpoint-rotation knows the force, its speed errs less.
    """
    steps = [50, 150, 250, 350]
    for order, error in zip(orders, crossing_errors(scheme, steps), strict=True):
        slope = -np.polyfit(np.log(steps), np.log(error), 1)[0]
        assert order == pytest.approx(slope, abs=0.1)
        assert 1e-13 < error.min()
        assert error.max() < 1e-2
