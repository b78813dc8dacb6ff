"""Whether charges moved so fast that the Coulomb sum missed a share of their forces.

The run tells so when it first sees it (coulomb/bunch_frames.py); here it is looked at once more,
for whoever reads the record.
"""

from __future__ import annotations

from collections.abc import Iterator

from driftwell.coulomb.bunch_frames import moving
from driftwell.forms import spelled
from driftwell.judgement.finding import Finding
from driftwell.judgement.subject import Subject

_BETTER = 0.5


def fast_charges(subject: Subject) -> Iterator[Finding]:
    """The largest share of any cloud at any look, where all were summed in the laboratory."""
    header = subject.run.header
    if not subject.summed or "rest frame" in header.coulomb_because:
        return
    worst, framed, when, name = 0.0, 0.0, 0.0, ""
    for look in subject.looks:
        for cloud in header.clouds:
            own = subject.named(look, cloud)
            if len(own) < 2 or cloud.charge == 0.0:
                continue
            now = moving(own.velocity, own.mass * own.weight)
            if now.square > worst:
                worst, framed, when, name = now.square, now.missed, look.time, cloud.name
    if worst <= header.coulomb_accuracy:
        return
    scenario = subject.scenario
    unfit = scenario is None or bool(scenario.images or scenario.cell or scenario.source)
    mends = framed < _BETTER * worst and not unfit
    yield Finding(
        "fast charges summed as at rest",
        f'"{name}" moves at {worst**0.5:.3g} c at t = {spelled(when, "s", 3)}: magnetic forces, a '
        f"share {worst:.2g} of their push, are left out; coulomb.accuracy is "
        f"{header.coulomb_accuracy:g}",
        worst,
        header.coulomb_accuracy,
        'Set coulomb.frame = "bunch".'
        if mends
        else f"Nothing here mends it: take it as an error of the push, or set coulomb.accuracy = "
        f"{worst:.1g}, which the run then has no need to be better than.",
        told=True,
    )
