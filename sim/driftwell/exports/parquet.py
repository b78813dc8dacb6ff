"""Tables as Parquet, one file each; units and meanings stand in the columns' metadata."""

from __future__ import annotations

from pathlib import Path
from typing import Any

from driftwell.exports.extra import missing
from driftwell.exports.tables import Batch, Labels, Table, tables
from driftwell.exports.wanted import Wanted
from driftwell.exports.written import whole
from driftwell.record.reader import Run

ENDING = ".parquet"


def write(run: Run, wanted: Wanted, path: Path) -> None:
    """A folder of files, one for each table; one file where `path` ends in .parquet."""
    try:
        import pyarrow.parquet  # noqa: F401
    except ImportError as fault:
        raise missing("pyarrow", "parquet", "Parquet") from fault
    found = tables(run, wanted)
    header = run.header
    about = {
        "title": header.title,
        "software": f"driftwell {header.driftwell_version}",
        "created": header.created,
        "digest": header.digest,
        **({"author": wanted.author} if wanted.author else {}),
    }
    if path.suffix.lower() == ENDING and len(found) == 1:
        with whole(path) as part:
            _write(found[0], part, about)
        return
    with whole(path, folder=True) as part:
        for table in found:
            _write(table, part / f"{table.name}{ENDING}", about)


def _write(table: Table, path: Path, about: dict[str, str]) -> None:
    import pyarrow as pa
    import pyarrow.parquet as pq

    types = {
        "float64": pa.float64(),
        "int64": pa.int64(),
        "text": pa.dictionary(pa.int32(), pa.string()),
    }
    schema = pa.schema(
        [
            pa.field(
                field.name,
                types[field.kind],
                nullable=False,
                metadata={"unit": field.unit, "help": field.help},
            )
            for field in table.fields
        ],
        metadata={**about, "table": table.name, "help": table.help},
    )
    with pq.ParquetWriter(path, schema) as writer:
        for batch in table.batches():
            writer.write_table(pa.Table.from_arrays(_arrays(batch, pa), schema=schema))


def _arrays(batch: Batch, pa: Any) -> list[Any]:
    return [
        pa.DictionaryArray.from_arrays(
            pa.array(values.place, pa.int32()), pa.array(list(values.names), pa.string())
        )
        if isinstance(values, Labels)
        else pa.array(values)
        for values in batch
    ]
