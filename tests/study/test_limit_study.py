"""A study with a [limit]: its faults, its search through the catalogue, its words and its files."""

from __future__ import annotations

import time
from dataclasses import asdict, replace
from pathlib import Path
from typing import Any

import h5py
import numpy as np
import pytest

from driftwell.answers.answer import Answer
from driftwell.cli.main import main
from driftwell.cli.studies.limit import EXIT_CODES
from driftwell.errors import StudyError
from driftwell.report.study_pictures.limit_picture import draw_limit
from driftwell.study import limit_search
from driftwell.study.catalogue import Catalogue
from driftwell.study.engine import Task
from driftwell.study.explain import explain_study
from driftwell.study.limit_run import Searched, find_limit
from driftwell.study.limit_search import FOUND, NO_CROSSING, Search
from driftwell.study.limit_table import LIMIT_CSV, LIMIT_H5, write_limit
from driftwell.study.limit_words import interval_told, limit_lines, verdict_sentences
from driftwell.study.progress import SweepProgress
from driftwell.study.read import Study, read_study
from driftwell.study.worker import _reply, _Wish
from tests.study.small_study import study, study_file
from tests.study.small_sweeps import Heard, Scripted, ended
from tests.study.sought import asked, searched

LIMIT = """
[limit]
key        = "field.rods.voltage.amplitude"
from       = "100 V"
to         = "200 V"
answer     = "size"
crosses    = "60 um"
resolution = "2 V"
"""

PENNING = """\
title    = "One ion in a static trap"
duration = "2 ms"

[species.ion]
mass   = "100 u"
charge = "1 e"

[[cloud]]
name    = "ion"
species = "ion"
shape   = { kind = "points", positions = [["1 nm", "0.7 nm", "0 um"]] }

[[field]]
name     = "magnet"
kind     = "uniform-magnetic"
strength = "1 T"

[[field]]
name = "caps"
kind = "static-quadrupole"
axial_frequency = { species = "ion", value = "50 kHz" }

[[wall]]
name   = "bore"
kind   = "cylinder"
radius = "5 um"

[record]
every = "1 ms"

[[question]]
name = "held"
ask  = "fraction-left"
of   = "ion"
"""


class Looked(Heard):
    """An observer of searches."""

    def looks(self, search: Search, wanted: int) -> None:
        """Nothing is kept."""


def sized(task: Task) -> dict[str, Any]:
    """An engine's reply: a size that falls through 60 um at 144 V, without chance."""
    texts = dict(text.split("=", 1) for text in task.content["settings"])
    voltage = float(texts["field.rods.voltage.amplitude"].removesuffix(" V"))
    found = Answer("size", "rms-size", 60e-6 * 144.0 / voltage, "m", None, "")
    return {**ended("finished"), "answers": [asdict(found)]}


def sought(asked: Study, folder: Path, heard: Looked | None = None) -> tuple[Searched, Scripted]:
    """The search, with a catalogue on the disk."""
    engine = Scripted(sized)
    folder.mkdir(exist_ok=True)
    with Catalogue(folder / "catalogue.sqlite") as catalogue:
        found = find_limit(
            asked, folder, catalogue, heard or Looked(), workers=2, engine_of=engine.of
        )
    return found, engine


@pytest.mark.parametrize(
    ("changed", "to", "told"),
    [
        ('answer     = "size"', 'answer = "width"', 'it asks "size"'),
        ('"60 um"', "60", "the answer is in m"),
        ('"60 um"', '"60 V"', "of that dimension"),
        ('"2 V"', '"2 mm"', "or a width in V"),
        ('"2 V"', '"0 %"', "above 0 and below 100 %"),
        ('"200 V"', '"100 V"', "must be another value"),
        ("voltage.amplitude", "voltage.height", "unknown key"),
        ('"field.rods.voltage.amplitude"', '"coulomb.method"', "name a key that does"),
        ('"field.rods.voltage.amplitude"', '"title"', "holds no number or quantity"),
        ('"field.rods.voltage.amplitude"', '"seed"', "a seed has no limit"),
        ("[limit]", "replicas = 2\n[limit]", "leave out `replicas`"),
        ("resolution = ", "resolutions = ", "resolution"),
        ("[limit]", "[limit]\nmost_runs = 4", "`most_runs` must be at least `points`, 5"),
    ],
)
def test_a_fault_of_a_limit_is_told_with_its_line(
    tmp_path: Path, changed: str, to: str, told: str
) -> None:
    with pytest.raises(StudyError) as fault:
        study(tmp_path, LIMIT.replace(changed, to))
    assert "wide.toml:" in str(fault.value)
    assert told in str(fault.value)


