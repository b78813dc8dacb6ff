"""The machine's processor, by name."""

from __future__ import annotations

import platform
from pathlib import Path


def processor() -> str:
    """The processor's name, as the system tells it."""
    listing = Path("/proc/cpuinfo")
    if listing.is_file():
        for line in listing.read_text(errors="replace").splitlines():
            if line.startswith("model name"):
                return line.partition(":")[2].strip()
    return platform.processor() or platform.machine()
