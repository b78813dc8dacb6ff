"""The ledger: how well each account closes, and what went in and out."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from driftwell.report.page.markup import Markup, tag, together
from driftwell.report.page.numbers import amount, electronvolts, residual
from driftwell.report.page.section import Section, paragraphs
from driftwell.report.page.table import Column, table
from driftwell.report.run_page.matter import Matter

Rows = NDArray[np.void]

RESIDUALS = (
    ("energy", "energy_residual", "shows the time step: it should stay in a band and not grow"),
    ("momentum", "momentum_residual", "closes to rounding, whatever the step"),
    ("angular momentum", "angular_residual", "closes to rounding, whatever the step"),
    ("charge", "charge_residual", "closes exactly"),
    ("count", "count_residual", "closes exactly"),
    (
        "third law",
        "third_law_residual",
        "sum of the forces of all pairs over their sizes",
    ),
    ("torque", "torque_residual", "the same of the torques"),
)
_ENERGY_IN = (
    ("work of drives", ("work_drive", "work_induced"), 1.0),
    ("sources", ("energy_sources",), 1.0),
    ("processes", ("energy_processes",), 1.0),
    ("moving frames", ("work_frames",), 1.0),
    ("re-entry of the cell", ("energy_cell",), 1.0),
    ("walls", ("energy_walls",), -1.0),
)


def account(matter: Matter) -> Section:
    """Residuals and the account itself."""
    ledger = matter.run.ledger
    if not len(ledger):
        return Section("ledger", "The ledger", paragraphs("No row of it has been sealed yet."))
    parts = [
        tag(
            "p",
            "At every record the accounts are closed: now = start + in − out. The residual is the "
            "difference of both sides over the largest amount that was in the account so far. A "
            "small one does not prove an answer: it says nothing of softening, of weights, or of "
            "fields other than the real ones.",
        ),
        _residuals(ledger),
        _account(ledger),
        *_exchanges(matter),
        *_force_error(matter, ledger),
    ]
    return Section("ledger", "The ledger", together(*parts))


def _residuals(ledger: Rows) -> Markup:
    rows = [
        [
            name,
            residual(float(ledger[column][-1])),
            residual(float(np.abs(ledger[column]).max())),
            words,
        ]
        for name, column, words in RESIDUALS
    ]
    columns = [
        Column("account"),
        Column("at the end", number=True),
        Column("at most", number=True),
        Column("how to read it"),
    ]
    return table(f"Relative residuals over {len(ledger)} rows of the ledger.", columns, rows)


def _account(ledger: Rows) -> Markup:
    """Start, in, out and now of energy, charge, count and the magnitudes of momenta."""
    first, last = ledger[0], ledger[-1]
    moved: list[str] = []
    given = taken = 0.0
    for name, names, sign in _ENERGY_IN:
        change = sign * sum(float(last[each]) for each in names)
        if change:
            moved.append(f"{name} {electronvolts(change)}")
        given, taken = (given + change, taken) if change > 0.0 else (given, taken - change)
    rows: list[list[Markup | str]] = [
        [
            "energy (kinetic, in fields, of pairs and images)",
            electronvolts(_energy(first)),
            electronvolts(given),
            electronvolts(taken),
            electronvolts(_energy(last)),
            "; ".join(moved) or "nothing",
        ],
        [
            "charge",
            amount(float(first["charge"]), "C"),
            amount(float(last["charge_sources"]), "C"),
            amount(float(last["charge_walls"]), "C"),
            amount(float(last["charge"]), "C"),
            "sources in, walls out",
        ],
        [
            "real particles",
            amount(float(first["count"]), "", 7),
            amount(float(last["count_born"]), "", 7),
            amount(float(last["count_lost"]), "", 7),
            amount(float(last["count"]), "", 7),
            "born in, lost out",
        ],
        _vector(first, last, "momentum", "momentum", "kg m/s", _MOMENTUM),
        _vector(first, last, "angular momentum", "angular_momentum", "kg m²/s", _ANGULAR),
    ]
    columns = [
        Column("account"),
        *(Column(each, number=True) for each in ("start", "in", "out", "now")),
        Column("by what"),
    ]
    caption = (
        "The account, weights included. Of momenta the magnitudes of what was there, given and "
        "taken stand here: they are vectors, and add as such."
    )
    return table(caption, columns, rows)


_MOMENTUM = (
    ("impulse_fields", "impulse_magnets", "impulse_images", "momentum_sources",
     "momentum_processes", "impulse_frames"),
    "momentum_walls",
)  # fmt: skip
_ANGULAR = (
    ("torque_fields", "torque_magnets", "torque_images", "angular_sources", "angular_processes",
     "torque_frames", "angular_cell"),
    "angular_walls",
)  # fmt: skip


def _vector(
    first: np.void, last: np.void, name: str, column: str, unit: str,
    parts: tuple[Sequence[str], str],
) -> list[Markup | str]:  # fmt: skip
    given = sum((last[each] for each in parts[0]), np.zeros(3))
    return [
        name,
        *(
            f"{_size(each):.3g} {unit}".replace("-", "−")
            for each in (first[column], given, last[parts[1]], last[column])
        ),
        "fields, magnets, sources and others in, walls out",
    ]


def _size(vector: NDArray[np.float64]) -> float:
    return math.hypot(*(float(each) for each in vector))


def _energy(row: np.void) -> float:
    return sum(float(row[name]) for name in ("kinetic", "field", "coulomb", "image"))


def _exchanges(matter: Matter) -> list[Markup]:
    """What each process gave."""
    header = matter.run.header
    if not header.processes:
        return []
    last = matter.run.rows("exchange")[-1]
    rows = [
        [name, electronvolts(float(given[0])), amount(float(given[7]), "", 6)]
        for name, given in zip(header.processes, last, strict=True)
    ]
    columns = [Column("process"), Column("energy given", True), Column("events", True)]
    return [table("What processes gave to the charges.", columns, rows)]


def _force_error(matter: Matter, ledger: Rows) -> list[Markup]:
    """How far the Coulomb sum erred, where it is no sum over all pairs."""
    error = ledger["coulomb_error"]
    if not error.any():
        return []
    asked = matter.run.header.coulomb_accuracy
    broken = "" if error.max() <= asked else ": less accurate than asked"
    return [
        tag(
            "p",
            f"The Coulomb force errs by {residual(float(error[-1]))} (rms) at the end, "
            f"{residual(float(error.max()))} at most; {asked:g} asked{broken}.",
        )
    ]
