"""A worker of a sweep: executes one scenario after another, as it is told over a pipe.

    python -m driftwell.study.worker IN OUT

IN and OUT are numbers of open pipes. A task is one line of JSON: the scenario's path, settings and
digest, the run's folder, threads, and whether to start over. The answer is one line: how the run
ended and what it says. Whatever goes wrong is an answer too. At the end of its input, or at
SIGTERM, the worker stops the run under way, seals it, answers and ends.
"""

from __future__ import annotations

import json
import os
import signal
import sys
import threading
import time
import warnings
from collections.abc import Mapping
from contextlib import suppress
from dataclasses import asdict
from pathlib import Path
from queue import SimpleQueue
from typing import Any

from driftwell._version import __version__
from driftwell.errors import BusyError, DriftwellError, ScenarioError
from driftwell.particles.state import Particles
from driftwell.run import EXIT_CODES, STOPPED, Progress, Result, run
from driftwell.scenario.read import read_scenario
from driftwell.stepping.schedule import Schedule
from driftwell.stepping.step_choice import StepChoice
from driftwell.study.words import BROKEN

_BUSY_PATIENCE, _BUSY_PAUSE = 60.0, 0.5
"""s, for a process that is just ending to leave the folder, and between two looks."""


class _Asked(BaseException):
    """The worker was asked to end while there was nothing to seal."""


class _Wish:
    """Whether the worker was asked to end; an observer that passes this on to the run.

    wanted : whether it was
    breakable : whether all may be left as it is, since nothing is being recorded
    """

    def __init__(self) -> None:
        self.wanted = False
        self.breakable = False

    def heard(self, *_: object) -> None:
        """What a signal does. Only the first one interrupts."""
        first, self.wanted = not self.wanted, True
        if first and self.breakable:
            raise _Asked

    def begins(self, choice: StepChoice, plan: Schedule, particles: Particles) -> None:
        """Nothing to show."""

    def told(self, sentence: str) -> None:
        """Nothing to show; the record has it."""

    def goes_on(self, progress: Progress) -> bool:
        """From the first step on, the run is asked to stop in order."""
        self.breakable = False
        return not self.wanted


def main(arguments: list[str]) -> int:
    """Serve until the input ends."""
    source, sink = (int(text) for text in arguments)
    for handle in (source, sink):
        os.set_inheritable(handle, False)
    warnings.simplefilter("ignore")  # meant for whoever works on the libraries
    wish = _Wish()
    for number in (signal.SIGTERM, signal.SIGINT):
        signal.signal(number, wish.heard)
    tasks: SimpleQueue[dict[str, Any] | None] = SimpleQueue()
    threading.Thread(target=_listen, args=(source, tasks), daemon=True).start()
    _say(sink, {"ready": True, "process": os.getpid()})
    while not wish.wanted:
        task = None
        try:
            wish.breakable = True
            task = tasks.get()
            if task is None:
                break
            reply = _reply(task, wish)
            wish.breakable = False
        except _Asked:
            if task is None:
                break
            reply = ended_so(STOPPED, "Asked to stop before the first step.", EXIT_CODES[STOPPED])
        _say(sink, {"key": task["key"], **reply})
    return 0


def _listen(source: int, tasks: SimpleQueue[dict[str, Any] | None]) -> None:
    """Take tasks as they come; where the input ends, nobody needs the run under way any more."""
    with os.fdopen(source, encoding="ascii") as lines:
        for line in lines:
            tasks.put(json.loads(line))
    tasks.put(None)
    os.kill(os.getpid(), signal.SIGTERM)


def _say(sink: int, reply: Mapping[str, Any]) -> None:
    """Answer; where the driver is gone, nobody listens."""
    rest = memoryview((json.dumps(reply) + "\n").encode())
    with suppress(OSError):
        while rest:
            rest = rest[os.write(sink, rest) :]


def _reply(task: Mapping[str, Any], wish: _Wish) -> dict[str, Any]:
    """What is answered to a task: how it ended, and the time it all took (`seconds`)."""
    began, worked = time.perf_counter(), time.process_time()
    try:
        result = _executed(task, wish)
        outcome = result.outcome
        reply = ended_so(outcome.word, outcome.sentence, outcome.exit_code)
        reply["wall_time"] = outcome.wall_time
        reply["answers"] = [asdict(answer) for answer in result.answers]
    except DriftwellError as fault:
        reply = ended_so(BROKEN, str(fault), fault.exit_code)
        reply["busy"] = isinstance(fault, BusyError)
    except MemoryError as fault:
        why = f" ({fault})" if str(fault) else ""
        sentence = f"This machine has too little memory for the run{why}."
        reply = ended_so(BROKEN, sentence, DriftwellError.exit_code)
    except Exception as defect:
        sentence = (
            f"This is a defect of driftwell {__version__}, please report it with the scenario and "
            f"the settings: {type(defect).__name__}: {defect}"
        )
        reply = ended_so(BROKEN, sentence, 1)
    reply["seconds"] = time.perf_counter() - began
    reply["processor_seconds"] = time.process_time() - worked
    return reply


def ended_so(word: str, sentence: str, exit_code: int | None) -> dict[str, Any]:
    """A reply without answers; `busy` where another process holds the run's folder."""
    return {
        "word": word,
        "sentence": sentence,
        "exit_code": exit_code,
        "wall_time": None,
        "answers": [],
        "busy": False,
        "seconds": 0.0,
        "processor_seconds": 0.0,
    }


def _executed(task: Mapping[str, Any], wish: _Wish) -> Result:
    loaded = read_scenario(task["scenario"], task["settings"])
    if loaded.digest != task["digest"]:
        raise ScenarioError(
            f"{task['scenario']}: was changed while the sweep went on, it or a file it names; "
            "needs to stay as it is until the sweep is over. Start the sweep again."
        )
    end = time.monotonic() + _BUSY_PATIENCE
    while True:
        try:
            return run(
                loaded, Path(task["folder"]), wish, int(task["threads"]), fresh=task["fresh"]
            )
        except BusyError:  # a worker whose driver was killed seals what it had
            if time.monotonic() >= end or wish.wanted:
                raise
            time.sleep(_BUSY_PAUSE)


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
