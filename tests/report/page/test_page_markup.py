"""Markup: text gets in escaped, and the check of pages can fail."""

from __future__ import annotations

import pytest

from driftwell.report.page.markup import Markup, coded, joined, readable, tag, together
from driftwell.report.page.value_bar import value_bar
from tests.report.page.well_formed import Checked


def test_text_is_escaped_and_markup_is_not() -> None:
    inner = tag("em", "a < b & \"c\" 'd'")
    assert "<em>a &lt; b &amp; &quot;c&quot; &#x27;d&#x27;</em>" == inner.text
    assert f"<p>&lt;i&gt;{inner.text}</p>" == tag("p", "<i>", inner).text
    assert "a&lt;b" == joined(["a", "b"], "<").text
    assert "&lt;<br>" == together("<", tag("br")).text


def test_attributes_are_escaped_named_as_in_html_and_left_out_where_none() -> None:
    made = tag("a", "x", href='"><script>', class_="k", aria_label="l", hidden=True, id=None)
    expected = '<a href="&quot;&gt;&lt;script&gt;" class="k" aria-label="l" hidden>x</a>'
    assert expected == made.text


def test_what_cannot_be_seen_or_turns_the_text_around_is_written_out() -> None:
    assert "a\\u202eb\\u0000\\u000bµ ±\n" == readable("a\u202eb\0\x0bµ ±\n")
    assert "\\udcff" == readable("\udcff")


def test_backticks_become_code_where_they_come_in_pairs() -> None:
    assert "say <code>a&lt;b</code>." == coded("say `a<b`.").text
    assert "one ` alone" == coded("one ` alone").text


@pytest.mark.parametrize(
    ("value", "error", "other"), [(1.0, 0.1, 2.0), (1.0, None, 1.0), (-3e-9, 1e-9, 5e-9)]
)
def test_a_bar_holds_both_values_and_the_error(
    value: float, error: float | None, other: float
) -> None:
    made = value_bar(value, error, other, "both")
    places = [
        float(word.split('"')[1])
        for word in made.text.split()
        if word.startswith(("x1=", "x2=", "cx="))
    ]
    assert 0.0 <= min(places) <= max(places) <= 176.0
    assert (5 if error else 2) == made.text.count("<line")


def test_a_bar_of_nothing_but_zeros_is_none() -> None:
    assert Markup("") == value_bar(0.0, None, 0.0, "both")


@pytest.mark.parametrize(
    ("page", "fault"),
    [
        ("<p><b>x</p>", "</p> closes ['b']"),
        ("<p>x", "<p> is not closed"),
        ("<p id=a></p><p id=a></p>", 'the id "a" is there twice'),
        ("<label for=a></label>", 'nothing has the id "a"'),
        ("<img src=http://x.y/z>", "<img src> loads http://x.y/z"),
        ("<p onclick=x></p>", "<p> has onclick"),
        ("<h1></h1><h3></h3>", "h1 is followed by h3"),
        ("<script>fetch('https://x')</script>", "a script or a style names an address"),
    ],
)
def test_the_check_of_pages_finds_what_is_wrong(page: str, fault: str) -> None:
    assert fault in Checked(page).faults
