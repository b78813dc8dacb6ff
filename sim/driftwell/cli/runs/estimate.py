"""``driftwell estimate FILE``: what a run or a sweep would be, before it is begun.

Without ``--measure`` things are counted and worked out by hand, and nothing is timed or solved; so
what times is imported only where it is asked for.
"""

from __future__ import annotations

import shlex
from collections.abc import Sequence
from typing import TYPE_CHECKING

from driftwell.assembly import Assembly
from driftwell.cli.runs.counts import (
    count_lines,
    counted_in_words,
    disk_in_words,
    laid_out,
    memory_in_words,
)
from driftwell.cli.runs.hand import caution_lines, lines_by_hand
from driftwell.cli.terminal.clock import by_the_clock, lasting
from driftwell.cli.terminal.compiling import tell_of_compiling
from driftwell.cli.terminal.printing import answer, tell, width
from driftwell.coulomb.summation import Summation
from driftwell.counted import counted
from driftwell.errors import DriftwellError, StepError
from driftwell.exit_codes import FINISHED, UNUSABLE
from driftwell.hand.scene import scene_of
from driftwell.kernels.compilation import first_compilation
from driftwell.scenario.read import LoadedScenario, read_scenario

if TYPE_CHECKING:
    from driftwell.estimate import Estimate
    from driftwell.study.forecast import Forecast, Outlook


def estimate_command(
    file: str,
    settings: Sequence[str],
    threads: int,
    seconds: float | None = None,
) -> int:
    """Print what it would cost and return 0, or why nothing could be run, with its exit code.

    seconds : s to time first steps; None: nothing is timed
    """
    from driftwell.study.read import is_study

    try:
        with first_compilation(tell_of_compiling):
            if is_study(file):
                return _of_study(file, settings, seconds)
            loaded = read_scenario(file, settings)
            tell(loaded.scenario.title)
            if seconds is None:
                return _counted(loaded, threads)
            return _timed(loaded, threads, seconds)
    except StepError as error:
        tell(f"The run would fail {error}")
        return error.exit_code
    except DriftwellError as error:
        tell(str(error))
        return error.exit_code
    except MemoryError as error:
        from driftwell.cli.runs.run import too_little_memory

        tell(too_little_memory(error))
        return UNUSABLE


def _counted(loaded: LoadedScenario, threads: int) -> int:
    """Print a run in numbers, and what can be said by hand."""
    found, parts = counted(loaded, threads)
    lines = [
        *count_lines(found, width()),
        *lines_by_hand(scene_of(parts)),
        *caution_lines(loaded.scenario),
    ]
    return FINISHED if answer(lines) else UNUSABLE


def _timed(loaded: LoadedScenario, threads: int, seconds: float) -> int:
    """Print what a run would cost by its first steps, and what can be said by hand."""
    from driftwell.estimate import estimate

    by_hand: list[str] = []

    def begins(parts: Assembly, summation: Summation) -> None:
        by_hand.extend(lines_by_hand(scene_of(parts)))  # before its charges are moved
        _begins(parts, summation)

    found = estimate(loaded, threads, seconds, begins, tell)
    lines = [*estimate_lines(found, width()), *by_hand, *caution_lines(loaded.scenario)]
    return FINISHED if answer(lines) else UNUSABLE


def _of_study(file: str, settings: Sequence[str], seconds: float | None) -> int:
    """Print what a sweep would cost."""
    from driftwell.study.forecast import forecast, outlook
    from driftwell.study.read import read_study

    study = read_study(file, settings)
    tell(study.title)
    cases = counted_in_words(len(study.cases), "case")
    if study.limit is not None:
        tell(
            f"A search begins with these and goes on from what they say, by "
            f"{study.limit.form.at_once} or more at a time, with at most "
            f"{study.limit.form.most_runs} in all; told is what the first ones cost."
        )
    if seconds is None:
        tell(f"{cases}; nothing is timed, --measure times some of them")
        seen = outlook(study)
        lines = [
            *outlook_lines(seen, width()),
            "",
            f"Of case {seen.case}, the largest:",
            *lines_by_hand(scene_of(seen.parts))[1:],
            *caution_lines(seen.parts.scenario),
        ]
        return FINISHED if answer(lines) else UNUSABLE
    tell(f"{cases}; some of them are timed")
    found = forecast(study, seconds)
    return FINISHED if answer(forecast_lines(found, width())) else UNUSABLE


