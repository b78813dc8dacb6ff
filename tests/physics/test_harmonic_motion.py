"""Harmonic motion, the exact time it keeps in steps, and clouds that swing as one.

Kick-drift-kick with steps h turns x'' = -w^2 x into

    x_n = x_0 cos(w_d n h),    sin(w_d h / 2) = w h / 2                                     (1)

exactly. R. W. Hockney, J. W. Eastwood, Computer Simulation Using Particles (1988), sec. 4-4;
C. K. Birdsall, A. B. Langdon, Plasma Physics via Computer Simulation (1985), ch. 4 (from memory).
"""

from __future__ import annotations

import math
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from driftwell.answers.evidence import TraceRequest
from tests.running import answers, carried_out, points, quantity, species, track

ION = 138.0 * 1.66053906892e-27  # kg
AXIAL = 80e3  # Hz
DRIVE = 1.1e6  # Hz
CAPS = {
    "name": "caps",
    "kind": "static-quadrupole",
    "axial_frequency": {"species": "ion", "value": "80 kHz"},
}
RODS = {
    "name": "rods",
    "kind": "rf-quadrupole",
    "radius": "3.5 mm",
    "voltage": {"amplitude": "180 V", "frequency": quantity(DRIVE, "Hz")},
}


def discrete(rate: float, step: float) -> float:
    """w_d of (1), rad/s."""
    return 2.0 / step * math.asin(0.5 * rate * step)


@pytest.mark.parametrize(
    ("steps", "fast"), [(50, 0.0006591452900595041), (200, 4.112791839316898e-05)]
)
def test_leapfrog_is_fast_by_exactly_its_own_formula(
    tmp_path: Path, steps: int, fast: float
) -> None:
    """6.591e-4 at 50 steps a period, 4.113e-5 at 200: by (1), seen in the path and the answer.

    Rounding alone is left: 1e-11 of the amplitude after 100 periods, 1e-10 of the frequency.
    """
    rate, step = 2.0 * math.pi * AXIAL, 1.0 / (steps * AXIAL)
    assert fast == pytest.approx(discrete(rate, step) / rate - 1.0, rel=1e-9, abs=0.0)
    found = carried_out(
        tmp_path,
        100.0 / AXIAL,
        species={"ion": species(ION)},
        cloud=[points("one", "ion", [0.0, 0.0, 1e-4])],
        field=[CAPS],
        stepping={"step": quantity(step, "s")},
        record={"every": quantity(13.0 * step, "s")},
        question=[
            {
                "name": "axial",
                "ask": "frequency",
                "of": "one",
                "axis": "z",
                "every": quantity(5.0 * step, "s"),
            }
        ],
    )
    recorded = track(found)
    expected = 1e-4 * np.cos(discrete(rate, step) * recorded.time)
    assert 0.0 == pytest.approx(np.abs(recorded.position[:, 0, 2] - expected).max(), abs=1e-15)
    assert AXIAL * (1.0 + fast) == pytest.approx(answers(found)[0], rel=1e-10, abs=0.0)


def swinging_cloud(**keys: Any) -> dict[str, Any]:
    """Sections: 30 warm ions 0.1 mm off the middle of a rod trap on each axis."""
    return {
        "seed": 3,
        "species": {"ion": species(ION)},
        "cloud": [
            {
                "name": "cloud",
                "species": "ion",
                "count": 30,
                "shape": {
                    "kind": "gaussian",
                    "sigma": ["40 um", "40 um", "120 um"],
                    "centre": ["0.1 mm", "0.1 mm", "0.1 mm"],
                },
                "motion": {"temperature": "300 K"},
            }
        ],
        "field": [RODS, CAPS],
        "stepping": {"step": quantity(0.01 / DRIVE, "s")},
        **keys,
    }


def test_a_cloud_swings_as_one_ion_however_its_ions_push_each_other(tmp_path: Path) -> None:
    """The centre moves as a single ion put there: along z as (1), across in the drive's quiver.

    J. F. Dobson, Phys. Rev. Lett. 73 (1994) 2244 (harmonic potential theorem; from memory). Exact
    for any step, as kicks and drifts are linear in a linear field: 100 axial periods leave 1e-9 of
    the amplitude, which is what rounding among 30 ions grows to.
    """
    duration = 1100.0 / DRIVE
    sections = swinging_cloud(record={"every": quantity(duration / 50, "s")})
    many = carried_out(tmp_path, duration, **sections).moments("cloud").centre
    first, motion = many[0, :3], many[0, 3:]
    sections["cloud"] = [points("cloud", "ion", first, motion)]
    single = carried_out(tmp_path, duration, **sections).moments("cloud").centre
    assert 0.0 == pytest.approx(np.abs(many[:, :3] - single[:, :3]).max(), abs=1e-13)
    rate = discrete(2.0 * math.pi * AXIAL, 0.01 / DRIVE)
    time = np.linspace(0.0, duration, 51)
    # the speed half a step on each side of a kick differs: v_0 = w cos(w_d h / 2) sin amplitude
    slow = 2.0 * math.pi * AXIAL * math.cos(0.5 * rate * 0.01 / DRIVE)
    along = first[2] * np.cos(rate * time) + motion[2] / slow * np.sin(rate * time)
    assert 0.0 == pytest.approx(np.abs(many[:, 2] - along).max(), abs=1e-13)


def test_the_centre_of_a_cloud_keeps_the_frequency_and_height_of_its_swing(tmp_path: Path) -> None:
    """80 kHz along z, by the frequency question to 1e-8, over 100 periods without damping."""
    question = [{"name": "swing", "ask": "frequency", "of": "cloud", "axis": "z", "every": "1 us"}]
    found = carried_out(tmp_path, 100.0 / AXIAL, **swinging_cloud(question=question))
    expected = discrete(2.0 * math.pi * AXIAL, 1e-6 / 110.0) / (2.0 * math.pi)
    assert expected == pytest.approx(answers(found)[0], rel=1e-8, abs=0.0)
    time, value = found.trace(TraceRequest("cloud", None, 2, 1e-6))
    halves = [value[time < 0.1 * time[-1]], value[time > 0.9 * time[-1]]]
    assert np.ptp(halves[0]) == pytest.approx(np.ptp(halves[1]), rel=1e-3, abs=0.0)
