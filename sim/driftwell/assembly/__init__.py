"""A scenario's parts put together, ready to be moved through time."""

from driftwell.assembly.parts import Assembly, assembled
from driftwell.assembly.remarks import remarks

__all__ = ["Assembly", "assembled", "remarks"]
