"""What a run is to be thought of afterwards, in words: each with its figure and what to change."""

from driftwell.judgement.finding import Finding
from driftwell.judgement.table import judged

__all__ = ["Finding", "judged"]
