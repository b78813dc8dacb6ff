"""The scenario's [record] section."""

from __future__ import annotations

from driftwell.forms import Count, Form, NonNegative, Positive, Time, key

DEFAULT_RECORDS = 200
DEFAULT_TRACKS = 1000


class Record(Form):
    """What is kept, and how often."""

    every: Positive[Time] | None = key(
        f"time between two records; left out: {DEFAULT_RECORDS} records over the duration",
        default=None,
        example="10 us",
    )
    tracks: NonNegative[Count] | None = key(
        "number of charges whose trajectories are kept, evenly chosen by id; left out: all up to "
        f"{DEFAULT_TRACKS}, else {DEFAULT_TRACKS}",
        default=None,
        example=200,
    )
    snapshots: Positive[Time] | None = key(
        "time between two snapshots of every charge; left out: start and end only",
        default=None,
        example="100 us",
    )
