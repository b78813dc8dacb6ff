"""All commands, in the groups and the order in which the help names them."""

from __future__ import annotations

from driftwell.cli.commands import (
    check,
    completion,
    converge,
    doctor,
    estimate,
    export,
    fields,
    info,
    limit,
    movie,
    new,
    plot,
    report,
    run,
    schema,
    sweep,
    watch,
)

GROUPS = {
    "start": (new, check, estimate, fields),
    "run": (run, watch),
    "run many": (sweep, limit, converge),
    "look": (info, report, plot, movie),
    "exchange": (export, schema),
    "this machine": (doctor, completion),
}
"""Commands by the job they are for."""
COMMANDS = tuple(command for group in GROUPS.values() for command in group)
