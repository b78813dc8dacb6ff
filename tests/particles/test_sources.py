"""Sources: how many charges are born, when, where, and how they leave."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import numpy as np
import pytest

from driftwell.constants import ATOMIC_MASS, BOLTZMANN, ELEMENTARY_CHARGE
from driftwell.forms.body import Body
from driftwell.forms.faults import read_form
from driftwell.geometry.body_table import body_table
from driftwell.geometry.distance import distances
from driftwell.geometry.outline import arc, outline, rectangle
from driftwell.geometry.solid import Extruded, Revolved, Solid
from driftwell.particles.source import Setting, Source
from driftwell.particles.unborn import Unborn

BODY = Body("heavy", 100.0 * ATOMIC_MASS, ELEMENTARY_CHARGE)
WHOLE = 1e-3
DISC = {"kind": "disc", "radius": "2 mm"}
FLAT = {"kind": "flat", "stop": "0.5 ms"}


def setting(folder: Path = Path(), seed: int = 1) -> Setting:
    return Setting(seed, WHOLE, {"heavy": BODY}, folder)


def source(**keys: Any) -> Source:
    """A source of heavy ions."""
    table = {"name": "gun", "species": "heavy", "emitter": DISC} | keys
    found, faults = read_form(Source, table)
    assert found is not None, faults
    return found


def loaded(solids: tuple[Solid, ...] = (), seed: int = 1, **keys: Any) -> Unborn:
    return source(**keys).load(setting(seed=seed), 10, 3, 0, solids)


def test_a_current_brings_the_number_of_charges_it_stands_for() -> None:
    """1 pA for 0.8 ms is 4993.2 charges; even spacing has that number, in equal intervals."""
    born = loaded(current="1 pA", stop="0.8 ms", weight=1, spacing="even").particles
    assert round(1e-12 * 0.8e-3 / ELEMENTARY_CHARGE) == len(born)
    gaps = np.diff(born.birth_time)
    assert 0.8e-3 / len(born) == pytest.approx(gaps, rel=1e-9, abs=0.0)
    assert list(range(10, 10 + len(born))) == born.id.tolist()


def test_random_births_have_the_shot_noise_of_independent_ones() -> None:
    """Numbers in equal times scatter as Poisson's: variance equal to the mean (200 runs)."""
    numbers = [
        np.histogram(
            loaded(seed=seed, current="0.1 pA", weight=1).particles.birth_time,
            bins=20,
            range=(0.0, WHOLE),
        )[0]
        for seed in range(200)
    ]
    mean = 1e-13 * WHOLE / ELEMENTARY_CHARGE / 20
    assert mean == pytest.approx(np.mean(numbers), rel=0.01, abs=0.0)
    # the variance of 4000 such numbers is known to 1/sqrt(2000), 2.3 %
    assert mean == pytest.approx(np.var(numbers), rel=0.07, abs=0.0)
    whole = np.sum(numbers, axis=1)
    assert 20 * mean == pytest.approx(np.var(whole), rel=0.3, abs=0.0)


def test_a_current_in_time_is_followed() -> None:
    """A ramp from nothing: births by t are (t/T)^2 of all."""
    ramp = {"kind": "ramp", "before": "0 A", "after": "1 pA", "start": "0 s", "end": "1 ms"}
    time = loaded(current=ramp, count=1000, spacing="even").particles.birth_time
    assert WHOLE * np.sqrt((np.arange(1000) + 0.5) / 1000) == pytest.approx(time, rel=1e-9, abs=0.0)
    wave = {"amplitude": "1 pA", "offset": "1 pA", "frequency": "3 kHz"}
    time = loaded(current=wave, count=3000, spacing="even").particles.birth_time
    expected = time + np.sin(2 * np.pi * 3e3 * time) / (2 * np.pi * 3e3)
    parts = (np.arange(3000) + 0.5) / 3000 * WHOLE
    assert parts == pytest.approx(expected, rel=0.0, abs=1e-6 * WHOLE)


def test_a_gaussian_pulse_comes_as_one_and_the_rest_of_it_after_the_end_does_not() -> None:
    profile = {"kind": "gaussian", "centre": "0.5 ms", "rms": "50 us"}
    time = loaded(count=20000, profile=profile).particles.birth_time
    assert 20000 == len(time)
    assert 0.5e-3 == pytest.approx(time.mean(), rel=0.0, abs=3 * 50e-6 / np.sqrt(20000))
    assert 50e-6 == pytest.approx(time.std(), rel=3 / np.sqrt(40000), abs=0.0)
    late = {"kind": "gaussian", "centre": "1 ms", "rms": "50 us"}
    assert 500 == len(loaded(count=1000, spacing="even", profile=late))


def test_a_tabulated_pulse_follows_its_table() -> None:
    """A triangle, two thirds of which rise."""
    profile = {"kind": "table", "times": ["0 ms", "0.4 ms", "0.6 ms"], "values": [0, 2, 0]}
    time = loaded(count=600, spacing="even", profile=profile).particles.birth_time
    part = (np.arange(600) + 0.5) / 600
    rising = 0.4e-3 * np.sqrt(part * 0.6 / 0.4)
    falling = 0.6e-3 - 0.2e-3 * np.sqrt((1.0 - part) * 0.6 / 0.2)
    assert np.where(part < 2 / 3, rising, falling) == pytest.approx(time, rel=1e-9, abs=0.0)


