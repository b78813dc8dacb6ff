"""Complete elliptic integrals by the arithmetic-geometric mean, without cancellation.

The modulus is given by its complement kc = sqrt(1 - m), which a distance in space yields without
loss where m is near 1. With Delta = sqrt(cos^2 + kc^2 sin^2), each integral from 0 to pi/2:

    cel(kc, p, a, b) = int (a cos^2 + b sin^2) / ((cos^2 + p sin^2) Delta)                   (1)
    K = cel(kc, 1, 1, 1),    E = cel(kc, 1, 1, kc^2)
    B = int cos^2 / Delta,    D = int sin^2 / Delta = K - B
    C = int sin^2 cos^2 / Delta^3 = (D - B) / m

The Gauss transformation leaves the value of (1) and turns

    a -> a + b/p,  b -> 2 (b + a nu mu/p),  p -> p + nu mu/p,  mu -> mu + nu,  nu -> 2 sqrt(mu nu)

from mu = 1, nu = kc and sqrt(p), b / sqrt(p); where mu and nu meet the integral is elementary. For
C the first transformation is made by hand, so that nothing is lost near m = 0 either.

All are infinite at kc = 0 but B = E = 1, and NaN for NaN.

References
----------
R. Bulirsch, Numer. Math. 13 (1969) 305 (from memory): cel.
E. Jahnke, F. Emde, Tables of Functions (1945), ch. V (from memory): B, C, D.
"""

from __future__ import annotations

import math

from driftwell.kernels.compiled import inner_kernel

NEAR = 1e-8
"""The means differ by its square where their iteration ends."""


@inner_kernel
def first_and_second(kc: float) -> tuple[float, float]:
    """K and E."""
    if kc == 0.0:
        return math.inf, 1.0
    mu, nu = 1.0, kc
    a, b = 1.0, kc * kc
    scale = 1.0
    while True:
        product = mu * nu
        apart = abs(mu - nu)
        end = not apart > mu * NEAR
        f = a
        a += b / mu
        b = 2.0 * (b + f * nu)
        mu += nu
        scale *= 2.0
        if end:
            return 0.5 * math.pi * scale / mu, 0.25 * math.pi * (a * mu + b) / (mu * mu)
        nu = 2.0 * math.sqrt(product)


@inner_kernel
def associated(kc: float) -> tuple[float, float]:
    """B and C; K = 2 B + m C and E = (1 + kc^2) B + kc^2 m C."""
    if kc == 0.0:
        return 1.0, math.inf
    mu, nu = 1.0 + kc, 2.0 * math.sqrt(kc)
    b1, b2 = 1.0, 2.0 * kc
    c1, c2 = 0.0, 2.0 / mu
    while True:
        product = mu * nu
        end = not abs(mu - nu) > mu * NEAR
        per = 1.0 / mu
        f, g = b1, c1
        b1 += b2 * per
        b2 = 2.0 * (b2 + f * nu)
        c1 += c2 * per
        c2 = 2.0 * (c2 + g * nu)
        mu += nu
        if end:
            half = 0.25 * math.pi / (mu * mu)
            return half * (b1 * mu + b2), half * (c1 * mu + c2)
        nu = 2.0 * math.sqrt(product)


@inner_kernel
def third(kc: float, p: float, a: float, b: float) -> float:
    """cel(kc, p, a, b) for p > 0."""
    if kc == 0.0:
        return math.inf
    root = math.sqrt(p)
    return transformed(1.0, kc, root, a, b / root)


@inner_kernel
def transformed(mu: float, nu: float, p: float, a: float, b: float) -> float:
    """The value that the transformation leaves, from any stage of it; mu, nu and p > 0."""
    while True:
        product = mu * nu
        end = not abs(mu - nu) > mu * NEAR
        f = a
        a += b / p
        g = product / p
        b = 2.0 * (b + f * g)
        p += g
        mu += nu
        if end:
            return 0.5 * math.pi * (a * mu + b) / (mu * (mu + p))
        nu = 2.0 * math.sqrt(product)
