"""Names in a scenario: each once in its section, and each that is used exists.

These checks read the raw table, so that they are made even where other keys have faults.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any

from driftwell.answers.table import QUESTION_KINDS
from driftwell.electrodes.bodies import ENCLOSURE
from driftwell.forms.declared import kind_name
from driftwell.forms.faults import Fault, nearest, read_form
from driftwell.forms.wording import as_found
from driftwell.particles.species import BUILT_IN
from driftwell.scenario.places import entry_name

Path = tuple[str | int, ...]

NAMED_SECTIONS = (
    "cloud",
    "source",
    "field",
    "electrode",
    "wall",
    "detector",
    "process",
    "question",
)
SURFACES = ("wall", "detector")
_SHOWN = 12


def reference_faults(data: Mapping[str, Any]) -> list[Fault]:
    """Names used twice, and names that are used but not there."""
    faults = [fault for section in NAMED_SECTIONS for fault in _used_twice(data, section)]
    if not data.get("cloud") and not data.get("source"):
        text = "missing; needs at least one group of charges, or a [[source]]"
        faults.append(Fault(("cloud",), "", text))
    faults += _same_as_clouds(data)
    faults += _unknown_electrodes(data)
    faults += _same_as_surfaces(data)
    faults += _unknown_species(data)
    faults += _unknown_in_processes(data)
    faults += _unknown_in_questions(data)
    faults += _unknown_in_frames(data)
    return faults


def _entries(data: Mapping[str, Any], section: str) -> list[tuple[int, Mapping[str, Any]]]:
    entries = data.get(section)
    if not isinstance(entries, list):
        return []
    return [(i, entry) for i, entry in enumerate(entries) if isinstance(entry, Mapping)]


def _names(data: Mapping[str, Any], section: str) -> list[str]:
    names = (entry_name(entry) for _, entry in _entries(data, section))
    return [name for name in names if name is not None]


def _used_twice(data: Mapping[str, Any], section: str) -> Iterator[Fault]:
    first: dict[str, int] = {}
    for i, entry in _entries(data, section):
        name = entry_name(entry)
        if name is None:
            continue
        if name in first:
            path = (section, i, "name")
            other = f"number {first[name] + 1}"
            yield Fault(path, as_found(name), f"is the name of [[{section}]] {other} already")
        else:
            first[name] = i


def _same_as_surfaces(data: Mapping[str, Any]) -> Iterator[Fault]:
    """Losses on walls, on electrodes and to processes are told apart by names."""
    taken = {name: f"a [[{section}]]" for section in SURFACES for name in _names(data, section)}
    common = data.get("electrodes")
    if isinstance(common, Mapping) and "enclosure" in common:
        taken[ENCLOSURE] = "[electrodes] enclosure"
    for section in ("electrode", "process"):
        for i, entry in _entries(data, section):
            name = entry_name(entry)
            if name in taken:
                path = (section, i, "name")
                yield Fault(path, as_found(name), f"is the name of {taken[name]} already")
        taken |= dict.fromkeys(_names(data, section), f"an [[{section}]]")


def _same_as_clouds(data: Mapping[str, Any]) -> Iterator[Fault]:
    """Questions ask of sources as of clouds: a name is one of them."""
    taken = _names(data, "cloud")
    for i, entry in _entries(data, "source"):
        name = entry_name(entry)
        if name in taken:
            path = ("source", i, "name")
            yield Fault(path, as_found(name), "is the name of a [[cloud]] already")


def _unknown_electrodes(data: Mapping[str, Any]) -> Iterator[Fault]:
    """Electrodes that sources are to emit from."""
    known = _names(data, "electrode")
    for i, entry in _entries(data, "source"):
        emitter = entry.get("emitter")
        name = emitter.get("electrode") if isinstance(emitter, Mapping) else None
        if isinstance(name, str) and name not in known:
            path = ("source", i, "emitter", "electrode")
            yield _unknown(path, name, "[[electrode]]", known, f"; {_there(known)}")


def _unknown_species(data: Mapping[str, Any]) -> Iterator[Fault]:
    declared = data.get("species")
    own = [str(name) for name in declared] if isinstance(declared, Mapping) else []
    for section in ("cloud", "source", "field"):
        for i, entry in _entries(data, section):
            for path, name in _texts_at("species", entry, (section, i)):
                if name not in own and name not in BUILT_IN:
                    known = "; known are " + ", ".join([*own, *BUILT_IN][:_SHOWN])
                    yield _unknown(path, name, "species", [*own, *BUILT_IN], known)


def _unknown_in_processes(data: Mapping[str, Any]) -> Iterator[Fault]:
    """Clouds and species that processes act on."""
    declared = data.get("species")
    own = [str(name) for name in declared] if isinstance(declared, Mapping) else []
    known = [*_names(data, "cloud"), *_names(data, "source"), *own, *BUILT_IN]
    for i, entry in _entries(data, "process"):
        names = entry.get("of")
        for k, name in enumerate(names if isinstance(names, list) else []):
            if isinstance(name, str) and name not in known:
                path = ("process", i, "of", k)
                there = f"; {_there(_names(data, 'cloud'))}"
                yield _unknown(path, name, "[[cloud]] and no species", known, there)


def _unknown_in_questions(data: Mapping[str, Any]) -> Iterator[Fault]:
    """Clouds and detectors that questions refer to; questions with faults of their own wait."""
    kinds = {kind_name(form, "ask"): form for form in QUESTION_KINDS}
    for i, entry in _entries(data, "question"):
        ask = entry.get("ask")
        form = kinds.get(ask) if isinstance(ask, str) else None
        question = None if form is None else read_form(form, entry)[0]
        if question is None:
            continue
        refers = question.refers_to()
        for section, names in (("cloud", refers.clouds), ("detector", refers.detectors)):
            known = _names(data, section)
            if section == "cloud":
                known += _names(data, "source")
            there = _there(known)
            for name in names:
                if name not in known:
                    key = next((key for key in entry if entry[key] == name), "of")
                    path = ("question", i, key)
                    yield _unknown(path, name, f"[[{section}]]", known, f"; {there}")


def _unknown_in_frames(data: Mapping[str, Any]) -> Iterator[Fault]:
    """Clouds that are to share a rest frame."""
    coulomb = data.get("coulomb")
    groups = coulomb.get("share_frame") if isinstance(coulomb, Mapping) else None
    known = _names(data, "cloud")
    for i, group in enumerate(groups if isinstance(groups, list) else ()):
        for k, name in enumerate(group if isinstance(group, list) else ()):
            if isinstance(name, str) and name not in known:
                path = ("coulomb", "share_frame", i, k)
                yield _unknown(path, name, "[[cloud]]", known, f"; {_there(known)}")


def _there(known: list[str]) -> str:
    return "there are " + ", ".join(map(as_found, known[:_SHOWN])) if known else "there is none"


def _unknown(path: Path, name: str, what: str, known: list[str], otherwise: str) -> Fault:
    meant = nearest(name, known)
    hint = f"; did you mean {as_found(meant)}?" if meant is not None else otherwise
    return Fault(path, as_found(name), f"no {what} is called so{hint}")


def _texts_at(key: str, table: Mapping[str, Any], path: Path) -> Iterator[tuple[Path, str]]:
    """All texts that stand at `key` in a table or the tables within it."""
    for name, value in table.items():
        if name == key and isinstance(value, str):
            yield (*path, name), value
        elif isinstance(value, Mapping):
            yield from _texts_at(key, value, (*path, name))