def test_weights_follow_as_those_of_clouds_do() -> None:
    assert 2.5 == loaded(count=4, weight=2.5, profile=FLAT).particles.weight[0]
    whole = f"{1000 * ELEMENTARY_CHARGE!r} C"
    assert 250.0 == pytest.approx(
        loaded(count=4, total_charge=whole, profile=FLAT).particles.weight, rel=1e-12, abs=0.0
    )
    assert 50 == len(loaded(weight=20, total_charge=whole, profile=FLAT))
    current = loaded(current="1 nA", count=100, spacing="even").particles
    assert 1e-9 * WHOLE == pytest.approx(
        ELEMENTARY_CHARGE * current.weight.sum(), rel=1e-12, abs=0.0
    )


def test_discs_and_rings_emit_evenly_over_their_area() -> None:
    """<r^2> = (a^2 + b^2)/2 for a ring of radii a and b; all on the side of the axis."""
    axis = np.array([0.0, 0.6, 0.8])
    for inner, kind in ((0.0, "disc"), (1e-3, "ring")):
        emitter = {"kind": kind, "radius": "2 mm", "axis": axis.tolist()}
        emitter |= {"inner_radius": "1 mm"} if inner else {}
        born = loaded(emitter=emitter, count=20000, profile=FLAT)
        place = born.particles.position
        assert (axis @ place > 0.0).all()
        assert (axis @ place < 1e-11).all()
        square = (place**2).sum(axis=0)
        assert (inner**2 + 4e-6) / 2 == pytest.approx(square.mean(), rel=0.02, abs=0.0)
        assert axis[:, None] + np.zeros((3, 20000)) == pytest.approx(
            born.normal, rel=1e-14, abs=1e-16
        )


ROD = Revolved(rectangle((0.0, 0.0), (3e-3, 10e-3)))


def test_an_electrode_emits_from_the_part_that_is_asked_for() -> None:
    """The end of a rod within 1 mm of the axis, as a disc; its area is pi r^2."""
    part = {"r": "1 mm", "z": ["9 mm", "11 mm"]}
    emitter = {"kind": "electrode", "electrode": "rod", "part": part}
    gun = source(emitter=emitter, count=5000, profile=FLAT)
    born = gun.load(setting(), 0, 0, 0, (ROD,))
    assert np.pi * 1e-6 == pytest.approx(gun.emitter.area((ROD,)), rel=2e-3, abs=0.0)
    x, y, z = born.particles.position
    assert 0.5e-6 == pytest.approx((x**2 + y**2).mean(), rel=0.03, abs=0.0)
    assert 10e-3 == pytest.approx(z, rel=1e-8, abs=0.0)
    assert (z > 10e-3).all()
    assert [[0.0, 0.0, 1.0]] * 5000 == pytest.approx(born.normal.T, rel=0.0, abs=1e-12)


def test_a_curved_electrode_emits_from_its_very_surface_along_its_normal() -> None:
    """A ball of 2 mm: places on it, to a millionth of it; normals radial; evenly, 4 pi r^2."""
    half = arc((0.0, -2e-3), (0.0, 2e-3), (0.0, 0.0), np.pi)
    ball = Revolved(outline([[half]], solid=True))
    emitter = {"kind": "electrode", "electrode": "ball"}
    gun = source(emitter=emitter, count=5000, profile=FLAT)
    born = gun.load(setting(), 0, 0, 0, (ball,))
    place = born.particles.position
    radius = np.sqrt((place**2).sum(axis=0))
    assert 2e-3 == pytest.approx(radius, rel=1e-6, abs=0.0)
    away, _ = distances(body_table([(ball,)]), place.T)
    assert (away > 0.0).all()
    assert place / radius == pytest.approx(born.normal, rel=0.0, abs=1e-6)
    assert 4 * np.pi * 4e-6 == pytest.approx(gun.emitter.area((ball,)), rel=3e-3, abs=0.0)
    for axis in range(3):
        assert 4e-6 / 3 == pytest.approx((place[axis] ** 2).mean(), rel=0.05, abs=0.0)


def test_a_thin_sheet_emits_from_the_face_that_is_named() -> None:
    """And is refused where none is."""
    sheet = Extruded(rectangle((-1e-3, -1e-3), (1e-3, 1e-3)), 0.0)
    emitter: dict[str, Any] = {"kind": "electrode", "electrode": "sheet"}
    with pytest.raises(Exception, match="`facing` must say which face"):
        loaded((sheet,), emitter=emitter, count=10, profile=FLAT)
    born = loaded((sheet,), emitter=emitter | {"facing": [0, 0, -1]}, count=100, profile=FLAT)
    assert (born.particles.position[2] < 0.0).all()
    assert -1.0 == pytest.approx(born.normal[2], rel=1e-14, abs=0.0)


