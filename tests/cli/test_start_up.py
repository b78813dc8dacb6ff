"""What is loaded when: help answers at once, and nothing heavy comes before it is needed."""

from __future__ import annotations

import json
import subprocess
import sys

import pytest

HEAVY = {"numpy", "numba", "h5py", "matplotlib", "pydantic", "pint", "tqdm", "scipy"}


def loaded_by(code: str) -> set[str]:
    """Names of the modules in memory after `code` ran in a fresh interpreter."""
    script = f"{code}\nimport json, sys\nprint('\\n' + json.dumps(sorted(sys.modules)))"
    done = subprocess.run(
        [sys.executable, "-c", script], capture_output=True, text=True, timeout=60, check=True
    )
    return set(json.loads(done.stdout.splitlines()[-1]))


@pytest.mark.parametrize(
    "code",
    [
        "import driftwell",
        "import driftwell.cli.main",
        """
import driftwell.cli.main as cli
try:
    cli.main(["--help"])
except SystemExit as left:
    assert left.code == 0
""",
        """
import driftwell.cli.main as cli
try:
    cli.main(["run", "--threads", "none"])
except SystemExit as left:
    assert left.code == 2
""",
    ],
)
def test_importing_the_package_and_asking_for_help_load_nothing_heavy(code: str) -> None:
    assert set() == HEAVY & loaded_by(code)


def test_reading_a_scenario_loads_no_pictures() -> None:
    assert "matplotlib" not in loaded_by("import driftwell.cli.run_command")


def test_the_schema_needs_no_terminal_bar() -> None:
    assert not {"tqdm", "matplotlib"} & loaded_by("import driftwell.cli.schema")
