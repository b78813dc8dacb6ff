"""Where, when and whether charges meet the surfaces of electrodes, against lines and circles."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np
import pytest

from driftwell.constants import SPEED_OF_LIGHT
from driftwell.geometry.outline import circle, rectangle
from driftwell.geometry.solid import Extruded, Frame, Mesh, Revolved, Solid
from driftwell.stepping.loop import TimeLoop
from tests.cases import detector, field, wall
from tests.geometry.solids import FRAME, SOLIDS, ball, brick, mesh_brick, star_mesh
from tests.moving import ION_RATIO, Floats, events, ions, loop, to_end

SPEED = 1e5
VELOCITY = SPEED / math.sqrt(1.0 + (SPEED / SPEED_OF_LIGHT) ** 2)
"""m/s, proper and not."""
PLACE = 1e-12
"""m, of bodies of 1 m: of places and, times the speed, of times."""


def rays(count: int, seed: int, size: float = 0.6) -> tuple[Floats, Floats]:
    """Starts on a sphere of 2.5 m and unit directions towards the middle."""
    random = np.random.default_rng(seed)
    start = random.normal(size=(count, 3))
    start *= 2.5 / np.linalg.norm(start, axis=1, keepdims=True)
    aim = random.uniform(-size, size, (count, 3)) - start
    return start, aim / np.linalg.norm(aim, axis=1, keepdims=True)


def flown(
    start: Floats, along: Floats, bodies: Sequence[Sequence[Solid]], steps: float, way: float = 4.0
) -> TimeLoop:
    """Free charges that fly so far, with so many steps to 1 m."""
    return to_end(loop(ions(start, SPEED * along), way / SPEED, 1.0 / SPEED / steps, bodies=bodies))


def expect(solid: Solid, start: Floats, along: Floats, way: Floats, steps: float) -> None:
    """All charges with a finite `way` to a body are lost there; no others."""
    moving = flown(start, along, [[solid]], steps)
    hit = np.flatnonzero(np.isfinite(way))
    assert len(hit) > 20
    assert (np.isfinite(way) == (moving.charges.alive == 0)).all()
    found = events(moving)
    order = np.argsort(found.id)
    assert (hit == found.id[order]).all()
    expected = start[hit] + way[hit, None] * along[hit]
    assert np.abs(expected - found.position[order]).max() < PLACE
    # at grazing incidence a last bit across is many along
    assert np.abs(way[hit] - found.time[order] * VELOCITY).max() < 100.0 * PLACE


def to_ball(start: Floats, along: Floats, centre: Floats, radius: float) -> Floats:
    """Way to a sphere, inf for none: the quadratic's lesser root."""
    away = start - centre
    b = np.einsum("ij,ij->i", away, along)
    c = np.einsum("ij,ij->i", away, away) - radius**2
    root = b * b - c
    with np.errstate(invalid="ignore"):
        return np.where(root > 0.0, -b - np.sqrt(root), np.inf)


def to_brick(start: Floats, along: Floats, half: Floats) -> Floats:
    """Way to a box about the origin, inf for none: between the last entry and the first exit."""
    near = (-np.sign(along) * half - start) / along
    far = (np.sign(along) * half - start) / along
    first, last = near.max(axis=1), far.min(axis=1)
    return np.where(first < last, first, np.inf)


def to_mesh(start: Floats, along: Floats, mesh: Mesh) -> Floats:
    """Way to the nearest of all triangles, inf for none.

    T. Moeller and B. Trumbore, J. Graphics Tools 2 (1997) 21 (from memory).
    """
    best = np.full(len(start), np.inf)
    for a, b, c in mesh.vertices[mesh.triangles]:
        p = np.cross(along, c - a)
        det = p @ (b - a)
        u = np.einsum("ij,ij->i", start - a, p) / det
        q = np.cross(start - a, b - a)
        v = np.einsum("ij,ij->i", along, q) / det
        t = q @ (c - a) / det
        meets = (u >= 0) & (v >= 0) & (u + v <= 1) & (t > 0)
        best = np.where(meets, np.minimum(best, t), best)
    return best


