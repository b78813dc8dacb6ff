"""Arguments that several commands take."""

from __future__ import annotations

import argparse

from driftwell.cli.options.types import file, folder, threads


def add_study_options(parser: argparse.ArgumentParser, what: str) -> None:
    """What commands on study files take; `what` names the command."""
    parser.add_argument("study", metavar="STUDY", help="study file (TOML)")
    parser.add_argument(
        "-o",
        "--output",
        type=folder,
        metavar="FOLDER",
        help=f"the {what}'s folder (default: the file's name with -{what}, here)",
    )
    add_side_by_side(parser)
    parser.add_argument("--no-pictures", action="store_true", help="leave out the pictures")
    add_cluster(parser)
    add_settings(parser)


def add_side_by_side(parser: argparse.ArgumentParser) -> None:
    """How many runs go on at once, and what becomes of those that failed."""
    parser.add_argument(
        "--workers",
        type=threads,
        metavar="N",
        help="runs side by side (default: by number of runs, cores, charges and memory)",
    )
    parser.add_argument(
        "--threads",
        type=threads,
        metavar="N",
        help="threads of each run (default: as for --workers)",
    )
    parser.add_argument(
        "--retry-failed",
        action="store_true",
        help="start over the runs whose motion could not be continued",
    )


def add_cluster(parser: argparse.ArgumentParser) -> None:
    """Where the runs are computed."""
    parser.add_argument(
        "--on", choices=("dask",), help="compute on a cluster (needs the cluster extra)"
    )
    parser.add_argument(
        "--scheduler", metavar="ADDRESS", help="of the cluster, e.g. tcp://192.0.2.1:8786"
    )
    for option, what in (
        ("--tls-ca", "certificate of the cluster's authority"),
        ("--tls-cert", "certificate to show to the cluster"),
        ("--tls-key", "its key"),
    ):
        parser.add_argument(option, type=file, metavar="FILE", help=f"{what} (PEM)")


def add_threads(parser: argparse.ArgumentParser) -> None:
    """Threads of one run."""
    parser.add_argument(
        "--threads",
        type=threads,
        metavar="N",
        help="threads (default: NUMBA_NUM_THREADS where it is set, else one for each core)",
    )


def add_settings(parser: argparse.ArgumentParser) -> None:
    """Keys of the scenario put in."""
    parser.add_argument(
        "--set",
        action="append",
        default=[],
        dest="settings",
        metavar="KEY=VALUE",
        help='a key of the scenario, e.g. --set cloud.load.count=500 --set "duration=1 ms"',
    )
