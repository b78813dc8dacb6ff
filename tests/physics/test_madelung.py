"""A rock salt lattice: Madelung's constant, the field between the ions, the energy of cubes.

E. Madelung, Phys. Z. 19 (1918) 524; the constant to 16 digits: OEIS A085469. Distance between
neighbours 1, charges +1 and -1, 1/(4 pi eps0) = 1.

A lattice cut off sharply has charge at its faces, edges and corners, and its sums depend on the
cut. H. M. Evjen, Phys. Rev. 39 (1932) 675, halves the charges of the last layer; doing so again and
again weights the outermost layers with sums of binomials, and the sums converge the faster (that
it does was found for this test).
"""

from __future__ import annotations

from itertools import product
from math import comb

import numpy as np
import pytest
from scipy.special import erfc

from tests.cases import PAIR_SUMS
from tests.pair_sums import Floats, PairSumCase

MADELUNG = 1.7475645946331822
HALVINGS, LAYERS = 4, 10
"""With so many the constant is right to 3e-12."""
EVERY_SUM = pytest.mark.parametrize("pair_sum", PAIR_SUMS, ids=str)
DOUBLE_SUMS = [case for case in PAIR_SUMS if case.relative_error < 1e-12]


def lattice(line: Floats, weight: Floats) -> tuple[Floats, Floats]:
    """Places (3, n^3) and charges of a cube of n ions a side; one at the origin is positive."""
    index = np.array(list(product(line, line, line)))
    sign = np.where((index - index[0]).sum(axis=1) % 2 == 0, 1.0, -1.0)
    if (index == 0.0).all(axis=1).any():
        sign *= sign[(index == 0.0).all(axis=1)][0]
    weights = np.array(list(product(weight, weight, weight))).prod(axis=1)
    return np.ascontiguousarray(index.T), sign * weights


def faded_lattice() -> tuple[Floats, Floats]:
    """Around the origin, the outermost layers halved time and again."""
    line = np.arange(-LAYERS, LAYERS + 1.0)
    weight = np.ones_like(line)
    shares = np.array([comb(HALVINGS, j) for j in range(HALVINGS)]) / 2.0**HALVINGS
    weight[:HALVINGS] = np.cumsum(shares)
    weight[-HALVINGS:] = np.cumsum(shares)[::-1]
    return lattice(line, weight)


def by_ewald(place: Floats) -> tuple[float, Floats]:
    """Potential and field of the endless lattice at one place (3,), none of its ions'.

    P. P. Ewald, Ann. Phys. 369 (1921) 253: the near part in space, the far part in waves. Cells of
    side 2; with a width of 1.2 the parts left out are below 1e-13.
    """
    width = 1.2
    ions = np.array(list(product((0.0, 1.0), repeat=3)))
    charge = np.where(ions.sum(axis=1) % 2 == 0, 1.0, -1.0)
    cells = 2.0 * np.array(list(product(range(-4, 5), repeat=3)))
    apart = (place - ions)[:, None, :] - cells[None, :, :]
    r = np.linalg.norm(apart, axis=2)
    near = charge[:, None] * erfc(width * r) / r
    bell = 2.0 * width / np.sqrt(np.pi) * charge[:, None] * np.exp(-((width * r) ** 2))
    potential = near.sum()
    field = (((near + bell) / r**2)[:, :, None] * apart).sum(axis=(0, 1))
    waves = np.pi * np.array([k for k in product(range(-7, 8), repeat=3) if any(k)])
    k2 = (waves**2).sum(axis=1)
    height = 4.0 * np.pi / 8.0 * np.exp(-k2 / (4.0 * width**2)) / k2
    phase = (place - ions) @ waves.T
    potential += (charge[:, None] * height * np.cos(phase)).sum()
    field += ((charge[:, None] * height * np.sin(phase))[:, :, None] * waves).sum(axis=(0, 1))
    return float(potential), field