@pytest.mark.parametrize("steps", [0.3, 2.7, 20.0])
def test_a_ball_is_met_where_a_line_enters_it(steps: float) -> None:
    start, along = rays(200, 1)
    expect(ball(0.7, FRAME), start, along, to_ball(start, along, FRAME.origin, 0.7), steps)


@pytest.mark.parametrize("steps", [0.3, 20.0])
@pytest.mark.parametrize("kind", ["extruded", "mesh", "open mesh"])
def test_a_box_is_met_on_the_face_a_line_enters_by(kind: str, steps: float) -> None:
    half = np.array([0.5, 0.3, 0.8])
    start, along = rays(200, 2)
    solid: Solid = brick((0.5, 0.3, 0.8), FRAME)
    if kind != "extruded":
        solid = mesh_brick((0.5, 0.3, 0.8), FRAME, closed=kind == "mesh")
    way = to_brick(FRAME.inward(start), along @ FRAME.axes.T, half)
    expect(solid, start, along, way, steps)


@pytest.mark.parametrize("steps", [0.3, 20.0])
def test_a_bumpy_mesh_is_met_on_the_first_triangle_on_the_way(steps: float) -> None:
    mesh = star_mesh(np.random.default_rng(3), 7, 11)
    start, along = rays(300, 3, 1.0)
    expect(mesh, start, along, to_mesh(start, along, mesh), steps)


@pytest.mark.parametrize("steps", [0.3, 20.0])
def test_a_thin_sheet_is_met_in_the_midst_of_a_step_and_missed_beside(steps: float) -> None:
    start, along = rays(300, 4, 1.2)
    own, course = FRAME.inward(start), along @ FRAME.axes.T
    way = -own[:, 2] / course[:, 2]
    foot = own + way[:, None] * course
    way = np.where((np.hypot(foot[:, 0], foot[:, 1]) < 0.8) & (way > 0.0) & (way < 4.0), way, np.inf)
    expect(SOLIDS["sheet"], start, along, way, steps)


@pytest.mark.parametrize("steps", [0.3, 20.0])
def test_a_plate_stops_what_misses_its_hole(steps: float) -> None:
    start, along = rays(300, 5, 0.9)
    way = to_brick(start, along, np.array([1.0, 1.0, 0.05]))
    x, y, z = (start + np.where(np.isfinite(way), way, 0.0)[:, None] * along).T
    bore = np.isfinite(way) & (np.hypot(x - 0.2, y - 0.1) < 0.4) & (np.abs(z) > 0.0499)
    # through the hole's mouth: stopped by its side, unless that is passed at the far face
    ax, ay = along[:, 0], along[:, 1]
    bx, by = x - 0.2, y - 0.1
    a, b, c = ax * ax + ay * ay, bx * ax + by * ay, bx * bx + by * by - 0.16
    with np.errstate(invalid="ignore"):
        further = (-b + np.sqrt(b * b - a * c)) / a
    inside = np.abs(z + further * along[:, 2]) < 0.05
    way = np.where(bore, np.where(inside, way + further, np.inf), way)
    expect(SOLIDS["plate with a hole"], start, along, way, steps)


@pytest.mark.parametrize("depth", [1e-4, 1e-8, 1e-10])
def test_a_ball_is_grazed_where_a_line_that_just_cuts_it_enters(depth: float) -> None:
    """The cut is 2 sqrt(2 depth) long; the way to it is sensitive by 1 / sqrt(2 depth)."""
    start = np.array([[-2.0, 1.0 - depth, 0.0], [-2.0, 1.0 + depth, 0.0]])
    along = np.array([[1.0, 0.0, 0.0]] * 2)
    for steps in (0.35, 3.3, 40.0):
        moving = flown(start, along, [[ball(1.0)]], steps)
        assert [0, 1] == list(moving.charges.alive)
        found = events(moving)
        half = math.sqrt(2.0 * depth - depth**2)
        assert -half == pytest.approx(found.position[0, 0], abs=PLACE / math.sqrt(2.0 * depth))
        assert 1.0 - depth == found.position[0, 1]
        assert abs(np.linalg.norm(found.position[0]) - 1.0) < PLACE


