"""Means over replicas, and how far to trust them.

Of n replicas with the values x_i and sampling errors e_i the mean is sum(x_i)/n. Its error is told
in two ways, which agree where the e_i say truly how far the answer would differ had other charges
been drawn:

    from the errors      sqrt(sum(e_i^2)) / n
    from the scatter     sqrt(sum((x_i - mean)^2) / (n (n - 1)))

The larger one is given. The scatter of two or three replicas is small by chance often enough; the
errors leave out what a question does not see within one run, such as the way the cloud happened to
be loaded where it is averaged over time. The larger of the two errs on the safe side.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from driftwell.answers.answer import Answer

USED = ("finished", "all lost")
"""Outcomes of runs whose answers are what was asked for; a stopped run answers for less time."""


@dataclass(frozen=True, slots=True)
class Mean:
    """A mean over replicas; `error` is None where none is known.

    replicas : how many there were with a number
    """

    value: float
    error: float | None
    replicas: int


def mean(answers: Sequence[Answer]) -> Mean:
    """The mean over replicas' answers to one question; those that are no number are left out."""
    found = [answer for answer in answers if math.isfinite(answer.value)]
    n = len(found)
    if n == 0:
        return Mean(math.nan, None, 0)
    value = math.fsum(answer.value for answer in found) / n
    errors = [answer.error for answer in found if answer.error is not None]
    told = []
    if len(errors) == n:
        told.append(math.hypot(*errors) / n)
    if n > 1:
        told.append(math.dist([answer.value for answer in found], [value] * n))
        told[-1] /= math.sqrt(n * (n - 1))
    return Mean(value, max(told, default=None), n)
