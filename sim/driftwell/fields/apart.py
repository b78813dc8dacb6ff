"""Kinds whose kernels are compiled apart from the time loop, and reached by their address.

What a kernel calls is linked into each of its callers, so that a kind of long formulas would be
compiled with every first run, and for every level of callers. A kind compiled apart costs nothing
where no scenario uses it: a row of the table holds the addresses of its kernels (two of a magnetic
kind, one of an electric one) in the last places of its parameters.
"""

from __future__ import annotations

from typing import Any

import numpy as np
from numba import types

from driftwell.kernels.lane_values import emitted_code
from driftwell.kernels.pointers import CompiledFunction, call_address

APART = 64
"""Kinds from this number on are compiled apart."""
FIELD, INDUCED = 14, 15
"""Where the addresses stand among a row's parameters."""
MAGNETIC = "void(float64[::1], float64[::1], float64, float64[:,::1], int64, int64, float64[:,::1])"
ELECTRIC = (
    "float64(float64[::1], float64[::1], float64, float64[:,::1], float64[::1], int64, int64, "
    "float64[:,::1])"
)
"""Signatures of the kernels of both roles; see :mod:`driftwell.fields.table`."""

_made: dict[tuple[int, int], CompiledFunction] = {}


def note_addresses(
    kind: int, kernels: tuple[Any, ...], signature: str, out_parameter: np.ndarray
) -> None:
    """Compile a kind's kernels where that is not done, and put their addresses into a row.

    kernels : that of the field, and of a magnetic kind that of what it induces
    signature : :data:`MAGNETIC` or :data:`ELECTRIC`
    out_parameter : (16,) float64, its last places are overwritten
    """
    row = out_parameter.view(np.int64)
    for place, function in enumerate(kernels, FIELD):
        if (kind, place) not in _made:
            _made[kind, place] = CompiledFunction(function, signature)
        row[place] = _made[kind, place].__wrapper_address__()


_ROW = types.Array(types.float64, 1, "C")
_ROWS = types.Array(types.float64, 2, "C")


def _emitted(signature: Any, at: int) -> Any:
    """What emits a call of the kernel whose address stands at a place of the first argument."""

    def emitted(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        start = context.make_array(_ROW)(context, builder, args[0]).data
        place = builder.gep(start, [context.get_constant(types.int64, at)])
        kind = context.get_value_type(types.int64).as_pointer()
        address = builder.load(builder.bitcast(place, kind))
        return call_address(context, builder, sig, address, args)

    return signature, emitted


def _magnetic(at: int) -> Any:
    """The code that calls a kernel of a magnetic kind."""

    def call(
        typing: Any, p: Any, data: Any, w: Any, position: Any, first: Any, last: Any, out: Any
    ) -> Any:
        number, whole = types.float64, types.int64
        return _emitted(types.void(_ROW, _ROW, number, _ROWS, whole, whole, _ROWS), at)

    return emitted_code(call)


@emitted_code
def call_electric(
    typing: Any,
    p: Any,
    data: Any,
    w: Any,
    position: Any,
    charge: Any,
    first: Any,
    last: Any,
    out: Any,
) -> Any:
    """Add the field of a row of an electric kind compiled apart; called as its kernel is."""
    number, whole = types.float64, types.int64
    return _emitted(number(_ROW, _ROW, number, _ROWS, _ROW, whole, whole, _ROWS), FIELD)


call_field = _magnetic(FIELD)
"""Add the field of a row of a magnetic kind compiled apart; called as its kernel is."""
call_induced = _magnetic(INDUCED)
"""Add what it induces."""
