"""The JSON Schema holds for every good scenario, fails for spoiled ones, and helps an editor."""

from __future__ import annotations

import tomllib
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import jsonschema
import pytest

from driftwell.forms.declared import Keys, forms_within
from driftwell.scenario.model import Scenario
from driftwell.scenario.schema import json_schema
from tests.scenario.good_scenarios import GOOD, TRAP

SHIPPED = sorted((Path(__file__).parents[2] / "scenarios").glob("*.toml"))


@pytest.fixture(scope="module")
def validator() -> jsonschema.Draft202012Validator:
    return jsonschema.Draft202012Validator(json_schema())


def objects(schema: Any) -> Iterator[dict[str, Any]]:
    if isinstance(schema, dict):
        yield schema
        for value in schema.values():
            yield from objects(value)
    elif isinstance(schema, list):
        for value in schema:
            yield from objects(value)


def test_the_schema_is_valid_itself() -> None:
    jsonschema.Draft202012Validator.check_schema(json_schema())


@pytest.mark.parametrize("text", GOOD.values(), ids=GOOD)
def test_good_scenarios_are_valid(validator: jsonschema.Draft202012Validator, text: str) -> None:
    assert [] == list(validator.iter_errors(tomllib.loads(text)))


@pytest.mark.parametrize("path", SHIPPED, ids=lambda path: path.name)
def test_shipped_scenarios_are_valid(
    validator: jsonschema.Draft202012Validator, path: Path
) -> None:
    assert [] == list(validator.iter_errors(tomllib.loads(path.read_text(encoding="utf-8"))))


@pytest.mark.parametrize(
    ("old", "new"),
    [
        ('duration = "2 ms"', "duration = 2"),
        ('duration = "2 ms"', 'duration = "-2 ms"'),
        ('duration = "2 ms"', 'duration = "2"'),
        ("seed     = 7", "sed = 7"),
        ("seed     = 7", "seed = -7"),
        ("count   = 200", "count = 0"),
        ("count   = 200", "count = 2.5"),
        ('"gaussian"', '"gausian"'),
        ('"60 um", "60 um", "250 um"', '"60 um", "60 um"'),
        ('"60 um", "60 um", "250 um"', '"1 m", "1 m", "1 m", "1 m"'),
        ('radius  = "3.5 mm"', ""),
        ('frequency = "1.1 MHz"', 'freqency = "1.1 MHz"'),
        ('"cylinder"', '"plane"'),
        ('ask  = "temperature"', ""),
        ('axis = "z"', 'axis = "w"'),
        ("[coulomb]", "[[coulomb]]"),
        ("[[wall]]", "[wall]"),
    ],
)
def test_a_spoiled_scenario_is_not_valid(
    validator: jsonschema.Draft202012Validator, old: str, new: str
) -> None:
    spoiled = TRAP.replace(old, new, 1)
    assert TRAP != spoiled
    assert [] != list(validator.iter_errors(tomllib.loads(spoiled)))


def test_every_default_and_example_is_valid_where_it_stands() -> None:
    schema = json_schema()
    faulty = []
    for part in objects(schema["properties"] | schema["$defs"]):
        values = [*part.get("examples", []), *([part["default"]] if "default" in part else [])]
        if not isinstance(part.get("examples", []), list):
            continue  # a key of a scenario that is called so
        for value in values:
            whole = {**part, "$defs": schema["$defs"]}
            if not jsonschema.Draft202012Validator(whole).is_valid(value):
                faulty.append((value, part))
    assert [] == faulty


def test_every_form_is_closed_and_described_and_every_key_has_help() -> None:
    schema = json_schema()
    forms = [schema, *schema["$defs"].values()]
    assert len(list(forms_within(Keys(Scenario)))) == len(forms)
    for form in forms:
        assert form["additionalProperties"] is False
        assert form["description"]
        for name, key in form["properties"].items():
            assert "description" in key or name in ("kind", "ask")


def test_an_editor_is_offered_the_kinds_before_one_is_chosen() -> None:
    items = json_schema()["properties"]["field"]["items"]
    assert ["kind"] == items["required"]
    assert "rf-quadrupole" in items["properties"]["kind"]["enum"]
