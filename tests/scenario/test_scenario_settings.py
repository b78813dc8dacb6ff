"""`--set key=value` takes the place of what the file says, and its faults name it."""

from __future__ import annotations

import tomllib
from typing import Any

import pytest

from driftwell.scenario.model import Scenario
from driftwell.scenario.settings import apply_settings, path_of, setting_path, setting_text
from tests.scenario.good_scenarios import TRAP


def at(table: Any, *path: str | int) -> Any:
    for part in path:
        table = table[part]
    return table


@pytest.mark.parametrize(
    ("text", "path", "expected"),
    [
        ("duration=1 ms", ("duration",), "1 ms"),
        (" duration = 1 ms ", ("duration",), "1 ms"),
        ("cloud.load.count=500", ("cloud", 0, "count"), 500),
        ("cloud.1.count=500", ("cloud", 0, "count"), 500),
        ("field.rods.voltage.amplitude=200 V", ("field", 0, "voltage", "amplitude"), "200 V"),
        ("field.2.axial_frequency.value=1 Hz", ("field", 1, "axial_frequency", "value"), "1 Hz"),
        ('field."end caps".kind=x', ("field", 1, "kind"), "x"),
        ("field.end caps.kind=x", ("field", 1, "kind"), "x"),
        ("stepping.step=5 ns", ("stepping", "step"), "5 ns"),
        ("coulomb.softening=0 m", ("coulomb", "softening"), "0 m"),
        ("species.x.mass=1 u", ("species", "x", "mass"), "1 u"),
        ("cloud.load.shape.sigma.2=1 mm", ("cloud", 0, "shape", "sigma", 1), "1 mm"),
        ('cloud.load.shape={ kind = "ball" }', ("cloud", 0, "shape"), {"kind": "ball"}),
        ('title="a = b"', ("title",), "a = b"),
        ("title=a = b", ("title",), "a = b"),
        ("title=", ("title",), ""),
        ("title=a\nseed = 3", ("title",), "a\nseed = 3"),
        ("seed=1_000", ("seed",), 1000),
        ("new.a.b=true", ("new", "a", "b"), True),
    ],
)
def test_a_setting_is_read_as_toml_or_else_as_text_and_put_in(
    text: str, path: tuple[str | int, ...], expected: Any
) -> None:
    data = tomllib.loads(TRAP)
    settings, faults = apply_settings(data, [text], Scenario)
    assert [] == faults
    assert [text] == [setting.text for setting in settings]
    assert expected == at(data, *path)


def test_the_last_of_several_settings_of_one_key_holds() -> None:
    data = tomllib.loads(TRAP)
    apply_settings(data, ["seed=1", "seed=2"], Scenario)
    assert 2 == data["seed"]


def test_a_setting_remembers_the_first_table_that_was_made_for_it() -> None:
    data = tomllib.loads(TRAP)
    settings, _ = apply_settings(data, ["steping.a.b=1", "record.every=1 s"], Scenario)
    assert [("steping",), ("record", "every")] == [setting.path for setting in settings]


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("nonsense", 'needs the form key=value, for example "duration=1 ms".'),
        ("", 'needs the form key=value, for example "duration=1 ms".'),
        ("=3", 'needs the form key=value, for example "duration=1 ms".'),
        ("cloud.laod.count=3", 'no entry of cloud is "laod"; did you mean "load"?'),
        ("cloud.zzz.count=3", 'no entry of cloud is "zzz"; there are "load".'),
        ("cloud.0.count=3", 'no entry of cloud is "0"; there are "load".'),
        ("cloud.2.count=3", 'no entry of cloud is "2"; there are "load".'),
        (
            "cloud.load.shape.sigma.4=1 m",
            'no entry of cloud entry 1 shape.sigma is "4"; there are 3, counted from 1.',
        ),
        (
            "duration.x=2",
            '"duration" is not a table in the scenario; set all of it: "duration=...".',
        ),
        ('"a\\q".b=2', '"a\\\\q" is not a key in quotes.'),
        ("a." * 40 + "b=1", "has more than 30 parts in its key."),
        ("title=\udcff", "is not valid text."),
    ],
)
def test_a_setting_that_cannot_be_put_in_is_told_and_changes_nothing(
    text: str, expected: str
) -> None:
    data = tomllib.loads(TRAP)
    settings, faults = apply_settings(data, [text], Scenario)
    assert [] == settings
    assert faults[0].startswith("--set ")
    assert [True] == [fault.endswith(f": {expected}") for fault in faults]
    assert tomllib.loads(TRAP) == data


def test_an_entry_of_a_section_that_is_not_there_cannot_be_set() -> None:
    data: dict[str, Any] = {"title": "x"}
    _, faults = apply_settings(data, ["wall.bore.radius=1 mm"], Scenario)
    assert ["--set wall.bore.radius=1 mm: the scenario has no [[wall]]."] == faults
    assert {"title": "x"} == data


@pytest.mark.parametrize(
    ("key", "expected"),
    [
        ("duration", ("duration",)),
        ("cloud.load.count", ("cloud", 0, "count")),
        ("new.a.b", ("new", "a", "b")),
        ('field."end caps".kind', ("field", 1, "kind")),
    ],
)
def test_the_path_of_a_key_is_found_without_changing_the_table(
    key: str, expected: tuple[str | int, ...]
) -> None:
    data = tomllib.loads(TRAP)
    assert expected == path_of(key, data, Scenario)
    assert tomllib.loads(TRAP) == data


@pytest.mark.parametrize("key", ["a=b", "", "cloud.laod.count", "duration.x", "a." * 40 + "b"])
def test_a_key_that_no_setting_can_have_is_refused(key: str) -> None:
    with pytest.raises(LookupError):
        path_of(key, tomllib.loads(TRAP), Scenario)


def test_the_path_of_a_setting_is_that_of_its_key() -> None:
    data = tomllib.loads(TRAP)
    assert ("cloud", 0, "count") == setting_path("cloud.1.count=5", data, Scenario)
    assert setting_path("cloud.2.count=5", data, Scenario) is None
    assert tomllib.loads(TRAP) == data


@pytest.mark.parametrize(
    ("value", "expected"),
    [
        ("1 ms", "title=1 ms"),
        ("auto", "title=auto"),
        ("7", 'title="7"'),
        ("true", 'title="true"'),
        (" x", 'title=" x"'),
        ("", "title="),
        ("a = b", "title=a = b"),
        ("a\nb", 'title="a\\nb"'),
        (7, "title=7"),
        (1e-9, "title=1e-09"),
        (True, "title=true"),
        (["1 mm", 2], 'title=["1 mm", 2]'),
        ({"kind": "ball"}, 'title={ kind = "ball" }'),
    ],
)
def test_a_setting_is_written_so_that_it_reads_back_as_its_value(value: Any, expected: str) -> None:
    assert expected == setting_text("title", value)
    data: dict[str, Any] = {}
    apply_settings(data, [expected], Scenario)
    assert {"title": value} == data
    assert type(value) is type(data["title"])