def test_a_search_is_said_in_words_before_it_begins(tmp_path: Path) -> None:
    text = " ".join(" ".join(explain_study(study(tmp_path, LIMIT), 100)).split())
    assert (
        'from 100 V to 200 V, at which "size" crosses 60 um, to 2 V, with 95 % confidence' in text
    )
    assert "5 values at equal differences" in text


def test_an_interval_is_told_to_a_tenth_of_its_width_or_less() -> None:
    assert "351.8 to 369.8" == interval_told(asked(0.0, 1000.0), 351.81, 369.77)
    assert "0.41 to 0.62" == interval_told(asked(), 0.41, 0.6203)


def test_ratios_count_by_themselves_where_the_ends_are_far_apart(tmp_path: Path) -> None:
    for last, log in (('"999 V"', False), ('"1 kV"', True)):
        asked = study(tmp_path, LIMIT.replace('"200 V"', last)).limit
        assert asked is not None
        assert log is asked.log


def test_a_search_finds_its_limit_and_the_same_search_again_computes_nothing(
    tmp_path: Path,
) -> None:
    asked = study(tmp_path, LIMIT)
    found, engine = sought(asked, tmp_path / "s")
    assert found.verdict is not None
    assert found.verdict.interval is not None
    assert FOUND == found.verdict.word
    low, high = found.verdict.interval
    assert low <= 144.0 <= high <= low + 2.0
    assert found.computed == len(engine.asked) == len(found.evaluations)
    again, engine = sought(asked, tmp_path / "s")
    assert found.verdict == again.verdict
    assert not engine.asked
    assert 0 == again.computed


def test_a_search_that_was_stopped_goes_on_to_the_same_end(tmp_path: Path) -> None:
    asked = study(tmp_path, LIMIT)
    whole, _ = sought(asked, tmp_path / "whole")

    def goes(progress: SweepProgress) -> bool:
        time.sleep(0.12)  # the sweep asks again after a tenth of a second only
        return progress.computed + progress.there < 6

    stopped, _ = sought(asked, tmp_path / "s", Looked(goes))
    assert stopped.verdict is None
    rest, engine = sought(asked, tmp_path / "s")
    assert whole.verdict == rest.verdict
    assert len(engine.asked) < len(whole.evaluations)


def test_all_places_and_replicas_have_seeds_of_their_own_unless_answers_are_exact(
    tmp_path: Path,
) -> None:
    found, engine = sought(study(tmp_path, LIMIT), tmp_path / "s")
    seeds = [text for each in engine.asked for text in each["settings"] if "seed=" in text]
    assert len(found.evaluations) == len(set(seeds))
    exact = study(tmp_path, LIMIT + 'noise = "none"\n')
    _, engine = sought(exact, tmp_path / "exact")
    assert not any("seed=" in text for each in engine.asked for text in each["settings"])


def test_the_files_of_a_search_hold_its_runs_and_its_interval(tmp_path: Path) -> None:
    found, _ = sought(study(tmp_path, LIMIT), tmp_path / "s")
    write_limit(tmp_path / "s", found)
    lines = (tmp_path / "s" / LIMIT_CSV).read_text().splitlines()
    assert "run,round,field.rods.voltage.amplitude [V],replica,size [m]," in lines[0]
    assert len(found.evaluations) + 1 == len(lines)
    assert found.verdict is not None
    assert found.verdict.interval is not None
    with h5py.File(tmp_path / "s" / LIMIT_H5) as file:
        assert found.verdict.interval == (file.attrs["low"], file.attrs["high"])
        assert len(found.evaluations) == len(file["runs"])
        assert 6e-5 == file.attrs["threshold"]
        widths = file["intervals"]["high"] - file["intervals"]["low"]
        assert np.all(np.diff(widths) <= 0.0)


