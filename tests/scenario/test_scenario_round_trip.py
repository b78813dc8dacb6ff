"""Any scenario, written as TOML and read again, has the same values to the last bit."""

from __future__ import annotations

import tempfile
from pathlib import Path
from typing import Annotated, Any

from hypothesis import HealthCheck, Phase, given, reject, settings
from hypothesis import strategies as st

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
from driftwell.forms.noise import with_noise_drawn
from driftwell.forms.quantities import Quantity
from driftwell.forms.wording import raw_table
from driftwell.scenario.model import Scenario
from driftwell.scenario.read import read_scenario
from tests.scenario.good_scenarios import toml_file

LEFT_OUT = {"file"}  # needs a file beside the scenario
DIRECTIONS = ([0, 0, 1], [1, 0, 0], [0, -1, 0], [0.6, 0.8, 0.0])  # of length 1 already
TEXT = st.text(st.characters(exclude_categories=["C", "Zl", "Zp"]), min_size=1, max_size=8)
TRIES = 40


def numbers(bounds: tuple[Bound, ...], size: float) -> st.SearchStrategy[float]:
    """Numbers of up to twice `size` within the bounds, to the last bit."""
    lower = [x for bound in bounds for x in (bound.above, bound.least, bound.other_than)]
    upper = [x for bound in bounds for x in (bound.below, bound.most)]
    return st.floats(
        max([-2.0 * size, *(x for x in lower if x is not None)]),
        min([2.0 * size, *(x for x in upper if x is not None)]),
        exclude_min=any(bound.least is None for bound in bounds),
        exclude_max=any(bound.below is not None for bound in bounds),
    )


def quantities(declared: Dimensioned) -> st.SearchStrategy[str]:
    quantity = Quantity(declared.name, declared.si_unit, declared.example)
    size = abs(read_quantity(Annotated[float, quantity], declared.example))
    found = numbers(declared.bounds, size)
    return found.map(lambda value: f"{value!r} {declared.si_unit}")


def raw_values(declared: Declared) -> st.SearchStrategy[Any]:
    """Raw values that a key may hold, as far as one key alone can tell."""
    match declared:
        case Dimensioned():
            return quantities(declared)
        case Number(True):
            return st.integers(1, 9)
        case Number(False, bounds):
            return numbers(bounds, 10.0)
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
            return st.lists(raw_values(entry), min_size=2, max_size=2)
        case Named(entry):
            return st.dictionaries(TEXT, raw_values(entry), max_size=2)
        case Keys(form):
            return raw_tables(form)
        case Choice(options):
            return st.one_of([raw_values(option) for tag, option in options if tag not in LEFT_OUT])


@st.composite
def raw_tables(draw: st.DrawFn, form: type[Form]) -> dict[str, Any]:
    """Raw tables that read as `form`, its keys checked against each other."""
    keys = declared_keys(form)
    left_out = sorted(name for name, key in keys.items() if not key.required)
    for _ in range(TRIES):
        chosen = draw(st.sets(st.sampled_from(left_out), max_size=3)) if left_out else set()
        table = {
            name: draw(raw_values(key.holds))
            for name, key in keys.items()
            if key.required or name in chosen
        }
        if read_form(form, table)[0] is not None:
            return table
    return reject()  # the same draw again and again; hypothesis fails where these are many


DURATION = "10 ms"
INTERVALS = st.floats(1e-6, 1e-2).map(lambda value: f"{value!r} s")


@st.composite
def scenarios(draw: st.DrawFn) -> dict[str, Any]:
    """Raw scenarios whose names all exist, and whose times and places fit together."""
    keys = declared_keys(Scenario)
    table = {name: draw(raw_values(keys[name].holds)) for name in ("title", "seed", "species")}
    table["duration"] = DURATION
    table["species"]["heavy"] = {"mass": "1e-20 kg", "charge": "1 C"}
    for section in ("cloud", "field", "wall", "detector", "question"):
        entry = raw_values(entry_of(section))
        least = {"cloud": 1, "detector": 2}.get(section, 0)
        entries = draw(st.lists(entry, min_size=least, max_size=2))
        table[section] = [fitting(each, i) for i, each in enumerate(entries)]
    for section in ("coulomb", "stepping", "record"):
        table[section] = draw(raw_values(keys[section].holds))
    table["coulomb"]["softening"] = draw(INTERVALS).replace("s", "m")
    table["stepping"].pop("extent", None)
    if table["coulomb"].get("frame") == "bunch":
        table["coulomb"].pop("share_frame", None)  # names clouds
        table["stepping"].pop("scheme", None)  # several frames do not go with every scheme
    for section, name in (("stepping", "step"), ("record", "every"), ("record", "snapshots")):
        if name in table[section] and table[section][name] != "auto":
            table[section][name] = draw(INTERVALS)
    return table


def entry_of(section: str) -> Declared:
    holds = declared_keys(Scenario)[section].holds
    assert isinstance(holds, Several)
    return holds.entry


def fitting(entry: dict[str, Any], number: int) -> dict[str, Any]:
    """An entry with a name of its own that refers to things that are there."""
    table = {**entry, "name": ("first", "second")[number]}
    if str(entry.get("ask")).startswith("tune"):
        table["charges"] = 1
    for name, value in entry.items():
        if name in ("of", "by", "cloud"):
            table[name] = "first"
        elif name == "entrance":
            table[name] = "second"
        elif name == "species":
            table[name] = "heavy"
        elif name == "charge":
            table[name] = 0
        elif name == "total_charge":
            table[name] = "30 C"
        elif name == "weight":
            table[name] = max(value, 1e-3)
        elif isinstance(value, dict) and "species" in value:
            table[name] = {**value, "species": "heavy"}
        elif isinstance(value, dict) and "energy_spread" in value:
            table[name] = {**value, "energy_spread": "0 J"}  # less than any kinetic energy
    if table.get("kind") == "python-flux":
        table.pop("scale", None)  # constant in time
    if {"kinetic_energy", "velocities"} & table.get("shape", {}).keys():
        table.pop("motion", None)  # the shape says how its charges move
    return table


@settings(
    max_examples=40,
    deadline=None,
    derandomize=True,
    phases=[Phase.generate],  # shrinking a whole scenario takes minutes and helps little
    suppress_health_check=[HealthCheck.too_slow, HealthCheck.data_too_large],
)
@given(scenarios())
def test_a_scenario_written_as_toml_is_read_back_the_same(table: dict[str, Any]) -> None:
    scenario, faults = read_form(Scenario, table)
    assert [] == faults
    assert scenario is not None
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "s.toml"
        path.write_text(toml_file(raw_table(scenario)), encoding="utf-8")
        found = read_scenario(path).scenario
    drawn = tuple(with_noise_drawn(each, scenario.seed, each.name) for each in scenario.field)
    assert scenario.model_copy(update={"field": drawn}) == found
