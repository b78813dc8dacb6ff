"""Evaluation of several fields at once, outside of a run."""

from __future__ import annotations

import numpy as np
import pytest

from driftwell.fields.evaluation import evaluate
from tests.cases import BODIES, FIELDS, field

PLACES = np.random.default_rng(8).uniform(1e-3, 3e-3, (7, 3))


def test_fields_add_up() -> None:
    together = evaluate(FIELDS, BODIES, PLACES, 0.7e-6)
    apart = [evaluate([form], BODIES, PLACES, 0.7e-6) for form in FIELDS]
    for name in together._fields:
        found = getattr(together, name)
        assert sum(getattr(one, name) for one in apart) == pytest.approx(
            found, rel=1e-11, abs=1e-11 * np.abs(found).max()
        )


def test_no_fields_are_zero_everywhere() -> None:
    values = evaluate([], BODIES, PLACES, 0.0)
    assert [(7,), (7, 3), (7, 3), (7,)] == [value.shape for value in values]
    assert all(not value.any() for value in values)


def test_a_single_place_is_one_row() -> None:
    values = evaluate(FIELDS, BODIES, [1e-3, 2e-3, 3e-3], 0.0)
    assert [(1,), (1, 3), (1, 3), (1,)] == [value.shape for value in values]


def test_the_given_places_are_left_as_they_are() -> None:
    before = PLACES.copy()
    evaluate(FIELDS, BODIES, PLACES, 0.0)
    assert before.tolist() == PLACES.tolist()


def test_at_a_jump_the_piece_meant_is_named_by_a_time_inside_it() -> None:
    step = {"kind": "step", "before": "1 V/m", "after": "5 V/m", "at": "2 us"}
    form = field("uniform-electric", strength=step)
    sides = [
        evaluate([form], BODIES, [0, 0, 0], 2e-6, inside=inside).electric[0, 2]
        for inside in (1.9e-6, None, 2.1e-6)
    ]
    assert [1.0, 1.0, 5.0] == sides
