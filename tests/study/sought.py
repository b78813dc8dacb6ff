"""Searches over functions that are known, without a study file and without runs."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np

from driftwell.forms.declared import Number
from driftwell.study.axis import Held, Range
from driftwell.study.limit_asked import Asked, Resolution
from driftwell.study.limit_form import Limit
from driftwell.study.limit_noise import Reading
from driftwell.study.limit_search import Search


def asked(
    first: float = 0.0,
    last: float = 1.0,
    *,
    size: float = 0.02,
    relative: bool = False,
    whole: bool = False,
    log: bool = False,
    **keys: Any,
) -> Asked:
    """A limit over plain numbers, at which an answer crosses 0."""
    form = Limit.model_validate(
        {"key": "x", "from": first, "to": last, "answer": "y", "crosses": 0.0, **keys}
    )
    held = Held(("x",), None, Number(whole, ()))
    reach = Range(held, first, last, (first, last), log)
    return Asked(form, reach, "1", 0.0, "1", Resolution(size, relative))


def searched(
    function: Callable[[float], float],
    limit: Asked,
    noise: float = 0.0,
    *,
    seed: int = 1,
    told: float | None = 1.0,
) -> Search:
    """The search, carried out on a function with Gaussian noise.

    told : the error that each answer says it has, in that which it has; None: none
    """
    search = Search(limit)
    generator = np.random.default_rng(seed)
    while wanted := search.next():
        for each in wanted:
            value = float(function(each.place.value)) + noise * generator.standard_normal()
            search.learn(each, Reading(value, None if told is None else told * noise))
    return search
