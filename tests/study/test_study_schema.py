"""The JSON Schema of study files holds for good studies and fails for spoiled ones."""

from __future__ import annotations

import tomllib
from pathlib import Path
from typing import Any

import jsonschema
import pytest

from driftwell.scenario.schema import json_schema
from driftwell.study.form import StudyForm
from driftwell.study.read import is_study

FOLDER = Path(__file__).parents[2] / "scenarios" / "studies"
SHIPPED = [path for path in sorted(FOLDER.glob("*.toml")) if is_study(path)]
LIMIT = """\
title    = "How much charge passes?"
scenario = "beam-aperture.toml"
set      = ["cloud.pulse.count=300"]

[limit]
key        = "cloud.pulse.total_charge"
from       = "10 pC"
to         = "1 nC"
answer     = "transmission"
crosses    = 0.5
resolution = "2 %"
noise      = "scatter"
"""
VARY = """\
title    = "How wide?"
scenario = "beam-aperture.toml"
replicas = 2

[[vary]]
key    = "cloud.pulse.count"
values = [10, 20]

[[vary]]
key  = "duration"
from = "1 us"
to   = "2 us"

[sample]
points = 4
"""


@pytest.fixture(scope="module")
def validator() -> jsonschema.Draft202012Validator:
    found: dict[str, Any] = json_schema(StudyForm, "driftwell study")
    jsonschema.Draft202012Validator.check_schema(found)
    assert "driftwell study" == found["title"]
    return jsonschema.Draft202012Validator(found)


@pytest.mark.parametrize("path", SHIPPED, ids=lambda path: path.name)
def test_shipped_studies_are_valid(validator: jsonschema.Draft202012Validator, path: Path) -> None:
    assert [] == list(validator.iter_errors(tomllib.loads(path.read_text(encoding="utf-8"))))
    assert len(SHIPPED) > 2


@pytest.mark.parametrize(
    ("text", "old", "new"),
    [
        (LIMIT, 'scenario = "beam-aperture.toml"', ""),
        (LIMIT, "[limit]", "[[limit]]"),
        (LIMIT, "crosses    = 0.5", ""),
        (LIMIT, "from       =", "form ="),
        (LIMIT, '"scatter"', '"some"'),
        (LIMIT, '"2 %"', '"2 %"\nconfidence = 2'),
        (LIMIT, '"2 %"', '"2 %"\npoints = 2'),
        (VARY, "replicas = 2", "replicas = 0"),
        (VARY, "[10, 20]", "10"),
        (VARY, "points = 4", ""),
    ],
)
def test_a_spoiled_study_is_not_valid_and_the_whole_one_is(
    validator: jsonschema.Draft202012Validator, text: str, old: str, new: str
) -> None:
    assert old in text
    assert [] == list(validator.iter_errors(tomllib.loads(text)))
    assert [] != list(validator.iter_errors(tomllib.loads(text.replace(old, new, 1))))
