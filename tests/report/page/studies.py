"""Small studies on the disk whose pages are written: runs computed in this process, or invented."""

from __future__ import annotations

from pathlib import Path

from driftwell.study.catalogue import Catalogue
from driftwell.study.limit_run import Searched, find_limit
from driftwell.study.limit_table import write_limit
from driftwell.study.read import read_study
from driftwell.study.sweep import Sweep
from driftwell.study.sweep_folder import CATALOGUE_FILE, taken
from driftwell.study.table import write_tables
from tests.study.convergence.computed import carried_out, one_by_one
from tests.study.small_study import study_file
from tests.study.small_sweeps import Heard, Scripted
from tests.study.test_limit_study import LIMIT, Looked, sized


def swept(path: Path, folder: Path, engine: Scripted | None = None) -> None:
    """A sweep; its runs are computed where no engine is given."""
    study = read_study(path)
    made = engine or Scripted(carried_out, 1)
    with taken(folder, study.text, study.scenario_text), Catalogue(folder / CATALOGUE_FILE) as kept:
        Sweep(
            study,
            folder,
            kept,
            Heard(),
            engine_of=made.of,
            sharing_of=lambda load, workers, threads: one_by_one(load),
        ).result()
        write_tables(folder, study, kept)


def searched(folder: Path, place: Path) -> Searched:
    """A search with invented answers, which has no runs to look at."""
    study = read_study(study_file(place, LIMIT))
    with taken(folder, study.text, study.scenario_text), Catalogue(folder / CATALOGUE_FILE) as kept:
        found = find_limit(study, folder, kept, Looked(), workers=2, engine_of=Scripted(sized).of)
    write_limit(folder, found)
    return found
