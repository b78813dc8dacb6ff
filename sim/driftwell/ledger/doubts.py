"""What a ledger says against its run: an account that does not close is told in words."""

from __future__ import annotations

from driftwell.ledger.ledger import LedgerRow

OPEN = 1e-2
"""Energy residual from which a run's answers are in doubt."""
BROKEN = 1e-9
"""Residual of momentum, angular momentum, charge, count or third law no rounding explains."""


def doubts(row: LedgerRow) -> list[str]:
    """Sentences, one for each account that is open; none where all close.

    The energy's residual measures the step; it is relative to the largest energy in the account,
    so that in a fast beam a small one may still hide a large error of its own repulsion.
    """
    found = []
    if not abs(row.energy_residual) < OPEN:
        found.append(
            f"the energy account is open by {abs(row.energy_residual):.2g} of the largest energy "
            "in it: the step does not follow the motion, most likely a hard encounter of two "
            "charges. Do not rely on the answers; take a shorter step (stepping.steps_per_period "
            "or stepping.step) or give coulomb.softening a length."
        )
    others = {
        "momentum": row.momentum_residual,
        "angular momentum": row.angular_residual,
        "charge": row.charge_residual,
        "count": row.count_residual,
        "sum of the Coulomb forces": row.third_law_residual,
    }
    found += [
        f"the account of {name} is open by {abs(residual):.2g}, which no rounding explains: "
        "a defect of driftwell, please report it with the scenario."
        for name, residual in others.items()
        if not abs(residual) < BROKEN
    ]
    return found
