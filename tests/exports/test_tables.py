"""Tables as CSV and Parquet, read by general readers: the same bits, names and units."""

from __future__ import annotations

import csv
from pathlib import Path

import numpy as np
import pyarrow.parquet as pq
import pytest

from driftwell.exports.names import TABLES
from driftwell.exports.states import states
from driftwell.exports.table import export
from driftwell.exports.wanted import Times
from driftwell.record.reader import Run
from tests.exports.conftest import CLOUDS, TIMES

WRITTEN = {"snapshots", "trajectory", "moments", "ledger", "losses", "traces", "clouds"}
STATE = ("x", "y", "z", "ux", "uy", "uz")


def columns_of_csv(path: Path) -> dict[str, list[str]]:
    with path.open(encoding="utf-8", newline="") as file:
        rows = list(csv.reader(file))
    return dict(zip(rows[0], map(list, zip(*rows[1:], strict=True)), strict=True))


def expected_columns(run: Run, what: str) -> dict[str, list[float]]:
    found = list(states(run, what, Times()))
    six = np.concatenate([np.hstack([each.position, each.velocity]) for each in found])
    return {
        "t": np.concatenate([np.full(len(each.id), each.time) for each in found]).tolist(),
        "id": np.concatenate([each.id for each in found]).tolist(),
        **{name: six[:, k].tolist() for k, name in enumerate(STATE)},
        "weight": np.concatenate([each.weight for each in found]).tolist(),
        "cloud": [CLOUDS[k] for each in found for k in each.cloud.tolist()],
    }


@pytest.mark.parametrize(("what", "count"), [("snapshots", 21), ("trajectory", 32)])
def test_charges_written_as_csv_read_back_bit_for_bit(
    run: Run, tmp_path: Path, what: str, count: int
) -> None:
    path = export(run, "csv", tmp_path / "out.csv", [what])
    found = columns_of_csv(path)
    expected = expected_columns(run, what)
    assert count == len(found["t [s]"])
    for name, unit in (("t", "s"), ("x", "m"), ("z", "m"), ("ux", "m/s"), ("weight", "1")):
        assert expected[name] == [float(cell) for cell in found[f"{name} [{unit}]"]]
    assert expected["id"] == [int(cell) for cell in found["id [1]"]]
    # a text that a spreadsheet would take for a formula has an apostrophe in front
    assert [str(name).replace("=o", "'=o") for name in expected["cloud"]] == found["cloud"]


@pytest.mark.parametrize("what", ["snapshots", "trajectory"])
def test_charges_written_as_parquet_read_back_bit_for_bit_with_their_units(
    run: Run, tmp_path: Path, what: str
) -> None:
    table = pq.read_table(export(run, "parquet", tmp_path / "out.parquet", [what]))
    for name, values in expected_columns(run, what).items():
        assert values == table[name].to_pylist()
    units = {field.name: field.metadata[b"unit"].decode() for field in table.schema}
    assert {"t": "s", "x": "m", "ux": "m/s", "charge": "C", "mass": "kg", "cloud": ""}.items() <= (
        units.items()
    )
    assert "An invented cloud, µ" == table.schema.metadata[b"title"].decode()


def test_a_folder_holds_a_file_for_each_table_that_has_rows(run: Run, tmp_path: Path) -> None:
    for kind in ("csv", "parquet"):
        path = export(run, kind, tmp_path / kind)
        assert {f"{name}.{kind}" for name in WRITTEN} == {each.name for each in path.iterdir()}
    assert WRITTEN < set(TABLES)


def test_tables_of_the_record_come_with_every_column_and_the_same_bits(
    run: Run, tmp_path: Path
) -> None:
    path = export(run, "parquet", tmp_path / "out")
    ledger, rows = pq.read_table(path / "ledger.parquet"), run.rows("ledger")
    assert rows["kinetic"].tolist() == ledger["kinetic"].to_pylist()
    width = sum(max(1, int(np.prod(rows.dtype[name].shape))) for name in rows.dtype.names or ())
    assert width == ledger.num_columns
    moments, rows = pq.read_table(path / "moments.parquet"), run.rows("moments")
    assert rows["covariance"][:, 1, 5].tolist() == moments["covariance_y_uz"].to_pylist()
    assert b"m^2/s" == moments.schema.field("covariance_y_uz").metadata[b"unit"]
    losses = pq.read_table(path / "losses.parquet")
    assert ["bore", "plate", "plate"] == losses["wall"].to_pylist()
    assert [CLOUDS[0], CLOUDS[0], CLOUDS[1]] == losses["cloud"].to_pylist()


def test_only_the_times_asked_for_are_written(run: Run, tmp_path: Path) -> None:
    def times(name: str, *asked: str | float) -> list[float]:
        path = export(run, "parquet", tmp_path / name, ["trajectory", "ledger"], asked)
        written = {
            table: sorted(set(pq.read_table(path / f"{table}.parquet")["t"].to_pylist()))
            for table in ("trajectory", "ledger")
        }
        assert written["ledger"] == written["trajectory"]
        return written["ledger"]

    assert [TIMES[1]] == times("a", TIMES[1])
    assert [TIMES[0], TIMES[2]] == times("b", "start", "end")
    assert list(TIMES[1:]) == times("c", "0.1 us..2 us")
