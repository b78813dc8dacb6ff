"""A heat bath: friction and noise of one temperature, for preparing equilibria.

Velocities follow the Ornstein-Uhlenbeck process dv = -v dt / tau + (2 k T / (m tau))^(1/2) dW,
solved exactly over each step (linear.py). It is a means to reach an
equilibrium, not a model of a gas.

References
----------
G. E. Uhlenbeck and L. S. Ornstein, Phys. Rev. 36 (1930) 823 (from memory).
"""

from __future__ import annotations

from typing import Literal

from driftwell.constants import BOLTZMANN
from driftwell.forms import NonNegative, Positive, Temperature, Time, key, spelled
from driftwell.forms.body import Body
from driftwell.processes.form import PackedProcess, ProcessForm
from driftwell.processes.linear import LINEAR


class Thermostat(ProcessForm):
    """Friction and noise that bring charges to a temperature."""

    kind: Literal["thermostat"]
    temperature: NonNegative[Temperature] = key("temperature to reach", example="10 mK")
    relaxation_time: Positive[Time] = key(
        "time in which a velocity decays to 1/e of itself", example="50 us"
    )

    def is_continuous(self) -> bool:
        return True

    def packed(self, body: Body) -> PackedProcess:
        agitation = BOLTZMANN * self.temperature / body.mass
        return PackedProcess(LINEAR, (1.0 / self.relaxation_time, agitation))

    def words(self) -> str:
        return (
            f"heat bath of {spelled(self.temperature, 'K')}, "
            f"relaxation in {spelled(self.relaxation_time, 's')}"
        )
