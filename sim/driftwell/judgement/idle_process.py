"""Whether a process of the scenario did anything at all: a gas too thin, a laser off its line."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from driftwell.judgement.finding import Finding
from driftwell.judgement.subject import Subject


def idle_process(subject: Subject) -> Iterator[Finding]:
    """Each process that gave neither energy nor momentum, nor had an event."""
    run = subject.run
    if not run.header.processes or not subject.ended:
        return
    last = run.rows("exchange")[-1]
    for name, given in zip(run.header.processes, last, strict=True):
        if not np.any(given):
            yield Finding(
                "process that did nothing",
                f'"{name}" acted on no charge in the whole run: 0 events, where 1 or more are '
                "expected",
                0.0,
                1.0,
                f"Look at start, end, region and `of` of process.{name}, and at its strength; or "
                "leave it out.",
            )
