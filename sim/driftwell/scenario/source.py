"""The text of a scenario file, and the raw table it holds; what is not TOML, in plain words."""

from __future__ import annotations

import re
import stat
import tomllib
from pathlib import Path
from typing import Any

from driftwell.errors import ScenarioError
from driftwell.forms.faults import nearest
from driftwell.forms.wording import quoted

LARGEST = 10_000_000
"""Most bytes a scenario file may have."""
DEEPEST = 30
"""Most tables and lists within each other."""


def shown_path(path: Path) -> str:
    """A path in a message: as given, on one line."""
    text = str(path)
    return text if text.isprintable() else quoted(text)


def source_text(path: Path, what: str = "scenario") -> str:
    """The text of the file, which should be a `what`.

    Raises
    ------
    ScenarioError
        There is no such file, it cannot be read, is too large or is not UTF-8.
    """
    shown = shown_path(path)
    try:
        status = path.stat()
        if stat.S_ISDIR(status.st_mode):
            raise ScenarioError(f"{shown}: is a folder; needs a {what} file{_files_in(path)}")
        if not stat.S_ISREG(status.st_mode):
            raise ScenarioError(f"{shown}: is not a file; needs a {what} file (.toml)")
        if status.st_size > LARGEST:
            raise ScenarioError(
                f"{shown}: has {status.st_size / 1e6:.1f} MB; a {what} has at most "
                f"{LARGEST / 1e6:g} MB. Long lists of charges belong in a file of their own, "
                'read with shape = { kind = "file", path = "start.csv" }'
            )
        content = path.read_bytes()
    except FileNotFoundError as fault:
        raise ScenarioError(f"{shown}: there is no such file{_similar(path)}") from fault
    except (OSError, ValueError) as fault:  # ValueError: a null character in the path
        why = getattr(fault, "strerror", None) or str(fault)
        raise ScenarioError(f"{shown}: cannot be read ({why})") from fault
    return _decoded(content, shown)


def _decoded(content: bytes, shown: str) -> str:
    if content.startswith((b"\xff\xfe", b"\xfe\xff")):
        raise ScenarioError(f"{shown}: is text in UTF-16; save it as UTF-8")
    try:
        return content.decode("utf-8-sig")
    except UnicodeDecodeError as fault:
        line = content.count(b"\n", 0, fault.start) + 1
        byte = content[fault.start]
        raise ScenarioError(
            f"{shown}:{line}: is not UTF-8 text (byte 0x{byte:02x}); save the file as UTF-8"
        ) from fault


A_SCENARIO = "a scenario needs a title, a duration and at least one [[cloud]]"


def raw_table(text: str, shown: str, needs: str = A_SCENARIO) -> dict[str, Any]:
    """The table a TOML text holds; `needs` says what belongs into one that is empty.

    Raises
    ------
    ScenarioError
        The text is empty, is not TOML, or holds tables too deep within each other.
    """
    if _LONG_KEY.search(text) is not None:  # the parser would need hours
        raise ScenarioError(f"{shown}: {_TOO_DEEP}")
    try:
        table = tomllib.loads(text)
    except tomllib.TOMLDecodeError as fault:
        raise ScenarioError(_syntax_fault(text, shown, str(fault))) from fault
    except ValueError as fault:
        raise ScenarioError(f"{shown}: has a number with too many digits") from fault
    except RecursionError as fault:
        raise ScenarioError(f"{shown}: {_TOO_DEEP}") from fault
    if not table:
        raise ScenarioError(f"{shown}: is empty; {needs}")
    if _is_deeper(table, DEEPEST):
        raise ScenarioError(f"{shown}: {_TOO_DEEP}")
    return table


_LONG_KEY = re.compile(r"^[ \t]*\[{0,2}[ \t]*(?:[\w-]+[ \t]*\.[ \t]*){100}", re.MULTILINE)
_TOO_DEEP = f"tables or lists lie too deep within each other; needs at most {DEEPEST} levels"


def _is_deeper(table: dict[str, Any], most: int) -> bool:
    level: list[Any] = [table]
    for _ in range(most):
        level = [
            part
            for value in level
            for part in (value.values() if isinstance(value, dict) else value)
            if isinstance(part, dict | list)
        ]
        if not level:
            return False
    return True


def _similar(path: Path) -> str:
    try:
        names = [entry.name for entry in path.parent.glob("*.toml")]
    except (OSError, ValueError):
        return ""
    meant = nearest(path.name, names)
    return f"; did you mean {shown_path(path.parent / meant)}?" if meant is not None else ""


