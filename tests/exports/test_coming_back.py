"""What a run leaves in an open format is the start of another, to the last bit."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import numpy as np
import pytest

from driftwell.exports.table import export
from driftwell.record.reader import Run
from tests.exports.conftest import CLOUDS
from tests.report.pictured_run import MASS
from tests.running import carried_out, species

ION = {"ion": species(MASS)}
WRITTEN = {
    "openpmd": ("out.h5", ""),
    "csv": ("out.csv", ""),
    "parquet": ("out.parquet", ""),
    "vtk": ("out", "/snapshots/000001.vtp"),
}


def begun(folder: Path, **shape: Any) -> Run:
    """A run whose cloud begins as a file says, and lasts for a moment."""
    cloud = {"name": "again", "species": "ion", "shape": {"kind": "file", **shape}}
    return carried_out(
        folder,
        1e-12,
        species=ION,
        cloud=[cloud],
        coulomb={"method": "off"},
        stepping={"step": "1 ps"},
    )


@pytest.mark.parametrize("name", WRITTEN)
def test_the_last_snapshot_of_a_run_is_the_start_of_another_bit_for_bit(
    run: Run, tmp_path: Path, name: str
) -> None:
    file, inner = WRITTEN[name]
    export(run, name, tmp_path / file, ["snapshots"])
    choice = {} if name == "vtk" else {"at": "end"}
    expected = run.snapshot(run.snapshots[-1])
    for number, cloud in enumerate(CLOUDS):
        found = begun(tmp_path, path=file + inner, of=cloud, **choice).snapshot(0.0)
        own = expected.cloud == number
        assert expected.position[own].tolist() == found.position.tolist()
        assert expected.velocity[own].tolist() == found.velocity.tolist()
        assert expected.weight[own].tolist() == found.weight.tolist()


@pytest.mark.parametrize("name", ["openpmd", "csv", "parquet"])
def test_a_record_of_the_trajectory_may_be_the_start_as_well(
    run: Run, tmp_path: Path, name: str
) -> None:
    file, _ = WRITTEN[name]
    export(run, name, tmp_path / file, ["trajectory"])
    times, states = run.trajectory
    found = begun(tmp_path, path=file, of=CLOUDS[1], at=f"{float(times[1])!r} s").snapshot(0.0)
    assert states[1, 6:12, :3].tolist() == found.position.tolist()
    assert states[1, 6:12, 3:].tolist() == found.velocity.tolist()


def test_births_of_one_run_are_those_of_another(tmp_path: Path) -> None:
    emitter = {"kind": "disc", "radius": "1 mm"}
    keys: dict[str, Any] = {
        "species": ION,
        "coulomb": {"method": "off"},
        "stepping": {"step": "10 ns"},
    }
    gun = {
        "name": "gun",
        "species": "ion",
        "emitter": emitter,
        "current": "10 pA",
        "weight": 7,
        "motion": {"kinetic_energy": "10 eV"},
    }
    first = carried_out(tmp_path, 1e-6, source=[gun], **keys)
    born = first.births()
    assert 0 < len(born)
    for name in ("csv", "parquet"):
        export(first, name, tmp_path / f"births.{name}", ["births"])
        again = {"name": "again", "species": "ion"}
        again |= {"emitter": {"kind": "file", "path": f"births.{name}"}}
        found = carried_out(tmp_path, 1e-6, source=[again], **keys).births()
        for column in ("time", "position", "velocity", "weight"):
            assert np.array_equal(born[column], found[column])
