"""Whether the open energy account matters to what moves within the clouds.

The ledger's residual is relative to the largest energy ever in the account. In a beam or a drive
that is the motion of all charges together, against which an error of their own heat and repulsion
looks small. Here the gap is held against these:

    gap = residual x scale,   own = heat + |Coulomb energy|,   heat = sum of w m <c^2>/2      (1)

c is the velocity without the part that follows the place linearly (cloud_state.py). A gap that
swings with a drive and comes back is no drift: the mean of the last third of the records less that
of the first third is taken.
"""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from driftwell.constants import BOLTZMANN
from driftwell.forms import spelled
from driftwell.judgement.cloud_state import cloud_state
from driftwell.judgement.finding import Finding, about
from driftwell.judgement.subject import Subject
from driftwell.ledger.doubts import OPEN

LIMIT = 0.05
"""Of the charges' own energy, that the account may have drifted."""
_LEAST_ROWS = 6
_ROUNDING = 1e-11
"""Of the largest energy: what rounding may make of many steps."""


def energy_drift(subject: Subject) -> Iterator[Finding]:
    """What the steps, or the sums, have given to the charges or taken from them, against (1)."""
    rows = subject.run.ledger
    if len(rows) < _LEAST_ROWS or not subject.looks or abs(rows["energy_residual"][-1]) >= OPEN:
        return
    there = rows["kinetic"] + sum(np.abs(rows[name]) for name in ("field", "coulomb", "image"))
    gap = rows["energy_residual"] * np.maximum.accumulate(there)
    third = len(rows) // 3
    drift = abs(float(gap[-third:].mean() - gap[:third].mean()))
    own = max(_own(subject, k) for k in range(len(subject.looks)))
    if own <= 0.0 or drift <= max(LIMIT * own, _ROUNDING * float(there.max())):
        return
    count = float(rows["count"].max())
    each = drift / count / BOLTZMANN
    yield Finding(
        "drift of the energy",
        f"the energy account has drifted by {drift / own:.1%} of what the charges have by their "
        f"heat and their repulsion, {about(each, 'K')} for each; {LIMIT:.0%} may",
        drift / own,
        LIMIT,
        f'Set stepping.step = "{spelled(0.5 * subject.step, "s", 3)}" (half of it) and look '
        "whether the answers change.",
    )


def _own(subject: Subject, look: int) -> float:
    """Eq. (1) at one look, J."""
    snapshot = subject.looks[look]
    heat = 0.0
    for cloud in subject.run.header.clouds:
        state = cloud_state(subject.named(snapshot, cloud))
        if state is not None:
            heat += 1.5 * state.heat * state.count * cloud.weight
    rows = subject.run.ledger
    nearest = int(np.abs(rows["time"] - snapshot.time).argmin())
    return heat + abs(float(rows["coulomb"][nearest]))