def test_thermal_emission_is_weighted_with_the_flux() -> None:
    """Mean normal velocity sqrt(pi kT/2m), energy 2 kT, cosine 2/3, as the NRL formulary has them.

    The density sin(2 theta) of the angle makes cos^2 uniform. 1e5 ions of 100 u at 500 K: half a
    per cent, four standard deviations.
    """
    normal = np.array([0.48, -0.6, 0.64])
    emitter = DISC | {"axis": normal.tolist()}
    born = loaded(emitter=emitter, count=100_000, profile=FLAT, emission_temperature="500 K")
    velocity = born.particles.velocity
    out = normal @ velocity
    assert out.min() > 0.0
    assert 255.54184907892187 == pytest.approx(out.mean(), rel=5e-3, abs=0.0)
    square = (velocity**2).sum(axis=0)
    energy = 0.5 * BODY.mass * square.mean() / ELEMENTARY_CHARGE
    assert 0.08617333262145178 == pytest.approx(energy, rel=5e-3, abs=0.0)
    cosine = out / np.sqrt(square)
    assert 2 / 3 == pytest.approx(cosine.mean(), rel=5e-3, abs=0.0)
    assert 1 / 12 == pytest.approx(np.var(cosine**2), rel=2e-2, abs=0.0)
    across = velocity - out * normal[:, None]
    thermal = BOLTZMANN * 500.0 / BODY.mass
    assert 2 * thermal == pytest.approx((across**2).sum(axis=0).mean(), rel=1e-2, abs=0.0)


def test_a_file_gives_times_places_and_velocities(tmp_path: Path) -> None:
    """In the order of time, whatever the order of rows; those after the end are left out."""
    (tmp_path / "births.csv").write_text(
        "t [us], x [mm], y [mm], z [mm], vx [m/s], vy [m/s], vz [m/s]\n"
        "30, 1, 2, 3, 0, 0, 5\n10, 4, 5, 6, 1, 0, 0\n2000, 0, 0, 0, 0, 0, 0\n"
    )
    gun = source(emitter={"kind": "file", "path": "births.csv"}, weight=7)
    born = gun.load(setting(tmp_path), 0, 0, 0).particles
    assert [10e-6, 30e-6] == pytest.approx(born.birth_time, rel=1e-12, abs=0.0)
    assert [[4e-3, 1e-3], [5e-3, 2e-3], [6e-3, 3e-3]] == pytest.approx(
        born.position, rel=1e-12, abs=0.0
    )
    assert [0.0, 5.0] == pytest.approx(born.velocity[2], rel=1e-12, abs=0.0)
    assert [7.0, 7.0] == born.weight.tolist()


@pytest.mark.parametrize(
    ("keys", "told"),
    [
        ({}, "needs a `current`, or a `profile`"),
        ({"current": "1 pA"}, "needs either `weight` or `count`"),
        ({"current": "1 pA", "count": 3, "profile": FLAT}, "not both"),
        ({"profile": FLAT, "weight": 3}, "needs `count`"),
        ({"profile": FLAT, "count": 3, "stop": "1 ms"}, "go with a `current`"),
        ({"profile": FLAT, "count": 3, "space_charge_limited": True}, "needs a `current`"),
        (
            {"current": "1 A", "count": 3, "space_charge_limited": True}
            | {"emitter": {"kind": "point"}},
            "needs an emitter with an area",
        ),
        ({"emitter": {"kind": "file", "path": "a.csv"}, "count": 3}, "leave out `count`"),
        ({"profile": FLAT, "count": 3, "motion": {"rotation": "1 kHz"}}, "a cloud as a whole"),
        (
            {"profile": {"kind": "gaussian", "centre": "1 us", "rms": "1 us"}, "count": 3},
            "at least 5 `rms`",
        ),
    ],
)
def test_what_does_not_go_together_is_said(keys: dict[str, Any], told: str) -> None:
    table = {"name": "gun", "species": "heavy", "emitter": DISC} | keys
    _, faults = read_form(Source, table)
    assert told in " ".join(fault.needed for fault in faults)


@pytest.mark.parametrize(
    ("keys", "told"),
    [
        ({"current": {"amplitude": "1 A", "frequency": "1 kHz"}, "count": 3}, "never be negative"),
        ({"current": "0 A", "count": 3}, "brings no charge"),
        ({"current": "1 A", "count": 3, "start": "2 ms"}, "before the end of the run"),
        ({"profile": FLAT, "count": 3, "total_charge": "-1 pC"}, "must be positive"),
        ({"current": "1 A", "weight": 1}, "raise `weight`"),
        ({"current": "1 pA", "weight": 1e9, "spacing": "even"}, "lower `weight`"),
        ({"profile": FLAT, "count": 3, "emission_temperature": "1e13 K"}, "must be at most"),
    ],
)
def test_what_cannot_be_is_said(keys: dict[str, Any], told: str) -> None:
    faults = source(**keys).faults(setting())
    assert told in " ".join(fault.needed for fault in faults)
