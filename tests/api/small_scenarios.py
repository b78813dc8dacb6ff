"""Small scenarios built in code. All settings are invented."""

from __future__ import annotations

from typing import Any

from driftwell import Scenario


def trap(count: int = 8, duration: str = "20 us", **sections: Any) -> Scenario:
    """Ions in a rod trap, which takes well below a second once compiled."""
    return (
        Scenario(title="Ions in a trap", duration=duration, seed=7, **sections)
        .species("ion", mass="138 u", charge="1 e")
        .cloud(
            "load",
            species="ion",
            count=count,
            shape={"kind": "gaussian", "sigma": "50 um"},
            motion={"temperature": "10 K"},
        )
        .field(
            "caps", kind="static-quadrupole", axial_frequency={"species": "ion", "value": "80 kHz"}
        )
        .wall("bore", kind="cylinder", radius="1 mm")
        .stepping(step="20 ns")
        .record(every="1 us")
        .question("held", ask="fraction-left", of="load")
        .question("warmth", ask="temperature", of="load", axis="z")
    )


def rods(scenario: Scenario) -> Scenario:
    """With the field of the rods."""
    return scenario.field(
        "rods",
        kind="rf-quadrupole",
        radius="3.5 mm",
        voltage={"amplitude": "180 V", "frequency": "1.1 MHz"},
    )
