"""The arguments of ``driftwell sweep``."""

from __future__ import annotations

import argparse
from typing import Any

from driftwell.cli.options.command import add_command
from driftwell.cli.options.shared import add_stop_after, add_study_options
from driftwell.exit_codes import FINISHED, SCHEDULER_GONE, SOME_FAILED, STOPPED, UNUSABLE

_TEXT = """\
Computes the runs of a study, many side by side, and leaves a table of their answers, pictures
and a summary.

What is there already is not computed again; what was cut off goes on. Give the same command again
after a stop, a crash or a change of the study.
"""
_EXAMPLES = (
    "driftwell sweep sweep.toml",
    "driftwell sweep sweep.toml -o night --workers 4 --stop-after 9h",
    "driftwell sweep sweep.toml --on dask --scheduler tcp://192.0.2.1:8786",
)
_CODES = {
    FINISHED: "every run is there (finished, or every charge lost)",
    UNUSABLE: "the study, the folder or the command line cannot be used",
    STOPPED: "",
    SOME_FAILED: "",
    SCHEDULER_GONE: "",
}


def add(commands: Any) -> None:
    """Add the command."""
    parser = add_command(
        commands,
        "sweep",
        "compute all runs of a study that are not there yet",
        _TEXT,
        _EXAMPLES,
        _CODES,
    )
    parser.set_defaults(carry_out=carry_out)
    add_stop_after(add_study_options(parser, "sweep"))


def carry_out(asked: argparse.Namespace) -> int:
    """Compute the runs; returns the exit code."""
    from driftwell.cli.studies.place import place_of
    from driftwell.cli.studies.sweep import sweep_command

    return sweep_command(
        asked.study,
        asked.output,
        asked.settings,
        asked.workers,
        asked.threads,
        asked.retry_failed,
        not asked.no_pictures,
        place_of(asked),
        asked.stop_after,
    )
