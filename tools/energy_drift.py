"""How well a static trap's energy account stays closed over a million steps.

    python tools/energy_drift.py [--steps N | --mirrors N] [--scheme NAME]

Eight ions as a string in an ideal Penning trap, shaken by a micrometre: their motion is regular, so
the account tests the stepping and not whether a step can follow a hard encounter. Prints the energy
residual's extremes, and the slope of a straight line through it with its standard error from the
scatter of blocks: bounded and without drift means extremes that do not grow and a slope within a
few of its errors.

With --mirrors one ion flies N times to and fro in the solved field of scenarios/mirror-trap.toml.

The ions' places at rest are those of D. F. V. James, Appl. Phys. B 66 (1998) 181, table 1.
"""

from __future__ import annotations

import argparse
import sys
import tempfile
from pathlib import Path
from typing import Any

import numpy as np

STEP = 20e-9
AXIAL = 50e3
ROUND_TRIP, STEPS_OF_TRIP = 5.9e-6, 1000
"""s, of the ion between the mirrors, about; steps it is followed with."""
PLACES = (0.3180214, 0.9670076, 1.6620616, 2.4758203)
"""In units of the length (e^2 / 4 pi eps0 m omega^2)^(1/3), and the same on the other side."""

SCENARIO = """
title    = "Eight ions in a Penning trap, for the account of their energy"
duration = "{duration!r} s"
seed     = 5

[species.ion]
mass   = "40 u"
charge = "1 e"

[[cloud]]
name    = "ions"
species = "ion"
shape   = {{ kind = "points", positions = [{places}] }}

[[field]]
name     = "magnet"
kind     = "uniform-magnetic"
strength = "1.5 T"

[[field]]
name = "well"
kind = "static-quadrupole"
axial_frequency = {{ species = "ion", value = "50 kHz" }}

[stepping]
step   = "{step!r} s"
scheme = "{scheme}"

[record]
every = "{every!r} s"
"""


def places() -> str:
    """The ions' places as the scenario writes them, each shaken along every axis."""
    from driftwell import constants

    stiffness = 40.0 * constants.ATOMIC_MASS * (2.0 * np.pi * AXIAL) ** 2
    force = constants.COULOMB_CONSTANT * constants.ELEMENTARY_CHARGE**2
    length = (force / stiffness) ** (1.0 / 3.0)
    along = length * np.array([sign * place for place in PLACES for sign in (-1, 1)])
    shaken = np.random.default_rng(5).normal(scale=1e-6, size=(8, 3))
    shaken[:, 2] += along
    return ", ".join(
        "[" + ", ".join(f'"{value!r} m"' for value in row.tolist()) + "]" for row in shaken
    )


class _Quiet:
    """An observer that lets the run go on."""

    def begins(self, choice: Any, plan: Any, particles: Any) -> None:
        return

    def told(self, sentence: str) -> None:
        return

    def goes_on(self, progress: Any) -> bool:
        return True


def trap_scenario(asked: argparse.Namespace, folder: Path) -> tuple[Path, list[str], float]:
    """The string of ions: its file, no settings, and its step, s."""
    duration = asked.steps * STEP
    file = folder / "drift.toml"
    file.write_text(
        SCENARIO.format(
            duration=duration,
            places=places(),
            step=STEP,
            scheme=asked.scheme,
            every=duration / 1000,
        )
    )
    return file, [], STEP


def mirror_scenario(asked: argparse.Namespace) -> tuple[Path, list[str], float]:
    """One ion in the solved field of scenarios/mirror-trap.toml: file, settings, and step, s."""
    duration = asked.mirrors * ROUND_TRIP
    step = ROUND_TRIP / STEPS_OF_TRIP
    file = Path(__file__).resolve().parents[1] / "scenarios" / "mirror-trap.toml"
    settings = [
        f"duration={duration!r} s",
        "cloud.bunch.count=1",
        "cloud.bunch.weight=1",
        f"stepping.step={step!r} s",
        f"stepping.scheme={asked.scheme}",
        f"record.every={duration / 1000!r} s",
        f"question.round trips, frequency.every={duration / 1000!r} s",
    ]
    return file, settings, step


def main() -> int:
    """Run, fit, print."""
    from driftwell.record.reader import open_run
    from driftwell.run import run
    from driftwell.scenario.read import read_scenario

    parser = argparse.ArgumentParser(description=__doc__.split("\n\n")[0])
    parser.add_argument("--steps", type=int, default=1_000_000)
    parser.add_argument("--scheme", default="kick-drift-kick")
    parser.add_argument("--mirrors", type=int, metavar="N", help="N round trips in mirror-trap")
    asked = parser.parse_args()
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        if asked.mirrors:
            file, settings, step = mirror_scenario(asked)
        else:
            file, settings, step = trap_scenario(asked, folder)
        result = run(read_scenario(file, settings), folder / "run", _Quiet())
        ledger = open_run(folder / "run").ledger
    residual, third_law = ledger["energy_residual"][1:], ledger["third_law_residual"]
    steps = ledger["time"][1:] / step
    # blocks of 50 records: their slopes' scatter is the error of the whole line's slope
    blocks = residual.reshape(20, -1).mean(axis=1)
    middles = steps.reshape(20, -1).mean(axis=1)
    (slope, _), covariance = np.polyfit(middles, blocks, 1, cov=True)
    halves = [np.abs(half).max() for half in np.split(residual, 2)]
    print(f"{asked.scheme}, {result.outcome.steps} steps of {step:g} s")
    print(f"energy residual, largest in each half: {halves[0]:.2e}, {halves[1]:.2e}")
    print(f"slope per million steps: {slope * 1e6:.1e} +- {np.sqrt(covariance[0, 0]) * 1e6:.1e}")
    print(f"third-law residual, largest: {third_law.max():.1e}")
    return 0


if __name__ == "__main__":
    sys.exit(main())
