"""The steps on expansions as machine code, against the same formulas on plain numbers.

Of two kinds: harmonic and mixed, and softened.
"""

from __future__ import annotations

from functools import cache
from types import SimpleNamespace
from typing import Any

import numpy as np
import pytest

from driftwell.kernels import kernel
from driftwell.kernels.lanes import load, store
from driftwell.tree import formulas
from driftwell.tree.expansions import (
    BasisType,
    add_cells,
    add_charges,
    add_far_charges,
    add_lanes,
    add_moments,
    basis,
    expansion_order,
    field_of,
    field_of_cell,
    finish_moments,
    full_row,
    is_mixed,
    local_row,
    moment_row,
    padded,
    pass_down,
    side_by_side,
)
from driftwell.tree.multi_index import Index, cartesian
from tests.tree.plain import (
    PLAIN,
    Floats,
    charges_about,
    derivatives,
    field,
    inverse,
    local,
    moments,
)

ORDER = 4
SOFTENING = 0.7
ROUNDING = 1e-13
KINDS = pytest.mark.parametrize("softened", [False, True], ids=["harmonic", "softened"])


@cache
def steps(softened: bool) -> SimpleNamespace:
    """Each step as a function of its own: harmonic and mixed, or softened."""
    mixed = not softened

    @kernel
    def lengths(out: Any) -> None:
        of = basis(ORDER, softened, mixed)
        out[0], out[1], out[2] = moment_row(of), local_row(of), full_row(of)
        out[3], out[4] = expansion_order(of), is_mixed(of)

    @kernel
    def moment(x: Any, charge: Any, work: Any, out: Any, first: int) -> None:
        of = basis(ORDER, softened, mixed)
        for i in range(0, charge.size, 8):
            place = load(x[0], i), load(x[1], i), load(x[2], i)
            add_charges(of, place[0], place[1], place[2], load(charge, i), work)
        finish_moments(of, work, out, first)

    @kernel
    def up(x: float, y: float, z: float, rows: Any, child: int, parent: int) -> None:
        add_moments(basis(ORDER, softened, mixed), x, y, z, rows, child, parent)

    @kernel
    def cells(x: Any, of_moments: Any, work: Any, out: Any, first: int) -> None:
        of = basis(ORDER, softened, mixed)
        place = load(x[0], 0), load(x[1], 0), load(x[2], 0)
        add_cells(of, place[0], place[1], place[2], load(x[3], 0), of_moments, work)
        add_lanes(of, work, out, first)

    @kernel
    def far(x: Any, charge: Any, work: Any, out: Any, first: int) -> None:
        of = basis(ORDER, softened, mixed)
        place = load(x[0], 0), load(x[1], 0), load(x[2], 0)
        add_far_charges(of, place[0], place[1], place[2], load(x[3], 0), load(charge, 0), work)
        add_lanes(of, work, out, first)

    @kernel
    def of_cell(x: Any, rows: Any, first: int, out: Any) -> None:
        of = basis(ORDER, softened, mixed)
        place = load(x[0], 0), load(x[1], 0), load(x[2], 0)
        found = field_of_cell(of, place[0], place[1], place[2], load(x[3], 0), rows, first)
        store(out[0], 0, found[0])
        store(out[1], 0, found[1])
        store(out[2], 0, found[2])
        store(out[3], 0, found[3])

    @kernel
    def down(x: float, y: float, z: float, rows: Any, parent: int, child: int) -> None:
        pass_down(basis(ORDER, softened, mixed), x, y, z, rows, parent, child)

    @kernel
    def at(x: Any, rows: Any, first: int, out: Any) -> None:
        of = basis(ORDER, softened, mixed)
        found = field_of(of, load(x[0], 0), load(x[1], 0), load(x[2], 0), rows, first)
        store(out[0], 0, found[0])
        store(out[1], 0, found[1])
        store(out[2], 0, found[2])
        store(out[3], 0, found[3])

    kind = BasisType(ORDER, softened, mixed)
    return SimpleNamespace(**locals())


