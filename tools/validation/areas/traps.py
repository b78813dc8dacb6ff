"""Single charges and small clouds in ideal traps: frequencies, stability, shifts."""

from __future__ import annotations

import math
from pathlib import Path

import numpy as np
from scipy.constants import atomic_mass, c, e, epsilon_0
from scipy.integrate import solve_ivp

from driftwell.record.reader import Run
from validation import mirrors
from validation.case import COMPUTED, Axis, Case, Check, Published, Reading, computed, halved
from validation.reading import at_end
from validation.wells import well

K = 1.0 / (4.0 * math.pi * epsilon_0)
ION = 6.6359e-26

MATHIEU = (
    "Floquet exponent of Mathieu's equation: N. W. McLachlan, Theory and Application of Mathieu "
    "Functions (1947); DLMF ch. 28"
)
PAUL = (
    "R. F. Wuerker, H. Shelton, R. V. Langmuir, J. Appl. Phys. 30 (1959) 342; W. Paul, Rev. Mod. "
    "Phys. 62 (1990) 531"
)
PENNING = "L. S. Brown, G. Gabrielse, Rev. Mod. Phys. 58 (1986) 233"
KINGDON = (
    "K. H. Kingdon, Phys. Rev. 21 (1923) 408; R. D. Knight, Appl. Phys. Lett. 38 (1981) 221; "
    "the field as it stands there"
)
KOHN = "generalised Kohn theorem of a harmonic trap: J. F. Dobson, Phys. Rev. Lett. 73 (1994) 2244"
PAIR = (
    "two ions of unlike mass in one static well: G. Morigi, H. Walther, Eur. "
    "Phys. J. D 13 (2001) 261"
)
IN_CLOUD = (
    "J. B. Jeffries, S. E. Barlow, G. H. Dunn, Int. J. Mass Spectrom. Ion Process. 54 (1983) 169: "
    "the trap's own quadratic equation with the field of a ball of charge (from memory)"
)
HOMOTHETIC = "R. A. Battye, G. W. Gibbons, P. M. Sutcliffe, Proc. R. Soc. A 459 (2003) 911"


def floquet(a: float, q: float) -> float:
    """Trace of the map of x'' + (a - 2 q cos 2t) x = 0 over one period pi, halved."""
    columns = [
        solve_ivp(
            lambda t, y: [y[1], -(a - 2.0 * q * math.cos(2.0 * t)) * y[0]],
            (0.0, math.pi),
            start,
            method="DOP853",
            rtol=1e-13,
            atol=1e-15,
        ).y[:, -1]
        for start in ([1.0, 0.0], [0.0, 1.0])
    ]
    return 0.5 * float(columns[0][0] + columns[1][1])


def beta(a: float, q: float) -> float:
    """Secular frequency in units of half the drive's."""
    return math.acos(floquet(a, q)) / math.pi


MATHIEU_Q = (0.2, 0.5, 0.8)
UNSTABLE_Q = 0.912
PAUL_Q = 8.0 * e * 500.0 / (2.49080860338e-25 * 2e-4 * (2.0 * math.pi * 1e6) ** 2)


def _growth(run: Run) -> Reading:
    """Growth by a period of the drive: of |x| between records a whole number of periods apart.

    Beyond the limit x grows by -exp(mu pi) in each; the last records have nothing but that.
    """
    x = np.abs(run.track(0)[1][:, 0])
    return Reading(math.log(float(x[-1] / x[-21])) / 20.0)


def _secular(kind: str, q: float) -> Check:
    return Check(
        f"secular frequency, q = {q:g}",
        "kHz",
        computed(500.0 * beta(0.0, q), MATHIEU, 1e-11),
        f"q of {kind}",
        1e-3,
    )


def _penning() -> tuple[list[float], dict[str, float]]:
    """State after 1 ms and frequencies in an ideal Penning trap, by its closed form."""
    rate = e / ION
    wc, wz = rate * 1.5, math.sqrt(rate * 4e5)
    root = math.sqrt(wc**2 - 2.0 * wz**2)
    plus, minus = 0.5 * (wc + root), 0.5 * (wc - root)
    # x + i y = A exp(-i plus t) + B exp(-i minus t)
    place, speed = 1e-4 + 0.0j, 40.0j
    b = (speed + 1j * plus * place) / (1j * (plus - minus))
    a = place - b
    t = 1e-3
    u = a * np.exp(-1j * plus * t) + b * np.exp(-1j * minus * t)
    state = [u.real, u.imag, 2e-4 * math.cos(wz * t)]
    return state, {k: w / (2.0 * math.pi) for k, w in (("+", plus), ("-", minus), ("z", wz))}


_state, _lines = _penning()


