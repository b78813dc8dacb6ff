"""What can be exported, by name, and how to install what a format needs: plain words only."""

from __future__ import annotations

FORMATS = ("openpmd", "csv", "parquet", "vtk")

STATES = ("snapshots", "trajectory")
"""Charges at times: every one alive at the snapshots, or the tracked ones at every record."""

TABLES = (
    *STATES,
    "moments",
    "ledger",
    "exchange",
    "losses",
    "crossings",
    "births",
    "traces",
    "answers",
    "clouds",
)
"""The tables of a run, in the order in which they are written."""
