"""The geometry of every wall and detector: where it is, which way it faces, where it is open."""

from __future__ import annotations

import math

import numpy as np
import pytest

from driftwell.forms import Form
from driftwell.kernels import kernel
from driftwell.walls.form import ABSORB, EFFECT, PASS, REFLECT, DetectorForm, WallForm
from driftwell.walls.table import (
    DETECTOR_KINDS,
    PARAMETERS,
    WALL_KINDS,
    level,
    normal,
    sides,
    stops,
    surface_table,
)
from tests.cases import DETECTORS, OFF_CENTRE, WALLS, detector, wall
from tests.moving import Floats

CENTRE = np.array([0.3e-3, -0.2e-3, 0.5e-3])
assert OFF_CENTRE == ["0.3 mm", "-0.2 mm", "0.5 mm"]


@kernel
def _look(kind, p, position, out_level, out_stops, out_normal):
    for i in range(position.shape[1]):
        x, y, z = position[0, i], position[1, i], position[2, i]
        out_level[i] = level(kind, p, x, y, z)
        out_stops[i] = stops(kind, p, x, y, z)
        out_normal[0, i], out_normal[1, i], out_normal[2, i] = normal(
            kind, p, x, y, z, 0.0, 0.0, 0.0
        )


def seen(form: WallForm | DetectorForm, position: Floats) -> tuple[Floats, Floats, Floats]:
    """Level (n,), whether it stops (n,), and normal (3, n) at places (3, n)."""
    table = surface_table([form], [])
    n = position.shape[1]
    out = np.full(n, np.nan), np.zeros(n, dtype=np.bool_), np.full((3, n), np.nan)
    _look(table.kind[0], table.parameter[0], np.ascontiguousarray(position), *out)
    return out


def at(form: WallForm | DetectorForm, *place: float) -> tuple[float, bool, list[float]]:
    """Level, whether it stops, and normal at one place, m."""
    level_there, stops_there, normal_there = seen(form, np.array([place]).T)
    return float(level_there[0]), bool(stops_there[0]), list(normal_there[:, 0])


def nearby(form: WallForm | DetectorForm, count: int = 400) -> Floats:
    """Places (3, n) on the surface: where the level changes sign on random lines, by bisection."""
    random = np.random.default_rng(3)
    one = CENTRE[:, None] + random.uniform(-8e-3, 8e-3, (3, count))
    two = CENTRE[:, None] + random.uniform(-8e-3, 8e-3, (3, count))
    crossing = np.sign(seen(form, one)[0]) != np.sign(seen(form, two)[0])
    one, two = one[:, crossing], two[:, crossing]
    side = np.sign(seen(form, one)[0])
    for _ in range(60):
        middle = 0.5 * (one + two)
        same = np.sign(seen(form, middle)[0]) == side
        one, two = np.where(same, middle, one), np.where(same, two, middle)
    assert one.shape[1] > 50
    return one


def names(forms: list[Form]) -> list[str]:
    """How the cases are called."""
    return [f"{type(form).__name__}: {form.name}" for form in forms]  # type: ignore[attr-defined]


@pytest.mark.parametrize("form", [*WALLS, *DETECTORS], ids=names([*WALLS, *DETECTORS]))
def test_normals_are_of_length_one_and_point_where_the_level_rises(
    form: WallForm | DetectorForm,
) -> None:
    """Along the numerical gradient of the level, at a few hundred places of each surface."""
    place = nearby(form)
    _, _, found = seen(form, place)
    h = 1e-7
    slope = np.array(
        [
            (seen(form, place + h * axis[:, None])[0] - seen(form, place - h * axis[:, None])[0])
            for axis in np.eye(3)
        ]
    )
    slope /= np.linalg.norm(slope, axis=0)
    assert np.linalg.norm(found, axis=0) == pytest.approx(1.0, abs=1e-14)
    assert slope == pytest.approx(found, abs=1e-6)


