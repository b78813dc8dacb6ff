"""Gas, drag and laser light: rates, mobilities, temperatures."""

from __future__ import annotations

import math

from scipy.constants import atomic_mass, e, epsilon_0, hbar, k

from driftwell.record.reader import Run
from validation.case import FROM_MEMORY, Case, Check, Published, Reading, computed, halved
from validation.reading import at_end
from validation.wells import well

LANGEVIN = "P. Langevin (1905); G. Gioumousis, D. P. Stevenson, J. Chem. Phys. 29 (1958) 294"
MASON = (
    "E. A. Mason, E. W. McDaniel, Transport Properties of Ions in Gases (1988) ch. 5 and 6; the "
    "correction for the ratio of masses by a Monte Carlo integration of its own"
)
OSCILLATOR = "S. Chandrasekhar, Rev. Mod. Phys. 15 (1943) 1, sec. II"
STOKES = "G. G. Stokes (1851); E. Cunningham's slip by C. N. Davies, Proc. Phys. Soc. 57 (1945) 259"
DOPPLER = (
    "temperature by one laser beam in a trap: D. Leibfried et al., Rev. Mod. Phys. 75 (2003) 281, "
    "sec. II (from memory)"
)

# N2+ in helium: 1e-3 Pa at 300 K
_density = 1e-3 / (k * 300.0)
_mu = atomic_mass * 28.0129 * 4.0026 / (28.0129 + 4.0026)
_polarisability = 4.0 * math.pi * epsilon_0 * 0.205e-30
_capture = e / (2.0 * epsilon_0) * math.sqrt(_polarisability / _mu)

# 100 u in N2-like gas of 100 Pa, hard spheres
_gas = 100.0 / (k * 300.0)
_reduced = atomic_mass * 100.0 * 28.0134 / 128.0134
_mobility = 3.0 * e / (16.0 * _gas) * math.sqrt(2.0 * math.pi / (_reduced * k * 300.0)) / 1e-18

_gamma = 2e4
_omega1 = math.sqrt((2.0 * math.pi * 20e3) ** 2 - (_gamma / 2.0) ** 2)
_ringing = math.exp(-_gamma * 1e-4 / 2.0) * (
    math.cos(_omega1 * 1e-4) + _gamma / (2.0 * _omega1) * math.sin(_omega1 * 1e-4)
)

# a droplet of 2 um in air: slip by Davies, 1 + Kn (1.257 + 0.4 exp(-1.1/Kn)), Kn = 2 lambda/d
_knudsen = 2.0 * 68e-9 / 2e-6
_slip = 1.0 + _knudsen * (1.257 + 0.400 * math.exp(-1.10 / _knudsen))
_droplet = 100.0 * e * 1e5 * _slip / (3.0 * math.pi * 18.1e-6 * 2e-6)

_width = 2.0 * math.pi * 20e6
_limit = hbar * _width / (8.0 * k) * (1.0 + 1.0 / 3.0) * (1.0 + 0.01 + 1.0)


def _warmth(run: Run) -> Reading:
    """Temperature along z from mean square velocities about the mean, of the last half."""
    moments = run.moments("ions")
    late = moments.time > 0.5 * moments.time[-1]
    square = float(moments.covariance[late, 5, 5].mean())
    return Reading(40.0 * atomic_mass * square / k)


def _inverse_lifetime(run: Run) -> Reading:
    value = next(each for each in run.answers if each.name == "until captured")
    assert value.error is not None
    return Reading(1.0 / value.value, value.error / value.value**2)


CASES: tuple[Case, ...] = (
    Case(
        "langevin-capture",
        "gas",
        "Molecular ions in thin helium, each lost at its first capture: the mean time of it.",
        (
            Check(
                "rate of capture",
                "1/s",
                Published(
                    _density * _capture,
                    1e-3 * _density * _capture,
                    LANGEVIN + "; polarisability of helium from memory, and the scenario's own",
                    "computed",
                ),
                _inverse_lifetime,
            ),
        ),
        (halved("8 us"),),
    ),
    Case(
        "ion-mobility",
        "gas",
        "Ions of 100 u drift through 100 Pa of a gas of 28 u, as hard spheres, in 100 V/m.",
        (
            Check(
                "mobility",
                "m^2/(V s)",
                Published(0.99678 * _mobility, 0.0024 * _mobility, MASON, "computed"),
                "mobility",
            ),
        ),
        (halved("40 ns"),),
    ),
    Case(
        "warm-oscillator",
        "gas",
        "Ions in a trap with friction and noise: how far they wander, and how their "
        "mean rings down.",
        (
            Check(
                "rms place",
                "mm",
                computed(
                    1e3 * math.sqrt(k * 300.0 / (100.0 * atomic_mass)) / (2.0 * math.pi * 20e3),
                    OSCILLATOR,
                ),
                "wander",
                1e3,
            ),
            Check("temperature", "K", computed(300.0, OSCILLATOR), "warmth"),
            Check(
                "mean after 0.1 ms, of its start",
                "1",
                computed(_ringing, OSCILLATOR),
                "mean place",
                1.0 / 0.02,
            ),
        ),
        (halved("0.4 us"),),
        seeds=3,
    ),
    Case(
        "charged-droplet",
        "gas",
        "A droplet of 2 um and 100 e moves through air in 1 kV/cm.",
        (
            Check(
                "speed",
                "um/s",
                Published(1e6 * _droplet, 1e-3 * 1e6 * _droplet, STOKES, FROM_MEMORY),
                at_end(0, 5),
                1e6,
            ),
        ),
        (halved("4 us"),),
    ),
    Case(
        "doppler-limit",
        "gas",
        "Ions of 40 u in a well, each cooled by one weak laser beam half a linewidth "
        "below resonance.",
        (
            Check(
                "temperature along the beam",
                "mK",
                Published(1e3 * _limit, 1e3 * _limit * 0.005, DOPPLER, FROM_MEMORY),
                _warmth,
                1e3,
            ),
        ),
        (halved("20 ns"),),
        files=lambda folder: well(folder / "well.csv", 40.0 * atomic_mass, 2e5, 2e5, 1e-3, 1e-4),
        seeds=3,
        remark="The formula is of first order in recoil over linewidth and trap "
        "frequency over linewidth: "
        "0.5 % is in the published error.",
    ),
)
