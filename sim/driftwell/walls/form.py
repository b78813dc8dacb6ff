"""What every kind of wall and detector declares, and the numbers it packs for compiled code."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from driftwell.forms import Form, Name, key

PASS = 0
"""The surface only records."""
ABSORB = 1
REFLECT = 2
EFFECT = {"absorb": ABSORB, "reflect": REFLECT}


@dataclass(frozen=True, slots=True)
class PackedSurface:
    """One surface as numbers for compiled code: kind, effect and parameters."""

    kind: int
    effect: int
    parameters: tuple[float, ...]


class WallForm(Form):
    """Base of all walls."""

    name: Name = key("what the wall is called in messages and results")
    effect: Literal["absorb", "reflect"] = key(
        "absorb: the charge is lost; reflect: it bounces without loss of energy", default="absorb"
    )

    def packed(self) -> PackedSurface:
        """The wall as numbers for compiled code."""
        raise TypeError(f"{type(self).__name__} must say how it is packed")

    def closed(self) -> bool:
        """Whether the wall encloses a space that every charge must be born in."""
        return False

    def words(self) -> str:
        """One sentence for `driftwell check`."""
        raise TypeError(f"{type(self).__name__} must describe itself")


class DetectorForm(Form):
    """Base of all detectors."""

    name: Name = key("what the detector is called in messages and results")

    def packed(self) -> PackedSurface:
        """The detector as numbers for compiled code."""
        raise TypeError(f"{type(self).__name__} must say how it is packed")

    def words(self) -> str:
        """One sentence for `driftwell check`."""
        raise TypeError(f"{type(self).__name__} must describe itself")
