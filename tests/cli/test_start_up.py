"""What is loaded when: help answers at once, and nothing heavy comes before it is needed."""

from __future__ import annotations

import json
import subprocess
import sys
from pathlib import Path

import pytest

ROD_TRAP = Path(__file__).parents[2] / "scenarios" / "rod-trap.toml"
HEAVY = {"numpy", "numba", "h5py", "matplotlib", "pydantic", "pint", "tqdm", "scipy", "shtab"}


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
    assert "matplotlib" not in loaded_by("import driftwell.cli.runs.run")


def test_the_schema_needs_no_terminal_bar() -> None:
    assert not {"tqdm", "matplotlib"} & loaded_by("import driftwell.cli.schema")


def test_an_estimate_that_times_nothing_loads_nothing_that_times_draws_or_optimises() -> None:
    """It answers within two seconds: units, pictures and statistics alone take as long."""
    loaded = loaded_by(
        "import driftwell.cli.main as cli\n"
        f"assert 0 == cli.main(['estimate', {str(ROD_TRAP)!r}, '--threads', '1'])"
    )
    slow = {"matplotlib", "pint", "dask", "scipy.stats", "scipy.optimize", "scipy.ndimage"}
    assert not {*slow, "driftwell.timed_run", "driftwell.study.forecast"} & loaded
