"""``driftwell limit STUDY``: find the value of a key at which an answer crosses a threshold."""

from __future__ import annotations

from collections.abc import Sequence
from functools import partial
from pathlib import Path

from driftwell import exit_codes
from driftwell.cli.studies.drawing import drawn
from driftwell.cli.studies.engines import Engines
from driftwell.cli.studies.place import Place
from driftwell.cli.studies.progress import SweepDisplay
from driftwell.cli.terminal.printing import answer, tell, width
from driftwell.cli.terminal.stop_wish import StopWish
from driftwell.errors import DriftwellError
from driftwell.record.summary import WIDTH
from driftwell.study.catalogue import Catalogue
from driftwell.study.cores import Sharing
from driftwell.study.limit_run import Searched, find_limit, limit_of
from driftwell.study.limit_search import (
    FOUND,
    NO_CROSSING,
    NOT_REACHED,
    RUNS_FAILED,
    SEVERAL,
    TOO_NOISY,
    Search,
)
from driftwell.study.limit_table import LIMIT_CSV, write_limit
from driftwell.study.limit_words import asked_in_words, limit_lines, progress_told
from driftwell.study.progress import Failure, SweepProgress
from driftwell.study.read import Study, read_study
from driftwell.study.sweep_folder import CATALOGUE_FILE, keep_summary

EXIT_CODES = {
    FOUND: exit_codes.FINISHED,
    RUNS_FAILED: exit_codes.SOME_FAILED,
    NO_CROSSING: exit_codes.NO_CROSSING,
    SEVERAL: exit_codes.SEVERAL_CROSSINGS,
    TOO_NOISY: exit_codes.TOO_NOISY,
    NOT_REACHED: exit_codes.TOO_NOISY,
}
"""What a search came to, as an exit code; the others are those of a sweep."""


def limit_command(
    file: str,
    output: str | None,
    settings: Sequence[str],
    workers: int | None,
    threads: int | None,
    retry_failed: bool,
    pictures: bool,
    place: Place,
) -> int:
    """Search, and say what was found; returns the exit code."""
    folder = Path(output) if output is not None else Path(f"{Path(file).stem}-limit")
    try:
        study = read_study(file, settings)
        asked = limit_of(study)
        tell(study.title)
        tell(asked_in_words(asked))
        found, written = _carried_out(
            study, folder, workers, threads, retry_failed, pictures, place
        )
    except DriftwellError as error:
        tell(str(error))
        return error.exit_code
    if found.verdict is None:
        return exit_codes.STOPPED
    code = EXIT_CODES[found.verdict.word]
    return code if written or code else exit_codes.UNUSABLE


class LimitDisplay(SweepDisplay):
    """Shows the rounds of a search, each of which is a sweep; settled things are said once."""

    def __init__(self, wish: StopWish) -> None:
        super().__init__(wish)
        self._search: Search | None = None
        self._begun = False
        self._told: set[int] = set()

    def looks(self, search: Search, wanted: int) -> None:
        """A round begins: how far the search is."""
        self.ends()
        self.told(progress_told(search, wanted))

    def begins(self, sharing: Sharing, progress: SweepProgress) -> None:
        """How the cores are shared, before the first round that computes anything."""
        if not self._begun:
            self._begun = True
            super().begins(sharing, progress)

    def failed(self, failure: Failure) -> None:
        """Each failure once: later rounds meet it again."""
        if failure.number not in self._told:
            self._told.add(failure.number)
            super().failed(failure)


def _carried_out(
    study: Study,
    folder: Path,
    workers: int | None,
    threads: int | None,
    retry_failed: bool,
    pictures: bool,
    place: Place,
) -> tuple[Searched, bool]:
    """What the search came to, and whether all that was to be written and drawn could be."""
    engines = Engines(place.cluster(), workers)
    wish = StopWish(lambda: True, engines.kill)
    display = LimitDisplay(wish)
    with engines.working_in(folder, study.text, study.scenario_text, wish) as changed:
        if changed:
            tell(
                f"{folder}: the study or its scenario was changed since the last search; runs of "
                "both that are the same are kept, others of the last one stay in the folder."
            )
        with Catalogue(folder / CATALOGUE_FILE) as catalogue:
            try:
                found = find_limit(
                    study,
                    folder,
                    catalogue,
                    display,
                    retry_failed=retry_failed,
                    workers=workers,
                    threads=threads,
                    engine_of=engines.engine,
                    sharing_of=engines.sharing,
                )
            finally:
                display.ends()
        write_limit(folder, found)
        written = _report(folder, found)
        if pictures:
            written = _draw(folder, found) and written
    return found, written


def _report(folder: Path, found: Searched) -> bool:
    """Print what was found and keep it in the folder; whether it could be printed."""
    last = ["", f"runs: {folder / LIMIT_CSV}"]
    keep_summary(folder, [*limit_lines(found, WIDTH), *last])
    return answer(["", *limit_lines(found, width()), *last])


def _draw(folder: Path, found: Searched) -> bool:
    """Draw the search and say where; whether that could be done."""
    from driftwell.report.study_pictures.limit_picture import draw_limit

    return drawn(partial(draw_limit, folder, found), lambda made: f"picture: {made[0]}")
