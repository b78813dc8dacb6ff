"""What a ledger says against its run: an account that does not close is told in words."""

from __future__ import annotations

from driftwell.coulomb.promise import Broken
from driftwell.forms import spelled
from driftwell.ledger.ledger import LedgerRow

OPEN = 1e-2
"""Energy residual from which a run's answers are in doubt."""
BROKEN = 1e-9
"""Residual of momentum, angular momentum, charge, count or third law no rounding explains."""
_ROUGHLY = 3.0
"""How many times the allowance, which looks at records only, the angular momentum may be open."""


def doubts(row: LedgerRow, broken: Broken | None = None) -> list[str]:
    """Sentences, one for each account that is open and a broken promise; none where all is well.

    The energy's residual measures the step; it is relative to the largest energy in the account,
    so that in a fast beam a small one may still hide a large error of its own repulsion. Angular
    momentum is open by what the torque of an inexact pair sum explains.

    broken : how the pair sum was less accurate than asked
    """
    found = [] if broken is None else [_broken(broken)]
    if not abs(row.energy_residual) < OPEN:
        found.append(_open(row))
    rounding = {
        "momentum": (row.momentum_residual, BROKEN),
        "angular momentum": (
            row.angular_residual,
            BROKEN + _ROUGHLY * row.angular_allowance,
        ),
        "charge": (row.charge_residual, BROKEN),
        "count": (row.count_residual, BROKEN),
        "sum of the Coulomb forces": (row.third_law_residual, BROKEN),
    }
    found += [
        f"the account of {name} is open by {abs(residual):.2g}, which no rounding explains: "
        "a defect of driftwell, please report it with the scenario."
        for name, (residual, limit) in rounding.items()
        if not abs(residual) < limit
    ]
    return found


def _open(row: LedgerRow) -> str:
    """Why the energy account may be open."""
    amount = f"the energy account is open by {abs(row.energy_residual):.2g} of the largest energy"
    if abs(row.energy_residual) <= row.coulomb_error:
        return (
            f"{amount} in it, which the error of the Coulomb sum, {row.coulomb_error:.1e} of the "
            "force, can explain. Ask for a smaller coulomb.accuracy; if it stays open, take a "
            "shorter step (stepping.steps_per_period or stepping.step)."
        )
    return (
        f"{amount} in it: the step does not follow the motion, most likely a hard encounter of two "
        "charges. Do not rely on the answers; take a shorter step (stepping.steps_per_period "
        "or stepping.step) or give coulomb.softening a length."
    )


def _broken(broken: Broken) -> str:
    """For how long the pair sum was less accurate than asked, and how badly."""
    text = (
        f"the Coulomb sum was less accurate than coulomb.accuracy = {broken.accuracy:g}: for up to "
        f"{spelled(broken.seconds, 's', 3)} of the run its error was above that, "
        f"{broken.worst:.1e} of the force (rms) at the worst look"
    )
    if broken.unmended:
        return (
            f"{text}, and it could not be made smaller. Run again with a larger coulomb.accuracy, "
            'or with coulomb.method = "direct".'
        )
    return (
        f"{text}; from then on it was tightened. Where that matters, run again with a smaller "
        "coulomb.accuracy, or record more often: it is looked at only then."
    )
