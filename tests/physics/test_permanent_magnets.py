"""Permanent magnets against closed forms, quadrature of their surface charges, and dipoles."""

from __future__ import annotations

import math

import numpy as np
import pytest
from scipy.integrate import dblquad

from driftwell.fields.evaluation import evaluate
from driftwell.fields.form import FieldForm
from tests.cases import BODIES, field


def magnetic(form: FieldForm, position: object) -> np.ndarray:
    return evaluate([form], BODIES, position, 0.0).magnetic


def block(size: tuple[float, float, float], **keys: object) -> FieldForm:
    """A block of a size in mm, of 1.2 T."""
    lengths = [f"{length} mm" for length in size]
    return field("magnet-block", size=lengths, remanence="1.2 T", **keys)


def rod(radius: float, length: float, **keys: object) -> FieldForm:
    """A round magnet of sizes in mm, of 1.2 T."""
    return field(
        "magnet-cylinder",
        radius=f"{radius} mm",
        length=f"{length} mm",
        remanence="1.2 T",
        **keys,
    )


def test_block_has_its_closed_form_on_the_axis() -> None:
    """B = (Br/pi) [atan(L W/(2 z sqrt(4 z^2 + L^2 + W^2))) - the same with z + D], the formula of
    makers' handbooks (common practice, no source)."""
    z = np.array([0.001, 0.005, 0.05])

    def pole(z: np.ndarray) -> np.ndarray:
        return np.arctan(0.02 * 0.01 / (2 * z * np.sqrt(4 * z**2 + 0.02**2 + 0.01**2)))

    expected = 1.2 / math.pi * (pole(z) - pole(z + 0.005))
    found = magnetic(block((20, 10, 5)), np.stack([0 * z, 0 * z, z + 0.0025], axis=1))
    assert expected == pytest.approx(found[:, 2], rel=1e-11, abs=0.0)
    assert np.all(np.abs(found[:, :2]) < 1e-15)


def test_cube_and_long_magnets_have_their_demagnetising_factors() -> None:
    """In the middle of a cube H = -M/3, so B = 2/3 of the remanence; in a long rod B is the whole
    along it, half of it across; J. A. Osborn, Phys. Rev. 67 (1945) 351 (from memory)."""
    for along in ([0, 0, 1], [1, 2, -2]):
        unit = np.array(along) / math.sqrt(sum(a * a for a in along))
        found = magnetic(block((4, 4, 4), magnetised_along=along), [[0, 0, 0]])[0]
        assert 0.8 * unit == pytest.approx(found, rel=1e-13, abs=1e-15)
    assert [0, 0, 1.2] == pytest.approx(magnetic(rod(1, 2e4), [[3e-4, 0, 0]])[0], rel=1e-6)
    across = rod(1, 2e4, magnetised_along=[1, 0, 0])
    assert [0.6, 0, 0] == pytest.approx(magnetic(across, [[3e-4, 2e-4, 1]])[0], rel=1e-6, abs=1e-9)


def of_faces(size: np.ndarray, unit: np.ndarray, place: np.ndarray) -> np.ndarray:
    """mu0 H of the charges J.n on a block's faces, by quadrature."""
    total = np.zeros(3)
    for axis in range(3):
        for side in (-1.0, 1.0):
            others = [(axis + 1) % 3, (axis + 2) % 3]
            for part in range(3):

                def integrand(
                    b: float,
                    a: float,
                    axis: int = axis,
                    side: float = side,
                    others: list[int] = others,
                    part: int = part,
                ) -> float:
                    source = np.zeros(3)
                    source[axis] = side * size[axis] / 2.0
                    source[others[0]], source[others[1]] = a, b
                    away = place - source
                    return away[part] / (away @ away) ** 1.5

                wide, high = size[others[0]] / 2.0, size[others[1]] / 2.0
                value, _ = dblquad(integrand, -wide, wide, -high, high, epsabs=1e-10, epsrel=1e-10)
                total[part] += 1.2 * unit[axis] * side * value / (4.0 * math.pi)
    return total


