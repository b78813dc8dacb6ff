"""The loops a careful user would write by hand in C, compiled: bench_reference.c."""

from __future__ import annotations

import ctypes
import subprocess
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

SOURCE = Path(__file__).resolve().parents[1] / "bench_reference.c"
GCC = ("gcc", "-O3", "-march=native", "-ffast-math")


def reference_library(folder: Path) -> ctypes.CDLL:
    """The loops of bench_reference.c, compiled."""
    made = folder / "reference.so"
    subprocess.run(
        [*GCC, "-shared", "-fPIC", str(SOURCE), "-o", str(made), "-lm"],
        check=True,
    )
    return ctypes.CDLL(str(made))


def pointers(*arrays: NDArray[np.float64]) -> list[Any]:
    return [array.ctypes.data_as(ctypes.POINTER(ctypes.c_double)) for array in arrays]
