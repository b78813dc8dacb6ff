"""Tables with a caption, headings that say what they are of, and numbers that stand in line."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from driftwell.report.page.markup import Markup, joined, tag

Cell = Markup | str


@dataclass(frozen=True, slots=True)
class Column:
    """A column; `number` : whether its cells stand to the right."""

    title: str
    number: bool = False


def table(caption: str, columns: Sequence[Column], rows: Sequence[Sequence[Cell]]) -> Markup:
    """A table whose rows are named by their first cell; it scrolls by itself where it is wide.

    On a narrow page its rows stand below one another, each cell behind the title of its column;
    the roles say that it is a table all the same.
    """
    head = (
        tag(
            "th",
            each.title,
            scope="col",
            role="columnheader",
            class_="number" if each.number and k else None,
        )
        for k, each in enumerate(columns)
    )
    made = tag(
        "table",
        tag("caption", caption),
        tag("thead", tag("tr", joined(head), role="row"), role="rowgroup"),
        tag("tbody", joined(_row(columns, row) for row in rows), role="rowgroup"),
        role="table",
    )
    words = f"table: {caption}"
    return tag("div", made, class_="wide", tabindex="0", role="group", aria_label=words)


def _row(columns: Sequence[Column], row: Sequence[Cell]) -> Markup:
    cells = [tag("th", row[0], scope="row", role="rowheader")]
    cells += [
        tag(
            "td",
            cell,
            role="cell",
            data_title=column.title,
            class_="number" if column.number else None,
        )
        for column, cell in zip(columns[1:], row[1:], strict=True)
    ]
    return tag("tr", joined(cells), role="row")


def listed(rows: Sequence[tuple[Cell, Cell]]) -> Markup:
    """Names and what they stand for."""
    entries = (tag("div", tag("dt", name), tag("dd", what)) for name, what in rows)
    return tag("dl", joined(entries))
