"""What is said of a ledger that does not close."""

from __future__ import annotations

from dataclasses import fields, replace
from pathlib import Path

import numpy as np
import pytest

from driftwell.coulomb.promise import Broken
from driftwell.ledger.doubts import doubts
from driftwell.ledger.ledger import LedgerRow
from driftwell.run import run
from driftwell.scenario.read import read_scenario
from tests.running import Unwatched

TRAP = """
title    = "40 ions packed tight"
duration = "20 us"
species.ion = { mass = "40 u", charge = "1 e" }
stepping.step = "STEP"

[[cloud]]
name    = "ions"
species = "ion"
count   = 40
shape   = { kind = "ball", radius = "20 um" }

[[field]]
name = "well"
kind = "static-quadrupole"
axial_frequency = { species = "ion", value = "100 kHz" }

[[field]]
name     = "magnet"
kind     = "uniform-magnetic"
strength = "2 T"
"""


QUIET = replace(
    LedgerRow(**{each.name: 0.0 for each in fields(LedgerRow)}),  # type: ignore[arg-type]
    count=40.0,
)


def last_row(folder: Path, step: str) -> LedgerRow:
    """The ledger's last row of a dense cloud let go in a trap."""
    (folder / "trap.toml").write_text(TRAP.replace("STEP", step))
    return run(read_scenario(folder / "trap.toml"), folder / step, Unwatched()).ledger


def test_a_step_too_long_is_told_and_one_short_enough_is_not(tmp_path: Path) -> None:
    """The same cloud: its own repulsion is followed by steps of 1 ns and not by steps of 100 ns."""
    (told,) = doubts(last_row(tmp_path, "100 ns"))
    assert "the energy account is open by" in told
    assert "shorter step" in told
    assert [] == doubts(last_row(tmp_path, "1 ns"))


@pytest.mark.parametrize(
    ("field", "name"),
    [
        ("momentum_residual", "momentum"),
        ("angular_residual", "angular momentum"),
        ("charge_residual", "charge"),
        ("count_residual", "count"),
        ("third_law_residual", "Coulomb forces"),
    ],
)
@pytest.mark.parametrize("amount", [1e-6, -1e-6, np.nan])
def test_an_account_no_rounding_explains_is_told(
    tmp_path: Path, field: str, name: str, amount: float
) -> None:
    """Each by its name, also where it is not a number."""
    row = replace(last_row(tmp_path, "1 ns"), **{field: amount})
    (told,) = doubts(row)
    assert name in told


def test_angular_momentum_may_be_open_by_what_the_torque_of_the_sum_explains() -> None:
    """No more, and nothing else may."""
    assert [] == doubts(replace(QUIET, angular_residual=1e-6, angular_allowance=1e-6))
    (told,) = doubts(replace(QUIET, angular_residual=1e-5, angular_allowance=1e-6))
    assert "account of angular momentum is open by 1e-05" in told
    (told,) = doubts(replace(QUIET, momentum_residual=1e-6, angular_allowance=1e-3))
    assert "account of momentum" in told


def test_an_energy_account_open_by_the_error_of_the_sum_is_told_as_that() -> None:
    (told,) = doubts(replace(QUIET, energy_residual=-0.03, coulomb_error=0.05))
    assert "open by 0.03" in told
    assert "error of the Coulomb sum, 5.0e-02 of the force, can explain" in told
    (told,) = doubts(replace(QUIET, energy_residual=-0.03, coulomb_error=1e-4))
    assert "hard encounter" in told


def test_a_broken_promise_is_told_before_all_else() -> None:
    row = replace(QUIET, energy_residual=0.5)
    first, second = doubts(row, Broken(1e-4, 3.2e-4, 2.5e-6, unmended=False))
    assert "less accurate than coulomb.accuracy = 0.0001: for up to 2.5 us of the run" in first
    assert "3.2e-04 of the force (rms) at the worst look; from then on it was tightened" in first
    assert "energy" in second
