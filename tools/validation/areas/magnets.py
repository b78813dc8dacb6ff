"""Magnetic fields, by the turns of electrons in them, and slow drifts."""

from __future__ import annotations

import math
from pathlib import Path

import numpy as np
from scipy.constants import c, e, m_e, m_p, mu_0
from scipy.integrate import solve_ivp
from scipy.special import ellipe, ellipk

from driftwell.record.reader import Run
from validation.case import Case, Check, Reading, computed, halved
from validation.reading import at_end

LOOP = (
    "W. R. Smythe, Static and Dynamic Electricity, sec. 7.10; J. D. Jackson (3rd ed.) problem 5.10"
)
HELMHOLTZ = "two loops on the axis: J. D. Jackson (3rd ed.) sec. 5.5"
SOLENOID = "current sheet on its axis: J. D. Jackson (3rd ed.) problem 5.3"
BLOCK = "charged faces of a magnetised block on its axis: J. D. Jackson (3rd ed.) sec. 5.9"
CYCLOID = (
    "L. D. Landau, E. M. Lifshitz, The Classical Theory of Fields, sec. 22, "
    "with relativity integrated by scipy"
)
MIRROR = "adiabatic motion in a parabolic mirror: J. D. Jackson (3rd ed.) sec. 12.5"
QUADRUPOLE = (
    "focusing strength g q/p: M. Reiser, Theory and Design of Charged "
    "Particle Beams (1994) sec. 3.5"
)


def _loop(a: float, rho: float, z: float, current: float) -> float:
    """Magnitude of the field of a loop of radius a, T."""
    far = (a + rho) ** 2 + z**2
    near = (a - rho) ** 2 + z**2
    m = 4.0 * a * rho / far
    factor = mu_0 * current / (2.0 * math.pi * math.sqrt(far))
    along = factor * (ellipk(m) + (a**2 - rho**2 - z**2) / near * ellipe(m))
    out = 0.0
    if rho > 0.0:
        out = factor * z / rho * (-ellipk(m) + (a**2 + rho**2 + z**2) / near * ellipe(m))
    return math.hypot(along, out)


def _turns(field: float) -> float:
    """Gyrations of a slow electron, kHz."""
    return 1e-3 * e * field / (2.0 * math.pi * m_e)


def _gyration(what: str, field: float, source: str, name: str) -> Check:
    """Electrons turn on circles of microns: fields of mm differ from it by parts of 1e-6."""
    return Check(what, "kHz", computed(_turns(field), source, 3e-6), name, 1e-3)


def _block_on_axis(size: tuple[float, float, float], remanence: float, z: float) -> float:
    """Field on the axis of a block magnetised along z, at the distance z from its middle, T."""
    a, b, h = (0.5 * each for each in size)

    def angle(d: float) -> float:
        return math.atan(a * b / (d * math.sqrt(d**2 + a**2 + b**2)))

    return remanence / math.pi * (angle(z - h) - angle(z + h))


def _mirror_map(folder: Path) -> None:
    """B_z = B0 (1 + z^2/L^2 - r^2/(2 L^2)), B_r = -B0 r z/L^2: no sources, no currents."""
    lines = ["r [m], z [m], Br [T], Bz [T]"]
    for r in np.linspace(0.0, 0.03, 13):
        for z in np.linspace(-0.6, 0.6, 49):
            along = 0.1 * (1.0 + (z**2 - 0.5 * r**2) / 0.09)
            out = -0.1 * r * z / 0.09
            lines.append(f"{float(r)!r}, {float(z)!r}, {float(out)!r}, {float(along)!r}")
    (folder / "bottle.csv").write_text("\n".join(lines) + "\n")


def _turning(run: Run) -> Reading:
    """Largest distance from the middle, by the parabola through the three largest records."""
    time, state = run.track(0)
    z = np.abs(state[:, 2])
    k = int(np.argmax(z[1:-1])) + 1
    curve = np.polyfit(time[k - 1 : k + 2] - time[k], z[k - 1 : k + 2], 2)
    return Reading(float(curve[2] - curve[1] ** 2 / (4.0 * curve[0])))


_omega = e * 0.02 / m_p
_time = 3.3 * 2.0 * math.pi / _omega


def _cycloid() -> tuple[float, float]:
    """Place (m) of the proton after 3.3 turns, with relativity, which delays it by 2e-7."""

    def rates(_: float, y: np.ndarray) -> list[float]:
        gamma = math.sqrt(1.0 + (y[2] ** 2 + y[3] ** 2) / c**2)
        return [
            y[2] / gamma,
            y[3] / gamma,
            _omega * y[3] / gamma,
            e / m_p * 500.0 - _omega * y[2] / gamma,
        ]

    found = solve_ivp(
        rates, (0.0, _time), [0.0] * 4, method="DOP853", rtol=1e-13, atol=[1e-14, 1e-14, 1e-9, 1e-9]
    )
    return float(found.y[0, -1]), float(found.y[1, -1])


