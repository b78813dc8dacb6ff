"""More charges of less weight each, at the same total charge, as settings beside the scenario."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

from driftwell.forms.wording import name_text
from driftwell.particles.cloud import Cloud
from driftwell.particles.source import Source
from driftwell.particles.species import bodies
from driftwell.particles.state import LARGEST_COUNT
from driftwell.scenario.model import Scenario

FACTOR = 2.0
LEAST_FACTOR = 1.2
"""Less than this times as many charges tell nothing."""


@dataclass(frozen=True, slots=True)
class Finer:
    """All clouds and sources of macro-charges, made of more of them.

    settings : that do it; none where nothing can be made finer
    left : what is left of the weight, of the coarsest part; 0 where all are real charges now
    factor : how many times as many charges there are, of all together
    kept : names of what has macro-charges and cannot be made finer
    """

    settings: tuple[str, ...]
    left: float
    factor: float
    kept: tuple[str, ...]


def finer(scenario: Scenario, folder: Path) -> Finer:
    """Half the weight, but no less than one real charge each."""
    known = bodies(scenario.species)
    setting = scenario.setting(folder)
    settings: list[str] = []
    kept: list[str] = []
    left = 0.0
    before = after = 0.0
    parts: list[Cloud | Source] = [*scenario.cloud, *scenario.source]
    for part in parts:
        if isinstance(part, Cloud):
            amount, section = part.amount(known, folder), "cloud"
        else:
            amount, section = part.amount(setting), "source"
        factor = min(FACTOR, amount.weight)
        before += amount.count
        after += amount.count
        if factor <= 1.0:
            continue
        more = None if factor < LEAST_FACTOR else _more(part, section, factor)
        if more is None or factor * amount.count > LARGEST_COUNT:
            kept.append(part.name)
            continue
        settings += more
        after += (factor - 1.0) * amount.count
        if amount.weight > FACTOR:
            left = max(left, 1.0 / factor)
    return Finer(tuple(settings), left, after / max(before, 1.0), tuple(kept))


def _more(part: Cloud | Source, section: str, factor: float) -> list[str] | None:
    """The settings that make one cloud or source finer; None where it fixes its charges itself."""
    fixed = part.shape.fixes_count() if isinstance(part, Cloud) else part.emitter.fixes_births()
    if fixed:
        return None
    key = f"{section}.{name_text(part.name)}"
    settings = []
    weight = part.weight
    if part.count is not None:
        count = round(part.count * factor)
        settings.append(f"{key}.count={count}")
        if weight is not None:
            weight *= part.count / count
    elif weight is not None:
        weight /= factor
    if weight is not None:
        settings.append(f"{key}.weight={weight!r}")
    return settings
