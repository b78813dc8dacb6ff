"""Sums over many charges against known lattices, rings, cubes and random gases."""

from __future__ import annotations

import math
from itertools import product
from pathlib import Path

import numpy as np
import pytest
from scipy.optimize import minimize

from driftwell.constants import COULOMB_CONSTANT, ELEMENTARY_CHARGE, PROTON_MASS
from driftwell.coulomb.direct import direct_field, potentials, workspace
from tests.running import Floats, carried_out, points, quantity, species


def field_at_charges(place: Floats, charge: Floats) -> Floats:
    """Field (3, n) at charges (n,) at places (3, n), with 1/(4 pi eps0) = 1."""
    out = np.full_like(place, np.nan)
    direct_field(place, charge, 0.0, 1.0, workspace(charge.size), out)
    return out


def potential_at_charges(place: Floats, charge: Floats) -> Floats:
    """Potential (n,) at each charge of all others, with 1/(4 pi eps0) = 1."""
    out = np.full_like(charge, np.nan)
    potentials(place, charge, 0.0, 1.0, out)
    return out


@pytest.mark.parametrize(
    ("n", "weighted", "plain"),
    [
        (1, 1.4560299256299833, 2.1335207792784363),
        (2, 1.7517691333369407, 1.5166463362669245),
        (3, 1.7470415645202513, 1.9125039789591591),
        (5, 1.7475005023414625, 1.8525354904122808),
        (10, 1.747568603771805, 1.6925789282594594),
    ],
)
def test_a_rock_salt_lattice_adds_up_cube_by_cube(n: int, weighted: float, plain: float) -> None:
    """Partial sums of Madelung's constant, cubes of (2n + 1)^3 charges -1 and +1.

    H. M. Evjen, Phys. Rev. 39 (1932) 675, boundary charges weighted 1/2, 1/4, 1/8: they tend to
    1.7475646 (OEIS A085469). Up to 9261 charges; rounding 1e-12.
    """
    line = np.arange(-n, n + 1)
    index = np.array(list(product(line, line, line))).T
    charge = np.where(index.sum(axis=0) % 2 == 0, 1.0, -1.0)
    centre = int(np.flatnonzero((index == 0).all(axis=0))[0])
    place = np.ascontiguousarray(index, dtype=np.float64)
    assert plain == pytest.approx(-potential_at_charges(place, charge)[centre], rel=1e-12, abs=0.0)
    charge *= 0.5 ** (np.abs(index) == n).sum(axis=0)
    assert weighted == pytest.approx(
        -potential_at_charges(place, charge)[centre], rel=1e-12, abs=0.0
    )
    assert 0.0 == pytest.approx(field_at_charges(place, charge)[:, centre], abs=1e-12)


@pytest.mark.parametrize(
    ("rho", "z", "potential", "field_rho", "field_z"),
    [
        (0.0, 0.005, 803.8710698071022, 0.0, 32154.842792284093),
        (0.005, 0.003, 899.0827904235285, -15431.990260115304, 37621.52475088149),
        (0.015, 0.007, 558.5164361238799, 27012.32290810389, 23197.009971508658),
    ],
)
def test_a_ring_of_charges_pushes_as_a_ring(
    tmp_path: Path, rho: float, z: float, potential: float, field_rho: float, field_z: float
) -> None:
    """a = 10 mm, 1 nC: elliptic integrals of J. D. Jackson (1998), sec. 3.3; DLMF ch. 19.

    1000 even charges are a ring to exp(-1000 d / a) at the distance d from it: 1e-9 is generous.
    The field is felt by a proton in one step of 1 fs, in which it goes no farther than 1e-18 m.
    """
    step = 1e-15
    found = carried_out(
        tmp_path,
        step,
        species={"anchor": species(1.0)},
        cloud=[
            {
                "name": "ring",
                "species": "anchor",
                "count": 1000,
                "total_charge": "1 nC",
                "shape": {"kind": "ring", "radius": "10 mm"},
            },
            points("probe", "proton", [rho, 0.0, z]),
        ],
        stepping={"step": quantity(step, "s")},
    )
    start, end = found.snapshot(0.0), found.snapshot(step)
    push = end.velocity[-1] * PROTON_MASS / (ELEMENTARY_CHARGE * step)
    size = math.hypot(field_rho, field_z)
    assert [field_rho, 0.0, field_z] == pytest.approx(push, abs=1e-9 * size)
    place, charge = np.ascontiguousarray(start.position.T), start.charge * start.weight
    seen = COULOMB_CONSTANT * potential_at_charges(place, charge)[-1]
    assert potential == pytest.approx(seen, rel=1e-9, abs=0.0)


def test_the_energy_of_charges_at_random_in_a_cube(tmp_path: Path) -> None:
    """N (N - 1) / 2 times 1.88231264 k q^2 / a, the mean of 1/r in a cube: OEIS A336274.

    The spread is 0.4 / sqrt(N) of it, 0.9 % for 2000 charges; three times that is allowed.
    """
    count, side = 2000, 1e-3
    found = carried_out(
        tmp_path,
        1e-9,
        species={"ion": species(1e-25)},
        cloud=[
            {
                "name": "cube",
                "species": "ion",
                "count": count,
                "shape": {"kind": "box", "size": ["1 mm", "1 mm", "1 mm"]},
            }
        ],
    )
    unit = COULOMB_CONSTANT * ELEMENTARY_CHARGE**2 / side
    mean = found.ledger["coulomb"][0] / (0.5 * count * (count - 1) * unit)
    assert 1.88231264438966 == pytest.approx(mean, rel=3.0 * 0.4 / math.sqrt(count), abs=0.0)


THOMSON = {
    2: 0.5,
    3: 1.732050808,
    4: 3.674234614,
    5: 6.474691495,
    6: 9.98528137423857,
    7: 14.452977414,
    8: 19.675287861,
    9: 25.759986531,
    10: 32.71694946,
    11: 40.596450508,
    12: 49.165253058,
}
"""Least energy of unit charges on a unit sphere: J. J. Thomson, Phil. Mag. 7 (1904) 237; T. Erber,
G. M. Hockney, J. Phys. A 24 (1991) L1369 (table of the Cambridge Cluster Database)."""


@pytest.mark.parametrize("count", THOMSON)
def test_charges_on_a_sphere_settle_at_thomsons_energies(count: int) -> None:
    """Energy and slope by the product's own sums; a slope that is not the energy's would not end
    in a minimum. 1e-9 is the table's last digit."""

    def on_sphere(flat: Floats) -> tuple[float, Floats]:
        free = flat.reshape(3, -1)
        length = np.linalg.norm(free, axis=0)
        place = np.ascontiguousarray(free / length)
        charge = np.ones(count)
        slope = -field_at_charges(place, charge)
        along = slope - place * (slope * place).sum(axis=0)
        energy = 0.5 * float(charge @ potential_at_charges(place, charge))
        return energy, (along / length).ravel()

    random = np.random.default_rng(count)
    found = [
        minimize(
            on_sphere,
            random.normal(size=3 * count),
            jac=True,
            method="BFGS",
            options={"gtol": 1e-7},
        )
        for _ in range(8)
    ]
    assert THOMSON[count] == pytest.approx(
        min(float(each.fun) for each in found), rel=1e-9, abs=0.0
    )
