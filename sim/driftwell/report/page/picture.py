"""Figures of matplotlib in a page: one image each, with words for whoever does not see it."""

from __future__ import annotations

from base64 import b64encode
from io import BytesIO

from matplotlib.figure import Figure

from driftwell.report.page.markup import Markup, joined, tag
from driftwell.report.paper.sheet import style

DOTS_PER_INCH = 150
"""Of the images: sharp on screens with small dots, and in print."""


def framed(figure: Figure, caption: str, seen: str) -> Markup:
    """A picture with its caption; `seen` : what is to be seen in it, with numbers."""
    with style():
        image = BytesIO()
        figure.savefig(image, format="png", dpi=DOTS_PER_INCH)
    width, height = figure.get_size_inches()
    shown = tag(
        "img",
        src=f"data:image/png;base64,{b64encode(image.getvalue()).decode()}",
        alt=seen,
        width=f"{width * 100:.0f}",
        height=f"{height * 100:.0f}",
        decoding="async",
    )
    return tag(
        "figure", tag("div", shown, class_="white"), tag("figcaption", joined([caption, " ", seen]))
    )
