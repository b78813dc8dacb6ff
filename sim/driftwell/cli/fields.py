"""``driftwell fields FILE``: solve the electrodes' field, say what it is, and draw it."""

from __future__ import annotations

import logging
from collections.abc import Sequence
from pathlib import Path

from driftwell._version import __version__
from driftwell.cli.runs.run import too_little_memory
from driftwell.cli.terminal.compiling import tell_of_compiling
from driftwell.cli.terminal.printing import answer, tell, width
from driftwell.errors import DriftwellError, ScenarioError
from driftwell.exit_codes import FINISHED, UNUSABLE
from driftwell.kernels.compilation import first_compilation
from driftwell.kernels.threads import on_threads
from driftwell.scenario.read import LoadedScenario, read_scenario
from driftwell.scenario.source import shown_path
from driftwell.solved.acting import ActingField, acting_field
from driftwell.solved.summary import summary


def fields_command(
    file: str, output: str | None, settings: Sequence[str], threads: int, *, pictures: bool
) -> int:
    """Print the table of electrodes and draw the pictures; 0, or 2 with a message."""
    folder = Path(output) if output is not None else Path(f"{Path(file).stem}-fields")
    try:
        loaded = read_scenario(file, settings)
        tell(loaded.scenario.title)
        with first_compilation(tell_of_compiling), on_threads(threads):
            acting = _acting(loaded)
            written = answer(_summary(acting, loaded))
            if pictures:
                written = _draw(acting, loaded, folder) and written
    except DriftwellError as error:
        tell(str(error))
        return error.exit_code
    except MemoryError as error:
        tell(too_little_memory(error))
        return UNUSABLE
    return FINISHED if written else UNUSABLE


def _acting(loaded: LoadedScenario) -> ActingField:
    found = acting_field(loaded.scenario, loaded.folder, tell)
    if found is None:
        raise ScenarioError(
            f"{loaded.path}: has no [[electrode]], so there is no field to solve. `driftwell "
            "check` says what its fields are."
        )
    return found


def _summary(acting: ActingField, loaded: LoadedScenario) -> list[str]:
    scenario = loaded.scenario
    radius = None if scenario.electrodes is None else scenario.electrodes.multipole_radius
    return summary(acting, scenario.electrode, radius, width())


def _draw(acting: ActingField, loaded: LoadedScenario, folder: Path) -> bool:
    """Draw the pictures and say where they are."""
    from driftwell.report.field_pictures.solved_field import draw_field

    logging.getLogger("matplotlib").setLevel(logging.ERROR)
    made = draw_field(
        acting,
        acting.solved.names,
        loaded.scenario.title,
        f"driftwell {__version__}, {shown_path(loaded.path)}",
        folder,
    )
    return answer(["", f"pictures: {len(made)} in {made[0].parent}"])
