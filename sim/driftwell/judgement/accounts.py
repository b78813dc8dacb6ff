"""Accounts of the ledger that are open, and the Coulomb sum's promise where it was not kept."""

from __future__ import annotations

from collections.abc import Iterator

from driftwell.coulomb.promise import Promise
from driftwell.judgement.finding import Finding
from driftwell.judgement.subject import Subject
from driftwell.ledger.doubts import all_doubts
from driftwell.record.rows import row_of
from driftwell.stepping.loop import entries_below


def accounts(subject: Subject) -> Iterator[Finding]:
    """What puts all answers of a run in doubt."""
    run = subject.run
    if not len(run.ledger):
        return
    state = entries_below("coulomb", run.state())
    watch = Promise(run.header.coulomb_accuracy, state or None)
    for doubt in all_doubts(row_of(run.ledger[-1]), watch.broken(run.end_time)):
        remedy = doubt.remedy[0].upper() + doubt.remedy[1:]
        yield Finding(doubt.name, doubt.words, doubt.figure, doubt.limit, remedy, grave=True)
