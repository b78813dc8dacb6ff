"""Which pair sum a run takes, and that it is the sum it says it is."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from driftwell.constants import COULOMB_CONSTANT
from driftwell.coulomb import summation as module
from driftwell.coulomb.crossover import LEAST, Contest
from driftwell.coulomb.direct import potentials
from driftwell.coulomb.form import Coulomb
from driftwell.coulomb.summation import (
    NEVER,
    Summation,
    manner_of,
    pairs_in_one_sum,
    room_in_bytes,
)
from tests.inexact import Inexact, inexact  # noqa: F401


@pytest.fixture
def border(monkeypatch: pytest.MonkeyPatch) -> list[Contest]:
    """A machine on which the tree pays from 3000 charges on; what was asked of it."""
    asked: list[Contest] = []

    def found(contest: Contest) -> int:
        asked.append(contest)
        return 3000

    monkeypatch.setattr(module, "crossover", found)
    return asked


@pytest.mark.parametrize(
    ("method", "count", "taken", "because"),
    [
        ("auto", 8, "direct", "8 charges, too few for a tree to pay"),
        ("auto", 1999, "direct", "1999 charges, too few for a tree to pay"),
        ("auto", 2999, "direct", "2999 charges, and here the tree is faster only from 3000 on"),
        ("auto", 3000, "tree", "here it is faster than the direct sum from 3000 on"),
        ("direct", 5000, "direct", "the scenario says so"),
        ("tree", 64, "direct", "64 charges need no tree"),
        ("tree", 65, "tree", "the scenario says so; to 0.001 of the force"),
        ("off", 5000, "off", "do not feel each other"),
        ("auto", 0, "direct", "0 charges"),
        ("auto", 1, "direct", "1 charge, "),
    ],
)
def test_the_choice_follows_from_method_and_number(
    method: str,
    count: int,
    taken: str,
    because: str,
    border: list[Contest],
    inexact: Inexact,  # noqa: F811
) -> None:
    found = Summation(Coulomb(method=method, accuracy=1e-3), count, 1)
    assert taken == found.method
    assert because in found.because
    assert (taken == "tree") == (found.settings is not None)
    assert (taken != "tree") == found.exact
    assert len(border) == int(method == "auto" and count >= LEAST)


def test_what_was_settled_is_not_asked_again(
    border: list[Contest],
    inexact: Inexact,  # noqa: F811
) -> None:
    """As charges are lost, and after a resume, the choice follows from the number kept."""
    form = Coulomb(method="auto")
    start = Summation(form, 4000, 2)
    state = start.manner.state()
    again = Summation(form, 4000, 1, manner=manner_of(state))
    assert start.manner == again.manner
    for run in (start, again):
        assert ["tree", "tree", "direct", "direct"] == [
            run.laid_out(n).method for n in (4000, 3000, 2999, 50)
        ]
        assert run.settings == run.laid_out(2999).laid_out(3500).settings
    assert 1 == len(border)
    assert Contest(inexact.settings_for(1e-4), False, True, False, 2) == border[0]


@pytest.mark.parametrize("method", ["direct", "tree", "off"])
def test_a_manner_comes_back_from_its_state(
    method: str,
    inexact: Inexact,  # noqa: F811
) -> None:
    manner = Summation(Coulomb(method=method, accuracy=3e-7), 100, 1).manner
    assert manner == manner_of(manner.state())
    assert (method == "tree") == (manner.crossover < NEVER)


@pytest.mark.parametrize(
    ("accuracy", "precision", "tree_mixed", "direct_mixed"),
    [
        (1e-4, "auto", True, False),
        (1e-6, "auto", True, False),
        (1e-7, "auto", False, False),
        (1e-4, "double", False, False),
        (1e-4, "mixed", True, True),
    ],
)
def test_mixed_precision_is_taken_where_it_is_allowed(
    accuracy: float,
    precision: str,
    tree_mixed: bool,
    direct_mixed: bool,
    inexact: Inexact,  # noqa: F811
) -> None:
    form = Coulomb(method="tree", accuracy=accuracy, precision=precision)
    manner = Summation(form, 100, 1).manner
    assert (tree_mixed, direct_mixed) == (manner.tree_mixed, manner.direct_mixed)
    summed = Summation(form.model_copy(update={"method": "direct"}), 100, 1)
    assert direct_mixed == (not summed.exact)
    assert Summation(form.model_copy(update={"method": "direct"}), 64, 1).exact


@pytest.mark.parametrize("count", [30, 700])
@pytest.mark.parametrize("method", ["direct", "tree", "off"])
def test_field_and_potential_are_coulombs_law_to_what_is_promised(method: str, count: int) -> None:
    random = np.random.default_rng(count)
    place, charge = random.normal(size=(3, count)), random.uniform(1.0, 2.0, count)
    summed = Summation(Coulomb(method=method), count, 1)
    apart = place[:, :, None] - place[:, None, :]
    square = (apart**2).sum(axis=0) + np.eye(count)
    expected = COULOMB_CONSTANT * (apart * charge * square**-1.5).sum(axis=2)
    energy = np.empty(count)
    potentials(place, charge, 0.0, COULOMB_CONSTANT, energy)
    if method == "off":
        expected, energy = 0.0 * expected, 0.0 * energy
    field, potential = np.full((3, count), np.nan), np.full(count, np.nan)
    summed.field(place, charge, field)
    summed.potential(place, charge, potential)
    usual = np.sqrt((expected**2).sum() / count)
    to = 1e-4 if summed.method == "tree" else 1e-12
    assert np.sqrt(((field - expected) ** 2).sum() / count) <= to * usual
    assert energy == pytest.approx(potential, rel=to, abs=0.0)


def test_softening_is_that_of_the_form() -> None:
    place, charge = np.array([[0.0, 3.0], [0.0, 0.0], [0.0, 0.0]]), np.array([1.0, 2.0])
    summed = Summation(Coulomb(method="direct", softening="4 m"), 2, 1)
    field, potential = np.empty((3, 2)), np.empty(2)
    summed.field(place, charge, field)
    summed.potential(place, charge, potential)
    constant = COULOMB_CONSTANT
    expected = constant * np.array([[-2.0 * 3.0 / 125.0, 3.0 / 125.0], [0.0, 0.0], [0.0, 0.0]])
    assert expected == pytest.approx(field, rel=1e-14, abs=0.0)
    assert constant * np.array([2.0, 1.0]) / 5.0 == pytest.approx(potential, rel=1e-14, abs=0.0)


def test_a_sum_is_tightened_until_it_cannot_be(inexact: Inexact) -> None:  # noqa: F811
    inexact.tolerance, inexact.best = 1e-2, 1e-3
    loose = Summation(Coulomb(method="tree"), 100, 1)
    better = loose.tightened(4.0)
    assert better.settings == replace(loose.manner.settings, tolerance=2.5e-3)
    assert better.manner.crossover == loose.manner.crossover
    best = better.tightened(4.0)
    assert best.tightened(4.0) is best
    direct = Summation(Coulomb(method="direct"), 100, 1)
    assert direct.tightened(4.0) is direct
    mixed = Summation(Coulomb(method="direct", precision="mixed"), 100, 1)
    assert mixed.tightened(4.0).exact


def test_settings_given_take_the_place_of_those_found(inexact: Inexact) -> None:  # noqa: F811
    settings = replace(inexact.settings_for(1e-4), tolerance=0.125)
    assert settings == Summation(Coulomb(method="tree"), 100, 1, settings).settings


@pytest.mark.parametrize("count", [10, 1000, 3000, 100_000])
def test_room_and_work_of_every_method_are_in_proportion(count: int) -> None:
    forms = {method: Coulomb(method=method) for method in ("off", "direct", "tree", "auto")}
    room = {method: room_in_bytes(form, count) for method, form in forms.items()}
    pairs = {method: pairs_in_one_sum(form, count) for method, form in forms.items()}
    assert 0 == room["off"] == pairs["off"]
    assert min(room["direct"], room["tree"]) <= room["auto"] <= max(room["direct"], room["tree"])
    assert 0.5 * count * (count - 1) == pairs["direct"]
    assert pairs["tree"] <= pairs["direct"]
    assert Summation(forms["direct"], count, 1).work.nbytes <= room["direct"] + 10_000
