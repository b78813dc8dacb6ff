"""Judgements as lines, for `driftwell run` and `driftwell info`."""

from __future__ import annotations

from collections.abc import Sequence

from driftwell.forms.paragraph import paragraph
from driftwell.judgement import Finding


def judgement_lines(findings: Sequence[Finding], width: int) -> list[str]:
    """What is to be said, one paragraph each; one line where all is as it should be.

    Grave ones stand before the answers already, and are left out here.
    """
    if not findings:
        return ["judgement: nothing found amiss"]
    mild = [each for each in findings if not each.grave]
    if not mild:
        return ["judgement: nothing amiss besides"]
    return ["judgement", *(line for each in mild for line in _lines(each, width))]


def _lines(finding: Finding, width: int) -> list[str]:
    return paragraph(f"{finding.name}: {finding.sentence}", width, "  ", "    ")
