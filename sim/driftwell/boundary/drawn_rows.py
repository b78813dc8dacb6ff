"""What each node's charge does at a point: rows of weights, by which potentials are summed.

An element carries tau(u) = sigma ds/du / eps0 as a polynomial through its values at Gauss-Legendre
nodes. Its potential at a point is the sum over nodes of weight times value. Where the point is far,
the weights are those of the Gauss rule at the nodes. How far is far follows from the error of that
rule, which falls with the power 2 n of the sum of the axes of the ellipse about [-1, 1] through the
integrand's singularity: the complex parameter t at which the element, continued, meets the point.

Where it is near, the element is cut in intervals that grow by a factor of 4 away from Re t, the
first as long as the point is far; on each the integrand is smooth and a Gauss rule has
converged. So weights are good on the surface and at any distance from it, at a cost that grows with
the logarithm of one over the distance.

Tables
------
arcs : (a, 6) float64: position along the chain, x, y, cosine and sine of the direction, curvature
spans : (k, 8) float64: position s0 along the chain, reach L (signed), exponent m, u from and to,
    where s = s0 + L u^m; middle (x, y) and radius of a circle around the element
chain : (k, 2) int64, first and last arc of the element's chain
nodes : (3, k p) float64: x, y and weight of each node (of rings: times the radius)
rule : (2, n) float64, Gauss nodes and weights on [-1, 1] for intervals of elements
transform : (p, p) float64, from integrals of Legendre polynomials to weights of the nodes

References
----------
Error of Gauss rules: L. N. Trefethen, SIAM Review 50 (2008) 67, theorem 4.5 (from memory).
"""

from __future__ import annotations

import math

import numba
import numpy as np

from driftwell.boundary.ring_sources import (
    far_ring,
    line_field,
    line_potential,
    near_ring,
    ring_field,
)
from driftwell.kernels import inner_kernel, inner_sum_kernel, outer_kernel, threaded_kernel

NEAR_CIRCLE = 16.0
"""Squared distance from an element's middle, in its radii, beyond which nothing is near."""
GROWTH = 4.0


@inner_kernel
def arc_at(s: float, first: int, last: int, arcs: np.ndarray) -> int:
    """The arc of a chain on which the position s lies."""
    low, high = first, last
    while low < high:
        middle = (low + high + 1) // 2
        if arcs[middle, 0] <= s:
            low = middle
        else:
            high = middle - 1
    return low


@inner_kernel
def place(s: float, first: int, last: int, arcs: np.ndarray) -> tuple[float, float]:
    """The point at the position s of a chain: the chord of an arc, which may be straight."""
    k = arc_at(s, first, last, arcs)
    along = s - arcs[k, 0]
    half = 0.5 * arcs[k, 5] * along
    cosine, sine, chord = 1.0, 0.0, along
    if half != 0.0:
        cosine, sine = math.cos(half), math.sin(half)
        chord = along * sine / half
    return (
        arcs[k, 1] + chord * (arcs[k, 3] * cosine - arcs[k, 4] * sine),
        arcs[k, 2] + chord * (arcs[k, 4] * cosine + arcs[k, 3] * sine),
    )


@inner_kernel
def _power(u: float, m: float) -> float:
    if m == 1.0:
        return u
    if m == 2.0:
        return u * u
    if m == 3.0:
        return u * u * u
    return u**m


