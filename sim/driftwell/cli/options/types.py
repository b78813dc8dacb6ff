"""What the command line takes as numbers, times, files and folders, and how it refuses others."""

from __future__ import annotations

import argparse

from driftwell.cli.terminal.durations import seconds_of

LARGEST_SEED = 2**63 - 1
MOST_THREADS = 1024
SHORTEST_TIMING, TIMING, LONGEST_TIMING = 0.1, 5.0, 3600.0


def whole(text: str, least: int, most: int) -> int:
    """A whole number from `least` to `most`."""
    try:
        number = int(text)
    except ValueError:
        number = least - 1
    if not least <= number <= most:
        raise argparse.ArgumentTypeError(
            f"{text[:40]!r} is not a whole number from {least} to {most}"
        )
    return number


def threads(text: str) -> int:
    """A number of threads, or of workers."""
    return whole(text, 1, MOST_THREADS)


def seed(text: str) -> int:
    """A seed."""
    return whole(text, 0, LARGEST_SEED)


def duration(text: str) -> float:
    """A time by the clock, s, such as ``7h30m``."""
    try:
        return seconds_of(text)
    except ValueError as fault:
        raise argparse.ArgumentTypeError(str(fault)) from None


def seconds(text: str) -> float:
    """How long to time, s."""
    try:
        number = float(text)
    except ValueError:
        number = 0.0
    if not SHORTEST_TIMING <= number <= LONGEST_TIMING:
        raise argparse.ArgumentTypeError(
            f"{text[:40]!r} is not a number of seconds from {SHORTEST_TIMING:g} to "
            f"{LONGEST_TIMING:g}"
        )
    return number


def file(text: str) -> str:
    """The name of a file."""
    if not text.strip():
        raise argparse.ArgumentTypeError("needs the name of a file")
    return text


def folder(text: str) -> str:
    """The name of a folder."""
    if not text.strip():
        raise argparse.ArgumentTypeError("needs the name of a folder")
    return text
