"""Whether simulated charges are near enough to each other to know the cloud's thickness.

The charges' own field is known to their mean distance a, or to the softening e where that is
longer. A cloud thinner than that is pushed apart as one of the thickness max(a, e) would be:

    max(a, e) <= the smallest rms size                                                        (1)

Real charges, one by one, have the field they have, however few they are; softened within more than
a third of their distance they lose what they do to each other singly. Common practice, no source.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass

from driftwell.answers.evidence import CloudFacts
from driftwell.constants import ELECTRIC_CONSTANT
from driftwell.forms import spelled
from driftwell.judgement.cloud_state import cloud_state
from driftwell.judgement.finding import Finding, about
from driftwell.judgement.subject import Subject

THIN = 1.0
"""Of eq. (1)."""
BLUNT = 1.0 / 3.0
"""Softening over the mean distance of charges that are simulated one by one."""
_MUCH = 6.0
"""Of eq. (1): beyond it, more than two hundred times as many charges would be needed."""


def fineness(subject: Subject) -> Iterator[Finding]:
    """Every cloud whose own push is felt in the run: at its start, or at all looks alike."""
    if not subject.summed:
        return
    for cloud in subject.run.header.clouds:
        seen = _seen(subject, cloud)
        if not seen:
            continue
        start = seen[0] if seen[0].time == 0.0 and not cloud.emitted else None
        worst = min(seen, key=lambda each: each.figure)
        if start is not None and start.figure > worst.figure:
            worst = start
        if cloud.weight > 1.0 and worst.figure > THIN:
            yield _thin(subject, cloud, worst)
        elif cloud.weight == 1.0 and worst.figure > BLUNT:
            yield _blunt(cloud, worst)


@dataclass(frozen=True, slots=True)
class _Seen:
    """A cloud at a time, s: the figure of eq. (1), distance and rms size, m, and the softening."""

    time: float
    figure: float
    spacing: float
    size: float
    softening: float


def _seen(subject: Subject, cloud: CloudFacts) -> list[_Seen]:
    """The looks at which the cloud's own push is felt: plasma frequency times the run above 1."""
    softening, found = subject.run.header.softening, []
    for look in subject.looks if cloud.charge != 0.0 else ():
        state = cloud_state(subject.named(look, cloud))
        if state is None or not state.density:
            continue
        square = state.density * cloud.weight * cloud.charge**2 / (ELECTRIC_CONSTANT * cloud.mass)
        if math.sqrt(square) * subject.run.end_time < 1.0:
            continue
        coarse = max(state.spacing, softening) / state.sizes[0]
        figure = coarse if cloud.weight > 1.0 else softening / state.spacing
        found.append(_Seen(look.time, figure, state.spacing, state.sizes[0], softening))
    return found


def _thin(subject: Subject, cloud: CloudFacts, seen: _Seen) -> Finding:
    soft = seen.softening > seen.spacing
    what = (
        f"coulomb.softening, {spelled(seen.softening, 'm', 3)}"
        if soft
        else f"the distance between its charges, {about(seen.spacing, 'm')}"
    )
    if soft:
        remedy = f'Set coulomb.softening = "{about(0.5 * seen.size, "m")}".'
    elif seen.figure < _MUCH:
        remedy = f"Set {subject.finer(cloud, seen.figure**3)}."
    else:
        remedy = (
            f'Set coulomb.softening = "{about(seen.spacing, "m")}", which smooths it; more '
            "charges than can be had would be needed to know it better."
        )
    return Finding(
        "fineness of the charges' own field",
        f'at t = {spelled(seen.time, "s", 3)} "{cloud.name}" is {about(seen.size, "m")} thin '
        f"(rms), and {what}, is {seen.figure:.2g} times that; at most {THIN:g} is wanted: its own "
        "push across that thickness is too weak or too grainy",
        seen.figure,
        THIN,
        remedy,
    )


def _blunt(cloud: CloudFacts, seen: _Seen) -> Finding:
    return Finding(
        "softening of single charges",
        f"at t = {spelled(seen.time, 's', 3)} coulomb.softening is {seen.figure:.2g} of the "
        f'distance between the charges of "{cloud.name}", {about(seen.spacing, "m")}, which '
        f"are simulated one by one; at most {BLUNT:.2g} is wanted: what they do to each other "
        "singly is blunted",
        seen.figure,
        BLUNT,
        f'Set coulomb.softening = "{about(0.1 * seen.spacing, "m")}".',
    )