def _files_in(folder: Path) -> str:
    try:
        names = sorted(folder.glob("*.toml"))[:4]
    except OSError:
        return ""
    return ", such as " + ", ".join(shown_path(name) for name in names) if names else " (.toml)"


_PLACE = re.compile(r" \(at (?:line (\d+), column (\d+)|end of document)\)$")
_TEXT = re.compile(r"""\"(?:[^"\\]|\\.)*\"|'[^']*'""")
_END = r"\s*(?:$|[,\]}#])"
_QUANTITY = re.compile(
    r"[=\[,]\s*([+-]?\.?\d[\d._]*(?:[eE][+-]?\d+)?\s*[A-Za-zµμΩ°%][\w/^*]*)" + _END
)
_POINT = re.compile(r"[=\[,]\s*[+-]?(?:\.\d+|\d+\.|\d+,\d+)" + _END)
_BARE_WORD = re.compile(r"[=\[,]\s*([A-Za-z][\w -]*?)" + _END)
_KEY_OF_WORDS = re.compile(r"\s*([A-Za-z_][\w-]*)((?:\s+[\w-]+)+)\s*=")


def _syntax_fault(text: str, shown: str, message: str) -> str:
    """One line: where the text stops being TOML, what stands there, what is needed."""
    place = _PLACE.search(message)
    reason = message[: place.start()] if place else message
    lines = text.replace("\r\n", "\n").split("\n")
    if place is not None and place[1] is not None:
        number, column = int(place[1]), f":{place[2]}"
    else:
        filled = [i for i, line in enumerate(lines, 1) if line.strip()]
        number, column = (filled[-1] if filled else 1), ""
    if "Cannot" in reason:
        column = ""
    number = min(number, len(lines))
    line = lines[number - 1].strip()
    if not line.isprintable():
        line = "".join(c if c.isprintable() else "?" for c in line)
    excerpt = line if len(line) <= 60 else line[:56] + " ..."
    return f"{shown}:{number}{column} {excerpt}: {_needed(reason, line)}"


def _needed(reason: str, line: str) -> str:
    """What the TOML needs, from the parser's reason and the line it stopped at."""
    line = _TEXT.sub('""', line)
    if any(quote in line for quote in "“”„‘’") and "Unescaped" not in reason:
        return 'quotes must be straight: "'
    if "Cannot overwrite" in reason and not line.startswith("["):
        return "this key is set a second time; leave one of the two out"
    if "Cannot overwrite" in reason or "Cannot declare" in reason or "Cannot mutate" in reason:
        return (
            "this table stands here a second time; join the two (entries of a section that may "
            "have several are each written in double brackets, such as [[cloud]])"
        )
    if (quantity := _QUANTITY.search(line)) is not None:
        return f"a number with a unit needs quotes: {quoted(quantity[1])}"
    if _POINT.search(line) is not None:
        return "a number needs digits on both sides of a decimal point, such as 0.5"
    if (words := _KEY_OF_WORDS.match(line)) is not None and "Expected '='" in reason:
        joined = "_".join([words[1], *words[2].split()])
        return f'needs "=" after the key; a key is one word, such as {joined}'
    if (word := _BARE_WORD.search(line)) is not None and "nvalid" in reason:
        plain = word[1].lower()
        if plain in ("true", "false"):
            return f"write {plain} in small letters"
        return f"text needs quotes: {quoted(word[1])}"
    for part, needed in _REASONS:
        if part in reason:
            return needed
    return f"is not TOML ({reason[:1].lower()}{reason[1:]})"


_REASONS = (
    ("Expected '=' after a key", 'needs "=" between the key and its value'),
    ("Unclosed array", 'a list is not closed, or a comma is missing in it: needs "," or "]"'),
    ("Unclosed inline table", 'needs "}" on the same line, or a comma is missing before this'),
    ("Unterminated string", "text is not closed: a quote is missing"),
    ('Expected "\'"', "text is not closed: a quote is missing"),
    ("Illegal character '\\n'", "text must be closed on its line: a quote is missing"),
    ("Illegal character", "holds a character that cannot be seen; write it anew"),
    ("Unescaped '\\'", "a backslash in text is written \\\\, or the text in single quotes"),
    ("Expected newline or end", "needs a new line after the value (a comment begins with #)"),
    ("Expected ']]'", 'the header of a table needs "]]" at its end'),
    ("Expected ']'", 'the header of a table needs "]" at its end'),
    ("Invalid initial character for a key", "needs a key here; is there a comma too many?"),
    ("Invalid value", "needs a value here: text or a quantity in quotes, or a plain number"),
    ("Invalid statement", 'needs a key, "=" and a value, or a header such as [[cloud]]'),
)
