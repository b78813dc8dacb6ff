"""The ``driftwell`` command: what the arguments ask for is carried out; its exit code.

Nothing heavy is imported before it is known what is asked, so that ``--help`` answers at once.
"""

from __future__ import annotations

import os
import sys
import warnings
from collections.abc import Sequence

from driftwell._version import __version__
from driftwell.cli.arguments import parsed
from driftwell.cli.terminal.printing import flush_quietly, tell, write_anything
from driftwell.exit_codes import DEFECT, INTERRUPTED

TRACEBACK = "DRIFTWELL_TRACEBACK"
"""Environment variable that lets a defect of driftwell show where it is."""


def main(arguments: Sequence[str] | None = None) -> int:
    """Run the command; returns its exit code."""
    write_anything()
    try:
        return _answered(arguments)
    finally:
        flush_quietly()


def _answered(arguments: Sequence[str] | None) -> int:
    """The exit code of the command; errors and defects have been told."""
    asked = parsed(arguments)
    try:
        with warnings.catch_warnings():
            if not sys.warnoptions:  # meant for whoever works on the libraries, not for the user
                warnings.simplefilter("ignore")
            code: int = asked.carry_out(asked)
            return code
    except KeyboardInterrupt:
        tell("driftwell: interrupted; nothing is running any more.")
        return INTERRUPTED
    except Exception as defect:
        if os.environ.get(TRACEBACK):
            raise
        tell(
            f"driftwell: this is a defect of driftwell {__version__}, please report it with the "
            f"command and the scenario: {type(defect).__name__}: {defect}\n"
            f"Setting {TRACEBACK}=1 shows where it happened."
        )
        return DEFECT
