"""Scenario files spoiled in many ways: each is read, or its faults are told clearly."""

from __future__ import annotations

import copy
import random
import re
import tomllib
from collections.abc import Callable, Iterator
from pathlib import Path
from typing import Any

import pytest

from driftwell.errors import ScenarioError
from driftwell.scenario.explain import explain
from driftwell.scenario.read import read_scenario
from tests.scenario.good_scenarios import GOOD, toml_file

SEED = 20
KEYS_SPOILED = 320
TEXTS_SPOILED = 240

ODD_VALUES: tuple[Any, ...] = (
    *(0, -1, 1, 7.5, 1e308, -1e308, 5e-324, float("nan"), float("inf"), -float("inf")),
    *(10**30, -(10**400), 2**63, True, "", " ", "0", "1", "abc", "nan m", "inf s", "1e999 m"),
    *("-3.5 mm", "1e300 km", "1e-300 fm", "3.5 parsec/s", "5 mm mm", "3,5 mm", "3.5mm/", "2 e"),
    *("1 m**9**9**9**9", "1 1/m", "1e99999999 m", "1e-99999999 m", "0 V", "-0 m", "300 degC"),
    *(
        "½ mm",
        "３ mm",
        "3 mm\u2028",
        "a\nb",
        "\x00",
        "\u202egnp",
        "😀",
        "x" * 5000,
        "1 " + "m" * 90,
    ),
    *([], [[]], [1, 2], ["1 m"] * 3, ["1 m"] * 4, [[["1 m"]]], [{}], [{"kind": "sine"}], {}),
    *({"kind": "sine"}, {"kind": []}, {"kind": "table", "times": ["1 s"], "values": []}),
    *({"amplitude": "1 V"}, {"value": "1 Hz"}, {"a": {"b": {"c": {}}}}, {"": ""}, {"name": 3}),
)
ODD_TEXT = (
    *('"', "'", '"""', "'''", "[", "]", "[[", "]]", "{", "}", "=", "==", ",", ".", "#", "\\", "\n"),
    *("\r", "\r\n", "\t", "\x00", "\x07", "\x7f", "é", "“", "\u2028", "\ufeff", "😀", "nan", "inf"),
    *("1979-05-27", "07:32:00", "0x1F", "1_000", "9" * 5000, "true", "[" * 400, "{a=" * 400),
    *("a." * 300, "[[cloud]]\n", "[cloud]\n", "[species]\n", "title = 3\n", '"a b" = 1\n'),
)

Spoiled = tuple[str, bytes]


def _spots(table: Any, path: tuple[Any, ...] = ()) -> Iterator[tuple[Any, ...]]:
    """The paths of all values in a raw table."""
    entries = table.items() if isinstance(table, dict) else enumerate(table)
    for key, value in entries:
        yield (*path, key)
        if isinstance(value, dict | list):
            yield from _spots(value, (*path, key))


def _holder(table: Any, path: tuple[Any, ...]) -> Any:
    for part in path[:-1]:
        table = table[part]
    return table


def _misspelt(word: str, draw: random.Random) -> str:
    at = draw.randrange(len(word)) if word else 0
    return draw.choice(
        [
            word[:at] + word[at + 1 :],
            word[:at] + draw.choice("abcxyz-_ é") + word[at:],
            word[: at + 1] + word[at:],
            word.upper(),
            word.replace("_", "-").replace("-", " "),
        ]
    )


def _drop(table: Any, path: tuple[Any, ...], draw: random.Random) -> str:
    del _holder(table, path)[path[-1]]
    return "dropped"


def _rename(table: Any, path: tuple[Any, ...], draw: random.Random) -> str:
    holder = _holder(table, path)
    if not isinstance(holder, dict):
        return _double(table, path, draw)
    name = _misspelt(path[-1], draw)
    holder[name] = holder.pop(path[-1])
    return f"renamed to {name!r}"


def _double(table: Any, path: tuple[Any, ...], draw: random.Random) -> str:
    holder = _holder(table, path)
    value = copy.deepcopy(holder[path[-1]])
    if isinstance(holder, list):
        holder.insert(path[-1], value)
        return "doubled"
    other = draw.choice(list(holder))
    holder[other] = value
    return f"copied over {other!r}"


def _replace(table: Any, path: tuple[Any, ...], draw: random.Random) -> str:
    value = draw.choice(ODD_VALUES)
    _holder(table, path)[path[-1]] = copy.deepcopy(value)
    return f"set to {str(value)[:40]!r}"


def _misspell_value(table: Any, path: tuple[Any, ...], draw: random.Random) -> str:
    holder = _holder(table, path)
    if not isinstance(holder[path[-1]], str):
        return _replace(table, path, draw)
    holder[path[-1]] = _misspelt(holder[path[-1]], draw)
    return f"misspelt as {holder[path[-1]]!r}"


def _swap(table: Any, path: tuple[Any, ...], draw: random.Random) -> str:
    other = draw.choice(list(_spots(table)))
    if other[: len(path)] == path or path[: len(other)] == other:
        return _replace(table, path, draw)
    here, there = _holder(table, path), _holder(table, other)
    here[path[-1]], there[other[-1]] = there[other[-1]], here[path[-1]]
    return f"swapped with {other}"


def _wrap(table: Any, path: tuple[Any, ...], draw: random.Random) -> str:
    holder = _holder(table, path)
    depth = draw.choice([1, 2, 40])
    for _ in range(depth):
        holder[path[-1]] = draw.choice([[holder[path[-1]]], {"kind": holder[path[-1]]}])
    return f"wrapped {depth} deep"


