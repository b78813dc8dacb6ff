"""Draw docs/pictures/beam-aperture.png, the picture of README.md: `python tools/readme_picture.py`.

Two runs of scenarios/beam-aperture.toml, one of them without the charges' own repulsion.
"""

from __future__ import annotations

import sys
from pathlib import Path
from tempfile import TemporaryDirectory

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from driftwell.particles.state import Particles
from driftwell.record.reader import Run, open_run
from driftwell.report.paper.palette import BLACK, BLUE, ORANGE, PALE, VERMILLION
from driftwell.report.paper.panel import put_across, put_up
from driftwell.report.paper.ruler import interval, ruler
from driftwell.report.paper.sheet import Entry, png, sheet, style
from driftwell.report.paper.time_axis import put_time, time_ruler
from driftwell.run import Progress, run
from driftwell.scenario.read import read_scenario
from driftwell.stepping.schedule import Schedule
from driftwell.stepping.step_choice import StepChoice
from driftwell.walls.plane import Plane

ROOT = Path(__file__).resolve().parent.parent
SCENARIO = ROOT / "scenarios" / "beam-aperture.toml"
PICTURE = ROOT / "docs" / "pictures" / "beam-aperture.png"
CLOUD, ANSWER, BEHIND = "pulse", "transmission", "behind"

Looks = tuple[tuple[Run, str, str], ...]


class Silent:
    """Watches a run without a word."""

    def begins(self, choice: StepChoice, plan: Schedule, particles: Particles) -> None:
        pass

    def told(self, sentence: str) -> None:
        """Nothing to show."""

    def goes_on(self, progress: Progress) -> bool:
        return True


def executed(folder: Path, *overrides: str) -> Run:
    """The scenario, run into a folder."""
    run(read_scenario(SCENARIO, overrides), folder, Silent(), threads=2)
    return open_run(folder)


def picture(repelling: Run, independent: Run, aperture: Plane) -> Figure:
    """The pulse from the side above; its size and what gets through, in time, below."""
    looks = ((repelling, BLUE, "with"), (independent, ORANGE, "without"))
    key = [
        Entry("pulse at the start", PALE, "o"),
        Entry("at the aperture", VERMILLION, "o"),
        Entry("behind it", BLUE, "o"),
        *(
            Entry(f"{word} the protons' repulsion", colour, line="-", width=2.0)
            for _, colour, word in looks
        ),
    ]
    figure = sheet(repelling, 9.6, 6.2, key)
    grid = figure.add_gridspec(2, 2, height_ratios=[1.0, 1.0])
    put_pulse(figure.add_subplot(grid[0, :]), repelling, aperture)
    put_size(figure.add_subplot(grid[1, 0]), looks)
    put_transmission(figure.add_subplot(grid[1, 1]), looks)
    return figure


def put_pulse(axes: Axes, kept: Run, aperture: Plane) -> None:
    """Every proton at each snapshot, and the aperture."""
    views = [kept.snapshot(time) for time in kept.snapshots]
    places = np.concatenate([view.position for view in views])
    across = ruler(interval(places[:, 2], margin=0.03), "m")
    up = ruler(interval(places[:, 0], margin=0.12), "m")
    for view, colour in zip(views, (PALE, VERMILLION, BLUE), strict=True):
        z, x = across.shown(view.position[:, 2]), up.shown(view.position[:, 0])
        axes.plot(z, x, ".", color=colour, markersize=3.0, markeredgewidth=0.0, alpha=0.7)
    if aperture.hole is not None:
        radius = float(aperture.hole.radius)
        place = across.shown([aperture.at[2]] * 2)
        for edge, limit in zip((-radius, radius), (up.low, up.high), strict=True):
            axes.plot(place, up.shown([edge, limit]), "-", color=BLACK, linewidth=3.5)
    put_across(axes, across, "z")
    put_up(axes, up, "x")
    axes.set_title("from the side, x enlarged")


def put_size(axes: Axes, looks: Looks) -> None:
    """The rms size of the pulse across its flight, in time."""
    moments = [kept.moments(CLOUD) for kept, *_ in looks]
    sizes = [np.sqrt(each.covariance[:, 0, 0]) for each in moments]
    times = time_ruler(moments[0].time)
    shown = ruler(interval(np.concatenate(sizes), zero=True), "m")
    for (_, colour, _), each, size in zip(looks, moments, sizes, strict=True):
        axes.plot(times.shown(each.time), shown.shown(size), color=colour, linewidth=2.0)
    put_time(axes, times)
    put_up(axes, shown, "rms size x")


def put_transmission(axes: Axes, looks: Looks) -> None:
    """Which part of the pulse is through the aperture, in time, and the answer at the end."""
    times = time_ruler([0.0, looks[0][0].end_time])
    for kept, colour, _ in looks:
        passed = kept.crossings()
        passed = np.sort(passed["time"][passed["detector"] == kept.detectors.index(BEHIND)])
        share = 100.0 * np.arange(1, passed.size + 1) / kept.clouds[CLOUD].count
        axes.plot(
            times.shown(np.concatenate([[0.0], passed, [kept.end_time]])),
            np.concatenate([[0.0], share, share[-1:]]),
            color=colour,
            linewidth=2.0,
        )
        found = next(answer for answer in kept.answers if answer.name == ANSWER)
        axes.text(
            times.limits[0] + 0.03 * (times.limits[1] - times.limits[0]),
            share[-1] - 2.0,
            f"{100.0 * found.value:.1f} ± {100.0 * (found.error or 0.0):.1f} %",
            color=colour,
            fontsize=12,
            fontweight="bold",
            va="top",
        )
    put_time(axes, times)
    put_up(axes, ruler(interval([100.0], zero=True), ""), "through the aperture (%)")


def main() -> int:
    """Run the scenario twice and write the picture."""
    aperture = read_scenario(SCENARIO, ()).scenario.wall[0]
    if not isinstance(aperture, Plane):
        sys.stderr.write(f"{SCENARIO.name}: the first wall must be the aperture, a plane.\n")
        return 1
    with TemporaryDirectory() as place:
        repelling = executed(Path(place, "with"))
        independent = executed(Path(place, "without"), "coulomb.method=off")
        with style():
            image = png(picture(repelling, independent, aperture), repelling.header.title)
    PICTURE.parent.mkdir(parents=True, exist_ok=True)
    PICTURE.write_bytes(image)
    return 0


if __name__ == "__main__":
    sys.exit(main())
