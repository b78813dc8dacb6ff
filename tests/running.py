"""Scenarios carried out by tests: stated as tables, written as TOML, run as a user's are."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from driftwell.particles.state import Particles
from driftwell.record.reader import Run, open_run
from driftwell.run import Progress, run
from driftwell.scenario.read import read_scenario
from driftwell.stepping.schedule import Schedule
from driftwell.stepping.step_choice import StepChoice
from tests.scenario.good_scenarios import toml_file

Floats = NDArray[np.float64]


class Unwatched:
    """An observer that shows nothing and never asks to stop."""

    def begins(self, choice: StepChoice, plan: Schedule, particles: Particles) -> None:
        """Nothing to show."""

    def told(self, sentence: str) -> None:
        """Nothing to show."""

    def goes_on(self, progress: Progress) -> bool:
        """On to the end."""
        return True


def carried_out(folder: Path, duration: float, ending: str = "finished", **sections: Any) -> Run:
    """The run of a scenario given by its sections; `duration` in s.

    Each call leaves a folder of its own in `folder`. Unless said otherwise there are two records,
    at the start and at the end. The run must come to the `ending` expected of it.
    """
    number = len(list(folder.glob("*.toml")))
    path = folder / f"scenario{number}.toml"
    whole = quantity(duration, "s")
    table = {"title": "a check", "duration": whole, "record": {"every": whole}, **sections}
    path.write_text(toml_file(table))
    result = run(read_scenario(path), folder / f"run{number}", Unwatched())
    assert ending == result.outcome.word, result.outcome.sentence
    return open_run(result.folder)


def quantity(value: float, unit: str) -> str:
    """A number and its unit, to the last bit."""
    return f"{float(value)!r} {unit}"


def vector(values: ArrayLike, unit: str) -> list[str]:
    """Numbers with a unit."""
    return [quantity(value, unit) for value in np.asarray(values, dtype=np.float64)]


def species(mass: float, charge: str = "1 e") -> dict[str, str]:
    """A kind of particle; `mass` in kg."""
    return {"mass": quantity(mass, "kg"), "charge": charge}


def points(
    name: str, kind: str, position: ArrayLike, velocity: ArrayLike | None = None
) -> dict[str, Any]:
    """A cloud of charges at listed places (n, 3), m, with velocities (n, 3), m/s, or at rest."""
    places = np.asarray(position, dtype=np.float64).reshape(-1, 3)
    shape: dict[str, Any] = {"kind": "points", "positions": [vector(row, "m") for row in places]}
    if velocity is not None:
        speeds = np.asarray(velocity, dtype=np.float64).reshape(-1, 3)
        shape["velocities"] = [vector(row, "m/s") for row in speeds]
    return {"name": name, "species": kind, "shape": shape}


@dataclass(frozen=True, slots=True)
class Track:
    """What was recorded of every charge: time (k,), position and velocity (k, n, 3)."""

    time: Floats
    position: Floats
    velocity: Floats


def track(found: Run) -> Track:
    """The trajectories of a run that recorded all its charges."""
    time, state = found.trajectory
    return Track(time, state[:, :, :3], state[:, :, 3:])


def answers(found: Run) -> Sequence[float]:
    """The answers in their order."""
    return [answer.value for answer in found.answers]
