"""Coulomb clusters: their lowest energies as published, and as cooled by driftwell."""

from __future__ import annotations

import csv
import math
from pathlib import Path

import numpy as np
from scipy.constants import e, epsilon_0
from scipy.optimize import fsolve

from driftwell.record.reader import Run
from validation.bench import Bench
from validation.case import COMPUTED, Case, Curve, Found, Published

ION = 6.6359e-26
OMEGA = 2.0 * math.pi * 100e3
LENGTH = (e**2 / (4.0 * math.pi * epsilon_0 * ION * OMEGA**2)) ** (1.0 / 3.0)
ENERGY = ION * OMEGA**2 * LENGTH**2
SOURCE = (
    "R. Rafac et al., Proc. Natl. Acad. Sci. 88 (1991) 483; P. Ludwig, S. Kosse, M. Bonitz, Phys. "
    "Rev. E 71 (2005) 046403, table I (to N = 16 from memory, to six decimals); all minimised anew "
    "with scipy from 40 and more random starts"
)
ZIGZAG = (
    "largest axial eigenvalue L of a chain, critical where (f_r/f_z)^2 = (L - 1)/2: "
    "D. G. Enzer et al., "
    "Phys. Rev. Lett. 85 (2000) 2466; D. F. V. James, Appl. Phys. B 66 (1998) 181; worked out here"
)


def published_clusters() -> dict[int, tuple[float, int]]:
    """Energy per ion, m omega^2 l^2, and ions in the inner shell, by number of ions."""
    path = Path(__file__).resolve().parent / "clusters.csv"
    with path.open() as file:
        rows = list(csv.reader(line for line in file if not line.startswith("#")))
    return {int(n): (float(energy), int(inner)) for n, energy, inner in rows[1:]}


def energy_per_ion(run: Run) -> tuple[float, float]:
    """Energy of a run's cluster at its end by its ion, and how far it is from rest.

    At rest the pairs have twice the energy that the trap has (virial theorem).
    """
    row = run.ledger[-1]
    unit = float(row["count"]) * ENERGY
    pairs, trap, motion = (float(row[name]) / unit for name in ("coulomb", "field", "kinetic"))
    # a stretch by s costs 3 E_trap s^2, and changes pairs - 2 trap by -6 E_trap s
    left = (pairs - 2.0 * trap) ** 2 / (12.0 * trap) + motion
    return pairs + trap + motion, left


def inner_shell(run: Run) -> int:
    """Ions nearer to the middle than half the outermost."""
    position = run.snapshot(run.snapshots[-1]).position
    away = np.sqrt(((position - position.mean(axis=0)) ** 2).sum(axis=1))
    return int(np.sum(away < 0.5 * away.max()))


def _lowest(runs: list[Run]) -> tuple[float, dict[str, float], int]:
    """Lowest energy, its errors, inner shell; another run should have found the same state, and
    the distance to the nearest other one is an error."""
    states = sorted(((*energy_per_ion(run), run) for run in runs), key=lambda state: state[0])
    energy, left, run = states[0]
    return energy, {"seeds": states[1][0] - energy, "not at rest": left}, inner_shell(run)


def measured(case: Case, bench: Bench) -> list[Found]:
    """Clusters of each number cooled from several starts; the lowest counts."""
    scenario = bench.laid_out(case)
    published = published_clusters()
    found: list[Found] = []
    counts = [count for count in published if count <= 30]
    runs = bench.sweep(
        scenario, "clusters", vary={"cloud.cluster.count": counts}, replicas=case.seeds
    )
    shells: list[Found] = []
    for count in counts:
        energy, errors, inner = _lowest(
            [run for run in runs if run.clouds["cluster"].count == count]
        )
        expected, shell = published[count]
        found.append(
            Found(
                f"energy of {count}",
                "m w^2 l^2",
                Published(expected, 5e-10, SOURCE, COMPUTED),
                energy,
                errors,
            )
        )
        shells.append(
            Found(
                f"inner shell of {count}",
                "ions",
                Published(float(shell), 0.0, SOURCE, COMPUTED),
                float(inner),
                {},
            )
        )
    return found + shells


