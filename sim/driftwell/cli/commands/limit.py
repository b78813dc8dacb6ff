"""The arguments of ``driftwell limit``."""

from __future__ import annotations

import argparse
from typing import Any

from driftwell.cli.options.command import add_command
from driftwell.cli.options.shared import add_study_options
from driftwell.exit_codes import (
    FINISHED,
    NO_CROSSING,
    SCHEDULER_GONE,
    SEVERAL_CROSSINGS,
    SOME_FAILED,
    STOPPED,
    TOO_NOISY,
    UNUSABLE,
)

_TEXT = """\
Looks for the value of a key at which an answer crosses a threshold, with as few runs as that
takes, and says the interval it is in. The study file says what is limited in its [limit].

Runs that are there already are not computed again; give the same command again after a stop, a
crash or a change of the study.
"""
_EXAMPLES = (
    "driftwell limit limit.toml",
    "driftwell limit limit.toml -o most-ions --workers 2",
)
_CODES = {
    FINISHED: "the interval is as narrow as asked",
    UNUSABLE: "the study, the folder or the command line cannot be used",
    STOPPED: "stopped on request; the same command goes on",
    SOME_FAILED: "too many runs failed",
    SCHEDULER_GONE: "",
    NO_CROSSING: "",
    SEVERAL_CROSSINGS: "",
    TOO_NOISY: "",
}


def add(commands: Any) -> None:
    """Add the command."""
    parser = add_command(
        commands,
        "limit",
        "find the value of a key at which an answer crosses a threshold",
        _TEXT,
        _EXAMPLES,
        _CODES,
    )
    parser.set_defaults(carry_out=carry_out)
    add_study_options(parser, "limit")


def carry_out(asked: argparse.Namespace) -> int:
    """Find the value; returns the exit code."""
    from driftwell.cli.studies.limit import limit_command
    from driftwell.cli.studies.place import place_of

    return limit_command(
        asked.study,
        asked.output,
        asked.settings,
        asked.workers,
        asked.threads,
        asked.retry_failed,
        not asked.no_pictures,
        place_of(asked),
    )
