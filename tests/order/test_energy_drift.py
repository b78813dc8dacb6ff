"""Energy over many steps in a trap at rest: it wavers within a bound and goes nowhere.

A symplectic scheme conserves an energy that differs from the true one by a term of the scheme's
order, for times exponentially long in 1/h: E. Hairer, C. Lubich, G. Wanner, Geometric Numerical
Integration (2006), sec. IX.8 (from memory).
"""

from __future__ import annotations

import math
from pathlib import Path

import numpy as np
import pytest

from tests.crystal import at_rest_in_the_frame, crystal
from tests.running import Floats, carried_out, quantity

STEPS, RECORDS = 100_000, 200


def residuals(folder: Path, scheme: str, step: float) -> Floats:
    """Energy residual at each record of a crystal of eight ions, shaken but not molten."""
    shaken = crystal(8) + 0.3 * np.random.default_rng(4).normal(size=(8, 3))
    found = carried_out(
        folder,
        STEPS * step,
        **at_rest_in_the_frame(shaken),
        stepping={"scheme": scheme, "step": quantity(step, "s")},
        record={"every": quantity(STEPS // RECORDS * step, "s")},
    )
    return np.asarray(found.ledger["energy_residual"][1:])


@pytest.mark.parametrize(
    ("scheme", "step", "least", "most"),
    [
        ("kick-drift-kick", 20e-9, 1e-7, 1e-5),
        ("kick-drift-kick", 40e-9, 4e-7, 4e-5),
        ("composed-4", 40e-9, 1e-11, 1e-8),
    ],
)
def test_the_energy_of_a_trap_at_rest_does_not_drift(
    tmp_path: Path, scheme: str, step: float, least: float, most: float
) -> None:
    """1e5 steps, 200 to 400 axial periods: the slope is within three of its errors of nothing.

    The residual is the ledger's, relative to the largest energy; its size, from both sides, is
    that of the scheme's order at this step.
    """
    residual = residuals(tmp_path, scheme, step)
    assert residual.size == RECORDS
    assert least < np.abs(residual).max() < most
    run = np.linspace(0.0, 1.0, RECORDS)
    (slope, _), covariance = np.polyfit(run, residual, 1, cov=True)
    assert 0.0 == pytest.approx(slope, abs=3.0 * math.sqrt(covariance[0, 0]))
    assert 0.0 == pytest.approx(slope, abs=0.5 * np.ptp(residual))
