"""Single ions in RF quadrupoles against Mathieu's equation.

    x'' + (a - 2 q cos 2 tau) x = 0,    tau = Omega t / 2                                   (1)

A bounded solution has lines at (beta + 2 n) Omega / 2. Expected values that are not listed come
from the matrix of (1) over one period of the drive (Floquet; DLMF sec. 28.29), integrated apart
from the product to 1e-12. Ions of several masses in one run have several q.
"""

from __future__ import annotations

import math
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from scipy.integrate import solve_ivp

from driftwell.constants import ELEMENTARY_CHARGE
from driftwell.record.reader import Run
from tests.running import Floats, answers, carried_out, points, quantity, species, track

DRIVE = 1e6  # Hz
RADIUS = 3.5e-3  # m
VOLTAGE = 100.0  # V, amplitude

EXPONENTS = {
    0.05: 0.03537262626995655,
    0.1: 0.07084955253163007,
    0.2: 0.14255132653778396,
    0.3: 0.21605913494087922,
    0.4: 0.2925662114803347,
    0.5: 0.37374412186563555,
    0.6: 0.4622494625456103,
    0.7: 0.563066161028394,
    0.8: 0.6885639920930839,
    0.9: 0.9159112672723058,
}
"""beta(a = 0, q). N. W. McLachlan, Theory and Application of Mathieu Functions (1947); DLMF ch. 28:
worked out two ways, by Floquet's matrix and by Hill's determinant, agreeing to 1e-11."""


def heaviness(q: float) -> float:
    """Mass, kg, of a singly charged ion with this q in the rods."""
    return 2.0 * ELEMENTARY_CHARGE * VOLTAGE / (q * RADIUS**2 * (2.0 * math.pi * DRIVE) ** 2)


def between_rods(
    folder: Path,
    q: list[float],
    duration: float,
    a_over_q: float = 0.0,
    aside: float = 1e-6,
    **sections: Any,
) -> Run:
    """Ions with these q, 1 um off the axis in x and `aside` in y, none feeling another."""
    names = [f"q{k}" for k in range(len(q))]
    # E = -grad phi turns the sign of q; a = 2 q (U / V), with the same sign as U
    voltage = {
        "amplitude": quantity(VOLTAGE, "V"),
        "frequency": quantity(DRIVE, "Hz"),
        "offset": quantity(0.5 * a_over_q * VOLTAGE, "V"),
    }
    masses = zip(names, q, strict=True)
    return carried_out(
        folder,
        duration,
        species={name: species(heaviness(each)) for name, each in masses},
        cloud=[points(name, name, [1e-6, aside, 0.0]) for name in names],
        field=[
            {
                "name": "rods",
                "kind": "rf-quadrupole",
                "radius": quantity(RADIUS, "m"),
                "voltage": voltage,
            }
        ],
        coulomb={"method": "off"},
        stepping={"scheme": "composed-6", "step": f"{0.01 / DRIVE!r} s"},
        **sections,
    )


def over_one_period(a: float, q: float) -> Floats:
    """Matrix (2, 2) that takes (x, dx/dtau) through one period of the drive."""
    columns = [
        solve_ivp(
            lambda s, y: [y[1], -(a - 2.0 * q * math.cos(2.0 * s)) * y[0]],
            (0.0, math.pi),
            start,
            method="DOP853",
            rtol=1e-13,
            atol=1e-14,
        ).y[:, -1]
        for start in ([1.0, 0.0], [0.0, 1.0])
    ]
    return np.array(columns).T


def exponent(a: float, q: float) -> float:
    """beta of a stable pair: cos(pi beta) is half the trace of the matrix, 0 < beta < 1."""
    return math.acos(0.5 * float(np.trace(over_one_period(a, q)))) / math.pi


def test_secular_frequencies_are_the_characteristic_exponents(tmp_path: Path) -> None:
    """beta Omega / 2 for q = 0.05 to 0.9, to 1e-7, not the sqrt(a + q^2/2) of small q.

    Kick-drift-kick would reach 1e-5 with the same 100 steps a period of the drive.
    """
    question = [
        {
            "name": f"q = {q}",
            "ask": "frequency",
            "of": f"q{k}",
            "axis": "x",
            "near": quantity(0.5 * beta * DRIVE, "Hz"),
            "every": "0.1 us",
        }
        for k, (q, beta) in enumerate(EXPONENTS.items())
    ]
    found = between_rods(tmp_path, list(EXPONENTS), 0.5e-3, question=question)
    secular = 2.0 * np.array(answers(found)) / DRIVE
    for (q, beta), seen in zip(EXPONENTS.items(), secular, strict=True):
        assert beta == pytest.approx(exponent(0.0, q), abs=1e-10)
        assert beta == pytest.approx(seen, rel=1e-7, abs=0.0), f"q = {q}"