@pytest.mark.parametrize("form", [*WALLS, *DETECTORS], ids=names([*WALLS, *DETECTORS]))
def test_a_surface_is_packed_as_its_row_of_the_table(form: WallForm | DetectorForm) -> None:
    """Kind, effect, parameters, and zeros after them."""
    other = wall("sphere", name="before", radius="1 m")
    detects = isinstance(form, DetectorForm)
    table = surface_table([other], [form]) if detects else surface_table([other, form], [])
    packed = form.packed()
    assert packed.kind == table.kind[1]
    assert packed.effect == table.effect[1]
    row = [*packed.parameters, *[0.0] * (PARAMETERS - len(packed.parameters))]
    assert row == list(table.parameter[1])
    assert (PASS if detects else ABSORB) == table.effect[1]
    assert form.words()


def test_every_kind_stands_in_the_list_of_cases() -> None:
    """So that whatever is tested over the list is tested for all."""
    assert set(WALL_KINDS) == {type(form) for form in WALLS}
    assert set(DETECTOR_KINDS) == {type(form) for form in DETECTORS}
    assert {"absorb": ABSORB, "reflect": REFLECT} == EFFECT


def test_inside_of_closed_walls_is_positive() -> None:
    """The middle is inside, a place beyond the largest extent outside; walls say which enclose."""
    for form in WALLS:
        if form.closed():
            assert at(form, *CENTRE)[0] > 0.0
            assert at(form, 0.1, 0.2, -0.1)[0] < 0.0
    closed = {form.name for form in WALLS if form.closed()}
    assert {"cylinder", "cylinder along y", "sphere", "box"} == closed


@pytest.mark.parametrize(
    ("form", "place", "normal_there"),
    [
        (wall("cylinder", radius="2 mm"), (0.0, -2e-3, 9.0), [0.0, 1.0, 0.0]),
        (wall("cylinder", radius="2 mm", axis="x"), (9.0, 0.0, 2e-3), [0.0, 0.0, -1.0]),
        (wall("cylinder", radius="2 mm", axis="y"), (1.2e-3, 7.0, 1.6e-3), [-0.6, 0.0, -0.8]),
        (wall("sphere", radius="3 mm"), (1e-3, 2e-3, -2e-3), [-1 / 3, -2 / 3, 2 / 3]),
        (wall("box", size=["2 mm", "4 mm", "6 mm"]), (1e-3, 0.5e-3, 2e-3), [-1.0, 0.0, 0.0]),
        (wall("box", size=["2 mm", "4 mm", "6 mm"]), (0.5e-3, -2e-3, 2e-3), [0.0, 1.0, 0.0]),
        (wall("box", size=["2 mm", "4 mm", "6 mm"]), (0.5e-3, 1e-3, 3e-3), [0.0, 0.0, -1.0]),
        (
            wall("plane", at=["0", "0", "1 mm"], normal=[0, 3, -4]),
            (5.0, 4e-3, 4e-3),
            [0.0, 0.6, -0.8],
        ),
    ],
)
def test_places_known_to_lie_on_a_surface(
    form: WallForm, place: tuple[float, float, float], normal_there: list[float]
) -> None:
    """The level is zero there to rounding, a micrometre aside it is not, and the wall is solid."""
    found, solid, direction = at(form, *place)
    assert 0.0 == pytest.approx(found, abs=1e-17)
    assert solid
    assert normal_there == pytest.approx(direction, abs=1e-15)
    inward = np.array(place) + 1e-6 * np.array(direction)
    outward = np.array(place) - 1e-6 * np.array(direction)
    assert at(form, *inward)[0] > 1e-10
    assert at(form, *outward)[0] < -1e-10


@pytest.mark.parametrize("axis", ["x", "y", "z"])
def test_a_tube_of_a_length_ends_there(axis: str) -> None:
    """Solid within half its length of its centre, along its own axis."""
    form = wall("cylinder", radius="2 mm", axis=axis, length="6 mm", centre=OFF_CENTRE)
    k = "xyz".index(axis)
    for along, solid in ((2.999e-3, True), (-2.999e-3, True), (3.001e-3, False), (-3.1e-3, False)):
        place = CENTRE.copy()
        place[k] += along
        place[(k + 1) % 3] += 2e-3
        assert solid == at(form, *place)[1]
    assert at(wall("cylinder", radius="2 mm", axis=axis), 1e3, 1e3, 1e3)[1]


