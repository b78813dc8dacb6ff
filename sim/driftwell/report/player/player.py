"""The player of a run, as parts of a page: markup with its data, style and script."""

from __future__ import annotations

from dataclasses import dataclass

from driftwell.record.reader import Run
from driftwell.report.player.data import player_data
from driftwell.report.player.markup import player_markup
from driftwell.report.player.script import player_script, player_style
from driftwell.report.player.ways import ways_of
from driftwell.scenario.read import LoadedScenario


@dataclass(frozen=True, slots=True)
class PlayerParts:
    """What a page needs to show a player, of which there is one in a page.

    markup : HTML for the place where the player stands, with its data; all escaped
    style : text of a style element, once in the page
    script : text of a script element, once in the page, behind the markup
    """

    markup: str
    style: str
    script: str


def player(run: Run, scenario: LoadedScenario | None) -> PlayerParts | None:
    """The player of a run; None where its record holds no charge at any time.

    scenario : what the run was made from, for its surfaces; without it as many are drawn as the
        record alone tells of
    """
    ways = ways_of(run)
    if ways is None:
        return None
    data = player_data(run, ways, scenario)
    return PlayerParts(player_markup(data, ways), player_style(), player_script())
