"""The picture of a movie: what stands still is drawn once, only the charges anew for each frame."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from matplotlib.axes import Axes
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure
from matplotlib.layout_engine import ConstrainedLayoutEngine
from matplotlib.lines import Line2D
from numpy.typing import NDArray

from driftwell.answers.evidence import CloudFacts
from driftwell.report.field_pictures.equipotentials import put_electrode
from driftwell.report.movie.course import Courses
from driftwell.report.paper.palette import INK, PALE, colour, marker
from driftwell.report.paper.projection import Frame, frame, plane_limits, put_frame
from driftwell.report.paper.ruler import Interval, in_words, joined, prefix_size
from driftwell.report.paper.sheet import printable
from driftwell.report.sections.scenery import Scenery
from driftwell.report.sections.section import section

Floats = NDArray[np.float64]
Image = NDArray[np.uint8]

AXES = "xyz"
DOTS_PER_INCH = 120
RATIO = 1.05
"""Width over height of a panel."""
MOST_NAMED = 5
"""More clouds than these have no key."""
MOST_WIDENED = 3.0
"""Electrodes are shown whole where that takes at most so many times the room of the charges."""


@dataclass(frozen=True, slots=True)
class View:
    """A panel, its axes, and what moves in it: dots of each cloud, and crosses of the lost."""

    panel: Axes
    frame: Frame
    plane: tuple[int, int]
    dots: list[tuple[int, Line2D]]
    crosses: Line2D

    def shown(self, places: Floats) -> tuple[Floats, Floats]:
        """Places (n, 3), m, as they stand along the panel's axes."""
        first, second = self.plane
        return self.frame.across.shown(places[:, first]), self.frame.up.shown(places[:, second])


