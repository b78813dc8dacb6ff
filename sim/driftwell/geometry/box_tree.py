"""Trees of boxes around pieces, so that the nearest of many is found without asking all.

The nodes of a tree stand in depth-first order: the first child follows its parent, the second
follows the whole of the first. A walk that leaves a node out goes on at its `skip`, so it needs no
stack. Trees of several bodies stand one after the other in the same arrays.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

LEAF = 4
"""Most pieces of a leaf."""
SKIP, FIRST, LAST = 0, 1, 2
"""Columns of a link: the node after the subtree; a leaf's pieces, none of an inner node."""


@dataclass(frozen=True, slots=True)
class BoxTree:
    """A tree over pieces that are to be laid in its order.

    node : (m, 2 d) float64, the boxes' lowest corners, then their highest
    link : (m, 3) int64, see SKIP, FIRST and LAST
    order : (k,) int64, the pieces in the order of the leaves
    """

    node: Floats
    link: Ints
    order: Ints


def box_tree(low: Floats, high: Floats) -> BoxTree:
    """The tree over boxes with corners (k, d), halved along the longest side of their middles."""
    middle = 0.5 * (low + high)
    order = np.arange(len(low))
    links: list[tuple[int, int, int]] = []
    ranges: list[tuple[int, int]] = []

    waiting = [(0, len(low), -1)]
    parents: list[int] = []
    while waiting:
        first, last, parent = waiting.pop()
        ranges.append((first, last))
        parents.append(parent)
        leaf = last - first <= LEAF
        links.append((0, first, last if leaf else first))
        if leaf:
            continue
        own = order[first:last]
        spread = np.ptp(middle[own], axis=0)
        half = (last - first) // 2
        own = own[np.argpartition(middle[own, int(np.argmax(spread))], half)]
        order[first:last] = own
        here = len(links) - 1
        waiting += [(first + half, last, here), (first, first + half, here)]
    link = np.array(links, dtype=np.int64)
    # a subtree ends where its last descendant ends: sizes add up from the leaves
    size = np.ones(len(link), dtype=np.int64)
    for k in range(len(link) - 1, 0, -1):
        size[parents[k]] += size[k]
    link[:, SKIP] = np.arange(len(link)) + size
    starts = np.array([first for first, _ in ranges])
    ends = np.array([last for _, last in ranges])
    node = np.concatenate(
        [
            _over_ranges(np.minimum, low[order], starts, ends),
            _over_ranges(np.maximum, high[order], starts, ends),
        ],
        axis=1,
    )
    return BoxTree(node, link, order)


def _over_ranges(extreme: np.ufunc, values: Floats, starts: Ints, ends: Ints) -> Floats:
    """The extreme of values (k, d) over each range of rows, (m, d)."""
    padded = np.concatenate([values, values[-1:]])
    pairs = np.stack([starts, ends], axis=1).ravel()
    return np.asarray(extreme.reduceat(padded, pairs, axis=0)[::2])
