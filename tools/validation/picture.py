"""A small picture for each case: its values in error bars, and where there is one its curve."""

from __future__ import annotations

from pathlib import Path

from validation.case import Case, Curve
from validation.results import Result

INSIDE, OUTSIDE, PUBLISHED = "#1a6a9c", "#b3331d", "#777777"
MOST_ROWS = 24


def draw(case: Case, result: Result, path: Path) -> None:
    """The picture of a case, into `path`."""
    import matplotlib as mpl

    mpl.use("Agg")
    from matplotlib import pyplot as plt

    found = result.found[:MOST_ROWS]
    rows = len(found)
    curve = case.curve(list(result.found)) if case.curve is not None else None
    columns = 1 if curve is None else 2
    height = max(1.1 + 0.22 * rows, 2.4 if curve else 0.0)
    figure, axes = plt.subplots(
        1, columns, figsize=(4.6 * columns, height), squeeze=False, layout="constrained"
    )
    bars = axes[0][0]
    bars.axvspan(-2.0, 2.0, color="#e8eef2", lw=0)
    bars.axvline(0.0, color=PUBLISHED, lw=1)
    for k, each in enumerate(found):
        at = max(-5.0, min(5.0, each.bars))
        colour = INSIDE if abs(each.bars) <= 2.0 else OUTSIDE
        bars.errorbar([at], [k], xerr=[1.0], fmt="o", ms=3.5, lw=1.2, color=colour)
    bars.set_yticks(range(rows), [each.what for each in found], fontsize=6.5)
    bars.set_ylim(rows - 0.4, -0.6)
    bars.set_xlim(-5.4, 5.4)
    bars.tick_params(axis="x", labelsize=6.5)
    bars.set_xlabel("(driftwell - published) / combined error", fontsize=6.5)
    bars.set_title(case.name, fontsize=8)
    if curve is not None:
        _draw_curve(curve, axes[0][1])
    path.parent.mkdir(parents=True, exist_ok=True)
    figure.savefig(path, dpi=80, metadata={"Software": None})
    plt.close(figure)


def _draw_curve(curve: Curve, axes: object) -> None:
    from matplotlib.axes import Axes

    assert isinstance(axes, Axes)
    axes.plot(curve.published_x, curve.published_y, color=PUBLISHED, lw=1.2, label="published")
    axes.errorbar(
        curve.x, curve.y, yerr=curve.error, fmt="o", ms=3, lw=1, color=INSIDE, label="driftwell"
    )
    if curve.log_y:
        axes.set_yscale("log")
    axes.set_xlabel(curve.x_name, fontsize=6.5)
    axes.set_ylabel(curve.y_name, fontsize=6.5)
    axes.tick_params(labelsize=6.5)
    axes.legend(fontsize=6.5, frameon=False)