SPOIL_KEYS: tuple[Callable[[Any, tuple[Any, ...], random.Random], str], ...] = (
    _drop,
    _rename,
    _double,
    _replace,
    _replace,
    _misspell_value,
    _swap,
    _wrap,
)


def _with_spoiled_keys(draw: random.Random) -> Iterator[Spoiled]:
    for number in range(KEYS_SPOILED):
        name = draw.choice(list(GOOD))
        table = tomllib.loads(GOOD[name])
        done = []
        for _ in range(draw.choice([1, 1, 1, 2, 5])):
            spots = list(_spots(table))
            if spots:
                path = draw.choice(spots)
                done.append(f"{path} {draw.choice(SPOIL_KEYS)(table, path, draw)}")
        yield f"{number}: {name}, {'; '.join(done)}", toml_file(table).encode()


def _with_spoiled_text(draw: random.Random) -> Iterator[Spoiled]:
    for number in range(TEXTS_SPOILED):
        name = draw.choice(list(GOOD))
        text = GOOD[name]
        at, to = sorted(draw.sample(range(len(text)), 2))
        lines = text.splitlines(keepends=True)
        first, second = sorted(draw.sample(range(len(lines)), 2))
        odd = draw.choice(ODD_TEXT)
        how, spoiled = draw.choice(
            [
                (f"cut at {at}", text[:at]),
                (f"starts at {at}", text[at:]),
                (f"without {at} to {at + 3}", text[:at] + text[at + 3 :]),
                (f"without {at} to {to}", text[:at] + text[to:]),
                (f"{odd[:20]!r} put in at {at}", text[:at] + odd + text[at:]),
                (f"{odd[:20]!r} put in at {at}", text[:at] + odd + text[at:]),
                (f"{odd[:20]!r} in place of {at}", text[:at] + odd + text[at + 1 :]),
                (f"line {first} gone", "".join(lines[:first] + lines[first + 1 :])),
                (
                    f"line {first} at {second}",
                    "".join([*lines[:second], lines[first], *lines[second:]]),
                ),
                (f"lines {first} to {second} twice", "".join(lines[:second] + lines[first:])),
                (
                    f"lines {first} to {second} last",
                    "".join(lines[:first] + lines[second:] + lines[first:second]),
                ),
                ("Windows line ends", text.replace("\n", "\r\n")),
            ]
        )
        yield f"{number}: {name}, {how}", spoiled.encode()


def _in_other_bytes(draw: random.Random) -> Iterator[Spoiled]:
    text = GOOD["trap"]
    yield "empty", b""
    yield "comments only", b"# nothing\n\n"
    yield "with a byte order mark", text.encode("utf-8-sig")
    yield "UTF-16", text.encode("utf-16")
    yield "Latin-1", text.replace("Barium", "Bärium").encode("latin-1")
    yield "null bytes", bytes(1000)
    yield "noise", draw.randbytes(3000)
    yield "deep lists", b"a = " + b"[" * 100_000
    yield "deep tables", b"a = " + b"{b = " * 50_000
    yield "deep keys", b"a." * 50_000 + b"b = 1"
    yield "deep keys in a table", b"a = {" + b"a." * 1000 + b"b = 1}"
    yield "long number", b"seed = " + b"9" * 100_000
    yield "long text", b'title = "' + b"x" * 1_000_000 + b'"'
    yield "many unknown keys", b"".join(b"key%d = 1\n" % i for i in range(5000))
    yield "too large", b"# " + b"x" * 10_000_001


def _all_spoiled() -> Iterator[Spoiled]:
    draw = random.Random(SEED)
    yield from _with_spoiled_keys(draw)
    yield from _with_spoiled_text(draw)
    yield from _in_other_bytes(draw)


LINE = re.compile(r"spoiled\.toml(:\d+){0,2}:? .*\S")


def _what_is_wrong(path: Path, content: bytes) -> tuple[bool, str | None]:
    """Whether the scenario was read, and what is wrong with how it was read or told."""
    path.write_bytes(content)
    try:
        loaded = read_scenario(path)
    except ScenarioError as fault:
        lines = str(fault).replace(f"{path.parent}/", "").split("\n")
        return False, next(
            (
                f"is told as {line!r}"
                for line in lines
                if LINE.fullmatch(line) is None or not line.isprintable() or len(line) > 1000
            ),
            None,
        )
    except Exception as fault:
        return False, f"raises {type(fault).__name__}: {str(fault)[:200]}"
    lines = explain(loaded)
    return True, None if len(lines) > 5 else f"is explained as {lines}"


def test_good_scenarios_are_read_before_they_are_spoiled(tmp_path: Path) -> None:
    for name, text in GOOD.items():
        assert (True, None) == _what_is_wrong(tmp_path / "spoiled.toml", text.encode()), name


@pytest.mark.filterwarnings("error")
def test_a_spoiled_scenario_is_read_or_told_with_file_and_line_and_nothing_else(
    tmp_path: Path,
) -> None:
    path = tmp_path / "spoiled.toml"
    failures, read, number = [], 0, 0
    for name, content in _all_spoiled():
        number += 1
        was_read, wrong = _what_is_wrong(path, content)
        read += was_read
        if wrong is not None:
            failures.append(f"{name}: {wrong}")
    assert [] == failures
    assert number >= 500
    # most of them must be told, some must be harmless, or the spoiling does not do its work
    assert 0.05 * number < read < 0.4 * number
