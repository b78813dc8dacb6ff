"""The values of one ``[[vary]]`` entry: what is set in the scenario, and what that is in SI."""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping, Sequence
from copy import deepcopy
from dataclasses import dataclass
from decimal import Decimal
from typing import Any

from driftwell.forms import units
from driftwell.forms.declared import Dimensioned, Number
from driftwell.forms.faults import Fault, read_form
from driftwell.forms.held import Path, held_at, read_dimensioned
from driftwell.forms.wording import needed, toml_text
from driftwell.scenario.model import Scenario
from driftwell.study.form import Vary

Value = float | str
PURE = "1"
"""Unit of a plain number, as in the record."""
_DIGITS = 12


@dataclass(frozen=True, slots=True)
class Held:
    """What the key that varies may hold.

    path : of the value in the scenario's raw table
    quantity : what it is where it has a dimension
    number : a plain number where it may be one
    unknown : why the scenario has no such key as it stands; empty where it has it
    """

    path: Path
    quantity: Dimensioned | None = None
    number: Number | None = None
    unknown: str = ""

    @property
    def unit(self) -> str:
        """SI unit of its numbers; empty where it holds none."""
        if self.quantity is not None:
            return self.quantity.si_unit
        return "" if self.number is None else PURE

    def value(self, raw: Any) -> Value:
        """The SI value of what stands in a file; its text where it is not a number."""
        if self.quantity is not None and isinstance(raw, str):
            try:
                return read_dimensioned(self.quantity, raw)
            except ValueError:
                return raw
        if self.number is not None and isinstance(raw, int | float) and not isinstance(raw, bool):
            return float(raw)
        return raw if isinstance(raw, str) else toml_text(raw)


def held_by(path: Path, data: Mapping[str, Any]) -> Held:
    """What the scenario's key at `path` of the raw table `data` may hold."""
    options = held_at(path, data, Scenario)
    return Held(
        path,
        next((option for option in options if isinstance(option, Dimensioned)), None),
        next((option for option in options if isinstance(option, Number)), None),
        "" if options else _why_unknown(path, data),
    )


def _why_unknown(path: Path, data: Mapping[str, Any]) -> str:
    """What the scenario's reader says of the key."""
    changed: Any = deepcopy(dict(data))
    holder = changed
    for part in path[:-1]:
        holder = holder.setdefault(part, {}) if isinstance(holder, dict) else holder[part]
    holder[path[-1]] = 0
    faults = read_form(Scenario, changed)[1]
    return next((fault.needed for fault in faults if fault.path == path), "unknown key")


@dataclass(frozen=True, slots=True)
class Steps:
    """The values of an entry in their order: raw as set, and in SI (or as text)."""

    raw: tuple[Any, ...]
    values: tuple[Value, ...]

    def __len__(self) -> int:
        return len(self.raw)


def listed(entry: Vary, held: Held) -> Steps:
    """The values of a list."""
    raw = tuple(entry.values or ())
    values = tuple(held.value(each) for each in raw)
    if any(isinstance(value, str) for value in values):
        values = tuple(each if isinstance(each, str) else toml_text(each) for each in raw)
    return Steps(raw, values)


@dataclass(frozen=True, slots=True)
class Range:
    """From one number to another.

    first, last : SI
    ends : both as the file has them
    unit : what values between them are written in; empty: plain numbers
    factor, offset : from `unit` to SI
    """

    held: Held
    first: float
    last: float
    ends: tuple[Any, Any]
    log: bool
    unit: str = ""
    factor: Decimal = Decimal(1)
    offset: Decimal = Decimal(0)

    def steps(self, shares: Sequence[float]) -> Steps:
        """The values at parts 0 to 1 of the way; the two ends are those of the file, exactly."""
        raw = tuple(self._raw(share) for share in shares)
        return Steps(raw, tuple(self.held.value(each) for each in raw))

    def _raw(self, share: float) -> Any:
        if share in (0.0, 1.0):
            end = self.ends[int(share)]
            whole = not isinstance(end, str) and self._is_whole
            return int(end) if whole else end
        if self.log:  # by logarithms: the ratio of the ends may be too large for a number
            ends = math.log(abs(self.first)), math.log(abs(self.last))
            between = math.exp((1.0 - share) * ends[0] + share * ends[1])
            value = math.copysign(between, self.first)
        else:
            value = (1.0 - share) * self.first + share * self.last
        if self._is_whole:
            return round(value)
        if not self.unit:
            return float(f"{value:.{_DIGITS}g}")
        in_unit = float((Decimal(value) - self.offset) / self.factor)
        return f"{in_unit:.{_DIGITS}g} {self.unit}"

    @property
    def _is_whole(self) -> bool:
        number = self.held.number
        return self.held.quantity is None and number is not None and number.whole


def range_of(entry: Vary, held: Held, path: Path) -> Range | list[Fault]:
    """The range of the entry at `path` of the study, or its faults."""
    if held.unknown:
        return [Fault((*path, "key"), "", held.unknown)]
    found = {"from": entry.first, "to": entry.last}
    faults = [
        Fault((*path, name), "", why)
        for name, end in found.items()
        for why in _end_faults(end, held, entry.setting)
    ]
    if faults:
        return faults
    first, last = (float(held.value(end)) for end in found.values())
    if first == last:
        return [Fault((*path, "to"), "", "must be another value than `from`")]
    if entry.spacing == "log" and (first == 0.0 or last == 0.0 or (first < 0.0) != (last < 0.0)):
        text = "cannot be reached in equal ratios from `from`: both must be above 0, or both below"
        return [Fault((*path, "to"), "", text)]
    whole = Range(held, first, last, (entry.first, entry.last), entry.spacing == "log")
    return whole if held.quantity is None else _with_unit(whole, held.quantity)


def _with_unit(whole: Range, quantity: Dimensioned) -> Range:
    """Values are written in the unit both ends have, else in the SI unit."""
    named = {parts[1] for end in whole.ends if (parts := units.split(end)) is not None}
    unit = named.pop() if len(named) == 1 else ""
    unit = unit or quantity.si_unit
    factor, offset = units.to_si(unit, quantity.si_unit)
    return Range(whole.held, whole.first, whole.last, whole.ends, whole.log, unit, factor, offset)


def _end_faults(end: Any, held: Held, key: str) -> Iterator[str]:
    if held.quantity is not None:
        wanted = f"{key} needs {needed(held.quantity)}"
        if not isinstance(end, str):
            yield f"{wanted} (a number and its unit in quotes)"
            return
        try:
            read_dimensioned(held.quantity, end)
        except ValueError as fault:
            yield f"{key} {fault}"
    elif held.number is None:
        yield f"{key} does not hold a number; list its `values` instead of a range"
    elif isinstance(end, str):
        yield f"{key} needs {needed(held.number)}, without quotes or unit"
    elif held.number.whole and not float(end).is_integer():
        yield f"{key} needs a whole number, without decimals"
