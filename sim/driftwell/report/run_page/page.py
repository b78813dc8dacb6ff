"""The report of a run: all sections in their order."""

from __future__ import annotations

from driftwell.record.reader import Run
from driftwell.report.page.document import Page, document
from driftwell.report.page.markup import Markup
from driftwell.report.page.section import Section
from driftwell.report.player.player import player
from driftwell.report.run_page.account import account
from driftwell.report.run_page.answers import answers
from driftwell.report.run_page.judgement import judgement
from driftwell.report.run_page.made import made
from driftwell.report.run_page.matter import matter_of
from driftwell.report.run_page.pictures import pictures
from driftwell.report.run_page.reading import reading_notes
from driftwell.report.run_page.scenario_words import scenario_words
from driftwell.report.run_page.surfaces import surfaces
from driftwell.report.run_page.verdict import verdict


def run_page(run: Run) -> str:
    """The text of the page.

    Raises RecordError where the record is damaged.
    """
    matter = matter_of(run)
    header = run.header
    parts = player(run, matter.again.loaded)
    motion = [] if parts is None else [Section("motion", "In motion", Markup(parts.markup))]
    return document(
        Page(
            header.title,
            "run",
            verdict(matter),
            [
                answers(matter),
                *motion,
                judgement(matter),
                scenario_words(matter.again, header.scenario, header.settings),
                pictures(matter.scene),
                account(matter),
                surfaces(matter),
                made(matter),
                reading_notes(),
            ],
            () if parts is None else (parts.style,),
            () if parts is None else (parts.script,),
        )
    )