def _two_species(sign: float) -> float:
    """Mode of two ions of 40 u and 50 u along a well in which the first has 200 kHz, kHz."""
    mu = 50.0 / 40.0
    return 200.0 * math.sqrt(1.0 + 1.0 / mu + sign * math.sqrt(1.0 + 1.0 / mu**2 - 1.0 / mu))


QUADRO_Z = math.sqrt(3e7 * e / 8.6e-25) / (2.0 * math.pi)
QUADRO_SPEED = 29857.053223204326
_heavier = 0.25 * (QUADRO_SPEED / c) ** 2 + 0.1875 * (2.0 * math.pi * QUADRO_Z * 5e-3 / c) ** 2
"""What relativity takes from the axial frequency, to first order, of it."""


def _in_cloud() -> dict[str, float]:
    """Shifts (Hz) of an ion's lines in a Penning trap by a ball of 2000 charges of 1.1 mm around it."""
    wc, wz = e * 0.3 / ION, 2.0 * math.pi * 30e3
    push = 2000.0 * K * e**2 / (ION * 1.1e-3**3)

    def lines(by: float) -> dict[str, float]:
        root = math.sqrt(0.25 * wc**2 - 0.5 * wz**2 - by)
        return {"z": math.sqrt(wz**2 - by), "+": 0.5 * wc + root}

    alone, among = lines(0.0), lines(push)
    return {name: (among[name] - alone[name]) / (2.0 * math.pi) for name in alone}


_shifts = _in_cloud()


def _breathing() -> float:
    """Period of s'' = 1/s^2 - s from rest at 1.2, in 1/omega."""
    from scipy.integrate import quad

    start = 1.2
    inner = (-start + math.sqrt(start**2 + 8.0 / start)) / 2.0
    middle, half = 0.5 * (start + inner), 0.5 * (start - inner)

    def integrand(a: float) -> float:
        s = middle + half * math.sin(a)
        kinetic = start**2 / 2.0 + 1.0 / start - s**2 / 2.0 - 1.0 / s
        return half * math.cos(a) / math.sqrt(2.0 * kinetic)

    return 2.0 * float(quad(integrand, -math.pi / 2.0, math.pi / 2.0)[0])


def _stretch(run: Run) -> Reading:
    """Size of the cluster at the end over that at the start."""
    covariance = run.moments("cluster").covariance
    sizes = np.sqrt(covariance[:, 0, 0] + covariance[:, 1, 1] + covariance[:, 2, 2])
    return Reading(float(sizes[-1] / sizes[0]))


def _isotropic(folder: Path) -> None:
    well(folder / "well.csv", ION, 100e3, 100e3, 400e-6, 400e-6)


