"""Questions put to a run that has been recorded."""

from __future__ import annotations

from typing import Any

from driftwell.answers.answer import Answer
from driftwell.answers.answering import with_force_errors
from driftwell.answers.form import QuestionForm
from driftwell.api.raw_values import IN_CODE, raw_keys
from driftwell.errors import AnswerError, ScenarioError
from driftwell.forms.faults import read_form
from driftwell.record.reader import Run as Record
from driftwell.scenario.model import Scenario as Declared
from driftwell.scenario.references import reference_faults
from driftwell.scenario.told import sentence


def asked(run: Record, ask: str, name: str | None, keys: dict[str, Any]) -> Answer:
    """The answer to one more question; see :meth:`driftwell.api.run.Run.ask`."""
    question = _question(run, {"name": name or ask, "ask": ask, **keys})
    try:
        answer = question.answer(run)
    except AnswerError as fault:
        raise AnswerError(f'{ask} of "{question.of}" cannot be answered: {fault}') from fault
    return with_force_errors(answer, question, run)


def _question(run: Record, given: dict[str, Any]) -> QuestionForm:
    """The question, checked as in a file. Raises ScenarioError with all its faults."""
    header = run.header
    entry = raw_keys(given, "ask")
    groups = [{"name": cloud.name} for cloud in header.clouds]
    table: dict[str, Any] = {
        "title": header.title,
        "duration": f"{header.duration!r} s",
        "question": [entry],
    }
    scenario, faults = read_form(Declared, table)
    known = {**table, "cloud": groups, "detector": [{"name": name} for name in run.detectors]}
    faults += [fault for fault in reference_faults(known) if fault.path[:1] == ("question",)]
    if scenario is None or faults:
        told = dict.fromkeys(f"{IN_CODE}: {sentence(each, table, Declared)}" for each in faults)
        raise ScenarioError("\n".join(told))
    return scenario.question[0]
