"""Write docs/scenario-reference.md and docs/study-reference.md from the declarations.

`python tools/scenario_reference.py [--check]`
"""

from __future__ import annotations

import sys
from collections.abc import Iterable, Iterator
from dataclasses import replace
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
from driftwell.forms.waveform_form import WaveformForm
from driftwell.forms.wording import bound_words, raw_value, toml_text
from driftwell.particles.species import BUILT_IN
from driftwell.record.layout import Attribute, Dataset
from driftwell.scenario.model import Scenario
from driftwell.study.convergence.axes import AXES
from driftwell.study.convergence.table import (
    ANSWERS,
    CONVERGENCE_CSV,
    CONVERGENCE_H5,
    CONVERGENCE_VERSION,
    RUNS,
    axis_entry,
)
from driftwell.study.convergence.table import HEADER as CONVERGENCE_HEADER
from driftwell.study.form import MOST_CASES, StudyForm
from driftwell.study.limit_table import HEADER as LIMIT_HEADER
from driftwell.study.limit_table import (
    LIMIT_CSV,
    LIMIT_H5,
    LIMIT_VERSION,
    intervals_entry,
    runs_entry,
)
from driftwell.study.means import USED
from driftwell.study.points import SEED_BITS
from driftwell.study.table import MEANS_CSV, TABLE_CSV, TABLE_H5
from driftwell.study.table_image import (
    HEADER,
    NAMED,
    POINT,
    RUN,
    TABLE_VERSION,
    answer_entry,
    mean_entry,
    varied_entry,
)
from driftwell.study.trial import ALL_UP_TO

DOCS = Path(__file__).resolve().parent.parent / "docs"
PAGE = DOCS / "scenario-reference.md"
STUDY_PAGE = DOCS / "study-reference.md"

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

STUDY_INTRODUCTION = f"""\
# What a study file may hold

A study is one TOML file: one scenario, and what changes in it from case to case. This page is
written by `tools/scenario_reference.py` from the declarations the reader itself follows; change
those, not the page. `driftwell check FILE` tells all faults of a study, or says in words what will
be computed; `driftwell schema --study` prints a JSON Schema for editors.

```toml
title    = "Charge of a pulse that passes an aperture"
scenario = "beam-aperture.toml"
set      = ["cloud.pulse.count=300"]
replicas = 3

[[vary]]
key    = "wall.aperture.hole.radius"
values = ["5 mm", "8 mm"]

[[vary]]
key     = "cloud.pulse.total_charge"
from    = "33.37 pC"
to      = "667.4 pC"
points  = 4
spacing = "log"
```

are 2 x 4 points with 3 replicas each: 24 cases ([the whole
file](../scenarios/studies/aperture-current.toml)). A study has at most {MOST_CASES} cases.

- Each case is the scenario with the study's `set`, then one value of each `[[vary]]`, put in as
  `--set` would put them in; it has a digest of its own, by which its run is known again. The same
  case in another study, or the same study after more values were added, is not computed anew.
- A value is what the scenario would have at that key: `values = ["150 V", "180 V"]`, `[100, 200]`,
  `["direct", "tree"]`, or whole tables.
- The last `[[vary]]` changes fastest; a sample changes faster than all lists. Replicas of a point
  stand next to each other.
- The first replica has the scenario's own `seed`. Each further one has a seed drawn from that seed
  and the replica's number by numpy's `SeedSequence` ({SEED_BITS} bits): the same each time, and the
  same however many replicas there are. All points share these seeds, so that neighbouring points
  differ by what was varied more than by their draws. Their errors are not independent: a
  difference between two points is often surer than their error bars say.
- All faults of a study are told at once. Cases are tried before the first one runs: all of them up
  to {ALL_UP_TO}, else the values of each axis, one after another (of a range, or of a list of more
  than {ALL_UP_TO} numbers, the least and the greatest). What only one of many cases has, is told
  when its turn comes.
"""

