"""All judgements, in the order in which they are told."""

from __future__ import annotations

from collections.abc import Callable, Iterator

from driftwell.errors import DriftwellError
from driftwell.judgement.accounts import accounts
from driftwell.judgement.energy_drift import energy_drift
from driftwell.judgement.fast_charges import fast_charges
from driftwell.judgement.finding import Finding
from driftwell.judgement.fineness import fineness
from driftwell.judgement.folded_lines import folded_lines
from driftwell.judgement.gas_left_out import gas_left_out
from driftwell.judgement.heavy_charges import heavy_charges
from driftwell.judgement.idle_process import idle_process
from driftwell.judgement.images_left_out import images_left_out
from driftwell.judgement.images_weakened import images_weakened
from driftwell.judgement.lost_at_once import lost_at_once
from driftwell.judgement.rare_outcomes import rare_outcomes
from driftwell.judgement.starved import starved
from driftwell.judgement.step_length import step_length
from driftwell.judgement.subject import Subject
from driftwell.judgement.unsettled import unsettled
from driftwell.judgement.wide_bars import wide_bars
from driftwell.record.reader import Run

Judgement = Callable[[Subject], Iterator[Finding]]

JUDGEMENTS: tuple[Judgement, ...] = (
    accounts,
    step_length,
    energy_drift,
    heavy_charges,
    fineness,
    lost_at_once,
    starved,
    rare_outcomes,
    wide_bars,
    unsettled,
    folded_lines,
    idle_process,
    images_left_out,
    images_weakened,
    fast_charges,
    gas_left_out,
)


def judged(run: Run) -> tuple[Finding, ...]:
    """What is to be said of a run as its record stands; nothing of one that is as it should be.

    A judgement that the record does not hold enough for says nothing.

    Raises RecordError where the record cannot be read.
    """
    subject = Subject(run)
    found: list[Finding] = []
    for judgement in JUDGEMENTS:
        try:
            found += judgement(subject)
        except DriftwellError:
            raise
        except Exception as defect:  # a defect in one judgement must not cost the run the others
            found.append(_defect(judgement, defect))
    return tuple(found)


def _defect(judgement: Judgement, defect: Exception) -> Finding:
    name = getattr(judgement, "__name__", "a judgement").replace("_", " ")
    return Finding(
        name,
        f'the judgement "{name}" could not be made ({type(defect).__name__}: {defect})',
        1.0,
        0.0,
        "This is a defect of driftwell, please report it with the scenario; the answers stand.",
    )
