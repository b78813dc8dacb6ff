"""How the run was made: time, machine, programs, digest, and the command that makes it again."""

from __future__ import annotations

from driftwell.report.page.copied import to_copy
from driftwell.report.page.markup import Markup, tag, together
from driftwell.report.page.numbers import amount, count_of
from driftwell.report.page.section import Section
from driftwell.report.page.table import Cell, listed
from driftwell.report.run_page.matter import Matter


def made(matter: Matter) -> Section:
    """All that is needed to make it again, and what it took."""
    run = matter.run
    header, outcome = run.header, run.outcome
    rows: list[tuple[Cell, Cell]] = [("begun", header.created)]
    if outcome.steps is not None and outcome.wall_time is not None:
        pace = outcome.wall_time / outcome.steps if outcome.steps else 0.0
        rows.append(
            (
                "took",
                f"{amount(outcome.wall_time, 's', 3)} by the clock for "
                f"{count_of(outcome.steps, 'step')}, {amount(pace, 's', 3)} each",
            )
        )
    rows += [
        ("reached", f"{amount(run.end_time, 's', 6)} of {amount(header.duration, 's', 6)}"),
        ("steps", f"{header.scheme}, {amount(header.step, 's', 6)} each"),
        ("Coulomb sum", f"{header.coulomb_method}: {header.coulomb_because or 'no reason given'}"),
    ]
    if header.motion:
        rows.append(("fastest motion", f"{header.motion}, {amount(header.motion_rate, 'rad/s')}"))
    if header.images:
        rows.append(("images", header.images))
    if header.field_digest:
        rows.append(("solved field", f"rms error {header.field_error:.1e}, {header.field_digest}"))
    rows += [
        ("seed", str(header.seed)),
        ("settings", ", ".join(header.settings) or "as in the file"),
        (
            "machine",
            f"{header.processor}; {count_of(header.threads, 'thread')} on "
            f"{count_of(header.cores, 'processor')}",
        ),
        (
            "programs",
            f"driftwell {header.driftwell_version}, Python {header.python_version}, numpy "
            f"{header.numpy_version}, numba {header.numba_version}, h5py {header.h5py_version}",
        ),
        ("record", _record(matter)),
        ("digest of the content", tag("code", header.digest or "none")),
        ("sha256 of the text", tag("code", header.scenario_sha256)),
    ]
    return Section("made", "How it was made", together(_again(header.command), listed(rows)))


def _again(command: str) -> Markup:
    if not command:
        return tag("p", "It was made by a program, not by the command line.")
    return together(tag("p", "This command makes the same run again:"), to_copy(command, "command"))


def _record(matter: Matter) -> str:
    run = matter.run
    size = sum(facts.bytes for facts in run.segments)
    return (
        f"{count_of(len(run.ledger), 'row')} of the ledger, "
        f"{count_of(len(run.snapshots), 'snapshot')}, {len(run.header.tracked)} charges tracked; "
        f"{count_of(len(run.segments), 'segment')}, {amount(size, 'B', 3)}"
    )
