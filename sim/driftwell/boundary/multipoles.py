"""Multipole content of a potential near an axis or a centre.

Planar, about an axis:

    phi = sum over n of (A_n cos(n t) + B_n sin(n t)) (rho/r0)^n                            (1)

(n = 2 quadrupole, 3 hexapole, 4 octopole, 6 dodecapole; A_0 the constant). About z, about a centre:

    phi = sum over n of A_n (d/r0)^n P_n(cos t)                                             (2)

In space, with real solid harmonics normalised so that m = 0 gives P_n:

    phi = sum over l, m of C_lm (d/r0)^l sqrt((2 - delta_m0) (l - |m|)!/(l + |m|)!)
          P_l^|m|(cos t) (cos(m f), or sin(|m| f) where m < 0)                              (3)

with P_l^m without the factor (-1)^m. The potential is sampled on the circle or sphere of the
radius r0, which must be free of charge within: at equally spaced angles, or at Gauss-Legendre
heights times equally spaced angles. The rules are exact for terms up to twice the highest that is
sampled; what is left out there is folded in.

A_2 of (1) is half of the second derivative along x times r0^2: phi = A_2 (x^2 - y^2)/r0^2 + ...

Errors are differences from the coefficients found on a circle or sphere of 0.8 r0, brought to r0: a
coefficient of a potential that obeys Laplace's equation does not depend on where it was sampled.

References
----------
J. D. Jackson, Classical Electrodynamics, 3rd ed. (1998), secs. 2.11, 3.3, 3.5. Rules on the sphere:
K. Atkinson, J. Austral. Math. Soc. B 23 (1982) 332 (from memory).
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.special import assoc_legendre_p_all, eval_legendre

Floats = NDArray[np.float64]
Potential = Callable[[Floats], Floats]
"""Potentials (e, n) at points (n, d)."""

HIGHEST_PLANAR, HIGHEST_ROUND, HIGHEST_SPATIAL = 12, 12, 6
_INNER = 0.8
_SAMPLES = 64


@dataclass(frozen=True, slots=True)
class PlanarContent:
    """Equation (1).

    radius : r0, m
    cosine, sine : (e, h + 1) float64, A_n and B_n, V per V
    error : (e, h + 1) float64, of the larger of both
    """

    radius: float
    cosine: Floats
    sine: Floats
    error: Floats


@dataclass(frozen=True, slots=True)
class RoundContent:
    """Equation (2).

    radius : r0, m
    zonal : (e, h + 1) float64, A_n, V per V
    error : (e, h + 1) float64
    """

    radius: float
    zonal: Floats
    error: Floats


@dataclass(frozen=True, slots=True)
class SpatialContent:
    """Equation (3).

    radius : r0, m
    terms : (l, m) of each coefficient
    harmonic : (e, k) float64, C_lm, V per V
    error : (e, k) float64
    """

    radius: float
    terms: tuple[tuple[int, int], ...]
    harmonic: Floats
    error: Floats


def _circle(
    potential: Potential, centre: tuple[float, float], radius: float, highest: int
) -> tuple[Floats, Floats]:
    angle = (np.arange(_SAMPLES) + 0.5) * (2.0 * math.pi / _SAMPLES)
    points = np.stack(
        [centre[0] + radius * np.cos(angle), centre[1] + radius * np.sin(angle)], axis=1
    )
    value = potential(points)
    order = np.arange(highest + 1)[:, None] * angle
    share = np.where(np.arange(highest + 1) == 0, 1.0, 2.0)[:, None] / _SAMPLES
    return value @ (share * np.cos(order)).T, value @ (share * np.sin(order)).T


def planar_content(
    potential: Potential,
    radius: float,
    centre: tuple[float, float] = (0.0, 0.0),
    highest: int = HIGHEST_PLANAR,
) -> PlanarContent:
    """Coefficients of equation (1) up to n = `highest`, of potentials at points (x, y)."""
    cosine, sine = _circle(potential, centre, radius, highest)
    inner = _circle(potential, centre, _INNER * radius, highest)
    scale = _INNER ** -np.arange(highest + 1.0)
    error = np.maximum(np.abs(inner[0] * scale - cosine), np.abs(inner[1] * scale - sine))
    return PlanarContent(radius, cosine, sine, error)


def _half_circle(potential: Potential, centre: float, radius: float, highest: int) -> Floats:
    height, weight = np.polynomial.legendre.leggauss(_SAMPLES // 2)
    points = np.stack([radius * np.sqrt(1.0 - height**2), centre + radius * height], axis=1)
    order = np.arange(highest + 1)[:, None]
    return np.asarray(potential(points) @ ((order + 0.5) * weight * eval_legendre(order, height)).T)


def round_content(
    potential: Potential, radius: float, centre: float = 0.0, highest: int = HIGHEST_ROUND
) -> RoundContent:
    """Coefficients of equation (2) up to n = `highest`, about (0, centre), of phi at (r, z)."""
    zonal = _half_circle(potential, centre, radius, highest)
    inner = _half_circle(potential, centre, _INNER * radius, highest)
    scale = _INNER ** -np.arange(highest + 1.0)
    return RoundContent(radius, zonal, np.abs(inner * scale - zonal))


def solid_harmonics(points: Floats, highest: int) -> tuple[tuple[tuple[int, int], ...], Floats]:
    """(l, m) of each term of equation (3), and its value (k, n) at points (n, 3), with r0 = 1."""
    x, y, z = points.T
    distance = np.sqrt(x * x + y * y + z * z)
    cosine = np.divide(z, distance, out=np.ones_like(z), where=distance > 0.0)
    around = np.arctan2(y, x)
    legendre = assoc_legendre_p_all(highest, highest, cosine)[0]
    terms, values = [], []
    for degree in range(highest + 1):
        for m in range(-degree, degree + 1):
            order = abs(m)
            factor = math.sqrt(math.factorial(degree - order) / math.factorial(degree + order))
            factor *= (-1.0) ** order * (math.sqrt(2.0) if m else 1.0)
            turned = np.cos(m * around) if m >= 0 else np.sin(order * around)
            terms.append((degree, m))
            values.append(factor * distance**degree * legendre[degree, order] * turned)
    return tuple(terms), np.array(values)


def _sphere(
    potential: Potential, centre: tuple[float, float, float], radius: float, highest: int
) -> tuple[tuple[tuple[int, int], ...], Floats]:
    heights, weights = np.polynomial.legendre.leggauss(2 * highest)
    angles = (np.arange(4 * highest) + 0.5) * (2.0 * math.pi / (4 * highest))
    height, angle = (part.ravel() for part in np.meshgrid(heights, angles, indexing="ij"))
    across = np.sqrt(1.0 - height**2)
    unit = np.stack([across * np.cos(angle), across * np.sin(angle), height], axis=1)
    terms, harmonics = solid_harmonics(unit, highest)
    # the mean over the sphere of a harmonic's square is 1/(2 l + 1)
    mean = np.repeat(weights, len(angles)) / (2.0 * len(angles))
    strength = np.array([2.0 * degree + 1.0 for degree, _ in terms])
    values = potential(np.asarray(centre) + radius * unit)
    return terms, np.asarray(values @ (strength[:, None] * mean * harmonics).T)


def spatial_content(
    potential: Potential,
    radius: float,
    centre: tuple[float, float, float] = (0.0, 0.0, 0.0),
    highest: int = HIGHEST_SPATIAL,
) -> SpatialContent:
    """Coefficients of equation (3) up to l = `highest`, of potentials at points (x, y, z)."""
    terms, harmonic = _sphere(potential, centre, radius, highest)
    _, inner = _sphere(potential, centre, _INNER * radius, highest)
    scale = np.array([_INNER**-degree for degree, _ in terms])
    return SpatialContent(radius, terms, harmonic, np.abs(inner * scale - harmonic))
