"""Pictures of a run, as figures that a notebook shows and a program saves."""

from __future__ import annotations

from dataclasses import fields
from typing import Any

from driftwell.errors import DriftwellError
from driftwell.forms.faults import nearest
from driftwell.record.reader import Run as Record


def picture(run: Record, what: str, options: dict[str, Any]) -> Any:
    """One picture; see :meth:`driftwell.api.run.Run.plot`."""
    from driftwell.report.figures.drawing import figure
    from driftwell.report.figures.options import FigureOptions
    from driftwell.report.figures.table import FIGURE_KINDS

    takes = [each.name for each in fields(FigureOptions)]
    for name in options:
        if name not in takes:
            meant = nearest(name, takes)
            hint = f'did you mean "{meant}"?' if meant else f"there are {', '.join(takes)}"
            raise DriftwellError(f'picture "{what}": no option is called "{name}"; {hint}')
    if isinstance(options.get("of"), str):
        options = {**options, "of": (options["of"],)}
    if what in FIGURE_KINDS or options:
        return figure(run, what, FigureOptions(**options))
    return _overview(run, what, list(FIGURE_KINDS))


def _overview(run: Record, what: str, others: list[str]) -> Any:
    """One of those that a run leaves in its folder and no figure for print has the name of."""
    from driftwell.report.paper.sheet import style
    from driftwell.report.pictures.run_pictures import PICTURES
    from driftwell.report.pictures.scene import scene_of

    if what not in PICTURES:
        names = list(dict.fromkeys([*others, *PICTURES]))
        meant = nearest(what, names)
        hint = f'did you mean "{meant}"?' if meant else f"there are {', '.join(names)}"
        raise DriftwellError(f'no picture is called "{what}"; {hint}')
    with style():
        made = PICTURES[what](scene_of(run))
    if made is None:
        raise DriftwellError(f'{run.folder}: holds nothing that picture "{what}" would show')
    return made
