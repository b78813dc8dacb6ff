"""Sections that the pages of all studies have: scenario, failures, how it was made."""

from __future__ import annotations

import re
import shlex
from collections.abc import Sequence
from pathlib import Path

from driftwell.record.reader import Run
from driftwell.report.again import read_again
from driftwell.report.page.copied import to_copy
from driftwell.report.page.markup import Markup, coded, tag, together
from driftwell.report.page.numbers import count_of
from driftwell.report.page.section import Section, folded, paragraphs
from driftwell.report.page.table import Cell, Column, listed, table
from driftwell.report.run_page.judgement import caution
from driftwell.report.run_page.scenario_words import told
from driftwell.study.progress import Failure
from driftwell.study.read import Study
from driftwell.study.summary import in_words

_NUMBER = re.compile(r"[-+]?\d[\d.]*(?:e[-+]?\d+)?|[0-9a-f]{16}")
_MOST_REASONS = 20


def failed(failures: Sequence[Failure]) -> list[Section]:
    """Why runs came to nothing, those of the same reason together; none where all is well."""
    if not failures:
        return []
    alike: dict[str, list[Failure]] = {}
    for failure in failures:
        alike.setdefault(_NUMBER.sub("#", failure.reason), []).append(failure)
    groups = sorted(alike.values(), key=len, reverse=True)
    rows: list[Sequence[Cell]] = [
        [
            ", ".join(str(each.number) for each in group[:8]) + (" ..." if len(group) > 8 else ""),
            str(len(group)),
            group[0].reason,
            ", ".join(group[0].settings),
        ]
        for group in groups[:_MOST_REASONS]
    ]
    columns = [
        Column("runs"),
        Column("how many", True),
        Column("why, as the first says"),
        Column("settings of the first"),
    ]
    more = len(groups) - _MOST_REASONS
    parts = [table("Runs without an answer.", columns, rows)]
    if more > 0:
        parts.append(tag("p", f"{count_of(more, 'other reason')} left out here."))
    parts.append(tag("p", coded("`--retry-failed` with the same command starts them over.")))
    return [Section("failed", "What failed, and why", together(*parts))]


def scenario(study: Study, run: Run | None, whose: str) -> Section:
    """The scenario in words as one run has it, and the texts."""
    parts: list[Markup] = []
    if run is None:
        parts.append(tag("p", "No run is there that could tell it in words."))
    else:
        again = read_again(run)
        parts += [tag("p", whose), told(again)]
        if run.header.settings:
            given = ", ".join(run.header.settings)
            parts.append(tag("p", "Its settings: ", tag("code", given)))
        parts.append(caution(again.scenario))
    for what, text in (("study", study.text), ("scenario", study.scenario_text)):
        summary = f"The {what} file, as given ({text.count(chr(10)) + 1} lines)"
        parts.append(folded(summary, tag("pre", tag("code", text))))
    return Section("scenario", "The scenario", together(*parts))


def made(
    study: Study, command: Sequence[str], run: Run | None, seconds: float, runs: int
) -> Section:
    """The command, what it took, and on what."""
    rows: list[tuple[Cell, Cell]] = [
        ("runs", f"{count_of(runs, 'run')}, {in_words(seconds)} of work in all"),
        ("settings of all", ", ".join(study.settings) or "none besides the study's"),
    ]
    if run is not None:
        header = run.header
        rows += [
            ("first run begun", header.created),
            ("machine of that", header.processor),
            (
                "programs",
                f"driftwell {header.driftwell_version}, Python {header.python_version}, numpy "
                f"{header.numpy_version}, numba {header.numba_version}, h5py {header.h5py_version}",
            ),
        ]
    again = together(
        tag(
            "p",
            "To make it again, save the texts folded above under the names used here, and give:",
        ),
        to_copy(shlex.join(command), "command"),
    )
    return Section("made", "How it was made", together(again, listed(rows)))


def study_command(word: str, study: Study) -> list[str]:
    """The command of a study whose file is in the page; settings of the file are not repeated."""
    own = _settings_of(study.text)
    given = study.settings[len(own) :] if study.settings[: len(own)] == own else study.settings
    name = Path(study.path).name
    return ["driftwell", word, name, *(part for each in given for part in ("--set", each))]


def _settings_of(text: str) -> tuple[str, ...]:
    from driftwell.scenario.source import raw_table

    return tuple(str(each) for each in raw_table(text, "study.toml").get("set", ()))


def none_yet() -> Section:
    """Where no run has answered anything."""
    return Section("answers", "Answers", paragraphs("No run has answered anything yet."))
