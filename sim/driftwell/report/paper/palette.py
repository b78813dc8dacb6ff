"""Colours that stay apart for people who see colours differently, and the marks that go with them.

References
----------
M. Okabe, K. Ito, Color Universal Design (2008), https://jfly.uni-koeln.de/color/; the same eight
colours in B. Wong, Nature Methods 8 (2011) 441, doi:10.1038/nmeth.1618. Yellow is left out: it
does not stand out from white paper.
"""

from __future__ import annotations

from typing import Literal

Line = Literal["-", "--", "-.", ":", ""]

BLUE = "#0072b2"
VERMILLION = "#d55e00"
GREEN = "#009e73"
PURPLE = "#cc79a7"
ORANGE = "#e69f00"
SKY = "#56b4e9"
BLACK = "#000000"

COLOURS = (BLUE, VERMILLION, GREEN, PURPLE, ORANGE, SKY, BLACK)
MARKERS = ("o", "^", "s", "D", "v", "P", "X")
LINES: tuple[Line, ...] = ("-", "--", "-.", ":")

INK = "#222222"
PALE = "#8a8a8a"


def colour(number: int) -> str:
    """The colour of the thing with this number, from 0; they come again after seven."""
    return COLOURS[number % len(COLOURS)]


def marker(number: int) -> str:
    """Its marker: another one each time all colours have been used."""
    return MARKERS[number // len(COLOURS) % len(MARKERS)]


def line_style(number: int) -> Line:
    """Its kind of line: another one each time all colours have been used."""
    return LINES[number // len(COLOURS) % len(LINES)]
