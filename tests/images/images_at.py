"""Sums over images as tests see them: charges in; field, potential and energy out."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from driftwell.images.image_sum import Images
from driftwell.kernels.threads import on_threads

Floats = NDArray[np.float64]


def images_at(
    images: Images, position: Floats, charge: ArrayLike, threads: int = 1, constant: float = 1.0
) -> Floats:
    """Field (3) and potential (1) of the images at charges (3, n), as (4, n)."""
    q = np.atleast_1d(np.asarray(charge, dtype=np.float64))
    place = np.ascontiguousarray(position, dtype=np.float64)
    out = np.full((4, q.size), np.nan)
    with on_threads(threads) as given:
        summed = images.laid_out(q.size, given)
        if not summed.keeps:
            summed.work[...] = np.nan
        summed.function(place, q, constant, summed.table, summed.work, out)
    return out


def energy(images: Images, position: Floats, charge: Floats) -> float:
    """Half the sum of charge times potential."""
    return 0.5 * float(np.sum(charge * images_at(images, position, charge)[3]))


def cloud(n: int, size: float, seed: int = 3) -> tuple[Floats, Floats]:
    """Places (3, n) within a cube of this half side, and charges (n,) of both signs."""
    random = np.random.default_rng(seed)
    return random.uniform(-size, size, (3, n)), random.uniform(0.3, 1.0, n) * random.choice(
        [-1.0, 1.0], n, p=[0.3, 0.7]
    )


def sheet(side: float, steps: int, crowd: float = 0.0) -> Floats:
    """Triangles (k, 3, 2) of a square about 0, crowded towards its middle by a sinh where asked."""
    t = np.linspace(-1.0, 1.0, steps + 1)
    t = np.sinh(crowd * t) / np.sinh(crowd) if crowd else t
    x, y = np.meshgrid(0.5 * side * t, 0.5 * side * t, indexing="ij")
    p = np.stack([x, y], axis=2)
    a, b, c, d = p[:-1, :-1], p[1:, :-1], p[1:, 1:], p[:-1, 1:]
    halves = [np.stack(each, axis=2).reshape(-1, 3, 2) for each in ((a, b, c), (a, c, d))]
    return np.concatenate(halves)


def put(flat: Floats, axis: int, at: float) -> Floats:
    """Triangles in the plane, put at a place along an axis: (k, 3, 3)."""
    found = np.empty((*flat.shape[:2], 3))
    found[..., (axis + 1) % 3], found[..., (axis + 2) % 3] = flat[..., 0], flat[..., 1]
    found[..., axis] = at
    return found


def box(steps: int) -> Floats:
    """Triangles of a cube of side 1 about 0."""
    flat = sheet(1.0, steps)
    return np.concatenate([put(flat, axis, at) for axis in range(3) for at in (-0.5, 0.5)])
