"""What cases have found, kept as JSON beside their runs until it is found anew."""

from __future__ import annotations

import json
from collections.abc import Sequence
from dataclasses import asdict, dataclass
from pathlib import Path

from validation.case import Found, Published

FILE = "found.json"


@dataclass(frozen=True, slots=True)
class Result:
    """A case that was carried out.

    digest : of what was done
    seconds : how long it took
    version : of driftwell
    """

    case: str
    digest: str
    seconds: float
    version: str
    found: tuple[Found, ...]


def keep(folder: Path, result: Result) -> None:
    """Write a result into its case's folder, in one piece."""
    made = folder / f"{FILE}.part"
    made.write_text(json.dumps(asdict(result), indent=1) + "\n")
    made.replace(folder / FILE)


def kept(folder: Path, digest: str) -> Result | None:
    """The result in a case's folder, where it is of this digest."""
    try:
        data = json.loads((folder / FILE).read_text())
        if data["digest"] != digest:
            return None
        found = tuple(
            Found(**{**each, "published": Published(**each["published"])}) for each in data["found"]
        )
        return Result(**{**data, "found": found})
    except (OSError, ValueError, KeyError, TypeError):
        return None


def beyond(results: Sequence[Result], bars: float) -> list[tuple[str, Found]]:
    """Checks farther from their published value than so many error bars, with their case."""
    return [
        (result.case, each)
        for result in results
        for each in result.found
        if not abs(each.bars) <= bars
    ]
