"""A bunch between two mirrors: whether its own charge spreads it or holds it together."""

from __future__ import annotations

import math
from pathlib import Path

import numpy as np
from scipy.constants import atomic_mass, e
from scipy.integrate import quad
from scipy.optimize import brentq

from driftwell.record.reader import Run
from validation.bench import Bench
from validation.case import COMPUTED, Case, Curve, Found, Published
from validation.wells import well

MASS = 40.0 * atomic_mass
ENERGY = 1000.0
SOFT, LENGTH = 500.0, 20e-3
"""V and m of the first part of the potential, SOFT (sqrt(1 + (z/LENGTH)^2) - 1)."""
STEEP = 1e7
"""V/m^4 of the second part, STEEP z^4, where its scale is 1."""
TURNS = 20
SOURCE = (
    "the sign of dT/dE decides: H. B. Pedersen et al., Phys. Rev. Lett. 87 (2001) 055001; "
    "D. Strasser et al., Phys. Rev. Lett. 89 (2002) 283204; dT/dE = 0 worked out here by quadrature"
)


def potential(z: float, scale: float) -> float:
    """On the axis, V."""
    return SOFT * (math.sqrt(1.0 + (z / LENGTH) ** 2) - 1.0) + scale * STEEP * z**4


def period(energy: float, scale: float) -> float:
    """Time (s) of one trip to and fro, of an ion with so many eV."""
    turn = float(brentq(lambda z: potential(z, scale) - energy, 1e-4, 0.2, xtol=1e-16))

    def slowness(angle: float) -> float:
        z = turn * math.sin(angle)
        left = max(energy - potential(z, scale), 1e-300)
        return turn * math.cos(angle) / math.sqrt(left)

    value, _ = quad(slowness, 0.0, 0.5 * math.pi - 1e-7, limit=200)
    return 4.0 * float(value) / math.sqrt(2.0 * e / MASS)


def slip(scale: float) -> float:
    """How the period grows with the energy, dT/T over dE/E."""
    high, low = period(1.01 * ENERGY, scale), period(0.99 * ENERGY, scale)
    return (high - low) / (0.02 * period(ENERGY, scale))


def files(folder: Path) -> None:
    """Both parts of the potential, and a well across."""
    well(folder / "across.csv", MASS, 150e3, 0.0, 20e-3, 80e-3)
    for name, part in (("soft", 0.0), ("steep", 1.0)):
        lines = ["r [m], z [m], V [V]"]
        for r in np.linspace(0.0, 20e-3, 9).tolist():
            for z in np.linspace(-80e-3, 80e-3, 321).tolist():
                value = potential(z, part) - part * potential(z, 0.0)
                lines.append(f"{r!r}, {z!r}, {value!r}")
        (folder / f"{name}.csv").write_text("\n".join(lines) + "\n")


def _length(run: Run) -> float:
    """rms length at the end."""
    return math.sqrt(float(run.moments("bunch").covariance[-1][2, 2]))


def _marked(run: Run, key: str, value: object) -> bool:
    return f"{key}={value}" in run.header.settings


def measured(case: Case, bench: Bench) -> list[Found]:
    """Lengths after 20 trips with the charge and without, at five steepnesses; where both are
    the same, by a straight line and by a parabola through their ratios."""
    scenario = bench.laid_out(case)
    critical = float(brentq(slip, 0.01, 20.0))
    scales = [round(part * critical, 6) for part in (0.7, 0.85, 1.0, 1.15, 1.3)]
    durations = [f"{TURNS * period(ENERGY, scale)!r} s" for scale in scales]
    zeros: list[float] = []
    steps = ("20 ns", "10 ns")
    ratios: list[float] = []
    for step in steps:
        lengths = []
        for method in ("off", "direct"):
            runs = bench.sweep(
                scenario,
                f"{method} {step}",
                settings=(f"coulomb.method={method}", f"stepping.step={step}"),
                vary={"field.steep part.scale": scales, "duration": durations},
            )
            lengths.append(
                [
                    _length(next(r for r in runs if _marked(r, "field.steep part.scale", scale)))
                    for scale in scales
                ]
            )
        ratios = [with_ / without for without, with_ in zip(*lengths, strict=True)]
        zeros += [_crossing(scales, ratios, degree) for degree in (1, 2)]
    return [
        Found(
            "steepness between bunching and spreading",
            "1e7 V/m^4",
            Published(critical, 1e-6 * critical, SOURCE, COMPUTED),
            zeros[3],
            {"step": abs(zeros[3] - zeros[1]), "interpolation": abs(zeros[3] - zeros[2])},
        )
    ]


def _crossing(scales: list[float], ratios: list[float], degree: int) -> float:
    """Where a polynomial through the logarithms of the ratios is zero, nearest to the middle."""
    curve = np.polynomial.Polynomial.fit(scales, np.log(ratios), degree)
    reals = [complex(root) for root in np.asarray(curve.roots(), dtype=np.complex128)]
    return min(
        (root.real for root in reals if abs(root.imag) < 1e-9),
        key=lambda each: abs(each - scales[2]),
    )


def curve(found: list[Found]) -> Curve:
    """How the period goes with the energy, against the steepness, and the crossing found."""
    scales = np.linspace(0.6, 1.4, 30) * found[0].published.value
    return Curve(
        "steepness, 1e7 V/m^4",
        "dT/T over dE/E",
        [found[0].value],
        [0.0],
        [0.0],
        scales.tolist(),
        [slip(float(each)) for each in scales],
    )
