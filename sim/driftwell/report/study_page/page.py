"""The report of a study: of a sweep, a convergence study or the search for a limit."""

from __future__ import annotations

from pathlib import Path

from driftwell.report.page.document import document
from driftwell.report.study_page.convergence import convergence_report
from driftwell.report.study_page.limit import limit_report
from driftwell.report.study_page.sweep import sweep_report
from driftwell.study.again.folder import kind_of, study_table

_REPORTS = {"sweep": sweep_report, "limit": limit_report, "convergence": convergence_report}


def study_page(folder: Path, target: Path) -> str:
    """The text of the page, to be written as `target`.

    Raises RecordError where the study cannot be read.
    """
    _, table = study_table(folder)
    return document(_REPORTS[kind_of(table)](folder, target))
