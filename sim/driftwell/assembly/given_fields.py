"""Fields that are given as functions from Python, looked at where charges begin."""

from __future__ import annotations

import numpy as np

from driftwell.errors import ScenarioError
from driftwell.fields.from_python.flux import FluxFromPython
from driftwell.fields.from_python.potential import PotentialFromPython
from driftwell.particles.state import Particles
from driftwell.scenario.model import Scenario

LOOKED_AT = 64
"""Places, at the most."""


def check_given(scenario: Scenario, everyone: Particles) -> None:
    """See that given fields are there, and are fields: their force has a potential, no sources.

    Raises ScenarioError where one is missing or is wrong where charges begin.
    """
    count = len(everyone)
    chosen = np.unique(np.linspace(0, max(count - 1, 0), LOOKED_AT).astype(int))[:count]
    for field in scenario.field:
        if isinstance(field, PotentialFromPython | FluxFromPython):
            field.given()
            wrong = field.disagreement(everyone.position[:, chosen])
            if wrong:
                raise ScenarioError(
                    f'[[field]] "{field.name}": the function "{field.function}": {wrong}'
                )
