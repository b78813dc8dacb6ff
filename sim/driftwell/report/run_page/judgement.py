"""What is to be thought of the run, and what can hurt where it is built."""

from __future__ import annotations

from driftwell.judgement import Finding
from driftwell.report.page.markup import NOTHING, Markup, coded, joined, tag, together
from driftwell.report.page.section import Section
from driftwell.report.run_page.matter import Matter
from driftwell.scenario.cautions import cautions
from driftwell.scenario.model import Scenario


def judgement(matter: Matter) -> Section:
    """Findings with figure, limit and remedy, and the cautions."""
    findings = sorted(matter.findings, key=lambda each: not each.grave)
    if findings:
        start = tag(
            "p",
            "Each figure below is beyond its limit; the last sentences say what to change.",
        )
        verdicts = together(start, joined(_finding(each) for each in findings))
    else:
        verdicts = tag(
            "div",
            tag("p", "✓ Nothing found amiss: every figure that is judged lies within its limit."),
            class_="box good",
        )
    return Section(
        "judgement", "Verdicts and cautions", together(verdicts, caution(matter.again.scenario))
    )


def _finding(finding: Finding) -> Markup:
    sign = "✗ Doubt: " if finding.grave else "! "
    return tag(
        "div",
        tag("h3", f"{sign}{finding.name}"),
        tag("p", coded(f"{finding.words[:1].upper()}{finding.words[1:]}.")),
        tag("p", tag("strong", "What to do: "), coded(finding.remedy)),
        class_=f"box {'bad' if finding.grave else 'fair'}",
    )


def caution(scenario: Scenario | None) -> Markup:
    """The hazards of what is simulated; nothing where none is known."""
    found = [] if scenario is None else cautions(scenario)
    if not found:
        return NOTHING
    return tag(
        "div",
        tag("h3", "⚠ Caution, where this is built"),
        tag("ul", joined(tag("li", each) for each in found)),
        class_="box bad",
    )
