"""Eight numbers at a time: vectors of 8 float64 as values in compiled code.

Where a loop must be fast whatever the compiler makes of it, it is written in lanes: `load` takes
8 neighbours of an array, `lanes` repeats one number, ``+ - *`` and :func:`fused` work lane by lane.
The code becomes the instructions written, in the order written: nothing is reordered, so bits do
not depend on what is compiled with what, and no flag of the decorators is needed.

A processor with narrower vectors does each operation in two or four parts.

References
----------
Reciprocal root: seed by halving the exponent (C. Lomont 2003; constant from memory) or by the
processor's own estimate; series of (1 - e)^(-1/2) and (1 - e)^(-3/2), M. Abramowitz and I. A.
Stegun, Handbook of Mathematical Functions (1964), 3.6.8.
"""

from __future__ import annotations

from typing import Any

import numpy as np
from llvmlite import ir
from numba import types
from numba.core import cgutils

from driftwell.kernels.compiled import inner_kernel
from driftwell.kernels.lane_values import (
    BITS,
    INDEX,
    LANES,
    NUMBERS,
    WIDTH,
    LanesType,
    added_crosswise,
    call_llvm,
    call_llvm_estimate,
    emitted_code,
    first_lanes,
    halved,
    has_wide_vectors,
    lane_number,
    pointer_to,
    repeated,
    repeated_value,
)

__all__ = [
    "LANES",
    "ROUGH_SCALE",
    "WIDTH",
    "LanesType",
    "below_zero",
    "call_llvm",
    "fused",
    "has_wide_vectors",
    "inverse_cube",
    "inverse_root",
    "lanes",
    "larger",
    "least",
    "load",
    "load_one",
    "load_some",
    "lowest_bit",
    "most",
    "picked_above",
    "positive",
    "put_some",
    "repeated",
    "repeated_lane",
    "root",
    "rough_inverse_cube",
    "scaled_rough_inverse_cube",
    "smaller",
    "some",
    "store",
    "store_some",
    "total",
    "totals",
    "where_above",
    "without",
]

ROUGH_SCALE = -1.5
"""What :func:`scaled_rough_inverse_cube` must be multiplied with."""

_FOURTH = 3.3e-8
"""Makes up for the fourth power of e, (315/128) e^4, where e is largest, 1.15e-4."""


