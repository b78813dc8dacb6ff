"""Machine code in the making: arithmetic for formulas.py, and rows of numbers read and written."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from llvmlite import ir

from driftwell.kernels.lane_values import INDEX, NUMBERS, WIDTH, call_llvm, repeated
from driftwell.tree.multi_index import Index

_ROW = NUMBERS.as_pointer()


class Code:
    """Arithmetic on values of machine code, one number or eight lanes."""

    def __init__(self, builder: Any, wide: bool) -> None:
        self._builder = builder
        self._wide = wide
        self._suffix = "v8f64" if wide else "f64"

    def constant(self, value: float) -> Any:
        return repeated(value) if self._wide else ir.Constant(ir.DoubleType(), value)

    def fused(self, a: Any, b: Any, c: Any) -> Any:
        return call_llvm(self._builder, f"llvm.fmuladd.{self._suffix}", a, b, c)

    def times(self, a: Any, b: Any) -> Any:
        return self._builder.fmul(a, b)

    def add(self, a: Any, b: Any) -> Any:
        return self._builder.fadd(a, b)

    def subtract(self, a: Any, b: Any) -> Any:
        return self._builder.fsub(a, b)


def start_of(context: Any, builder: Any, kind: Any, array: Any, offset: Any) -> Any:
    """Address of an element of a contiguous array."""
    return builder.gep(context.make_array(kind)(context, builder, array).data, [offset])


def at(builder: Any, start: Any, k: int) -> Any:
    """Address of the k-th number."""
    return builder.gep(start, [ir.Constant(INDEX, k)])


def read(builder: Any, start: Any, names: Sequence[Index]) -> dict[Index, Any]:
    """Consecutive numbers, by their indices."""
    return {n: builder.load(at(builder, start, k)) for k, n in enumerate(names)}


def read_wide(builder: Any, start: Any, names: Sequence[Index]) -> dict[Index, Any]:
    """Consecutive vectors, by their indices."""
    return {n: load_at(builder, start, WIDTH * k) for k, n in enumerate(names)}


def load_at(builder: Any, start: Any, k: int) -> Any:
    """Eight numbers from the k-th on."""
    return builder.load(builder.bitcast(at(builder, start, k), _ROW), align=8)


def store_at(builder: Any, value: Any, start: Any, k: int) -> None:
    """Write eight numbers from the k-th on."""
    builder.store(value, builder.bitcast(at(builder, start, k), _ROW), align=8)
