"""What field cells feel, as the tree guesses it, against the field they feel."""

from __future__ import annotations

import numpy as np
import pytest

from driftwell.tree.cells import WANT
from tests.physics.clouds import CLOUDS
from tests.tree.grown import SETTINGS, Grown, grown


def guesses(found: Grown) -> tuple[np.ndarray, np.ndarray]:
    """Of each leaf: the field the tree takes it to feel, and what that is of the true one.

    True is (mean F^-2)^(-1/2), which weighs errors as their mean square does.
    """
    leaves = [cell for cell in range(found.count) if not found.right(cell)]
    guess = 1.0 / (SETTINGS.tolerance * found.tree.cells[leaves, WANT]) * found.unit**2
    square = (found.field**2).sum(axis=0)
    true = [np.mean(1.0 / square[found.charges(leaf)]) ** -0.5 for leaf in leaves]
    return guess, guess / np.array(true)


@pytest.mark.parametrize("shape", CLOUDS)
def test_the_field_of_leaves_is_guessed_to_a_factor(shape: str) -> None:
    """Half of them within 2 and nine of ten within 3, in any unit of length.

    In a needle the next neighbours are nearer than a leaf's length lets one think: the guess is
    too small there, which costs time and no accuracy.
    """
    place, charge = CLOUDS[shape](6000)
    found = grown(place * 1e-5, charge)
    _, ratio = guesses(found)
    if shape == "needle":
        assert 0.02 <= np.quantile(ratio, 0.1) <= np.quantile(ratio, 0.9) <= 2.0
    else:
        assert 0.5 <= np.median(ratio) <= 2.0
        assert 0.33 <= np.quantile(ratio, 0.1) <= np.quantile(ratio, 0.9) <= 3.0


def test_no_field_is_taken_for_less_than_a_fiftieth() -> None:
    """Of the rms over all charges: a core ten thousand times denser sets the floor of the rest."""
    random = np.random.default_rng(1)
    place = random.normal(size=(3, 4000))
    place[:, ::2] *= 1e-4
    found = grown(place)
    guess, _ = guesses(found)
    rms = np.sqrt(np.mean(guess**2))
    assert guess.min() == pytest.approx(0.02 * rms, rel=0.02, abs=0.0)
    assert guess.max() > 0.3 * rms


def test_a_cell_bears_what_the_charges_in_it_bear_on_the_average() -> None:
    """The mean of F^-2, weighted by numbers."""
    found = grown(*CLOUDS["plummer"](3000))
    for cell in range(found.count):
        if found.right(cell):
            parts = [found.tree.cells[each, WANT] ** 2 for each in (cell + 1, found.right(cell))]
            counts = [found.charges(each).size for each in (cell + 1, found.right(cell))]
            expected = np.sqrt(np.average(parts, weights=counts))
            assert expected == pytest.approx(found.tree.cells[cell, WANT], rel=1e-12, abs=0.0)
