"""Fields of drawn electrodes against closed forms and published figures."""

from __future__ import annotations

import math

import numpy as np
import pytest
from scipy.constants import epsilon_0

from driftwell.boundary import ring_sources
from driftwell.boundary.drawn import solve_drawn
from driftwell.boundary.multipoles import planar_content, round_content
from driftwell.geometry.outline import circle, rectangle
from driftwell.kernels import kernel
from tests.boundary.drawn_figures import disc, four_rods, path, sheet

RING = [
    (0.0, 0.005, 803.8710698071022, 0.0, 32154.842792284093),
    (0.005, 0.003, 899.0827904235285, -15431.990260115304, 37621.52475088149),
    (0.015, 0.007, 558.5164361238799, 27012.32290810389, 23197.009971508658),
    (0.0099, 0.0001, 1820.8731654567098, -1360354.785813331, 1437794.896228033),
]
"""r, z, m; phi, V; E_r, E_z, V/m of a ring of 10 mm with 1 nC: Jackson, Classical Electrodynamics,
3rd ed. (1998), sec. 3.3; DLMF ch. 19; worked out in 30 digits."""


@kernel
def ring(r: float, z: float, b: float) -> tuple[float, float, float]:
    outward, along = ring_sources.ring_field(r, z, b, 0.0)
    return ring_sources.near_ring(r, z, b, 0.0), outward, along


@pytest.mark.parametrize("row", RING)
def test_a_ring_charge_has_its_published_potential_and_field(row: tuple[float, ...]) -> None:
    r, z, *expected = row
    per_charge = 1e-9 / (2.0 * math.pi * epsilon_0)
    found = [per_charge * value for value in ring(r, z, 0.01)]
    assert expected == pytest.approx(found, rel=1e-9, abs=1e-9)


G = {
    0.1: 0.1317978257539392,
    0.25: 0.3191871301940865,
    0.5: 0.5764965444224823,
    1.0: 0.8594935933311822,
    1.5: 0.9568117674299389,
    2.0: 0.9869598383548224,
}
"""(2/pi) times the integral of sin(k u)/(k I_0(k)): F. Gray 1939; S. Bertram, Proc. IRE 28 (1940)
418."""


def lens(gap: float) -> np.ndarray:
    """Potential on the axis of two thin tubes at -1 V and 1 V, at the places of G."""
    tubes = [
        (path((1.0, -12.0), (1.0, -0.5 * gap), solid=False),),
        (path((1.0, 0.5 * gap), (1.0, 12.0), solid=False),),
    ]
    axis = np.array([[0.0, u] for u in G])
    low, high = solve_drawn(tubes, True, 1e-8).potential(axis)
    return np.asarray(high - low)


def test_two_tubes_with_a_narrowing_gap_are_the_two_cylinder_lens() -> None:
    """The gap's share falls with its square: 16 times from 0.1 to 0.025 of the radius; what is
    left at 1e-4 is below 1e-8."""
    expected = np.array(list(G.values()))
    wide, narrow, closed = lens(0.1), lens(0.025), lens(1e-4)
    assert expected == pytest.approx(closed, abs=2e-8)
    assert np.full(len(G), 16.0) == pytest.approx((wide - expected) / (narrow - expected), abs=0.1)


def through_hole(r: np.ndarray, z: np.ndarray) -> np.ndarray:
    """Potential of a hole of radius 1 in a thin plate, field -1 above and none below; Jackson
    eqs. 3.187, 3.188: what is added to E z is the charge of an oblate spheroid."""
    share = z**2 + r**2 - 1.0
    root = np.sqrt(share**2 + 4.0 * z**2)
    bulge = np.sqrt(0.5 * (root - share)) - np.abs(z) * np.arctan(np.sqrt(2.0 / (root + share)))
    return np.asarray(np.maximum(z, 0.0) + bulge / math.pi)


