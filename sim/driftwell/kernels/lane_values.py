"""The type of 8 float64 in one register, its operators, and what emits instructions on it.

What compiled code calls is in `lanes.py`; what is here is called while code is made.
"""

from __future__ import annotations

import operator
from collections.abc import Callable, Sequence
from typing import TYPE_CHECKING, Any

from llvmlite import ir
from numba import types
from numba.core import cgutils
from numba.core.typing.templates import ConcreteTemplate, infer_global, signature
from numba.extending import intrinsic, lower_builtin, models, register_model

WIDTH = 8
"""Numbers in one vector."""
NUMBERS = ir.VectorType(ir.DoubleType(), WIDTH)
BITS = ir.VectorType(ir.IntType(64), WIDTH)
INDEX = ir.IntType(32)


class LanesType(types.Type):
    """Numba's type of 8 float64 in one register."""

    def __init__(self) -> None:
        super().__init__(name="Lanes")

    if TYPE_CHECKING:  # in compiled code, see _lane_operator

        def __add__(self, other: LanesType) -> LanesType: ...
        def __sub__(self, other: LanesType) -> LanesType: ...
        def __mul__(self, other: LanesType) -> LanesType: ...
        def __truediv__(self, other: LanesType) -> LanesType: ...


LANES = LanesType()


@register_model(LanesType)
class _LanesModel(models.PrimitiveModel):
    def __init__(self, manager: Any, kind: Any) -> None:
        super().__init__(manager, kind, NUMBERS)


def _lane_operator(function: Callable[..., Any], instruction: str) -> None:
    """Give an operator of Python its meaning on lanes."""

    class _Typed(ConcreteTemplate):
        cases = (signature(LANES, LANES, LANES),)

    infer_global(function)(_Typed)

    @lower_builtin(function, LANES, LANES)  # type: ignore[untyped-decorator]
    def _lowered(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        return getattr(builder, instruction)(*args)


_lane_operator(operator.add, "fadd")
_lane_operator(operator.sub, "fsub")
_lane_operator(operator.mul, "fmul")
_lane_operator(operator.truediv, "fdiv")


def call_llvm(builder: Any, name: str, *args: Any) -> Any:
    """Emit a call of one of LLVM's own functions that returns what it is given."""
    kind = ir.FunctionType(args[0].type, [each.type for each in args])
    return builder.call(cgutils.get_or_insert_function(builder.module, kind, name), args)


def repeated(number: float) -> Any:
    """The constant with `number` in each lane."""
    return ir.Constant(NUMBERS, [float(number)] * WIDTH)


def repeated_value(builder: Any, number: Any, kind: Any) -> Any:
    """The vector with `number`, a value of the code, in each lane."""
    none = ir.Constant(kind, ir.Undefined)
    first = builder.insert_element(none, number, ir.Constant(INDEX, 0))
    every = ir.Constant(ir.VectorType(INDEX, WIDTH), [0] * WIDTH)
    return builder.shuffle_vector(first, none, every)


def lane_number() -> Any:
    """The constant 0, 1, ... 7."""
    return ir.Constant(BITS, list(range(WIDTH)))


def first_lanes(builder: Any, count: Any) -> Any:
    """Which lanes come before `count`."""
    return builder.icmp_signed("<", lane_number(), repeated_value(builder, count, BITS))


def pointer_to(context: Any, builder: Any, sig: Any, args: Any) -> Any:
    """Address of 8 neighbours: `args` begin with an array and an index."""
    array = context.make_array(sig.args[0])(context, builder, args[0])
    return builder.bitcast(builder.gep(array.data, [args[1]]), NUMBERS.as_pointer())


def halved(builder: Any, part: Any, joined: Callable[[Any, Any], Any]) -> Any:
    """One number from all lanes, by halves."""
    width = WIDTH
    while width > 1:
        width //= 2
        none = ir.Constant(part.type, ir.Undefined)
        kind = ir.VectorType(INDEX, width)
        low, high = (
            builder.shuffle_vector(part, none, ir.Constant(kind, list(range(start, start + width))))
            for start in (0, width)
        )
        part = joined(low, high)
    return builder.extract_element(part, ir.Constant(INDEX, 0))


_HALVES = ((0, 1, 2, 3, 8, 9, 10, 11), (4, 5, 6, 7, 12, 13, 14, 15))
_QUARTERS = ((0, 1, 8, 9, 4, 5, 12, 13), (2, 3, 10, 11, 6, 7, 14, 15))
_NEIGHBOURS = ((0, 8, 2, 10, 4, 12, 6, 14), (1, 9, 3, 11, 5, 13, 7, 15))


def _shuffled(builder: Any, a: Any, b: Any, places: Sequence[int]) -> Any:
    mask = ir.Constant(ir.VectorType(INDEX, WIDTH), list(places))
    return builder.shuffle_vector(a, b, mask)


def added_crosswise(builder: Any, rows: Sequence[Any]) -> Any:
    """One vector of the sums of eight vectors' lanes: halves are added, quarters, neighbours."""
    for low, high in (_HALVES, _QUARTERS, _NEIGHBOURS):
        half = len(rows) // 2
        rows = [
            builder.fadd(_shuffled(builder, a, b, low), _shuffled(builder, a, b, high))
            for a, b in zip(rows[:half], rows[half:], strict=True)
        ]
    return rows[0]


def turned(builder: Any, rows: Sequence[Any]) -> list[Any]:
    """Eight vectors turned about the diagonal."""
    columns = list(rows)
    for distance, (low, high) in ((1, _NEIGHBOURS), (2, _QUARTERS), (4, _HALVES)):
        further = list(columns)
        for k in range(WIDTH):
            if k & distance == 0:
                a, b = columns[k], columns[k + distance]
                further[k] = _shuffled(builder, a, b, low)
                further[k + distance] = _shuffled(builder, a, b, high)
        columns = further
    return columns


def emitted_code(function: Callable[..., Any]) -> Callable[..., Any]:
    """Numba's `intrinsic`: what is called with values of the code, not with their types."""
    made: Callable[..., Any] = intrinsic(function)
    return made


def has_wide_vectors(context: Any) -> bool:
    """Whether the code is made for a processor with AVX-512, which estimates reciprocal roots."""
    return "+avx512f" in context.codegen()._tm_features.split(",")


def call_llvm_estimate(builder: Any, a: Any) -> Any:
    """Emit the processor's own estimate of reciprocal roots (AVX-512)."""
    mask = ir.IntType(8)
    kind = ir.FunctionType(NUMBERS, [NUMBERS, NUMBERS, mask])
    name = "llvm.x86.avx512.rsqrt14.pd.512"
    function = cgutils.get_or_insert_function(builder.module, kind, name)
    return builder.call(function, [a, repeated(0.0), ir.Constant(mask, -1)])
