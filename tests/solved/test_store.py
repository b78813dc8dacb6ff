"""Solved fields are kept whole, read again, and solved once however many ask."""

from __future__ import annotations

import multiprocessing
import os
import time
from pathlib import Path

import numpy as np
import pytest

from driftwell.solved.store import PLACE, Store, store_folder

ARRAYS = {"map/coefficients": np.arange(5000.0), "solution/few": np.array([1, 2, 3])}


def test_what_is_kept_is_read_again_to_the_bit(tmp_path: Path) -> None:
    store = Store(tmp_path, pytest.fail)
    tmp_path.mkdir(exist_ok=True)
    assert store.found("a" * 8) is None
    store.keep("a" * 8, ARRAYS)
    found = store.found("a" * 8)
    assert found is not None
    assert set(ARRAYS) == set(found)
    for name, array in ARRAYS.items():
        np.testing.assert_array_equal(array, found[name], strict=True)
    assert ["a" * 8 + ".h5"] == [path.name for path in tmp_path.iterdir()]


def test_a_damaged_file_is_named_and_not_used(tmp_path: Path) -> None:
    said: list[str] = []
    store = Store(tmp_path, said.append)
    store.keep("d", ARRAYS)
    path = tmp_path / "d.h5"
    image = bytearray(path.read_bytes())
    image[len(image) // 2] ^= 1
    path.write_bytes(image)
    assert store.found("d") is None
    path.write_bytes(image[:1000])
    assert store.found("d") is None
    assert 2 == len(said)
    assert all(str(path) in sentence for sentence in said)


def test_another_digest_under_the_same_name_is_not_used(tmp_path: Path) -> None:
    store = Store(tmp_path, pytest.fail)
    store.keep("one", ARRAYS)
    (tmp_path / "one.h5").rename(tmp_path / "two.h5")
    assert store.found("two") is None


def test_a_folder_that_cannot_be_made_keeps_nothing_and_says_so(tmp_path: Path) -> None:
    said: list[str] = []
    (tmp_path / "file").touch()
    store = Store(tmp_path / "file" / "fields", said.append)
    with store.alone("x"):
        store.keep("x", ARRAYS)
    assert 1 == len(said)


def test_files_not_used_for_a_season_are_removed(tmp_path: Path) -> None:
    store = Store(tmp_path, pytest.fail)
    for name in ("old", "young"):
        store.keep(name, ARRAYS)
    long_ago = time.time() - 100 * 24 * 3600
    os.utime(tmp_path / "old.h5", (long_ago, long_ago))
    store.keep("new", ARRAYS)
    assert {"young.h5", "new.h5"} == {path.name for path in tmp_path.glob("*.h5")}


def _solve(folder: Path) -> None:
    store = Store(folder, lambda _: None)
    with store.alone("s"):
        if store.found("s") is None:
            time.sleep(0.3)
            with (folder / "solved").open("a") as file:
                file.write(f"{os.getpid()}\n")
            store.keep("s", ARRAYS)


def test_of_many_who_ask_at_once_one_solves(tmp_path: Path) -> None:
    context = multiprocessing.get_context("spawn")
    many = [context.Process(target=_solve, args=(tmp_path,)) for _ in range(4)]
    for each in many:
        each.start()
    for each in many:
        each.join(60)
    assert [0, 0, 0, 0] == [each.exitcode for each in many]
    assert 1 == len((tmp_path / "solved").read_text().split())


def test_the_environment_names_the_folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv(PLACE, str(tmp_path))
    assert tmp_path == store_folder()
    monkeypatch.delenv(PLACE)
    assert "fields" == store_folder().name
