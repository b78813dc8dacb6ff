"""The formulas of the expansions on plain numbers, and charges to try them on."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

from driftwell.tree import formulas
from driftwell.tree.multi_index import Index, cartesian, factorial

Floats = NDArray[np.float64]


class Plain:
    """Arithmetic on numbers of any kind that have ``+ - *``."""

    def constant(self, value: float) -> Any:
        return value

    def fused(self, a: Any, b: Any, c: Any) -> Any:
        return a * b + c

    def times(self, a: Any, b: Any) -> Any:
        return a * b

    def add(self, a: Any, b: Any) -> Any:
        return a + b

    def subtract(self, a: Any, b: Any) -> Any:
        return a - b


PLAIN = Plain()


def charges_about(seed: int, count: int = 20) -> tuple[Floats, Floats]:
    """Places (3, n) within 0.5 of the origin along each axis, and charges of both signs."""
    random = np.random.default_rng(seed)
    return random.uniform(-0.5, 0.5, (3, count)), random.uniform(-1.0, 2.0, count)


def power(x: Floats, n: Index) -> Floats:
    """x^n / n!; x : (3, ...)."""
    made: Floats = x[0] ** n[0] * x[1] ** n[1] * x[2] ** n[2] / factorial(n)
    return made


def full_moments(place: Floats, charge: Floats, centre: Floats, order: int) -> dict[Index, float]:
    """The moments of charges as they are defined, sum Q (-v)^n / n!."""
    v = place - centre[:, None]
    return {n: float((charge * power(-v, n)).sum()) for n in cartesian(order)}


def moments(
    place: Floats, charge: Floats, centre: Floats, order: int, softened: bool
) -> dict[Index, float]:
    """Those that are kept."""
    full = full_moments(place, charge, centre, order)
    return full if softened else dict(formulas.folded(PLAIN, full, order))


def inverse(x: Floats, softening: float) -> float:
    """G(x)."""
    return float((x @ x + softening**2) ** -0.5)


def derivatives(x: Floats, softening: float, order: int) -> dict[Index, float]:
    """All derivatives of G at x."""
    found = formulas.derivatives(
        PLAIN, [float(each) for each in x], inverse(x, softening), order, softening > 0.0
    )
    return dict(found)


def local(
    of_moments: dict[Index, float], x: Floats, softening: float, order: int
) -> dict[Index, float]:
    """The local expansion of a cell with such moments, x from source to sink."""
    softened = softening > 0.0
    start = dict.fromkeys(formulas.indices(order, softened), 0.0)
    made = formulas.local_terms(
        PLAIN, of_moments, derivatives(x, softening, order), order, softened, start
    )
    return dict(made)


def field(of_local: dict[Index, float], x: Floats, softened: bool, order: int) -> Floats:
    """Field and potential, (4,), of a local expansion at a place x from its centre."""
    found = formulas.local_field(PLAIN, of_local, [float(each) for each in x], order, softened)
    return np.array(found)
