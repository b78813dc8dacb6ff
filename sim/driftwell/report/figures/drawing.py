"""One figure of a run, as it was asked for."""

from __future__ import annotations

from dataclasses import dataclass, fields

from matplotlib.figure import Figure

from driftwell.record.reader import Run
from driftwell.report.figures.options import FigureError, FigureOptions, known, listed
from driftwell.report.figures.print_style import print_style
from driftwell.report.figures.table import FIGURE_KINDS
from driftwell.report.pictures.scene import scene_of

COMMON = ("width", "height", "title")
"""Options that mean something to every figure."""


@dataclass(frozen=True, slots=True)
class Offer:
    """A kind of figure, and whether a run can give it.

    takes : names of the options that mean something to it
    missing : why the run cannot give it; empty where it can
    """

    name: str
    words: str
    takes: tuple[str, ...]
    missing: str


def figure(run: Run, what: str, options: FigureOptions | None = None) -> Figure:
    """The figure of a run that is called `what`, one of those of :func:`offers`.

    Raises
    ------
    FigureError
        There is no such figure, the run cannot give it, or an option asks for what is not there;
        the text says what there is.
    RecordError
        The record cannot be read.
    """
    chosen = options or FigureOptions()
    kind = FIGURE_KINDS[known(what, FIGURE_KINDS, "figure")]
    _check_meaning(what, chosen)
    scene = scene_of(run)
    missing = kind.missing(scene)
    if missing:
        able = [name for name, each in FIGURE_KINDS.items() if not each.missing(scene)]
        raise FigureError(
            f'{run.folder}: has no figure "{what}": {missing}. It can give {listed(able)}.'
        )
    with print_style():
        return kind.draw(scene, chosen)


def offers(run: Run) -> list[Offer]:
    """All kinds of figures, and which of them a run can give."""
    scene = scene_of(run)
    return [
        Offer(name, kind.words, kind.takes, kind.missing(scene))
        for name, kind in FIGURE_KINDS.items()
    ]


def _check_meaning(what: str, options: FigureOptions) -> None:
    """Refuse options that a figure would pass over in silence."""
    plain = FigureOptions()
    takes = FIGURE_KINDS[what].takes
    for field in fields(FigureOptions):
        asked = getattr(options, field.name) != getattr(plain, field.name)
        if asked and field.name not in (*takes, *COMMON):
            raise FigureError(
                f'{field.name}: means nothing to the figure "{what}", which takes '
                f"{listed((*takes, *COMMON))}. Leave it out."
            )