@outer_kernel
def meeting(
    x: float, y: float, e: int, spans: np.ndarray, chain: np.ndarray, arcs: np.ndarray
) -> tuple[float, float]:
    """Real and imaginary part of t, at which the element, continued, meets the point (x, y)."""
    base, reach, m = spans[e, 0], spans[e, 1], spans[e, 2]
    near_end = base + reach * _power(spans[e, 3], m)
    far_end = base + reach * _power(spans[e, 4], m)
    low, high = min(near_end, far_end), max(near_end, far_end)
    first, last = chain[e, 0], chain[e, 1]
    k = arc_at(0.5 * (low + high), first, last, arcs)
    real, imaginary = 0.0, 0.0
    for _ in range(8):
        dx, dy = x - arcs[k, 1], y - arcs[k, 2]
        cosine, sine, curvature = arcs[k, 3], arcs[k, 4], arcs[k, 5]
        real, imaginary = dx * cosine + dy * sine, dy * cosine - dx * sine
        if curvature != 0.0:
            # s = log(1 + q) / (i curvature), q = i curvature w
            qx, qy = -curvature * imaginary, curvature * real
            size = qx * qx + qy * qy
            if size > 1e-6:
                real = math.atan2(qy, 1.0 + qx) / curvature
                imaginary = -0.5 * math.log((1.0 + qx) * (1.0 + qx) + qy * qy) / curvature
            else:
                # the series of log(1 + q)/q, by Horner
                sx, sy = 1.0, 0.0
                for n in range(6, 0, -1):
                    share = n / (n + 1.0)
                    sx, sy = 1.0 - share * (qx * sx - qy * sy), -share * (qx * sy + qy * sx)
                real, imaginary = real * sx - imaginary * sy, real * sy + imaginary * sx
        real += arcs[k, 0]
        found = arc_at(min(max(real, low), high), first, last, arcs)
        if found == k:
            break
        k = found
    real, imaginary = (real - base) / reach, imaginary / reach
    if m != 1.0:
        size = math.sqrt(real * real + imaginary * imaginary) ** (1.0 / m)
        angle = math.atan2(imaginary, real) / m
        real, imaginary = size * math.cos(angle), size * math.sin(angle)
    width = spans[e, 4] - spans[e, 3]
    return (2.0 * real - spans[e, 3] - spans[e, 4]) / width, 2.0 * imaginary / width


@inner_kernel
def _axes(real: float, imaginary: float) -> float:
    """Sum of the distances of t from -1 and 1: the ellipse's sum of half axes plus its inverse."""
    square = imaginary * imaginary
    left, right = real + 1.0, real - 1.0
    return math.sqrt(left * left + square) + math.sqrt(right * right + square)


@outer_kernel
def near_weights(
    x: float,
    y: float,
    e: int,
    real: float,
    imaginary: float,
    floor: float,
    with_field: bool,
    rings: bool,
    spans: np.ndarray,
    chain: np.ndarray,
    arcs: np.ndarray,
    rule: np.ndarray,
    transform: np.ndarray,
    slot: int,
    work_moments: np.ndarray,
    out_rows: np.ndarray,
) -> None:
    """Overwrite the weights of element e's nodes in ``out_rows[slot]``, for a near point."""
    p = len(transform)
    components = 2 if with_field else 1
    for component in range(components):
        for n in range(p):
            work_moments[slot, component, n] = 0.0
    base, reach, m = spans[e, 0], spans[e, 1], spans[e, 2]
    middle_u, half_u = 0.5 * (spans[e, 3] + spans[e, 4]), 0.5 * (spans[e, 4] - spans[e, 3])
    first, last = chain[e, 0], chain[e, 1]
    centre = min(max(real, -1.0), 1.0)
    gap = math.sqrt((real - centre) * (real - centre) + imaginary * imaginary)
    gap = max(gap, floor)
    for side in range(2):
        sign = 1.0 if side == 1 else -1.0
        length = 1.0 - sign * centre
        start, end = 0.0, 1.5 * gap
        while start < length:
            if end > 0.7 * length:
                end = length
            half, middle = 0.5 * (end - start), 0.5 * (end + start)
            for q in range(rule.shape[1]):
                t = centre + sign * (middle + half * rule[0, q])
                s = base + reach * _power(max(middle_u + half_u * t, 0.0), m)
                b, c = place(s, first, last, arcs)
                weight = half * half_u * rule[1, q]
                vx, vy = 0.0, 0.0
                if rings:
                    weight *= b
                    if with_field:
                        vx, vy = ring_field(x, y, b, c)
                    else:
                        vx = near_ring(x, y, b, c)
                elif with_field:
                    vx, vy = line_field(x, y, b, c)
                else:
                    vx = line_potential(x, y, b, c)
                vx *= weight
                vy *= weight
                before, now = 0.0, 1.0
                for n in range(p):
                    work_moments[slot, 0, n] += vx * now
                    if with_field:
                        work_moments[slot, 1, n] += vy * now
                    following = ((2 * n + 1) * t * now - n * before) / (n + 1)
                    before, now = now, following
            start, end = end, end * GROWTH
    for component in range(components):
        for j in range(p):
            total = 0.0
            for n in range(p):
                total += work_moments[slot, component, n] * transform[n, j]
            out_rows[slot, component, e * p + j] = total


