"""Energies of ion crystals, their standing still and their breathing, in the trap of crystal.py."""

from __future__ import annotations

import math
from pathlib import Path

import numpy as np
import pytest
from scipy.integrate import quad, solve_ivp

from tests.crystal import (
    ENERGY,
    FREQUENCY,
    OMEGA,
    at_rest_in_the_frame,
    crystal,
    in_the_frame,
)
from tests.running import carried_out, track

ENERGIES = {
    2: 0.5952753945,
    3: 1.0400419115,
    4: 1.4174111811,
    5: 1.7820062707,
    6: 2.1065121271,
    7: 2.4320459113,
    8: 2.7330358664,
    9: 3.0238259726,
    10: 3.3057547433,
    11: 3.5821890868,
    12: 3.8406902324,
    13: 4.1008905021,
}
"""Lowest energy per ion: R. Rafac et al., Proc. Natl. Acad. Sci. 88 (1991) 483; P. Ludwig,
S. Kosse, M. Bonitz, Phys. Rev. E 71 (2005) 046403, table I, whose unit is 2^(1/3) smaller (from
memory to six decimals; further ones by minimising anew)."""


@pytest.mark.parametrize("count", ENERGIES)
def test_the_ledger_knows_the_energy_of_a_crystal(tmp_path: Path, count: int) -> None:
    """Kinetic energy of the turn + energy in the fields + energy of all pairs, to 1e-9.

    The kinetic energy m (omega_c/2)^2 r^2 / 2 of ions that turn with the frame and the energy in
    the quadrupole add up to (1). At rest the trap's part is a third of the whole (virial theorem).
    """
    sections = at_rest_in_the_frame(crystal(count))
    start = carried_out(tmp_path, 1e-9, **sections).ledger[0]
    trap = (start["kinetic"] + start["field"]) / (count * ENERGY)
    pairs = start["coulomb"] / (count * ENERGY)
    assert ENERGIES[count] == pytest.approx(trap + pairs, rel=1e-9, abs=0.0)
    assert ENERGIES[count] / 3.0 == pytest.approx(trap, rel=1e-7, abs=0.0)


def test_a_crystal_at_rest_stays_put(tmp_path: Path) -> None:
    """Ten ions over three periods of the trap, to 1e-6 l; so well are they put in place."""
    place = crystal(10)
    found = track(
        carried_out(
            tmp_path,
            3.0 / FREQUENCY,
            **at_rest_in_the_frame(place),
            stepping={"scheme": "composed-6", "step": "50 ns"},
            record={"every": "0.5 us"},
        )
    )
    moved = in_the_frame(found.time, found.position) - place
    assert 0.0 == pytest.approx(np.abs(moved).max(), abs=1e-6)


def test_a_crystal_breathes_with_its_whole_shape_kept(tmp_path: Path) -> None:
    """Stretched to 1.5 times its size, every ion stays on its ray: s'' = omega^2 (1/s^2 - s).

    Exact for any crystal in an isotropic harmonic trap (homothetic solution of the many-body
    problem: R. A. Battye, G. W. Gibbons, P. M. Sutcliffe, Proc. R. Soc. A 459 (2003) 911, from
    memory). The period by quadrature of the energy integral; for small stretches it would be
    2 pi / (sqrt(3) omega). An error of 1e-7 grows from that of the places.
    """
    place = crystal(10)
    start = 1.5

    def kinetic(s: float) -> float:
        return start**2 / 2.0 + 1.0 / start - s**2 / 2.0 - 1.0 / s

    # turning points: s^3 - (s0^2 + 2/s0) s + 2 = 0 has the roots s0 and the inner one
    inner = (-start + math.sqrt(start**2 + 8.0 / start)) / 2.0
    middle, half = 0.5 * (start + inner), 0.5 * (start - inner)
    period = (
        2.0
        * quad(
            lambda a: half * math.cos(a) / math.sqrt(2.0 * kinetic(middle + half * math.sin(a))),
            -math.pi / 2.0,
            math.pi / 2.0,
        )[0]
    )
    found = track(
        carried_out(
            tmp_path,
            period / OMEGA,
            **at_rest_in_the_frame(start * place),
            stepping={"scheme": "composed-6", "step": "20 ns"},
            record={"every": f"{period / OMEGA / 40!r} s"},
        )
    )
    expected = solve_ivp(
        lambda _, y: [y[1], 1.0 / y[0] ** 2 - y[0]],
        (0.0, 1.001 * period),
        [start, 0.0],
        t_eval=OMEGA * found.time,
        rtol=1e-12,
        atol=1e-13,
        method="DOP853",
    ).y[0]
    assert start == pytest.approx(expected[-1], abs=1e-10)
    assert inner == pytest.approx(expected[20], abs=1e-10)
    seen = in_the_frame(found.time, found.position)
    assert 0.0 == pytest.approx(np.abs(seen - expected[:, None, None] * place).max(), abs=1e-5)
    size = np.sqrt((seen**2).sum(axis=(1, 2)) / (place**2).sum())
    assert list(expected) == pytest.approx(size, abs=1e-7)
