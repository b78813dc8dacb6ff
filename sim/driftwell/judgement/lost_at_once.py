"""Whether charges were lost before they had moved: loaded where a wall is, or beyond it.

Common practice, no source: what is gone within the first hundredth of the run, and within ten
steps, never took part.
"""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from driftwell.judgement.finding import Finding, about
from driftwell.judgement.subject import Subject

LIMIT = 0.02
"""Part of a cloud."""
_STEPS, _PART = 10, 0.01


def lost_at_once(subject: Subject) -> Iterator[Finding]:
    """Each cloud of which more than a few were."""
    losses, header = subject.run.losses(), subject.run.header
    soon = min(_STEPS * subject.step, _PART * header.duration)
    for cloud in header.clouds:
        if cloud.emitted or cloud.count == 0:
            continue
        gone = losses[(losses["cloud"] == cloud.index) & (losses["time"] <= soon)]
        share = len(gone) / cloud.count
        if share <= LIMIT:
            continue
        wall = header.walls[int(np.bincount(gone["wall"]).argmax())]
        yield Finding(
            "charges lost at once",
            f'{len(gone)} of {cloud.count} charges of "{cloud.name}" were lost within '
            f'{about(soon, "s")}, most of them on "{wall}": {share:.1%}, where {LIMIT:.0%} '
            "may; they count in every part that is asked",
            share,
            LIMIT,
            f'Make cloud.{cloud.name}.shape smaller, or move "{wall}" away from it.',
        )
