"""Write docs/scenario-reference.md: `python tools/scenario_reference.py [--check]`."""

from __future__ import annotations

import sys
from collections.abc import Iterator
from pathlib import Path

from driftwell.forms import Form
from driftwell.forms.declared import (
    Anything,
    Choice,
    Declared,
    DeclaredKey,
    Dimensioned,
    Flag,
    Keys,
    Named,
    Number,
    Row,
    Several,
    Text,
    Words,
    about,
    declared_keys,
)
from driftwell.forms.waveforms import WaveformForm
from driftwell.forms.wording import bound_words, raw_value, toml_text
from driftwell.particles.species import BUILT_IN
from driftwell.scenario.model import Scenario

PAGE = Path(__file__).resolve().parent.parent / "docs" / "scenario-reference.md"

INTRODUCTION = """\
# What a scenario file may hold

A scenario is one TOML file. This page is written by `tools/scenario_reference.py` from the
declarations the reader itself follows; change those, not the page. `driftwell check FILE` tells
all faults of a file, or says in words what will be simulated; `driftwell schema` prints a JSON
Schema for editors.

- A value with a dimension is text, a number and its unit, such as `"3.5 mm"` or `"0.3 eV"`. Any
  unit of the right dimension will do.
- A key without a default is required. A key that is not on this page is a fault.
- Sections in double brackets may stand there several times, each with a name of its own.
- `--set KEY=VALUE` on the command line takes the place of a value, for example
  `--set "duration=1 ms" --set cloud.load.count=500 --set "field.rods.voltage.amplitude=200 V"`.
"""

TOP = """\
## At the top of the file

These keys stand before the first section.
"""

IN_TIME = """\
## Values in time

Where a value may be given in time, it is either plain, and constant, or one of the tables below,
for example `voltage = { amplitude = "180 V", frequency = "1.1 MHz" }`. A table without `kind` is a
sine wave.
"""

Headings = dict[type[Form], str]


def page() -> str:
    """The whole page."""
    keys = list(declared_keys(Scenario).values())
    top = [key for key in keys if not _is_section(key)]
    sections = [key for key in keys if _is_section(key)]
    headings: Headings = {}
    for key in sections:
        headings |= {form: name for form, name in _tables(key) if form not in headings}
    contents = [f"- [`{_title(key)}`](#{_anchor(_title(key))}): {key.help}" for key in sections]
    contents.append("- [Values in time](#values-in-time)")
    parts = [INTRODUCTION, "\n".join(contents) + "\n", TOP, _key_table(top, headings)]
    for key in sections:
        parts += _section(key, headings)
    parts += [IN_TIME, *_waveforms(headings)]
    return "\n".join(parts)


def _is_section(key: DeclaredKey) -> bool:
    return isinstance(key.holds, Keys | Named | Several)


def _title(key: DeclaredKey) -> str:
    match key.holds:
        case Named():
            return f"[{key.name}.NAME]"
        case Several():
            return f"[[{key.name}]]"
        case _:
            return f"[{key.name}]"


def _anchor(heading: str) -> str:
    kept = (c for c in heading.lower() if c.isalnum() or c in " -_")
    return "".join(kept).replace(" ", "-")


def _section(key: DeclaredKey, headings: Headings) -> Iterator[str]:
    """One section of the file: its keys or its kinds, then the tables within them."""
    yield f"## {_title(key)}\n\n{_capital(key.help)}.\n"
    if key.name == "species":
        yield f"Known without being declared: {', '.join(BUILT_IN)}.\n"
    for form, heading in _tables(key):
        if headings[form] != heading:
            continue
        if heading != _title(key):
            yield f"### {heading}\n\n{_docstring(form)}\n"
        elif about(form) != (f"{_capital(key.help)}.",):
            yield f"{_docstring(form)}\n"
        yield _key_table(list(declared_keys(form).values()), headings)


def _tables(section: DeclaredKey) -> Iterator[tuple[type[Form], str]]:
    """The forms of a section with their headings, outermost first; waveforms left out."""
    holds = section.holds.entry if isinstance(section.holds, Named | Several) else section.holds
    waiting: list[tuple[Declared, str]] = [(holds, section.name.capitalize())]
    while waiting:
        declared, name = waiting.pop(0)
        forms = [(option, f"{name} {kind}") for kind, option in _kinds(declared)]
        if isinstance(declared, Keys):
            forms = [(declared, _title(section) if declared is holds else name)]
        for keys, heading in forms:
            yield keys.form, heading
            inner = declared_keys(keys.form).values()
            within = name if heading.startswith("[") else heading
            waiting += [(key.holds, f"{within} {key.name}") for key in inner]


