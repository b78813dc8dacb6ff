"""Ions in a row along the axis of a trap: where they stand, and how they swing about it.

Lengths in l = (k q^2 / (m omega_z^2))^(1/3). The string lies exactly on the axis of a static
quadrupole, where the pull outwards is exactly zero, so it needs nothing to hold it there.
"""

from __future__ import annotations

from pathlib import Path
from typing import Any

import numpy as np
import pytest

from tests.running import Floats, answers, carried_out, points, quantity, species, track

ION = 6.6359e-26  # kg
AXIAL = 500e3  # Hz
LENGTH = 7.062430792576768e-06
"""l of this ion at this frequency, m."""

PLACES = {
    2: (0.6299605249,),
    3: (0.0, 1.077217345),
    4: (0.4543792807, 1.4368019919),
    5: (0.0, 0.8221007566, 1.7429032119),
    6: (0.369920626, 1.1361253417, 2.0122746801),
    7: (0.0, 0.6869433943, 1.4129172723, 2.2545436016),
    8: (0.3180214153, 0.9670076382, 1.6620616352, 2.4758202768),
    9: (0.0, 0.5995760659, 1.2194741457, 1.8896988108, 2.6802579179),
    10: (0.2821036557, 0.853778826, 1.4503814149, 2.1000311557, 2.8708250815),
}
"""Places in l of the ions at and right of the middle: D. F. V. James, Appl. Phys. B 66 (1998) 181,
table 1; N = 2 and 3 are (1/4)^(1/3) and (5/4)^(1/3). The last digits by solving the force balance
anew; the table itself, to four digits and for up to five ions, from memory."""

MODES = {
    2: (1.0, 3.0),
    3: (1.0, 3.0, 5.8),
    4: (1.0, 3.0, 5.81, 9.308),
    5: (1.0, 3.0, 5.818, 9.332, 13.47),
    6: (1.0, 3.0, 5.824, 9.352, 13.51, 18.27),
    7: (1.0, 3.0, 5.829, 9.369, 13.55, 18.32, 23.66),
    8: (1.0, 3.0, 5.834, 9.383, 13.58, 18.37, 23.73, 29.63),
    9: (1.0, 3.0, 5.838, 9.396, 13.6, 18.41, 23.79, 29.71, 36.16),
    10: (1.0, 3.0, 5.841, 9.408, 13.63, 18.45, 23.85, 29.79, 36.26, 43.24),
}
"""(omega / omega_z)^2 of the axial modes, same paper, table 2 (from memory)."""


def string(count: int) -> Floats:
    """Places (n,), in l, from left to right."""
    right = np.array(PLACES[count])
    return np.concatenate([-right[::-1], right if count % 2 == 0 else right[1:]])


def in_the_trap(place: Floats, step: str) -> dict[str, Any]:
    """Sections of a scenario with ions at rest on the axis, at `place` (n,) in l."""
    along = np.zeros((place.size, 3))
    along[:, 2] = LENGTH * place
    return {
        "species": {"ion": species(ION)},
        "cloud": [points("string", "ion", along)],
        "field": [
            {
                "name": "caps",
                "kind": "static-quadrupole",
                "axial_frequency": {"species": "ion", "value": f"{AXIAL} Hz"},
            }
        ],
        "stepping": {"scheme": "composed-6", "step": step},
    }


@pytest.mark.parametrize("count", PLACES)
def test_ions_put_where_a_string_stands_stay_put(tmp_path: Path, count: int) -> None:
    """Over five axial periods no ion leaves its published place by 1e-8 l.

    The places are good to 5e-11 l; mis-set ions swing about the true places, so a force wrong by
    1e-7 would show.
    """
    expected = string(count)
    found = carried_out(
        tmp_path, 10e-6, **in_the_trap(expected, "20 ns"), record={"every": "0.1 us"}
    )
    moved = track(found).position[:, :, 2] / LENGTH - expected
    assert 0.0 == pytest.approx(np.abs(moved).max(), abs=1e-8)
    assert np.abs(moved).max() > 0.0


@pytest.mark.parametrize("count", MODES)
def test_a_string_swings_with_its_axial_modes(tmp_path: Path, count: int) -> None:
    """Frequencies of all axial modes, from 50 periods after a shift of 1e-4 l of each mode.

    The eigenvalues of the matrix of James (1998), eq. 16, agree with the published table to its
    last digit, and the run with them to 1e-6: its step and the non-linearity each make 3e-7 of
    the fastest mode. Each mode is asked of the ion in which it is strongest against its neighbours.
    """
    rest = string(count)
    square, mode = np.linalg.eigh(stiffness(rest))
    digits = [len(f"{published}".partition(".")[2]) for published in MODES[count]]
    for published, computed, digit in zip(MODES[count], square, digits, strict=True):
        assert published == pytest.approx(computed, abs=0.51 * 10.0**-digit)
    sections = in_the_trap(rest + 1e-4 * mode.sum(axis=1), "10 ns")
    question = []
    for k in range(count):
        near = np.sqrt(square) / np.sqrt(square[k])
        others = (np.abs(near - 1.0) < 0.12) & (np.arange(count) != k)
        louder = np.abs(mode[:, others]).max(axis=1, initial=0.01)
        question.append(
            {
                "name": f"mode {k}",
                "ask": "frequency",
                "of": "string",
                "axis": "z",
                "charge": int(np.argmax(np.abs(mode[:, k]) / louder)),
                "near": quantity(AXIAL * np.sqrt(square[k]), "Hz"),
                "every": "100 ns",
            }
        )
    found = carried_out(tmp_path, 100e-6, **sections, question=question)
    assert list(np.sqrt(square)) == pytest.approx(
        np.array(answers(found)) / AXIAL, rel=1e-6, abs=0.0
    )


def stiffness(place: Floats) -> Floats:
    """The matrix of James (1998), eq. 16: second derivatives of the energy in m omega_z^2."""
    apart = np.abs(place[:, None] - place[None, :])
    np.fill_diagonal(apart, np.inf)
    matrix = -2.0 / apart**3
    np.fill_diagonal(matrix, 1.0 + 2.0 * (apart**-3.0).sum(axis=1))
    return np.asarray(matrix)
