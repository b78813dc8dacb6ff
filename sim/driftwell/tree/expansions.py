"""The steps of the tree sum on expansions, as straight machine code for one order at a time.

`formulas.py` is run on values of machine code in the making, eight lanes wide where there are
eight charges or eight cells to treat alike. A :class:`Basis` names order and kind; it is an
argument of the compiled functions whose *type* carries them, so that each order is compiled when
it is first used.

Rows of moments (order p - 1) and of local expansions (order p) are padded to full vectors.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from llvmlite import ir
from numba import types
from numba.core import cgutils
from numba.extending import intrinsic, models, register_model

from driftwell.kernels.lane_values import (
    INDEX,
    LANES,
    NUMBERS,
    WIDTH,
    added_crosswise,
    emitted_code,
    repeated,
    repeated_value,
    turned,
)
from driftwell.tree import formulas
from driftwell.tree.code import Code, at, load_at, read, read_wide, start_of, store_at
from driftwell.tree.multi_index import Index, cartesian


class BasisType(types.Type):
    """Type of a :class:`Basis`."""

    def __init__(self, order: int, softened: bool, mixed: bool) -> None:
        self.order, self.softened, self.mixed = order, softened, mixed
        super().__init__(name=f"Basis({order}, {softened}, {mixed})")

    @property
    def moments(self) -> list[Index]:
        """The indices of a cell's moments."""
        return formulas.indices(self.order - 1, self.softened)

    @property
    def locals(self) -> list[Index]:
        """The indices of a local expansion."""
        return formulas.indices(self.order, self.softened)


@register_model(BasisType)
class _BasisModel(models.OpaqueModel):
    pass


