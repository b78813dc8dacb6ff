"""One ion in a Penning trap: its three frequencies, its path, and what tilt cannot change.

References
----------
L. S. Brown, G. Gabrielse, Rev. Mod. Phys. 58 (1986) 233; Phys. Rev. A 25 (1982) 2423 (invariance
theorem; from memory).
"""

from __future__ import annotations

import math
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from tests.running import Floats, answers, carried_out, points, quantity, species, track

ION = 6.6359e-26  # kg
FIELD = 1.5  # T
CYCLOTRON, AXIAL = 576397.3183911024, 156406.71972508682
FAST, SLOW = 554331.9644666738, 22065.3539244286
"""Hz: cyclotron, axial, modified cyclotron and magnetron frequency of Brown & Gabrielse (1986),
eqs. 2.3 to 2.14, for V0/d^2 = 4.0e5 V/m^2."""
START = [1e-4, 0.0, 2e-4], [0.0, 40.0, 0.0]


def trap(direction: Floats | None = None, ellipticity: float = 0.0) -> dict[str, Any]:
    """Sections of a scenario: one ion in 1.5 T and 4.0e5 V/m^2; 36 steps a cyclotron period."""
    along = [0.0, 0.0, 1.0] if direction is None else [float(each) for each in direction]
    return {
        "species": {"ion": species(ION)},
        "cloud": [points("one", "ion", *START)],
        "field": [
            {"name": "coil", "kind": "uniform-magnetic", "strength": f"{FIELD} T", "along": along},
            {
                "name": "caps",
                "kind": "static-quadrupole",
                # d^2 = z0^2/2 + r0^2/4 = (5 mm)^2
                "voltage": "10 V",
                "half_length": "5 mm",
                "radius": quantity(5e-3 * math.sqrt(2.0), "m"),
                "ellipticity": ellipticity,
            },
        ],
        "stepping": {"scheme": "composed-6", "step": "50 ns"},
    }


def asked(near: list[float]) -> list[dict[str, Any]]:
    """Frequencies in the motion along x, near the given ones, Hz."""
    return [
        {
            "name": f"{each:.0f} Hz",
            "ask": "frequency",
            "of": "one",
            "axis": "x",
            "near": quantity(each, "Hz"),
            "every": "0.25 us",
        }
        for each in near
    ]


def test_the_three_motions_have_their_frequencies(tmp_path: Path) -> None:
    """f+ 554331.96447, f- 22065.35392, fz 156406.71973 Hz, to 1e-8.

    1 ms holds 22 turns of the magnetron motion; the drift's helix is exact, so that only the
    kicks of the quadrupole leave an error.
    """
    question = asked([FAST, SLOW])
    question.append({**question[0], "name": "fz", "axis": "z", "near": f"{AXIAL} Hz"})
    found = carried_out(tmp_path, 1e-3, **trap(), question=question)
    assert [FAST, SLOW, AXIAL] == pytest.approx(answers(found), rel=1e-8, abs=0.0)


def test_the_ion_is_where_the_linear_equations_take_it_after_a_millisecond(tmp_path: Path) -> None:
    """554 turns later, to 1e-9 m of 0.2 mm: matrix exponential of the equations of motion."""
    place = [0.00011438687621867457, -3.233110427168936e-05, -0.00016662113636388827]
    speed = [42.39515644554482, -42.38851250617834, -108.71257917755578]
    found = track(carried_out(tmp_path, 1e-3, **trap()))
    assert place == pytest.approx(found.position[-1, 0], abs=1e-9)
    assert speed == pytest.approx(found.velocity[-1, 0], abs=1e-3)


@pytest.mark.parametrize(
    ("tilt", "turn", "ellipticity"),
    [(0.0, 0.0, 0.0), (0.0, 0.0, 0.2), (0.05, 0.6, 0.0), (0.1, 0.6, 0.1), (0.15, 2.0, -0.3)],
)
def test_tilt_and_ellipticity_leave_the_sum_of_squares(
    tmp_path: Path, tilt: float, turn: float, ellipticity: float
) -> None:
    """f+^2 + fz^2 + f-^2 = fc^2 whatever the tilt (rad) and ellipticity: Brown & Gabrielse (1982).

    Each frequency as the eigenvalues of the equations of motion give it, and the theorem to 1e-8,
    a fifth of a millionth of what tilt and ellipticity do to the magnetron frequency.
    """
    direction = np.array(
        [math.sin(tilt) * math.cos(turn), math.sin(tilt) * math.sin(turn), math.cos(tilt)]
    )
    expected = frequencies(direction, ellipticity)
    if tilt or ellipticity:
        assert abs(expected[0] / SLOW - 1.0) > 0.001
    near = expected if tilt else expected[::2]
    question = asked(near)
    if not tilt:  # the axial motion is along z alone
        question.insert(1, {**question[0], "name": "fz", "axis": "z", "near": f"{AXIAL} Hz"})
    found = carried_out(tmp_path, 1e-3, **trap(direction, ellipticity), question=question)
    assert expected == pytest.approx(answers(found), rel=1e-8, abs=0.0)
    assert CYCLOTRON == pytest.approx(math.hypot(*answers(found)), rel=1e-8, abs=0.0)


def frequencies(direction: Floats, ellipticity: float) -> list[float]:
    """Frequencies, Hz, of m x'' = F x + q x' cross B, from the slowest to the fastest."""
    axial, cyclotron = 2.0 * math.pi * AXIAL, 2.0 * math.pi * CYCLOTRON * direction
    motion = np.zeros((6, 6))
    motion[:3, 3:] = np.eye(3)
    shares = [0.5 * (1.0 + ellipticity), 0.5 * (1.0 - ellipticity), -1.0]
    motion[3:, :3] = axial**2 * np.diag(shares)
    motion[3:, 3:] = -np.cross(cyclotron, np.eye(3), axisb=0, axisc=0)
    rates = np.sort(np.linalg.eigvals(motion).imag)[3:]
    return [float(rate) / (2.0 * math.pi) for rate in rates]
