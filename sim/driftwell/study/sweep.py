"""The driver of a sweep: every case of a study is computed once, whatever happens in between.

Runs are known by their content. What is finished is not computed again; what was cut off is gone
on with, which :func:`driftwell.run.run` does by itself. One case that fails is reported and harms
no other. Everything that lasts is in the catalogue and in the runs' folders, so the driver may be
ended at any instant, and the next one goes on.
"""

from __future__ import annotations

import time
from collections import Counter, deque
from collections.abc import Callable
from contextlib import closing
from pathlib import Path
from typing import Any

from driftwell.answers.answer import Answer
from driftwell.run import STOPPED
from driftwell.study.catalogue import Catalogue
from driftwell.study.cores import Load, Sharing, shared, usable_cores
from driftwell.study.engine import Done, Engine, Task
from driftwell.study.missing import ANSWERED, Needed, load_of, missing_runs
from driftwell.study.pool import Pool
from driftwell.study.progress import SweepObserver, SweepProgress, SweepResult
from driftwell.study.read import Study
from driftwell.study.sweep_folder import run_folder
from driftwell.study.tally import COMPUTED, Tally
from driftwell.study.words import BROKEN

_PAUSE = 0.2
"""s, between two looks at the observer."""
_TRIES = 3
"""How often a run is begun that somebody else stops."""


class Sweep:
    """A sweep while it goes on; see :meth:`result`.

    retry_failed : start over the runs whose motion could not be continued in an earlier sweep
    workers, threads : what the user asks for; None where it is to be found out
    engine_of : makes the engine, of so many workers on so many threads each
    sharing_of : says how many those are; this machine's cores are shared where it is None
    """

    def __init__(
        self,
        study: Study,
        folder: Path,
        catalogue: Catalogue,
        observer: SweepObserver,
        *,
        retry_failed: bool = False,
        workers: int | None = None,
        threads: int | None = None,
        engine_of: Callable[[int, int], Engine] = Pool.of_runs,
        sharing_of: Callable[[Load, int | None, int | None], Sharing] | None = None,
    ) -> None:
        self._study = study
        self._folder = folder
        self._catalogue = catalogue
        self._observer = observer
        self._asked = workers, threads
        self._engine_of = engine_of
        self._sharing_of = sharing_of
        self._tally = Tally(len(study.cases), observer.failed)
        self._retry_failed = retry_failed
        self._waiting: deque[Needed] = deque()
        self._contents: dict[str, dict[str, Any]] = {}
        self._stops: Counter[str] = Counter()
        self._stopped = False
        self._busy = 0.0
        self._began: float | None = None
        self._looked = 0.0

    def result(self) -> SweepResult:
        """Look at all cases; compute what is not there yet."""
        sharing = None
        self._waiting.extend(
            missing_runs(
                self._study,
                self._folder,
                self._catalogue,
                self._tally,
                self._retry_failed,
                lambda: not self._to_stop(0),
            )
        )
        if self._waiting and not self._to_stop(0):
            sharing = self._sharing()
            self._began = time.monotonic()
            self._observer.begins(sharing, self._progress(0))
            with closing(self._engine_of(sharing.workers, sharing.threads)) as engine:
                self._work(engine, sharing.threads)
        return SweepResult(
            self._folder,
            self._progress(0),
            self._tally.failures,
            self._tally.digests,
            self._tally.answers,
            self._stopped,
            sharing,
            self._busy,
        )

    def _sharing(self) -> Sharing:
        """How to share the cores among the runs that are missing."""
        load = load_of(self._waiting)
        if self._sharing_of is not None:
            return self._sharing_of(load, *self._asked)
        return shared(load, usable_cores(), *self._asked)

    def _work(self, engine: Engine, threads: int) -> None:
        """Keep the engine supplied, and take what it gives, until there is nothing more."""
        while self._waiting or self._contents:
            while self._waiting and engine.room():
                self._submit(engine, self._waiting.popleft(), threads)
            self._take(engine, _PAUSE)
            if self._to_stop(engine.under_way()):
                engine.stop()
                while self._take(engine, _PAUSE) or engine.under_way():
                    self._observer.goes_on(self._progress(engine.under_way()))
                return

    def _submit(self, engine: Engine, each: Needed, threads: int) -> None:
        content = {
            "scenario": str(self._study.scenario_path),
            "settings": list(each.settings),
            "digest": each.digest,
            "folder": str(run_folder(self._folder, each.digest)),
            "threads": threads,
            "fresh": each.fresh,
        }
        self._contents[each.digest] = content
        self._catalogue.began(each.digest)
        engine.submit(Task(each.digest, content))

    def _take(self, engine: Engine, timeout: float) -> bool:
        """Keep what became of a run; whether any was done in that time."""
        done = engine.next(timeout)
        if done is None:
            return False
        content = self._contents.pop(done.key)
        if done.reply is not None:
            self._busy += float(done.reply["seconds"])
        word = BROKEN if done.reply is None else str(done.reply["word"])
        if word == STOPPED and not self._stopped:  # by somebody else
            self._stops[done.key] += 1
            if self._stops[done.key] < _TRIES:
                self._contents[done.key] = content
                engine.submit(Task(done.key, {**content, "fresh": False}))
                return True
            word = BROKEN
        if not self._stopped or (word != STOPPED and done.reply is not None):
            self._keep(done, word)
        return True

    def _keep(self, done: Done, word: str) -> None:
        """Note how a run ended."""
        reply = done.reply or {"sentence": done.reason, "wall_time": None, "answers": ()}
        answers = tuple(Answer(**each) for each in reply["answers"])
        self._catalogue.ended(done.key, word, reply["sentence"], reply["wall_time"], answers)
        if word in ANSWERED:
            self._tally.answered(done.key, answers, COMPUTED)
        else:
            self._tally.failed(done.key, reply["sentence"])

    def _progress(self, under_way: int) -> SweepProgress:
        seconds = 0.0 if self._began is None else time.monotonic() - self._began
        return self._tally.progress(under_way, seconds)

    def _to_stop(self, under_way: int) -> bool:
        """Whether the observer wants the sweep to stop; asked now and then."""
        now = time.monotonic()
        if now - self._looked >= _PAUSE / 2.0:
            self._looked = now
            self._stopped = self._stopped or not self._observer.goes_on(self._progress(under_way))
        return self._stopped
