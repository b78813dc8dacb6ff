"""Ions cooled to rest: strings, clusters, and how they buckle, swing and share their motion."""

from __future__ import annotations

import math
from pathlib import Path

import numpy as np
from scipy.constants import atomic_mass
from scipy.optimize import curve_fit

from driftwell.record.reader import Run
from validation import clusters
from validation.case import (
    COMPUTED,
    FROM_MEMORY,
    Case,
    Check,
    Published,
    Reader,
    Reading,
    computed,
    halved,
)
from validation.clusters import ION, LENGTH
from validation.wells import well

JAMES = "D. F. V. James, Appl. Phys. B 66 (1998) 181; force balance solved here"
MODES = "D. F. V. James, Appl. Phys. B 66 (1998) 181, table 2: eigenvalues 1, 3, 29/5"
MERGED = (
    "first-order perturbation of the common mode by the difference of masses: the well's stiffness "
    "over the mean mass; J. Mitchell, R. D. Smith, Phys. Rev. E 52 (1995) 4366 on merged lines"
)


def _place(k: int) -> Reader:
    def read(run: Run) -> Reading:
        z = np.sort(run.snapshot(run.snapshots[-1]).position[:, 2]) / LENGTH
        return Reading(float(z[k]))

    return read


def _line(name: str) -> Reader:
    """Frequency of a cloud's centre along z after the kick at 0.6 ms, by a fit of one sine."""

    def read(run: Run) -> Reading:
        moments = run.moments(name)
        late = moments.time > 0.61e-3
        time, z = moments.time[late], moments.centre[late, 2]

        def sine(t: np.ndarray, f: float, a: float, b: float, c: float) -> np.ndarray:
            angle = 2.0 * math.pi * f * (t - time[0])
            return np.asarray(a * np.cos(angle) + b * np.sin(angle) + c)

        size = float(np.std(z)) * math.sqrt(2.0)
        values, spread = curve_fit(sine, time, z, (99.75e3, size, 0.0, 0.0))
        return Reading(float(values[0]), math.sqrt(float(spread[0, 0])))

    return read


def _isotropic(folder: Path) -> None:
    well(folder / "well.csv", ION, 100e3, 100e3, 400e-6, 400e-6)


def _string(folder: Path) -> None:
    well(folder / "well.csv", ION, 1e6, 100e3, 100e-6, 150e-6)


def _zigzag(folder: Path) -> None:
    well(folder / "along.csv", ION, 0.0, 100e3, 200e-6, 200e-6)
    well(folder / "across.csv", ION, 100e3, 0.0, 200e-6, 200e-6)


def _isotopes(folder: Path) -> None:
    well(folder / "well.csv", 100.0 * atomic_mass, 100e3, 100e3, 400e-6, 400e-6)


_u = clusters.chain(10)

CASES: tuple[Case, ...] = (
    Case(
        "string-of-ten",
        "crystals",
        "Ten ions in a long well, cooled from an even line: where they come to rest.",
        tuple(
            Check(
                f"place of the {word}",
                "l",
                computed(float(_u[k]), JAMES, 1e-9),
                _place(k),
            )
            for k, word in ((9, "outermost"), (7, "third from it"), (5, "innermost"))
        ),
        (halved("40 ns"),),
        files=_string,
    ),
    Case(
        "modes-of-three",
        "crystals",
        "Three ions in a row, one let go beside its place: the three lines of their motion.",
        tuple(
            Check(
                f"{word} line",
                "kHz",
                Published(
                    100.0 * math.sqrt(value), 1e-6 * 100.0 * math.sqrt(value), MODES, FROM_MEMORY
                ),
                word,
                1e-3,
            )
            for word, value in (("lowest", 1.0), ("middle", 3.0), ("highest", 5.8))
        ),
        files=_string,
        converged=True,
    ),
    Case(
        "clusters",
        "crystals",
        "Two to thirty ions in a well that holds alike on all axes, cooled from "
        "twelve starts each: lowest "
        "energy by the ion, and how many make the inner shell.",
        (),
        seeds=12,
        files=_isotropic,
        measured=clusters.measured,
        curve=clusters.curve,
    ),
    Case(
        "cluster-of-120",
        "crystals",
        "A cluster of 120 ions, cooled from eight starts.",
        (),
        seeds=8,
        files=_isotropic,
        measured=clusters.large,
        remark="So many ions have very many states whose energies differ by parts of "
        "1e-5; neither the "
        "minimisation nor the cooling is sure to have met the lowest. 2e-5 is allowed for it.",
    ),
    Case(
        "zigzag",
        "crystals",
        "A string of ten ions in ever weaker confinement across: where it buckles into a zigzag.",
        (),
        files=_zigzag,
        measured=clusters.buckling,
    ),
    Case(
        "merged-lines",
        "crystals",
        "Eight ions each of 100 u and 101 u, cooled into one crystal and then "
        "kicked: alone they would "
        "swing 0.5 kHz apart; together they have one line.",
        tuple(
            Check(
                f"line of the {word} ones",
                "kHz",
                Published(
                    100.0 * math.sqrt(100.0 / 100.5),
                    100.0 * 2.5e-5,
                    MERGED,
                    COMPUTED,
                ),
                _line(word),
                1e-3,
            )
            for word in ("lighter", "heavier")
        ),
        (halved("50 ns"),),
        files=_isotopes,
        remark="Of first order in the difference of masses; its square, 2.5e-5, is "
        "in the published error.",
    ),
)
