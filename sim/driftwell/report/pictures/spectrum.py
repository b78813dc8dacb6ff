"""Picture: spectra of the traced motions, on logarithmic axes, with their strongest lines.

    A(f) = |sum of h(t) (x(t) - mean) exp(-2 pi i f t)| 2 / sum of h(t)                       (1)

h is a Hann window: a sine of amplitude A stands as high as A. The lines and their frequencies are
those that questions find (:mod:`driftwell.answers.sinusoid`).

References
----------
F. J. Harris, Proc. IEEE 66 (1978) 51 (window; from memory).
"""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from numpy.typing import NDArray

from driftwell.answers.sinusoid import LEAST_SAMPLES, Line, lines_in
from driftwell.errors import AnswerError
from driftwell.record.reader import Run
from driftwell.report.paper.palette import BLUE, INK, VERMILLION
from driftwell.report.paper.panel import put_across
from driftwell.report.paper.ruler import Ruler, in_words, prefix_size, ruler
from driftwell.report.paper.sheet import Entry, printable, sheet
from driftwell.report.paper.time_axis import put_decades
from driftwell.report.pictures.scene import Scene

Floats = NDArray[np.float64]

MOST_TRACES = 4
MOST_SAMPLES = 1 << 16
"""Longer traces are drawn without their lines: finding these would take long."""
MARKED = 4
PADDED = 4
"""Points of the spectrum in a bin, so that lines have their shape."""
ROOM = 0.16
"""Part of the axis that the name of a line takes."""
FAINT, BEYOND = 1e-3, 1.5
"""The axis ends so many times beyond the last frequency at which this part of the top stands."""
DECADES = 6.0
"""How far below the highest point the axis reaches at most."""
POINTS = 4000
"""More points than these are drawn as the highest of each stretch."""


def spectrum_picture(scene: Scene) -> Figure | None:
    """A panel for each traced coordinate that moves; None where there is none."""
    traces = [trace for trace in traced_motions(scene.run) if trace[1].size]
    if not traces:
        return None
    shown = traces[:MOST_TRACES]
    key = [
        Entry("amplitude of the motion", BLUE, line="-"),
        Entry("line, with its frequency", VERMILLION, "v"),
    ]
    if len(traces) > MOST_TRACES:
        key.append(Entry(f"{len(traces) - MOST_TRACES} more traces not shown", INK))
    figure = sheet(scene.run, 9.6, 0.9 + 2.5 * len(shown), key)
    for panel, (name, time, value) in zip(
        figure.subplots(len(shown), 1, squeeze=False)[:, 0], shown, strict=True
    ):
        put_spectrum(panel, time, value)
        spacing = float(time[-1] - time[0]) / (time.size - 1)
        panel.set_title(
            f"{printable(name, 60)}: {time.size} samples, one every {in_words(spacing, 's')}"
        )
    return figure


def traced_motions(run: Run) -> list[tuple[str, Floats, Floats]]:
    """Names, times (s) and values (m) of the traced coordinates, as long as they were followed.

    Those of the centres of clouds come first, then those of single charges.
    Times are empty where too little was followed, or it did not move.
    """
    if not run.header.traces:
        return []
    time, values = run.rows("trace/time"), run.rows("trace/value")
    found = []
    for name, value in zip(run.header.traces, values.T, strict=True):
        good = np.isfinite(value)
        first = int(good.argmax())
        rest = good[first:]
        last = first + (int(rest.size) if rest.all() else int(rest.argmin()))
        moving = last - first >= LEAST_SAMPLES and np.ptp(value[first:last]) > 0.0
        part = slice(first, last) if moving else slice(0, 0)
        found.append((name, time[part], np.ascontiguousarray(value[part])))
    return sorted(found, key=lambda trace: trace[0].split()[-2:-1] != ["centre"])


def spectrum(time: Floats, value: Floats) -> tuple[Floats, Floats]:
    """Frequencies above 0, Hz, and amplitudes in the unit of the values, eq. 1."""
    count = time.size
    window = 0.5 - 0.5 * np.cos(2.0 * math.pi * (np.arange(count) + 0.5) / count)
    magnitude = np.abs(np.fft.rfft((value - value.mean()) * window, PADDED * count))
    spacing = float(time[-1] - time[0]) / (count - 1)
    frequency = np.arange(magnitude.size) / (PADDED * count * spacing)
    return frequency[1:], 2.0 * magnitude[1:] / float(window.sum())


def put_spectrum(axes: Axes, time: Floats, value: Floats) -> None:
    """Fill a panel with the spectrum of one motion and its strongest lines."""
    frequency, amplitude = spectrum(time, value)
    top = float(amplitude.max())
    highest = float(frequency[amplitude >= FAINT * top][-1])
    across = ruler((0.0, min(BEYOND * highest, float(frequency[-1]))), "Hz")
    shown = frequency <= across.high
    frequency, amplitude = frequency[shown], amplitude[shown]
    low = max(top * 10.0**-DECADES, float(np.median(amplitude)) / 30.0, 1e-300)
    up = ruler((low, 4.0 * top), "m", prefix_size(top))
    every = max(1, -(-frequency.size // POINTS))
    places = np.arange(0, frequency.size, every)
    axes.plot(
        across.shown(frequency[places]),
        up.shown(np.maximum(np.maximum.reduceat(amplitude, places), low)),
        color=BLUE,
        linewidth=0.9,
    )
    axes.set_yscale("log")
    axes.set_ylim(*up.limits)
    axes.set_ylabel(up.label("amplitude"))
    put_decades(axes, (1.0,))
    put_across(axes, across, "frequency")
    lines = [
        line
        for line in _lines(time, value)
        if line.amplitude > low and line.frequency <= across.high
    ]
    put_lines(axes, lines, across, up)


def put_lines(axes: Axes, lines: Sequence[Line], across: Ruler, up: Ruler) -> None:
    """Mark the strongest lines, and name those that have room beside them."""
    taken: list[tuple[float, float]] = []
    for line in lines[:MARKED]:
        x, y = float(across.shown(line.frequency)), 1.25 * float(up.shown(line.amplitude))
        axes.plot(x, y, marker="v", color=VERMILLION, markersize=5.0, linestyle="none")
        part = line.frequency / across.high
        leftward = part > 1.0 - ROOM
        room = (part - ROOM, part) if leftward else (part, part + ROOM)
        if any(room[0] < end and begin < room[1] for begin, end in taken):
            continue
        taken.append(room)
        axes.annotate(
            in_words(line.frequency, "Hz", 6),
            (x, y),
            xytext=(-6.0 if leftward else 6.0, 1.0),
            textcoords="offset points",
            fontsize=8.0,
            color=INK,
            ha="right" if leftward else "left",
        )


def _lines(time: Floats, value: Floats) -> list[Line]:
    if time.size > MOST_SAMPLES:
        return []
    try:
        return lines_in(time, value)
    except AnswerError:
        return []