def _begins(parts: Assembly, summation: Summation) -> None:
    """Say what is timed, as a run says what it does."""
    from driftwell.cli.runs.progress import steps_in_words

    tell(steps_in_words(parts.choice, parts.schedule, parts.everyone))
    if parts.unborn is not None:
        tell(
            f"{len(parts.unborn)} of the charges are born on the way. What is timed are the first "
            "steps, with few of them: later ones take longer, and the time told is too short."
        )
    tell(f"Coulomb sum: {summation.method}; {summation.because}")


def estimate_lines(found: Estimate, columns: int) -> list[str]:
    """What a run would cost, in lines of at most so many characters."""
    rows = [
        ("time", _time(found)),
        ("goes to", _goes_to(found)),
        ("steps", _steps(found)),
        ("memory", memory_in_words(found.memory)),
        ("disk", disk_in_words(found.disk, found.events)),
        *(("cheaper" if not k else "", words) for k, words in enumerate(_cheaper(found))),
    ]
    return laid_out(rows, columns)


def outlook_lines(found: Outlook, columns: int) -> list[str]:
    """A sweep in numbers, in lines of at most so many characters."""
    refused, why = found.refused
    charges = found.charges
    rows = [
        (
            "runs",
            f"{found.runs} of {counted_in_words(found.cases, 'case')}"
            + (f", {found.looked_at} of which were looked at" * (found.looked_at < found.cases)),
        ),
        (
            "charges",
            f"{charges[0]} to {charges[1]}" if charges[0] != charges[1] else f"{charges[0]} each",
        ),
        ("cores", found.sharing.because),
        ("memory", memory_in_words(found.memory)),
        ("time", "not timed: --measure times some of the runs"),
        *([("faults", f"{refused} of the cases cannot be run: {why}")] if refused else []),
    ]
    return laid_out(rows, columns)


def forecast_lines(found: Forecast, columns: int) -> list[str]:
    """What a sweep would cost, in lines of at most so many characters."""
    refused, why = found.refused
    rows = [
        (
            "time",
            f"about {lasting(found.seconds)}, from {lasting(found.least)} to "
            f"{lasting(found.most)}; begun now, done {by_the_clock(found.seconds)}. Runs that are "
            "there already are counted, though they are not computed again.",
        ),
        (
            "runs",
            f"{found.runs} of {counted_in_words(found.cases, 'case')}, "
            f"{lasting(found.work)} of work; "
            f"the longest takes {lasting(found.longest)}",
        ),
        ("cores", found.sharing.because),
        (
            "timed",
            ", ".join(
                f"{counted_in_words(each.charges, 'charge')} {lasting(each.seconds)}"
                for each in found.timed
            ),
        ),
        ("memory", memory_in_words(found.memory)),
        ("disk", disk_in_words(found.disk, 0)),
        *([("faults", f"{refused} of the cases cannot be run: {why}")] if refused else []),
    ]
    return laid_out(rows, columns)


def _time(found: Estimate) -> str:
    timed = found.timed
    text = (
        f"about {lasting(found.seconds)} on {counted_in_words(found.threads, 'thread')}, from "
        f"{lasting(found.least)} to {lasting(found.most)}; begun now, done "
        f"{by_the_clock(found.seconds)}. Timed: {counted_in_words(timed.steps, 'step')} in "
        f"{lasting(timed.seconds)}"
    )
    if found.ended:
        return f"{text}, in which every charge was lost: the run ends there."
    if timed.left < timed.alive:
        return (
            f"{text}, in which {timed.alive - timed.left} of {timed.alive} charges were lost; the "
            "shorter time is for losses that go on so."
        )
    return f"{text}. Compiling, once for each version, answers and pictures come on top."


def _goes_to(found: Estimate) -> str:
    whole = max(found.seconds, 1e-300)
    shares = sorted(found.parts.items(), key=lambda part: -part[1])
    return ", ".join(f"{name} {100.0 * seconds / whole:.0f} %" for name, seconds in shares)


def _steps(found: Estimate) -> str:
    records, snapshots, segments = (
        counted_in_words(number, noun)
        for number, noun in (
            (found.records, "record"),
            (found.snapshots, "snapshot"),
            (found.segments, "segment"),
        )
    )
    each = lasting(found.timed.step)
    return f"{found.steps}, of {each} each; {records}, {snapshots} and {segments}"


def _cheaper(found: Estimate) -> list[str]:
    if not found.changes:
        return ["nothing that is known to help"]
    return [
        f"{change.words}: {lasting(change.seconds)}"
        + "".join(f" (--set {shlex.quote(each)})" for each in change.settings)
        for change in found.changes
    ]
