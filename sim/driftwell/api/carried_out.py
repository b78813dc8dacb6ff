"""A run started from Python."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

from driftwell.api.progress import Interrupt, Watcher
from driftwell.api.run import Run
from driftwell.api.threads import usable_threads
from driftwell.errors import DriftwellError, FullError, StepError
from driftwell.fields.from_python.form import FieldFromPython
from driftwell.forms import Time, read_quantity
from driftwell.record.claim import SCENARIO_FILE
from driftwell.record.reader import open_run
from driftwell.run import FAILED, FULL, STOPPED, run
from driftwell.scenario.digest import files_named
from driftwell.scenario.read import LoadedScenario


def carried_out(
    loaded: LoadedScenario,
    folder: Path,
    *,
    threads: int | None = None,
    progress: bool = True,
    fresh: bool = False,
    stop_after: float | str | None = None,
    force: bool = False,
) -> Run:
    """Execute a scenario; see :meth:`driftwell.api.scenario.Scenario.run`."""
    wish = Interrupt(progress)
    watcher = Watcher(wish, progress)
    with wish.listening():
        try:
            result = run(
                _with_command(loaded, folder),
                folder,
                watcher,
                usable_threads(threads),
                fresh=fresh,
                stop_after=_seconds(stop_after),
                force=force,
            )
        finally:
            watcher.ends()
    outcome = result.outcome
    if outcome.word == FULL:
        raise FullError(outcome.sentence)
    if outcome.word == FAILED:
        raise StepError(
            f"{outcome.sentence} What was recorded before is in {folder}: "
            f"driftwell.open_run({str(folder)!r}) reads it."
        )
    if outcome.word == STOPPED and wish.wanted:
        raise KeyboardInterrupt(f"{outcome.sentence} (the record: {folder})")
    return Run(open_run(folder), tuple(watcher.told_so_far))


def _with_command(loaded: LoadedScenario, folder: Path) -> LoadedScenario:
    """With the command that makes the run again from its own folder, where one does.

    None does where files are named, which count from elsewhere, or a field is a function.
    """
    held = loaded.scenario
    unfit = files_named(held) or any(isinstance(each, FieldFromPython) for each in held.field)
    if not loaded.from_code or unfit:
        return loaded
    return replace(loaded, path=folder / SCENARIO_FILE, from_code=False)


def _seconds(given: float | str | None) -> float | None:
    """A time by the clock, s. Raises DriftwellError where it is none."""
    if given is None:
        return None
    try:
        seconds = read_quantity(Time, given) if isinstance(given, str) else float(given)
    except (TypeError, ValueError) as fault:
        why = f'stop_after = {given!r}: needs seconds, or a time such as "7 h"'
        raise DriftwellError(why) from fault
    if not seconds > 0.0:
        raise DriftwellError(f"stop_after = {given!r}: must be greater than 0 s")
    return seconds