def _kinds(declared: Declared) -> tuple[tuple[str, Keys], ...]:
    return declared.kinds if isinstance(declared, Choice) and not _in_time(declared) else ()


def _in_time(declared: Declared) -> bool:
    """Whether the value may be a waveform."""
    return isinstance(declared, Choice) and any(
        issubclass(option.form, WaveformForm) for _, option in declared.kinds
    )


def _waveforms(headings: Headings) -> Iterator[str]:
    """The kinds of waveforms, once, from the first key that may hold them."""
    choice = next(
        key.holds
        for form in headings
        for key in declared_keys(form).values()
        if isinstance(key.holds, Choice) and _in_time(key.holds)
    )
    plain = choice.options[0][1]
    for name, option in choice.kinds:
        yield f"### In time {name}\n\n{_docstring(option.form)}\n"
        yield _key_table(list(declared_keys(option.form).values()), headings, plain)


def _key_table(keys: list[DeclaredKey], headings: Headings, plain: Declared | None = None) -> str:
    """One row for each key; `plain` is what a value of a waveform holds."""
    rows = [("key", "meaning", "value", "default"), ("---",) * 4]
    for key in sorted(keys, key=lambda key: key.name not in ("kind", "ask")):
        meaning = key.help or "which kind it is"
        value = _value(key, headings)
        if plain is not None and key.holds in (plain, Several(plain)):
            value = "in the unit of the key" + (", a list" if key.holds != plain else "")
        rows.append((f"`{key.name}`", meaning, value, _default(key, plain)))
    cells = ([cell.replace("|", "\\|") for cell in row] for row in rows)
    return "".join(f"| {' | '.join(row)} |\n" for row in cells)


def _value(key: DeclaredKey, headings: Headings) -> str:
    """What a key may hold, and an example."""
    words = _words(key.holds, headings)
    if key.example is not None:
        return f"{words}: `{toml_text(key.example)}`"
    match key.holds:
        case Dimensioned(_, _, example) | Choice(((_, Dimensioned(_, _, example)), *_)):
            return f"{words}: `{toml_text(example)}`"
        case _:
            return words


def _words(declared: Declared, headings: Headings) -> str:
    match declared:
        case Dimensioned(name, si_unit, _, bounds):
            return ", ".join([name, *([bound_words(bounds, si_unit)] if bounds else [])])
        case Number(whole, bounds):
            name = "a whole number" if whole else "a number"
            return ", ".join([name, *([bound_words(bounds)] if bounds else [])])
        case Text(least, most):
            return "text" if most is None else f"text of {least} to {most} characters"
        case Flag():
            return "`true` or `false`"
        case Anything():
            return "any value"
        case Words(words):
            return " or ".join(f'`"{word}"`' for word in words)
        case Row(entries):
            return f"a list of {len(entries)}, each {_words(entries[0], headings)}"
        case Several(entry):
            return f"a list, each entry {_words(entry, headings)}"
        case Named(entry):
            return f"a table of names, each {_words(entry, headings)}"
        case Keys(form):
            return f"a table, see {_link(headings[form], headings[form])}"
        case Choice(options) if _in_time(declared):
            return f"{_words(options[0][1], headings)}, constant or {_link('in time')}"
        case Choice() if declared.kinds:
            return "a table: " + ", ".join(
                _link(name, headings[option.form]) for name, option in declared.kinds
            )
        case Choice(options):
            return ", or ".join(_words(option, headings) for _, option in options)


def _link(text: str, heading: str = "Values in time") -> str:
    return f"[{text}](#{_anchor(heading)})"


def _default(key: DeclaredKey, plain: Declared | None) -> str:
    if key.required:
        return "required"
    if key.default is None or (plain is not None and key.holds == plain):
        return "" if key.default is None else "0"
    raw = raw_value(key.holds, key.default)
    return f"`{toml_text(raw)}`" if raw not in ([], {}) and not isinstance(raw, dict) else ""


def _capital(text: str) -> str:
    return text[:1].upper() + text[1:]


def _docstring(form: type[Form]) -> str:
    return "\n\n".join(about(form))


def main(arguments: list[str]) -> int:
    """Write the page, or with --check say whether it is fresh."""
    if "--check" not in arguments:
        PAGE.write_text(page(), encoding="utf-8")
        return 0
    if PAGE.is_file() and PAGE.read_text(encoding="utf-8") == page():
        return 0
    sys.stderr.write(f"{PAGE.name} is stale: run `python tools/scenario_reference.py`.\n")
    return 1


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
