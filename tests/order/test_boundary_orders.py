"""How fast capacitances of drawn electrodes converge as elements are halved.

At an edge the density is like s^(b - 1), b = pi over the angle that the field fills; on elements
s = L u^m it is like u^(m b - 1), and the charge of all errs like h^(2 m b): twice the power, as of
any quantity that is an extreme of the energy (common practice, no source). Where m b is whole
nothing is left to converge but polynomials.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from driftwell.boundary.drawn import quadrature, solved_on
from driftwell.boundary.drawn_elements import Elements, elements_on
from driftwell.boundary.drawn_surface import charged_surface
from driftwell.geometry.outline import Outline
from tests.boundary.drawn_figures import disc, path

RULES = quadrature(1e-10)


def charge(drawn: Outline, m: float, halvings: int) -> float:
    """Charge at 1 V over 2 pi eps0, on elements of the exponent m all over, of equal spans of u."""
    elements: Elements = elements_on(charged_surface([(drawn,)], True, 1.0), True)
    spans = elements.spans.copy()
    spans[:, 2] = m
    elements = replace(elements, spans=spans).encircled()
    for _ in range(halvings):
        elements = elements.halved(np.ones(len(elements), dtype=bool))
    found = solved_on(elements, True, 1, RULES)
    return float(found.charge.sum())


@pytest.mark.parametrize("m", [1.0, 1.5])
def test_at_the_edge_of_a_sheet_the_order_is_m(m: float) -> None:
    """b = 1/2; the capacitance of a disc is 8 eps0 R, Jackson problem 3.3."""
    errors = np.abs([charge(disc(0.0, 1.0), m, k) * 2.0 * np.pi / 8.0 - 1.0 for k in (2, 3, 4)])
    assert [m, m] == pytest.approx(np.log2(errors[:-1] / errors[1:]), abs=0.1)


@pytest.mark.parametrize("m", [1.0, 2.0])
def test_at_the_edge_of_a_block_the_order_is_four_thirds_of_m(m: float) -> None:
    """b = 2/3; against elements of exponent 3."""
    block = path((0.0, -1.0), (1.0, -1.0), (1.0, 1.0), (0.0, 1.0))
    exact = charge(block, 3.0, 2)
    errors = np.abs([charge(block, m, k) / exact - 1.0 for k in (2, 3, 4)])
    order = 4.0 * m / 3.0
    assert [order, order] == pytest.approx(np.log2(errors[:-1] / errors[1:]), abs=0.1)


def test_elements_that_suit_the_edge_converge_at_once() -> None:
    """One element of twelve nodes gives a disc to ten digits, two to rounding."""
    errors = [abs(charge(disc(0.0, 1.0), 2.0, k) * 2.0 * np.pi / 8.0 - 1.0) for k in (0, 1)]
    assert errors[0] < 1e-10
    assert errors[1] < 1e-13
