"""A run in a few lines, for `driftwell info RUN`."""

from __future__ import annotations

import shlex
from functools import partial

import numpy as np

from driftwell.answers.answer_lines import answer_lines, common_lines
from driftwell.constants import ELEMENTARY_CHARGE
from driftwell.errors import RecordError
from driftwell.forms import spelled
from driftwell.record.header import Header
from driftwell.record.layout import ROWS
from driftwell.record.reader import Run

_RESIDUALS = (
    ("energy", "energy_residual"),
    ("momentum", "momentum_residual"),
    ("angular momentum", "angular_residual"),
    ("charge", "charge_residual"),
    ("count", "count_residual"),
    ("third law", "third_law_residual"),
    ("torque", "torque_residual"),
)


WIDTH = 100
"""Characters of a line, where nothing else is asked."""


def summary(run: Run, width: int = WIDTH, sign: str = "±") -> list[str]:
    """What the run is, how it ended, what it holds and what it answers.

    A part that cannot be read says so in its place; damaged files are listed at the end.

    width, sign : as for :func:`driftwell.answers.answer_lines.answer_lines`
    """
    lines = [*_identity(run)]
    for title, part in (
        ("clouds", _clouds),
        ("ledger", _ledger),
        ("answers", partial(_answers, width=width - 2, sign=sign)),
        ("record", _datasets),
    ):
        try:
            found = part(run)
        except RecordError as fault:
            found = [f"cannot be read: {fault}"]
        lines += ["", title, *(f"  {line}" for line in found)]
    damage = run.damage()
    if damage:
        lines += ["", "damage", *(f"  {line}" for line in damage)]
    return lines


def _identity(run: Run) -> list[str]:
    header, outcome = run.header, run.outcome
    lines = [
        header.title,
        f"{outcome.word}: {outcome.sentence}",
        f"reached {spelled(run.end_time, 's')} of {spelled(header.duration, 's')}",
    ]
    if outcome.steps is not None:
        lines.append(f"{outcome.steps} steps in {outcome.wall_time:.1f} s by the clock")
    return [
        *lines,
        f"{header.scheme}, step {spelled(header.step, 's')}, seed {header.seed}",
        f"Coulomb sum {header.coulomb_method}: {header.coulomb_because or 'no reason given'}",
        *([f"images {header.images}{_within(header)}"] if header.images else []),
        f"begun {header.created} on {header.processor}, {header.threads} threads on "
        f"{header.cores} processors",
        f"driftwell {header.driftwell_version}, Python {header.python_version}, numpy "
        f"{header.numpy_version}, numba {header.numba_version}, h5py {header.h5py_version}",
        f"settings: {shlex.join(header.settings) or 'as in the file'}",
        f"made by: {header.command or 'a program, not the command line'}",
        f"digest of the content: {header.digest or 'none'}",
        f"sha256 of the scenario's text: {header.scenario_sha256}",
    ]


def _within(header: Header) -> str:
    """How near to the conductors the images' force still grows."""
    if header.images_closest <= 0.0:
        return ""
    return f"; their force stops growing within {spelled(header.images_closest, 'm', 3)} of it"


def _clouds(run: Run) -> list[str]:
    losses, crossings = run.losses(), run.crossings()
    lines = []
    for cloud in run.header.clouds:
        mine = losses[losses["cloud"] == cloud.index]
        born = run.born(cloud.name)
        line = f"{cloud.name}: {born} {cloud.species}{' born' * cloud.emitted}"
        if cloud.weight != 1.0:
            line += f", each standing for {cloud.weight:.6g}"
        line += f"; {born - len(mine)} left"
        for index, name in enumerate(run.header.walls):
            count = np.count_nonzero(mine["wall"] == index)
            line += f", {count} lost on {name}" if count else ""
        lines.append(line)
    return lines + [
        f"detector {name}: {np.count_nonzero(crossings['detector'] == index)} passages"
        for index, name in enumerate(run.detectors)
    ]


def _ledger(run: Run) -> list[str]:
    ledger = run.ledger
    if not len(ledger):
        return ["no row sealed yet"]
    width = max(len(name) for name, _ in _RESIDUALS)
    lines = [
        f"{name.ljust(width)}  residual {ledger[column][-1]: .2e} at the end, "
        f"{np.abs(ledger[column]).max():.2e} at most"
        for name, column in _RESIDUALS
    ]
    lines += _given(run)
    error = ledger["coulomb_error"]
    if error.any():
        broken = "" if error.max() <= run.header.coulomb_accuracy else ": less accurate than asked"
        lines.append(
            f"Coulomb force errs by {error[-1]:.1e} (rms) at the end, {error.max():.1e} at most; "
            f"{run.header.coulomb_accuracy:g} asked{broken}"
        )
    return lines


def _given(run: Run) -> list[str]:
    """What each process gave to the charges."""
    if not run.header.processes:
        return []
    last = run.rows("exchange")[-1]
    lines = []
    for name, given in zip(run.header.processes, last, strict=True):
        line = f"{name} gave {spelled(given[0] / ELEMENTARY_CHARGE, 'eV', 4)}"
        lines.append(f"{line} in {given[7]:.6g} events" if given[7] else line)
    return lines


def _answers(run: Run, width: int, sign: str) -> list[str]:
    if run.answers:
        return answer_lines(run.answers, width, sign) + common_lines(run.answers, width)
    return ["unfinished" if run.outcome.exit_code is None else "none asked"]


def _datasets(run: Run) -> list[str]:
    sizes = run.header.sizes
    lines = []
    for entry in ROWS:
        count = sum(facts.rows[str(entry.shape[0])] for facts in run.segments)
        row_shape = entry.row_shape(sizes)
        row_bytes = entry.dtype().itemsize * int(np.prod(row_shape))
        shape = " x ".join(str(length) for length in (count, *row_shape))
        lines.append(f"{entry.path}: {shape}, {_size(count * row_bytes)}")
    count = len(run.segments)
    total = sum(facts.bytes for facts in run.segments)
    return [
        *lines,
        f"snapshots: {len(run.snapshots)}",
        f"{count} segment{'s' * (count != 1)}, {_size(total)} in all",
    ]


def _size(count: int) -> str:
    """Bytes in words."""
    for unit, scale in (("GB", 1e9), ("MB", 1e6), ("kB", 1e3)):
        if count >= scale:
            return f"{count / scale:.3g} {unit}"
    return f"{count} bytes"