@EVERY_SUM
def test_the_potential_at_an_ion_is_madelungs_constant(pair_sum: PairSumCase) -> None:
    """From 9261 ions, faded at the faces."""
    if pair_sum.potential is None:
        pytest.skip("offers no potential")
    place, charge = faded_lattice()
    middle = int(np.flatnonzero((place == 0.0).all(axis=0))[0])
    found = pair_sum.potential(place, charge, 0.0, 1.0)[middle]
    allowed = max(5e-12, pair_sum.relative_error)
    assert -MADELUNG == pytest.approx(found, rel=allowed, abs=0.0)


@EVERY_SUM
def test_the_field_between_the_ions_is_ewalds(pair_sum: PairSumCase) -> None:
    """At places without symmetry, as probes without charge; potential likewise.

    What is promised as an rms, a single place may exceed: three times.
    """
    place, charge = faded_lattice()
    probes = np.array([[0.3, 0.1, 0.2], [-0.45, 0.25, 0.6], [0.9, -0.8, 0.35]])
    place = np.ascontiguousarray(np.hstack([place, probes.T]))
    charge = np.append(charge, np.zeros(3))
    field = pair_sum.field(place, charge, 0.0, 1.0)[:, -3:]
    for probe, found in zip(probes, field.T, strict=True):
        _, expected = by_ewald(probe)
        allowed = max(1e-10, 3.0 * pair_sum.relative_error)
        assert expected == pytest.approx(found, abs=allowed * np.linalg.norm(expected))
    if pair_sum.potential is not None:
        levels = pair_sum.potential(place, charge, 0.0, 1.0)[-3:]
        expected = np.array([by_ewald(probe)[0] for probe in probes])
        allowed = max(1e-10, 3.0 * pair_sum.relative_error)
        assert expected == pytest.approx(levels, abs=allowed * np.abs(expected).max())


@pytest.mark.parametrize("pair_sum", DOUBLE_SUMS, ids=str)
def test_the_energy_of_cubes_grows_by_madelungs_constant(pair_sum: PairSumCase) -> None:
    """U(n) = -M n^3 / 2 + faces n^2 + edges n + corners + c / n for even n, bare cubes.

    Faces, edges and corners keep to themselves: neutral planes and lines screen each other as
    exp(-pi n). Only corners are charged, +-1/8 (Evjen), and feel each other, at the distance n:
    c = (-12 + 12 / sqrt(2) - 4 / sqrt(3)) / 64. Energies from the fields by the virial theorem,
    U = sum q x E (R. Clausius 1870; from memory). What is left out of the law is seen as 1e-7.
    """
    sides = [6, 8, 10, 12, 14]
    energies = []
    for n in sides:
        place, charge = lattice(np.arange(n) - 0.5 * (n - 1), np.ones(n))
        field = pair_sum.field(place, charge, 0.0, 1.0)
        energies.append(float((charge * (place * field).sum(axis=0)).sum()))
    law = np.array([[n**3, n**2, n, 1.0, 1.0 / n] for n in sides])
    volume, _, _, _, corners = np.linalg.solve(law, energies)
    assert -0.5 * MADELUNG == pytest.approx(volume, rel=2e-7, abs=0.0)
    expected = (-12.0 + 12.0 / np.sqrt(2.0) - 4.0 / np.sqrt(3.0)) / 64.0
    assert expected == pytest.approx(corners, rel=0.02, abs=0.0)


def test_ewalds_sum_gives_madelungs_constant() -> None:
    """Near an ion, less the ion's own potential; and its field is minus its slope."""
    near = np.array([1e-3, 0.0, 0.0])
    assert -MADELUNG == pytest.approx(by_ewald(near)[0] - 1e3, abs=1e-9)
    place, h = np.array([0.3, 0.1, 0.2]), 1e-4
    slope = [
        (by_ewald(place + step)[0] - by_ewald(place - step)[0]) / (2.0 * h)
        for step in h * np.eye(3)
    ]
    assert -np.array(slope) == pytest.approx(by_ewald(place)[1], abs=1e-5)
