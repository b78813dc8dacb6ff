"""A cold plasma of one sign in a Penning trap turns as a rigid body, with the published density.

References
----------
L. Brillouin, Phys. Rev. 67 (1945) 260; D. H. E. Dubin, T. M. O'Neil, Rev. Mod. Phys. 71 (1999) 87:

    omega_p^2 = 2 omega_r (omega_c - omega_r),    omega_z^2 / omega_p^2 = L_z = 1/3 for a sphere

so that n = 3.91260161e14 m^-3 and f_r = 127.31407926 kHz for 1.4965e-26 kg in 4.5 T and 800 kHz,
0.0653 of the Brillouin density eps0 B^2/(2 m) (closed form, worked out with CODATA 2022).
"""

from __future__ import annotations

import math
from pathlib import Path

import numpy as np
import pytest

from driftwell.answers.evidence import Moments
from tests.running import carried_out, quantity, species

DENSITY, TURNS = 391260161005904.9, 127314.07926109117
COUNT = 300
RADIUS = (3.0 * COUNT / (4.0 * math.pi * DENSITY)) ** (1.0 / 3.0)


def plasma(folder: Path, share: float) -> Moments:
    """Ten turns of a sphere of the published density that begins with a share of its rotation."""
    return carried_out(
        folder,
        10.0 / TURNS,
        species={"ion": species(1.4965e-26)},
        cloud=[
            {
                "name": "plasma",
                "species": "ion",
                "count": COUNT,
                "shape": {"kind": "ball", "radius": quantity(RADIUS, "m"), "placing": "even"},
                "motion": {"rotation": quantity(-share * TURNS, "Hz")},
            }
        ],
        field=[
            {"name": "coil", "kind": "uniform-magnetic", "strength": "4.5 T"},
            {
                "name": "caps",
                "kind": "static-quadrupole",
                "axial_frequency": {"species": "ion", "value": "800 kHz"},
            },
        ],
        stepping={"step": quantity(1.0 / TURNS / 1200, "s"), "coulomb_every": 2},
        record={"every": quantity(0.0313 / TURNS, "s")},
    ).moments("plasma")


@pytest.mark.parametrize("share", [1.0, 0.5])
def test_a_sphere_of_that_density_turns_at_that_rate_and_keeps_its_size(
    tmp_path: Path, share: float
) -> None:
    """Rms sizes to 3 % for ten turns, whether it begins with that rotation or half of it.

    The mean of sum (x vy - y vx) / sum (x^2 + y^2) is -2 pi 127.3 kHz to 6 %: with 300 ions the
    surface is a tenth of the radius thick. 60 steps make a cyclotron period.
    """
    found = plasma(tmp_path, share).covariance
    spread = np.sqrt(np.diagonal(found[:, :3, :3], axis1=1, axis2=2) * 5.0) / RADIUS
    assert np.ones(spread.size) == pytest.approx(spread.ravel(), abs=0.03)
    turning = (found[:, 0, 4] - found[:, 1, 3]) / (found[:, 0, 0] + found[:, 1, 1])
    mean = float(turning.mean()) / (2.0 * math.pi)
    assert -TURNS == pytest.approx(mean, rel=0.06, abs=0.0)