@pytest.mark.parametrize(
    ("a", "q"), [(0.01, 0.2), (-0.01, 0.3), (0.02, 0.3), (0.1, 0.5), (-0.05, 0.6), (0.2, 0.65)]
)
def test_a_direct_voltage_shifts_the_two_axes_apart(tmp_path: Path, a: float, q: float) -> None:
    """beta(a, q) along x and beta(-a, q) along y: W. Paul, Rev. Mod. Phys. 62 (1990) 531, eq. 5."""
    both = [exponent(each, q) for each in (a, -a)]
    assert abs(both[0] / both[1] - 1.0) > 0.1
    question = [
        {
            "name": axis,
            "ask": "frequency",
            "of": "q0",
            "axis": axis,
            "near": quantity(0.5 * beta * DRIVE, "Hz"),
            "every": "0.1 us",
        }
        for axis, beta in zip("xy", both, strict=True)
    ]
    found = between_rods(tmp_path, [q], 0.3e-3, a / q, question=question)
    assert both == pytest.approx(2.0 * np.array(answers(found)) / DRIVE, rel=1e-7, abs=0.0)


def test_ions_are_held_below_q_0_908_and_thrown_out_above(tmp_path: Path) -> None:
    """Stable at q = 0.906, unstable at 0.910: the limit is 0.9080463 (A&S, ch. 20, table 20.1).

    After 80 periods of the drive both are where the Floquet matrix takes them, the unstable one
    16 000 times as far out. 2e-6 is what the step leaves, and that the growth comes near light.
    """
    limit = 0.9080463337345777
    q = [0.906, 0.910]
    found = track(between_rods(tmp_path, q, 80.0 / DRIVE, aside=0.0, record={"every": "1 us"}))
    size = np.abs(found.position[:, :, 0]).max(axis=0) / 1e-6
    assert size[0] < 100.0
    assert size[1] > 1e4
    for k, each in enumerate(q):
        period = over_one_period(0.0, each)
        assert (each < limit) == (abs(np.trace(period)) < 2.0)
        expected = np.linalg.matrix_power(period, 80) @ [1e-6, 0.0]
        moved = expected[0] - found.position[-1, k, 0]
        assert 0.0 == pytest.approx(moved / (size[k] * 1e-6), abs=2e-6)


@pytest.mark.parametrize(("a", "held"), [(0.2365, True), (0.2375, False)])
def test_the_apex_of_the_mass_filter_is_where_the_table_has_it(
    tmp_path: Path, a: float, held: bool
) -> None:
    """At q = 0.706 both axes are stable up to a = 0.23699 (P. H. Dawson, Quadrupole Mass
    Spectrometry and its Applications (1976), from memory; by Mathieu's a0 and b1 0.2369940 at
    q = 0.7059961)."""
    found = track(
        between_rods(tmp_path, [0.706], 150.0 / DRIVE, a / 0.706, record={"every": "1 us"})
    )
    largest = np.abs(found.position[:, 0, :2]).max() / 1e-6
    assert held == bool(largest < 1e3)
    assert held or largest > 1e4


def test_secular_frequencies_of_a_three_dimensional_trap(tmp_path: Path) -> None:
    """q_z = 0.32586693: 117752.66706 Hz along z, 57908.82785 Hz radially.

    R. F. Wuerker, H. Shelton, R. V. Langmuir, J. Appl. Phys. 30 (1959) 342; W. Paul (1990), with
    exact exponents. r0 = 10 mm, z0 = r0 / sqrt(2), 500 V, 1 MHz, 150 u, singly charged.
    """
    expected = [57908.82784915049, 57908.82784915049, 117752.66706434639]
    found = carried_out(
        tmp_path,
        1e-3,
        species={"ion": species(2.49080860338e-25)},
        cloud=[points("one", "ion", [1e-4, 2e-4, 1e-4])],
        field=[
            {
                "name": "trap",
                "kind": "rf-quadrupole-3d",
                "radius": "10 mm",
                "voltage": {"amplitude": "500 V", "frequency": "1 MHz"},
            }
        ],
        stepping={"scheme": "composed-6", "step": "20 ns"},
        question=[
            {
                "name": axis,
                "ask": "frequency",
                "of": "one",
                "axis": axis,
                "near": quantity(near, "Hz"),
                "every": "0.1 us",
            }
            for axis, near in zip("xyz", expected, strict=True)
        ],
    )
    assert expected == pytest.approx(answers(found), rel=1e-7, abs=0.0)
