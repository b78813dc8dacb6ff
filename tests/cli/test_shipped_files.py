"""What an installed driftwell brings besides code: starting scenarios, and the player's files."""

from __future__ import annotations

import shutil
import subprocess
import tomllib
from pathlib import Path

import pytest

HERE = Path(__file__).parents[2]
PACKAGE = HERE / "sim" / "driftwell"


def shipped() -> list[Path]:
    """Files of the package that are no code."""
    return [
        path for path in PACKAGE.rglob("*") if path.is_file() and path.suffix not in {".py", ".pyc"}
    ]


def test_the_package_holds_templates_and_what_a_page_is_made_of() -> None:
    assert {".toml", ".css", ".js"} <= {path.suffix for path in shipped()}


def test_the_wheel_is_the_whole_package() -> None:
    build = tomllib.loads((HERE / "pyproject.toml").read_text("utf-8"))["tool"]["hatch"]["build"]
    assert {"packages": ["sim/driftwell"]} == build["targets"]["wheel"]
    assert {"targets"} == set(build)


@pytest.mark.skipif(shutil.which("git") is None, reason="no git")
def test_nothing_that_is_shipped_is_ignored() -> None:
    """What git ignores, the builder leaves out."""
    done = subprocess.run(
        ["git", "check-ignore", "--no-index", *shipped()],
        cwd=HERE,
        capture_output=True,
        text=True,
        timeout=60,
        check=False,
    )
    if done.returncode == 128:
        pytest.skip("not a clone")
    assert "" == done.stdout
