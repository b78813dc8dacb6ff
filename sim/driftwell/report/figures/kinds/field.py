"""Figure: lines of equal potential and field lines in a plane, with outlines and charges' ways.

The potential is that of all fields and electrodes at one time, without the charges' own. Field
lines follow -grad phi within the plane: where the plane is one of symmetry they are the true ones,
elsewhere their shadows in it. Magnetic fields, and what changing ones induce, are not drawn.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from numpy.typing import NDArray

from driftwell.report.again import read_again
from driftwell.report.field_pictures.equipotentials import put_electrode, put_lines, put_scale
from driftwell.report.figures.kind import Kind, chosen_clouds
from driftwell.report.figures.options import (
    AXES,
    COLUMN,
    PAGE,
    FigureError,
    FigureOptions,
    plane_axes,
    stretch,
    width_of,
)
from driftwell.report.figures.options import value as read_value
from driftwell.report.figures.print_style import SMALL, blank, finish
from driftwell.report.paper.palette import BLACK, GREEN, INK, PURPLE
from driftwell.report.paper.projection import Frame, frame, put_frame
from driftwell.report.paper.ruler import Interval, interval, ruler
from driftwell.report.paper.shades import shades
from driftwell.report.pictures.scene import Scene
from driftwell.report.pictures.trajectories import Way, way_of
from driftwell.report.sections.scenery import Scenery, scenery_of
from driftwell.report.sections.section import Section, section

Floats = NDArray[np.float64]

MOST_TRACKS = 20
FLAT = 1e-9
"""A potential that varies by less than this part of itself has no lines."""
STREAMS = 0.75
"""Density of field lines, of that matplotlib takes for usual."""
SHORTEST = 0.03
"""Shortest field line, as part of the panel."""
NARROWEST, WIDEST = 0.6, 3.2
BROAD = 1.9
"""Width over height of a panel that is shown a page wide."""
BESIDE, BELOW = 0.026, 0.011
"""Room beside the panel and below it, m."""
NAME = 6.5
"""Size of electrodes' names, points."""
ROUND_MARGIN = 0.6
"""Room about charges that no electrode stands around, as part of their span."""


def draw(scene: Scene, options: FigureOptions) -> Figure:
    """The plane asked for; z-x otherwise, x-y where electrodes are the same at every z."""
    scenery, why = scenery_of(scene.run)
    if scenery is None:
        raise FigureError(f"{scene.run.folder}: no field can be drawn: {why}.")
    planar = scenery.acting is not None and scenery.acting.solved.geometry == "planar"
    plane = plane_axes(options.plane or ("xy" if planar else "zx"))
    time = _time(scene, options)
    ways = chosen_ways(scene, options)
    limits = _limits(scene, scenery, plane, ways)
    wanted = (stretch(options.across, "m", "across"), stretch(options.up, "m", "up"))
    across, up = (asked or usual for asked, usual in zip(wanted, limits, strict=True))
    ratio = min(max((across[1] - across[0]) / (up[1] - up[0]), NARROWEST), WIDEST)
    shown = frame(across, up, ratio)
    across, up = (shown.across.low, shown.across.high), (shown.up.low, shown.up.high)
    plane_section = section(plane, read_value(options.through, "m", "through"), across, up)
    potential = scenery.potential(plane_section, time)
    _check_uneven(scene, potential, time)
    usual = COLUMN if shown.ratio < BROAD else PAGE
    wide = width_of(options, usual)
    sized = replace(options, width=wide)
    high = (wide - BESIDE) / shown.ratio + BELOW
    figure = blank(scene.run, sized, (), wide / high)
    panel = figure.subplots()
    put_field(figure, panel, shown, plane_section, potential)
    for electrode in scenery.electrodes(plane_section):
        put_electrode(panel, shown, electrode, NAME)
    put_walls(panel, shown, scenery, plane_section)
    put_ways(panel, shown, plane, ways)
    put_frame(panel, shown, (AXES[plane[0]], AXES[plane[1]]))
    keep_names_inside(figure, panel)
    return finish(figure)


def keep_names_inside(figure: Figure, panel: Axes) -> None:
    """Shift names of electrodes that would be cut at the panel's edge."""
    figure.draw_without_rendering()
    frame_box, turned = panel.get_window_extent(), panel.transData.inverted()
    for text in panel.texts:
        if not text.get_path_effects():
            continue
        box = text.get_window_extent()
        right = max(frame_box.x0 - box.x0, 0.0) - max(box.x1 - frame_box.x1, 0.0)
        above = max(frame_box.y0 - box.y0, 0.0) - max(box.y1 - frame_box.y1, 0.0)
        if box.width < frame_box.width and (right or above):
            middle = panel.transData.transform(text.get_position())
            x, y = turned.transform((middle[0] + right, middle[1] + above))
            text.set_position((float(x), float(y)))


