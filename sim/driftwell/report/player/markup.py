"""The player's markup: native controls with labels, the data, and in words what is shown."""

from __future__ import annotations

from html import escape
from typing import Any

from driftwell.report.page.markup import safe
from driftwell.report.player.packing import page_json
from driftwell.report.player.ways import Ways

SPEEDS = ((0.1, "1/10"), (0.25, "1/4"), (0.5, "1/2"), (1.0, "1"), (2.0, "2"), (4.0, "4"))
COLOURS = (
    ("cloud", "cloud"),
    ("species", "species"),
    ("energy", "kinetic energy"),
    ("speed", "speed"),
    ("fate", "fate"),
)
VIEWS = (("oblique", "oblique"), ("x", "x"), ("y", "y"), ("z", "z"))
FITS = (("all", "all"), ("charges", "charges"))

HELP = (
    "Drag to turn, with Shift or two fingers to shift; wheel or pinch, or + and -, to zoom. With"
    " the picture in focus: Space plays, the left and right arrows go from record to record, Home"
    " and End to the first and last, W A S D turn, O X Y Z choose the view, F fits all."
)


def player_markup(data: dict[str, Any], ways: Ways) -> str:
    """HTML of the player; every text from the run is escaped."""
    title = safe(str(data["title"]))
    return f"""<div class="dwp" id="dwp" data-time="0" data-playing="false" data-frames="0">
<noscript><p class="dwp-note">The player needs JavaScript, which is switched off here. The pictures
of this report do without.</p></noscript>
<div class="dwp-live" hidden>
<div class="dwp-stage">
<canvas id="dwp-canvas" tabindex="0" role="img" aria-label="Charges moving in space: {title}"
 aria-describedby="dwp-words dwp-help"></canvas>
<div class="dwp-legend" id="dwp-legend"></div>
</div>
<div class="dwp-row dwp-transport">
<button type="button" id="dwp-play" aria-pressed="false">Play</button>
<label class="dwp-wide"><span class="dwp-hidden">time</span>
<input type="range" id="dwp-time" min="0" max="1000" step="any" value="0"></label>
<output id="dwp-clock" for="dwp-time"></output>
<label>speed <select id="dwp-speed">{_options(SPEEDS, 1.0, " ×")}</select></label>
<label><input type="checkbox" id="dwp-loop"> loop</label>
<button type="button" id="dwp-reset">Reset</button>
</div>
<div class="dwp-row">
<label>colour by <select id="dwp-colour">{_options(COLOURS, "cloud")}</select></label>
<label>trails <input type="range" id="dwp-trail" min="0" max="100" value="0">
<output id="dwp-trail-words" for="dwp-trail">none</output></label>
<span class="dwp-group" role="group" aria-label="view along">view {_buttons("view", VIEWS)}</span>
<span class="dwp-group" role="group" aria-label="fit">fit {_buttons("fit", FITS)}</span>
<label><input type="checkbox" id="dwp-follow"> follow</label>
<label id="dwp-surfaces-label"><input type="checkbox" id="dwp-surfaces" checked> surfaces</label>
<label><input type="checkbox" id="dwp-stretch"> stretched</label>
</div>
<p class="dwp-words" id="dwp-words" aria-live="polite"></p>
<p class="dwp-note">{shown_words(data, ways)}</p>
<p class="dwp-note" id="dwp-help">{escape(HELP)}</p>
<div class="dwp-charts" id="dwp-charts"></div>
</div>
<script type="application/json" id="dwp-data">{page_json(data)}</script>
</div>"""


def shown_words(data: dict[str, Any], ways: Ways) -> str:
    """What of the run is shown, and what is not, honestly; HTML."""
    count = sum(cloud["count"] for cloud in data["clouds"])
    shown, frames = len(ways.id), len(ways.time)
    charges = (
        f"All {_number(count, 'charge')}"
        if shown == count
        else f"{shown} of {_number(count, 'charge')}"
    )
    kept = ways.source
    if frames != ways.kept:
        when = f"{frames} of {ways.kept} {kept}, evenly chosen"
    else:
        when = f"{frames} {kept if frames != 1 else kept.rstrip('s')}"
    says = f"{charges} shown, at {when}; between {kept} straight lines join them."
    if ways.source == "snapshots":
        says += " They are taken from snapshots, since few charges were tracked."
    missing = "".join(
        f" Not drawn: {safe(str(name))}: {safe(str(why))}." for name, why in data["missing"]
    )
    return escape(says) + missing


def _number(count: int, word: str) -> str:
    return f"{count} {word}{'s' * (count != 1)}"


def _options(choices: tuple[tuple[Any, str], ...], chosen: Any, behind: str = "") -> str:
    return "".join(
        f'<option value="{value}"{" selected" * (value == chosen)}>{words}{behind}</option>'
        for value, words in choices
    )


def _buttons(name: str, choices: tuple[tuple[str, str], ...]) -> str:
    return "".join(
        f'<button type="button" data-{name}="{value}">{words}</button>' for value, words in choices
    )