@pytest.mark.parametrize("slope", [1e-2, 1e-4, 1e-6])
@pytest.mark.parametrize("thin", [False, True])
def test_a_plate_is_met_at_a_small_slope(slope: float, thin: bool) -> None:
    plate = Extruded(rectangle((-5.0, -1.0), (5.0, 1.0)), 0.0 if thin else 0.25)
    height = 0.0 if thin else 0.25
    start = np.array([[-1.0, 0.0, height + 1.3 * slope]])
    along = np.array([[1.0, 0.0, -slope]]) / math.hypot(1.0, slope)
    for steps in (0.4, 7.0):
        found = events(flown(start, along, [[plate]], steps))
        assert 0.3 == pytest.approx(found.position[0, 0], abs=PLACE / slope)
        assert abs(found.position[0, 2] - height) < PLACE


@pytest.mark.parametrize("steps", [20, 100])
def test_a_circle_about_a_magnet_ends_on_a_ball(steps: int) -> None:
    """Where two circles cross; the path errs by order h^6, at 20 steps a turn by 1e-6 of it."""
    b, turn = 0.1, 0.3
    rate = ION_RATIO * b
    u = turn * rate
    rate /= math.sqrt(1.0 + (u / SPEED_OF_LIGHT) ** 2)
    # clockwise about the origin from (0, turn): x = turn sin(rate t), y = turn cos(rate t)
    target, size = np.array([turn + 0.1, -0.2, 0.0]), 0.25
    moving = to_end(
        loop(
            ions([[0.0, turn, 0.0]], [[u, 0.0, 0.0]]),
            2.0 * math.pi / rate,
            2.0 * math.pi / rate / steps,
            fields=[field("uniform-magnetic", strength=f"{b} T")],
            bodies=[[ball(size, Frame(target))]],
        )
    )
    found = events(moving)
    gap = math.hypot(*target)
    reach = (gap**2 + turn**2 - size**2) / (2.0 * gap * turn)
    middle = math.atan2(target[0], target[1])
    angle = middle - math.acos(reach)
    tolerance = 0.7 * (2.0 * math.pi / steps) ** 6 / 720.0 + 1e-12
    assert angle == pytest.approx(rate * found.time[0], abs=10.0 * tolerance)
    expected = [turn * math.sin(angle), turn * math.cos(angle), 0.0]
    assert expected == pytest.approx(found.position[0], abs=3.0 * tolerance)
    assert abs(np.linalg.norm(found.position[0] - target) - size) < PLACE


def test_what_begins_on_a_surface_may_leave_it() -> None:
    """Outward, also at rest in a field, it flies; inward it is lost at once, where it is."""
    plate = Extruded(rectangle((-1.0, -1.0), (1.0, 1.0)), 0.1)
    sheet = Extruded(rectangle((-1.0, -1.0), (1.0, 1.0)), 0.0, Frame(np.array([0.0, 0.0, 3.0])))
    start = np.array([[0.1, 0.2, 0.1]] * 3 + [[0.1, 0.2, 3.0]] * 2)
    proper = SPEED * np.array([[0, 0, 1.0], [0.6, 0, -0.8], [0, 0, 0], [0, 0, 1], [0, 0, -1.0]])
    up = field("uniform-electric", strength="100 V/m")
    for step in (1e-5, 1.3e-7):
        moving = to_end(loop(ions(start, proper), 1e-5, step, fields=[up], bodies=[[plate], [sheet]]))
        assert [1, 0, 1, 1, 1] == list(moving.charges.alive)
        found = events(moving)
        assert [0] == list(found.surface)
        assert abs(found.time[0]) < 1e-15
        assert start[1] == pytest.approx(found.position[0], abs=PLACE)


def test_what_leaves_a_surface_and_falls_back_is_lost() -> None:
    """Up and down again within one step, or within many."""
    plate = Extruded(rectangle((-1.0, -1.0), (1.0, 1.0)), 0.1)
    down = field("uniform-electric", strength="100 V/m", along=[0, 0, -1])
    pull = ION_RATIO * 100.0
    rise = 1e4
    for step in (1e-4, 1e-6):
        moving = to_end(
            loop(
                ions([[0.0, 0.0, 0.1]], [[1e3, 0.0, rise]]),
                3.0 * rise / pull,
                step,
                fields=[down],
                bodies=[[plate]],
            )
        )
        found = events(moving)
        assert 2.0 * rise / pull == pytest.approx(found.time[0], rel=1e-9)
        assert [2e3 * rise / pull, 0.0, 0.1] == pytest.approx(found.position[0], rel=1e-9)


