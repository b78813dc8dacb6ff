"""``driftwell estimate FILE``: what a run or a sweep would cost, before it is begun."""

from __future__ import annotations

import shlex
from collections.abc import Sequence
from pathlib import Path

from driftwell.assembly import Assembly
from driftwell.cli.clock import by_the_clock, lasting
from driftwell.cli.printing import answer, tell, width
from driftwell.cli.progress import steps_in_words, tell_of_compiling
from driftwell.cli.run_command import UNUSABLE, too_little_memory
from driftwell.coulomb.summation import Summation
from driftwell.errors import DriftwellError, StepError
from driftwell.estimate import Estimate, estimate
from driftwell.forms.paragraph import paragraph
from driftwell.kernels.compilation import first_compilation
from driftwell.scenario.read import read_scenario
from driftwell.scenario.room import free_memory, free_space, in_words
from driftwell.study.forecast import Forecast, forecast
from driftwell.study.read import Study, is_study, read_study

_COLUMN = 9
_FEW = 0.01
"""Part of the disk that losses and passages must take to be spoken of."""


def estimate_command(file: str, settings: Sequence[str], threads: int, seconds: float) -> int:
    """Print what it would cost and return 0, or why nothing could be run, with its exit code."""
    try:
        if is_study(file):
            return _of_study(read_study(file, settings), seconds)
        loaded = read_scenario(file, settings)
        tell(loaded.scenario.title)
        with first_compilation(tell_of_compiling):
            found = estimate(loaded, threads, seconds, _begins, tell)
    except StepError as error:
        tell(f"The run would fail {error}")
        return error.exit_code
    except DriftwellError as error:
        tell(str(error))
        return error.exit_code
    except MemoryError as error:
        tell(too_little_memory(error))
        return UNUSABLE
    return 0 if answer(estimate_lines(found, width())) else UNUSABLE


def _of_study(study: Study, seconds: float) -> int:
    """Print what a sweep would cost."""
    tell(study.title)
    tell(f"{_counted(len(study.cases), 'case')}; some of them are timed")
    if study.limit is not None:
        tell(
            f"A search begins with these and goes on from what they say, by "
            f"{study.limit.form.at_once} or more at a time, with at most "
            f"{study.limit.form.most_runs} in all; told is what the first ones cost."
        )
    with first_compilation(tell_of_compiling):
        found = forecast(study, seconds)
    return 0 if answer(forecast_lines(found, width())) else UNUSABLE


def _begins(parts: Assembly, summation: Summation) -> None:
    """Say what is timed, as a run says what it does."""
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
        ("memory", _of_memory(found.memory)),
        ("disk", _of_disk(found.disk, found.events)),
        *(("cheaper" if not k else "", words) for k, words in enumerate(_cheaper(found))),
    ]
    return _laid_out(rows, columns)


def _laid_out(rows: Sequence[tuple[str, str]], columns: int) -> list[str]:
    """Names, and beside them what is said."""
    return [
        line
        for name, words in rows
        for line in paragraph(words, columns, name.ljust(_COLUMN), " " * _COLUMN)
    ]


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
            f"{found.runs} of {_counted(found.cases, 'case')}, {lasting(found.work)} of work; the "
            f"longest takes {lasting(found.longest)}",
        ),
        ("cores", found.sharing.because),
        (
            "timed",
            ", ".join(
                f"{_counted(each.charges, 'charge')} {lasting(each.seconds)}"
                for each in found.timed
            ),
        ),
        ("memory", _of_memory(found.memory)),
        ("disk", _of_disk(found.disk, 0)),
        *([("faults", f"{refused} of the cases cannot be run: {why}")] if refused else []),
    ]
    return _laid_out(rows, columns)


def _time(found: Estimate) -> str:
    timed = found.timed
    text = (
        f"about {lasting(found.seconds)} on {_counted(found.threads, 'thread')}, from "
        f"{lasting(found.least)} to {lasting(found.most)}; begun now, done "
        f"{by_the_clock(found.seconds)}. Timed: {_counted(timed.steps, 'step')} in "
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
    return (
        f"{found.steps}, of {lasting(found.timed.step)} each; {_counted(found.records, 'record')}, "
        f"{_counted(found.snapshots, 'snapshot')} and {_counted(found.segments, 'segment')}"
    )


def _of_memory(needed: int) -> str:
    free = free_memory()
    text = f"about {in_words(needed)}"
    return text if free is None else f"{text}; {in_words(free)} are free"


def _of_disk(needed: int, events: int) -> str:
    text = f"about {in_words(needed)}"
    if events > _FEW * needed:
        text += f", and {in_words(events)} more if every charge meets every surface once"
    space = free_space(Path())
    if space is None:
        return text
    text += f"; {in_words(space)} are free here"
    if needed > space:
        text += ", too little: record less often, or name a folder on a larger disk with -o"
    return text


def _cheaper(found: Estimate) -> list[str]:
    if not found.changes:
        return ["nothing that is known to help"]
    return [
        f"{change.words}: {lasting(change.seconds)}"
        + "".join(f" (--set {shlex.quote(each)})" for each in change.settings)
        for change in found.changes
    ]


def _counted(number: int, noun: str) -> str:
    return f"{number} {noun}{'s' * (number != 1)}"
