"""Speed of driftwell beside what a user would do otherwise, measured side by side in one run.

    python tools/bench.py [CASE ...] [--json FILE] [--repeats N] [--large] [--list]

A case times driftwell and its reference in turn and gives the ratio, reference over driftwell:
larger is better for driftwell. Reading the scenario, loading and compiling stay outside the timing
(save in `startup` and `start`); recording, ledger and answers are inside it. Without CASE the quick
ones are measured. Needs gcc; the cases of the tree need fmm3dpy.
"""

from __future__ import annotations

import argparse
import ctypes
import json
import os
import platform
import shutil
import sys
import tempfile
from collections.abc import Callable
from pathlib import Path
from typing import Any

import numpy as np
from bench_cases import tree
from bench_cases.boundary import boundary_1e5, capacitance
from bench_cases.direct import direct_16k
from bench_cases.fast import relativistic
from bench_cases.field_map import field_map
from bench_cases.frames import frames
from bench_cases.gas import gas
from bench_cases.night import record_1e4, resume
from bench_cases.periodic import periodic
from bench_cases.reference import GCC, reference_library
from bench_cases.start import start, startup
from bench_cases.sweep import sweep
from bench_cases.trap import direct_2k, script, small_trap
from bench_cases.whole_run import run_1e6

from driftwell.kernels.processor import processor

Case = Callable[..., dict[str, Any]]
"""(library of the C loops, repeats) -> figures; `rows` of them are printed as a table."""

QUICK: dict[str, Case] = {
    "small-trap": small_trap,
    "direct-2k": direct_2k,
    "direct-16k": direct_16k,
    "relativistic": relativistic,
    "script": script,
    "field-map": field_map,
    "startup": startup,
    "gas": gas,
}
LONG: dict[str, Case] = {
    "tree-1e5": tree.against_library(100_000, library_repeats=3),
    "tree-1e6": tree.against_library(1_000_000, library_repeats=1),
    "tree-table": tree.tree_table,
    "tree-growth": tree.tree_growth,
    "run-1e6": run_1e6,
    "start": start,
    "record-1e4": record_1e4,
    "resume": resume,
    "sweep": sweep,
    "capacitance": capacitance,
    "boundary-1e5": boundary_1e5,
    "frames": frames,
    "periodic": periodic,
}
CASES = {**QUICK, **LONG}
WITH_LARGE: dict[str, dict[str, Any]] = {
    "tree-table": {"counts": (100_000, 1_000_000, tree.LARGE)},
    "tree-growth": {"counts": (*tree.GROWTH, tree.LARGE)},
}
"""What --large adds: ten million charges, which need several GB and minutes."""


def machine() -> dict[str, Any]:
    """What the figures were measured on."""
    return {
        "processor": processor(),
        "cores": os.cpu_count(),
        "python": platform.python_version(),
        "numpy": np.__version__,
    }


def shown(name: str, found: dict[str, Any]) -> str:
    """The figures of a case in lines: the ratio, what else there is, the table."""
    lines = []
    if "ratio" in found:
        spread = (
            f" ({found['ratio_least']:.3g} to {found['ratio_most']:.3g})"
            if "ratio_least" in found
            else ""
        )
        lines.append(
            f"{name:12} ratio {found['ratio']:8.3g}{spread}  driftwell {found['seconds']:.4g} s, "
            f"{found['reference']} {found['reference_seconds']:.4g} s"
        )
    else:
        lines.append(name)
    said = {"ratio", "ratio_least", "ratio_most", "seconds", "reference_seconds"}
    lines += [
        f"{'':12} {key.replace('_', ' ')}: {value:.4g}"
        for key, value in found.items()
        if key not in said and isinstance(value, float)
    ]
    rows = found.get("rows", [])
    if rows:
        columns = list(rows[0])
        cells = [[_cell(row[column]) for column in columns] for row in rows]
        table = [[column.replace("_", " ") for column in columns], *cells]
        widths = [max(len(line[k]) for line in table) for k in range(len(columns))]
        lines += [
            "  " + "  ".join(cell.rjust(width) for cell, width in zip(line, widths, strict=True))
            for line in table
        ]
    return "\n".join(lines)


def _cell(value: Any) -> str:
    return f"{value:.3g}" if isinstance(value, float) else str(value)


def main() -> int:
    """Measure, print, and write the JSON file where asked."""
    parser = argparse.ArgumentParser(description=__doc__.split("\n\n")[0])
    parser.add_argument(
        "case", nargs="*", metavar="CASE", help=f"of {', '.join(CASES)}; default: the quick ones"
    )
    parser.add_argument("--only", action="append", default=[], choices=CASES, help="as CASE")
    parser.add_argument("--json", type=Path, metavar="FILE", help="write the figures to FILE")
    parser.add_argument("--repeats", type=int, default=5, help="pairs of timings a case")
    parser.add_argument("--large", action="store_true", help="add 1e7 charges to the tables")
    parser.add_argument("--list", action="store_true", help="say what the cases are")
    asked = parser.parse_args()
    if asked.list:
        for name, case in CASES.items():
            print(f"{name:12} {(case.__doc__ or '').splitlines()[0]}")
        return 0
    names = [*asked.case, *asked.only] or list(QUICK)
    unknown = [name for name in names if name not in CASES]
    if unknown:
        parser.error(f"no case {', '.join(unknown)}; there are {', '.join(CASES)}")
    if shutil.which(GCC[0]) is None:
        print("tools/bench.py needs gcc for its references", file=sys.stderr)
        return 2
    cases: dict[str, Any] = {}
    with tempfile.TemporaryDirectory() as folder:
        library: ctypes.CDLL = reference_library(Path(folder))
        for name in names:
            more = WITH_LARGE.get(name, {}) if asked.large else {}
            cases[name] = found = CASES[name](library, asked.repeats, **more)
            print(shown(name, found), flush=True)
            if asked.json:
                figures = {"machine": machine(), "cases": cases}
                asked.json.write_text(json.dumps(figures, indent=2) + "\n")
    return 0


if __name__ == "__main__":
    sys.exit(main())