def put_field(figure: Figure, panel: Axes, shown: Frame, plane: Section, potential: Floats) -> None:
    """Shades and lines of the potential, and field lines with arrows."""
    volts = ruler(interval(potential[np.isfinite(potential)], margin=0.0), "V")
    found = shades(potential)
    put_lines(panel, shown, (plane.across, plane.up, potential), found, volts)
    for text in panel.texts:
        text.set_fontsize(SMALL - 1.0)
    for lines in panel.collections:
        if hasattr(lines, "levels"):
            lines.set_linewidth(0.5)
    put_field_lines(panel, shown, plane, potential)
    put_scale(figure, panel, found, volts, panel.inset_axes((1.03, 0.0, 0.03, 1.0)))


def put_field_lines(panel: Axes, shown: Frame, plane: Section, potential: Floats) -> None:
    """Lines along -grad phi, in the colour that neither shade has."""
    rise, run = np.gradient(potential, plane.up, plane.across, edge_order=2)
    # steps between points differ by rounding, which streamplot refuses
    across, up = (
        np.linspace(float(ends[0]), float(ends[-1]), ends.size)
        for ends in (shown.across.shown(plane.across), shown.up.shown(plane.up))
    )
    panel.streamplot(
        across,
        up,
        np.ma.masked_invalid(-run / shown.across.size),
        np.ma.masked_invalid(-rise / shown.up.size),
        density=STREAMS,
        minlength=SHORTEST,
        color=GREEN,
        linewidth=0.5,
        arrowsize=0.5,
        zorder=2.5,
    )


def put_walls(panel: Axes, shown: Frame, scenery: Scenery, plane: Section) -> None:
    """Walls as heavy lines, detectors as dotted ones."""
    for lines, width, dots in (
        (scenery.walls(plane), 1.6, "-"),
        (scenery.detectors(plane), 1.0, ":"),
    ):
        for line in lines:
            across, up = shown.across.shown(line[:, 0]), shown.up.shown(line[:, 1])
            panel.plot(across, up, linestyle=dots, color=BLACK, linewidth=width, zorder=5)


def put_ways(panel: Axes, shown: Frame, plane: tuple[int, int], ways: list[Way]) -> None:
    """The ways of tracked charges, and a cross where one ended on a wall."""
    for way in ways:
        first, second = way.path(*plane)
        across, up = shown.across.shown(first), shown.up.shown(second)
        panel.plot(across, up, color=PURPLE, linewidth=0.6, alpha=0.9, zorder=4)
        if way.lost:
            panel.plot(across[-1:], up[-1:], "x", color=INK, markersize=3.0, zorder=6)


def chosen_ways(scene: Scene, options: FigureOptions) -> list[Way]:
    """Some of the tracked charges of the clouds asked for."""
    tracked = scene.run.header.tracked
    ids = [
        charge
        for charge in tracked
        for cloud in chosen_clouds(scene, options)
        if cloud.first_id <= charge < cloud.first_id + cloud.count
    ]
    places = np.unique(np.linspace(0, len(ids) - 1, min(MOST_TRACKS, len(ids))).round())
    ways = [way_of(scene, ids[int(place)]) for place in places]
    return [way for way in ways if way is not None]


def missing(scene: Scene) -> str:
    """Why it cannot be drawn."""
    again = read_again(scene.run)
    if again.loaded is None:
        return again.why
    scenario = again.loaded.scenario
    return "" if scenario.field or scenario.electrode else "the scenario has no field"


def _time(scene: Scene, options: FigureOptions) -> float:
    if options.at is None or options.at == "start":
        return 0.0
    return scene.run.end_time if options.at == "end" else read_value(options.at, "s", "at")


def _limits(
    scene: Scene, scenery: Scenery, plane: tuple[int, int], ways: list[Way]
) -> tuple[Interval, Interval]:
    """What holds the electrodes; without them the charges, with room about them."""
    reach = scenery.reach(plane)
    if reach is not None:
        return reach
    places = [view.position for _, view in scene.views] + [way.position for way in ways]
    if not places:
        raise FigureError(
            f"{scene.run.folder}: there is neither an electrode nor a charge to show a field "
            "around. Give --across and --up."
        )
    held = np.concatenate(places)
    largest = float(np.ptp(held, axis=0).max()) or 1e-3
    across, up = (interval(held[:, axis], least=largest, margin=ROUND_MARGIN) for axis in plane)
    return across, up


def _check_uneven(scene: Scene, potential: Floats, time: float) -> None:
    known = potential[np.isfinite(potential)]
    if not known.size:
        raise FigureError(
            f"{scene.run.folder}: the field is known nowhere in this plane. Take another with "
            "--plane, --through, --across and --up."
        )
    if float(np.ptp(known)) <= FLAT * float(np.abs(known).max()):
        raise FigureError(
            f"{scene.run.folder}: the potential is the same everywhere at t = {time:.6g} s (an "
            "alternating voltage may be zero then). Take another time with --at."
        )


KIND = Kind(
    "equipotentials and field lines in a plane, with electrodes, walls and charges' ways",
    ("of", "at", "plane", "through", "across", "up"),
    missing,
    draw,
)
