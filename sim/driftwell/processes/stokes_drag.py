"""Drag of a viscous gas on small spheres: Stokes's law with the slip correction.

    m G = 3 pi eta d / C,   C = 1 + Kn (1.257 + 0.400 exp(-1.10 / Kn)),   Kn = 2 lambda / d  (1)

for spheres of diameter d in a gas of viscosity eta and mean free path lambda; right while the
Reynolds number rho v d / eta is well below 1.

References
----------
E. Cunningham, Proc. R. Soc. A 83 (1910) 357; C. N. Davies, Proc. Phys. Soc. 57 (1945) 259: the
numbers of (1) (both from memory).
"""

from __future__ import annotations

import math
from typing import Literal

from driftwell.constants import BOLTZMANN
from driftwell.forms import (
    Length,
    NonNegative,
    Positive,
    Temperature,
    TrueOrFalse,
    Velocity,
    Viscosity,
    key,
    spelled,
)
from driftwell.forms.body import Body
from driftwell.processes.form import PackedProcess, ProcessForm
from driftwell.processes.linear import LINEAR


class StokesDrag(ProcessForm):
    """Drag of a viscous gas on charged droplets or dust."""

    kind: Literal["stokes-drag"]
    diameter: Positive[Length] = key("diameter of the spheres", example="10 um")
    viscosity: Positive[Viscosity] = key("viscosity of the gas", example="18.1 uPa s")
    mean_free_path: NonNegative[Length] = key(
        "mean free path in the gas, for the slip correction; 0: none", default=0.0, example="68 nm"
    )
    flow: tuple[Velocity, Velocity, Velocity] = key("velocity of the gas", default=(0.0, 0.0, 0.0))
    diffusion: TrueOrFalse = key(
        "whether the spheres diffuse as the temperature makes them", default=False
    )
    temperature: Positive[Temperature] = key(
        "temperature of the gas, for `diffusion`", default=300.0
    )

    def slip(self) -> float:
        """C of equation (1)."""
        knudsen = 2.0 * self.mean_free_path / self.diameter
        if knudsen == 0.0:
            return 1.0
        return 1.0 + knudsen * (1.257 + 0.4 * math.exp(-1.1 / knudsen))

    def is_continuous(self) -> bool:
        return True

    def packed(self, body: Body) -> PackedProcess:
        agitation = BOLTZMANN * self.temperature / body.mass if self.diffusion else 0.0
        friction = 3.0 * math.pi * self.viscosity * self.diameter / self.slip()
        return PackedProcess(LINEAR, (friction / body.mass, agitation), flow=self.flow)

    def words(self) -> str:
        parts = [
            f"drag on spheres of {spelled(self.diameter, 'm')} in a gas of viscosity "
            f"{spelled(self.viscosity, 'Pa s')}, slip correction {self.slip():.6g}"
        ]
        if any(self.flow):
            parts.append(f"flowing at ({', '.join(f'{each:.6g}' for each in self.flow)}) m/s")
        if self.diffusion:
            parts.append(f"diffusion at {spelled(self.temperature, 'K')}")
        return ", ".join(parts)