USED_WORDS = " or ".join(f"`{word}`" for word in USED)

TABLES = f"""\
## What the tables hold

`{TABLE_CSV}` has one line of headings and one line for each case: its number, its replica, each
key that varies, how it ended, then for each question the answer and its error. Headings carry
units in brackets, SI for keys and the question's own for answers; `[1]` marks a plain number, and
no brackets a text. What is not known is left empty. All digits are given: a number reads back to
the last bit.

With replicas there is `{MEANS_CSV}` as well, one line for all replicas of a point: the number of
the first case, the keys that vary, and for each question the mean, its error, and how many runs it
is the mean of. Runs count that ended as {USED_WORDS}. Of n values x with errors e, the
error of the mean is the larger of

- sqrt(sum e^2) / n, from the runs' own sampling errors, where all of them are known, and
- sqrt(sum (x - mean)^2 / (n (n - 1))), from the scatter of the replicas.

The two agree where the sampling errors are true. The scatter of two or three replicas is small by
chance often enough, and the sampling error of one run does not see what that run cannot show; so
the larger one is given.

`{TABLE_H5}` holds the same (layout {TABLE_VERSION}) with each answer's note and each outcome's
sentence, built and described as [a run's files](record-format.md) are: 64 bits, unit and meaning
in the attributes of each dataset. Its attributes:
"""

COUNTED = """\
The keys that vary are counted from 1 in the order of the file, the questions in the order in which
they first appear. Each such dataset has these attributes besides:
"""

LIMIT_TABLES = f"""\
## What a limit leaves

`driftwell limit` ([limits](numerics/limits.md)) leaves `{LIMIT_CSV}`: one line of headings, units
in brackets, and one line for each run in the order in which they were wanted, with the columns of
the table `runs` below; what is not known is left empty. `{LIMIT_H5}` holds the same, the interval
after each round, and the verdict (layout {LIMIT_VERSION}). Its attributes:
"""

LIMIT_UNITS = """\
The ends of the interval and the likeliest value are in the unit that `unit` names, the threshold in
`answer_unit`.
"""

CONVERGENCE_TABLES = f"""\
## What a convergence study leaves

`driftwell converge` ([convergence](numerics/convergence.md)) needs no study file, and leaves tables
of the same kind. `{CONVERGENCE_CSV}` has one line for each answer: `question`, `value`, `unit`,
`sampling_error`, then for each of the axes {", ".join(f"`{axis}`" for axis in AXES)}
three columns, the error it adds, the order observed and how the error was found (such as
`step_error`, `step_order`, `step_how`; empty where the axis does not matter), then `combined_error`
and `verdict`. Errors are in the unit of the value. `{CONVERGENCE_H5}` holds the same with the noise
and the limit of each axis, and all runs (layout {CONVERGENCE_VERSION}). Its attributes:
"""

Headings = dict[type[Form], str]


def page() -> str:
    """The whole page of scenarios."""
    top, sections, headings = _parts(Scenario)
    contents = [f"- [`{_title(key)}`](#{_anchor(_title(key))}): {key.help}" for key in sections]
    contents.append("- [Values in time](#values-in-time)")
    parts = [INTRODUCTION, "\n".join(contents) + "\n", TOP, _key_table(top, headings)]
    for key in sections:
        parts += _section(key, headings)
    parts += [IN_TIME, *_waveforms(headings)]
    return "\n".join(parts)


def study_page() -> str:
    """The whole page of studies."""
    top, sections, headings = _parts(StudyForm)
    parts = [STUDY_INTRODUCTION, TOP, _key_table(top, headings)]
    for key in sections:
        parts += _section(key, headings)
    datasets = (
        *(RUN, varied_entry("cases", "N", None), answer_entry("N")),
        *(POINT, varied_entry("means", "N", None), mean_entry("N")),
    )
    parts += [TABLES, attribute_table(HEADER), *map(dataset_part, datasets)]
    parts += [COUNTED, attribute_table(NAMED)]
    own = ("in the key's unit", "in the answer's unit")
    tables = (runs_entry(*own), intervals_entry(own[0]))
    parts += [LIMIT_TABLES, attribute_table(LIMIT_HEADER), LIMIT_UNITS, *map(dataset_part, tables)]
    of_axis = replace(axis_entry("NAME"), help="of each axis that matters, " + axis_entry("").help)
    parts += [CONVERGENCE_TABLES, attribute_table(CONVERGENCE_HEADER)]
    return "\n".join([*parts, *map(dataset_part, (ANSWERS, of_axis, RUNS))])


