"""A sweep read again from its folder."""

from __future__ import annotations

from pathlib import Path

from driftwell.study.again.folder import kept_study
from driftwell.study.catalogue import Catalogue
from driftwell.study.sweep_folder import CATALOGUE_FILE
from driftwell.study.table import Table, table_of


def sweep_again(folder: Path) -> Table:
    """All answers of the sweep in a folder, as far as its runs have come.

    Raises RecordError where it cannot be read.
    """
    with Catalogue(folder / CATALOGUE_FILE, read_only=True) as catalogue:
        return table_of(kept_study(folder, catalogue.rows()), catalogue)
