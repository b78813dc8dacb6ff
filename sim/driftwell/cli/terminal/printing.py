"""What the commands say, made safe for any terminal, pipe or file it may go to."""

from __future__ import annotations

import os
import shutil
import sys
from collections.abc import Iterable
from contextlib import suppress
from typing import TextIO

NARROWEST, WIDEST = 60, 120


def shown(text: str) -> str:
    """The text with what cannot be seen, or would upset a terminal, written out as ``\\u202e``."""
    if text.isascii() and text.replace("\n", "").isprintable():
        return text
    return "".join(
        c if c.isprintable() or c == "\n" else f"\\u{ord(c):04x}" for c in _readable(text)
    )


def answer(lines: Iterable[str]) -> bool:
    """Print to stdout what was asked for; False, and a word on stderr, where it cannot be written.

    A reader that has seen enough and left is no fault.
    """
    try:
        print(shown("\n".join(lines)), flush=True)
    except OSError as fault:
        _give_up(sys.stdout)
        if isinstance(fault, BrokenPipeError):
            return True
        tell(f"The output cannot be written ({fault.strerror}).")
        return False
    return True


def flush_quietly() -> None:
    """Send what stdout and stderr still hold; where a reader has left, nothing is said of it.

    Left to itself the interpreter would try once more at exit, and end with a code of its own.
    """
    for stream in (sys.stdout, sys.stderr):
        try:
            if stream is not None:
                stream.flush()
        except OSError:
            _give_up(stream)
        except ValueError:  # it has been closed
            continue


def _give_up(stream: TextIO) -> None:
    """Let what is left in the stream's buffer vanish."""
    os.dup2(os.open(os.devnull, os.O_WRONLY), stream.fileno())


def tell(text: str) -> None:
    """Print to stderr what goes on; where nobody can read it any more, go on without."""
    with suppress(OSError, ValueError):  # ValueError: the stream has been closed
        print(shown(text), file=sys.stderr, flush=True)


def width() -> int:
    """Characters of a line of stdout: the terminal's, within reason; 100 in a file."""
    if not is_terminal(sys.stdout):
        return 100
    return max(NARROWEST, min(shutil.get_terminal_size().columns, WIDEST))


def sign() -> str:
    """What stands between a value and its error, as far as stdout can write it."""
    try:
        "±".encode(sys.stdout.encoding or "ascii")
    except (AttributeError, UnicodeEncodeError, LookupError):
        return "+-"
    return "±"


def same_place() -> bool:
    """Whether stdout and stderr go to the same terminal or file."""
    try:
        return os.path.sameopenfile(sys.stdout.fileno(), sys.stderr.fileno())
    except (AttributeError, OSError, ValueError):
        return False


def write_anything() -> None:
    """Let stdout and stderr write every character somehow, whatever their encoding."""
    for stream in (sys.stdout, sys.stderr):
        reconfigure = getattr(stream, "reconfigure", None)
        if reconfigure is not None:
            reconfigure(errors="backslashreplace")


def is_terminal(stream: TextIO | None) -> bool:
    """Whether a person reads the stream as it is written; None where it was closed from outside."""
    try:
        return stream is not None and stream.isatty()
    except ValueError:
        return False


def _readable(text: str) -> str:
    """The text with bytes of file names that are no text written out."""
    return text.encode(errors="backslashreplace").decode()
