"""Particles as named arrays, the form in which a segment keeps the state at its end."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import fields
from typing import Any

import numpy as np
from numpy.typing import NDArray

from driftwell.particles.state import Particles

_GROUP = "particles"


def particles_state(particles: Particles) -> dict[str, NDArray[Any]]:
    """The arrays of `particles`, by name, for :meth:`driftwell.record.writer.RunWriter.seal`."""
    return {f"{_GROUP}/{each.name}": getattr(particles, each.name) for each in fields(Particles)}


def particles_of(state: Mapping[str, NDArray[Any]]) -> Particles:
    """The particles in a state that was read back, bit for bit, in fresh contiguous arrays."""
    return Particles(
        **{
            each.name: np.array(state[f"{_GROUP}/{each.name}"], order="C")
            for each in fields(Particles)
        }
    )
