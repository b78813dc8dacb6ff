"""Words for how a run of a sweep may end besides those of a run itself."""

BROKEN = "broken off"
"""The run could not be executed, or its process was lost; the next sweep tries again."""