def test_the_words_of_a_search_name_the_limit_its_interval_and_what_it_took(
    tmp_path: Path,
) -> None:
    found, _ = sought(study(tmp_path, LIMIT), tmp_path / "s")
    text = " ".join(" ".join(limit_lines(found, 100)).split())
    assert "limit: 144" in text
    assert '"size" falls below 60 um there as field.rods.voltage.amplitude grows.' in text
    assert f"runs: {len(found.evaluations)} at" in text
    none, _ = sought(study(tmp_path, LIMIT.replace("60 um", "1 um")), tmp_path / "s")
    assert none.verdict is not None
    assert NO_CROSSING == none.verdict.word
    text = " ".join(" ".join(limit_lines(none, 100)).split())
    assert '"size" is above 1 um at all 5 values' in text
    assert "nearest at 200 V" in text


def test_an_answer_that_comes_to_the_threshold_and_stays_is_told_apart() -> None:
    search = searched(lambda x: max(x - 0.5, 0.0), asked())
    assert search.verdict is not None
    assert NO_CROSSING == search.verdict.word
    first, then = verdict_sentences(search, search.verdict)
    assert "is at or above 0 at all 5 values" in first
    assert "a little off" in then


def test_the_words_of_a_search_that_was_stopped_count_what_was_computed(tmp_path: Path) -> None:
    found, _ = sought(study(tmp_path, LIMIT), tmp_path / "s")
    halted = replace(found, verdict=None, evaluations=found.evaluations[:5], computed=7)
    text = " ".join(" ".join(limit_lines(halted, 100)).split())
    assert "runs: 7 computed now; 5 in rounds that are whole, " in text


def test_a_picture_of_a_search_is_drawn(tmp_path: Path) -> None:
    found, _ = sought(study(tmp_path, LIMIT), tmp_path / "s")
    (picture,) = draw_limit(tmp_path / "s", found)
    assert picture.read_bytes().startswith(b"\x89PNG")
    assert not draw_limit(tmp_path / "s", replace(found, search=Search(found.search.asked)))


def test_each_verdict_has_its_exit_code() -> None:
    words = {
        getattr(limit_search, name)
        for name in ("FOUND", "NO_CROSSING", "SEVERAL", "TOO_NOISY", "NOT_REACHED", "RUNS_FAILED")
    }
    assert words == set(EXIT_CODES)


def test_a_sweep_refuses_a_limit_and_a_limit_a_sweep(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    path = study_file(tmp_path, LIMIT)
    assert 2 == main(["sweep", str(path), "-o", str(tmp_path / "s")])
    assert "`driftwell limit" in capsys.readouterr().err
    path = study_file(tmp_path, "replicas = 3\n")
    assert 2 == main(["limit", str(path), "-o", str(tmp_path / "s")])
    assert "has no [limit]" in capsys.readouterr().err


def test_the_strongest_caps_a_magnet_can_hold_an_ion_in_are_found(tmp_path: Path) -> None:
    """A Penning trap holds an ion while its axial frequency is below that of the cyclotron/sqrt 2.

    L. S. Brown, G. Gabrielse, Rev. Mod. Phys. 58 (1986) 233, sec. II. From memory. In 2 ms the
    growth at 0.2 % beyond the limit takes 1 nm over the wall at 5 um.
    """
    (tmp_path / "penning.toml").write_text(PENNING)
    (tmp_path / "study.toml").write_text(
        'title = "Caps"\nscenario = "penning.toml"\n[limit]\n'
        'key = "field.caps.axial_frequency.value"\nfrom = "20 kHz"\nto = "500 kHz"\n'
        'answer = "held"\ncrosses = 0.5\nresolution = "0.5 %"\nnoise = "none"\n'
    )
    wish = _Wish()
    engine = Scripted(lambda task: _reply(task.content, wish))
    with Catalogue(tmp_path / "catalogue.sqlite") as catalogue:
        found = find_limit(
            read_study(tmp_path / "study.toml"),
            tmp_path,
            catalogue,
            Looked(),
            workers=1,
            engine_of=engine.of,
        )
    assert found.verdict is not None
    assert found.verdict.interval is not None
    # e B / (2 pi m sqrt 2), CODATA 2022
    low, high = found.verdict.interval
    assert low <= 108584.15 <= high <= 1.005 * low
    # A grid of equal resolution over these ratios has 645 values.
    assert len(found.evaluations) <= 19
