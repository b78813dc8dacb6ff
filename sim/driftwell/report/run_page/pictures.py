"""The pictures of a run, each with a caption and words for whoever does not see it."""

from __future__ import annotations

import matplotlib.figure

from driftwell.report.page.markup import joined
from driftwell.report.page.picture import framed
from driftwell.report.page.section import Section, paragraphs
from driftwell.report.paper.sheet import style
from driftwell.report.pictures.run_pictures import PICTURES
from driftwell.report.pictures.scene import Scene
from driftwell.report.run_page.picture_words import captioned


def pictures(scene: Scene) -> Section:
    """All pictures that have something to show."""
    shown = []
    for name, picture in PICTURES.items():
        with style():
            figure: matplotlib.figure.Figure | None = picture(scene)
        if figure is not None:
            shown.append(framed(figure, *captioned(name, scene)))
    body = joined(shown) if shown else paragraphs("The record holds nothing to be drawn yet.")
    return Section("pictures", "Pictures", body)