@inner_kernel
def fill_rows(
    x: float,
    y: float,
    with_field: bool,
    rings: bool,
    ellipse: float,
    floor: float,
    spans: np.ndarray,
    chain: np.ndarray,
    arcs: np.ndarray,
    nodes: np.ndarray,
    rule: np.ndarray,
    transform: np.ndarray,
    slot: int,
    work_moments: np.ndarray,
    out_rows: np.ndarray,
) -> None:
    """Overwrite ``out_rows[slot]`` by the weights of all nodes at the point (x, y).

    ellipse : least sum of the distances of t from -1 and 1 for which an element is far
    floor : the smallest distance from an element, in its own half lengths, that is resolved
    """
    count = nodes.shape[1]
    if rings:
        if with_field:
            for j in range(count):
                vx, vy = ring_field(x, y, nodes[0, j], nodes[1, j])
                out_rows[slot, 0, j] = nodes[2, j] * vx
                out_rows[slot, 1, j] = nodes[2, j] * vy
        else:
            for j in range(count):
                out_rows[slot, 0, j] = nodes[2, j] * far_ring(x, y, nodes[0, j], nodes[1, j])
    elif with_field:
        for j in range(count):
            vx, vy = line_field(x, y, nodes[0, j], nodes[1, j])
            out_rows[slot, 0, j] = nodes[2, j] * vx
            out_rows[slot, 1, j] = nodes[2, j] * vy
    else:
        for j in range(count):
            out_rows[slot, 0, j] = nodes[2, j] * line_potential(x, y, nodes[0, j], nodes[1, j])
    for e in range(len(spans)):
        dx, dy = x - spans[e, 5], y - spans[e, 6]
        if dx * dx + dy * dy > NEAR_CIRCLE * spans[e, 7] * spans[e, 7]:
            continue
        real, imaginary = meeting(x, y, e, spans, chain, arcs)
        if _axes(real, imaginary) < ellipse:
            near_weights(
                x,
                y,
                e,
                real,
                imaginary,
                floor,
                with_field,
                rings,
                spans,
                chain,
                arcs,
                rule,
                transform,
                slot,
                work_moments,
                out_rows,
            )


@inner_sum_kernel
def _summed(slot: int, component: int, k: int, rows: np.ndarray, density: np.ndarray) -> float:
    total = 0.0
    for j in range(density.shape[1]):
        total += rows[slot, component, j] * density[k, j]
    return total


@threaded_kernel
def weights_at(
    points: np.ndarray,
    rings: bool,
    ellipse: float,
    floor: float,
    spans: np.ndarray,
    chain: np.ndarray,
    arcs: np.ndarray,
    nodes: np.ndarray,
    rule: np.ndarray,
    transform: np.ndarray,
    work_moments: np.ndarray,
    out_rows: np.ndarray,
) -> None:
    """Overwrite row i, ``out_rows[i, 0]``, by the weights of the potential at ``points[i]``.

    points : (n, 2); work_moments : (n, 1, p); out_rows : (n, 1, k p)
    """
    for i in numba.prange(len(points)):
        fill_rows(
            points[i, 0],
            points[i, 1],
            False,
            rings,
            ellipse,
            floor,
            spans,
            chain,
            arcs,
            nodes,
            rule,
            transform,
            i,
            work_moments,
            out_rows,
        )


@threaded_kernel
def sums_at(
    points: np.ndarray,
    with_field: bool,
    rings: bool,
    ellipse: float,
    floor: float,
    spans: np.ndarray,
    chain: np.ndarray,
    arcs: np.ndarray,
    nodes: np.ndarray,
    rule: np.ndarray,
    transform: np.ndarray,
    density: np.ndarray,
    work_moments: np.ndarray,
    work_rows: np.ndarray,
    out_sums: np.ndarray,
) -> None:
    """Overwrite ``out_sums`` by the potentials, or the fields, of each row of `density`.

    points : (n, 2); density : (e, k p); out_sums : (e, n, 1 or 2)
    work_moments : (blocks, 2, p), work_rows : (blocks, 2, k p): a block of points uses one row
    """
    blocks = len(work_rows)
    for block in numba.prange(blocks):
        for i in range(block * len(points) // blocks, (block + 1) * len(points) // blocks):
            fill_rows(
                points[i, 0],
                points[i, 1],
                with_field,
                rings,
                ellipse,
                floor,
                spans,
                chain,
                arcs,
                nodes,
                rule,
                transform,
                block,
                work_moments,
                work_rows,
            )
            for k in range(len(density)):
                for component in range(out_sums.shape[2]):
                    out_sums[k, i, component] = _summed(block, component, k, work_rows, density)
