"""Kinetic energy of a cloud's charges: its mean and its spread, of one real particle, in eV.

The spread is the standard deviation, or the full width at half maximum of the peak the energies
make (:mod:`driftwell.answers.peak_width`).
"""

from __future__ import annotations

from typing import ClassVar, Literal, Self

import numpy as np
from numpy.typing import NDArray

from driftwell.answers.charges import Charges
from driftwell.answers.evidence import CloudFacts, Moments
from driftwell.answers.kinds.moment_question import MomentQuestion
from driftwell.answers.moments import kinetic_energies
from driftwell.answers.peak_width import full_width
from driftwell.answers.sampling import mean_error
from driftwell.constants import ELEMENTARY_CHARGE
from driftwell.forms import checked, key, refuse

Floats = NDArray[np.float64]


class KineticEnergy(MomentQuestion):
    """Mean kinetic energy, drift of the cloud included."""

    unit: ClassVar[str] = "eV"
    ask: Literal["kinetic-energy"] = key("mean kinetic energy, motion of the whole cloud included")

    def least_charges(self) -> int:
        return 1

    def of_charges(self, charges: Charges) -> float:
        return float(_energies(charges).mean())

    def of_moments(self, moments: Moments, cloud: CloudFacts) -> Floats:
        return moments.kinetic_energy / ELEMENTARY_CHARGE

    def error_of(self, charges: Charges) -> float | None:
        return mean_error(_energies(charges))

    def words(self) -> str:
        return f'mean kinetic energy of cloud "{self.of}" {self.when()}'


class KineticEnergySpread(MomentQuestion):
    """Spread of the kinetic energy from charge to charge."""

    unit: ClassVar[str] = "eV"
    ask: Literal["kinetic-energy-spread"] = key("spread of the kinetic energy")
    statistic: Literal["rms", "fwhm"] = key(
        "rms: standard deviation; fwhm: full width at half maximum", default="rms"
    )

    @checked
    def _width_of_charges(self) -> Self:
        if self.statistic == "fwhm" and self.over is not None:
            raise refuse('`over` knows no "fwhm": that needs every charge; give `at`')
        return self

    def least_charges(self) -> int:
        return 2 if self.statistic == "rms" else 20

    def error_of(self, charges: Charges) -> float | None:
        if self.statistic == "fwhm":
            return full_width(_energies(charges))[1]
        return super().error_of(charges)

    def of_charges(self, charges: Charges) -> float:
        if self.statistic == "fwhm":
            return full_width(_energies(charges))[0]
        return float(_energies(charges).std())

    def of_moments(self, moments: Moments, cloud: CloudFacts) -> Floats:
        return np.asarray(np.sqrt(moments.kinetic_variance) / ELEMENTARY_CHARGE)

    def words(self) -> str:
        which = "spread" if self.statistic == "rms" else "full width at half maximum"
        return f'{which} of kinetic energy of cloud "{self.of}" {self.when()}'


def _energies(charges: Charges) -> Floats:
    return kinetic_energies(charges.velocity, charges.cloud.mass) / ELEMENTARY_CHARGE
