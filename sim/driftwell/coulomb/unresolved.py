"""Opposite charges that fall towards each other faster than a step can follow: found in O(n).

A pair's own rate is sqrt(|Q_i Q_j| / (4 pi eps0 mu r^3)), 1/mu = 1/m_i + 1/m_j. It is above the
limit only nearer than a *reach* that the largest charges and the lightest masses give for all
pairs. Space is cut into cubes some reaches wide. The cubes that hold positive charges are marked
in a table of bits, by a hash; few negative charges have a marked cube within reach, and these are
kept in lists by the hash of their own cube. Each positive charge is then compared with those in
the lists of the cubes within its reach. A hash that two cubes share costs time and changes
nothing: what is told is the same, to the last bit of every comparison, as with all pairs compared.

The table has 8 to 16 bits a charge, so that it stays in a cache. Where many charges of both signs
crowd in one cube and yet no pair is too fast, the time grows with the pairs in that cube.

References
----------
M. Teschner et al., Proc. Vision, Modeling, Visualization (2003) 47 (hashed cubes; from memory).
"""

from __future__ import annotations

import math
from typing import Any

import numpy as np
from numpy.typing import NDArray

from driftwell.kernels import inner_kernel, outer_kernel

PLAIN = 64
"""Up to this many charges all pairs are compared."""
_WIDTH = 16.0
"""Width of a cube in reaches: fewer than 1.5 cubes are within reach of a charge, on average."""
_HALF_CUBES = 2.0**48
"""Cubes from the origin to the edge of space; what is farther counts as being at the edge."""
_PAIR_SLACK = 1e-6
"""By so much the reach is taken longer than computed."""


def search_room(n: int) -> NDArray[np.int64]:
    """Work space of :func:`unresolved_pair` for `n` charges: bits, and lists of negative charges.

    (words + heads + 2 n,) int64, for 2^k words of 64 bits and as many heads of lists.
    """
    return np.zeros(2 * _words(n) + 2 * n if n > PLAIN else 0, dtype=np.int64)


