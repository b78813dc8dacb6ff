"""Studies spoiled in many ways: each is read, or its faults are told in lines."""

from __future__ import annotations

import random
import re
from pathlib import Path

from driftwell.errors import StudyError
from driftwell.study.read import read_study
from tests.study.small_study import HEAD, study_file, vary

TRIES = 800
GRID = (
    'set = ["duration=15 us", "stepping.step=20 ns"]\nreplicas = 2\n'
    + vary("cloud.load.count", 'values = [3, 5]\ntogether = "a"')
    + vary("field.rods.radius", 'from = "3 mm"\nto = "0.4 cm"\npoints = 2\ntogether = "a"')
    + vary("field.rods.voltage.amplitude", 'from = "9 V"\nto = "99 V"\npoints = 3\nspacing = "log"')
    + vary("cloud.load.shape", 'values = [{ kind = "ball", radius = "1 mm" }]')
)
SAMPLED = (
    "[sample]\npoints = 4\nseed = 3\n"
    + vary("cloud.load.count", "from = 3\nto = 50")
    + vary("field.rods.radius", 'from = "3 mm"\nto = "0.4 cm"\nspacing = "log"')
)
WORD = re.compile(r""""[^"\n]*"|'[^'\n]*'|[\w.-]+""")
ODD = (
    *("-1", "0", "2.5", "1e400", "nan", "inf", "-0.0", "true", "9" * 19, "9" * 30, "1979-05-27"),
    *("[", "]", "{", "}", '"', "[1, [2]]", "{ a = 1 }", '""', '"1 V"', '"-1e308 V"', '"1e308 V"'),
    *('"5e-324 V"', '"0 degC"', '"cloud"', '"cloud.load"', '"cloud.load.shape.sigma.1"', '"seed"'),
    *(
        '"species.barium.mass"',
        '"title"',
        '"duration"',
        '"x.y.z"',
        '"\\u0000"',
        '"coulomb.accuracy"',
    ),
    *("'field.1.voltage'", "'question.size.at'", "\u2028", "\x7f", "é", "😀"),
)


def spoiled(text: str, draw: random.Random) -> str:
    """The text with one or two of its words or lines exchanged, doubled or dropped."""
    for _ in range(draw.randint(1, 2)):
        if draw.random() < 0.8:
            words = list(WORD.finditer(text))
            word = draw.choice(words)
            other = draw.choice([*ODD, *(each[0] for each in words)])
            text = text[: word.start()] + other + text[word.end() :]
        else:
            lines = text.split("\n")
            line = lines.pop(draw.randrange(len(lines)))
            if draw.random() < 0.5:
                lines[draw.randrange(len(lines)) : 0] = [line, line]
            text = "\n".join(lines)
    return text


def test_a_spoiled_study_is_read_or_its_faults_are_told(tmp_path: Path) -> None:
    draw = random.Random(4)
    read = told = 0
    for number in range(TRIES):
        text = spoiled(HEAD + (GRID, SAMPLED)[number % 2], draw)
        path = study_file(tmp_path, "")
        path.write_text(text, encoding="utf-8")
        try:
            cases = read_study(path).cases
        except StudyError as fault:
            lines = str(fault).splitlines()
            assert lines, text
            assert all(line.isprintable() for line in lines), text
            told += 1
        else:
            assert cases, text
            read += 1
    assert read > 10
    assert told > TRIES // 2
