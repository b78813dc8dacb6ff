"""Writes docs/command-line.md from the arguments of all commands: `python tools/command_line.py`.

With --check it says whether the page is stale.
"""

from __future__ import annotations

import argparse
import os
import re
import sys
from collections.abc import Iterator, Mapping
from pathlib import Path

from driftwell.cli.arguments import parser
from driftwell.cli.options.command import Parser

PAGE = Path(__file__).resolve().parents[1] / "docs" / "command-line.md"
COLUMNS = "100"

HEAD = """\
# The command line

This page is written by `tools/command_line.py` from what the commands themselves say with `--help`;
change it there.

"""


def page(whole: argparse.ArgumentParser, commands: Mapping[str, Parser]) -> str:
    """The whole page: what is typed before a command, and each command by its name."""
    parts = [HEAD, *_of(whole)]
    rows: list[tuple[str, ...]] = [
        (f"[`{name}`](#{whole.prog}-{name})", _cell(each.line)) for name, each in commands.items()
    ]
    parts.append(f"## Commands\n\n{_table(('command', 'what it does'), rows)}")
    for name, command in commands.items():
        parts.append(f"## {whole.prog} {name}\n\n{_sentence(command.line)}\n")
        parts += _of(command)
    return "\n".join(part.rstrip("\n") + "\n" for part in parts)


def _of(one: argparse.ArgumentParser) -> Iterator[str]:
    """Usage, description, arguments and options, and what stands below them."""
    usage = one.format_usage().replace("\n" + " " * len("usage: "), "\n").removeprefix("usage: ")
    yield f"```text\n{usage.rstrip()}\n```\n"
    if one.description:
        yield _text(one.description)
    for heading, optional in (("argument", False), ("option", True)):
        rows: list[tuple[str, ...]] = [
            (_name(one, each), _cell(_help(one, each)), _default(each))
            for each in one._actions
            if bool(each.option_strings) == optional
            and each.help != argparse.SUPPRESS
            and not isinstance(each, argparse._SubParsersAction)
        ]
        heads: tuple[str, ...] = (heading, "meaning", "default")
        if not any(default for *_, default in rows):
            heads, rows = heads[:2], [row[:2] for row in rows]
        if rows:
            yield _table(heads, rows)
    if one.epilog:
        yield _text(one.epilog)


def _name(one: argparse.ArgumentParser, action: argparse.Action) -> str:
    """As it is typed: `-o FOLDER`, `--output FOLDER`."""
    formatter = one._get_formatter()
    if not action.option_strings:
        return f"`{formatter._format_args(action, action.dest)}`"
    values = "" if action.nargs == 0 else formatter._format_args(action, action.dest.upper())
    return ", ".join(f"`{f'{each} {values}'.rstrip()}`" for each in action.option_strings)


def _help(one: argparse.ArgumentParser, action: argparse.Action) -> str:
    return one._get_formatter()._expand_help(action) if action.help else ""


def _default(action: argparse.Action) -> str:
    """The default, where it is a value and the help does not tell it."""
    told = action.default in (None, argparse.SUPPRESS, False, [], "", 0.0)
    return "" if told or "default" in (action.help or "") else f"`{action.default}`"


def _text(text: str) -> str:
    """Paragraphs as they stand; lists that are set line by line kept so, in blocks.

    A paragraph of indented lines, or the lines below one that ends in a colon, is a block.
    """
    parts = []
    for paragraph in re.split(r"\n\s*\n", text.strip("\n")):
        plain: list[str] = []
        set_off: list[str] = []
        for line in paragraph.splitlines():
            (set_off if line.startswith(" ") or set_off else plain).append(line)
        if plain:
            parts.append(f"{_sentence(_cell(' '.join(plain)), stop=False)}\n")
        if set_off:
            block = "\n".join(line.removeprefix("  ") for line in set_off)
            parts.append(f"```text\n{block}\n```\n")
    return "\n".join(parts)


def _cell(text: str | None) -> str:
    """Text that Markdown shows as it stands."""
    whole = " ".join((text or "").split())
    return re.sub(r"(`[^`]*`)|([\\|<>*_\[\]])", lambda m: m[1] or f"\\{m[2]}", whole)


def _sentence(text: str | None, stop: bool = True) -> str:
    whole = text or ""
    return whole[:1].upper() + whole[1:] + ("." if stop and not whole.endswith(".") else "")


def _table(heads: tuple[str, ...], rows: list[tuple[str, ...]]) -> str:
    lines = [heads, ("---",) * len(heads), *rows]
    return "".join(f"| {' | '.join(line)} |\n" for line in lines)


def main(arguments: list[str]) -> int:
    """Write the page, or with --check say whether it is fresh."""
    os.environ.update(COLUMNS=COLUMNS, NO_COLOR="1")
    whole = parser()
    text = page(whole, whole.commands)
    if "--check" not in arguments:
        PAGE.write_text(text, encoding="utf-8")
        return 0
    if PAGE.is_file() and PAGE.read_text(encoding="utf-8") == text:
        return 0
    sys.stderr.write(f"{PAGE.name} is stale: run `python tools/command_line.py`.\n")
    return 1


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
