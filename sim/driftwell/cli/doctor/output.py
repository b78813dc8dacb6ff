"""Whether the terminal can show the signs of the field."""

from __future__ import annotations

import os
import sys
from collections.abc import Iterator

from driftwell.cli.doctor.line import NOTE, OK, Line

SIGNS = "±µ°"
ENCODING = "PYTHONIOENCODING"


def output() -> Iterator[Line]:
    """The encoding of stdout."""
    encoding = getattr(sys.stdout, "encoding", None) or "ascii"
    try:
        SIGNS.encode(encoding)
    except (UnicodeEncodeError, LookupError):
        yield Line(
            NOTE,
            "output",
            f"{encoding}: error bars are written as +-, other signs as their numbers",
            f"unset {ENCODING}"
            if os.environ.get(ENCODING)
            else "export PYTHONUTF8=1, in a terminal that shows UTF-8",
        )
        return
    yield Line(OK, "output", encoding)