@pytest.mark.parametrize(
    ("place", "inside"), [((0.009, 0.002, 0.001), False), ((-0.002, 0.001, 0.0015), True)]
)
def test_block_is_the_charges_on_its_faces(place: tuple[float, float, float], inside: bool) -> None:
    """And the magnetisation more inside; scipy's adaptive quadrature."""
    size, unit = np.array([0.012, 0.008, 0.006]), np.array([2.0, -1.0, 2.0]) / 3.0
    expected = of_faces(size, unit, np.array(place)) + (1.2 * unit if inside else 0.0)
    form = block((12, 8, 6), magnetised_along=[2, -1, 2])
    assert expected == pytest.approx(magnetic(form, [place])[0], abs=1e-9)


def test_turned_block_turns_its_field() -> None:
    """About x, then y, then z, each right-handed."""
    place = np.array([[0.004, -0.003, 0.002]])
    plain = block((3, 2, 1), magnetised_along=[1, 2, 3])
    turned = block((3, 2, 1), magnetised_along=[1, 2, 3], rotation=["90 deg", "0 deg", "90 deg"])
    about_x = np.array([[1.0, 0, 0], [0, 0, -1.0], [0, 1.0, 0]])
    about_z = np.array([[0, -1.0, 0], [1.0, 0, 0], [0, 0, 1.0]])
    turn = about_z @ about_x
    found = magnetic(turned, place @ turn.T)
    assert magnetic(plain, place) @ turn.T == pytest.approx(found, abs=1e-15)


def test_rod_has_its_closed_form_on_the_axis() -> None:
    """B = (Br/2) [(z + D)/hypot(R, z + D) - z/hypot(R, z)], z from the face, makers' handbooks
    (common practice, no source); inside too."""
    z = np.array([-0.009, -0.003, 0.0, 0.002, 0.1])
    expected = 0.6 * ((z + 0.01) / np.hypot(0.005, z + 0.01) - z / np.hypot(0.005, z))
    found = magnetic(rod(5, 10), np.stack([0 * z, 0 * z, z + 0.005], axis=1))
    assert expected == pytest.approx(found[:, 2], rel=1e-14, abs=1e-15)


MANTLE = [
    ((0.008, 0.0, 0.002), False),
    ((0.003, 0.006, 0.007), False),
    ((0.001, -0.002, 0.003), True),
    ((2e-5, 1e-5, 0.004), True),
    ((0.0, 0.0, 0.0071), False),
]


@pytest.mark.parametrize(("place", "inside"), MANTLE)
def test_rod_magnetised_across_is_the_charge_on_its_mantle(
    place: tuple[float, float, float], inside: bool
) -> None:
    """sigma = J cos(phi) on the mantle, and the magnetisation more inside; quadrature."""
    a, half = 0.005, 0.006
    phi = 2.0 * math.pi * (np.arange(1200) + 0.5) / 1200
    nodes, weights = np.polynomial.legendre.leggauss(120)
    source = np.stack(
        np.broadcast_arrays(
            a * np.cos(phi)[:, None], a * np.sin(phi)[:, None], half * nodes[None, :]
        )
    )
    away = np.array(place)[:, None, None] - source
    share = 1.2 * np.cos(phi)[:, None] * weights * half * a * 2.0 * math.pi / 1200
    expected = (away * share / (4.0 * math.pi * (away**2).sum(axis=0) ** 1.5)).sum(axis=(1, 2))
    expected[0] += 1.2 if inside else 0.0
    form = rod(5, 12, magnetised_along=[1, 0, 0])
    assert expected == pytest.approx(magnetic(form, [place])[0], abs=1e-11)


def test_rod_magnetised_aslant_is_the_sum_of_along_and_across() -> None:
    place = [[0.004, 0.005, 0.003]]
    aslant = rod(5, 4, along=[0, 1, 0], magnetised_along=[3, 4, 0])
    along = rod(5, 4, along=[0, 1, 0])
    across = rod(5, 4, along=[0, 1, 0], magnetised_along=[1, 0, 0])
    expected = 0.8 * magnetic(along, place) + 0.6 * magnetic(across, place)
    assert expected == pytest.approx(magnetic(aslant, place), rel=1e-13, abs=1e-16)


