"""Which charges, and which records, a player shows: as many as a page can hold, evenly and fairly.

The record keeps trajectories in pieces of many records by :data:`CHUNK_CHARGES` charges. Of very
many charges some pieces are taken, evenly over each cloud, and a few neighbours from each: to take
them one by one would mean to read the whole record.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from driftwell.answers.evidence import CloudFacts
from driftwell.record.layout import CHUNK_CHARGES

Ints = NDArray[np.int64]

MOST_CHARGES = 1500
MOST_PLACES = 750_000
"""Charges times records: each takes 7 bytes, a third more when written as text."""
MOST_RECORDS = 20_000
FEWEST_PER_CLOUD = 60
"""A small cloud beside a large one is shown with so many charges, or all it has."""
READ_AT_ONCE = 400_000_000
"""Bytes of trajectories that are read whole."""
FEWEST_PIECES, MOST_PIECES = 8, 64
STATE_BYTES = 48


def evenly(count: int, wanted: int) -> Ints:
    """`wanted` numbers of 0, ..., count - 1, the first and the last among them."""
    chosen = min(count, wanted)
    return np.unique(np.linspace(0, count - 1, chosen).round().astype(np.int64))


def shares(counts: Sequence[int], wanted: int = MOST_CHARGES) -> list[int]:
    """How many of each cloud are shown, of all together `wanted` or a few more."""
    total = sum(counts)
    if total <= wanted:
        return list(counts)
    least = min(FEWEST_PER_CLOUD, max(1, wanted // max(len(counts), 1)))
    return [min(count, max(least, count * wanted // total)) for count in counts]


def records_shown(records: int, charges: int) -> Ints:
    """The records that are shown of so many, with so many charges."""
    return evenly(records, min(MOST_RECORDS, max(2, MOST_PLACES // max(charges, 1))))


@dataclass(frozen=True, slots=True)
class Columns:
    """Columns of the trajectories that are shown, and the cloud each belongs to."""

    column: Ints
    cloud: Ints


def columns_shown(ids: Ints, clouds: Sequence[CloudFacts], records: int) -> Columns:
    """Of the tracked charges `ids`, ascending, those to be shown."""
    cloud = cloud_of(ids, clouds)
    members = [np.flatnonzero(cloud == facts.index) for facts in clouds]
    shown = shares([len(own) for own in members])
    whole = len(ids) * records * STATE_BYTES <= READ_AT_ONCE
    chosen = [
        own[evenly(len(own), number) if whole else _in_pieces(own, number, len(ids), records)]
        for own, number in zip(members, shown, strict=True)
        if number
    ]
    column = np.sort(np.concatenate(chosen)) if chosen else np.zeros(0, np.int64)
    return Columns(column, cloud[column])


def cloud_of(ids: Ints, clouds: Sequence[CloudFacts]) -> Ints:
    """The cloud of each id; -1 where none has it."""
    found = np.full(len(ids), -1, np.int64)
    for facts in clouds:
        found[(ids >= facts.first_id) & (ids < facts.first_id + facts.count)] = facts.index
    return found


def _in_pieces(own: Ints, number: int, tracked: int, records: int) -> Ints:
    """Places within `own`, rising columns of one cloud, of `number` that lie in few pieces."""
    allowed = READ_AT_ONCE // (CHUNK_CHARGES * STATE_BYTES * max(records, 1))
    allowed = min(max(allowed, FEWEST_PIECES), MOST_PIECES)
    pieces = max(1, min(number, round(allowed * len(own) / tracked)))
    each = -(-number // pieces)
    starts = np.linspace(0, max(len(own) - each, 0), pieces).round().astype(np.int64)
    # a group that ended in the next piece would cost a second one
    into = own[starts] % CHUNK_CHARGES
    starts -= np.maximum(0, into + each - CHUNK_CHARGES)
    places = np.clip(starts, 0, None)[:, None] + np.arange(each)
    return np.unique(places[places < len(own)])[:number]
