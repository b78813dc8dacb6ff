"""HDF5 files made in memory, by the entries of the layout.

HDF5 never writes to the disk itself: on a full disk it can leave wrong rows and crash at exit,
where a plain write of finished bytes is a plain error. Version 1.10 of the file format is used
because its metadata carry checksums; the data carry theirs by the fletcher32 filter. Texts that are
read back are of fixed size: those of any length lie in a heap without a checksum, and HDF5 never
comes back from a heap in which a bit is turned.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from contextlib import contextmanager
from typing import Any
from uuid import uuid4

import h5py
import numpy as np
from numpy.typing import ArrayLike, NDArray

from driftwell.record.layout import (
    CHUNK_BYTES,
    CHUNK_CHARGES,
    CHUNK_RECORDS,
    Attribute,
    Dataset,
)

COMPACT_BYTES = 8192
"""Arrays up to this size are kept inside their header, whose checksum then covers them."""


@contextmanager
def file_in_memory() -> Iterator[h5py.File]:
    """A new HDF5 file that never touches the disk."""
    with h5py.File(
        f"driftwell-{uuid4().hex}",
        "w",
        driver="core",
        backing_store=False,
        libver=("v110", "v110"),
    ) as file:
        yield file


def image_of(file: h5py.File) -> bytes:
    """The bytes of a file made in memory."""
    file.flush()
    image: bytes = file.id.get_file_image()
    return image


def put_attributes(target: Any, entries: Iterable[Attribute], values: Mapping[str, Any]) -> None:
    """Write `values` as the attributes `entries` of a file or group."""
    for entry in entries:
        value = values[entry.name]
        if not entry.is_text:
            target.attrs[entry.name] = np.dtype(entry.kind).type(value)
            continue
        texts = [value] if entry.kind == "text" else list(value)
        stored = [text.encode() for text in texts]
        size = max([1, *map(len, stored)])
        target.attrs.create(
            entry.name,
            np.bytes_(stored[0]) if entry.kind == "text" else np.array(stored, f"S{size}"),
            dtype=h5py.string_dtype("utf-8", size),
        )


def attributes_of(target: Any, entries: Iterable[Attribute]) -> dict[str, Any]:
    """The attributes `entries` of a file or group as plain Python values."""
    values: dict[str, Any] = {}
    for entry in entries:
        value = target.attrs[entry.name]
        if not entry.is_text:
            values[entry.name] = value.item()
        elif entry.kind == "text":
            values[entry.name] = text_of(value)
        else:
            values[entry.name] = tuple(text_of(each) for each in value)
    return values


def text_of(stored: str | bytes) -> str:
    """A text as it is read back; up to format 3 texts of attributes were of any length."""
    return stored.decode() if isinstance(stored, bytes) else stored


def put_dataset(group: Any, entry: Dataset, data: NDArray[Any], path: str | None = None) -> Any:
    """Write `data` as the dataset `entry`, chunked and checksummed, with its unit and help."""
    stored = put_array(group, path or entry.path, data, _chunks(entry, data))
    describe(stored, entry)
    return stored


def put_array(group: Any, path: str, data: ArrayLike, chunks: tuple[int, ...] | None = None) -> Any:
    """Write any array of numbers with a checksum over it: the header's, or one for each chunk."""
    array = np.asarray(data)
    if array.size == 0:
        return group.create_dataset(path, data=array)
    if array.nbytes <= COMPACT_BYTES:
        plist = h5py.h5p.create(h5py.h5p.DATASET_CREATE)
        plist.set_layout(h5py.h5d.COMPACT)
        return group.create_dataset(path, data=array, dcpl=plist)
    return group.create_dataset(
        path, data=array, chunks=chunks or _plain_chunks(array), fletcher32=True
    )


def describe(stored: Any, entry: Dataset) -> None:
    """Name the units and the meaning of a dataset in its attributes."""
    stored.attrs["help"] = entry.help
    if entry.columns:
        stored.attrs["units"] = [column.unit for column in entry.columns]
    else:
        stored.attrs["unit"] = entry.unit


def _chunks(entry: Dataset, data: NDArray[Any]) -> tuple[int, ...] | None:
    if entry.path != "trajectory/state" or data.size == 0:
        return None
    records, charges, width = data.shape
    return _even(records, CHUNK_RECORDS), _even(charges, CHUNK_CHARGES), width


def _plain_chunks(array: NDArray[Any]) -> tuple[int, ...]:
    row_bytes = array.nbytes // array.shape[0]
    return _even(array.shape[0], max(1, CHUNK_BYTES // row_bytes)), *array.shape[1:]


def _even(length: int, most: int) -> int:
    """Length of the fewest equal chunks of at most `most`: the last is hardly padded."""
    return -(-length // -(-length // most))


def text_table(entry: Dataset, columns: Mapping[str, list[Any]]) -> NDArray[Any]:
    """A table from its columns; texts are stored as UTF-8 of the longest one's size."""
    texts = {
        column.name: [text.encode() for text in columns[column.name]]
        for column in entry.columns
        if column.kind == "text"
    }
    sizes = {name: max([1, *map(len, values)]) for name, values in texts.items()}
    table = np.zeros(len(columns[entry.columns[0].name]), entry.dtype(sizes))
    for column in entry.columns:
        if table.size:
            table[column.name] = texts.get(column.name, columns[column.name])
    return table


def table_rows(entry: Dataset, table: NDArray[Any]) -> list[dict[str, Any]]:
    """The rows of a table as plain Python values by column; older formats lack some."""
    return [
        {
            column.name: row[column.name].decode()
            if column.kind == "text"
            else row[column.name].item()
            for column in entry.columns
            if column.name in (table.dtype.names or ())
        }
        for row in table
    ]
