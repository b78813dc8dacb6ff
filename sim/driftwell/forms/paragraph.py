"""Words broken into lines, none of which parts a number from its unit."""

from __future__ import annotations

import re
import textwrap

_NUMBER_AND_UNIT = re.compile(r"(\d) (?=[A-Za-zµ]{1,3}\b)")


def paragraph(words: str, width: int, first: str = "", rest: str = "") -> list[str]:
    """Lines of at most `width` characters; a word longer than that has a line of its own.

    first, rest : what stands before the words in the first line, and in all others
    """
    lines = textwrap.wrap(
        _NUMBER_AND_UNIT.sub("\\1\u00a0", words),
        width,
        initial_indent=first,
        subsequent_indent=rest,
        break_long_words=False,
        break_on_hyphens=False,
    )
    return [line.replace("\u00a0", " ") for line in lines]
