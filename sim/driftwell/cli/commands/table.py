"""All commands, in the order in which the help names them."""

from __future__ import annotations

from driftwell.cli.commands import (
    check,
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

COMMANDS = (
    new,
    run,
    sweep,
    limit,
    converge,
    check,
    estimate,
    fields,
    watch,
    info,
    report,
    plot,
    movie,
    export,
    schema,
    doctor,
)