@pytest.mark.parametrize(
    ("form", "volume"),
    [
        (block((2, 2, 2), magnetised_along=[1, 2, -2]), 8e-9),
        (rod(1, 1.5, along=[0, 1, 1], magnetised_along=[1, 2, -2]), math.pi * 1.5e-9),
    ],
    ids=["block", "rod"],
)
def test_magnets_are_dipoles_far_away(form: FieldForm, volume: float) -> None:
    """B = (3 n (n.J) - J) V/(4 pi r^3); Jackson, sec. 5.6 (from memory). The next term is
    (size/r)^2 smaller, and what cancels leaves some 1e-16 of the remanence."""
    remanence = 1.2 * np.array([1.0, 2.0, -2.0]) / 3.0
    place = np.array([0.05, -0.03, 0.07])
    distance = math.sqrt(place @ place)
    n = place / distance
    dipole = volume * (3.0 * n * (n @ remanence) - remanence) / (4.0 * math.pi * distance**3)
    found = magnetic(form, [place])[0]
    assert dipole == pytest.approx(found, abs=2e-3 * np.abs(dipole).max())
    assert np.abs(dipole - found).max() > 1e-9 * np.abs(dipole).max()


def test_field_on_a_surface_is_the_mean_of_both_sides() -> None:
    """Where it jumps there is one number all the same."""
    for form, place, normal in (
        (block((4, 2, 2), magnetised_along=[0, 1, 1]), [0.002, 3e-4, 1e-4], [1e-9, 0, 0]),
        (rod(2, 4, magnetised_along=[1, 1, 2]), [0.002, 0.0, 5e-4], [1e-9, 0, 0]),
        (rod(2, 4, magnetised_along=[1, 1, 2]), [5e-4, 3e-4, 0.002], [0, 0, 1e-9]),
    ):
        x, away = np.array(place), np.array(normal)
        here, outside, inside = magnetic(form, [x, x + away, x - away])
        assert np.abs(outside - inside).max() > 0.1
        assert 0.5 * (outside + inside) == pytest.approx(here, abs=1e-5)


def test_vector_potential_is_continuous_through_the_surface_and_gives_b_inside() -> None:
    """curl A = B with the magnetisation: what a changing magnet induces inside itself."""
    falling = {"kind": "ramp", "before": "1 T", "after": "0 T", "start": "0 s", "end": "1 s"}
    for kind, keys in (
        ("magnet-block", {"size": ["4 mm", "2 mm", "2 mm"], "magnetised_along": [1, 2, 3]}),
        ("magnet-cylinder", {"radius": "2 mm", "length": "4 mm", "magnetised_along": [1, 2, 3]}),
    ):
        form = field(kind, remanence=falling, **keys)
        steady = field(kind, remanence="1 T", **keys)
        place, step = np.array([0.6e-3, 0.4e-3, 0.3e-3]), 1e-5
        slopes = np.zeros((3, 3))
        for axis in range(3):
            ends = np.stack([place + step * np.eye(3)[axis], place - step * np.eye(3)[axis]])
            plus, minus = evaluate([form], BODIES, ends, 0.5).electric
            slopes[:, axis] = (plus - minus) / (2.0 * step)
        turned = slopes - slopes.T
        curl = [turned[2, 1], turned[0, 2], turned[1, 0]]
        assert magnetic(steady, [place])[0] == pytest.approx(curl, abs=2e-5)
        assert 0.0 == pytest.approx(np.trace(slopes), abs=2e-5)
        through = [[0.002 + d, 1e-4, 2e-4] for d in (-1e-10, 0.0, 1e-10)]
        before, here, behind = evaluate([form], BODIES, through, 0.5).electric
        assert before == pytest.approx(behind, abs=1e-9)
        assert here == pytest.approx(behind, abs=1e-9)
