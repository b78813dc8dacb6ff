"""How long the player of a large run takes to be written, how large it is, how fast it plays.

A record is made through the real writer: charges that breathe and fly along a tube, some of them
lost on it; the motion is a formula, no physics. Then the page is written, opened in Chromium
without graphics card, and the frames that are really drawn in five seconds are counted.

    python tools/player_speed.py [--charges N] [--records K] [--tracks M] [--keep FOLDER]
"""

from __future__ import annotations

import argparse
import os
import resource
import shutil
import tempfile
import time
from pathlib import Path
from typing import Any

import numpy as np

from driftwell.answers.evidence import CloudFacts
from driftwell.answers.moments import moments_of
from driftwell.constants import ATOMIC_MASS, ELEMENTARY_CHARGE
from driftwell.record.header import Header
from driftwell.record.layout import rows
from driftwell.record.outcome import Outcome
from driftwell.record.reader import open_run
from driftwell.record.rows import tracked_ids
from driftwell.record.writer import RunWriter
from driftwell.report.again import scenario_of
from driftwell.report.player.player import PlayerParts, player

SCENARIO = """title = "Two invented clouds in a tube"
duration = "20 us"
[species.argon]
mass = "39.96 u"
charge = "1 e"
[[cloud]]
name = "early"
species = "argon"
count = 10
shape = { kind = "gaussian", sigma = "1 mm" }
[electrodes]
geometry = "axisymmetric"
field_accuracy = 1e-2
[[electrode]]
name = "rings"
voltage = "0 V"
shape = [
    { kind = "rectangle", from = ["8 mm", "-20 mm"], to = ["10 mm", "20 mm"] },
    { kind = "rectangle", from = ["8 mm", "24 mm"], to = ["10 mm", "60 mm"] },
    { kind = "rectangle", from = ["8 mm", "64 mm"], to = ["10 mm", "100 mm"] },
]
[[wall]]
name = "bore"
kind = "cylinder"
radius = "8 mm"
length = "130 mm"
centre = ["0 mm", "0 mm", "40 mm"]
[[detector]]
name = "exit"
kind = "plane"
at = ["0 mm", "0 mm", "105 mm"]
"""
MASS = 39.96 * ATOMIC_MASS
DURATION = 20e-6
SECONDS = 5.0


def write_record(folder: Path, count: int, records: int, tracks: int) -> None:
    """A run of `count` charges at `records` times, of which `tracks` are tracked."""
    draw = np.random.default_rng(4)
    start = draw.normal(size=(3, count)) * np.array([[1e-3], [1e-3], [3e-3]])
    speed = draw.normal(size=(3, count)) * np.array([[150.0], [150.0], [100.0]])
    speed[2] += 5000.0
    phase = draw.uniform(0.0, 2.0 * np.pi, count)
    late = np.where(draw.uniform(size=count) < 0.2, draw.uniform(5e-6, 19e-6, count), np.inf)
    tracked = tracked_ids(count, tracks)
    half = count // 2
    clouds = tuple(
        CloudFacts(name, k, "argon", MASS, ELEMENTARY_CHARGE, 1.0, k * half, size)
        for k, (name, size) in enumerate((("early", half), ("late", count - half)))
    )
    header = Header(
        scenario=SCENARIO,
        title="Two invented clouds in a tube",
        seed=4,
        duration=DURATION,
        step=1e-9,
        scheme="kick-drift-kick",
        softening=0.0,
        clouds=clouds,
        species=("argon",),
        walls=("bore", "rings"),
        detectors=("exit",),
        tracked=tuple(tracked.tolist()),
    )
    writer = RunWriter.create(folder, header)

    def state(t: float) -> tuple[np.ndarray[Any, Any], np.ndarray[Any, Any]]:
        swing = 1.0 + 0.4 * np.sin(1.2e6 * t + 0.2 * phase)
        place, velocity = start + speed * t, speed.copy()
        place[:2] = start[:2] * swing + speed[:2] * t
        velocity[:2] += start[:2] * 0.4 * 1.2e6 * np.cos(1.2e6 * t + 0.2 * phase)
        return place, velocity

    for t in np.linspace(0.0, DURATION, records):
        place, velocity = state(float(t))
        gone = late <= t
        found = np.concatenate([place, velocity])[:, tracked].T.copy()
        found[gone[tracked]] = np.nan
        writer.trajectory(float(t), found)
        table = rows("moments", 2)
        for k, own in enumerate((slice(0, half), slice(half, count))):
            alive = ~gone[own]
            made = moments_of(place[:, own][:, alive], velocity[:, own][:, alive], MASS)
            for name in ("count", "centre", "covariance", "kinetic_energy", "kinetic_variance"):
                table[k][name] = getattr(made, name)
        writer.moments(float(t), table)
        line = rows("ledger", 1)
        line["time"], line["energy_residual"] = t, 1e-7 * t / DURATION
        writer.ledger(line)
        if writer.due(0):
            writer.seal({})
    lost = np.flatnonzero(np.isfinite(late))
    losses = rows("losses", len(lost))
    losses["id"], losses["time"], losses["weight"] = lost, late[lost], 1.0
    losses["cloud"] = lost >= half
    for row, k in zip(losses, lost.tolist(), strict=True):
        swing = 1.0 + 0.4 * np.sin(1.2e6 * late[k] + 0.2 * phase[k])
        row["position"][:2] = start[:2, k] * swing + speed[:2, k] * late[k]
        row["position"][2] = start[2, k] + speed[2, k] * late[k]
    writer.losses(np.sort(losses, order="time"))
    writer.seal({})
    writer.finish(Outcome("finished", "The motion was followed to its end.", 0, 1.0, 20000), ())


