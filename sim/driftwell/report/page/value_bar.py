"""A small graphic: a value with its error bar, and a value to compare it with."""

from __future__ import annotations

from driftwell.report.page.markup import NOTHING, Markup, tag

WIDTH, HEIGHT, EDGE = 176.0, 26.0, 8.0


def value_bar(value: float, error: float | None, other: float, words: str) -> Markup:
    """A dot with its bar, an upright line for the other value; `words` say the same.

    The scale of each graphic is its own: it holds both values and the bar.
    """
    bar = error or 0.0
    low, high = min(value - bar, other), max(value + bar, other)
    span = max(high - low, 1e-3 * max(abs(value), abs(other)))
    if span <= 0.0:
        return NOTHING
    middle, reach = 0.5 * (low + high), 0.65 * span

    def place(at: float) -> str:
        part = (at - middle + reach) / (2.0 * reach)
        return f"{EDGE + part * (WIDTH - 2.0 * EDGE):.1f}"

    half = HEIGHT / 2.0
    y, top, bottom = f"{half:g}", f"{half - 9.0:g}", f"{half + 9.0:g}"
    parts = [
        _line("0", f"{WIDTH:g}", y, y, "base"),
        _line(place(other), place(other), top, bottom, "hand"),
    ]
    if bar:
        left, right = place(value - bar), place(value + bar)
        parts.append(_line(left, right, y, y))
        parts += [_line(end, end, f"{half - 4.0:g}", f"{half + 4.0:g}") for end in (left, right)]
    parts.append(tag("circle", cx=place(value), cy=y, r="3.5", class_="run"))
    return tag(
        "svg",
        *parts,
        class_="bar",
        viewBox=f"0 0 {WIDTH:g} {HEIGHT:g}",
        role="img",
        aria_label=words,
    )


def _line(x1: str, x2: str, y1: str, y2: str, of: str = "run") -> Markup:
    return tag("line", x1=x1, x2=x2, y1=y1, y2=y2, class_=of, stroke_width="2")
