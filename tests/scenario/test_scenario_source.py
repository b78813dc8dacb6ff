"""Files that cannot be read and texts that are not TOML are told in plain words."""

from __future__ import annotations

import os
from pathlib import Path

import pytest

from driftwell.errors import ScenarioError
from driftwell.scenario.source import raw_table, source_text


def told(path: Path) -> str:
    with pytest.raises(ScenarioError) as fault:
        source_text(path)
    return str(fault.value).replace(f"{path.parent}/", "")


def test_a_missing_file_is_told_with_the_name_that_was_probably_meant(tmp_path: Path) -> None:
    (tmp_path / "rods.toml").write_text("x = 1")
    expected = "rod.toml: there is no such file; did you mean rods.toml?"
    assert expected == told(tmp_path / "rod.toml")
    assert "zzz.toml: there is no such file" == told(tmp_path / "zzz.toml")


def test_a_folder_is_told_with_the_scenarios_in_it(tmp_path: Path) -> None:
    folder = tmp_path / "traps"
    folder.mkdir()
    assert "traps: is a folder; needs a scenario file (.toml)" == told(folder)
    (folder / "rods.toml").write_text("x = 1")
    expected = "traps: is a folder; needs a scenario file, such as traps/rods.toml"
    assert expected == told(folder)


def test_a_pipe_is_refused_without_waiting_for_it(tmp_path: Path) -> None:
    os.mkfifo(tmp_path / "pipe.toml")
    expected = "pipe.toml: is not a file; needs a scenario file (.toml)"
    assert expected == told(tmp_path / "pipe.toml")


@pytest.mark.parametrize("name", ["a\0b.toml", "x" * 5000, "a/b\nc/d.toml"])
def test_a_path_that_no_file_can_have_is_told_on_one_line(tmp_path: Path, name: str) -> None:
    message = told(tmp_path / name)
    assert message.isprintable()
    assert "cannot be read" in message or "no such file" in message


def test_a_huge_file_is_refused_and_the_way_for_long_lists_named(tmp_path: Path) -> None:
    path = tmp_path / "huge.toml"
    with path.open("wb") as stream:
        stream.truncate(12_000_000)
    message = told(path)
    assert message.startswith("huge.toml: has 12.0 MB; a scenario has at most 10 MB.")
    assert 'kind = "file"' in message


@pytest.mark.parametrize(
    ("content", "expected"),
    [
        (
            b'title = "a"\nname = "\xe9"\n',
            "s.toml:2: is not UTF-8 text (byte 0xe9); save the file as UTF-8",
        ),
        ("title".encode("utf-16"), "s.toml: is text in UTF-16; save it as UTF-8"),
        (
            bytes.fromhex("894844460d0a1a0a"),
            "s.toml:1: is not UTF-8 text (byte 0x89); save the file as UTF-8",
        ),
    ],
)
def test_other_encodings_are_told_with_the_line(
    tmp_path: Path, content: bytes, expected: str
) -> None:
    path = tmp_path / "s.toml"
    path.write_bytes(content)
    assert expected == told(path)


def test_a_byte_order_mark_is_passed_over(tmp_path: Path) -> None:
    path = tmp_path / "s.toml"
    path.write_bytes(b"\xef\xbb\xbfa = 1")
    assert {"a": 1} == raw_table(source_text(path), "s.toml")


VALUE = "needs a value here: text or a quantity in quotes, or a plain number"
TWICE = "this table stands here a second time; join the two"
LIST = 'a list is not closed, or a comma is missing in it: needs "," or "]"'


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("duration = 2 ms", '1:14 duration = 2 ms: a number with a unit needs quotes: "2 ms"'),
        (
            "a = 1\nr = 3.5mm # wide",
            '2:8 r = 3.5mm # wide: a number with a unit needs quotes: "3.5mm"',
        ),
        (
            'v = { amplitude = 180 V, kind = "sine" }',
            '1:23 v = { amplitude = 180 V, kind = "sine" }: '
            'a number with a unit needs quotes: "180 V"',
        ),
        ("s = [60 um, 1]", '1:9 s = [60 um, 1]: a number with a unit needs quotes: "60 um"'),
        ("kind = cylinder", '1:8 kind = cylinder: text needs quotes: "cylinder"'),
        ("on = True", "1:6 on = True: write true in small letters"),
        (
            "x = .5",
            "1:5 x = .5: a number needs digits on both sides of a decimal point, such as 0.5",
        ),
        (
            "x = 3,5",
            "1:6 x = 3,5: a number needs digits on both sides of a decimal point, such as 0.5",
        ),
        (
            'end caps = "x"',
            '1:5 end caps = "x": needs "=" after the key; a key is one word, such as end_caps',
        ),
        ('kind: "x"', '1:5 kind: "x": needs "=" between the key and its value'),
        ("x = “a”", '1:5 x = “a”: quotes must be straight: "'),
        ('x = "a', '1 x = "a: text is not closed: a quote is missing'),
        ('x = "a\ny = "b"', '1:7 x = "a: text must be closed on its line: a quote is missing'),
        ("x = 1\nx = 2\n\n", "2 x = 2: this key is set a second time; leave one of the two out"),
        ("[a]\nx = 1\n[a]\n", f"3 [a]: {TWICE}"),
        ('x = ["1"\n\n[[field]]\n', f"3:1 [[field]]: {LIST}"),
        (
            "x = {a = 1\n}",
            '1:11 x = {a = 1: needs "}" on the same line, or a comma is missing before this',
        ),
        ("x = {a = 1,}", "1:12 x = {a = 1,}: needs a key here; is there a comma too many?"),
        ("x = ", f"1 x =: {VALUE}"),
        ("[[cloud]", '1:8 [[cloud]: the header of a table needs "]]" at its end'),
        ("= 3", '1:1 = 3: needs a key, "=" and a value, or a header such as [[cloud]]'),
        (
            'x = "1" // wide',
            '1:9 x = "1" // wide: needs a new line after the value (a comment begins with #)',
        ),
        ('x = "a\x07"', '1:7 x = "a?": holds a character that cannot be seen; write it anew'),
    ],
)
def test_what_is_not_toml_is_told_with_line_column_and_what_to_do(text: str, expected: str) -> None:
    with pytest.raises(ScenarioError) as fault:
        raw_table(text, "s.toml")
    assert str(fault.value).startswith(f"s.toml:{expected}")
    assert str(fault.value).isprintable()


@pytest.mark.parametrize("text", ["", "\n\n", "# only a comment\n"])
def test_an_empty_file_is_told_what_a_scenario_needs(text: str) -> None:
    with pytest.raises(ScenarioError, match=r"is empty; a scenario needs a title, a duration"):
        raw_table(text, "s.toml")


@pytest.mark.parametrize(
    "text",
    [
        "a = " + "[" * 40 + "]" * 40,
        "a = " + "[" * 100_000,
        "a." * 40 + "b = 1",
        "a." * 100_000 + "b = 1",
        "[" + "a." * 100_000 + "b]",
    ],
)
def test_tables_too_deep_within_each_other_are_refused(text: str) -> None:
    with pytest.raises(ScenarioError, match=r"too deep within each other; needs at most 30"):
        raw_table(text, "s.toml")


def test_numbers_with_thousands_of_digits_are_refused() -> None:
    with pytest.raises(ScenarioError, match="too many digits"):
        raw_table("a = " + "9" * 10_000, "s.toml")
