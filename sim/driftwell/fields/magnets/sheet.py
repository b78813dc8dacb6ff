"""One end of a round current sheet about an axis: what coils and round magnets are summed from.

A sheet of radius a from z = -b to z = b, with j ampere-turns a metre and zeta_+- = z +- b, has

    B_z = mu0 j (axial(zeta_+) - axial(zeta_-)),  and so B_rho / rho and A_phi / rho           (1)

    s^2 = (a + rho)^2 + zeta^2,  kc^2 = ((a - rho)^2 + zeta^2) / s^2,  gamma = (a - rho)/(a + rho)

    axial  = (a/(pi (a + rho))) (zeta/s) cel(kc, gamma^2, 1, gamma)                             (2)
    radial = -(4 a^2/pi) C(kc) / s^3                                                            (3)
    round  = (4 a^2/(pi (a + rho)^2)) (zeta/s) T                                                (4)
    T = int sin^2 cos^2 / ((cos^2 + gamma^2 sin^2) Delta), 0 to pi/2                            (5)
      = (D - gamma^2 cel(kc, gamma^2, 0, 1)) / (1 - gamma^2)

with the integrals of kernels/elliptic.py. (4) and (5) follow from the vector potential of a loop,
integrated over the length and then by parts. Where 1 - gamma^2 is small, near the axis and far
away, (5) would cancel: there the rule of equal steps over a whole period, 16 of them, gives the
smooth periodic integrand to better than 1e-16 (its error falls as (n/4)^16, n = 1 - gamma^2 < 0.3).
The first Gauss transformation of (2) is made by hand, so that nothing cancels outside the sheet.

On the sheet itself axial is the mean of both sides; at its edge radial is infinite.

References
----------
N. Derby, S. Olbert, Am. J. Phys. 78 (2010) 229, doi:10.1119/1.3256157 (from memory): (2), (3).
E. E. Callaghan, S. H. Maslen, NASA Technical Note D-465 (1960) (from memory): the vector potential
in another form.
L. N. Trefethen, J. A. C. Weideman, SIAM Rev. 56 (2014) 385, doi:10.1137/130932132 (from memory):
the rule of equal steps.
"""

from __future__ import annotations

import math

from driftwell.kernels import inner_kernel
from driftwell.kernels.elliptic import associated, third, transformed

_SMALL = 0.3
_SIN2 = tuple(math.sin(math.pi * k / 16.0) ** 2 for k in range(1, 8))
"""sin^2 in the middle of the equal steps that count; the others are 0 or the same."""


@inner_kernel
def axial(rho: float, zeta: float, a: float) -> float:
    """One end's part in B_z / (mu0 j)."""
    wide, thin = a + rho, a - rho
    s2 = wide * wide + zeta * zeta
    s = math.sqrt(s2)
    kc = math.sqrt((thin * thin + zeta * zeta) / s2)
    scale = a * zeta / (math.pi * wide * s)
    if zeta == 0.0:
        return 0.0
    if thin == 0.0:
        return scale * third(kc, 1.0, 1.0, 1.0)
    p = abs(thin) / wide
    if thin > 0.0:
        b = 2.0 * (p + kc) / p
    else:  # kc^2 - gamma^2 = 4 a rho zeta^2 / (s (a + rho))^2
        b = 8.0 * a * rho * zeta * zeta / (s2 * wide * wide * (kc + p) * p)
    return scale * transformed(1.0 + kc, 2.0 * math.sqrt(kc), p + kc / p, 2.0 * a / thin, b)


@inner_kernel
def radial(rho: float, zeta: float, a: float) -> float:
    """One end's part in B_rho / (mu0 j rho), 1/m."""
    wide, thin = a + rho, a - rho
    s2 = wide * wide + zeta * zeta
    _, c = associated(math.sqrt((thin * thin + zeta * zeta) / s2))
    return -4.0 * a * a * c / (math.pi * s2 * math.sqrt(s2))


@inner_kernel
def round_about(rho: float, zeta: float, a: float) -> float:
    """One end's part in A_phi / (mu0 j rho)."""
    wide, thin = a + rho, a - rho
    s2 = wide * wide + zeta * zeta
    kc2 = (thin * thin + zeta * zeta) / s2
    scale = 4.0 * a * a * zeta / (math.pi * wide * wide * math.sqrt(s2))
    gamma2 = thin * thin / (wide * wide)
    n = 4.0 * a * rho / (wide * wide)
    if n < _SMALL:
        total = 0.0
        for sin2 in _SIN2:
            cos2 = 1.0 - sin2
            total += sin2 * cos2 / ((cos2 + gamma2 * sin2) * math.sqrt(cos2 + kc2 * sin2))
        return scale * math.pi / 16.0 * total
    if zeta == 0.0:
        return 0.0
    kc = math.sqrt(kc2)
    b, c = associated(kc)
    t = b + (1.0 - kc2) * c
    if gamma2 > 0.0:
        t -= gamma2 * third(kc, gamma2, 0.0, 1.0)
    return scale * t / n
