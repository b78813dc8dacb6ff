"""The formulas of the expansions, written out term by term.

Each function takes numbers and gives numbers; what a number is, it need not know: floats in a
test, or values of machine code in the making (expansions.py), eight lanes or one. G is 1/r, or
(r^2 + e^2)^(-1/2) where softened; D_a are its derivatives, x the vector from source to sink centre.

    potential at a + u of charges at b + v, x = a - b:
    phi = sum_{|m| + |n| <= p} u^m / m! M_n D_{m+n}(x),   M_n = sum_charges Q (-v)^n / n!     (1)

The truncation treats both cells alike, so the total force of B on A is minus that of A on B, term
by term: W. Dehnen, J. Comput. Phys. 179 (2002) 27, sec. 2; Comput. Astrophys. Cosmol. 1 (2014) 1,
app. A. Derivatives by the recursion of L. E. McMurchie and E. R. Davidson, J. Comput. Phys. 26
(1978) 218, eq. 4.6 (from memory).
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any, Protocol

from driftwell.tree.multi_index import (
    Index,
    cartesian,
    harmonic,
    minus,
    plus,
    traded,
    unit,
    valid,
)

Number = Any
"""A float, or a value of machine code."""
Numbers = Mapping[Index, Number]


class Arithmetic(Protocol):
    """What the formulas need beyond ``+ - *``: constants, and a product and a sum in one."""

    def constant(self, value: float) -> Number: ...

    def fused(self, a: Number, b: Number, c: Number) -> Number: ...

    def times(self, a: Number, b: Number) -> Number: ...

    def add(self, a: Number, b: Number) -> Number: ...

    def subtract(self, a: Number, b: Number) -> Number: ...


def indices(order: int, softened: bool) -> list[Index]:
    """The indices an expansion of an order keeps."""
    return cartesian(order) if softened else harmonic(order)


def monomials(code: Arithmetic, x: Sequence[Number], order: int, first: Number) -> Numbers:
    """first x^n / n! for all n up to an order."""
    made: dict[Index, Number] = {}
    for n in cartesian(order):
        if sum(n) == 0:
            made[n] = first
            continue
        axis = max(range(3), key=lambda each: n[each])
        lower = made[minus(n, unit(axis))]
        step = code.times(lower, x[axis])
        made[n] = step if n[axis] == 1 else code.times(step, code.constant(1.0 / n[axis]))
    return made


def folded(code: Arithmetic, full: Numbers, order: int) -> Numbers:
    """The harmonic moments that act as the full ones."""
    made = dict(full)
    for n in sorted(cartesian(order), key=lambda each: -each[2]):
        if n[2] >= 2:
            for other in traded(n):
                made[other] = code.subtract(made[other], made[n])
    return {n: made[n] for n in harmonic(order)}


def unfolded(code: Arithmetic, kept: Numbers, order: int) -> dict[Index, Number]:
    """All derivatives of a harmonic function from those kept."""
    made = dict(kept)
    for n in sorted(cartesian(order), key=lambda each: each[2]):
        if n[2] >= 2 and n not in made:
            a, b = traded(n)
            made[n] = code.subtract(code.constant(0.0), code.add(made[a], made[b]))
    return made


def derivatives(
    code: Arithmetic, x: Sequence[Number], inverse: Number, order: int, softened: bool
) -> Numbers:
    """D_n of G up to an order; inverse : G(x).

    R^m_n is d^n of g_m, g_0 = G, g_{m+1} = g_m' / r: R^m_{n+e} = x_e R^{m+1}_n + n_e R^{m+1}_{n-e}.
    """
    square = code.times(inverse, inverse)
    known: dict[tuple[int, Index], Number] = {(0, (0, 0, 0)): inverse}
    for m in range(1, order + 1):
        factor = code.times(square, code.constant(-(2.0 * m - 1.0)))
        known[m, (0, 0, 0)] = code.times(known[m - 1, (0, 0, 0)], factor)

    def made(m: int, n: Index) -> Number:
        if (m, n) not in known:
            axis = 2 if n[2] > 0 else min((a for a in (0, 1) if n[a]), key=lambda a: n[a])
            lower = minus(n, unit(axis))
            if lower[axis] == 0:
                known[m, n] = code.times(x[axis], made(m + 1, lower))
            else:
                rest = made(m + 1, minus(lower, unit(axis)))
                if lower[axis] > 1:
                    rest = code.times(rest, code.constant(float(lower[axis])))
                known[m, n] = code.fused(x[axis], made(m + 1, lower), rest)
        return known[m, n]

    kept = {n: made(0, n) for n in indices(order, softened)}
    return kept if softened else unfolded(code, kept, order)


def local_terms(
    code: Arithmetic,
    moments: Numbers,
    derivative: Numbers,
    order: int,
    softened: bool,
    start: Numbers,
) -> Numbers:
    """The local expansion of eq. (1), added to `start`: L_m = sum_n M_n D_{m+n}."""
    made = {}
    for m in start:
        value = start[m]
        for n in moments:
            if sum(m) + sum(n) <= order:
                value = code.fused(moments[n], derivative[plus(m, n)], value)
        made[m] = value
    return made


def shifted_moments(
    code: Arithmetic, moments: Numbers, x: Sequence[Number], order: int, softened: bool
) -> Numbers:
    """Moments about a new centre; x : new centre minus old."""
    power = monomials(code, x, order, code.constant(1.0))
    full = {}
    for n in cartesian(order):
        value = moments.get(n)
        for k in moments:
            step = minus(n, k)
            if valid(step) and sum(step) > 0:
                term = moments[k], power[step]
                value = code.times(*term) if value is None else code.fused(*term, value)
        full[n] = value
    return full if softened else folded(code, full, order)


def shifted_locals(
    code: Arithmetic, local: Numbers, x: Sequence[Number], order: int, softened: bool
) -> Numbers:
    """A local expansion about a new centre; x : new centre minus old."""
    power = monomials(code, x, order, code.constant(1.0))
    full = local if softened else unfolded(code, local, order)
    made = {}
    for m in indices(order, softened):
        value = full[m]
        for n in full:
            step = minus(n, m)
            if valid(step) and sum(step) > 0:
                value = code.fused(full[n], power[step], value)
        made[m] = value
    return made


def local_field(
    code: Arithmetic, local: Numbers, x: Sequence[Number], order: int, softened: bool
) -> list[Number]:
    """Minus the gradient of a local expansion at a place x from its centre, and the potential."""
    full = local if softened else unfolded(code, local, order)
    power = monomials(code, x, order, code.constant(1.0))
    found = []
    for axis in range(3):
        value = code.constant(0.0)
        for n in cartesian(order - 1):
            value = code.fused(full[plus(n, unit(axis))], power[n], value)
        found.append(code.subtract(code.constant(0.0), value))
    value = code.constant(0.0)
    for n in cartesian(order):
        value = code.fused(full[n], power[n], value)
    return [*found, value]