def _parts(form: type[Form]) -> tuple[list[DeclaredKey], list[DeclaredKey], Headings]:
    """Keys at the top of a file, its sections, and the headings of all tables."""
    keys = declared_keys(form).values()
    sections = [key for key in keys if _is_section(key)]
    headings: Headings = {}
    for key in sections:
        headings |= {each: name for each, name in _tables(key) if each not in headings}
    return [key for key in keys if not _is_section(key)], sections, headings


def _is_section(key: DeclaredKey) -> bool:
    texts = isinstance(key.holds, Several) and isinstance(key.holds.entry, Text)
    kinds = bool(_kinds(key.holds))
    return kinds or (isinstance(key.holds, Keys | Named | Several) and not texts)


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
    holds = _entry(section.holds)
    waiting: list[tuple[Declared, str]] = [(holds, section.name.capitalize())]
    while waiting:
        declared, name = waiting.pop(0)
        if isinstance(declared, Choice) and not (declared.kinds or _in_time(declared)):
            waiting += [(each, name) for _, each in declared.options if isinstance(each, Keys)]
        forms = [(option, f"{name} {kind}") for kind, option in _kinds(declared)]
        if isinstance(declared, Keys):
            forms = [(declared, _title(section) if declared is holds else name)]
        for keys, heading in forms:
            yield keys.form, heading
            within = name if heading.startswith("[") else heading
            inner = declared_keys(keys.form).values()
            waiting += [(_entry(key.holds), f"{within} {key.name}") for key in inner]


def _entry(declared: Declared) -> Declared:
    """What each entry of a list or table of names is; a value itself."""
    return declared.entry if isinstance(declared, Named | Several) else declared


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


def attribute_table(entries: Iterable[Attribute]) -> str:
    """One row for each attribute."""
    rows = [(f"`{each.name}`", each.kind, each.help) for each in entries]
    return _plain_table(("attribute", "type", "meaning"), rows)


def dataset_part(entry: Dataset) -> str:
    """A dataset's heading and meaning, and the columns of a table."""
    unit = "" if entry.columns else f" Unit: {entry.unit}."
    head = f"### `{entry.path}`\n\n{_capital(entry.help)}.{unit}\n"
    if not entry.columns:
        return head
    rows = [(f"`{each.name}`", each.kind, each.unit, each.help) for each in entry.columns]
    return f"{head}\n{_plain_table(('column', 'type', 'unit', 'meaning'), rows)}"


def _plain_table(heads: tuple[str, ...], rows: Iterable[tuple[str, ...]]) -> str:
    lines = [heads, ("---",) * len(heads), *rows]
    return "".join(f"| {' | '.join(line)} |\n" for line in lines)


def _docstring(form: type[Form]) -> str:
    return "\n\n".join(about(form))


def main(arguments: list[str]) -> int:
    """Write the pages, or with --check say whether they are fresh."""
    pages = {PAGE: page(), STUDY_PAGE: study_page()}
    if "--check" not in arguments:
        for path, text in pages.items():
            path.write_text(text, encoding="utf-8")
        return 0
    return max(_stale(path, text) for path, text in pages.items())


def _stale(path: Path, text: str) -> int:
    if path.is_file() and path.read_text(encoding="utf-8") == text:
        return 0
    sys.stderr.write(f"{path.name} is stale: run `python tools/scenario_reference.py`.\n")
    return 1


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