@pytest.mark.parametrize("height", [20.0, 40.0])
def test_a_round_hole_lets_the_field_of_one_side_through(height: float) -> None:
    """Plates at +-height hold the field: images of the hole's dipole, 2/(3 pi) strong, change the
    field far from it by a part of height^-3, so potentials near it by less than 4 height^-3."""
    wide = 4.0 * height
    plates = [
        (path((1.0, 0.0), (wide, 0.0), solid=False),),
        (disc(height, wide),),
        (disc(-height, wide),),
    ]
    found = solve_drawn(plates, True, 1e-8)
    r = np.array([0.0, 0.0, 0.0, 0.5, 0.5, 0.0, 1.5, 0.9])
    z = np.array([-2.0, -0.5, 0.01, -0.4, 0.7, 1.5, 1.0, 0.01])
    values = found.potential(np.stack([r, z], axis=1))[1] * height
    gap = np.abs(values - through_hole(r, z)).max()
    assert 0.02 * height**-3 < gap < 4.0 * height**-3


def rods(rod: float, housing: float | None = None) -> tuple[float, float, float]:
    """Quadrupole strength of round rods, dodecapole and next term over it, at the field radius."""
    drawn = four_rods(rod)
    if housing is not None:
        drawn.append((sheet(circle((0.0, 0.0), housing)),))
    found = solve_drawn(drawn, False, 1e-9)
    content = planar_content(found.potential, 1.0)
    terms = 0.5 * (content.cosine[0] - content.cosine[1])
    assert content.error.max() < 1e-8
    return terms[2], terms[6] / terms[2], terms[10] / terms[2]


@pytest.mark.parametrize("housing", [None, 4.0])
def test_round_rods_of_1_14511_field_radii_have_no_dodecapole(housing: float | None) -> None:
    """G. E. Lee-Whiting and L. Yamazaki, Nucl. Instrum. Methods 94 (1971) 319; A. J. Reuben et al.,
    Int. J. Mass Spectrom. 154 (1996) 43: 1.14511 (both from memory, five digits)."""
    low, high = 1.1446, 1.1456
    first, last = rods(low, housing)[1], rods(high, housing)[1]
    found = low + (high - low) * first / (first - last)
    assert 1.14511 == pytest.approx(found, abs=6e-6)


def test_terms_of_round_rods_hang_together_as_published() -> None:
    """A_2 = 1.001462, A_6 = 0.001292, A_10 = -0.002431 of rods at +-1 V: D. J. Douglas and N. V.
    Konenkov, Rapid Commun. Mass Spectrom. 16 (2002) 1425 (from memory; the ratio of radii they
    belong to was not remembered, so that A_6 chooses it and the others are compared)."""
    low, high = 1.1250, 1.1262
    table = []
    for rod in (low, high):
        strength, sixth, tenth = rods(rod)
        table.append(2.0 * strength * np.array([1.0, sixth, tenth]))
    share = (0.001292 - table[0][1]) / (table[1][1] - table[0][1])
    found = table[0] + share * (table[1] - table[0])
    assert 1.001462 == pytest.approx(found[0], abs=1e-6)
    assert -0.002431 == pytest.approx(found[2], abs=1e-6)


def test_parallel_plates_have_an_even_field() -> None:
    """1/gap in the middle of plates 20 gaps wide; what comes in from the rim decays exponentially,
    like exp(-pi r/gap), Jackson sec. 2.10."""
    found = solve_drawn(
        [(rectangle((0, 0.5), (20, 0.8)),), (rectangle((0, -0.8), (20, -0.5)),)], True, 1e-8
    )
    field = found.field(np.array([[0.0, 0.0], [3.0, 0.3]]))[0]
    assert np.array([[0.0, -1.0], [0.0, -1.0]]) == pytest.approx(field, abs=1e-7)
    content = round_content(found.potential, 0.4)
    expected = np.zeros(13)
    expected[:2] = 0.5, 0.4
    assert expected == pytest.approx(content.zonal[0], abs=1e-7)