class Stage:
    """The picture, and the charges in it.

    courses : where charges are
    planes : numbers of the axes across and up, of each panel
    height : of the picture, dots; made even, as the encoding needs it, and its width too
    """

    def __init__(
        self,
        courses: Courses,
        clouds: Sequence[CloudFacts],
        planes: Sequence[tuple[int, int]],
        scenery: Scenery | None,
        title: str,
        height: int,
    ) -> None:
        self._courses = courses
        high = height - height % 2
        wide = round(high * RATIO * len(planes) * 0.9)
        wide += wide % 2
        self.size = (wide, high)
        self._figure = Figure(
            figsize=(wide / DOTS_PER_INCH, high / DOTS_PER_INCH), dpi=DOTS_PER_INCH
        )
        self._figure.set_layout_engine(
            ConstrainedLayoutEngine(rect=(0.01, 0.02, 0.98, 0.92), w_pad=0.04, h_pad=0.02)
        )
        self._canvas = _canvas(self._figure)
        self._figure.text(0.012, 0.985, printable(title, 20 + 34 * len(planes)), va="top")
        self._views: list[View] = []
        shown = [cloud for cloud in clouds if (courses.cloud == cloud.index).any()]
        for number, plane in enumerate(planes):
            panel = self._figure.add_subplot(1, len(planes), number + 1)
            self._views.append(self._view(panel, plane, shown, scenery))
        if 1 < len(shown) <= MOST_NAMED:
            self._key(shown)
        self._time = self._figure.text(
            0.988, 0.985, "", va="top", ha="right", family="DejaVu Sans Mono", animated=True
        )
        self._unit = prefix_size(float(courses.time[-1]))
        self._canvas.draw()
        self._still = self._canvas.copy_from_bbox(self._figure.bbox)

    def image(self, t: float) -> Image:
        """The picture (height, width, 4) at a time, s; it changes with the next call."""
        places = self._courses.at(t)
        gone = self._courses.last[self._courses.lost <= t]
        self._canvas.restore_region(self._still)
        for view in self._views:
            for cloud, line in view.dots:
                line.set_data(*view.shown(places[self._courses.cloud == cloud]))
                view.panel.draw_artist(line)
            view.crosses.set_data(*view.shown(gone))
            view.panel.draw_artist(view.crosses)
        self._time.set_text(self._stamp(t))
        self._figure.draw_artist(self._time)
        return np.asarray(self._canvas.buffer_rgba())

    def _stamp(self, t: float) -> str:
        """The time, always as long."""
        end = f"{float(self._courses.time[-1]) / self._unit:.2f}"
        unit = in_words(self._unit, "s", 1).partition(" ")[2]
        return f"t = {t / self._unit:{len(end)}.2f} {unit}"

    def _view(
        self,
        panel: Axes,
        plane: tuple[int, int],
        clouds: Sequence[CloudFacts],
        scenery: Scenery | None,
    ) -> View:
        shown = self._frame(plane, scenery)
        put_frame(panel, shown, (AXES[plane[0]], AXES[plane[1]]))
        panel.grid(visible=False)
        if scenery is not None:
            _put_scenery(panel, shown, plane, scenery)
        count = len(self._courses.cloud)
        size = 3.0 if count <= 300 else 2.0 if count <= 2000 else 1.3
        dots = []
        for cloud in clouds:
            (line,) = panel.plot(
                [],
                [],
                linestyle="none",
                marker=marker(cloud.index),
                markersize=size,
                markeredgewidth=0.0,
                color=colour(cloud.index),
                alpha=0.75,
                animated=True,
                zorder=7,
            )
            dots.append((cloud.index, line))
        (crosses,) = panel.plot(
            [], [], "x", color=INK, markersize=2.4, markeredgewidth=0.5, alpha=0.5, animated=True
        )
        return View(panel, shown, plane, dots, crosses)

    def _frame(self, plane: tuple[int, int], scenery: Scenery | None) -> Frame:
        """Axes that hold all charges at all times, and the electrodes where there is room."""
        held = np.concatenate([self._courses.position.reshape(-1, 3), self._courses.last])
        held = held[np.isfinite(held).all(axis=1)]
        reach = float(np.ptp(held, axis=0).max()) or 1e-3
        limits = plane_limits(held[:, plane[0]], held[:, plane[1]], reach)
        around = None if scenery is None else scenery.reach(plane)
        if around is not None:
            limits = tuple(  # type: ignore[assignment]
                _widened(own, outer) for own, outer in zip(limits, around, strict=True)
            )
        return frame(*limits, RATIO)

    def _key(self, clouds: Sequence[CloudFacts]) -> None:
        handles = [
            Line2D([], [], linestyle="none", marker=marker(c.index), color=colour(c.index))
            for c in clouds
        ]
        legend = self._figure.legend(
            handles,
            ["-"] * len(handles),
            loc="upper right",
            bbox_to_anchor=(0.83, 1.0),
            ncols=len(handles),
            frameon=False,
            fontsize=7.0,
            handletextpad=0.2,
        )
        legend.set_in_layout(False)
        for text, cloud in zip(legend.get_texts(), clouds, strict=True):
            text.set_text(printable(cloud.name, 16))


def _canvas(figure: Figure) -> Any:
    """A canvas to draw on, whose methods have no types."""
    return FigureCanvasAgg(figure)


def _widened(own: Interval, outer: Interval) -> Interval:
    """Limits that hold both, where the charges still fill a good part of them."""
    both = joined([own, outer])
    return both if both[1] - both[0] <= MOST_WIDENED * (own[1] - own[0]) else own


def _put_scenery(panel: Axes, shown: Frame, plane: tuple[int, int], scenery: Scenery) -> None:
    """Outlines of electrodes, walls and detectors in the plane through the electrodes' centre."""
    acting = scenery.acting
    third = 3 - plane[0] - plane[1]
    through = 0.0 if acting is None else acting.centre[third]
    across, up = ((side.low, side.high) for side in (shown.across, shown.up))
    cut = section(plane, through, across, up)
    for electrode in scenery.electrodes(cut):
        put_electrode(panel, shown, electrode, 6.0)
    for lines, width, dots in ((scenery.walls(cut), 1.6, "-"), (scenery.detectors(cut), 1.0, ":")):
        for line in lines:
            places = shown.across.shown(line[:, 0]), shown.up.shown(line[:, 1])
            panel.plot(*places, linestyle=dots, color=PALE if dots == ":" else INK, linewidth=width)