@kernel
def _side_by_side(rows: Any, length: int, stride: int, which: Any, first: int, out: Any) -> None:
    side_by_side(rows, length, stride, which, first, out)


def row_of(values: dict[Index, float], names: list[Index]) -> Floats:
    """A row as it stands in an array."""
    row = np.zeros(padded(len(names)))
    row[: len(names)] = [values[n] for n in names]
    return row


def sources(softened: bool) -> tuple[list[dict[Index, float]], Floats]:
    """Moments of eight cells, and the sink's centre minus theirs with G in the fourth row."""
    random = np.random.default_rng(1)
    made = [moments(*charges_about(seed), np.zeros(3), ORDER - 1, softened) for seed in range(8)]
    x = np.empty((4, 8))
    x[:3] = random.normal(size=(3, 8)) * 2.0 + np.array([[3.0], [-2.0], [4.0]])
    softening = SOFTENING if softened else 0.0
    x[3] = [inverse(each, softening) for each in x[:3].T]
    return made, x


def near(expected: Floats, found: Floats) -> None:
    """To rounding, of the largest."""
    assert np.abs(expected - found).max() <= ROUNDING * np.abs(expected).max()


@KINDS
def test_lengths_of_rows(softened: bool) -> None:
    """In whole vectors, and what the basis is made for."""
    out = np.empty(5)
    steps(softened).lengths(out)
    kind = steps(softened).kind
    assert [len(kind.moments), len(kind.locals)] == ([20, 35] if softened else [16, 25])
    assert ([24, 40] if softened else [16, 32]) == out[:2].tolist()
    assert [24, ORDER, not softened] == out[2:].tolist()


@KINDS
def test_moments_of_charges(softened: bool) -> None:
    """Of three vectors of charges; nothing else in the array is touched."""
    made = steps(softened)
    place, charge = charges_about(2, count=24)
    centre = np.array([0.1, -0.3, 0.2])
    work, out = np.zeros(8 * 24), np.full(100, 7.0)
    x = np.ascontiguousarray(centre[:, None] - place)
    made.moment(x, charge, work, out, 9)
    names = made.kind.moments
    expected = moments(place, charge, centre, ORDER - 1, softened)
    near(np.array([expected[n] for n in names]), out[9 : 9 + len(names)])
    assert (7.0 == np.delete(out, range(9, 9 + len(names)))).all()


@KINDS
def test_moments_of_a_child_are_added_to_its_parents(softened: bool) -> None:
    """Those of the same charges about its centre."""
    made = steps(softened)
    place, charge = charges_about(3)
    old, new = np.array([0.1, -0.2, 0.05]), np.array([-0.6, 0.3, 0.8])
    names = made.kind.moments
    rows = np.full(120, 7.0)
    own = row_of(moments(place, charge, old, ORDER - 1, softened), names)
    rows[5 : 5 + own.size] = own
    made.up(*(new - old), rows, 5, 60)
    expected = moments(place, charge, new, ORDER - 1, softened)
    found = rows[60 : 60 + len(names)] - 7.0
    assert np.abs(np.array([expected[n] for n in names]) - found).max() <= 1e-14 * 30.0
    assert (own == rows[5 : 5 + own.size]).all()


def test_rows_of_eight_cells_are_turned_to_lanes() -> None:
    """Any eight, some of them twice."""
    rows = np.random.default_rng(4).normal(size=480)
    which = np.array([99, 3, 0, 19, 3, 7, 8, 11, 2, -5])
    out = np.full(140, 7.0)
    _side_by_side(rows, 16, 24, which, 1, out)
    for c in range(8):
        start = 24 * which[1 + c]
        assert (rows[start : start + 16] == out[c:128:8]).all()
    assert (7.0 == out[128:]).all()