@pytest.mark.parametrize("normal_of", [(0, 0, 1), (1, 2, -2), (-3, 0, 4)])
def test_a_hole_is_round_about_its_place(normal_of: tuple[float, float, float]) -> None:
    """Open within its radius in the plane, in every direction of it."""
    form = wall("plane", at=OFF_CENTRE, normal=normal_of, hole={"radius": "1 mm"})
    across = np.array(normal_of) / np.linalg.norm(normal_of)
    first = np.cross(across, [0.0, 1.0, 0.0])
    first /= np.linalg.norm(first)
    second = np.cross(across, first)
    for angle in np.linspace(0.0, 2.0 * math.pi, 9):
        direction = math.cos(angle) * first + math.sin(angle) * second
        assert not at(form, *(CENTRE + 0.999e-3 * direction))[1]
        assert at(form, *(CENTRE + 1.001e-3 * direction))[1]


def test_a_slit_is_open_along_its_whole_length() -> None:
    """Half its width to both sides, endless along it."""
    form = wall(
        "plane",
        at=OFF_CENTRE,
        normal=[0, 3, 4],
        slit={"width": "1.2 mm", "along": [2, 0, 0]},
    )
    across = np.array([0.0, 0.8, -0.6])
    for along in (-0.5, 0.0, 1e-3):
        place = CENTRE + np.array([along, 0.0, 0.0])
        assert not at(form, *(place + 0.599e-3 * across))[1]
        assert not at(form, *(place - 0.599e-3 * across))[1]
        assert at(form, *(place + 0.601e-3 * across))[1]
        assert at(form, *(place - 0.601e-3 * across))[1]


def test_a_detector_of_a_radius_is_a_disc() -> None:
    """Sensitive within its radius, everywhere without one."""
    form = detector("plane", at=OFF_CENTRE, radius="2 mm")
    assert at(form, *(CENTRE + np.array([1.2e-3, 1.59e-3, 0.0])))[1]
    assert not at(form, *(CENTRE + np.array([1.2e-3, 1.61e-3, 0.0])))[1]
    assert at(detector("plane", at=OFF_CENTRE), 1e3, -1e3, 0.5e-3)[1]


def test_sides_are_told_for_every_surface_and_charge() -> None:
    """+1 where the level is positive, -1 where negative, 0 on the surface itself."""
    table = surface_table(
        [wall("sphere", radius="2 mm"), wall("plane", at=["0", "0", "1 mm"])],
        [detector("plane", at=["0", "0", "0"], normal=[-1, 0, 0])],
    )
    position = np.array([[0.0, 3e-3, 0.0], [0.0, 0.0, 0.0], [0.0, 1e-3, 2e-3]])
    found = np.full((3, 3), 9, dtype=np.int8)
    sides(table, position, found)
    assert [[1, -1, 0], [-1, 0, 1], [0, -1, 0]] == found.tolist()


@pytest.mark.parametrize(
    ("keys", "told"),
    [
        ({"normal": [0, 0, 0]}, "must have a length"),
        ({"hole": {"radius": "1 mm"}, "slit": {"width": "1 mm"}}, "not both"),
        ({"slit": {"width": "1 mm", "along": [0, 0, 1]}}, "must lie in the plane"),
        ({"slit": {"width": "1 mm", "along": [0, 0, 0]}}, "must lie in the plane"),
        ({"hole": {"radius": "0 mm"}}, "greater than 0"),
        ({"slit": {"width": "-1 mm"}}, "greater than 0"),
    ],
)
def test_a_plane_that_makes_no_sense_is_refused(keys: dict[str, object], told: str) -> None:
    """In words that say what it must be."""
    with pytest.raises(ValueError, match=told):
        wall("plane", at=["0", "0", "0"], **keys)


def test_walls_tell_what_they_are() -> None:
    """With their numbers, in millimetres."""
    told = {form.name: form.words() for form in WALLS}
    assert "tube along z, radius 3.5 mm, endless" == told["cylinder"]
    assert "tube along x, radius 4 mm, 6 mm long" == told["cylinder along x, of a length"]
    assert "hollow sphere, radius 5 mm" == told["sphere"]
    assert "hollow box, 6 x 8 x 10 mm" == told["box"]
    assert "plane through (0.3, -0.2, 0.5) mm, without opening" == told["plane"]
    assert told["plane with a hole"].endswith("with a hole of radius 1 mm")
    assert told["plane with a slit"].endswith("with a slit 1.2 mm wide")
    assert DETECTORS[1].words().endswith("(0.3, -0.2, 0.5) mm, within 2 mm")
