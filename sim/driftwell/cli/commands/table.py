"""All commands, in the order in which the help names them."""

from __future__ import annotations

from driftwell.cli.commands import (
    check,
    converge,
    estimate,
    export,
    fields,
    info,
    limit,
    movie,
    plot,
    run,
    schema,
    sweep,
    watch,
)

COMMANDS = (
    run,
    sweep,
    limit,
    converge,
    check,
    estimate,
    fields,
    watch,
    info,
    plot,
    movie,
    export,
    schema,
)
