"""A scenario built in code is what a file with the same keys would be."""

from __future__ import annotations

import tomllib
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import driftwell
from driftwell import Scenario, ScenarioError
from driftwell.api.toml_file import toml_file
from driftwell.scenario.read import read_scenario
from tests.api.small_scenarios import rods, trap
from tests.cli.small_runs import SMALL
from tests.cli.small_runs import scenario as file_of

SHIPPED = sorted((Path(__file__).parents[2] / "scenarios").glob("*.toml"))


@pytest.mark.parametrize("path", SHIPPED, ids=lambda path: path.stem)
def test_a_shipped_scenario_written_from_code_reads_with_the_same_digest(
    path: Path, tmp_path: Path
) -> None:
    whole = Scenario(folder=path.parent, **tomllib.loads(path.read_text()))
    assert tomllib.loads(path.read_text()) == tomllib.loads(whole.toml())
    assert read_scenario(path).digest == whole.digest


def test_a_scenario_built_step_by_step_has_the_digest_of_its_file(tmp_path: Path) -> None:
    built = (
        Scenario(title="Eight ions in a trap", duration="20 us", seed=7)
        .species("ion", mass="138 u", charge="1 e")
        .cloud(
            "load",
            species="ion",
            count=8,
            shape={"kind": "gaussian", "sigma": "50 um"},
            motion={"temperature": "10 K"},
        )
    )
    built = rods(built).field(
        "caps", kind="static-quadrupole", axial_frequency={"species": "ion", "value": "80 kHz"}
    )
    built = built.wall("bore", kind="cylinder", radius="1 mm").stepping(step="20 ns")
    built = built.record(every="1 us").question("held", ask="fraction-left", of="load")
    built = built.question("warmth", ask="temperature", of="load", axis="z")
    assert read_scenario(file_of(tmp_path, SMALL)).digest == built.digest
    assert built.digest == driftwell.read(built.save(tmp_path / "built.toml")).digest


PLAIN = (
    st.text(st.characters(exclude_categories=["Cs"]), max_size=12)
    | st.booleans()
    | st.integers(-(2**63), 2**63 - 1)
    | st.floats(allow_nan=False)
)
VALUES = st.recursive(
    PLAIN,
    lambda inner: (
        st.lists(inner, max_size=3) | st.dictionaries(st.text(max_size=5), inner, max_size=3)
    ),
    max_leaves=8,
)


def without_surrogates(table: Any) -> bool:
    try:
        repr(table).encode()
    except UnicodeEncodeError:
        return False
    return True


@settings(max_examples=40)
@given(st.dictionaries(st.text(max_size=6), VALUES, max_size=5).filter(without_surrogates))
def test_any_table_written_as_a_file_reads_back_the_same(table: dict[str, Any]) -> None:
    assert table == tomllib.loads(toml_file(table))


def test_numbers_and_arrays_of_numpy_and_paths_are_taken_as_a_file_would_have_them(
    tmp_path: Path,
) -> None:
    places = driftwell.with_unit(np.array([[0.1, 0, 0], [0, 0, 2e-7]]), "mm")
    found = Scenario(
        "Two", "1 us", np.int64(3), folder=tmp_path, coulomb={"accuracy": np.float64(1e-3)}
    ).cloud("pair", species="proton", shape={"kind": "points", "positions": np.array(places)})
    assert 3 == found.table["seed"]
    assert 1e-3 == found.table["coulomb"]["accuracy"]
    assert [["0.1 mm", "0.0 mm", "0.0 mm"], ["0.0 mm", "0.0 mm", "2e-07 mm"]] == places
    assert 2 == found.check().loaded().scenario.charges(tmp_path)
    named = found.field("map", kind="potential-map", path=tmp_path / "maps" / "lens.csv")
    assert "maps/lens.csv" == named.table["field"][0]["path"]


def test_all_faults_are_told_at_once_with_keys_and_the_nearest_valid_word() -> None:
    wrong = (
        trap()
        .with_(duration="-3 us")
        .cloud("more", species="ion", cont=3)
        .set("wall.bore.radius", "1 V")
    )
    with pytest.raises(ScenarioError) as caught:
        wrong.check()
    lines = str(caught.value).splitlines()
    assert tuple(lines) == wrong.faults()
    assert all(line.startswith("scenario in code: ") for line in lines)
    told = "\n".join(lines)
    assert 'duration = "-3 us": must be greater than 0.' in told
    assert '[[cloud]] "more" cont: unknown key; did you mean "count"?' in told
    assert '[[wall]] "bore" radius = "1 V": needs' in told
    assert () == trap().faults()


def test_what_no_file_can_hold_is_refused_where_it_is_given() -> None:
    with pytest.raises(ScenarioError, match=r'\[\[cloud\]\] "load"\.shape = <object .*a table'):
        Scenario().cloud("load", shape=object())
    with pytest.raises(ScenarioError, match=r'set "cloud.lode.count": .*did you mean "load"'):
        trap().set("cloud.lode.count", 3)


def test_changes_give_new_scenarios_and_leave_the_old_one(tmp_path: Path) -> None:
    first = trap()
    text = first.toml()
    more = first.set("cloud.load.count", 500).coulomb(method="direct").with_(title="More")
    assert text == first.toml()
    assert first == trap()
    assert (500, "More") == (more.table["cloud"][0]["count"], more.title)
    table = first.table
    table["cloud"][0]["count"] = 3
    assert 8 == first.table["cloud"][0]["count"]


def test_keys_that_are_none_are_left_out_and_words_of_python_take_an_underscore() -> None:
    found = Scenario("A", "1 us").cell(axis="z", from_=None, length="1 mm", lambda_="2")
    assert {"axis": "z", "length": "1 mm", "lambda": "2"} == found.table["cell"]
    assert {"title": "A", "duration": "1 us"} == {
        key: value for key, value in found.table.items() if key != "cell"
    }


def test_a_file_read_and_not_changed_keeps_its_own_text_and_its_settings(tmp_path: Path) -> None:
    path = file_of(tmp_path, f"# a comment\n{SMALL}")
    found = driftwell.read(path)
    assert path.read_text() == found.toml()
    changed = found.set("cloud.load.count", 9)
    assert read_scenario(path, ["cloud.load.count=9"]).digest == changed.digest
    assert ("cloud.load.count=9",) == changed.loaded().settings
    assert changed.digest == driftwell.read(changed.save(tmp_path / "changed.toml")).digest
    grown = found.detector("exit", kind="plane", at=["0 mm", "0 mm", "1 mm"])
    assert () == grown.loaded().settings
    with pytest.raises(ScenarioError, match=r"--set stepping.stap=3: .*did you mean"):
        driftwell.read(path, ["stepping.stap=3"])


def test_a_scenario_is_told_in_words_and_shown_escaped() -> None:
    named = trap().with_(title="<script>alert(1)</script>")
    assert "Gaussian of rms size 50 um" in trap().explain()
    shown = named._repr_html_()
    assert "<script>" not in shown
    assert "&lt;script&gt;" in shown
    wrong = trap().with_(duration="<b>")._repr_html_()
    assert "1 fault" in wrong
    assert "<b>&quot;" not in wrong
    assert "<Scenario 'Ions in a trap': 1 species, 1 cloud, 1 field, 1 wall, 2 questions>" == repr(
        trap()
    )


def test_an_estimate_counts_and_times() -> None:
    counted = rods(trap()).estimate()
    assert (8, 1000) == (counted.charges, counted.steps)
