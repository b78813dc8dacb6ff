"""Mean drag of a gas by the ions' mobility: G = |q| / (m K).

K may be given at the gas's own density, or reduced to the standard one,

    K = K_0 (101325 Pa / p) (T / 273.15 K)                                                  (1)

With diffusion the noise is that of the gas's temperature: D = K k T / |q| (Einstein's relation),
right where the field is weak (the ions hardly hotter than the gas).

References
----------
E. A. Mason and E. W. McDaniel, Transport Properties of Ions in Gases (1988), chapter 1 (from
memory).
"""

from __future__ import annotations

from typing import Literal, Self

from driftwell.constants import BOLTZMANN
from driftwell.forms import (
    Mobility,
    Positive,
    Pressure,
    Temperature,
    TrueOrFalse,
    Velocity,
    checked,
    key,
    refuse,
    spelled,
)
from driftwell.forms.body import Body
from driftwell.processes.form import PackedProcess, ProcessForm
from driftwell.processes.linear import LINEAR

STANDARD_PRESSURE, STANDARD_TEMPERATURE = 101325.0, 273.15
"""Pa and K."""


class MobilityDrag(ProcessForm):
    """Mean drag of a gas by the ions' mobility in it."""

    kind: Literal["mobility-drag"]
    mobility: Positive[Mobility] | None = key(
        "mobility K at the density of the gas", default=None, example="0.25 m^2/(V s)"
    )
    reduced_mobility: Positive[Mobility] | None = key(
        "mobility K0 at 101325 Pa and 273.15 K, instead of `mobility`",
        default=None,
        example="2.28 cm^2/(V s)",
    )
    pressure: Positive[Pressure] | None = key(
        "pressure of the gas, for `reduced_mobility`", default=None, example="1 mbar"
    )
    temperature: Positive[Temperature] = key(
        "temperature of the gas, for `reduced_mobility` and `diffusion`", default=300.0
    )
    flow: tuple[Velocity, Velocity, Velocity] = key(
        "mean velocity of the gas", default=(0.0, 0.0, 0.0)
    )
    diffusion: TrueOrFalse = key(
        "whether the ions diffuse as their temperature makes them", default=False
    )

    @checked
    def _one_mobility(self) -> Self:
        if (self.mobility is None) == (self.reduced_mobility is None):
            raise refuse("needs either `mobility` or `reduced_mobility`")
        if (self.reduced_mobility is None) != (self.pressure is None):
            raise refuse("`reduced_mobility` and `pressure` go together")
        return self

    def actual(self) -> float:
        """K at the density of the gas, m^2/(V s)."""
        if self.mobility is not None:
            return self.mobility
        assert self.reduced_mobility is not None
        assert self.pressure is not None
        density = (self.pressure / STANDARD_PRESSURE) * (STANDARD_TEMPERATURE / self.temperature)
        return self.reduced_mobility / density

    def is_continuous(self) -> bool:
        return True

    def packed(self, body: Body) -> PackedProcess:
        agitation = BOLTZMANN * self.temperature / body.mass if self.diffusion else 0.0
        damping = abs(body.charge) / (body.mass * self.actual())
        return PackedProcess(LINEAR, (damping, agitation), flow=self.flow)

    def words(self) -> str:
        parts = [f"drag of a gas by a mobility of {spelled(self.actual(), 'm^2/(V s)')}"]
        if any(self.flow):
            parts.append(f"flowing at ({', '.join(f'{each:.6g}' for each in self.flow)}) m/s")
        if self.diffusion:
            parts.append(f"diffusion at {spelled(self.temperature, 'K')}")
        return ", ".join(parts)
