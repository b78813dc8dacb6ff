"""Two pictures of the tree: what accuracy costs, and how the cost grows with the charges.

    python tools/tree_accuracy.py [--count N] [--largest N] [--to FOLDER]

`tree-error.png`: the rms error of the forces against the time per charge, measured. Lines are the
settings the product chooses for an accuracy, for several clouds; dots are other orders and
tolerances, on the Gaussian cloud: the line should run along their lower left edge.
`tree-cost.png`: the time per charge against the number of charges, with the direct sum's beside it.
"""

from __future__ import annotations

import argparse
import os
import sys
from dataclasses import replace
from pathlib import Path
from typing import Any

import matplotlib as mpl
import numpy as np
from bench_cases import sums
from bench_cases.clouds import CLOUDS
from bench_cases.force_error import samples
from bench_cases.timing import best_of
from matplotlib.ticker import FixedLocator, NullLocator

ROOT = Path(__file__).resolve().parent.parent
THREADS = min(2, os.cpu_count() or 1)
ACCURACIES = (1e-2, 3e-3, 1e-3, 3e-4, 1e-4, 3e-5, 1e-5, 1e-6)
ORDERS = (4, 6, 8, 10)
TOLERANCE_FACTORS = (0.1, 0.3, 1.0, 3.0, 10.0)
MICROSECONDS = (0.1, 0.2, 0.3, 0.5, 0.7, 1, 1.5, 2, 3, 5, 10)
COLOURS = {
    "gaussian": "#1f5a99",
    "ball": "#2f8f5b",
    "cube": "#7a4fa3",
    "plummer": "#c7622b",
    "two signs": "#b3365b",
}


def measured(tree: sums.BareSum) -> float:
    """Microseconds a charge, the better of two after a first."""
    tree()
    return 1e6 * best_of(2, tree) / tree.charge.size


def picture_of_errors(count: int, file: Path) -> None:
    """Error against cost at one number of charges."""
    from matplotlib import pyplot

    from driftwell.coulomb.tree import settings_for

    figure, axes = pyplot.subplots(figsize=(6.4, 4.4), layout="constrained")
    for name, cloud in CLOUDS.items():
        place, charge = cloud(count)
        truth = samples(place, charge)
        line = []
        for accuracy in ACCURACIES:
            tree = sums.tree(place, charge, THREADS, accuracy)
            line.append((measured(tree), truth.error(tree.field).rms))
        axes.plot(*np.array(line).T, "o-", color=COLOURS[name], label=name, markersize=4)
        print(name, " ".join(f"{error:.1e} at {cost:.2f} us" for cost, error in line), flush=True)
        if name != "gaussian":
            continue
        for order in ORDERS:
            dots = []
            for factor in TOLERANCE_FACTORS:
                base = settings_for(1e-4)
                accuracy = 1e-4 * factor
                chosen = replace(base, order=order, tolerance=base.tolerance * factor)
                tree = sums.tree(place, charge, THREADS, accuracy, settings=chosen)
                dots.append((measured(tree), truth.error(tree.field).rms))
            axes.plot(*np.array(dots).T, ".", color="#9aa3ad", markersize=5, zorder=0)
            axes.annotate(str(order), dots[-1], fontsize=7, color="#6b7480")
    axes.set(
        xscale="log",
        yscale="log",
        xlabel=f"time per charge, us ({_threads()})",
        ylabel="rms relative error of the forces",
        title=f"{count} charges; grey: other orders (numbers) and tolerances",
    )
    _finish(axes, figure, file)


def picture_of_costs(largest: int, file: Path) -> None:
    """Cost against number at three accuracies, and the direct sum's."""
    from matplotlib import pyplot

    figure, axes = pyplot.subplots(figsize=(6.4, 4.4), layout="constrained")
    counts = [n for k in range(3, 8) for n in (10**k, 3 * 10**k) if n <= largest]
    styles = {1e-3: ":", 1e-4: "-", 1e-5: "--"}
    for name in ("gaussian", "cube"):
        for accuracy, style in styles.items():
            costs = [measured(sums.tree(*CLOUDS[name](n), THREADS, accuracy)) for n in counts]
            axes.plot(
                counts, costs, style, color=COLOURS[name], label=f"{name}, accuracy {accuracy:g}"
            )
            fitted = np.polyfit(np.log(counts[-4:]), np.log(costs[-4:]), 1)[0]
            print(f"{name} {accuracy:g}: cost of all grows as n^{1.0 + fitted:.2f} at the end")
    few = [n for n in counts if n <= 30_000]
    direct = [measured(sums.direct(*CLOUDS["gaussian"](n), THREADS)) for n in few]
    axes.plot(few, direct, color="#303840", label="direct sum")
    axes.set(
        xscale="log",
        yscale="log",
        xlabel="charges",
        ylabel=f"time per charge, us ({_threads()})",
    )
    _finish(axes, figure, file)


def _threads() -> str:
    return "one thread" if THREADS == 1 else f"{THREADS} threads"


def _finish(axes: Any, figure: Any, file: Path) -> None:
    """Grid and key; written as a small PNG."""
    for axis in (axes.xaxis, axes.yaxis):
        if axis.get_label_text().startswith("time"):
            axis.set_major_locator(FixedLocator(MICROSECONDS))
            axis.set_major_formatter("{x:g}")
            axis.set_minor_locator(NullLocator())
    axes.grid(color="#d8dde2", linewidth=0.6)
    axes.spines[["top", "right"]].set_visible(False)
    axes.legend(frameon=False, fontsize=8)
    figure.savefig(file, dpi=110, metadata={"Software": None})
    print(file)


def main() -> int:
    """Measure and draw both."""
    parser = argparse.ArgumentParser(description=__doc__.split("\n\n")[0])
    parser.add_argument("--count", type=int, default=100_000, help="charges of the first picture")
    parser.add_argument("--largest", type=int, default=1_000_000, help="most of the second")
    parser.add_argument("--to", type=Path, default=ROOT / "docs" / "numerics", metavar="FOLDER")
    asked = parser.parse_args()
    mpl.use("Agg")
    picture_of_errors(asked.count, asked.to / "tree-error.png")
    picture_of_costs(asked.largest, asked.to / "tree-cost.png")
    return 0


if __name__ == "__main__":
    sys.exit(main())
