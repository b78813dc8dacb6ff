"""Words broken into lines."""

from __future__ import annotations

from driftwell.forms.paragraph import paragraph


def test_lines_fill_the_width_and_begin_as_asked() -> None:
    assert ["a: one two", "   three"] == paragraph("one two three", 10, "a: ", "   ")


def test_a_number_is_never_parted_from_its_unit() -> None:
    assert ["from 100 us", "to 200 us"] == paragraph("from 100 us to 200 us", 13)
    assert ["at about", "121.6 mm/s"] == paragraph("at about 121.6 mm/s", 14)


def test_a_word_too_long_stands_alone_and_hyphens_do_not_break() -> None:
    assert ["a", "b" * 20, "kick-drift-kick"] == paragraph(f"a {'b' * 20} kick-drift-kick", 10)


def test_no_words_make_no_lines() -> None:
    assert [] == paragraph("", 10)
