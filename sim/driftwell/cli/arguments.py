"""The whole command line.

Nothing heavy is imported here: ``--help`` answers at once.
"""

from __future__ import annotations

import argparse

from driftwell._version import __version__
from driftwell.cli.commands.table import COMMANDS

_EXIT_CODES = """\
exit codes: 0 finished; 2 the scenario, the folder or the command line cannot be used;
3 every charge was lost; 4 stopped on request or by --stop-after, the same command goes on;
5 the motion could not be continued; 6 the disk refused the record, the same command goes on;
130 interrupted at once; 1 a defect of driftwell
"""


def parser() -> argparse.ArgumentParser:
    """The whole command line."""
    whole = argparse.ArgumentParser(
        prog="driftwell",
        description="How many charges is too many? Follows charged particles under their own "
        "repulsion in traps and beam lines, keeps the account, and answers with error bars.",
        epilog=_EXIT_CODES,
        formatter_class=argparse.RawDescriptionHelpFormatter,
    )
    whole.add_argument("--version", action="version", version=f"driftwell {__version__}")
    commands = whole.add_subparsers(dest="command", metavar="COMMAND", required=True)
    for command in COMMANDS:
        command.add(commands)
    return whole
