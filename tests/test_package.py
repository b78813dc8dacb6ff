"""The package as others see it: names, version, types, the module as a program."""

from __future__ import annotations

import subprocess
import sys
from importlib.metadata import PackageNotFoundError, version
from importlib.resources import files
from pathlib import Path

import pytest

import driftwell
from tests.record.invented_run import invented_run


def test_the_package_names_what_it_offers() -> None:
    assert {"Scenario", "__version__", "open_run", "read"} < set(driftwell.__all__)
    assert sorted(driftwell.__all__) == dir(driftwell)
    for name in driftwell.__all__:
        assert getattr(driftwell, name) is not None


def test_open_run_is_loaded_when_it_is_asked_for(tmp_path: Path) -> None:
    invented_run(tmp_path / "run", segments=1)
    script = (
        "import sys, driftwell\n"
        "assert 'h5py' not in sys.modules\n"
        f"run = driftwell.open_run({str(tmp_path / 'run')!r})\n"
        "print(run.outcome.word, 'h5py' in sys.modules)"
    )
    done = subprocess.run(
        [sys.executable, "-c", script], capture_output=True, text=True, timeout=60, check=True
    )
    assert "unfinished True\n" == done.stdout


def test_a_name_it_does_not_offer_is_an_attribute_error() -> None:
    with pytest.raises(AttributeError, match=r"driftwell.*'close_run'"):
        driftwell.close_run  # noqa: B018


def test_its_version_is_that_of_the_distribution() -> None:
    try:
        installed = version("driftwell")
    except PackageNotFoundError:
        pytest.skip("runs from the sources, nothing is installed")
    assert installed == driftwell.__version__


def test_its_types_are_shipped() -> None:
    assert files(driftwell).joinpath("py.typed").is_file()


def test_the_module_is_the_program() -> None:
    done = subprocess.run(
        [sys.executable, "-m", "driftwell", "--version"],
        capture_output=True,
        text=True,
        timeout=60,
        check=True,
    )
    assert (f"driftwell {driftwell.__version__}\n", "") == (done.stdout, done.stderr)