def padded(count: int) -> int:
    """Numbers in whole vectors."""
    return -(-count // WIDTH) * WIDTH


def _basis(typing: Any, order: Any, softened: Any, mixed: Any) -> Any:
    made = BasisType(
        order.literal_value,
        bool(softened.literal_value),
        bool(mixed.literal_value),
    )

    def emitted(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        return context.get_dummy_value()

    return made(order, softened, mixed), emitted


basis: Callable[..., BasisType] = intrinsic(prefer_literal=True)(_basis)
"""The basis of an order, from constants: (order, softened, mixed)."""


@emitted_code
def moment_row(typing: Any, of: Any) -> Any:
    """Length of a row of moments."""

    def emitted(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        return ir.Constant(ir.IntType(64), padded(len(of.moments)))

    return types.int64(of), emitted


@emitted_code
def local_row(typing: Any, of: Any) -> Any:
    """Length of a row of a local expansion."""

    def emitted(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        return ir.Constant(ir.IntType(64), padded(len(of.locals)))

    return types.int64(of), emitted


@emitted_code
def full_row(typing: Any, of: Any) -> Any:
    """Length of a row of moments before folding."""

    def emitted(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        return ir.Constant(ir.IntType(64), padded(len(cartesian(of.order - 1))))

    return types.int64(of), emitted


@emitted_code
def expansion_order(typing: Any, of: Any) -> Any:
    """The order p."""

    def emitted(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        return ir.Constant(ir.IntType(64), of.order)

    return types.int64(of), emitted


@emitted_code
def add_charges(typing: Any, of: Any, x: Any, y: Any, z: Any, charge: Any, work_lanes: Any) -> Any:
    """Add eight charges to unfolded moments, lane by lane; x, y, z : centre minus place."""

    def emitted(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        code = Code(builder, wide=True)
        start = start_of(context, builder, sig.args[5], args[5], ir.Constant(ir.IntType(64), 0))
        made = formulas.monomials(code, args[1:4], of.order - 1, args[4])
        for k, value in enumerate(made.values()):
            store_at(builder, code.add(load_at(builder, start, WIDTH * k), value), start, WIDTH * k)
        return context.get_dummy_value()

    return types.void(of, LANES, LANES, LANES, LANES, work_lanes), emitted


@emitted_code
def finish_moments(typing: Any, of: Any, work_lanes: Any, out_moments: Any, first: Any) -> Any:
    """Sum the lanes of unfolded moments and fold them; overwrites a row of `out_moments`."""

    def emitted(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        zero = ir.Constant(ir.IntType(64), 0)
        lanes_start = start_of(context, builder, sig.args[1], args[1], zero)
        out = start_of(context, builder, sig.args[2], args[2], args[3])
        names = cartesian(of.order - 1)
        full = {}
        for k in range(0, len(names), WIDTH):
            rows = [load_at(builder, lanes_start, WIDTH * (k + each)) for each in range(WIDTH)]
            summed = added_crosswise(builder, rows)
            for each, n in enumerate(names[k : k + WIDTH]):
                full[n] = builder.extract_element(summed, ir.Constant(INDEX, each))
        code = Code(builder, wide=False)
        made = full if of.softened else formulas.folded(code, full, of.order - 1)
        for k, n in enumerate(of.moments):
            builder.store(made[n], at(builder, out, k))
        return context.get_dummy_value()

    return types.void(of, work_lanes, out_moments, types.int64), emitted


@emitted_code
def add_moments(
    typing: Any, of: Any, x: Any, y: Any, z: Any, moments: Any, child: Any, parent: Any
) -> Any:
    """Add a child's row of moments to its parent's; x, y, z : parent's centre minus child's."""

    def emitted(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        code = Code(builder, wide=False)
        source = start_of(context, builder, sig.args[4], args[4], args[5])
        sink = start_of(context, builder, sig.args[4], args[4], args[6])
        own = read(builder, source, of.moments)
        made = formulas.shifted_moments(code, own, args[1:4], of.order - 1, of.softened)
        for k, n in enumerate(of.moments):
            place = at(builder, sink, k)
            builder.store(code.add(builder.load(place), made[n]), place)
        return context.get_dummy_value()

    number = types.float64
    return types.void(of, number, number, number, moments, types.int64, types.int64), emitted


@emitted_code
def side_by_side(
    typing: Any, rows: Any, length: Any, stride: Any, which: Any, first: Any, out_lanes: Any
) -> Any:
    """Rows of eight cells turned to lanes.

    ``out_lanes[8 k + c] = rows[stride * which[first + c] + k]`` for k below `length`, a multiple
    of 8; which : int64
    """

    def emitted(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        wide = ir.IntType(64)
        chosen = start_of(context, builder, sig.args[3], args[3], args[4])
        out = start_of(context, builder, sig.args[5], args[5], ir.Constant(wide, 0))
        starts = []
        for c in range(WIDTH):
            cell = builder.load(at(builder, chosen, c))
            starts.append(
                start_of(context, builder, sig.args[0], args[0], builder.mul(cell, args[2]))
            )
        with cgutils.for_range_slice(
            builder, ir.Constant(wide, 0), args[1], ir.Constant(wide, WIDTH), intp=wide
        ) as (k, _):
            columns = turned(
                builder, [load_at(builder, builder.gep(each, [k]), 0) for each in starts]
            )
            place = builder.gep(out, [builder.mul(k, ir.Constant(wide, WIDTH))])
            for each, column in enumerate(columns):
                store_at(builder, column, place, WIDTH * each)
        return context.get_dummy_value()

    return types.void(rows, types.int64, types.int64, which, types.int64, out_lanes), emitted


@emitted_code
def add_cells(
    typing: Any, of: Any, x: Any, y: Any, z: Any, inverse: Any, moments: Any, work_local: Any
) -> Any:
    """Add the local expansions of eight cells, lane by lane.

    x, y, z : sink's centre minus sources'; inverse : G; moments : lanes of :func:`side_by_side`
    """

    def emitted(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        code = Code(builder, wide=True)
        zero = ir.Constant(ir.IntType(64), 0)
        source = start_of(context, builder, sig.args[5], args[5], zero)
        sink = start_of(context, builder, sig.args[6], args[6], zero)
        derivative = formulas.derivatives(code, args[1:4], args[4], of.order, of.softened)
        made = formulas.local_terms(
            code,
            read_wide(builder, source, of.moments),
            derivative,
            of.order,
            of.softened,
            read_wide(builder, sink, of.locals),
        )
        for k, n in enumerate(of.locals):
            store_at(builder, made[n], sink, WIDTH * k)
        return context.get_dummy_value()

    return types.void(of, LANES, LANES, LANES, LANES, moments, work_local), emitted


@emitted_code
def add_far_charges(
    typing: Any, of: Any, x: Any, y: Any, z: Any, inverse: Any, charge: Any, work_local: Any
) -> Any:
    """Add the local expansions of eight charges, lane by lane; x, y, z : centre minus places."""

    def emitted(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        code = Code(builder, wide=True)
        sink = start_of(context, builder, sig.args[6], args[6], ir.Constant(ir.IntType(64), 0))
        derivative = formulas.derivatives(code, args[1:4], args[4], of.order, of.softened)
        for k, n in enumerate(of.locals):
            value = code.fused(args[5], derivative[n], load_at(builder, sink, WIDTH * k))
            store_at(builder, value, sink, WIDTH * k)
        return context.get_dummy_value()

    return types.void(of, LANES, LANES, LANES, LANES, LANES, work_local), emitted


@emitted_code
def field_of_cell(
    typing: Any, of: Any, x: Any, y: Any, z: Any, inverse: Any, moments: Any, first: Any
) -> Any:
    """Field and potential of one cell at eight places; x, y, z : places minus its centre."""

    def emitted(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        code = Code(builder, wide=True)
        source = start_of(context, builder, sig.args[5], args[5], args[6])
        derivative = formulas.derivatives(code, args[1:4], args[4], of.order, of.softened)
        own = {
            n: repeated_value(builder, value, NUMBERS)
            for n, value in read(builder, source, of.moments).items()
        }
        wanted = [(1, 0, 0), (0, 1, 0), (0, 0, 1), (0, 0, 0)]
        nothing = dict.fromkeys(wanted, code.constant(0.0))
        made = formulas.local_terms(code, own, derivative, of.order, of.softened, nothing)
        found = [code.subtract(code.constant(0.0), made[n]) for n in wanted[:3]]
        found.append(made[0, 0, 0])
        return context.make_tuple(builder, sig.return_type, found)

    return types.UniTuple(LANES, 4)(of, LANES, LANES, LANES, LANES, moments, types.int64), emitted


@emitted_code
def add_lanes(typing: Any, of: Any, work_local: Any, locals_: Any, first: Any) -> Any:
    """Add the sums of the lanes to a row of local expansions, and clear the lanes."""

    def emitted(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        source = start_of(context, builder, sig.args[1], args[1], ir.Constant(ir.IntType(64), 0))
        sink = start_of(context, builder, sig.args[2], args[2], args[3])
        for k in range(0, padded(len(of.locals)), WIDTH):
            rows = [load_at(builder, source, WIDTH * (k + each)) for each in range(WIDTH)]
            summed = builder.fadd(load_at(builder, sink, k), added_crosswise(builder, rows))
            store_at(builder, summed, sink, k)
            for each in range(WIDTH):
                store_at(builder, repeated(0.0), source, WIDTH * (k + each))
        return context.get_dummy_value()

    return types.void(of, work_local, locals_, types.int64), emitted


@emitted_code
def pass_down(
    typing: Any, of: Any, x: Any, y: Any, z: Any, locals_: Any, parent: Any, child: Any
) -> Any:
    """Overwrite a child's row with its parent's; x, y, z : child's centre minus parent's."""

    def emitted(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        code = Code(builder, wide=False)
        source = start_of(context, builder, sig.args[4], args[4], args[5])
        sink = start_of(context, builder, sig.args[4], args[4], args[6])
        own = read(builder, source, of.locals)
        made = formulas.shifted_locals(code, own, args[1:4], of.order, of.softened)
        for k, n in enumerate(of.locals):
            builder.store(made[n], at(builder, sink, k))
        for k in range(len(of.locals), padded(len(of.locals))):
            builder.store(ir.Constant(ir.DoubleType(), 0.0), at(builder, sink, k))
        return context.get_dummy_value()

    number = types.float64
    return types.void(of, number, number, number, locals_, types.int64, types.int64), emitted


@emitted_code
def field_of(typing: Any, of: Any, x: Any, y: Any, z: Any, locals_: Any, first: Any) -> Any:
    """Field and potential of a local expansion at eight places; x, y, z : place minus centre."""

    def emitted(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        narrow, code = Code(builder, wide=False), Code(builder, wide=True)
        source = start_of(context, builder, sig.args[4], args[4], args[5])
        own = read(builder, source, of.locals)
        full = own if of.softened else formulas.unfolded(narrow, own, of.order)
        everywhere = {n: repeated_value(builder, value, NUMBERS) for n, value in full.items()}
        found = formulas.local_field(code, everywhere, args[1:4], of.order, True)
        return context.make_tuple(builder, sig.return_type, found)

    return types.UniTuple(LANES, 4)(of, LANES, LANES, LANES, locals_, types.int64), emitted


@emitted_code
def is_mixed(typing: Any, of: Any) -> Any:
    """Whether near pairs may take their rough cube."""

    def emitted(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        return ir.Constant(ir.IntType(1), int(of.mixed))

    return types.boolean(of), emitted
