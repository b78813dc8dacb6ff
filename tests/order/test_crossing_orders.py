"""How well detectors and walls know where, when and how fast they are met.

Inside a step the path is a polynomial through what is known at both ends, so the error at a
crossing has an order of its own, on top of that of the motion.
"""

from __future__ import annotations

import math
from pathlib import Path
from typing import Any, NamedTuple

import numpy as np
import pytest

from driftwell.constants import ELECTRON_MASS, ELEMENTARY_CHARGE, SPEED_OF_LIGHT
from tests.running import Floats, carried_out, points, species

ION = 2.29e-25  # kg
RATE = 2.0 * math.pi * 80e3  # rad/s
PERIOD = 1.0 / 80e3  # s
AMPLITUDE = 1e-4 * np.linspace(0.6, 3.0, 200)
"""Many, so that crossings fall everywhere within a step, m."""
DETECTOR, WALL = 0.3e-4, -0.5e-4  # m


class Errors(NamedTuple):
    """rms errors: times in radians, velocities in those of the smallest swing."""

    detector_time: float
    detector_velocity: float
    wall_time: float
    wall_velocity: float


def swinging(folder: Path, scheme: str, steps: int, **surfaces: Any) -> Any:
    """Ions that begin at rest at their largest z, all independent; `steps` in a period."""
    start = np.zeros((AMPLITUDE.size, 3))
    start[:, 2] = AMPLITUDE
    return carried_out(
        folder,
        PERIOD,
        species={"ion": species(ION)},
        cloud=[points("swing", "ion", start)],
        field=[
            {
                "name": "caps",
                "kind": "static-quadrupole",
                "axial_frequency": {"species": "ion", "value": "80 kHz"},
            }
        ],
        coulomb={"method": "off"},
        stepping={"scheme": scheme, "step": f"{PERIOD / steps!r} s"},
        **surfaces,
    )


def plane(name: str, height: float, **keys: Any) -> dict[str, Any]:
    """A surface across z."""
    return {"name": name, "kind": "plane", "at": ["0 m", "0 m", f"{height!r} m"], **keys}


def found_errors(folder: Path, scheme: str, steps: int) -> Errors:
    """Against z = A cos(w t): every ion passes the detector once, then it ends on the wall."""
    found = swinging(
        folder,
        scheme,
        steps,
        detector=[plane("gate", DETECTOR)],
        wall=[plane("plate", WALL)],
        ending="all lost",
    )
    errors = []
    for rows, height in ((found.crossings(), DETECTOR), (found.losses(), WALL)):
        assert sorted(rows["id"]) == list(range(AMPLITUDE.size))
        amplitude = AMPLITUDE[rows["id"]]
        phase = np.arccos(height / amplitude)
        assert height == pytest.approx(rows["position"][:, 2], abs=1e-18)
        speed = -amplitude * RATE * np.sin(phase)
        errors.append(rms(RATE * rows["time"] - phase))
        errors.append(rms((rows["velocity"][:, 2] - speed) / (AMPLITUDE[0] * RATE)))
    return Errors(*errors)


def rms(values: Floats) -> float:
    return float(np.sqrt(np.mean(values**2)))


def order_of(steps: tuple[int, ...], errors: list[float]) -> float:
    """Slope of the logarithm of the error against that of the step."""
    return float(-np.polyfit(np.log(steps), np.log(errors), 1)[0])


@pytest.mark.parametrize(
    ("scheme", "steps", "time", "velocity"),
    [
        ("kick-drift-kick", (160, 320, 640), 2, 2),
        ("midpoint-rotation", (160, 320, 640), 2, 2),
        ("composed-4", (100, 160, 250), 4, 4),
        ("composed-6", (100, 160, 250), 6, 4),
    ],
)
def test_crossings_are_found_to_the_order_of_the_scheme(
    tmp_path: Path, scheme: str, steps: tuple[int, ...], time: int, velocity: int
) -> None:
    """Time and place to the scheme's order within 0.1, velocity to it up to order 4.

    The error in velocity depends on where within a step a crossing falls, which no number of ions
    spreads quite evenly: 0.2.
    """
    errors = [found_errors(tmp_path, scheme, count) for count in steps]
    orders = [order_of(steps, list(column)) for column in zip(*errors, strict=True)]
    assert [time, time] == pytest.approx(orders[::2], abs=0.1)
    assert [velocity, velocity] == pytest.approx(orders[1::2], abs=0.2)