@KINDS
def test_far_cells_are_added_in_lanes(softened: bool) -> None:
    """The sum of eight local expansions, onto what is there; the lanes are left empty."""
    made = steps(softened)
    of_moments, x = sources(softened)
    softening = SOFTENING if softened else 0.0
    rows = np.array([row_of(each, made.kind.moments) for each in of_moments])
    names = made.kind.locals
    work, out = np.zeros(8 * padded(len(names))), np.full(60, 0.5)
    made.cells(x, np.ascontiguousarray(rows.T).reshape(-1), work, out, 3)
    each = [local(m, at, softening, ORDER) for m, at in zip(of_moments, x[:3].T, strict=True)]
    expected = np.array([sum(one[n] for one in each) for n in names])
    near(expected, out[3 : 3 + len(names)] - 0.5)
    assert (0.0 == work).all()


@KINDS
def test_far_charges_are_added_in_lanes(softened: bool) -> None:
    """As cells whose only moment is their charge."""
    made = steps(softened)
    _, x = sources(softened)
    softening = SOFTENING if softened else 0.0
    charge = np.random.default_rng(5).normal(size=8)
    names = made.kind.locals
    work, out = np.zeros(8 * padded(len(names))), np.zeros(padded(len(names)))
    made.far(x, charge, work, out, 0)
    each = [derivatives(at, softening, ORDER) for at in x[:3].T]
    expected = np.array(
        [sum(q * one[n] for q, one in zip(charge, each, strict=True)) for n in names]
    )
    near(expected, out[: len(names)])


@KINDS
def test_field_of_a_cell_at_eight_places(softened: bool) -> None:
    """Field and potential."""
    made = steps(softened)
    of_moments, x = sources(softened)
    softening = SOFTENING if softened else 0.0
    own = of_moments[0]
    rows, out = np.full(60, 7.0), np.empty((4, 8))
    kept = row_of(own, made.kind.moments)
    rows[4 : 4 + kept.size] = kept
    made.of_cell(x, rows, 4, out)
    for k, at in enumerate(x[:3].T):
        heard = local(own, at, softening, ORDER)
        expected = -np.array([heard[1, 0, 0], heard[0, 1, 0], heard[0, 0, 1]])
        near(expected, out[:3, k])
        assert heard[0, 0, 0] == pytest.approx(out[3, k], rel=1e-13, abs=0.0)


@KINDS
def test_a_child_inherits_its_parents_expansion(softened: bool) -> None:
    """About its own centre; what fills the last vector is 0."""
    made = steps(softened)
    names = made.kind.locals
    random = np.random.default_rng(6)
    own = {n: float(random.normal()) for n in names}
    to = np.array([0.3, -0.2, 0.4])
    length = padded(len(names))
    rows = np.full(2 * length + 3, 7.0)
    rows[3 : 3 + length] = row_of(own, names)
    made.down(*to, rows, 3, 3 + length)
    expected = formulas.shifted_locals(PLAIN, own, list(to), ORDER, softened)
    near(row_of(dict(expected), names), rows[3 + length :])


@KINDS
def test_field_of_a_local_expansion_at_eight_places(softened: bool) -> None:
    """Field and potential."""
    made = steps(softened)
    random = np.random.default_rng(7)
    own = {n: float(random.normal()) for n in made.kind.locals}
    rows = np.full(70, 7.0)
    kept = row_of(own, made.kind.locals)
    rows[2 : 2 + kept.size] = kept
    x, out = random.uniform(-0.5, 0.5, (3, 8)), np.empty((4, 8))
    made.at(x, rows, 2, out)
    for k, at in enumerate(x.T):
        expected = field(own, at, softened, ORDER)
        near(expected[:3], out[:3, k])
        assert expected[3] == pytest.approx(out[3, k], rel=1e-12, abs=0.0)


def test_unsoftened_rows_hold_what_has_at_most_one_turn_in_z() -> None:
    """Squares of the order; softened ones hold all."""
    for order in range(3, 15):
        harmonic = BasisType(order, False, False)
        assert order**2 == len(harmonic.moments)
        assert (order + 1) ** 2 == len(harmonic.locals)
        softened = BasisType(order, True, False)
        assert cartesian(order - 1) == softened.moments
        assert cartesian(order) == softened.locals
