"""Random numbers from a counter: Philox4x64-10.

A block of four 64-bit words is a function of a key (two words) and a counter (four words), so that
any number of any stream can be had at any time, in any order and on any thread. Streams are keyed
by the run's seed and a name (:func:`stream_key`); the counter says whose number it is, of which
event or step, for what, and which one.

    numbers of (id, event, purpose, draw) = Philox4x64-10(key; id, event, purpose, draw)     (1)

Uniforms are the upper 52 bits of a word and half a last place: (0, 1) without its ends. Normals are
those of Box and Muller, exponentials the negative logarithm of a uniform.

References
----------
J. K. Salmon, M. A. Moraes, R. O. Dror and D. E. Shaw, Proc. SC11 (2011),
doi:10.1145/2063384.2063405: section 3.3 and the multipliers and Weyl constants of its program.
G. E. P. Box and M. E. Muller, Ann. Math. Stat. 29 (1958) 610 (from memory).
"""

from __future__ import annotations

import hashlib
import math
from typing import Any

import numpy as np
from llvmlite import ir
from numba import types
from numpy.typing import NDArray

from driftwell.kernels.circle import circle
from driftwell.kernels.compiled import inner_kernel, kernel, outer_kernel
from driftwell.kernels.lane_values import emitted_code

ROUNDS = 10
word: Any = np.uint64
M0, M1 = word(0xD2E7470EE14C6C93), word(0xCA5A826395121157)
"""The multipliers."""
W0, W1 = word(0x9E3779B97F4A7C15), word(0xBB67AE8584CAA73B)
"""What the key grows by from round to round: golden ratio, and square root of 3 less 1."""
_UNUSED = word(12)
_UNIT = 2.0**-52

Words = tuple[int, int, int, int]
Four = tuple[float, float, float, float]


def stream_key(seed: int, name: str, purpose: str) -> NDArray[np.uint64]:
    """The key (2,) of a stream: 128 bits of a digest of all that it depends on."""
    digest = hashlib.sha256(f"{seed}\0{name}\0{purpose}".encode()).digest()
    return np.frombuffer(digest[:16], dtype="<u8").astype(np.uint64)


@outer_kernel
def words(k0: int, k1: int, c0: int, c1: int, c2: int, c3: int) -> Words:
    """One block, equation (1); all uint64."""
    for _ in range(ROUNDS):
        high0, low0 = _high(M0, c0), M0 * c0
        high1, low1 = _high(M1, c2), M1 * c2
        c0, c1, c2, c3 = high1 ^ c1 ^ k0, low1, high0 ^ c3 ^ k1, low0
        k0, k1 = k0 + W0, k1 + W1
    return c0, c1, c2, c3


@kernel
def fill_words(key: np.ndarray, counter: np.ndarray, out_words: np.ndarray) -> None:
    """Blocks of many counters, for Python: counter and out_words (n, 4), key (2,), uint64."""
    for i in range(counter.shape[0]):
        row = counter[i]
        a, b, c, d = words(key[0], key[1], row[0], row[1], row[2], row[3])
        out_words[i, 0], out_words[i, 1], out_words[i, 2], out_words[i, 3] = a, b, c, d


@outer_kernel
def uniforms(key: np.ndarray, who: int, event: int, purpose: int, draw: int) -> Four:
    """Four uniforms in (0, 1); key : (2,) uint64, the rest int64, not negative."""
    a, b, c, d = words(key[0], key[1], word(who), word(event), word(purpose), word(draw))
    return _unit(a), _unit(b), _unit(c), _unit(d)


@outer_kernel
def normals(key: np.ndarray, who: int, event: int, purpose: int, draw: int) -> Four:
    """Four independent normals of mean 0 and variance 1."""
    a, b, c, d = uniforms(key, who, event, purpose, draw)
    return four_normals(a, b, c, d)


@inner_kernel
def four_normals(a: float, b: float, c: float, d: float) -> Four:
    """Four independent normals from four uniforms."""
    r, s = math.sqrt(-2.0 * math.log(a)), math.sqrt(-2.0 * math.log(c))
    x, y = circle(b)
    z, w = circle(d)
    return r * x, r * y, s * z, s * w


@inner_kernel
def exponential(uniform: float) -> float:
    """An exponential of mean 1 from a uniform."""
    return -math.log(uniform)


@kernel
def fill_exponentials(
    key: np.ndarray, who: np.ndarray, event: np.ndarray, purpose: int, out: np.ndarray
) -> None:
    """The first exponential of each (who, event), for Python: all (n,)."""
    for i in range(out.size):
        out[i] = exponential(uniforms(key, who[i], event[i], purpose, 0)[0])


@emitted_code
def _high(typing: Any, a: Any, b: Any) -> Any:
    """The upper 64 bits of the product of two uint64."""

    def emitted(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        wide = ir.IntType(128)
        product = builder.mul(*(builder.zext(each, wide) for each in args))
        return builder.trunc(builder.lshr(product, ir.Constant(wide, 64)), ir.IntType(64))

    return types.uint64(types.uint64, types.uint64), emitted


@inner_kernel
def _unit(word: int) -> float:
    return ((word >> _UNUSED) + 0.5) * _UNIT