def test_a_steady_fall_is_met_exactly_at_any_step(tmp_path: Path) -> None:
    """z = a t^2 / 2 passes a height at sqrt(2 z / a) with sqrt(2 a z): kick-drift-kick makes no
    error under a constant force, and a polynomial follows a parabola; 7 steps, rounding."""
    duration, pull = 1e-5, 1e3  # s, V/m
    acceleration = pull * ELEMENTARY_CHARGE / ION
    heights = [1e-3, 7e-3, 30e-3]
    found = carried_out(
        tmp_path,
        duration,
        species={"ion": species(ION)},
        cloud=[points("one", "ion", [0.0, 0.0, 0.0])],
        field=[{"name": "gap", "kind": "uniform-electric", "strength": f"{pull} V/m"}],
        detector=[plane(f"gate {height}", height) for height in heights],
        stepping={"step": f"{duration / 7!r} s"},
    ).crossings()
    heights = np.array(heights)
    assert list(np.sqrt(2.0 * heights / acceleration)) == pytest.approx(
        found["time"], rel=1e-9, abs=0.0
    )
    speed = np.sqrt(2.0 * heights * acceleration)
    assert list(speed) == pytest.approx(found["velocity"][:, 2], rel=1e-9, abs=0.0)
    assert [1, 1, 1] == list(found["direction"])


def test_an_electron_near_the_speed_of_light_is_met_to_order_six(tmp_path: Path) -> None:
    """x = (m c^2 / q E) (sqrt(1 + (q E t / m c)^2) - 1) solved for t, u = q E t / m, to gamma = 6.

    L. D. Landau, E. M. Lifshitz, The Classical Theory of Fields, sec. 20. Proper velocity grows
    evenly, so it is right where the time is.
    """
    duration, pull = 1e-9, 1e7  # s, V/m
    rest = ELECTRON_MASS * SPEED_OF_LIGHT**2 / (ELEMENTARY_CHARGE * pull)
    heights = np.linspace(0.02, 0.24, 23)
    expected = rest / SPEED_OF_LIGHT * np.sqrt((1.0 + heights / rest) ** 2 - 1.0)
    proper = ELEMENTARY_CHARGE * pull / ELECTRON_MASS * expected
    steps, late, fast = (8, 12, 18), [], []
    for count in steps:
        found = carried_out(
            tmp_path,
            duration,
            cloud=[points("one", "electron", [0.0, 0.0, 0.0])],
            field=[{"name": "gap", "kind": "uniform-electric", "strength": f"{-pull} V/m"}],
            detector=[plane(f"gate {height}", float(height)) for height in heights],
            stepping={"scheme": "composed-6", "step": f"{duration / count!r} s"},
        ).crossings()
        late.append(rms(found["time"] / expected - 1.0))
        fast.append(rms(found["velocity"][:, 2] / proper - 1.0))
    assert 6.0 == pytest.approx(order_of(steps, late), abs=0.1)
    assert late == pytest.approx(fast, rel=1e-3, abs=1e-14)


def test_an_ion_in_a_shaped_magnet_is_met_to_order_six(tmp_path: Path) -> None:
    """A dipole magnet turns it on a circle: x = r sin(w t), met at arcsin(x / r) / w."""
    turn = ELEMENTARY_CHARGE * 0.1 / ION  # rad/s
    speed = turn * 1e-3 * np.linspace(1.0, 2.0, 100)
    velocity = np.zeros((speed.size, 3))
    velocity[:, 0] = speed
    steps, late = (10, 15, 22), []
    for count in steps:
        duration = math.pi / turn
        found = carried_out(
            tmp_path,
            duration,
            species={"ion": species(ION)},
            cloud=[points("turning", "ion", np.zeros_like(velocity), velocity)],
            field=[
                {
                    "name": "dipole",
                    "kind": "magnetic-multipole",
                    "order": 1,
                    "radius": "1 mm",
                    "strength": "0.1 T",
                }
            ],
            coulomb={"method": "off"},
            detector=[plane("gate", 0.7e-3, normal=[1, 0, 0], at=["0.7 mm", "0 m", "0 m"])],
            stepping={"scheme": "composed-6", "step": f"{duration / count!r} s"},
        ).crossings()
        phase = np.arcsin(0.7e-3 * turn / speed[found["id"]])
        phase = np.where(found["direction"] > 0, phase, math.pi - phase)
        late.append(rms(turn * found["time"] - phase))
    assert 6.0 == pytest.approx(order_of(steps, late), abs=0.1)
