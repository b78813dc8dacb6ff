"""The number of segments of a run is foretold as the writer really seals them."""

from __future__ import annotations

import math

import pytest

from driftwell.record.sealing import longest_wait, most_bytes, segments_of


def sealed(seconds: float, records: int, rows: int, state: int) -> int:
    """Segments of a run followed record by record, as the writer decides at each of them."""
    pending, sealed_bytes, sealed_at, count = 0.0, 0.0, 0.0, 0
    for k in range(1, records + 1):
        now = seconds * k / records
        pending += rows / records
        if pending >= most_bytes(int(sealed_bytes), state) or (
            now - sealed_at >= longest_wait(now, state)
        ):
            count += 1
            sealed_bytes += pending + state
            pending, sealed_at = 0.0, now
    return count + 1  # the rest, at the end


@pytest.mark.parametrize(
    ("seconds", "records", "rows", "state"),
    [
        (1.0, 200, 10_000_000, 1_000_000),
        (100.0, 200, 10_000_000, 1_000_000),
        (3600.0, 20_000, 10**9, 10**6),
        (8 * 3600.0, 200_000, 10**9, 10**6),
        (8 * 3600.0, 200_000, 10**11, 10**6),
        (8 * 3600.0, 200, 10**10, 10**8),
        (8 * 3600.0, 50_000, 10**10, 120_000_000),
        (8 * 3600.0, 50_000, 10**12, 10**9),
        (1e6, 100_000, 10**9, 10**6),
        (0.0, 1000, 10**10, 10**6),
        (0.0, 10, 10**10, 10**9),
    ],
)
def test_it_is_what_sealing_record_by_record_comes_to(
    seconds: float, records: int, rows: int, state: int
) -> None:
    """Within 2 %: the wait grows a little while it lasts."""
    expected = sealed(seconds, records, rows, state)
    found = segments_of(seconds, records, rows, state)
    assert abs(found - expected) <= max(1, 0.02 * expected)


def test_a_night_has_the_segments_that_were_planned_for_it() -> None:
    """8 hours: 460 in the first 100 minutes, and one a minute after that."""
    expected = 100.0 * math.log(60.0 / 10.0) + 100 + (8 * 3600.0 - 6000.0) / 60.0
    assert abs(segments_of(8 * 3600.0, 10**6, 10**8, 10**5) - expected) < 0.03 * expected


def test_a_run_without_records_or_time_is_one_segment() -> None:
    assert 1 == segments_of(0.0, 0, 0, 100)
    assert 1 == segments_of(1e9, 0, 0, 100)
    assert 1 == segments_of(0.0, 100, 0, 100)


def test_a_thousand_years_are_counted_at_once() -> None:
    found = segments_of(3e10, 20_000_000, 10**12, 10**6)
    assert 19_000_000 < found <= 20_000_001
