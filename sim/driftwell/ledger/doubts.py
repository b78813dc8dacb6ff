"""What a ledger says against its run: an account that does not close is told in words."""

from __future__ import annotations

from dataclasses import dataclass

from driftwell.coulomb.promise import Broken
from driftwell.forms import spelled
from driftwell.ledger.ledger import LedgerRow

OPEN = 1e-2
"""Energy residual from which a run's answers are in doubt."""
BROKEN = 1e-9
"""Residual of momentum, angular momentum, charge, count or third law no rounding explains."""
_ROUGHLY = 3.0
"""How many times the allowance, which looks at records only, the angular momentum may be open."""


@dataclass(frozen=True, slots=True)
class Doubt:
    """Why a run's answers are in doubt.

    name : of the account; words : what is wrong, without its full stop; remedy : what to do
    figure, limit : what was found, and what it is compared with
    """

    name: str
    words: str
    figure: float
    limit: float
    remedy: str


def doubts(row: LedgerRow, broken: Broken | None = None) -> list[str]:
    """The same as :func:`all_doubts`, a sentence or two each."""
    return [f"{each.words}{_between(each)} {each.remedy}" for each in all_doubts(row, broken)]


def all_doubts(row: LedgerRow, broken: Broken | None = None) -> list[Doubt]:
    """One for each account that is open and for a broken promise; none where all is well.

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
        Doubt(
            f"account of {name}",
            f"the account of {name} is open by {abs(residual):.2g}, which no rounding explains",
            abs(residual),
            limit,
            "a defect of driftwell, please report it with the scenario.",
        )
        for name, (residual, limit) in rounding.items()
        if not abs(residual) < limit
    ]
    return found


def _between(doubt: Doubt) -> str:
    return ":" if doubt.remedy.startswith("a ") else "."


def _open(row: LedgerRow) -> Doubt:
    """Why the energy account may be open."""
    amount = f"the energy account is open by {abs(row.energy_residual):.2g} of the largest energy"
    if abs(row.energy_residual) <= row.coulomb_error:
        words = (
            f"{amount} in it, which the error of the Coulomb sum, {row.coulomb_error:.1e} of the "
            "force, can explain"
        )
        remedy = (
            "Ask for a smaller coulomb.accuracy; if it stays open, take a "
            "shorter step (stepping.steps_per_period or stepping.step)."
        )
    else:
        words = (
            f"{amount} in it: the step does not follow the motion, most likely a hard encounter of "
            "two charges"
        )
        remedy = (
            "Do not rely on the answers; take a shorter step (stepping.steps_per_period "
            "or stepping.step) or give coulomb.softening a length."
        )
    return Doubt("account of energy", words, abs(row.energy_residual), OPEN, remedy)


def _broken(broken: Broken) -> Doubt:
    """For how long the pair sum was less accurate than asked, and how badly."""
    words = (
        f"the Coulomb sum was less accurate than coulomb.accuracy = {broken.accuracy:g}: for up to "
        f"{spelled(broken.seconds, 's', 3)} of the run its error was above that, "
        f"{broken.worst:.1e} of the force (rms) at the worst look"
    )
    if broken.unmended:
        words += ", and it could not be made smaller"
        remedy = 'Run again with a larger coulomb.accuracy, or with coulomb.method = "direct".'
    else:
        words += "; from then on it was tightened"
        remedy = (
            "Where that matters, run again with a smaller "
            "coulomb.accuracy, or record more often: it is looked at only then."
        )
    return Doubt("promise of the Coulomb sum", words, broken.worst, broken.accuracy, remedy)
