"""How far answers lie from the truth, in units of the error they give."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
from recorded_by_hand import Recorded, asked

SEEDS = 200


def scores(
    question: dict[str, Any], draw: Callable[[np.random.Generator], Recorded], truth: float | None
) -> np.ndarray:
    """(value - truth) / error for each seed; without a truth the mean of all values stands in."""
    form = asked(**question)
    answers = [form.answer(draw(np.random.default_rng(seed))) for seed in range(SEEDS)]
    value = np.array([answer.value for answer in answers])
    error = np.array([answer.error for answer in answers], dtype=np.float64)
    return np.asarray((value - (value.mean() if truth is None else truth)) / error)
