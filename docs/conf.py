"""The site from these pages: `sphinx-build -W -b html docs build/site` (extra: docs)."""

from __future__ import annotations

import re
from pathlib import Path

_VERSION = Path(__file__).resolve().parents[1] / "sim" / "driftwell" / "_version.py"

project = "driftwell"
copyright = "The driftwell developers, BSD-3-Clause"  # noqa: A001 - the generator's name for it
release = re.findall(r'"(.*)"', _VERSION.read_text(encoding="utf-8"))[-1]

extensions = ["myst_parser"]
myst_enable_extensions = ["colon_fence"]
myst_heading_anchors = 4
smartquotes = False  # --set is to stay --set
suppress_warnings = ["myst.header"]  # some pages go from a title to a small heading

html_theme = "furo"
html_title = f"driftwell {release}"
html_copy_source = False
html_theme_options = {"top_of_page_buttons": []}
html_static_path = ["site"]
html_css_files = ["wide.css"]
pygments_style = "a11y-high-contrast-light"
pygments_dark_style = "a11y-high-contrast-dark"
