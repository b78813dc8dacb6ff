"""What is said while code is compiled."""

from __future__ import annotations

from driftwell.cli.terminal.printing import tell


def tell_of_compiling() -> None:
    """Say why nothing moves yet."""
    tell("compiling for this machine, once for each version: up to a minute")
