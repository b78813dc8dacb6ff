"""What every kind of question has in common, and what becomes of those without an answer."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest
from recorded_by_hand import (
    CHARGE,
    LOSS,
    MASS,
    ONE_OF_EACH,
    Recorded,
    asked,
    facts,
    near,
    table,
    through,
)

from driftwell.answers.answer import Answer
from driftwell.answers.answering import answer_all
from driftwell.answers.evidence import Evidence, Moments, TraceRequest
from driftwell.answers.form import QuestionForm
from driftwell.answers.kinds.moment_question import MomentQuestion
from driftwell.answers.moments import moments_of
from driftwell.answers.table import QUESTION_KINDS
from driftwell.forms import Form, one_of
from driftwell.forms.declared import kind_name
from driftwell.forms.faults import read_form
from driftwell.forms.wording import raw_table

COUNT = 100
TRACE = TraceRequest("load", None, 2, None)


def full() -> Recorded:
    """A record that can answer every question."""
    random = np.random.default_rng(1)
    position, velocity = random.normal(0.0, 1e-4, (2, COUNT, 3))
    cloud = facts(count=COUNT)
    recorded = Recorded(detectors=["exit", "slit"])
    for time in (0.0, 1e-3):
        recorded.at(time, (cloud, np.arange(COUNT), position, velocity))
    seen = {"position": position[:30], "velocity": velocity[:30]}
    recorded.crossed = np.concatenate(
        [through(1e-5 * (np.arange(1, 31) - 0.5 * part), cloud, part, **seen) for part in (0, 1)]
    )
    recorded.lost = table(LOSS, [(5e-4, 99, 0)])
    recorded.traced = traces(np.sin)
    row = moments_of(position.T, velocity.T, MASS)
    recorded.series = {"load": moments([row] * 8)}
    return recorded


def traces(shape: Any) -> dict[TraceRequest, tuple[np.ndarray, np.ndarray]]:
    """The centre and two charges oscillating along z at 50 kHz, as `shape` of the phase."""
    time = np.arange(1000) * 1e-6
    requests = (TRACE, *(TraceRequest("load", charge, 2, None) for charge in (0, 1)))
    return {request: (time, shape(2.0 * np.pi * 50e3 * time)) for request in requests}


def moments(rows: list[Any]) -> Moments:
    """Moments at even times up to 1 ms."""
    return Moments(
        np.linspace(0.0, 1e-3, len(rows)),
        *(
            np.array([getattr(row, name) for row in rows])
            for name in ("count", "centre", "covariance", "kinetic_energy", "kinetic_variance")
        ),
    )


def emptied() -> Recorded:
    """A record of a run that lost every charge at once."""
    none = np.empty((0, 3))
    cloud = facts(count=COUNT)
    nobody = np.empty(0, dtype=np.int64)
    recorded = Recorded(detectors=["exit", "slit"])
    for time in (0.0, 1e-3):
        recorded.at(time, (cloud, nobody, none, none))
    recorded.lost = table(LOSS, [(1e-6, i, 0) for i in range(COUNT)])
    recorded.traced = traces(lambda phase: np.full(phase.size, np.nan))
    recorded.series = {"load": moments([moments_of(none.T, none.T, MASS)] * 5)}
    return recorded


def test_one_of_each_kind_is_asked_here() -> None:
    kinds = [kind_name(kind, "ask") for kind in QUESTION_KINDS]
    assert sorted(str(kind) for kind in kinds) == sorted(keys["ask"] for keys in ONE_OF_EACH)
    assert len(kinds) == 35


@pytest.mark.parametrize("keys", ONE_OF_EACH, ids=lambda keys: keys["ask"])
def test_every_kind_answers_with_value_unit_error_and_note(keys: dict[str, Any]) -> None:
    found = asked(**keys).answer(full())
    assert (found.name, found.ask) == ("asked", keys["ask"])
    assert math.isfinite(found.value)
    assert found.unit
    assert found.note
    assert isinstance(found.value, float)
    if keys["ask"] == "line-resolving-power":
        assert found.error is None
        assert "no sampling error is known" in found.note
        return
    assert found.error is not None
    assert math.isfinite(found.error)
    assert isinstance(found.error, float)


@pytest.mark.parametrize("keys", ONE_OF_EACH, ids=lambda keys: keys["ask"])
def test_with_no_charge_left_every_kind_says_zero_or_why_not(keys: dict[str, Any]) -> None:
    question = asked(**keys)
    (found,) = answer_all([question], emptied())
    assert question.unit == found.unit
    if keys["ask"] in ("fraction-left", "fraction-through"):
        assert found.value == 0.0
        assert near(0.5 / (COUNT + 1)) == found.error
    elif keys["ask"] == "current":
        assert found.value == 0.0
        assert near(CHARGE * COUNT / 1e-3 * 0.5 / (COUNT + 1)) == found.error
    elif keys["ask"] == "lifetime":
        assert near(1e-6) == found.value
    else:
        assert math.isnan(found.value)
        assert found.error is None
        assert any(
            part in found.note
            for part in ("is left", "is not left", "passed", "lost at once", "holds fewer than")
        )


@pytest.mark.parametrize(
    "keys",
    [keys for keys in ONE_OF_EACH if isinstance(asked(**keys), MomentQuestion)],
    ids=lambda keys: keys["ask"],
)
def test_with_no_charge_left_a_window_says_so(keys: dict[str, Any]) -> None:
    (found,) = answer_all([asked(**keys, over=["0.2 ms", "0.8 ms"])], emptied())
    assert math.isnan(found.value)
    assert "holds fewer than" in found.note


def test_a_trace_that_ends_with_the_charge_is_read_up_to_there() -> None:
    recorded = full()
    time, value = recorded.traced[TRACE]
    recorded.traced[TRACE] = (time, np.where(time < 0.6e-3, value, np.nan))
    found = asked("frequency", axis="z").answer(recorded)
    assert near(50e3, rel=1e-9) == found.value
    assert "600 samples in 600 us, until it was lost" in found.note


def test_a_time_the_run_did_not_reach_is_told() -> None:
    questions = [
        asked("centre", axis="x", at="2 ms"),
        asked("centre", axis="x", over=["0.5 ms", "2 ms"]),
        asked("fraction-left", at="2 ms"),
    ]
    for found in answer_all(questions, full()):
        assert math.isnan(found.value)
        assert found.note == "the run ended at 1 ms, before 2 ms"


def test_an_unknown_cloud_or_detector_is_told_with_those_known() -> None:
    questions = [asked("centre", axis="x", of="lod"), asked("arrival-time", of="exot")]
    first, second = answer_all(questions, full())
    assert first.note == 'there is no cloud "lod"; known are "load"'
    assert second.note == 'there is no detector "exot"; known are "exit", "slit"'


class Broken(QuestionForm):
    """A question whose estimator has a defect."""

    def answer(self, evidence: Evidence) -> Answer:
        raise ZeroDivisionError("by nought")


def test_a_defect_does_not_take_the_other_answers_with_it() -> None:
    broken = Broken(name="bad", ask="broken", of="load")
    good = asked("fraction-left")
    first, second = answer_all([broken, good], full())
    assert math.isnan(first.value)
    assert first.name == "bad"
    assert first.note == "a defect of driftwell, please report it: ZeroDivisionError: by nought"
    assert second == good.answer(full())


@pytest.mark.parametrize("keys", ONE_OF_EACH, ids=lambda keys: keys["ask"])
def test_every_kind_names_what_it_refers_to_in_words_and_references(keys: dict[str, Any]) -> None:
    question = asked(**keys)
    names = question.refers_to()
    for name in (*names.clouds, *names.detectors):
        assert f'"{name}"' in question.words()
    assert {"load", "exit"} & {*names.clouds, *names.detectors}
    assert "\n" not in question.words()
    if keys["ask"] == "force":
        assert names.charges == (("load", 0),)


def test_questions_need_snapshots_at_their_times_and_traces_only() -> None:
    duration = 2e-3
    needed = {
        at: asked("centre", axis="x", at=at).needs(duration).snapshots
        for at in ("start", "end", "0.5 ms")
    }
    assert needed == {"start": (0.0,), "end": (duration,), "0.5 ms": (0.5e-3,)}
    for keys in (
        {"ask": "centre", "axis": "x", "over": ["1 ms", "2 ms"]},
        {"ask": "fraction-left", "at": "1 ms"},
        {"ask": "arrival-time", "of": "exit"},
    ):
        assert asked(**keys).needs(duration).snapshots == ()
    trace = asked("frequency", axis="y", charge=3, every="0.1 us").needs(duration).traces
    assert trace == (TraceRequest("load", 3, 1, near(1e-7)),)


def test_the_times_a_question_names_are_told_by_key() -> None:
    assert asked("force", charge=0).times() == {}
    assert asked("force", charge=0, at="3 ms").times() == {"at": 3e-3}
    assert asked("centre", axis="x", over=["1 ms", "4 ms"]).times() == {"over": 4e-3}


class Asking(Form):
    """A list of questions, as a scenario holds them."""

    question: tuple[one_of(QUESTION_KINDS, by="ask"), ...] = ()  # type: ignore[valid-type]


@pytest.mark.parametrize("keys", ONE_OF_EACH, ids=lambda keys: keys["ask"])
def test_a_question_survives_being_written_and_read(keys: dict[str, Any]) -> None:
    extra = {"over": ["1 ms", "2 ms"]} if "over" in type(asked(**keys)).model_fields else {}
    question = asked(**(keys | extra))
    read, faults = read_form(Asking, {"question": [raw_table(question)]})
    assert read is not None, faults
    assert (question,) == read.question


@pytest.mark.parametrize(
    ("keys", "needed"),
    [
        ({"ask": "centr", "axis": "x"}, 'did you mean "centre"'),
        ({"ask": "centre"}, "missing"),
        ({"ask": "centre", "axis": "r"}, '"x", "y" or "z"'),
        ({"ask": "centre", "axis": "x", "at": "ende"}, '"start" or "end", or a time'),
        ({"ask": "centre", "axis": "x", "at": "-1 ms"}, "at least 0"),
        ({"ask": "centre", "axis": "x", "at": "1 ms", "over": ["1 ms", "2 ms"]}, "exclude"),
        ({"ask": "centre", "axis": "x", "over": ["2 ms", "1 ms"]}, "end later than it begins"),
        ({"ask": "centre", "axis": "x", "over": ["2 ms"]}, "2"),
        ({"ask": "fraction-left", "over": ["1 ms", "2 ms"]}, "unknown key"),
        ({"ask": "emittance", "plane": "z"}, "normalised = true"),
        ({"ask": "frequency", "axis": "z", "near": "1 MHz", "every": "1 us"}, "half a period"),
        ({"ask": "frequency", "axis": "z", "near": "0 Hz"}, "greater than 0"),
        ({"ask": "force", "charge": -1}, "at least 0"),
        ({"ask": "force", "charge": 1.5}, "whole number"),
        ({"ask": "arrival-time", "statistic": "median"}, '"mean", "rms" or "fwhm"'),
    ],
    ids=str,
)
def test_a_wrong_question_is_a_fault_that_says_what_is_needed(
    keys: dict[str, Any], needed: str
) -> None:
    read, faults = read_form(Asking, {"question": [{"name": "a", "of": "load"} | keys]})
    assert read is None
    assert len(faults) == 1
    assert needed in faults[0].needed


class Erring(Recorded):
    """A record whose forces erred by 1e-5 at first and by 1e-3 from half a millisecond on."""

    def coulomb_error(self, until: float) -> float:
        return 1e-5 if until < 0.5e-3 else 1e-3


@pytest.mark.parametrize(
    ("keys", "expected"),
    [
        ({"ask": "fraction-left"}, 1e-3),
        ({"ask": "fraction-left", "at": "start"}, 0.0),
        ({"ask": "fraction-left", "at": "0 s"}, 0.0),
        ({"ask": "fraction-left", "at": "0.3 ms"}, 1e-5),
        ({"ask": "fraction-left", "at": "5 ms"}, 1e-3),
        ({"ask": "centre", "axis": "x", "over": ["0 ms", "0.2 ms"]}, 1e-5),
        ({"ask": "centre", "axis": "x", "over": ["0.1 ms", "0.8 ms"]}, 1e-3),
        ({"ask": "frequency", "axis": "z"}, 1e-3),
        ({"ask": "arrival-time", "of": "exit"}, 1e-3),
    ],
)
def test_an_answer_carries_the_error_of_the_forces_up_to_its_time(
    keys: dict[str, Any], expected: float
) -> None:
    """Of the start nothing has moved yet; where there is no answer the error is that of the try."""
    (found,) = answer_all([asked(**keys)], Erring(**vars(full()) | {"field_error": 2e-6}))
    assert expected == found.coulomb_error
    assert (2e-6 if expected else 0.0) == found.field_error
