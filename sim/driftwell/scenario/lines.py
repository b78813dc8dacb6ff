"""On which line of a TOML text a key stands.

The standard library reads TOML without telling lines, and only faults need them: this scanner
walks through a text that is known to be valid and notes where each key, entry and table begins.
"""

from __future__ import annotations

import re
import tomllib
from bisect import bisect_right
from contextlib import suppress

Path = tuple[str | int, ...]

_BLANK = re.compile(r"(?:[ \t\n]|#[^\n]*)*")
_KEY = re.compile(r"""[ \t]*([A-Za-z0-9_-]+|"(?:[^"\\\n]|\\.)*"|'[^'\n]*')[ \t]*""")
_VALUE = re.compile(
    r'''"""(?:[^\\]|\\.)*?""""{0,2}|\'\'\'.*?\'\'\'\'{0,2}'''
    r"""|"(?:[^"\\\n]|\\.)*"|'[^'\n]*\'"""
    r"""|[0-9-]+[ ][0-9:.Z+-]+|[^\s,\]}#]+""",
    re.DOTALL,
)


class KeyLines:
    """The line of every key of a TOML text, which must be valid."""

    def __init__(self, text: str) -> None:
        self._text = text.replace("\r\n", "\n")
        self._starts = [0, *(match.end() for match in re.finditer("\n", self._text))]
        self._lines: dict[Path, int] = {}
        self._entries: dict[Path, int] = {}
        self._at = 0
        with suppress(ValueError, IndexError):  # of a TOML to come: keep the lines found so far
            self._scan()

    def line(self, path: Path) -> int:
        """The line of the key at `path`, else of the nearest table around it, counted from 1."""
        for length in range(len(path), 0, -1):
            if path[:length] in self._lines:
                return self._lines[path[:length]]
        return 1

    def _scan(self) -> None:
        table: Path = ()
        self._skip_blank()
        while self._at < len(self._text):
            if self._text[self._at] == "[":
                table = self._header()
            else:
                self._assignment(table)
            self._skip_blank()

    def _header(self) -> Path:
        start = self._at
        entry = self._text.startswith("[[", self._at)
        self._at += 2 if entry else 1
        parts = self._key()
        self._at += 2 if entry else 1
        path = self._note_parents((), parts[:-1], start)
        path = (*path, parts[-1])
        if entry:
            self._note(path, start)
            self._entries[path] = self._entries.get(path, 0) + 1
        elif path not in self._entries:
            self._lines[path] = self._line_at(start)
        path = self._within_entries(path)
        self._note(path, start)
        return path

    def _assignment(self, table: Path) -> None:
        start = self._at
        parts = self._key()
        self._at += 1  # the equals sign
        path = (*self._note_parents(table, parts[:-1], start), parts[-1])
        self._note(path, start)
        self._value(path)

    def _value(self, path: Path) -> None:
        self._skip_blank()
        opening = self._text[self._at]
        if opening == "[":
            self._array(path)
        elif opening == "{":
            self._inline_table(path)
        else:
            self._at = self._match(_VALUE).end()

    def _array(self, path: Path) -> None:
        self._at += 1
        entry = 0
        while not self._closes("]"):
            self._note((*path, entry), self._at)
            self._value((*path, entry))
            entry += 1

    def _inline_table(self, path: Path) -> None:
        self._at += 1
        while not self._closes("}"):
            self._assignment(path)

    def _closes(self, bracket: str) -> bool:
        """Step over a comma; whether the bracket follows, which is then stepped over."""
        self._skip_blank()
        if self._text[self._at] == ",":
            self._at += 1
            self._skip_blank()
        if self._text[self._at] != bracket:
            return False
        self._at += 1
        return True

    def _key(self) -> list[str]:
        parts = []
        while True:
            match = self._match(_KEY)
            self._at = match.end()
            word = match[1]
            parts.append(next(iter(tomllib.loads(f"{word} = 0"))) if word[0] in "\"'" else word)
            if self._text[self._at] != ".":
                return parts
            self._at += 1

    def _note_parents(self, table: Path, parts: list[str], start: int) -> Path:
        path = table
        for part in parts:
            path = (*path, part)
            self._note(path, start)
            path = self._within_entries(path)
        return path

    def _within_entries(self, path: Path) -> Path:
        """A path to a list of tables goes on in its last entry."""
        return (*path, self._entries[path] - 1) if path in self._entries else path

    def _note(self, path: Path, start: int) -> None:
        self._lines.setdefault(path, self._line_at(start))

    def _line_at(self, start: int) -> int:
        return bisect_right(self._starts, start)

    def _skip_blank(self) -> None:
        self._at = self._match(_BLANK).end()

    def _match(self, pattern: re.Pattern[str]) -> re.Match[str]:
        match = pattern.match(self._text, self._at)
        if match is None:
            raise ValueError(f"not valid TOML at character {self._at}")
        return match