def page_of(parts: PlayerParts) -> str:
    """The player alone in a page."""
    return (
        '<!doctype html><html lang="en"><head><meta charset="utf-8"><title>player</title>'
        f"<style>{parts.style}</style></head><body>{parts.markup}"
        f"<script>{parts.script}</script></body></html>"
    )


def frames_a_second(path: Path) -> dict[str, float]:
    """Frames drawn in a second while the page plays, in several states of it."""
    from playwright.sync_api import sync_playwright

    browser_path = os.environ.get("CHROMIUM") or shutil.which("chromium")
    found = {}
    with sync_playwright() as driver:
        browser = driver.chromium.launch(
            executable_path=browser_path, args=["--no-sandbox", "--disable-gpu"]
        )
        page = browser.new_page(viewport={"width": 1280, "height": 800})
        began = time.perf_counter()
        page.goto(path.resolve().as_uri())
        page.wait_for_function("window.driftwellPlayer && driftwellPlayer.frames > 0")
        found["seconds to the first picture"] = time.perf_counter() - began
        states = {
            "no trails": "set('trail', 0)",
            "trails": "set('trail', 25)",
            "long trails": "set('trail', 60)",
            "trails, by energy": "set('trail', 25), set('colour', 'energy')",
            "trails, following": "document.getElementById('dwp-follow').click()",
        }
        page.evaluate(
            "void (window.set = (name, value) => {"
            " const it = document.getElementById('dwp-' + name);"
            " it.value = value; it.dispatchEvent(new Event('input'));"
            " it.dispatchEvent(new Event('change')); })"
        )
        page.evaluate("document.getElementById('dwp-loop').click(); driftwellPlayer.play()")
        for name, change in states.items():
            page.evaluate(change)
            page.wait_for_timeout(500)
            before = page.evaluate("[driftwellPlayer.frames, performance.now()]")
            page.wait_for_timeout(1000 * SECONDS)
            after = page.evaluate("[driftwellPlayer.frames, performance.now()]")
            found[name] = 1000.0 * (after[0] - before[0]) / (after[1] - before[1])
        browser.close()
    return found


def main() -> None:
    """Make, write, measure, print."""
    asked = argparse.ArgumentParser(description=__doc__)
    asked.add_argument("--charges", type=int, default=100_000)
    asked.add_argument("--records", type=int, default=500)
    asked.add_argument("--tracks", type=int, default=1000)
    asked.add_argument("--keep", type=Path, help="folder for the record and the page")
    given = asked.parse_args()
    with tempfile.TemporaryDirectory() as own:
        folder = given.keep or Path(own)
        run_folder = folder / f"run-{given.charges}-{given.records}-{given.tracks}"
        if not run_folder.exists():
            write_record(run_folder, given.charges, given.records, given.tracks)
        size = sum(file.stat().st_size for file in run_folder.rglob("*") if file.is_file())
        print(f"record: {size / 1e6:.0f} MB, {given.tracks} of {given.charges} tracked")
        before = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss
        began = time.perf_counter()
        run = open_run(run_folder)
        parts = player(run, scenario_of(run))
        if parts is None:
            raise SystemExit("nothing to show")
        text = page_of(parts)
        print(f"written in {time.perf_counter() - began:.2f} s, {len(text.encode()) / 1e6:.2f} MB")
        after = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss
        print(f"memory: {before / 1e3:.0f} MB before, at most {after / 1e3:.0f} MB")
        page = folder / f"player-{given.tracks}.html"
        page.write_text(text, "utf-8")
        for name, value in frames_a_second(page).items():
            print(f"{name}: {value:.1f}")


if __name__ == "__main__":
    main()