_drifted, _sideways = _cycloid()
_across = math.sqrt(2.0 * 10.0 * e / m_p)
_strength = e * 12.0 / (math.sqrt(2.0 * m_p * 30e3 * e * (1.0 + 30e3 * e / (2.0 * m_p * c**2))))

CASES: tuple[Case, ...] = (
    Case(
        "current-loop",
        "magnets",
        "Electrons turn in the field of a coil of one turn: in its middle, on its "
        "axis, off its axis.",
        (
            _gyration("in the middle", _loop(0.05, 0.0, 0.0, 10.0), LOOP, "middle"),
            _gyration("50 mm along the axis", _loop(0.05, 0.0, 0.05, 10.0), LOOP, "axis"),
        ),
        converged=True,
    ),
    Case(
        "helmholtz-pair",
        "magnets",
        "Electrons turn between two coils a radius apart.",
        (
            _gyration("in the middle", 0.8**1.5 * mu_0 * 100.0 / 0.1, HELMHOLTZ, "middle"),
            _gyration(
                "20 mm along the axis",
                0.5
                * mu_0
                * 100.0
                * 0.01
                * sum((0.01 + (0.02 + each) ** 2) ** -1.5 for each in (0.05, -0.05)),
                HELMHOLTZ,
                "axis",
            ),
        ),
        converged=True,
    ),
    Case(
        "solenoid",
        "magnets",
        "Electrons turn in the middle, and at the mouth, of a solenoid of one layer.",
        (
            _gyration(
                "in the middle",
                mu_0 * 500.0 * 2.0 / 0.1 * 0.05 / math.hypot(0.05, 0.02),
                SOLENOID,
                "middle",
            ),
            _gyration(
                "at the mouth",
                mu_0 * 500.0 * 2.0 / 0.1 * 0.5 * 0.1 / math.hypot(0.1, 0.02),
                SOLENOID,
                "mouth",
            ),
        ),
        converged=True,
    ),
    Case(
        "magnet-block",
        "magnets",
        "Electrons turn on the axis of a permanent magnet of 20 x 10 x 5 mm.",
        (
            _gyration(
                "20 mm before it", _block_on_axis((0.02, 0.01, 0.005), 1.2, 0.02), BLOCK, "near"
            ),
            _gyration(
                "40 mm before it", _block_on_axis((0.02, 0.01, 0.005), 1.2, 0.04), BLOCK, "far"
            ),
        ),
        converged=True,
    ),
    Case(
        "cycloid",
        "magnets",
        "A proton from rest in crossed fields, after 3.3 of its turns.",
        (
            Check(
                "drifted along x",
                "mm",
                computed(1e3 * _drifted, CYCLOID, 1e-11),
                at_end(0, 0),
                1e3,
            ),
            Check(
                "along y",
                "mm",
                computed(1e3 * _sideways, CYCLOID, 1e-11),
                at_end(0, 1),
                1e3,
            ),
        ),
        (halved("20 ns"),),
    ),
    Case(
        "mirror-bounce",
        "magnets",
        "A proton bounces in a parabolic magnetic mirror: how often, and how far it goes.",
        (
            Check(
                "bounces",
                "kHz",
                computed(1e-3 * _across / 0.3 / (2.0 * math.pi), MIRROR, 2e-3),
                "bounce",
                1e-3,
            ),
            Check(
                "turns back at",
                "mm",
                computed(1e3 * 0.3 * math.sqrt(2.0), MIRROR, 1e-2),
                _turning,
                1e3,
            ),
        ),
        (halved("10 ns"),),
        files=_mirror_map,
        remark="Of leading order in the ratio of gyration radius (4.6 mm) and length (300 mm): "
        "errors of its square, 2e-4, in the bounces, and of its first power in the place, which "
        "depends on the phase of the gyration, are in the published error.",
    ),
    Case(
        "quadrupole-magnet",
        "magnets",
        "A proton of 30 keV swings in an endless quadrupole magnet of 12 T/m.",
        (
            Check(
                "after 0.1 m, of its start",
                "mm",
                computed(math.cos(math.sqrt(_strength) * 0.1), QUADRUPOLE, 3e-4),
                "aside",
                1e3,
            ),
        ),
        converged=True,
    ),
)
