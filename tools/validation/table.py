"""All cases, by area."""

from __future__ import annotations

from validation.areas import (
    beams,
    crystals,
    electrodes,
    gas,
    magnets,
    plasmas,
    relativity,
    sources,
    statics,
    traps,
)
from validation.case import Case

CASES: tuple[Case, ...] = (
    *statics.CASES,
    *traps.CASES,
    *crystals.CASES,
    *beams.CASES,
    *plasmas.CASES,
    *sources.CASES,
    *gas.CASES,
    *electrodes.CASES,
    *magnets.CASES,
    *relativity.CASES,
)
