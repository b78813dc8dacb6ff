"""Files of a run cut short or with a bit turned: an error that names one, or the right numbers."""

from __future__ import annotations

import random
import shutil
from pathlib import Path

import pytest

from driftwell import open_run
from driftwell.cli.main import main
from driftwell.errors import DriftwellError
from driftwell.record import sealing
from driftwell.record.index import SEGMENTS
from driftwell.record.layout import ROWS
from driftwell.record.reader import Run
from tests.cli.small_runs import scenario, settings

TIMES = 500


def contents(run: Run) -> dict[str, bytes]:
    """All that a run says, as bytes."""
    found = {entry.path: run.rows(entry.path).tobytes() for entry in ROWS}
    for time in run.snapshots:
        snapshot = run.snapshot(time)
        for name in ("id", "position", "velocity", "charge", "mass", "weight"):
            found[f"snapshot {time} {name}"] = getattr(snapshot, name).tobytes()
    for name, each in run.state().items():
        found[f"state/{name}"] = each.tobytes()
    found["outcome"] = repr((run.outcome, run.answers)).encode()
    found["header"] = repr(run.header).encode()
    return found


@pytest.fixture
def whole(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A small run in several segments."""
    monkeypatch.setattr(sealing, "SHORTEST", 0.0)
    monkeypatch.setattr(sealing, "LONGEST", 0.0)
    monkeypatch.setattr(sealing, "STATE_RATE", 1e12)
    words = ["run", str(scenario(tmp_path)), "-o", str(tmp_path / "run"), "--no-pictures"]
    assert 0 == main([*words, *settings("record.every=4 us")])
    return tmp_path / "run"


def test_no_spoiled_file_gives_wrong_numbers(whole: Path, tmp_path: Path) -> None:
    """500 times, in any file of the record; what no number is read from is told when asked for."""
    truth = contents(open_run(whole))
    files = sorted(path.relative_to(whole) for path in whole.rglob("*.h5"))
    assert len(files) > 5
    chance = random.Random(1)
    copy, noticed = tmp_path / "copy", 0
    shutil.copytree(whole, copy)
    for _ in range(TIMES):
        name = chance.choice(files)
        image = bytearray((whole / name).read_bytes())
        if chance.random() < 0.3:
            del image[chance.randrange(len(image)) :]
        else:
            image[chance.randrange(len(image))] ^= 1 << chance.randrange(8)
        (copy / name).write_bytes(image)
        told, found = "", truth
        try:
            found = contents(open_run(copy))
        except DriftwellError as fault:
            told = str(fault)
            noticed += 1
        for what, values in truth.items():
            assert found[what] == values, (str(name), what)
        assert not told or str(copy) in told
        if name.parent.name == SEGMENTS:
            assert told or str(name) in " ".join(open_run(copy).damage(thorough=True))
        shutil.copyfile(whole / name, copy / name)
    assert noticed > TIMES // 8
