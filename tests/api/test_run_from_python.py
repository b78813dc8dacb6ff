"""A run started from Python leaves what the command line leaves, and is read in parts."""

from __future__ import annotations

import os
import signal
import threading
import time
from pathlib import Path

import numpy as np
import pytest

import driftwell
from driftwell import AnswerError, DriftwellError, RecordError, Run, ScenarioError
from driftwell.record.reader import open_run as open_record
from tests.api.small_scenarios import rods, trap
from tests.cli.small_runs import SMALL
from tests.cli.small_runs import scenario as file_of


@pytest.fixture(scope="module")
def run(tmp_path_factory: pytest.TempPathFactory) -> Run:
    return rods(trap()).run(tmp_path_factory.mktemp("api") / "run", threads=1, progress=False)


def test_the_record_holds_the_text_the_digest_and_the_command_that_makes_it_again(
    run: Run, tmp_path: Path
) -> None:
    scenario = rods(trap())
    assert scenario.toml() == run.scenario_text == (run.folder / "scenario.toml").read_text()
    assert scenario.digest == run.header.digest == run.scenario.digest
    assert f"driftwell run {run.folder / 'scenario.toml'}" == run.header.command
    again = driftwell.read(run.folder / "scenario.toml").run(tmp_path / "again", progress=False)
    assert np.array_equal(run.trajectory[1], again.trajectory[1])
    assert run.answers == again.answers


def test_a_run_from_a_file_is_the_one_the_command_line_makes(tmp_path: Path) -> None:
    path = file_of(tmp_path, SMALL)
    made = driftwell.read(path, ["cloud.load.count=5"]).run(tmp_path / "run", progress=False)
    assert ("cloud.load.count=5",) == made.header.settings
    assert f"driftwell run {path} --set cloud.load.count=5" == made.header.command
    told = driftwell.read(path, ["cloud.load.count=5"]).run(tmp_path / "run", progress=False).told
    assert "Not computed again" in told[-1]


def test_answers_go_by_name_and_by_number(run: Run) -> None:
    assert ("held", "warmth") == run.answers.names
    assert run.answers[0] is run.answers["held"]
    assert open_record(run.folder).answers == run.answers
    assert 1.0 == run.answers["held"].value
    assert run.answers[:1] == (run.answers["held"],)
    with pytest.raises(AnswerError, match=r"no answer is called 'hold'; did you mean 'held'\?"):
        run.answers["hold"]


def test_slices_by_records_and_ids_are_parts_of_the_whole(run: Run) -> None:
    time, state = run.trajectory
    assert (21, 8, 3) == run.positions.shape
    assert np.array_equal(time, run.times)
    assert np.array_equal(state[:, :, :3], run.positions[:])
    assert np.array_equal(state[:, :, 3:], np.asarray(run.velocities))
    assert np.array_equal(state[10:20:3][:, [5, 2], :3], run.positions[10:20:3, [5, 2]])
    assert np.array_equal(state[-1, 3, :3], run.positions[-1, 3])
    assert np.array_equal(state[[4, 0, -2], 2:7:2, 3:], run.velocities[[4, 0, -2], 2:7:2])
    assert np.array_equal(state[::-2, :, :3], run.positions[::-2])
    assert np.array_equal(state[time > 9e-6, 1, :3], run.positions[time > 9e-6, 1])
    assert (0, 8, 3) == run.positions[30:].shape
    assert (21, 0, 3) == run.positions[:, []].shape


def test_slices_reach_over_segments_and_far_apart_charges(tmp_path: Path) -> None:
    from tests.report.pictured_run import charges, pictured_run

    every = charges(900)
    made = pictured_run(tmp_path / "run", [(1e-6 * k, every) for k in range(7)], tracks=900)
    found = Run(made) if not isinstance(made, Run) else made
    state = found.trajectory[1]
    ids = [880, 3, 401, 3]
    assert np.array_equal(state[2:6][:, ids, :3], found.positions[2:6, ids])


def test_a_charge_or_a_record_that_is_not_there_is_told(run: Run) -> None:
    with pytest.raises(RecordError, match="charge 8 was not tracked"):
        run.positions[:, [1, 8]]
    with pytest.raises(IndexError, match="there are 21 records"):
        run.positions[21]
    with pytest.raises(IndexError, match="upwards"):
        run.positions[:, -3:]
    with pytest.raises(TypeError, match="ids"):
        run.positions[:, 0.5]


def test_opening_a_run_reads_no_trajectory(run: Run, monkeypatch: pytest.MonkeyPatch) -> None:
    opened: list[str] = []
    whole = type(run.record).segment_file
    monkeypatch.setattr(
        type(run.record),
        "segment_file",
        lambda self, facts: opened.append(facts.name) or whole(self, facts),
    )
    found = driftwell.open_run(run.folder)
    assert 1.0 == found.answers["held"].value
    assert (21, 8, 3) == found.positions.shape
    assert [] == opened
    assert (3,) == found.positions[0, 0].shape
    assert 1 == len(opened)


def test_a_run_answers_questions_afterwards_as_it_would_have_in_its_scenario(
    run: Run, tmp_path: Path
) -> None:
    asked = rods(trap()).question(
        "size", ask="rms-size", of="load", axis="x", over=["5 us", "9 us"]
    )
    before = asked.run(tmp_path / "asked", progress=False).answers["size"]
    after = run.ask("rms-size", name="size", of="load", axis="x", over=["5 us", "9 us"])
    assert before == after
    assert "fraction-left" == run.ask("fraction-left", of="load").name


