"""Pictures of a study, drawn for its folder, and where they are."""

from __future__ import annotations

import logging
from collections.abc import Callable, Sequence
from pathlib import Path

from driftwell.cli.terminal.printing import answer, tell
from driftwell.errors import DriftwellError


def drawn(draw: Callable[[], Sequence[Path]], said: Callable[[Sequence[Path]], str]) -> bool:
    """Draw, and say where the pictures are, if there are any; whether that could be done."""
    logging.getLogger("matplotlib").setLevel(logging.ERROR)  # its caches are not the user's concern
    try:
        made = draw()
    except DriftwellError as error:
        tell(str(error))
        return False
    return not made or answer([said(made)])
