"""Limits and convergence studies on a cluster, and gone on with without one."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path

import pytest

pytest.importorskip("distributed")

from driftwell.cli.main import main
from tests.study.small_cluster import SmallCluster, cluster
from tests.study.small_study import SCENARIO, study_file

Printed = pytest.CaptureFixture[str]

LIMIT = """
[limit]
key        = "cloud.load.motion.temperature"
from       = "100 K"
to         = "1500 K"
answer     = "size"
crosses    = "150 um"
resolution = "20 %"
noise      = "none"
"""


@pytest.fixture(scope="module")
def running() -> Iterator[SmallCluster]:
    with cluster() as made:
        yield made


def told(capsys: Printed, code: int, *arguments: str | Path) -> tuple[str, str]:
    """What a command printed that ended with the code expected."""
    found = main([*map(str, arguments), "--no-pictures"])
    printed = capsys.readouterr()
    assert code == found, printed.err
    assert "Traceback" not in printed.err
    return printed.out, printed.err


def there(made: SmallCluster) -> tuple[str, ...]:
    """The arguments that name the cluster."""
    return ("--on", "dask", "--scheduler", made.address)


def test_a_limit_is_found_on_a_cluster_round_by_round(
    tmp_path: Path, running: SmallCluster, capsys: Printed
) -> None:
    """All rounds go to the same workers; without the cluster the same command finds all there."""
    path, folder = study_file(tmp_path, LIMIT), tmp_path / "far"
    found, err = told(capsys, 0, "limit", path, "-o", folder, *there(running))
    assert f"at {running.address}, on 1 thread each" in err
    assert "limit: " in found
    table = (folder / "limit.csv").read_text()
    assert len({line.split(",")[1] for line in table.splitlines()[1:]}) > 1  # rounds
    again, err = told(capsys, 0, "limit", path, "-o", folder)
    assert "side by side" not in err
    assert table == (folder / "limit.csv").read_text()
    assert found.partition("runs:")[0] == again.partition("runs:")[0]


def test_a_convergence_study_is_made_on_a_cluster_in_two_sweeps(
    tmp_path: Path, running: SmallCluster, capsys: Printed
) -> None:
    """The judged run is one, all others are another, on the same connection; without the
    cluster the same command finds all there."""
    path, folder = tmp_path / "rods.toml", tmp_path / "far"
    path.write_text(SCENARIO.replace("20 us", "11 us"))
    asked = ("converge", path, "--replicas", "2", "-o", folder)
    _, err = told(capsys, 0, *asked, *there(running), "--axes", "step,seeds")
    assert f"at {running.address}, on 1 thread each" in err
    table = (folder / "convergence.csv").read_text()
    assert len(table.splitlines()) == 2
    _, err = told(capsys, 0, *asked, "--axes", "step,seeds")
    assert "side by side" not in err
    assert table == (folder / "convergence.csv").read_text()
