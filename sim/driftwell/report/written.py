"""A report written: which kind of folder it is of, and the file as a whole."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

from driftwell.errors import RecordError
from driftwell.record.commit import commit
from driftwell.record.index import SEGMENTS
from driftwell.record.master import MASTER
from driftwell.record.reader import open_run
from driftwell.study.sweep_folder import CATALOGUE_FILE

REPORT_FILE = "report.html"


@dataclass(frozen=True, slots=True)
class Written:
    """Where a report is, and how many bytes it has."""

    path: Path
    bytes: int


def write_report(folder: str | Path, path: str | Path | None = None) -> Written:
    """Write the report of a run or a study as one HTML file, ``report.html`` in its folder.

    path : another place for it

    Raises RecordError where there is no run or study, its record is damaged, or the file cannot
    be written.
    """
    place = Path(folder)
    if place.name in (MASTER, CATALOGUE_FILE) and place.is_file():
        place = place.parent
    target = place / REPORT_FILE if path is None else Path(path)
    text = _text(place, target)
    content = text.encode("utf-8")
    try:
        if target.is_dir():
            raise RecordError(f"{target}: is a folder; -o needs the name of a file.")
        commit(target, content)
    except (OSError, ValueError) as fault:
        why = getattr(fault, "strerror", None) or fault
        raise RecordError(
            f"{target}: the report cannot be written ({why}). Make space or give access, or name "
            "another file with -o."
        ) from fault
    return Written(target, len(content))


def _text(folder: Path, target: Path) -> str:
    from driftwell.report.run_page.page import run_page

    if (folder / CATALOGUE_FILE).is_file():
        from driftwell.report.study_page.page import study_page

        return study_page(folder, target)
    if (folder / MASTER).is_file() or (folder / SEGMENTS).is_dir():
        return run_page(open_run(folder))
    raise RecordError(
        f"{folder}: holds neither a run nor a study; a folder that `driftwell run`, `sweep`, "
        "`converge` or `limit` wrote is needed."
    )
