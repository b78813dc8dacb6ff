"""What the commands print of hand calculations and of hazards."""

from __future__ import annotations

from typing import TYPE_CHECKING

from driftwell.cli.terminal.printing import sign, width
from driftwell.errors import DriftwellError
from driftwell.forms.paragraph import paragraph
from driftwell.hand.comparison import comparison_lines, comparisons
from driftwell.hand.hand_lines import hand_lines
from driftwell.hand.scene import Scene
from driftwell.hand.table import hand_values
from driftwell.scenario.cautions import cautions
from driftwell.scenario.model import Scenario

if TYPE_CHECKING:
    from driftwell.record.reader import Run

_SOLVED = (
    "What the electrodes' field does (trap frequencies, depth, focusing) no formula here knows: "
    "`driftwell fields` solves it and tells its multipoles."
)


def lines_by_hand(scene: Scene) -> list[str]:
    """All that can be worked out by hand, under a heading."""
    values = hand_values(scene)
    lines = ["", "By hand, of the scenario as it begins:", *hand_lines(values, width())]
    if not values:
        lines = ["", "By hand nothing is known of what this scenario holds."]
    if scene.scenario.electrode:
        lines += ["", *paragraph(_SOLVED, width())]
    return lines


def caution_lines(scenario: Scenario) -> list[str]:
    """The usual cautions, where the scenario holds hazards."""
    found = cautions(scenario)
    return ["", *paragraph(" ".join(found), width(), "Caution: ", "    ")] if found else []


def compared(run: Run) -> list[str]:
    """The answers of a run beside hand calculations; nothing where that cannot be told."""
    try:
        return comparison_lines(comparisons(run), width(), sign())
    except DriftwellError:
        return []
