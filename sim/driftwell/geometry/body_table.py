"""Bodies of any number and kind as flat arrays for compiled code."""

from __future__ import annotations

from collections.abc import Sequence
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from driftwell.geometry import mesh_distance, outline_distance
from driftwell.geometry.box_tree import FIRST, LAST, SKIP, BoxTree, box_tree
from driftwell.geometry.solid import Extruded, Frame, Mesh, Solid

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

REVOLVED, EXTRUDED, MESH = 0, 1, 2
KIND, OWNER, ROOT, VOLUME = 0, 1, 2, 3
"""Columns of a body's whole numbers: what it is, whose, its tree, whether it bounds a volume."""
ORIGIN, AXES, LOW, HIGH, HALF = 0, 3, 12, 15, 18
"""Columns of a body's numbers: its frame, its box in the scenario's coordinates, half length."""
NUMBERS = 19
TOUCH = 1e-13
"""What counts as on a surface, as part of the largest coordinate: some hundred roundings."""


class BodyTable(NamedTuple):
    """Bodies, one row each, in the order of their owners.

    whole : (b, 4) int64, see KIND; number : (b, 19) float64, see ORIGIN
    node : (m, 6) float64 and link : (m, 3) int64, trees of boxes, see box_tree.py
    piece : (k, 15) float64, of outlines; triangle : (t, 30) float64, of meshes
    touch : (1,) float64, m: nearer than this is on the surface
    search : (1,) int64, address of the compiled search, see body_search.py; 0 without
    """

    whole: Ints
    number: Floats
    node: Floats
    link: Ints
    piece: Floats
    triangle: Floats
    touch: Floats
    search: Ints


def body_table(bodies: Sequence[Sequence[Solid]]) -> BodyTable:
    """The bodies of each owner as flat arrays; owners are numbered as they stand."""
    whole, number = [], []
    nodes, links = [np.zeros((0, 6))], [np.zeros((0, 3), dtype=np.int64)]
    pieces = [np.zeros((0, outline_distance.COLUMNS))]
    triangles = [np.zeros((0, mesh_distance.COLUMNS))]
    roots = piece_count = triangle_count = 0
    for owner, own in enumerate(bodies):
        for solid in own:
            if isinstance(solid, Mesh):
                packed = mesh_distance.packed_triangles(solid)
                tree = box_tree(*mesh_distance.triangle_boxes(packed))
                kind, frame, half, volume = MESH, Frame(), 0.0, solid.closed
                first = triangle_count
                triangles.append(packed[tree.order])
                triangle_count += len(packed)
            else:
                packed = outline_distance.packed_pieces(solid.outline)
                if not isinstance(solid, Extruded):  # what lies on the axis is no surface
                    packed = packed[(packed[:, 0] != 0.0) | (packed[:, 2] != 0.0)]
                tree = box_tree(*outline_distance.piece_boxes(packed))
                kind, half = REVOLVED, 0.0
                frame, volume = solid.frame, solid.outline.solid
                if isinstance(solid, Extruded):
                    kind, half = EXTRUDED, solid.half_length
                    volume = volume and half > 0.0
                first = piece_count
                pieces.append(packed[tree.order])
                piece_count += len(packed)
            nodes.append(_in_space(tree))
            links.append(_counted_from(tree.link, roots, first))
            low, high = _box(tree, kind, half, frame)
            whole.append((kind, owner, roots, int(volume)))
            number.append(np.concatenate([frame.origin, frame.axes.ravel(), low, high, [half]]))
            roots += len(tree.link)
    numbers = np.array(number, dtype=np.float64).reshape(-1, NUMBERS)
    reach = np.abs(numbers[:, LOW:HALF])
    largest = float(reach[np.isfinite(reach)].max(initial=0.0))
    return BodyTable(
        np.array(whole, dtype=np.int64).reshape(-1, 4),
        numbers,
        np.concatenate(nodes),
        np.concatenate(links),
        np.concatenate(pieces),
        np.concatenate(triangles),
        np.array([TOUCH * largest]),
        np.zeros(1, dtype=np.int64),
    )


def _in_space(tree: BoxTree) -> Floats:
    """The boxes with three axes, whether they had two or three."""
    d = tree.node.shape[1] // 2
    node = np.zeros((len(tree.node), 6))
    node[:, :d], node[:, 3 : 3 + d] = tree.node[:, :d], tree.node[:, d:]
    return node


def _counted_from(link: Ints, nodes: int, first: int) -> Ints:
    """Links where so many nodes and pieces stand before."""
    moved = link.copy()
    moved[:, SKIP] += nodes
    moved[:, FIRST] += first
    moved[:, LAST] += first
    return moved


def _box(tree: BoxTree, kind: int, half: float, frame: Frame) -> tuple[Floats, Floats]:
    """Corners of a body's box in the scenario's coordinates, from the box of its pieces."""
    d = tree.node.shape[1] // 2
    low, high = tree.node[0, :d], tree.node[0, d:]
    if kind == REVOLVED:
        low, high = np.array([-high[0], -high[0], low[1]]), np.array([high[0], high[0], high[1]])
    elif kind == EXTRUDED:
        low, high = np.array([*low, -half]), np.array([*high, half])
    corners = np.array([low, high])
    # each axis on its own: an infinite length must not meet a zero
    out_low, out_high = frame.origin.astype(np.float64), frame.origin.astype(np.float64)
    for own in range(3):
        for axis in range(3):
            cosine = frame.axes[own, axis]
            if cosine != 0.0:
                ends = np.sort(cosine * corners[:, own])
                out_low[axis] += ends[0]
                out_high[axis] += ends[1]
    return out_low, out_high