def large(case: Case, bench: Bench) -> list[Found]:
    """A cluster too large to be sure of its lowest state: the lowest of some seeds."""
    scenario = bench.laid_out(case)
    runs = bench.sweep(scenario, "large", replicas=case.seeds)
    energies = sorted(energy_per_ion(run)[0] for run in runs)
    left = max(energy_per_ion(run)[1] for run in runs)
    expected, _ = published_clusters()[120]
    return [
        Found(
            "energy of 120",
            "m w^2 l^2",
            Published(expected, 2e-5 * expected, SOURCE, COMPUTED),
            energies[0],
            {"seeds": energies[1] - energies[0], "not at rest": left},
        )
    ]


def curve(found: list[Found]) -> Curve:
    """Energies against the number of ions, over that of the smooth drop."""
    rows = [each for each in found if each.what.startswith("energy")]
    count = [float(each.what.split()[-1]) for each in rows]
    drop = [0.9 * n ** (2.0 / 3.0) for n in count]
    return Curve(
        "ions",
        "energy / (0.9 N^(2/3))",
        count,
        [each.value / d for each, d in zip(rows, drop, strict=True)],
        [each.error / d for each, d in zip(rows, drop, strict=True)],
        count,
        [each.published.value / d for each, d in zip(rows, drop, strict=True)],
    )


def chain(count: int) -> np.ndarray:
    """Places of a chain at rest, in l: James (1998)."""

    def force(u: np.ndarray) -> np.ndarray:
        apart = u[:, None] - u[None, :]
        np.fill_diagonal(apart, np.inf)
        return np.asarray(u - (np.sign(apart) / apart**2).sum(axis=1))

    start = np.linspace(-1.0, 1.0, count) * 0.8 * count**0.56
    return np.sort(fsolve(force, start, xtol=1e-14))


def critical(count: int) -> float:
    """(f_r/f_z)^2 at which a chain of so many ions buckles."""
    apart = np.abs(chain(count)[:, None] - chain(count)[None, :])
    np.fill_diagonal(apart, np.inf)
    matrix = -2.0 / apart**3
    np.fill_diagonal(matrix, 1.0 - matrix.sum(axis=1))
    return 0.5 * (float(np.linalg.eigvalsh(matrix)[-1]) - 1.0)


def buckling(case: Case, bench: Bench) -> list[Found]:
    """Squared width of the zigzag at five strengths of the trap below the critical one,
    extrapolated to none by polynomials of degree 2 and 3."""
    scenario = bench.laid_out(case)
    expected = critical(10)
    ratios = [round(expected * part, 4) for part in (0.84, 0.88, 0.92, 0.95, 0.98)]
    runs = bench.sweep(scenario, "strengths", vary={"field.across.scale": ratios})
    widths = []
    for ratio in ratios:
        run = next(run for run in runs if f"field.across.scale={ratio}" in run.header.settings)
        covariance = run.moments("string").covariance[-1]
        widths.append(float(covariance[0, 0] + covariance[1, 1]) / LENGTH**2)
    roots: list[float] = []
    for degree in (2, 3):
        polynomial = np.polynomial.Polynomial.fit(ratios, widths, degree)
        reals = [
            float(each.real)
            for each in np.asarray(polynomial.roots(), dtype=np.complex128)
            if abs(float(each.imag)) < 1e-9
        ]
        roots.append(min(reals, key=lambda each: abs(each - ratios[-1])))
    what = "(f_r/f_z)^2 at which 10 ions buckle"
    return [
        Found(
            what,
            "1",
            Published(expected, 1e-9 * expected, ZIGZAG, COMPUTED),
            roots[1],
            {"extrapolation": abs(roots[1] - roots[0])},
        )
    ]