CASES: tuple[Case, ...] = (
    Case(
        "secular-motion",
        "traps",
        "Three ions of different mass, and so of different q, swing in a linear RF quadrupole.",
        tuple(
            _secular(kind, q)
            for kind, q in zip(("heavy", "middle", "light"), MATHIEU_Q, strict=True)
        ),
        (halved("2 ns"),),
        quick=True,
    ),
    Case(
        "beyond-stability",
        "traps",
        "An ion just beyond the limit q = 0.908046 of a mass filter without DC: how "
        "fast it runs away.",
        (
            Check(
                "growth in a period of the drive",
                "1",
                computed(math.acosh(-floquet(0.0, UNSTABLE_Q)), MATHIEU, 1e-9),
                _growth,
            ),
        ),
        (halved("2 ns"),),
    ),
    Case(
        "hyperbolic-rf-trap",
        "traps",
        "An ion of 150 u in an ideal hyperbolic RF trap of 500 V and 1 MHz.",
        (
            Check(
                "along the axis",
                "kHz",
                computed(500.0 * beta(0.0, PAUL_Q), f"{PAUL}; {MATHIEU}", 1e-10),
                "along",
                1e-3,
            ),
            Check(
                "across",
                "kHz",
                computed(500.0 * beta(0.0, PAUL_Q / 2.0), f"{PAUL}; {MATHIEU}", 1e-10),
                "across",
                1e-3,
            ),
        ),
        (halved("4 ns"),),
    ),
    Case(
        "penning-ion",
        "traps",
        "An ion in an ideal Penning trap: its three frequencies, and where it is "
        "after 1 ms, 554 turns.",
        (
            Check("x after 1 ms", "um", computed(1e6 * _state[0], PENNING), at_end(0, 0), 1e6),
            Check("y after 1 ms", "um", computed(1e6 * _state[1], PENNING), at_end(0, 1), 1e6),
            Check("z after 1 ms", "um", computed(1e6 * _state[2], PENNING), at_end(0, 2), 1e6),
            Check(
                "modified cyclotron",
                "kHz",
                computed(1e-3 * _lines["+"], PENNING),
                "cyclotron",
                1e-3,
            ),
            Check("magnetron", "kHz", computed(1e-3 * _lines["-"], PENNING), "magnetron", 1e-3),
            Check("axial", "kHz", computed(1e-3 * _lines["z"], PENNING), "axial", 1e-3),
        ),
        (halved("4 ns"),),
    ),
    Case(
        "quadro-logarithmic-orbit",
        "traps",
        "An ion circles the axis of an ideal quadro-logarithmic trap and swings along it.",
        (
            Check(
                "along the axis",
                "kHz",
                computed(1e-3 * QUADRO_Z * (1.0 - _heavier), KINGDON),
                "along",
                1e-3,
            ),
            Check(
                "around it",
                "kHz",
                computed(1e-3 * QUADRO_Z * math.sqrt((400.0 / 81.0 - 1.0) / 2.0), KINGDON, 1e-8),
                "around",
                1e-3,
            ),
        ),
        (halved("2 ns"),),
        remark="At 30 km/s relativity is seen: it lowers the axial frequency by "
        "2.77e-9 of itself, which "
        "is in the published value. On the way around it is in the published error.",
    ),
    Case(
        "unlike-pair",
        "traps",
        "Two ions of 40 u and 50 u in one well: both lines of their coupled motion.",
        (
            Check("out of phase", "kHz", computed(_two_species(1.0), PAIR, 1e-6), "stretch", 1e-3),
            Check("in phase", "kHz", computed(_two_species(-1.0), PAIR, 1e-6), "together", 1e-3),
        ),
        (halved("10 ns"),),
        remark="The amplitude of 5 nm shifts the lines by parts of 1e-6; so much is "
        "in the published error.",
    ),
    Case(
        "whole-cloud-swings",
        "traps",
        "A warm cloud of 60 ions in a harmonic well, let go off its middle: it "
        "swings as one ion does.",
        (Check("frequency", "kHz", computed(100.0, KOHN), "swing", 1e-3),),
        (halved("20 ns"),),
        files=_isotropic,
    ),
    Case(
        "breathing-cluster",
        "traps",
        "Four ions, the tetrahedron they rest in stretched to 1.2 times: after one "
        "period it is so again.",
        (
            Check(
                "size over that at the start",
                "1",
                computed(1.0, HOMOTHETIC + "; the period by quadrature"),
                _stretch,
            ),
        ),
        (halved("20 ns"),),
        files=_isotropic,
        settings=(f"duration={_breathing() / (2.0 * math.pi * 100e3)!r} s",),
    ),
    Case(
        "ball-image-shift",
        "traps",
        "A packet of 1e6 charges swings in a well inside an earthed ball: its own image slows it.",
        (
            Check(
                "shift",
                "Hz",
                Published(
                    50e3
                    * (
                        math.sqrt(
                            1.0
                            - K
                            * e**2
                            * 1e6
                            / (100.0 * atomic_mass * 5e-3**3 * (2.0 * math.pi * 50e3) ** 2)
                        )
                        - 1.0
                    ),
                    1e-4,
                    "image in a sphere, for small distances from its middle: J. D. "
                    "Jackson, Classical "
                    "Electrodynamics (3rd ed.) sec. 2.2; worked out here",
                    COMPUTED,
                ),
                "shift",
            ),
        ),
        files=lambda folder: well(
            folder / "well.csv", 100.0 * atomic_mass, 50e3, 50e3, 200e-6, 200e-6
        ),
        converged=True,
    ),
    Case(
        "ions-in-cloud",
        "traps",
        "Twenty ions in a Penning trap, inside a ball of 2000 others that stay in their places: "
        "how its charge shifts the lines of their motion.",
        tuple(
            Check(
                name,
                "Hz",
                computed(_shifts[line], IN_CLOUD, 1e-9),
                name,
            )
            for name, line in (("along the axis", "z"), ("modified cyclotron", "+"))
        ),
        (
            halved("0.2 us"),
            Axis("grain", ("cloud.ball.count=1000", "cloud.ball.weight=2")),
            Axis("softening", ("coulomb.softening=0.1 mm",)),
        ),
        seeds=3,
        remark="The formula is for charge spread evenly. What the grain of 2000 charges does is seen "
        "from other seeds, from half as many of twice the charge, and from twice the softening.",
    ),
    Case(
        "self-bunching",
        "traps",
        "A bunch flies to and fro between mirrors whose period falls or grows with the energy: its "
        "own charge spreads it or holds it together. Where one turns into the other.",
        (),
        files=mirrors.files,
        measured=mirrors.measured,
        curve=mirrors.curve,
    ),
)
