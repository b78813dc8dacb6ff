"""Small scenarios for the command line, and the command as a user starts it. Settings invented."""

from __future__ import annotations

import os
import signal
import subprocess
import sys
from pathlib import Path

SMALL = """\
title = "Eight ions in a trap"
duration = "20 us"
seed = 7

[species.ion]
mass = "138 u"
charge = "1 e"

[[cloud]]
name = "load"
species = "ion"
count = 8
shape = { kind = "gaussian", sigma = "50 um" }
motion = { temperature = "10 K" }

[[field]]
name = "rods"
kind = "rf-quadrupole"
radius = "3.5 mm"
voltage = { amplitude = "180 V", frequency = "1.1 MHz" }

[[field]]
name = "caps"
kind = "static-quadrupole"
axial_frequency = { species = "ion", value = "80 kHz" }

[[wall]]
name = "bore"
kind = "cylinder"
radius = "1 mm"

[stepping]
step = "20 ns"

[record]
every = "1 us"

[[question]]
name = "held"
ask = "fraction-left"
of = "load"

[[question]]
name = "warmth"
ask = "temperature"
of = "load"
axis = "z"
"""

PAIR = """\
title = "Opposite charges at rest"
duration = "1 us"

[[cloud]]
name = "light"
species = "electron"
shape = { kind = "points", positions = [["1 mm", "0", "0"], ["0", "0", "1 um"]] }

[[cloud]]
name = "heavy"
species = "proton"
shape = { kind = "points", positions = [["0", "0", "0"]] }

[stepping]
step = "0.1 ns"
"""

SIGNALS = (signal.SIGINT, signal.SIGTERM, signal.SIGHUP)
LONG = ("duration=1000 s", "record.every=1 ms", "stepping.step=20 ns")
"""Settings that make a run last until it is stopped."""


def scenario(folder: Path, text: str = SMALL, name: str = "small.toml") -> Path:
    """A scenario file in `folder`."""
    path = folder / name
    path.write_text(text, "utf-8")
    return path


def settings(*texts: str) -> list[str]:
    """The arguments that give each of `texts` as a setting."""
    return [word for text in texts for word in ("--set", text)]


def started(
    *arguments: str | Path, folder: Path | None = None, **environment: str
) -> subprocess.Popen[str]:
    """The command, started as a user's shell does, its output in pipes."""
    # signals that are ignored here (the tests run in the background) would be ignored there too
    before = {each: signal.signal(each, signal.SIG_DFL) for each in SIGNALS}
    try:
        return subprocess.Popen(
            [sys.executable, "-m", "driftwell", *map(str, arguments)],
            stdin=subprocess.DEVNULL,
            stdout=subprocess.PIPE,
            stderr=subprocess.PIPE,
            text=True,
            encoding="utf-8",
            cwd=folder,
            env={**os.environ, "PYTHONIOENCODING": "utf-8", "PYTHONUNBUFFERED": "", **environment},
        )
    finally:
        for each, handler in before.items():
            signal.signal(each, handler)


def command(
    *arguments: str | Path, folder: Path | None = None, **environment: str
) -> subprocess.CompletedProcess[str]:
    """What the command came to."""
    process = started(*arguments, folder=folder, **environment)
    out, err = process.communicate(timeout=300)
    return subprocess.CompletedProcess(process.args, process.returncode, out, err)
