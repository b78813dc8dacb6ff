"""One worker process as the driver sees it: started, told, heard, and what it died of.

A worker talks over two pipes of its own, not over its standard streams, so that nothing a library
prints can spoil what is said. It has a session of its own: Ctrl-C in a terminal reaches the driver
only. When the driver is gone, however it ended, the worker reads the end of its input.
"""

from __future__ import annotations

import json
import os
import signal
import subprocess
import tempfile
import time
from collections.abc import Mapping, Sequence
from contextlib import suppress
from typing import Any

from driftwell.study.engine import Task

_CHUNK = 1 << 16
_LONGEST = 50_000_000
"""Bytes of a line from which on it is no answer."""
_PATIENCE = 5.0
"""s, for a process that has closed its pipe to be gone."""
_TAIL = 4096
"""Bytes of what it printed last, searched for its last words."""
_SHOWN = 300
"""Characters of its last words that are told."""

_CAUSES = {
    signal.SIGKILL: "was killed (SIGKILL), as the system does where memory runs out",
    signal.SIGSEGV: "crashed (SIGSEGV: it used memory that is not its own)",
    signal.SIGBUS: "crashed (SIGBUS: a file or memory it used is gone, or a disk is full)",
    signal.SIGILL: "crashed (SIGILL: the processor does not know an instruction)",
    signal.SIGABRT: "gave up (SIGABRT)",
    signal.SIGXCPU: "used up the processor time it was allowed (SIGXCPU)",
    signal.SIGXFSZ: "wrote a larger file than is allowed (SIGXFSZ)",
}


class Child:
    """A worker process.

    ready : whether it has said that it can take tasks
    task : what it is working on
    """

    def __init__(self, command: Sequence[str], environment: Mapping[str, str]) -> None:
        its_input, self._tasks = os.pipe()
        self._replies, its_output = os.pipe()
        self._printed = tempfile.TemporaryFile()  # noqa: SIM115  # until the process is gone
        try:
            self._process = subprocess.Popen(
                [*command, str(its_input), str(its_output)],
                stdin=subprocess.DEVNULL,
                stdout=self._printed,
                stderr=self._printed,
                pass_fds=(its_input, its_output),
                start_new_session=True,
                env=dict(environment),
            )
        except BaseException:
            self._close_pipes()
            self._printed.close()
            raise
        finally:
            os.close(its_input)
            os.close(its_output)
        os.set_blocking(self._replies, False)
        self._rest = b""
        self._open = True
        self.ready = False
        self.task: Task | None = None

    @property
    def pid(self) -> int:
        """Number of the process."""
        return self._process.pid

    def fileno(self) -> int:
        """What it says can be waited for here."""
        return self._replies

    def give(self, task: Task) -> None:
        """Let it do a task; where it is dead, that is heard of next."""
        self.task = task
        line = json.dumps({"key": task.key, **task.content}) + "\n"
        with suppress(OSError):
            rest = memoryview(line.encode())
            while rest:
                rest = rest[os.write(self._tasks, rest) :]

    def heard(self) -> tuple[list[Any], bool]:
        """What it said since, line by line, and whether it still lives.

        A line that is not JSON is given as text.
        """
        try:
            chunk = os.read(self._replies, _CHUNK)
        except BlockingIOError:
            return [], True
        *lines, self._rest = (self._rest + chunk).split(b"\n")
        if len(self._rest) > _LONGEST:
            lines, self._rest = [*lines, self._rest], b""
        return [_understood(line) for line in lines], bool(chunk)

    def ask_to_end(self) -> None:
        """Ask it to seal what it computes, answer and end."""
        with suppress(OSError):
            self._process.send_signal(signal.SIGTERM)

    def no_more(self) -> None:
        """Tell it that no task will come any more."""
        if self._tasks >= 0:
            os.close(self._tasks)
            self._tasks = -1

    def kill(self) -> None:
        """End it there and then."""
        with suppress(OSError):
            self._process.kill()

    def buried(self, until: float | None = None) -> str:
        """Wait for the process to be gone, and say what became of it.

        until : monotonic time at which it is killed; a few seconds from now where not given
        """
        end = time.monotonic() + _PATIENCE if until is None else until
        fault = ""
        try:
            self._process.wait(max(0.0, end - time.monotonic()))
        except subprocess.TimeoutExpired:
            fault = "did not end when asked to, and was killed"
            self.kill()
            self._process.wait()
        if self._open:
            self._open = False
            words = self._last_words()
            self._close_pipes()
            self._printed.close()
            fault = fault or _cause(self._process.returncode)
            return f'{fault}; its last words: "{words}"' if words else fault
        return fault or _cause(self._process.returncode)

    def _last_words(self) -> str:
        """The last line it printed."""
        size = self._printed.seek(0, os.SEEK_END)
        self._printed.seek(max(0, size - _TAIL))
        lines = self._printed.read().decode(errors="backslashreplace").split("\n")
        said = [line.strip() for line in lines if line.strip()]
        return said[-1][-_SHOWN:] if said else ""

    def _close_pipes(self) -> None:
        self.no_more()
        os.close(self._replies)


def _understood(line: bytes) -> Any:
    try:
        return json.loads(line)
    except ValueError:
        return line.decode(errors="backslashreplace")


def _cause(code: int) -> str:
    """What an exit code says of a process's end."""
    if code >= 0:
        return f"ended by itself with exit code {code}"
    try:
        number = signal.Signals(-code)
    except ValueError:
        return f"was ended by signal {-code}"
    return _CAUSES.get(number, f"was ended by a signal ({number.name})")
