"""Tuples of arrays handed to a compiled function as one small array of their addresses.

A function that is called by its address takes every number of every array's header as an argument
of its own: hundreds for the tuples of the time loop, which took longer than a step of a small trap.
Instead the caller hands one array with a row (address, lengths of the axes) for each array, and the
function puts the tuples together again, as far as it uses them.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import Any

import numba
import numpy as np
from llvmlite import ir
from numba import types
from numba.core import cgutils
from numba.np import arrayobj
from numpy.typing import NDArray

from driftwell.kernels.lane_values import emitted_code

ROW = 4
_AXES = ROW - 1


def tuple_at(example: tuple[Any, ...]) -> tuple[Callable[..., Any], Any]:
    """What compiled code calls as ``made(table, first)`` for a tuple whose arrays begin at a row.

    example : a tuple of contiguous arrays, which others of its type may take the place of

    Returns it, and numba's type of the tuple.
    """
    typeof: Any = numba.typeof
    whole: Any = typeof(example)
    each = list(whole)

    def made(typing: Any, table: Any, first: Any) -> Any:
        def emitted(context: Any, builder: Any, sig: Any, args: Any) -> Any:
            rows = context.make_array(sig.args[0])(context, builder, args[0]).data
            parts = [
                _array_at(context, builder, one, rows, args[1], k) for k, one in enumerate(each)
            ]
            return context.make_tuple(builder, whole, parts)

        return whole(table, types.int64), emitted

    return emitted_code(made), whole


def _array_at(context: Any, builder: Any, kind: Any, rows: Any, first: Any, k: int) -> Any:
    """The array whose address and lengths stand in row first + k."""
    number = ir.IntType(64)

    def entry(column: int) -> Any:
        row = builder.mul(builder.add(first, number(k)), number(ROW))
        return builder.load(builder.gep(rows, [builder.add(row, number(column))]))

    made = context.make_array(kind)(context, builder)
    size = context.get_abi_sizeof(context.get_data_type(kind.dtype))
    shape = [entry(1 + axis) for axis in range(kind.ndim)]
    strides: list[Any] = []
    stride = number(size)
    for length in reversed(shape):
        strides.insert(0, stride)
        stride = builder.mul(stride, length)
    fill: Any = arrayobj.populate_array
    packed: Any = cgutils.pack_array
    fill(
        made,
        data=builder.inttoptr(entry(0), made.data.type),
        shape=packed(builder, shape),
        strides=packed(builder, strides),
        itemsize=number(size),
        meminfo=None,
    )
    return made._getvalue()


def hand(tuples: Sequence[tuple[Any, ...]], kinds: Sequence[Any], out_table: Any) -> None:
    """Write the rows of all arrays of some tuples, one after another; overwrites `out_table`.

    kinds : numba's types of the tuples, as :func:`tuple_at` gave them; the arrays must outlive the
    table's use

    Raises TypeError where a tuple is not of its kind.
    """
    at = 0
    for one, kind in zip(tuples, kinds, strict=True):
        typeof: Any = numba.typeof
        found = typeof(one)
        if found != kind:
            raise TypeError(f"{found} handed where {kind} is declared")
        for array in one:
            out_table[at, 0] = array.ctypes.data
            out_table[at, 1 : 1 + array.ndim] = array.shape
            at += 1


def rows_of(kinds: Sequence[Any]) -> NDArray[np.int64]:
    """First row of each tuple, and the number of all rows."""
    return np.cumsum([0, *(len(kind) for kind in kinds)])
