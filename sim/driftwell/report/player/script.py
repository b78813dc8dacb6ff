"""The player's script and style: files that lie in ``browser/``, put together as one text each."""

from __future__ import annotations

import json
from functools import cache
from importlib.resources import files

import matplotlib
import numpy as np
from matplotlib.colors import to_hex

SCRIPTS = (
    "bytes.js",
    "words.js",
    "ways.js",
    "camera.js",
    "theme.js",
    "lines.js",
    "triangles.js",
    "marks.js",
    "surfaces.js",
    "trails.js",
    "overlay.js",
    "stage.js",
    "clock.js",
    "legend.js",
    "charts.js",
    "controls.js",
    "pointer.js",
    "start.js",
)
"""In the order in which they need each other."""
STYLES = ("player.css", "charts.css")
TONES = 64
LIGHT_END, DARK_END = (0.0, 0.86), (0.2, 1.0)
"""Parts of the scale of colours that stand out from a light and from a dark page."""


@cache
def player_script() -> str:
    """All of the script, in a scope of its own."""
    parts = "\n".join(_file(name) for name in SCRIPTS)
    return f'(() => {{\n"use strict";\nconst TONES = {json.dumps(_tones())};\n{parts}\n}})();\n'


@cache
def player_style() -> str:
    """All of the style."""
    return "\n".join(_file(name) for name in STYLES)


def _tones() -> dict[str, list[str]]:
    """Colours from low to high: evenly spaced to the eye, and to eyes that see few colours.

    The map is matplotlib's viridis (S. van der Walt, N. Smith, 2015, https://bids.github.io/colormap).
    """
    scale = matplotlib.colormaps["viridis"]
    return {
        name: [to_hex(scale(x)) for x in np.linspace(low, high, TONES)]
        for name, (low, high) in (("light", LIGHT_END), ("dark", DARK_END))
    }


def _file(name: str) -> str:
    return files("driftwell.report.player").joinpath("browser", name).read_text("utf-8")
