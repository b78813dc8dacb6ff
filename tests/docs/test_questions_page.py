"""The page of questions lists every kind with its unit, and no other."""

from __future__ import annotations

import re
from pathlib import Path

from driftwell.answers.table import QUESTION_KINDS
from driftwell.forms.declared import kind_name

PAGE = Path(__file__).resolve().parents[2] / "docs" / "questions.md"


def test_every_kind_of_question_stands_in_the_page_with_its_unit() -> None:
    rows = re.findall(r"^\| `([a-z-]+)` \| (.*) \| ([^|]*) \| [^|]* \|$", PAGE.read_text(), re.M)
    expected = {str(kind_name(kind, "ask")): kind.unit for kind in QUESTION_KINDS}
    listed = [(name, unit) for name, _, unit in rows if name != "ask"]
    assert expected == dict(listed)
    assert len(expected) == len(listed)
