"""Pictures of a run, as figures that a notebook shows and a program saves."""

from __future__ import annotations

from typing import Any

from driftwell.errors import DriftwellError
from driftwell.forms.faults import nearest
from driftwell.record.reader import Run as Record


def picture(run: Record, what: str, options: dict[str, Any]) -> Any:
    """One picture; see :meth:`driftwell.api.run.Run.plot`."""
    from driftwell.report.paper.sheet import style
    from driftwell.report.pictures.run_pictures import PICTURES
    from driftwell.report.pictures.scene import scene_of

    if what not in PICTURES:
        meant = nearest(what, PICTURES)
        hint = f'did you mean "{meant}"?' if meant else f"there are {', '.join(PICTURES)}"
        raise DriftwellError(f'no picture is called "{what}"; {hint}')
    if options:
        raise DriftwellError(f'picture "{what}": takes no options; got {", ".join(options)}')
    with style():
        made = PICTURES[what](scene_of(run))
    if made is None:
        raise DriftwellError(f'{run.folder}: holds nothing that picture "{what}" would show')
    return made
