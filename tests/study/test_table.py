"""All answers of a study in one table, as CSV and HDF5, with means over its replicas."""

from __future__ import annotations

import csv
import math
from pathlib import Path
from typing import Any

import h5py
import pytest

from driftwell.errors import RecordError
from driftwell.study.catalogue import Catalogue
from driftwell.study.read import Study
from driftwell.study.table import MEANS_CSV, TABLE_CSV, TABLE_H5, table_of, write_tables
from tests.study.small_study import answer, study, vary

VARIED = (
    "replicas = 2\n"
    + vary("field.rods.voltage.amplitude", 'values = ["0.1 kV", "200 V"]')
    + vary("coulomb.method", 'values = ["direct", "off"]')
)


def digest(number: int) -> str:
    return f"{number:064x}"


@pytest.fixture
def swept(tmp_path: Path) -> Study:
    """Eight cases: the first four finished, the others failed, stopped, all lost, waiting."""
    found = study(tmp_path, VARIED)
    with Catalogue(tmp_path / "catalogue.sqlite") as catalogue:
        catalogue.add_all((digest(case.number), case.number, case.settings) for case in found.cases)
        for number in range(1, 5):
            answers = [answer(number / 3.0, 0.25), answer(0.5, None, 'held, "all"', "1")]
            catalogue.ended(digest(number), "finished", "Done.", 0.5, answers)
        catalogue.ended(digest(5), "failed", "It ran away.", 0.5, [answer(9.0)])
        catalogue.ended(digest(6), "finished", "Done.", 0.5, [answer(6.0, 0.1)])
        catalogue.ended(digest(7), "all lost", "Lost.", 0.5, [answer(math.nan, None)])
        write_tables(tmp_path, found, catalogue)
    return found


def lines(path: Path) -> list[list[str]]:
    with path.open(newline="", encoding="utf-8") as text:
        return list(csv.reader(text))


def test_the_csv_has_one_row_for_each_case_and_units_in_its_headings(
    swept: Study, tmp_path: Path
) -> None:
    found = lines(tmp_path / TABLE_CSV)
    assert [
        *("case", "replica", "field.rods.voltage.amplitude [V]", "coulomb.method", "outcome"),
        *("size [m]", "size, error [m]", 'held, "all" [1]', 'held, "all", error [1]'),
    ] == found[0]
    assert 9 == len(found)
    assert ["1", "1", "100", "direct", "finished", repr(1 / 3), "0.25", "0.5", ""] == found[1]
    assert ["5", "1", "200", "direct", "failed", "9", "0.5", "", ""] == found[5]
    assert ["7", "1", "200", "off", "all lost", "", "", "", ""] == found[7]
    assert ["8", "2", "200", "off", "waiting", "", "", "", ""] == found[8]


def test_the_means_leave_out_what_did_not_come_to_its_end(swept: Study, tmp_path: Path) -> None:
    found = lines(tmp_path / MEANS_CSV)
    assert [
        *("first case", "field.rods.voltage.amplitude [V]", "coulomb.method"),
        *("size [m]", "size, error [m]", "size, replicas"),
        *('held, "all" [1]', 'held, "all", error [1]', 'held, "all", replicas'),
    ] == found[0]
    assert [
        "1",
        "100",
        "direct",
        "0.5",
        repr(math.hypot(0.25, 0.25) / 2),
        "2",
        "0.5",
        "0",
        "2",
    ] == (found[1])
    assert ["5", "200", "direct", "6", "0.1", "1", "", "", "0"] == found[3]
    assert ["7", "200", "off", "", "", "0", "", "", "0"] == found[4]


def named(group: Any) -> dict[str, Any]:
    return {each.attrs["name"].decode(): each for each in group.values()}