def test_the_first_surface_on_the_way_takes_the_charge() -> None:
    """Walls and electrodes on one line, all within a step, one nearer than the other."""
    plate = Extruded(rectangle((-1.0, -1.0), (1.0, 1.0)), 0.05)
    for height, surface in (("0.3 m", 0), ("-0.3 m", 2)):
        moving = to_end(
            loop(
                ions([[0.0, 0.0, 1.0]], [[0.0, 0.0, -SPEED]]),
                3.0 / SPEED,
                1.5 / SPEED,
                walls=[wall("plane", at=["0 m", "0 m", height])],
                detectors=[detector("plane", at=["0 m", "0 m", "0.2 m"])],
                bodies=[[plate]],
            )
        )
        found = events(moving)
        passed = [0] if surface == 0 else [1, 2]
        assert passed == list(found.surface)


def test_a_charge_turned_back_by_a_wall_meets_an_electrode_in_the_same_step() -> None:
    disc = Revolved(rectangle((0.0, 0.4), (0.5, 0.5)))
    moving = to_end(
        loop(
            ions([[0.0, 0.0, 0.0]], [[0.0, 0.0, -SPEED]]),
            2.0 / SPEED,
            2.0 / SPEED,
            walls=[wall("plane", at=["0 m", "0 m", "-0.1 m"], effect="reflect")],
            bodies=[[], [disc]],
        )
    )
    found = events(moving)
    assert [2] == list(found.surface)
    assert 0.6 / VELOCITY == pytest.approx(found.time[0], rel=1e-12)
    assert [0.0, 0.0, 0.4] == pytest.approx(found.position[0], abs=PLACE)
    assert [0.0, 0.0, SPEED] == pytest.approx(found.velocity[0], rel=1e-12)


def wandering(count: int, first: int | None = None) -> TimeLoop:
    """Charges that swing about among several bodies, some of which they meet; the first of them."""
    random = np.random.default_rng(7)
    place = random.normal(scale=0.2, size=(count, 3))
    proper = random.normal(scale=6e3, size=(count, 3))
    return loop(
        ions(place[:first], proper[:first]),
        4e-4,
        1e-6,
        fields=[field("uniform-magnetic", strength="0.02 T")],
        bodies=[
            [Revolved(rectangle((1.0, -0.3), (1.1, 0.3)))],
            [brick((0.2, 0.2, 0.01), Frame(np.array([0.0, 0.9, 1.0]), FRAME.axes))],
            [Extruded(circle((0.5, -0.8), 0.1), np.inf)],
            [Extruded(rectangle((-2.0, -2.0), (2.0, 2.0)), 0.0, Frame(np.array([0, 0, -1.2])))],
        ],
    )


def test_clearances_decide_nothing() -> None:
    """Distances asked for in every step, or only where they are used up: the same bits."""
    found = []
    for forget in (False, True):
        moving = wandering(200)

        def keep_going(forget: bool = forget, moving: TimeLoop = moving) -> bool:
            moving._budget = 3
            if forget:
                moving.work.clearance[:] = 0.0
            return True

        to_end(moving, keep_going)
        told = events(moving)
        assert 30 < len(told.id) < 190
        assert {0, 2, 3} <= set(told.surface)
        found.append(
            [each.tobytes() for each in (told.id, told.time, told.position, told.velocity)]
            + [moving.particles.position.tobytes(), moving.work.total.tobytes()]
        )
    assert found[0] == found[1]


def test_blocks_of_many_charges_meet_what_few_meet() -> None:
    many = to_end(wandering(17000))
    told = events(many)
    own = events(to_end(wandering(17000, 3000)))
    mine = told.id < 3000
    order, among = np.argsort(own.id), np.argsort(told.id[mine])
    for name in ("id", "surface", "position", "time"):
        assert (getattr(own, name)[order] == getattr(told, name)[mine][among]).all()
