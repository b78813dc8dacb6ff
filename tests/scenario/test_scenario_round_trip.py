"""Any scenario, written as TOML and read again, has the same values to the last bit."""

from __future__ import annotations

import tempfile
from pathlib import Path
from typing import Any

from hypothesis import HealthCheck, assume, given, settings
from hypothesis import strategies as st
from tests.scenario.good_scenarios import toml_file

from driftwell.errors import ScenarioError
from driftwell.forms import Bound, Form, read_quantity
from driftwell.forms.declared import (
    Choice,
    Declared,
    Dimensioned,
    Flag,
    Keys,
    Named,
    Number,
    Row,
    Several,
    Text,
    Words,
    declared_keys,
)
from driftwell.forms.faults import read_form
from driftwell.forms.wording import raw_table
from driftwell.scenario.model import Scenario
from driftwell.scenario.read import read_scenario

LEFT_OUT = {"file"}  # needs a file beside the scenario
DIRECTIONS = ([0, 0, 1], [1, 0, 0], [0, -1, 0], [0.6, 0.8, 0.0])  # of length 1 already
TEXT = st.text(st.characters(exclude_categories=["C", "Zl", "Zp"]), min_size=1, max_size=8)


def within(value: float, bounds: tuple[Bound, ...]) -> bool:
    return all(
        (bound.above is None or value > bound.above)
        and (bound.least is None or value >= bound.least)
        and (bound.below is None or value < bound.below)
        and (bound.most is None or value <= bound.most)
        and (bound.other_than is None or value != bound.other_than)
        for bound in bounds
    )


def quantities(declared: Dimensioned) -> st.SearchStrategy[str]:
    size = abs(read_quantity_of(declared))
    numbers = st.floats(-2.0 * size, 2.0 * size) | st.just(0.0)
    return numbers.filter(lambda value: within(value, declared.bounds)).map(
        lambda value: f"{value!r} {declared.si_unit}"
    )


def read_quantity_of(declared: Dimensioned) -> float:
    """The example of a quantity, in its SI unit."""
    from typing import Annotated

    from driftwell.forms.quantities import Quantity

    quantity = Quantity(declared.name, declared.si_unit, declared.example)
    return read_quantity(Annotated[float, quantity], declared.example)


def raw_values(declared: Declared) -> st.SearchStrategy[Any]:
    """Raw values that a key may hold, as far as one key alone can tell."""
    match declared:
        case Dimensioned():
            return quantities(declared)
        case Number(True, bounds):
            return st.integers(0, 9).filter(lambda value: within(value, bounds))
        case Number(False, bounds):
            numbers = st.floats(-100.0, 100.0) | st.integers(-100, 100)
            return numbers.filter(lambda value: within(value, bounds))
        case Text():
            return TEXT
        case Flag():
            return st.booleans()
        case Words(words):
            return st.sampled_from(words)
        case Row((Number(False), Number(False), Number(False))):
            return st.sampled_from(DIRECTIONS)
        case Row(entries):
            return st.tuples(*map(raw_values, entries)).map(list)
        case Several(entry):
            return st.lists(raw_values(entry), min_size=1, max_size=3)
        case Named(entry):
            return st.dictionaries(TEXT, raw_values(entry), max_size=2)
        case Keys(form):
            return raw_tables(form)
        case Choice(options):
            return st.one_of([raw_values(option) for tag, option in options if tag not in LEFT_OUT])


def raw_tables(form: type[Form]) -> st.SearchStrategy[dict[str, Any]]:
    """Raw tables that read as `form`, its keys checked against each other."""
    keys = declared_keys(form)
    required = {name: raw_values(key.holds) for name, key in keys.items() if key.required}
    optional = {name: raw_values(key.holds) for name, key in keys.items() if not key.required}
    tables = st.fixed_dictionaries(required, optional=optional)
    return tables.filter(lambda table: read_form(form, table)[0] is not None)


@st.composite
def scenarios(draw: st.DrawFn) -> dict[str, Any]:
    """Raw scenarios whose names all exist and stand once."""
    keys = declared_keys(Scenario)
    table = {name: draw(raw_values(keys[name].holds)) for name in ("title", "seed")}
    table["duration"] = "1e9 s"
    table["species"] = draw(raw_values(keys["species"].holds)) | {
        "heavy": {"mass": "1e-20 kg", "charge": "1 C"}
    }
    for section in ("cloud", "field", "wall", "detector", "question"):
        holds = keys[section].holds
        assert isinstance(holds, Several)
        entries = draw(st.lists(raw_values(holds.entry), min_size=section == "cloud", max_size=2))
        table[section] = [renamed(entry, i) for i, entry in enumerate(entries)]
    for section in ("coulomb", "stepping"):
        table[section] = draw(raw_values(keys[section].holds))
    return table


def renamed(entry: dict[str, Any], number: int) -> dict[str, Any]:
    """An entry with a name of its own, and of a species that is there."""
    table = {**entry, "name": f"{entry['name']}{number}"}
    for name, value in entry.items():
        if name == "species":
            table[name] = "heavy"
        elif isinstance(value, dict) and "species" in value:
            table[name] = {**value, "species": "heavy"}
    return table


FORMS = settings(
    max_examples=200,
    deadline=None,
    suppress_health_check=[HealthCheck.filter_too_much, HealthCheck.too_slow],
)


@FORMS
@given(scenarios())
def test_a_scenario_written_as_toml_is_read_back_the_same(table: dict[str, Any]) -> None:
    scenario, _ = read_form(Scenario, table)
    assume(scenario is not None)
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "s.toml"
        path.write_text(toml_file(raw_table(scenario)), encoding="utf-8")
        try:
            found = read_scenario(path).scenario
        except ScenarioError as e:
            print(e)
            assume(False)
    assert scenario == found