def _words(n: int) -> int:
    return 1 << max(0, (n // 8 - 1).bit_length())


@outer_kernel
def unresolved_pair(
    position: np.ndarray,
    charge: np.ndarray,
    mass: np.ndarray,
    constant: float,
    limit: float,
    extent: float,
    work: np.ndarray,
) -> int:
    """The first charge that falls too fast towards an opposite one of smaller index, or -1.

    Parameters
    ----------
    position : (3, n) float64, m; charge : (n,) float64, C, 0 for one that is lost
    mass : (n,) float64, kg
    constant : 1/(4 pi eps0), N m^2/C^2
    limit : the largest rate allowed, squared, 1/s^2
    extent : m, distance from the origin that few charges exceed; decides the time only
    work : from :func:`search_room`, overwritten
    """
    n = charge.size
    if n <= PLAIN:
        return all_pairs(position, charge, mass, constant, limit)
    reach = _longest_reach(charge, mass, constant, limit)
    if reach < 0.0:
        return -1
    # no cube is smaller than the rounding of a place at the extent
    per_metre = 1.0 / max(_WIDTH * reach, extent / _HALF_CUBES)
    if not 0.0 < per_metre < math.inf:
        return all_pairs(position, charge, mass, constant, limit)
    words = (work.size - 2 * n) // 2
    bits, heads = work[:words], work[words : 2 * words]
    listed, follows = work[2 * words : 2 * words + n], work[2 * words + n :]
    x, y, z = position[0], position[1], position[2]
    for k in range(words):
        bits[k] = 0
        heads[k] = -1
    for i in range(n):
        if charge[i] > 0.0:
            h = _hash(_cube(x[i], per_metre), _cube(y[i], per_metre), _cube(z[i], per_metre))
            bits[(h >> 6) & (words - 1)] |= np.int64(1) << (h & 63)
    count = 0
    for i in range(n):
        if charge[i] < 0.0 and _near_marked(x[i], y[i], z[i], reach, per_metre, bits):
            h = _hash(_cube(x[i], per_metre), _cube(y[i], per_metre), _cube(z[i], per_metre)) & (
                words - 1
            )
            listed[count] = i
            follows[count] = heads[h]
            heads[h] = count
            count += 1
    found = n
    if count > 0:
        for i in range(n):
            if charge[i] > 0.0:
                found = min(
                    found,
                    _first_of_near(
                        i,
                        position,
                        charge,
                        mass,
                        constant,
                        limit,
                        reach,
                        per_metre,
                        heads,
                        listed,
                        follows,
                    ),
                )
    return found if found < n else -1


@outer_kernel
def all_pairs(
    position: np.ndarray, charge: np.ndarray, mass: np.ndarray, constant: float, limit: float
) -> int:
    """The same as :func:`unresolved_pair`, by comparing all pairs."""
    for i in range(charge.size):
        for j in range(i):
            if _too_fast(i, j, position, charge, mass, constant, limit):
                return i
    return -1


@inner_kernel
def _too_fast(
    i: int,
    j: int,
    position: np.ndarray,
    charge: np.ndarray,
    mass: np.ndarray,
    constant: float,
    limit: float,
) -> bool:
    """Whether the pair is one of opposite charges, and its rate above the limit."""
    if not charge[i] * charge[j] < 0.0:
        return False
    dx = position[0, i] - position[0, j]
    dy = position[1, i] - position[1, j]
    dz = position[2, i] - position[2, j]
    r2 = dx * dx + dy * dy + dz * dz
    strength = -constant * charge[i] * charge[j] * (1.0 / mass[i] + 1.0 / mass[j])
    return strength > limit * r2 * math.sqrt(r2)


@inner_kernel
def _longest_reach(charge: np.ndarray, mass: np.ndarray, constant: float, limit: float) -> float:
    """Distance within which any pair could be too fast, m; -1 where all have one sign."""
    most_positive = most_negative = 0.0
    lightest_positive = lightest_negative = math.inf
    for i in range(charge.size):
        if charge[i] > 0.0:
            most_positive = max(most_positive, charge[i])
            lightest_positive = min(lightest_positive, mass[i])
        elif charge[i] < 0.0:
            most_negative = max(most_negative, -charge[i])
            lightest_negative = min(lightest_negative, mass[i])
    if most_positive == 0.0 or most_negative == 0.0:
        return -1.0
    ratio = 1.0 / lightest_positive + 1.0 / lightest_negative
    strength = constant * most_positive * most_negative * ratio
    return (1.0 + _PAIR_SLACK) * (strength / limit) ** (1.0 / 3.0)


@inner_kernel
def _cube(x: float, per_metre: float) -> Any:
    """Number of the cube along one axis."""
    k: float = math.floor(x * per_metre)
    # written so that what is no number is at the edge, too
    k = k if k < _HALF_CUBES else _HALF_CUBES
    k = k if k > -_HALF_CUBES else -_HALF_CUBES
    return np.int64(k)


@inner_kernel
def _hash(i: int, j: int, k: int) -> Any:
    """A whole number that looks as if drawn, the same for the same cube."""
    h = np.uint64(i) * np.uint64(0x9E3779B97F4A7C15)
    h = (h ^ (h >> np.uint64(32))) + np.uint64(j)
    h *= np.uint64(0xBF58476D1CE4E5B9)
    h = (h ^ (h >> np.uint64(29))) + np.uint64(k)
    h *= np.uint64(0x94D049BB133111EB)
    return np.int64(h >> np.uint64(8))


@inner_kernel
def _ends(x: float, reach: float, per_metre: float) -> tuple[Any, Any]:
    """First and last cube within reach along one axis, roundings included."""
    far = reach + 1e-15 * abs(x)
    return _cube(x - far, per_metre), _cube(x + far, per_metre)


@inner_kernel
def _near_marked(
    x: float, y: float, z: float, reach: float, per_metre: float, bits: np.ndarray
) -> bool:
    """Whether a marked cube is within reach of a place."""
    i0, i1 = _ends(x, reach, per_metre)
    j0, j1 = _ends(y, reach, per_metre)
    k0, k1 = _ends(z, reach, per_metre)
    for i in range(i0, i1 + 1):
        for j in range(j0, j1 + 1):
            for k in range(k0, k1 + 1):
                h = _hash(i, j, k)
                if (bits[(h >> 6) & (bits.size - 1)] >> (h & 63)) & 1 != 0:
                    return True
    return False


@inner_kernel
def _first_of_near(
    i: int,
    position: np.ndarray,
    charge: np.ndarray,
    mass: np.ndarray,
    constant: float,
    limit: float,
    reach: float,
    per_metre: float,
    heads: np.ndarray,
    listed: np.ndarray,
    follows: np.ndarray,
) -> int:
    """The smallest larger index of too fast pairs of charge `i` and one listed; n for none."""
    found: int = charge.size
    i0, i1 = _ends(position[0, i], reach, per_metre)
    j0, j1 = _ends(position[1, i], reach, per_metre)
    k0, k1 = _ends(position[2, i], reach, per_metre)
    for a in range(i0, i1 + 1):
        for b in range(j0, j1 + 1):
            for c in range(k0, k1 + 1):
                at = heads[_hash(a, b, c) & (heads.size - 1)]
                while at >= 0:
                    other = listed[at]
                    later = max(i, other)
                    if later < found and _too_fast(
                        i, other, position, charge, mass, constant, limit
                    ):
                        found = later
                    at = follows[at]
    return found
