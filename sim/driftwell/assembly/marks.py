"""What must happen when: traces, records, snapshots, breaks of waveforms."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from driftwell.answers.evidence import CloudFacts, TraceRequest
from driftwell.forms.waveforms import waveform_breaks
from driftwell.record.form import DEFAULT_RECORDS
from driftwell.record.header import trace_name
from driftwell.scenario.model import Scenario
from driftwell.solved.acting import ActingField
from driftwell.stepping.happenings import Traced
from driftwell.stepping.schedule import (
    BREAK,
    RECORD,
    SNAPSHOT,
    TRACE,
    Schedule,
    regular,
    schedule,
)


def all_traces(scenario: Scenario) -> list[TraceRequest]:
    """The coordinates all questions want traced, each once."""
    requests: dict[str, TraceRequest] = {}
    for question in scenario.question:
        for request in question.needs(scenario.duration).traces:
            name = trace_name(request)
            known = requests.get(name)
            if known is None or (request.every or math.inf) < (known.every or math.inf):
                requests[name] = request
    return list(requests.values())


def traced(request: TraceRequest, clouds: Sequence[CloudFacts]) -> Traced:
    facts = next(cloud for cloud in clouds if cloud.name == request.cloud)
    charge = None if request.charge is None else facts.first_id + request.charge
    return Traced(facts.index, charge, request.axis)


def all_marks(
    scenario: Scenario, step: float, traced: bool, every: float, acting: ActingField | None
) -> Schedule:
    """All marks of the run."""
    duration = scenario.duration
    records = regular(scenario.record.every or duration / DEFAULT_RECORDS, duration)
    snapshots = [np.array([0.0, duration])]
    if scenario.record.snapshots is not None:
        snapshots.append(regular(scenario.record.snapshots, duration))
    snapshots += [
        np.array(question.needs(duration).snapshots, dtype=np.float64)
        for question in scenario.question
    ]
    breaks = [waveform_breaks(field.waveform(), duration) for field in scenario.field]
    breaks += [process.breaks(duration) for process in scenario.process]
    breaks += [] if acting is None else acting.breaks(duration)
    marks: list[tuple[int, NDArray[np.float64]]] = [
        (RECORD, records),
        (SNAPSHOT, np.concatenate(snapshots)),
        (BREAK, np.array([time for times in breaks for time in times])),
    ]
    if traced:
        samples = regular(every, duration)
        even = np.abs(np.diff(samples, prepend=-every) - every) < 1e-6 * every
        marks.append((TRACE, samples[even]))
    return schedule(duration, step, marks, scenario.stepping.coulomb_every)