def test_a_question_that_is_wrong_or_was_not_recorded_is_told_as_such(run: Run) -> None:
    with pytest.raises(ScenarioError, match=r'of = "lode": no \[\[cloud\]\].*did you mean "load"'):
        run.ask("rms-size", of="lode", axis="x")
    with pytest.raises(ScenarioError, match="unknown ask"):
        run.ask("size", of="load")
    with pytest.raises(ScenarioError, match=r'axs: unknown key; did you mean "axis"\?'):
        run.ask("rms-size", of="load", axs="x")
    with pytest.raises(AnswerError, match="no snapshot at t = 3e-06 s; those recorded are at"):
        run.ask("temperature", of="load", axis="x", at="3 us")
    with pytest.raises(AnswerError, match="was not traced"):
        run.ask("frequency", of="load", axis="x")


def test_a_run_is_shown_escaped_with_outcome_answers_and_judgement(run: Run) -> None:
    shown = run._repr_html_()
    assert "<b>finished</b>: The motion was followed to t = 20 us." in shown
    assert (
        "<td style='text-align:left;padding:.1em 1em .1em 0;white-space:normal'>held</td>" in shown
    )
    assert "1.000 ± " in shown
    assert "Judgement" in shown
    assert "held" in run.answers._repr_html_()
    assert repr(run).startswith("<Run 'Ions in a trap': finished, ")
    assert "ledger" in run.summary()


def test_snapshots_go_by_words_and_quantities(run: Run) -> None:
    assert 0.0 == run.snapshot("start").time
    assert run.end_time == run.snapshot("end").time == run.snapshot("20 us").time
    with pytest.raises(AnswerError, match='needs "start", "end" or a time'):
        run.snapshot("middle")


def test_a_picture_is_a_figure_and_an_unknown_one_is_told(run: Run) -> None:
    from matplotlib.figure import Figure

    assert isinstance(run.plot("sizes", of="load"), Figure)
    assert isinstance(run.plot("cloud"), Figure)
    with pytest.raises(DriftwellError, match=r'no option is called "off"; did you mean "of"\?'):
        run.plot("sizes", off="load")
    with pytest.raises(DriftwellError, match=r'did you mean "sizes"\?'):
        run.plot("size")


def test_a_run_leaves_as_a_page_and_for_other_programs(run: Run, tmp_path: Path) -> None:
    page = run.report(tmp_path / "page.html")
    assert "Ions in a trap" in page.read_text()
    made = run.export("csv", tmp_path / "tables", what=["ledger"])
    assert 1 == len(list(made.rglob("*.csv")) if made.is_dir() else [made])
    with pytest.raises(RecordError, match="no such format"):
        run.export("xml")


def test_a_run_that_stops_by_the_clock_goes_on_to_the_same_bits(run: Run, tmp_path: Path) -> None:
    scenario = rods(trap(count=60, duration="3 ms")).record(every="0.1 ms")
    stopped = scenario.run(tmp_path / "run", stop_after=1e-9, progress=False)
    assert "stopped" == stopped.outcome.word
    gone_on = scenario.run(tmp_path / "run", stop_after="1 h", progress=False)
    assert "finished" == gone_on.outcome.word
    whole = scenario.run(tmp_path / "whole", threads=1, progress=False)
    assert np.array_equal(whole.trajectory[1], gone_on.trajectory[1])
    with pytest.raises(DriftwellError, match="stop_after = 'soon'"):
        scenario.run(tmp_path / "run", stop_after="soon")


def test_ctrl_c_keeps_what_was_recorded_and_interrupts_the_program(tmp_path: Path) -> None:
    scenario = rods(trap(duration="1000 s")).record(every="1 ms")

    def interrupt() -> None:
        while not (tmp_path / "run" / "run.h5").exists():
            time.sleep(0.05)
        os.kill(os.getpid(), signal.SIGINT)

    # signals are ignored where the tests run in the background
    before = signal.signal(signal.SIGINT, signal.default_int_handler)
    try:
        threading.Thread(target=interrupt, daemon=True).start()
        with pytest.raises(KeyboardInterrupt, match="recorded up to"):
            scenario.run(tmp_path / "run", progress=False)
        assert signal.default_int_handler is signal.getsignal(signal.SIGINT)
    finally:
        signal.signal(signal.SIGINT, before)
    assert "stopped" == driftwell.open_run(tmp_path / "run").outcome.word


def test_a_motion_that_cannot_be_continued_is_raised_and_kept(tmp_path: Path) -> None:
    wild = trap().stepping(extent="0.5 mm").set("cloud.load.motion.temperature", "1e5 K")
    with pytest.raises(driftwell.StepError, match=r"could not be continued.*open_run"):
        wild.run(tmp_path / "run", progress=False)
    assert "failed" == driftwell.open_run(tmp_path / "run").outcome.word


def test_another_runs_folder_is_refused_and_kept(run: Run) -> None:
    with pytest.raises(RecordError, match="holds another run"):
        trap().run(run.folder, progress=False)
    with pytest.raises(DriftwellError, match="threads = 0"):
        trap().run(run.folder, threads=0)