@emitted_code
def lanes(typing: Any, number: Any) -> Any:
    """One number in all lanes."""

    def emitted(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        return repeated_value(builder, args[0], NUMBERS)

    return LANES(types.float64), emitted


@emitted_code
def repeated_lane(typing: Any, a: Any, lane: Any) -> Any:
    """The number in one lane of `a`, 0 to 7, in all lanes."""

    def emitted(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        return repeated_value(builder, builder.extract_element(args[0], args[1]), NUMBERS)

    return LANES(LANES, types.int64), emitted


@emitted_code
def load_one(typing: Any, array: Any, index: Any) -> Any:
    """``array[index]`` in all lanes; bounds are not checked, nor is -1 the last."""

    def emitted(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        values = context.make_array(sig.args[0])(context, builder, args[0])
        number = builder.load(builder.gep(values.data, [args[1]]))
        return repeated_value(builder, number, NUMBERS)

    return LANES(array, types.int64), emitted


@emitted_code
def load(typing: Any, array: Any, first: Any) -> Any:
    """``array[first : first + 8]`` of a contiguous float64 array; bounds are not checked."""

    def emitted(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        return builder.load(pointer_to(context, builder, sig, args), align=8)

    return LANES(array, types.int64), emitted


@emitted_code
def store(typing: Any, array: Any, first: Any, value: Any) -> Any:
    """Overwrite ``array[first : first + 8]``; bounds are not checked."""

    def emitted(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        builder.store(args[2], pointer_to(context, builder, sig, args), align=8)
        return context.get_dummy_value()

    return types.void(array, types.int64, LANES), emitted


@emitted_code
def load_some(typing: Any, array: Any, first: Any, count: Any) -> Any:
    """The first `count` of :func:`load`, the other lanes 0; nothing beyond them is touched."""

    def emitted(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        pointer = pointer_to(context, builder, sig, args)
        some = first_lanes(builder, args[2])
        kind = ir.FunctionType(NUMBERS, [pointer.type, INDEX, some.type, NUMBERS])
        name = "llvm.masked.load.v8f64.p0"
        function = cgutils.get_or_insert_function(builder.module, kind, name)
        return builder.call(function, [pointer, ir.Constant(INDEX, 8), some, repeated(0.0)])

    return LANES(array, types.int64, types.int64), emitted


@emitted_code
def store_some(typing: Any, array: Any, first: Any, count: Any, value: Any) -> Any:
    """:func:`store` of the first `count` lanes; nothing beyond them is touched."""

    def emitted(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        pointer = pointer_to(context, builder, sig, args)
        some = first_lanes(builder, args[2])
        kind = ir.FunctionType(ir.VoidType(), [NUMBERS, pointer.type, INDEX, some.type])
        name = "llvm.masked.store.v8f64.p0"
        function = cgutils.get_or_insert_function(builder.module, kind, name)
        builder.call(function, [args[3], pointer, ir.Constant(INDEX, 8), some])
        return context.get_dummy_value()

    return types.void(array, types.int64, types.int64, LANES), emitted


@emitted_code
def fused(typing: Any, a: Any, b: Any, c: Any) -> Any:
    """``a * b + c``, rounded once where the processor can."""

    def emitted(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        return call_llvm(builder, "llvm.fmuladd.v8f64", *args)

    return LANES(LANES, LANES, LANES), emitted


@emitted_code
def root(typing: Any, a: Any) -> Any:
    """The square root of each lane, to the last bit."""

    def emitted(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        return call_llvm(builder, "llvm.sqrt.v8f64", args[0])

    return LANES(LANES), emitted


@emitted_code
def positive(typing: Any, a: Any) -> Any:
    """`a` where it is above 0, else 1."""

    def emitted(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        above = builder.fcmp_unordered(">", args[0], repeated(0.0))  # NaN stays NaN
        return builder.select(above, args[0], repeated(1.0))

    return LANES(LANES), emitted


@emitted_code
def where_above(typing: Any, a: Any, least: Any, value: Any) -> Any:
    """`value` where `a` is above `least` or is no number, else 0."""

    def emitted(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        a, least, value = args
        above = builder.fcmp_unordered(">", a, least)  # NaN must not be hidden
        return builder.select(above, value, repeated(0.0))

    return LANES(LANES, LANES, LANES), emitted


@emitted_code
def picked_above(typing: Any, a: Any, least: Any, value: Any, other: Any) -> Any:
    """`value` where `a` is above `least` or is no number, else `other`."""

    def emitted(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        a, least, value, other = args
        above = builder.fcmp_unordered(">", a, least)  # NaN must not be hidden
        return builder.select(above, value, other)

    return LANES(LANES, LANES, LANES, LANES), emitted


@emitted_code
def without(typing: Any, a: Any, lane: Any) -> Any:
    """`a` with 0 in the lane of a number, 0 to 7."""

    def emitted(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        here = builder.icmp_signed("==", lane_number(), repeated_value(builder, args[1], BITS))
        return builder.select(here, repeated(0.0), args[0])

    return LANES(LANES, types.int64), emitted


@emitted_code
def totals(typing: Any, array: Any, first: Any) -> Any:
    """The :func:`total` of each of 8 vectors that follow each other in an array, in their order.

    In 21 instructions, where 8 totals take about 50.
    """

    def emitted(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        start = pointer_to(context, builder, sig, args)
        parts = [
            builder.load(builder.gep(start, [ir.Constant(INDEX, row)]), align=8)
            for row in range(WIDTH)
        ]
        return added_crosswise(builder, parts)

    return LANES(array, types.int64), emitted


def _picked(builder: Any, sign: str, a: Any, b: Any) -> Any:
    """`a` where it stands to `b` as the sign says, else `b`."""
    return builder.select(builder.fcmp_ordered(sign, a, b), a, b)


@emitted_code
def smaller(typing: Any, a: Any, b: Any) -> Any:
    """The smaller of two, lane by lane."""

    def emitted(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        return _picked(builder, "<", *args)

    return LANES(LANES, LANES), emitted


@emitted_code
def larger(typing: Any, a: Any, b: Any) -> Any:
    """The larger of two, lane by lane."""

    def emitted(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        return _picked(builder, ">", *args)

    return LANES(LANES, LANES), emitted


@emitted_code
def total(typing: Any, a: Any) -> Any:
    """The sum of the lanes, by halves."""

    def emitted(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        return halved(builder, args[0], builder.fadd)

    return types.float64(LANES), emitted


@emitted_code
def least(typing: Any, a: Any) -> Any:
    """The smallest lane."""

    def emitted(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        return halved(builder, args[0], lambda low, high: _picked(builder, "<", low, high))

    return types.float64(LANES), emitted


@emitted_code
def below_zero(typing: Any, a: Any) -> Any:
    """Which lanes are below 0, as bits of a whole number, that of lane 0 the lowest."""

    def emitted(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        below = builder.fcmp_ordered("<", args[0], repeated(0.0))
        return builder.zext(builder.bitcast(below, ir.IntType(WIDTH)), ir.IntType(64))

    return types.int64(LANES), emitted


@emitted_code
def lowest_bit(typing: Any, bits: Any) -> Any:
    """The place of the lowest bit that is set; 64 where none is."""

    def emitted(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        return builder.cttz(args[0], ir.Constant(ir.IntType(1), 0))

    return types.int64(types.int64), emitted


@emitted_code
def most(typing: Any, a: Any) -> Any:
    """The largest lane."""

    def emitted(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        return halved(builder, args[0], lambda low, high: _picked(builder, ">", low, high))

    return types.float64(LANES), emitted


@emitted_code
def _seed(typing: Any, a: Any) -> Any:
    """An estimate of a^(-1/2), to 6e-5 (AVX-512) or refined to 6e-6 from a guess of the bits."""

    def emitted(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        (a,) = args
        if has_wide_vectors(context):
            return call_llvm_estimate(builder, a)
        half = builder.lshr(builder.bitcast(a, BITS), ir.Constant(BITS, [1] * WIDTH))
        guess = builder.sub(ir.Constant(BITS, [0x5FE6EB50C7B537A9] * WIDTH), half)
        y = builder.bitcast(guess, NUMBERS)  # to 3.5e-2
        minus = builder.fneg(a)
        e = call_llvm(builder, "llvm.fmuladd.v8f64", minus, builder.fmul(y, y), repeated(1.0))
        t = call_llvm(builder, "llvm.fmuladd.v8f64", e, repeated(0.3125), repeated(0.375))
        t = call_llvm(builder, "llvm.fmuladd.v8f64", e, t, repeated(0.5))
        return call_llvm(builder, "llvm.fmuladd.v8f64", y, builder.fmul(e, t), y)

    return LANES(LANES), emitted


@inner_kernel
def inverse_cube(a: LanesType) -> LanesType:
    """a^(-3/2), to 3e-16, on the average 6e-17; `a` a positive normal number or NaN.

    Of 0, of infinity and of what is smaller than normal numbers comes nothing finite.
    """
    y = _seed(a)
    square = y * y
    e = fused(a, square, lanes(-1.0))
    series = fused(e, lanes(-2.1875), lanes(1.875 + _FOURTH))
    series = fused(e, series, lanes(-1.5))
    cube = y * square
    return fused(cube, e * series, cube)


@inner_kernel
def rough_inverse_cube(a: LanesType) -> LanesType:
    """:func:`inverse_cube`, to 3e-8."""
    y = _seed(a)
    square = y * y
    e = fused(a, square, lanes(-1.0))
    cube = y * square
    return fused(cube, e * lanes(-1.5), cube)


@inner_kernel
def scaled_rough_inverse_cube(a: LanesType) -> LanesType:
    """:func:`rough_inverse_cube` over :data:`ROUGH_SCALE`: one instruction less."""
    y = _seed(a)
    square = y * y
    return (y * square) * fused(a, square, lanes(-5.0 / 3.0))


@inner_kernel
def inverse_root(a: LanesType) -> LanesType:
    """a^(-1/2), to 2e-16; `a` a positive normal number or NaN."""
    y = _seed(a)
    e = fused(a, y * y, lanes(-1.0))
    series = fused(e, lanes(-0.3125), lanes(0.375))
    series = fused(e, series, lanes(-0.5))
    return fused(y, e * series, y)


@inner_kernel
def some(array: np.ndarray, first: int, count: int) -> LanesType:
    """:func:`load` of all 8 where `count` is 8, else :func:`load_some`."""
    if count == WIDTH:
        return load(array, first)
    return load_some(array, first, count)


@inner_kernel
def put_some(array: np.ndarray, first: int, count: int, value: LanesType) -> None:
    """:func:`store` of all 8 where `count` is 8, else :func:`store_some`."""
    if count == WIDTH:
        store(array, first, value)
    else:
        store_some(array, first, count, value)
