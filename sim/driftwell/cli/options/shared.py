"""Arguments that several commands take."""

from __future__ import annotations

import argparse

from driftwell.cli.options.command import Takes
from driftwell.cli.options.types import duration, file, folder, threads


def add_study_options(parser: argparse.ArgumentParser, what: str) -> Takes:
    """What commands on study files take; `what` names the command; returns the group of runs."""
    parser.add_argument("study", metavar="STUDY", help="study file (TOML)")
    written = add_output(
        parser, f"the {what}'s folder (default: the file's name with -{what}, here)"
    )
    add_no_pictures(written)
    add_settings(parser)
    side_by_side = add_side_by_side(parser)
    add_cluster(parser)
    return side_by_side


def add_output(parser: argparse.ArgumentParser, what: str) -> Takes:
    """A folder to write; returns the group of what is written."""
    group = parser.add_argument_group("what is written")
    group.add_argument("-o", "--output", type=folder, metavar="FOLDER", help=what)
    return group


def add_no_pictures(group: Takes, what: str = "pictures") -> None:
    """Whether anything is drawn."""
    group.add_argument("--no-pictures", action="store_true", help=f"leave out the {what}")


def add_stop_after(group: Takes) -> None:
    """When to stop by the clock."""
    group.add_argument(
        "--stop-after",
        type=duration,
        metavar="TIME",
        help="stop by the clock, e.g. after 7h30m; the same command then goes on",
    )


def add_side_by_side(parser: argparse.ArgumentParser) -> Takes:
    """How many runs go on at once, and what becomes of those that failed; returns the group."""
    group = parser.add_argument_group("many runs")
    group.add_argument(
        "--workers",
        type=threads,
        metavar="N",
        help="runs side by side (default: by number of runs, cores, charges and memory)",
    )
    group.add_argument(
        "--threads",
        type=threads,
        metavar="N",
        help="threads of each run (default: as for --workers)",
    )
    group.add_argument(
        "--retry-failed",
        action="store_true",
        help="start over the runs whose motion could not be continued",
    )
    return group


def add_cluster(parser: argparse.ArgumentParser) -> None:
    """Where the runs are computed."""
    group = parser.add_argument_group("a cluster")
    group.add_argument(
        "--on", choices=("dask",), help="compute on a cluster (needs the cluster extra)"
    )
    group.add_argument(
        "--scheduler", metavar="ADDRESS", help="of the cluster, e.g. tcp://192.0.2.1:8786"
    )
    for option, what in (
        ("--tls-ca", "certificate of the cluster's authority"),
        ("--tls-cert", "certificate to show to the cluster"),
        ("--tls-key", "its key"),
    ):
        group.add_argument(option, type=file, metavar="FILE", help=f"{what} (PEM)")


def add_threads(parser: argparse.ArgumentParser) -> Takes:
    """Threads of one run; returns the group of what it takes of the machine."""
    group = parser.add_argument_group("the machine")
    group.add_argument(
        "--threads",
        type=threads,
        metavar="N",
        help="threads (default: NUMBA_NUM_THREADS where it is set, else one for each core)",
    )
    return group


def add_settings(parser: argparse.ArgumentParser) -> Takes:
    """Keys of the scenario put in; returns the group of what the scenario is."""
    group = parser.add_argument_group("the scenario")
    group.add_argument(
        "--set",
        action="append",
        default=[],
        dest="settings",
        metavar="KEY=VALUE",
        help='a key of the scenario, e.g. --set cloud.load.count=500 --set "duration=1 ms"',
    )
    return group