def test_the_hdf5_file_holds_the_same_with_units_and_notes(swept: Study, tmp_path: Path) -> None:
    with h5py.File(tmp_path / TABLE_H5) as file:
        assert swept.text == file.attrs["study"].decode()
        assert swept.scenario_text == file.attrs["scenario"].decode()
        run = file["cases/run"][()]
        assert list(range(1, 9)) == run["number"].tolist()
        assert [1, 2] * 4 == run["replica"].tolist()
        assert b"It ran away." == run["sentence"][4]
        assert b"waiting" == run["outcome"][7]
        assert digest(3).encode() == run["digest"][2]
        varied = named(file["cases/varied"])
        voltage = varied["field.rods.voltage.amplitude"]
        assert ([100.0] * 4 + [200.0] * 4, "V") == (voltage[()].tolist(), voltage.attrs["unit"])
        assert [b"direct", b"direct", b"off", b"off"] * 2 == (
            varied["coulomb.method"]["text"].tolist()
        )
        size = named(file["cases/answer"])["size"]
        assert ["m", "m", "1", "1", ""] == list(size.attrs["units"])
        assert b"rms-size" == size.attrs["ask"]
        assert [1 / 3, 2 / 3, 1.0, 4 / 3, 9.0, 6.0] == size["value"][:6].tolist()
        assert all(map(math.isnan, size["value"][6:]))
        assert b"of 20 charges" == size["note"][0]
        assert [1, 3, 5, 7] == file["means/point"]["number"].tolist()
        assert [2, 2, 1, 0] == named(file["means/answer"])["size"]["replicas"].tolist()
        assert [0.5, 3.5 / 3, 6.0] == pytest.approx(
            named(file["means/answer"])["size"]["value"][:3].tolist()
        )
        off = named(file["means/varied"])["coulomb.method"]["text"]
        assert [b"direct", b"off"] * 2 == off.tolist()


def test_every_dataset_has_its_meaning_and_a_checksum(swept: Study, tmp_path: Path) -> None:
    found = []

    def look(name: str, entry: Any) -> None:
        if isinstance(entry, h5py.Dataset):
            found.append(name)
            assert entry.attrs["help"]
            assert entry.fletcher32 or entry.nbytes <= 8192

    with h5py.File(tmp_path / TABLE_H5) as file:
        file.visititems(look)
    assert len(found) == 2 * (1 + 2 + 2)


def test_without_replicas_there_are_no_means(tmp_path: Path) -> None:
    (tmp_path / MEANS_CSV).write_text("of a study before")
    found = study(tmp_path, vary("cloud.load.count", "values = [3, 5]"))
    with Catalogue(tmp_path / "catalogue.sqlite") as catalogue:
        write_tables(tmp_path, found, catalogue)
    assert not (tmp_path / MEANS_CSV).exists()
    assert [["case", "replica", "cloud.load.count [1]", "outcome"]] == lines(tmp_path / TABLE_CSV)[
        :1
    ]
    with h5py.File(tmp_path / TABLE_H5) as file:
        assert ["cases"] == list(file)
        assert ["run", "varied"] == list(file["cases"])


def test_a_name_with_two_units_is_two_columns(tmp_path: Path) -> None:
    found = study(tmp_path, vary("cloud.load.count", "values = [3, 5]"))
    with Catalogue(tmp_path / "catalogue.sqlite") as catalogue:
        catalogue.add_all((digest(case.number), case.number, case.settings) for case in found.cases)
        catalogue.ended(digest(1), "finished", "", 1.0, [answer(1.0, unit="m")])
        catalogue.ended(digest(2), "finished", "", 1.0, [answer(2.0, unit="K")])
        table = table_of(found, catalogue)
    assert ["m", "K"] == [question.unit for question in table.questions]
    assert [(1.0, None), (None, 2.0)] == [
        tuple(None if each is None else each.value for each in row.answers) for row in table.rows
    ]


def test_cases_that_the_catalogue_does_not_know_yet_wait(tmp_path: Path) -> None:
    found = study(tmp_path, vary("cloud.load.count", "values = [3, 5]"))
    with Catalogue(tmp_path / "catalogue.sqlite") as catalogue:
        table = table_of(found, catalogue)
    assert ["waiting", "waiting"] == [row.run.word for row in table.rows]


def test_headings_of_the_same_words_are_told_apart(tmp_path: Path) -> None:
    found = study(tmp_path, vary("cloud.load.count", "values = [3, 5]"))
    with Catalogue(tmp_path / "catalogue.sqlite") as catalogue:
        catalogue.add_all((digest(case.number), case.number, case.settings) for case in found.cases)
        answers = [answer(1.0, name="size"), answer(2.0, name="size, error")]
        catalogue.ended(digest(1), "finished", "", 1.0, answers)
        write_tables(tmp_path, found, catalogue)
    headings = lines(tmp_path / TABLE_CSV)[0]
    assert len(set(headings)) == len(headings)
    assert "size, error [m] (2)" in headings


def test_a_folder_that_cannot_be_written_is_told(tmp_path: Path) -> None:
    found = study(tmp_path, vary("cloud.load.count", "values = [3, 5]"))
    with (
        Catalogue(tmp_path / "catalogue.sqlite") as catalogue,
        pytest.raises(RecordError, match="cannot be written"),
    ):
        write_tables(tmp_path / "none", found, catalogue)
