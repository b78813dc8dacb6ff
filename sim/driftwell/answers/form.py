"""What every kind of question declares, and what it is to the rest of the program."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, ClassVar, Literal

from driftwell.answers.answer import Answer
from driftwell.answers.evidence import CloudFacts, Evidence, Needs
from driftwell.errors import AnswerError
from driftwell.forms import Form, Name, NonNegative, Time, key, or_word
from driftwell.forms.spelling import spelled

if TYPE_CHECKING:
    Instant = float | Literal["start", "end"]
else:
    Instant = or_word(("start", "end"), NonNegative[Time])

Axis = Literal["x", "y", "z"]
AXES = "xyz"

TIME_TOLERANCE = 1e-9
"""Part of the time reached within which two times are the same."""


@dataclass(frozen=True, slots=True)
class References:
    """Names of clouds and detectors a question refers to; each must exist in the scenario.

    charges : named charges, each as its cloud and its number there, counted from 0
    charge_key : the question's key that names them
    """

    clouds: tuple[str, ...] = ()
    detectors: tuple[str, ...] = ()
    charges: tuple[tuple[str, int], ...] = ()
    charge_key: str = "charge"


class QuestionForm(Form):
    """Base of all questions. `unit` is that of the value and its error."""

    unit: ClassVar[str] = ""

    name: Name = key("what the answer is called in tables and results")
    ask: str = key("what is asked")
    of: Name = key("name of the cloud asked about")

    def needs(self, duration: float) -> Needs:
        """What the run must keep for this question; `duration` of the run in s."""
        return Needs()

    def times(self) -> dict[str, float]:
        """Times the question names, s, by their keys; none may lie after the end of the run."""
        return {}

    def moved_until(self, end: float) -> float:
        """Up to when the charges' motion decides the answer, s; `end` of the run."""
        return min(end, max(self.times().values(), default=end))

    def refers_to(self) -> References:
        """The clouds, detectors and charges the question names."""
        return References(clouds=(self.of,))

    def answer(self, evidence: Evidence) -> Answer:
        """The answer from what a run recorded.

        Raises AnswerError where it cannot be answered; the text says why.
        """
        raise TypeError(f"{type(self).__name__} must say how it is answered")

    def words(self) -> str:
        """One line for `driftwell check`: what is asked, of what, when."""
        raise TypeError(f"{type(self).__name__} must describe itself")

    def answered(self, value: float, error: float | None, note: str) -> Answer:
        """The answer to this question, in its unit."""
        return Answer(self.name, self.ask, float(value), self.unit, error, note)


class InstantQuestion(QuestionForm):
    """Base of questions about a cloud at one time."""

    at: Instant = key('when: "start", "end" or a time', default="end", example="1 ms")

    def needs(self, duration: float) -> Needs:
        return Needs(snapshots=(_seconds(self.at, duration),))

    def times(self) -> dict[str, float]:
        return {} if isinstance(self.at, str) else {"at": self.at}

    def moved_until(self, end: float) -> float:
        return 0.0 if self.at == "start" else super().moved_until(end)

    def time_in(self, evidence: Evidence) -> float:
        """The time asked for, s. Raises AnswerError where the run did not reach it."""
        return reached(_seconds(self.at, evidence.end_time), evidence)


def _seconds(at: float | str, end: float) -> float:
    if isinstance(at, str):
        return 0.0 if at == "start" else end
    return at


def instant_in_words(at: float | str) -> str:
    """``at the end`` or ``at 2 ms``."""
    return f"at the {at}" if isinstance(at, str) else f"at {spelled(at, 's')}"


def reached(time: float, evidence: Evidence) -> float:
    """`time`, s, when the run reached it. Raises AnswerError where it did not."""
    if time > evidence.end_time * (1.0 + TIME_TOLERANCE):
        raise AnswerError(
            f"the run ended at {spelled(evidence.end_time, 's')}, before {spelled(time, 's')}"
        )
    return time


def cloud_named(evidence: Evidence, name: str) -> CloudFacts:
    """The facts of a cloud; of a source `count` is the charges born.

    Raises AnswerError where there is none of that name.
    """
    if name not in evidence.clouds:
        raise AnswerError(f'there is no cloud "{name}"; known are {_listed(evidence.clouds)}')
    facts = evidence.clouds[name]
    return replace(facts, count=evidence.born(name)) if facts.emitted else facts


def detector_named(evidence: Evidence, name: str) -> int:
    """The number of a detector. Raises AnswerError where there is none of that name."""
    names = list(evidence.detectors)
    if name not in names:
        raise AnswerError(f'there is no detector "{name}"; known are {_listed(names)}')
    return names.index(name)


def _listed(names: object) -> str:
    return ", ".join(f'"{name}"' for name in names) or "none"  # type: ignore[attr-defined]
