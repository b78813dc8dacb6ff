"""A run as xarray's datasets: named dimensions, coordinates, units."""

from __future__ import annotations

import importlib.util

import numpy as np
import pytest

from driftwell import DriftwellError, Run
from tests.api.small_scenarios import rods, trap

xarray = pytest.importorskip("xarray")


@pytest.fixture(scope="module")
def run(tmp_path_factory: pytest.TempPathFactory) -> Run:
    scenario = rods(trap()).cloud(
        "others",
        species="proton",
        count=3,
        shape={"kind": "gaussian", "sigma": "50 um"},
        motion={"temperature": "1e5 K"},
    )
    return scenario.run(tmp_path_factory.mktemp("api") / "run", threads=1, progress=False)


def test_trajectories_have_time_charge_and_component(run: Run) -> None:
    found = run.xarray.trajectory()
    assert {"time": 21, "charge": 11, "component": 3} == dict(found.sizes)
    assert ("m", "m/s", "s") == tuple(
        found[name].attrs["units"] for name in ("position", "velocity", "time")
    )
    one = found.position.sel(charge=4, component="z").isel(time=-1)
    assert run.positions[-1, 4][2] == float(one)
    assert ["load"] * 8 + ["others"] * 3 == found.cloud.values.tolist()
    assert run.header.digest == found.attrs["digest"]


def test_a_part_of_the_trajectories_is_chosen_before_it_is_read(run: Run) -> None:
    found = run.xarray.trajectory(records=slice(5, 9), ids=[9, 2])
    assert [9, 2] == found.charge.values.tolist()
    assert np.array_equal(run.positions[5:9, [9, 2]], found.position.values, equal_nan=True)
    assert [3, 5] == run.xarray.trajectory(ids=slice(3, 7, 2)).charge.values.tolist()


def test_moments_ledger_and_losses_carry_their_units(run: Run) -> None:
    moments = run.xarray.moments("load")
    assert np.array_equal(run.moments("load").centre[:, 2], moments.centre.sel(phase="z").values)
    ledger = run.xarray.ledger()
    assert "J" == ledger.kinetic.attrs["units"]
    assert np.array_equal(run.ledger["energy_residual"], ledger.energy_residual.values)
    losses = run.xarray.losses()
    assert losses.sizes["loss"] > 0
    assert len(run.losses()) == losses.sizes["loss"]
    assert ("loss", "component") == losses.position.dims


def test_a_missing_library_is_one_sentence_with_the_command(
    run: Run, monkeypatch: pytest.MonkeyPatch
) -> None:
    real = importlib.util.find_spec
    monkeypatch.setattr(
        "driftwell.api.datasets.find_spec", lambda name: None if name == "xarray" else real(name)
    )
    with pytest.raises(DriftwellError, match=r"pip install 'driftwell\[xarray\]'"):
        _ = run.xarray
