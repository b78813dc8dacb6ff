"""The arguments of ``driftwell completion``."""

from __future__ import annotations

import argparse
from typing import Any

from driftwell.cli.options.command import add_command

SHELLS = ("bash", "zsh", "tcsh")
_TEXT = """\
Prints a script with which a shell completes commands, options, their values and the names of
files when Tab is pressed. It is printed, and nothing else: put it where your shell looks for such
scripts, and start a new shell.

bash needs its package bash-completion for scripts in that folder; without it, put the first
example into ~/.bashrc. zsh reads scripts from folders in its fpath.
"""
_EXAMPLES = (
    'eval "$(driftwell completion bash)"',
    "driftwell completion bash > ~/.local/share/bash-completion/completions/driftwell",
    "driftwell completion zsh > ~/.zfunc/_driftwell",
    "driftwell completion tcsh > ~/.driftwell-completion.csh",
)


def add(commands: Any) -> None:
    """Add the command."""
    parser = add_command(
        commands, "completion", "print a script that completes commands", _TEXT, _EXAMPLES
    )
    parser.set_defaults(carry_out=carry_out)
    parser.add_argument("shell", choices=SHELLS, metavar="SHELL", help=", ".join(SHELLS))


def carry_out(asked: argparse.Namespace) -> int:
    """Print it; returns the exit code."""
    from driftwell.cli.completion import completion

    return completion(asked.shell)
