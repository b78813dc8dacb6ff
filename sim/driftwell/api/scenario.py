"""A scenario built in code: the names and the checks of the file, and what can be done with it."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from copy import deepcopy
from pathlib import Path
from typing import TYPE_CHECKING, Any, Literal, Self

from driftwell.api.loading import Source, loaded_from_code, settings_in, with_setting
from driftwell.api.raw_values import IN_CODE, raw, raw_keys
from driftwell.api.toml_file import toml_file
from driftwell.errors import ScenarioError
from driftwell.record.commit import commit
from driftwell.scenario.explain import explain
from driftwell.scenario.read import LoadedScenario, scenario_of
from driftwell.scenario.source import raw_table, shown_path, source_text

if TYPE_CHECKING:
    from driftwell.api.run import Run
    from driftwell.counted import Count
    from driftwell.estimate import Estimate


class Scenario:
    """The whole statement of a run, by the keys of a scenario file.

    Nothing in it can be changed: what adds or changes something gives a new scenario, so that one
    can be the start of many. Values are as in a file: text with units for what has a dimension,
    plain numbers for what has none, dicts for tables; numpy's numbers and arrays and paths are
    taken too. What is wrong is told by :meth:`check`, all of it at once, and before anything runs.

    Parameters
    ----------
    title, duration, seed : as at the top of a file
    folder : what files that the scenario names count from; the folder Python works in
    sections : any other section at once, as lists of dicts or dicts

    Examples
    --------
    >>> trap = Scenario(title="Ten ions", duration="20 us", seed=7).cloud(
    ...     "load", species="proton", count=10, shape={"kind": "gaussian", "sigma": "50 um"}
    ... )
    """

    __slots__ = ("_folder", "_loaded", "_source", "_table")

    def __init__(
        self,
        title: str | None = None,
        duration: str | None = None,
        seed: int | None = None,
        *,
        folder: str | Path = ".",
        **sections: Any,
    ) -> None:
        self._folder = Path(folder)
        first = {"title": title, "duration": duration, "seed": seed}
        self._table = raw_keys({**first, **sections}, "", self._folder.absolute())
        self._source: Source | None = None
        self._loaded: LoadedScenario | None = None

    # ---- what a file has several of ----

    def species(self, name: str, /, **keys: Any) -> Self:
        """With a kind of particle, ``[species.NAME]``."""
        there = self._table.get("species", {})
        own = raw_keys(keys, f"[species.{name}]", self._folder.absolute())
        return self._with({"species": {**there, name: own}})

    def cloud(self, name: str | None = None, /, **keys: Any) -> Self:
        """With a group of charges present from the start, ``[[cloud]]``."""
        return self._and("cloud", name, keys)

    def source(self, name: str | None = None, /, **keys: Any) -> Self:
        """With charges born while the run goes on, ``[[source]]``."""
        return self._and("source", name, keys)

    def field(self, name: str | None = None, /, **keys: Any) -> Self:
        """With something that pushes the charges from outside, ``[[field]]``."""
        return self._and("field", name, keys)

    def field_function(
        self,
        name: str,
        function: Callable[..., Any],
        parameters: Mapping[str, float] | None = None,
        *,
        gives: Literal["potential", "flux"] = "potential",
        scale: Any = 1.0,
        centre: Sequence[str] | None = None,
    ) -> Self:
        """With a field that a Python function gives, compiled into the time loop.

        Parameters
        ----------
        name : of the field
        function : of x, y, z (m, from `centre`) and the parameters, all float64; of plain Python or
            compiled by numba. For a scale of 1 it returns, where `gives` is "potential", g (V) and
            the three components of -grad g (V/m); where "flux", the three of B (T).
        parameters : plain numbers (SI) by the names of the function's arguments
        scale : a number, or a waveform as a dict: phi(x, t) = scale(t) g(x). That of a flux must
            be constant.
        centre : of the function's coordinates, three lengths

        Raises
        ------
        ScenarioError
            The function cannot be used; the text says why.

        Notes
        -----
        Before a run the force is compared with the potential's slope, by differences of order 4,
        where charges begin; elsewhere the ledger's energy residual tells. The scenario holds the
        function's name and a digest of its text, and is run from Python only, by a program that
        gives the same function.
        """
        from driftwell.fields.from_python.functions import give

        given = give(function, gives)
        keys = {
            "kind": f"python-{gives}",
            "function": given.name,
            "sha256": given.sha256,
            "parameters": dict(parameters or {}),
            "scale": scale,
            "centre": centre,
        }
        return self._and("field", name, keys)

    def electrode(self, name: str | None = None, /, **keys: Any) -> Self:
        """With a conductor with a voltage, ``[[electrode]]``."""
        return self._and("electrode", name, keys)

    def wall(self, name: str | None = None, /, **keys: Any) -> Self:
        """With a surface that absorbs or reflects, ``[[wall]]``."""
        return self._and("wall", name, keys)

    def detector(self, name: str | None = None, /, **keys: Any) -> Self:
        """With a surface that records what passes it, ``[[detector]]``."""
        return self._and("detector", name, keys)

    def process(self, name: str | None = None, /, **keys: Any) -> Self:
        """With something else that acts on charges, ``[[process]]``."""
        return self._and("process", name, keys)

    def question(self, name: str | None = None, /, **keys: Any) -> Self:
        """With something the run is asked, ``[[question]]``."""
        return self._and("question", name, keys)

    # ---- what a file has once ----

    def electrodes(self, **keys: Any) -> Self:
        """With these keys of ``[electrodes]``, besides those it has."""
        return self._but("electrodes", keys)

    def coulomb(self, **keys: Any) -> Self:
        """With these keys of ``[coulomb]``, besides those it has."""
        return self._but("coulomb", keys)

    def cell(self, **keys: Any) -> Self:
        """With these keys of ``[cell]``, besides those it has."""
        return self._but("cell", keys)

    def images(self, **keys: Any) -> Self:
        """With these keys of ``[images]``, besides those it has."""
        return self._but("images", keys)

    def stepping(self, **keys: Any) -> Self:
        """With these keys of ``[stepping]``, besides those it has."""
        return self._but("stepping", keys)

    def record(self, **keys: Any) -> Self:
        """With these keys of ``[record]``, besides those it has."""
        return self._but("record", keys)

    # ---- changes ----

    def with_(self, **sections: Any) -> Self:
        """With other top keys or whole sections in the place of those there; None takes one out."""
        made = raw_keys(sections, "", self._folder.absolute())
        kept = {name: value for name, value in self._table.items() if name not in sections}
        return self._made({**kept, **made})

    def set(self, key: str, value: Any) -> Self:
        """With another value at one key, as ``--set`` of the command line.

        key : the path to it, entries of a list by name or number: ``"cloud.load.count"``
        value : as in a file

        Raises ScenarioError where no value can stand there; the text says why.
        """
        setting, table = with_setting(self._table, key, raw(value, key, self._folder.absolute()))
        changed = self._made(table)
        if self._source is not None:
            changed._source = self._source.with_setting(setting)
        return changed

    # ---- what is told of it ----

    @property
    def table(self) -> dict[str, Any]:
        """All of it as a dict, as :mod:`tomllib` would read it from a file; a copy."""
        return deepcopy(self._table)

    @property
    def folder(self) -> Path:
        """What files that it names count from."""
        return self._folder

    @property
    def title(self) -> str:
        """Its title; empty where it has none."""
        title = self._table.get("title", "")
        return title if isinstance(title, str) else ""

    def faults(self) -> tuple[str, ...]:
        """All that is wrong with it, one sentence each; none where it can be run."""
        try:
            self.loaded()
        except ScenarioError as fault:
            return tuple(str(fault).splitlines())
        return ()

    def check(self) -> Self:
        """Itself, where nothing is wrong with it.

        Raises ScenarioError with all faults, one line each.
        """
        self.loaded()
        return self

    def explain(self) -> str:
        """What it would simulate, in words, with notes and cautions, as ``driftwell check``.

        Raises ScenarioError with all faults.
        """
        return "\n".join(explain(self.loaded()))

    def estimate(
        self, seconds: float | None = None, threads: int | None = None
    ) -> Count | Estimate:
        """What a run of it will be: counted, or timed.

        seconds : None counts charges, steps, records, memory and disk without a step
            (:class:`driftwell.counted.Count`); else its own first steps are timed for about so
            many s (:class:`driftwell.estimate.Estimate`)
        threads : how many a run would have; None: one for each core

        Raises ScenarioError where it has faults or would not fit in memory.
        """
        from driftwell.api.threads import usable_threads

        given = usable_threads(threads)
        if seconds is None:
            from driftwell.counted import counted

            return counted(self.loaded(), given)[0]
        from driftwell.estimate import estimate

        return estimate(self.loaded(), given, seconds)

    @property
    def digest(self) -> str:
        """SHA-256 of its content: the same for the same content, however it was stated.

        Raises ScenarioError where it has faults.
        """
        return self.loaded().digest

    def toml(self) -> str:
        """The text of a scenario file that says the same.

        That of a file which was read and not changed is the file's own, comments and all.
        """
        source = self._source
        if source is not None and not source.settings:
            return source.text
        return toml_file(self._table)

    def save(self, path: str | Path) -> Path:
        """Write :meth:`toml` into a file, as a whole; files it names then count from its folder."""
        path = Path(path)
        try:
            commit(path, self.toml().encode())
        except OSError as fault:
            raise ScenarioError(
                f"{shown_path(path)}: cannot be written ({fault.strerror}); needs a folder that is "
                "there and may be written to"
            ) from fault
        return path

    def run(
        self,
        folder: str | Path,
        *,
        threads: int | None = None,
        progress: bool = True,
        fresh: bool = False,
        stop_after: float | str | None = None,
        force: bool = False,
    ) -> Run:
        """Execute it, leaving the record in `folder`, or go on with what was begun there.

        Parameters
        ----------
        folder : made where it is missing
        threads : None for one on each core; the bits of the result do not depend on it
        progress : whether a bar is shown in a terminal or a notebook
        fresh : put an old run in the folder aside, under another name, and start over
        stop_after : s by the clock, or text such as "7 h", after which it stops by itself; the same
            call goes on
        force : begin even where memory or disk look too small

        Returns
        -------
        the run as recorded: finished, with all charges lost, or stopped

        Raises
        ------
        ScenarioError
            It has faults, or would not fit in memory.
        RecordError
            The folder holds another run, or cannot be written (FullError: the disk is full).
        StepError
            The motion could not be continued; what was recorded before is in the folder.
        KeyboardInterrupt
            The user asked to stop (Ctrl-C); what was recorded is kept, and the same call goes on.
        """
        from driftwell.api.carried_out import carried_out

        return carried_out(
            self.loaded(),
            Path(folder),
            threads=threads,
            progress=progress,
            fresh=fresh,
            stop_after=stop_after,
            force=force,
        )

    def loaded(self) -> LoadedScenario:
        """As the lower layers take it. Raises ScenarioError with all faults."""
        if self._loaded is None:
            source = self._source
            self._loaded = (
                loaded_from_code(self._table, self.toml(), self._folder)
                if source is None
                else scenario_of(source.text, source.path, source.settings)
            )
        return self._loaded

    # ---- the rest ----

    def __eq__(self, other: object) -> bool:
        if not isinstance(other, Scenario):
            return NotImplemented
        return (self._table, self._folder) == (other._table, other._folder)

    __hash__ = None  # type: ignore[assignment]

    def __repr__(self) -> str:
        counts = [
            f"{len(value)} {name}{'s' * (len(value) != 1 and name != 'species')}"
            for name, value in self._table.items()
            if isinstance(value, list) or name == "species"
        ]
        return f"<Scenario {self.title!r}: {', '.join(counts) or 'empty'}>"

    def _repr_html_(self) -> str:
        from driftwell.api.html import scenario_html

        return scenario_html(self)

    def _and(self, section: str, name: str | None, keys: Mapping[str, Any]) -> Self:
        """With one more entry of a list of tables."""
        where = f"[[{section}]]" if name is None else f'[[{section}]] "{name}"'
        own = raw_keys(keys, where, self._folder.absolute())
        there = self._table.get(section, [])
        if not isinstance(there, list):
            raise ScenarioError(f"{IN_CODE}: {section}: there may be several; needs a list")
        entry = own if name is None else {"name": raw(name, where), **own}
        return self._with({section: [*there, entry]})

    def _but(self, section: str, keys: Mapping[str, Any]) -> Self:
        """With other keys in a table."""
        there = self._table.get(section, {})
        own = raw_keys(keys, f"[{section}]", self._folder.absolute())
        return self._with({section: {**there, **own}})

    def _with(self, changed: Mapping[str, Any]) -> Self:
        return self._made({**self._table, **changed})

    def _made(self, table: dict[str, Any]) -> Self:
        made = type(self)(folder=self._folder)
        made._table = table
        return made


def read(path: str | Path, settings: Sequence[str] = ()) -> Scenario:
    """The scenario of a file, with settings put in as by ``--set``: ``["duration=1 ms"]``.

    Raises
    ------
    ScenarioError
        The file cannot be read or has faults; the text has one line for each, in file order.
    """
    path = Path(path)
    found = of_text(source_text(path), path, settings)
    return found.check()


def of_text(text: str, path: Path, settings: Sequence[str] = ()) -> Scenario:
    """The scenario of a text that was read from a path, unchecked but for its being TOML."""
    found = Scenario(folder=path.parent)
    found._table = settings_in(raw_table(text, shown_path(path)), tuple(settings))
    found._source = Source(text, path, tuple(settings))
    return found
