"""The layout table and the page written from it."""

from __future__ import annotations

import importlib.util
from dataclasses import fields
from pathlib import Path
from types import ModuleType

import numpy as np
import pytest

from driftwell.answers.evidence import Moments
from driftwell.ledger.ledger import LedgerRow
from driftwell.record import layout

ROOT = Path(__file__).resolve().parents[2]


@pytest.fixture
def record_format() -> ModuleType:
    """The tool that writes the page."""
    spec = importlib.util.spec_from_file_location(
        "record_format", ROOT / "tools" / "record_format.py"
    )
    assert spec is not None
    assert spec.loader is not None
    module = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    return module


def test_the_page_in_docs_is_what_the_table_says(record_format):
    assert record_format.page() == (ROOT / "docs" / "record-format.md").read_text("utf-8"), (
        "run `python tools/record_format.py`"
    )


def test_a_stale_page_fails_the_check_and_a_written_one_passes(
    record_format, tmp_path, monkeypatch, capsys
):
    page = tmp_path / "record-format.md"
    page.write_text("something older\n")
    monkeypatch.setattr(record_format, "PAGE", page)
    assert 1 == record_format.main(["--check"])
    assert "stale" in capsys.readouterr().err
    assert 0 == record_format.main([])
    assert 0 == record_format.main(["--check"])


def test_the_page_names_every_dataset_column_and_attribute(record_format):
    page = record_format.page()
    names = [entry.path for entry in (*layout.datasets(), *layout.SNAPSHOT)]
    names += [column.name for entry in layout.datasets() for column in entry.columns]
    names += [each.name for each in (*layout.HEADER, *layout.SEGMENT, *layout.OUTCOME)]
    assert [] == [name for name in names if f"`{name}`" not in page]


def test_every_number_has_a_unit_and_everything_a_line_of_help():
    plain = [entry for entry in (*layout.datasets(), *layout.SNAPSHOT) if not entry.columns]
    columns = [column for entry in layout.datasets() for column in entry.columns]
    attributes = (*layout.HEADER, *layout.SEGMENT, *layout.OUTCOME)
    everything = [*plain, *columns, *attributes]
    numbers = [each for each in everything if each.kind in ("int64", "float64")]
    assert [] == [each for each in numbers if not each.unit]
    assert [] == [each for each in everything if not each.help]


def test_paths_are_unique():
    paths = [entry.path for entry in layout.datasets()]
    assert sorted(set(paths)) == sorted(paths)


def test_the_counters_are_the_first_lengths_of_the_datasets_that_grow():
    assert set(layout.COUNTERS) == {entry.shape[0] for entry in layout.ROWS}


def test_units_are_found_by_dataset_and_column():
    assert "J" == layout.unit("ledger", "kinetic")
    assert "kg m/s" == layout.unit("ledger", "momentum")
    assert "s" == layout.unit("trajectory/time")
    with pytest.raises(KeyError, match="no_such"):
        layout.unit("ledger", "no_such")
    with pytest.raises(KeyError, match="no/such"):
        layout.unit("no/such")


def test_rows_of_a_table_are_filled_by_name():
    rows = layout.rows("losses", 2)
    rows[1]["position"] = (1.0, 2.0, 3.0)
    assert [[0.0, 0.0, 0.0], [1.0, 2.0, 3.0]] == rows["position"].tolist()
    assert np.dtype(np.int64) == rows["wall"].dtype


def test_the_ledgers_rows_and_the_table_have_the_same_columns():
    columns = [column.name for column in layout.dataset("ledger").columns]
    assert columns == [each.name for each in fields(LedgerRow)]


def test_moments_are_recorded_as_they_are_asked_for():
    columns = [column.name for column in layout.dataset("moments").columns]
    assert {*columns} - {"cloud"} == {each.name for each in fields(Moments)}
