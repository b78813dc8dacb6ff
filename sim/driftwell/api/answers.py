"""The answers of a run, by number or by name."""

from __future__ import annotations

from collections.abc import Iterable
from typing import Any, overload

from driftwell.answers.answer import Answer
from driftwell.answers.answer_lines import answer_lines, common_lines
from driftwell.errors import AnswerError
from driftwell.forms.faults import nearest

_WIDTH = 100


class Answers(tuple[Answer, ...]):
    """Answers in the order of the questions; ``answers["held"]`` is the one of that name.

    It is a tuple, so that it can stand wherever a run's answers did before.
    """

    __slots__ = ()

    def __new__(cls, answers: Iterable[Answer] = ()) -> Answers:
        return super().__new__(cls, answers)

    @overload  # type: ignore[override]
    def __getitem__(self, which: str) -> Answer: ...
    @overload
    def __getitem__(self, which: int) -> Answer: ...
    @overload
    def __getitem__(self, which: slice) -> Answers: ...
    def __getitem__(self, which: str | int | slice) -> Answer | Answers:
        """An answer by the name of its question, or as of a tuple.

        Raises AnswerError where no question has the name.
        """
        if isinstance(which, slice):
            return Answers(super().__getitem__(which))
        if isinstance(which, int):
            return super().__getitem__(which)
        for each in self:
            if each.name == which:
                return each
        names = self.names
        meant = nearest(which, names)
        hint = f"did you mean {meant!r}?" if meant else f"there are {', '.join(names) or 'none'}"
        raise AnswerError(f"no answer is called {which!r}; {hint}")

    @property
    def names(self) -> tuple[str, ...]:
        """Names of the questions."""
        return tuple(each.name for each in self)

    def __str__(self) -> str:
        lines = answer_lines(self, _WIDTH) + common_lines(self, _WIDTH)
        return "\n".join(lines) or "no answers"

    def __repr__(self) -> str:
        return f"<Answers: {', '.join(self.names) or 'none'}>"

    def _repr_html_(self) -> str:
        from driftwell.api.html import answers_html

        return answers_html(self)

    def __reduce__(self) -> Any:
        return Answers, (tuple(self),)
