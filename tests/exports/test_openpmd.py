"""openPMD as written: its validator finds nothing, a general reader reads the same bits."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path
from typing import Any

import h5py
import numpy as np
import openpmd_api
import pytest

from driftwell.answers.evidence import Snapshot
from driftwell.errors import RecordError
from driftwell.exports.openpmd import group_names
from driftwell.exports.states import states
from driftwell.exports.table import export
from driftwell.exports.wanted import Times
from driftwell.record.reader import Run
from tests.report.pictured_run import MASS, NONE, charges, pictured_run

GROUPS = ("hot___load_", "_other")


def validated(path: Path) -> str:
    """What the official validator says of a file in its last line."""
    command = [sys.executable, "-m", "openpmd_validator.check_h5", "-i", str(path)]
    done = subprocess.run(command, capture_output=True, text=True, check=False)
    return done.stdout.splitlines()[-1]


def component(series: Any, record: Any) -> np.ndarray:
    """The numbers of a component as they lie in the file."""
    found = record.load_chunk()
    series.flush()
    return np.array(found)


def compare(path: Path, expected: list[Snapshot]) -> None:
    """Everything in the file, read by the general reader, against the record."""
    series = openpmd_api.Series(str(path), openpmd_api.Access.read_only)
    assert "driftwell" == series.software
    assert list(range(len(expected))) == list(series.iterations)
    for number, state in enumerate(expected):
        iteration = series.iterations[number]
        assert state.time == iteration.time * iteration.time_unit_SI
        assert [GROUPS[k] for k in np.unique(state.cloud)] == sorted(
            iteration.particles, key=GROUPS.index
        )
        for k in np.unique(state.cloud):
            own, group = state.cloud == k, iteration.particles[GROUPS[k]]
            for axis, name in enumerate("xyz"):
                place = group["position"][name]
                assert 1.0 == place.unit_SI
                assert state.position[own, axis].tolist() == component(series, place).tolist()
                assert not component(series, group["positionOffset"][name]).any()
                momentum = group["momentum"][name]
                found = component(series, momentum) * momentum.unit_SI
                assert (state.velocity[own, axis] * MASS).tolist() == found.tolist()
            for name, values in (
                ("id", state.id),
                ("mass", state.mass),
                ("charge", state.charge),
                ("weighting", state.weight),
            ):
                assert values[own].tolist() == component(series, group[name][SCALAR]).tolist()
    series.close()


SCALAR = openpmd_api.Record_Component.SCALAR


@pytest.mark.parametrize(("what", "count"), [("snapshots", 2), ("trajectory", 3)])
def test_the_validator_finds_nothing_and_a_general_reader_finds_the_same_bits(
    run: Run, tmp_path: Path, what: str, count: int
) -> None:
    path = export(run, "openpmd", tmp_path / "out.h5", [what], author="A. Nobody")
    assert "Result: 0 Errors and 0 Warnings." == validated(path)
    expected = list(states(run, what, Times()))
    assert count == len(expected)
    compare(path, expected)


def test_momenta_have_the_dimension_and_weighting_that_the_standard_gives_them(
    run: Run, tmp_path: Path
) -> None:
    path = export(run, "openpmd", tmp_path / "out.h5", times=["end"])
    with h5py.File(path) as file:
        assert [0] == [int(each) for each in file["data"]]
        group = file["data/0/particles"][GROUPS[0]]
        assert [1, 1, -1, 0, 0, 0, 0] == group["momentum"].attrs["unitDimension"].tolist()
        assert (0, 1.0) == _weighted(group["momentum"])
        assert (1, 1.0) == _weighted(group["weighting"])
        assert (0, 0.0) == _weighted(group["position"])
        low = group["particlePatches/offset/x"][0]
        high = low + group["particlePatches/extent/x"][0]
        assert low == group["position/x"][:].min()
        assert high > group["position/x"][:].max()


def _weighted(record: Any) -> tuple[int, float]:
    return int(record.attrs["macroWeighted"]), float(record.attrs["weightingPower"])


def test_names_become_different_words_of_letters_digits_and_underscores() -> None:
    assert ["a_b", "a_b_2", "_", "a_b_2_2"] == group_names(["a b", "a-b", "µ", "a_b_2"])


def test_only_charges_at_times_go_into_openpmd(run: Run, tmp_path: Path) -> None:
    with pytest.raises(RecordError, match="needs snapshots or trajectory"):
        export(run, "openpmd", tmp_path / "out.h5", ["ledger"])
    assert [] == list(tmp_path.iterdir())


def test_an_iteration_without_charges_is_without_species(tmp_path: Path) -> None:
    found = pictured_run(tmp_path / "run", [(0.0, charges(3)), (1e-6, NONE)])
    path = export(found, "openpmd", tmp_path / "out.h5", author="A. Nobody")
    assert "Result: 0 Errors and 0 Warnings." == validated(path)
    series = openpmd_api.Series(str(path), openpmd_api.Access.read_only)
    assert [1, 0] == [len(series.iterations[k].particles) for k in (0, 1)]
    series.close()
    assert 2 == len(list((export(found, "vtk", tmp_path / "vtk") / "snapshots").iterdir()))
    written = export(found, "csv", tmp_path / "a.csv", ["snapshots"]).read_text()
    assert 1 + 3 == len(written.splitlines())
