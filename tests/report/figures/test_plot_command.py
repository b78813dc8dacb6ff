"""`driftwell plot` and `driftwell movie`, as they are typed."""

from __future__ import annotations

import pytest

from driftwell.cli.main import main


@pytest.fixture
def desk(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    return tmp_path


def test_a_figure_is_written_where_it_was_asked_for_and_its_size_said(run_of, desk, capsys):
    folder = str(run_of("trap").folder)
    assert 0 == main(["plot", folder, "sizes", "-o", "new/sizes.svg", "--width", "page"])
    assert "sizes: new/sizes.svg (175 mm by " in capsys.readouterr().out
    assert (desk / "new" / "sizes.svg").read_text().startswith("<?xml")


def test_a_figure_without_a_file_is_a_pdf_named_for_run_and_figure(run_of, desk):
    assert 0 == main(["plot", str(run_of("trap").folder), "sizes"])
    assert 0 == main(["plot", str(run_of("trap").folder), "sizes", "--as", "png"])
    assert (desk / "run-sizes.pdf").read_bytes().startswith(b"%PDF")
    assert (desk / "run-sizes.png").read_bytes().startswith(b"\x89PNG")


def test_the_list_says_what_there_is_and_why_not(run_of, desk, capsys):
    assert 0 == main(["plot", str(run_of("trap").folder), "--list"])
    lines = capsys.readouterr().out.splitlines()
    assert 13 == len(lines)
    assert any(line.startswith("sizes") and "--axis" in line for line in lines)
    assert any("losses" in line and "no charge was lost" in line for line in lines)


@pytest.mark.parametrize(
    ("arguments", "said"),
    [
        (["plot", "RUN"], "which figure?"),
        (["plot", "RUN", "size"], 'did you mean "sizes"'),
        (["plot", "RUN", "sizes", "-o", "a.jpg"], '"png", "svg", "pdf"'),
        (["plot", "nowhere", "sizes"], "no run found"),
        (["movie", "RUN", "-o", "a.avi"], ".mp4 or a .gif"),
        (["movie", "RUN", "--seconds", "-1", "-o", "a.gif"], "seconds: -1 is beyond"),
        (["movie", "RUN", "--plane", "q", "-o", "a.gif"], 'no plane is called "q"'),
    ],
)
def test_what_cannot_be_done_is_said_in_one_message(run_of, desk, capsys, arguments, said):
    folder = str(run_of("trap").folder)
    assert 2 == main([folder if word == "RUN" else word for word in arguments])
    told = capsys.readouterr()
    assert said in told.err
    assert "Traceback" not in told.err
    assert [] == list(desk.iterdir())


def test_a_movie_is_written_and_its_frames_said(run_of, desk, capsys):
    asked = ["movie", str(run_of("two").folder), "-o", "a.gif", "--seconds", "0.3"]
    assert 0 == main([*asked, "--frames-per-second", "10", "--plane", "zx", "--height", "120"])
    assert "movie: a.gif (3 frames, " in capsys.readouterr().out
    assert (desk / "a.gif").read_bytes().startswith(b"GIF89a")
