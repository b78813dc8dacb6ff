"""Kinds whose kernels are compiled apart from the time loop, and reached by their address.

What a kernel calls is linked into each of its callers, so that a kind of long formulas would be
compiled with every first run, and for every level of callers. A kind compiled apart costs nothing
where no scenario uses it: a row of the table holds the addresses of its two kernels, in the last
places of its parameters.
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
_SIGNATURE = (
    "void(float64[::1], float64[::1], float64, float64[:,::1], int64, int64, float64[:,::1])"
)

_made: dict[tuple[int, int], CompiledFunction] = {}


def note_addresses(kind: int, kernels: tuple[Any, Any], out_parameter: np.ndarray) -> None:
    """Compile a kind's kernels where that is not done, and put their addresses into a row.

    kernels : that of the field and that of what it induces
    out_parameter : (16,) float64, its last two places are overwritten
    """
    row = out_parameter.view(np.int64)
    for place, function in zip((FIELD, INDUCED), kernels, strict=True):
        if (kind, place) not in _made:
            _made[kind, place] = CompiledFunction(function, _SIGNATURE)
        row[place] = _made[kind, place].__wrapper_address__()


def _call(at: int) -> Any:
    """The code that calls the kernel whose address stands at a place of the parameters."""

    def call(
        typing: Any, p: Any, data: Any, w: Any, position: Any, first: Any, last: Any, out: Any
    ) -> Any:
        row = types.Array(types.float64, 1, "C")
        rows = types.Array(types.float64, 2, "C")
        whole, number = types.int64, types.float64
        signature = types.void(row, row, number, rows, whole, whole, rows)

        def emitted(context: Any, builder: Any, sig: Any, args: Any) -> Any:
            start = context.make_array(row)(context, builder, args[0]).data
            place = builder.gep(start, [context.get_constant(whole, at)])
            kind = context.get_value_type(whole).as_pointer()
            address = builder.load(builder.bitcast(place, kind))
            return call_address(context, builder, sig, address, args)

        return signature, emitted

    return emitted_code(call)


call_field = _call(FIELD)
"""Add the field of a row of a kind compiled apart; called as its kernel is."""
call_induced = _call(INDUCED)
"""Add what it induces."""
