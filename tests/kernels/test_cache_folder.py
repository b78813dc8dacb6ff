"""Where machine code is kept: a folder of this version's sources, private, never stale."""

from __future__ import annotations

import os
import shutil
import subprocess
import sys
import tempfile
import time
from pathlib import Path

import pytest

import driftwell
from driftwell import __version__
from driftwell.coulomb.direct import direct_field
from driftwell.kernels import compiled
from driftwell.kernels.compiled import cache_folder, sources_digest

DAY = 24 * 3600.0


@pytest.fixture
def home(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A home and a place for temporary files of its own, and no other wish told."""
    for name in ("DRIFTWELL_CACHE", "XDG_CACHE_HOME"):
        monkeypatch.delenv(name, raising=False)
    place = tmp_path / "home"
    place.mkdir()
    (tmp_path / "tmp").mkdir()
    monkeypatch.setenv("HOME", str(place))
    monkeypatch.setattr(tempfile, "tempdir", str(tmp_path / "tmp"))
    return place


@pytest.fixture
def refused(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A named cache folder in which nothing can be made, whoever asks: it lies below a file."""
    (tmp_path / "file").write_text("not a folder")
    monkeypatch.setenv("DRIFTWELL_CACHE", str(tmp_path / "file" / "cache"))
    return tmp_path / "tmp"


def package(folder: Path) -> Path:
    """A small package of two files."""
    (folder / "inner").mkdir(parents=True)
    (folder / "one.py").write_text("a = 1\n")
    (folder / "inner" / "two.py").write_text("b = 2\n")
    return folder


def test_the_digest_changes_with_any_source(tmp_path: Path) -> None:
    """With its contents, its name and its place; not with what is no source, nor with time."""
    here = package(tmp_path / "package")
    before = sources_digest(here)
    assert before == sources_digest(here)
    assert before == sources_digest(package(tmp_path / "elsewhere"))
    (here / "notes.txt").write_text("not a source")
    os.utime(here / "one.py", (1, 1))
    assert before == sources_digest(here)
    found = {before}
    (here / "inner" / "two.py").write_text("b = 3\n")
    found.add(sources_digest(here))
    (here / "inner" / "two.py").rename(here / "inner" / "three.py")
    found.add(sources_digest(here))
    (here / "inner" / "three.py").rename(here / "three.py")
    found.add(sources_digest(here))
    (here / "three.py").unlink()
    found.add(sources_digest(here))
    assert 5 == len(found)
    assert all(len(digest) == 12 for digest in found)


def test_the_digest_leaves_out_layers_that_hold_no_compiled_code(tmp_path: Path) -> None:
    """An edit of what is above all kernels need not compile them anew; see the import contracts."""
    here = package(tmp_path / "package")
    before = sources_digest(here)
    (here / "report").mkdir()
    (here / "report" / "page.py").write_text("c = 3\n")
    (here / "run.py").write_text("d = 4\n")
    assert before == sources_digest(here)
    (here / "inner" / "run.py").write_text("e = 5\n")
    assert before != sources_digest(here)


@pytest.mark.parametrize("name", sorted(compiled.ABOVE))
def test_no_layer_left_out_of_the_digest_decorates_a_kernel(name: str) -> None:
    """It would be compiled once and then never again, whatever was edited."""
    place = Path(driftwell.__file__).parent / name
    files = [place] if place.is_file() else list(place.rglob("*.py"))
    assert files
    for file in files:
        text = file.read_text()
        assert "_kernel\n" not in text, file
        assert "from driftwell.kernels import" not in text, file
        assert "njit" not in text, file


def test_the_folder_is_named_by_version_and_sources(home: Path) -> None:
    """In the user's own cache."""
    expected = home / ".cache" / "driftwell" / f"kernels-{__version__}-{sources_digest()}"
    assert expected == cache_folder()
    assert expected.is_dir()


def test_the_environment_names_another_place(
    home: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """XDG_CACHE_HOME moves all caches, DRIFTWELL_CACHE this one, before that."""
    monkeypatch.setenv("XDG_CACHE_HOME", str(tmp_path / "caches"))
    assert tmp_path / "caches" / "driftwell" == cache_folder().parent
    monkeypatch.setenv("DRIFTWELL_CACHE", str(tmp_path / "mine"))
    assert tmp_path / "mine" == cache_folder().parent


def test_a_place_named_from_the_working_folder_stays_where_it_is(
    home: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """A program that changes its working folder later goes on using the same cache."""
    monkeypatch.chdir(tmp_path)
    monkeypatch.setenv("DRIFTWELL_CACHE", "mine")
    assert tmp_path / "mine" == cache_folder().parent


def test_the_kernels_are_kept_there() -> None:
    """Numba is told the folder for every kernel, and its own setting is left as it was."""
    import numba

    assert compiled._FOLDER in Path(direct_field.stats.cache_path).parents
    assert str(compiled._FOLDER) != numba.config.CACHE_DIR


def test_without_a_usable_cache_a_private_temporary_folder_serves(
    home: Path, refused: Path
) -> None:
    """The same one each time, for its owner alone."""
    found = cache_folder()
    assert refused / f"driftwell-{os.getuid()}" == found.parent
    assert found == cache_folder()
    assert 0o700 == found.parent.stat().st_mode & 0o777


def test_without_a_home_a_temporary_folder_serves(
    home: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """A user unknown to the system, as containers have them."""

    def homeless() -> Path:
        raise RuntimeError("Could not determine home directory.")

    monkeypatch.delenv("HOME")
    monkeypatch.setattr(Path, "home", homeless)
    assert home.parent / "tmp" in cache_folder().parents


@pytest.mark.skipif(os.geteuid() == 0, reason="nothing is read-only to the superuser")
def test_a_read_only_cache_is_not_used(home: Path) -> None:
    """A home that may be read but not written."""
    home.chmod(0o500)
    assert home.parent / "tmp" in cache_folder().parents


def test_a_temporary_folder_others_may_write_to_is_not_trusted(home: Path, refused: Path) -> None:
    """Machine code read from a cache is run: a folder laid out by somebody else is left alone."""
    laid_out = refused / f"driftwell-{os.getuid()}"
    laid_out.mkdir()
    laid_out.chmod(0o777)
    found = cache_folder()
    assert laid_out not in found.parents
    assert refused == found.parent
    assert 0o700 == found.stat().st_mode & 0o777


def test_a_link_in_place_of_the_temporary_folder_is_not_followed(home: Path, refused: Path) -> None:
    """Wherever it leads."""
    (home / "elsewhere").mkdir(mode=0o700)
    (refused / f"driftwell-{os.getuid()}").symlink_to(home / "elsewhere")
    cache_folder()
    assert [] == list((home / "elsewhere").iterdir())


def test_machine_code_not_used_for_a_month_is_removed(home: Path) -> None:
    """Of other versions; using a folder counts, and nothing else is touched."""
    present = cache_folder()
    parent = present.parent
    ages = {
        "kernels-0.0.1-aaaaaaaaaaaa": 31.0,
        "kernels-0.0.1-bbbbbbbbbbbb": 29.0,
        "something-else": 400.0,
        present.name: 400.0,
    }
    for name, days in ages.items():
        (parent / name).mkdir(exist_ok=True)
        (parent / name / "index.nbi").write_bytes(b"machine code")
        then = time.time() - days * DAY
        os.utime(parent / name, (then, then))
    assert present == cache_folder()
    left = {folder.name for folder in parent.iterdir()}
    assert set(ages) - {"kernels-0.0.1-aaaaaaaaaaaa"} == left
    assert time.time() - present.stat().st_mtime < 60.0


CALLER = """\
from driftwell.kernels import kernel
from driftwell.callee import twice

@kernel
def outcome(x):
    return twice(x) + 1.0
"""
CALLEE = """\
from driftwell.kernels import kernel

@kernel
def twice(x):
    return {factor} * x
"""


def test_an_edited_callee_is_not_overlooked(tmp_path: Path) -> None:
    """A caller kept in the cache is compiled anew when only a function it calls was edited."""
    source = Path(driftwell.__file__).parent
    here = tmp_path / "driftwell"
    here.mkdir()
    for name in ("__init__.py", "_version.py"):
        shutil.copy(source / name, here)
    shutil.copytree(source / "kernels", here / "kernels", ignore=shutil.ignore_patterns("__py*"))
    (here / "caller.py").write_text(CALLER)

    def outcome(factor: float) -> str:
        (here / "callee.py").write_text(CALLEE.format(factor=factor))
        done = subprocess.run(
            [sys.executable, "-c", "from driftwell.caller import outcome; print(outcome(5.0))"],
            env={
                **os.environ,
                "PYTHONPATH": str(tmp_path),
                "DRIFTWELL_CACHE": str(tmp_path / "c"),
                # Python's own cache of modules misses an edit within the second
                "PYTHONDONTWRITEBYTECODE": "1",
            },
            cwd=tmp_path,
            capture_output=True,
            text=True,
            check=True,
        )
        return done.stdout.strip()

    assert ["11.0", "11.0", "16.0"] == [outcome(2.0), outcome(2.0), outcome(3.0)]
    assert 2 == len(list((tmp_path / "c").iterdir()))
