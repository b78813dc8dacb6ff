"""The player in a real browser: it loads, plays, obeys mouse, keys and other scripts."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from pictured_run import charges, lost, pictured_run
from played import NASTY, page_of, scenario_in

from driftwell.record.reader import Run
from driftwell.report.page.markup import readable
from tests.browser import Opened, browser, opened

STATE = "window.driftwellPlayer"


@pytest.fixture(scope="module")
def chromium() -> Iterator[Any]:
    with browser() as started:
        yield started


@pytest.fixture(scope="module")
def beam_page(run_of: Callable[[str], Run], tmp_path_factory: pytest.TempPathFactory) -> Path:
    folder = tmp_path_factory.mktemp("beam-page")
    return page_of(run_of("beam"), folder, scenario_in(folder))


@pytest.fixture(scope="module")
def shown(chromium: Any, beam_page: Path) -> Iterator[Opened]:
    """The beam's page for tests that leave it as they found it: after a reset, at the start."""
    with opened(chromium, beam_page) as found:
        settled(found)
        yield found
        assert [] == found.complaints
        assert [] == found.requests


@pytest.fixture(autouse=True)
def _begin_again(request: pytest.FixtureRequest) -> None:
    if "shown" in request.fixturenames:
        found: Opened = request.getfixturevalue("shown")
        found.page.click("#dwp-reset")
        found.value(f"{STATE}.pause(); {STATE}.seek(0)")
        settled(found)


def settled(found: Opened) -> None:
    """Wait until two frames have passed: what was asked for is drawn."""
    found.value("new Promise((done) => requestAnimationFrame(() => requestAnimationFrame(done)))")


def state(found: Opened, name: str) -> Any:
    return found.value(f"{STATE}.{name}")


def put(found: Opened, name: str, value: Any) -> None:
    """Set a control as a user's hand would."""
    found.value(
        f"(() => {{ const it = document.getElementById('dwp-{name}'); it.value = '{value}';"
        "it.dispatchEvent(new Event('input')); it.dispatchEvent(new Event('change')); })()"
    )
    settled(found)


def picture(found: Opened) -> Any:
    """The pixels of the picture, as text."""
    settled(found)
    return found.value("document.getElementById('dwp-canvas').toDataURL()")


def test_it_loads_without_complaint_or_request_and_waits(shown: Opened) -> None:
    assert [] == shown.complaints
    assert [] == shown.requests
    assert 900 == state(shown, "charges")
    assert 26 == state(shown, "records")
    assert not state(shown, "playing")
    assert "0" == shown.page.get_attribute("#dwp", "data-time")


def test_it_advances_when_played_and_stops_when_told(shown: Opened) -> None:
    shown.page.click("#dwp-play")
    shown.page.wait_for_function(f"{STATE}.time > 1e-8 && {STATE}.frames > 5")
    assert "Pause" == shown.page.inner_text("#dwp-play")
    shown.page.click("#dwp-play")
    time = state(shown, "time")
    shown.page.wait_for_timeout(60)
    assert time == state(shown, "time")
    assert time == float(shown.page.get_attribute("#dwp", "data-time"))


def test_it_ends_at_the_end_and_loops_when_asked(shown: Opened) -> None:
    shown.value(f"{STATE}.seek(4.99e-7); {STATE}.play()")
    shown.page.wait_for_function(f"!{STATE}.playing")
    assert pytest.approx(5e-7, rel=1e-12, abs=0.0) == state(shown, "time")
    shown.page.check("#dwp-loop")
    shown.value(f"{STATE}.seek(4.99e-7); {STATE}.play()")
    shown.page.wait_for_function(f"{STATE}.playing && {STATE}.time < 2e-7")


def test_a_higher_speed_is_faster(shown: Opened) -> None:
    gone = {}
    for speed in ("0.5", "4.0"):
        put(shown, "speed", speed)
        shown.value(f"{STATE}.seek(0); {STATE}.play()")
        shown.page.wait_for_timeout(400)
        gone[speed] = state(shown, "time")
        shown.value(f"{STATE}.pause()")
    assert gone["4.0"] > 3.0 * gone["0.5"] > 0.0


def test_the_slider_seeks_and_words_say_what_is_there(shown: Opened) -> None:
    put(shown, "time", 3e-7)
    assert 600 == state(shown, "there")
    shown.page.wait_for_function("document.getElementById('dwp-words').textContent.includes('300')")
    words = shown.page.inner_text("#dwp-words")
    assert "At 300 ns: of 900 charges 600 there; 300 lost; rms size of all x" in words
    assert "300.0 ns" == shown.page.get_attribute("#dwp-time", "aria-valuetext")


def test_keys_step_from_record_to_record_and_play(shown: Opened) -> None:
    shown.page.focus("#dwp-canvas")
    for key, expected in (("ArrowRight", 2e-8), ("ArrowRight", 4e-8), ("ArrowLeft", 2e-8)):
        shown.page.keyboard.press(key)
        assert pytest.approx(expected, rel=1e-9, abs=0.0) == state(shown, "time")
    shown.page.keyboard.press("End")
    assert pytest.approx(5e-7, rel=1e-9, abs=0.0) == state(shown, "time")
    shown.page.keyboard.press("Home")
    assert 0.0 == state(shown, "time")
    shown.page.keyboard.press("Space")
    shown.page.wait_for_function(f"{STATE}.playing")
    shown.page.keyboard.press("Space")
    assert not state(shown, "playing")


def test_views_turn_the_eye_and_keys_do_so_too(shown: Opened) -> None:
    angles = {}
    for name in ("x", "y", "z"):
        shown.page.click(f"[data-view={name}]")
        camera = state(shown, "camera")
        angles[name] = (camera["azimuth"], camera["elevation"])
        shown.page.focus("#dwp-canvas")
        shown.page.keyboard.press("o")
        shown.page.keyboard.press(name)
        camera = state(shown, "camera")
        assert angles[name] == (camera["azimuth"], camera["elevation"])
    right = np.pi / 2
    assert {"x": (-right, 0), "y": (-right, right), "z": (0, 0)} == angles


def test_the_mouse_turns_shifts_and_zooms(shown: Opened) -> None:
    box = shown.page.locator("#dwp-canvas").bounding_box()
    x, y = box["x"] + 0.5 * box["width"], box["y"] + 0.5 * box["height"]

    def drag() -> None:
        shown.page.mouse.move(x, y)
        shown.page.mouse.down()
        shown.page.mouse.move(x + 60, y + 20, steps=3)
        shown.page.mouse.up()

    before = state(shown, "camera")
    drag()
    turned = state(shown, "camera")
    assert turned["azimuth"] < before["azimuth"]
    assert turned["target"] == before["target"]
    shown.page.keyboard.down("Shift")
    drag()
    shown.page.keyboard.up("Shift")
    shifted = state(shown, "camera")
    assert shifted["target"] != turned["target"]
    assert shifted["azimuth"] == turned["azimuth"]
    shown.page.mouse.wheel(0, -300)
    shown.page.wait_for_function(f"{STATE}.camera.distance < {shifted['distance']}")


@pytest.mark.parametrize("mode", ["species", "energy", "speed", "fate"])
def test_colours_change_with_what_they_stand_for(shown: Opened, mode: str) -> None:
    shown.value(f"{STATE}.seek(1e-7)")
    before = picture(shown)
    put(shown, "colour", mode)
    assert before != picture(shown)
    legend = shown.page.inner_text("#dwp-legend")
    expected = {
        "species": ["calcium: 900"],
        "energy": ["kinetic energy of one particle", "keV"],
        "speed": ["speed", "Mm/s"],
        "fate": ["stays to the end (600)", "lost: bore (150)", "lost: plate (150)", "lost there"],
    }[mode]
    assert [] == [words for words in expected if words not in legend]


def test_trails_and_surfaces_are_seen_and_can_be_hidden(shown: Opened) -> None:
    shown.value(f"{STATE}.seek(2e-7)")
    put(shown, "trail", 0)
    assert 0.0 == state(shown, "trail")
    without = picture(shown)
    put(shown, "trail", 50)
    assert pytest.approx(0.25 * 5e-7, rel=1e-9, abs=0.0) == state(shown, "trail")
    assert without != picture(shown)
    put(shown, "trail", 0)
    assert without == picture(shown)
    shown.page.uncheck("#dwp-surfaces")
    assert without != picture(shown)


def test_a_long_scene_is_stretched_and_this_is_said_by_its_length_bars(shown: Opened) -> None:
    assert state(shown, "stretched")
    before = picture(shown)
    shown.page.uncheck("#dwp-stretch")
    assert not state(shown, "stretched")
    assert before != picture(shown)


def test_following_keeps_the_charges_in_the_middle(shown: Opened) -> None:
    shown.page.check("#dwp-follow")
    shown.value(f"{STATE}.seek(2e-7)")
    settled(shown)
    assert pytest.approx(0.4, rel=0.01, abs=0.0) == state(shown, "camera")["target"][2]


def test_a_chart_seeks_and_others_may_seek_and_listen(shown: Opened) -> None:
    assert 4 >= shown.page.locator(".dwp-chart").count() >= 3
    chart = shown.page.locator(".dwp-chart svg[role=slider]").first
    box = chart.bounding_box()
    chart.click(position={"x": 0.6 * box["width"], "y": 0.5 * box["height"]})
    assert 2e-7 < state(shown, "time") < 4e-7
    shown.page.keyboard.press("ArrowLeft")
    chart.focus()
    before = state(shown, "time")
    shown.page.keyboard.press("ArrowRight")
    assert state(shown, "time") > before
    heard = shown.value(
        "(() => { let heard = null;"
        "document.addEventListener('driftwell:time', (e) => { heard = e.detail.time; });"
        "document.dispatchEvent(new CustomEvent('driftwell:seek', {detail: {time: 1e-7}}));"
        "return heard; })()"
    )
    assert 1e-7 == heard == state(shown, "time")
    assert "charges there" in chart.get_attribute("aria-label")
    assert "100 ns" in chart.get_attribute("aria-valuetext")


def test_every_control_has_a_name_and_can_be_reached_by_tab(shown: Opened) -> None:
    nameless = shown.value(
        "['button', 'input', 'select', 'canvas'].flatMap((kind) =>"
        " [...document.querySelectorAll('.dwp ' + kind)]).filter((it) => !(it.textContent.trim()"
        " || (it.labels && it.labels.length && it.labels[0].textContent.trim())"
        " || it.getAttribute('aria-label'))).map((it) => it.id)"
    )
    assert [] == nameless
    shown.page.focus("#dwp-canvas")
    reached = []
    for _ in range(20):
        reached.append(shown.value("document.activeElement.id"))
        shown.page.keyboard.press("Tab")
    assert {"dwp-canvas", "dwp-play", "dwp-time", "dwp-speed", "dwp-colour", "dwp-trail"} <= set(
        reached
    )


CORNER = """() => {
  const probe = document.createElement("canvas").getContext("2d", { willReadFrequently: true });
  probe.drawImage(document.getElementById("dwp-canvas"), 2, 2, 1, 1, 0, 0, 1, 1);
  return [...probe.getImageData(0, 0, 1, 1).data].slice(0, 3);
}"""
CONTRAST = """() => {
  const levels = (text) => text.match(/[\\d.]+/g).slice(0, 3).map((x) => {
    const part = x / 255;
    return part <= 0.04045 ? part / 12.92 : ((part + 0.055) / 1.055) ** 2.4;
  });
  const parts = [0.2126, 0.7152, 0.0722];
  const light = (text) => levels(text).reduce((sum, x, i) => sum + parts[i] * x, 0);
  const [a, b] = [getComputedStyle(document.querySelector('.dwp-note')).color,
    getComputedStyle(document.querySelector('.dwp-stage')).backgroundColor].map(light).sort();
  return (b + 0.05) / (a + 0.05);
}"""
PAGE = """<style>:root { --paper: #ffffff; --ink: #222222; --pale: #55606b; }
:root[data-theme="dark"] { --paper: #15191d; --ink: #e4e6e8; --pale: #a3adb6; }
@media (prefers-color-scheme: dark) { :root:not([data-theme="light"]) {
--paper: #15191d; --ink: #e4e6e8; --pale: #a3adb6; } }
body { background: var(--paper); color: var(--ink); }</style></head>"""


@pytest.mark.parametrize("scheme", ["light", "dark"])
def test_words_stand_out_and_the_picture_follows_the_page_in_light_and_dark(
    chromium: Any, beam_page: Path, tmp_path: Path, scheme: str
) -> None:
    """Contrast of 4.5 at least: WCAG 2.1, success criterion 1.4.3."""
    page = tmp_path / "themed.html"
    page.write_text(beam_page.read_text("utf-8").replace("</head>", PAGE), "utf-8")
    with opened(chromium, page, color_scheme=scheme) as found:
        settled(found)
        paper = {"light": [255, 255, 255], "dark": [21, 25, 29]}
        assert paper[scheme] == found.value(CORNER)
        assert found.value(CONTRAST) >= 4.5
        other = {"light": "dark", "dark": "light"}[scheme]
        found.value(f"document.documentElement.setAttribute('data-theme', '{other}')")
        settled(found)
        assert paper[other] == found.value(CORNER)
        assert found.value(CONTRAST) >= 4.5
        assert [] == found.complaints


def test_hostile_names_stay_text(chromium: Any, tmp_path: Path) -> None:
    start = charges(6)
    run = pictured_run(
        tmp_path / "run",
        [(0.0, start), (1e-6, start)],
        title=NASTY,
        names=(NASTY,),
        walls=(NASTY,),
        losses=lost(np.array([5e-7]), np.zeros((1, 3))),
    )
    with opened(chromium, page_of(run, tmp_path)) as found:
        assert NASTY.replace("\u2028", "") in found.page.inner_text("#dwp-legend").replace(
            "\u2028", ""
        ).replace("\n", "")
        put(found, "colour", "fate")
        assert f"lost: {NASTY}"[:20] in found.page.inner_text("#dwp-legend")
        assert 0 == found.page.locator("img").count()
        assert readable(NASTY) in found.page.get_attribute("#dwp-canvas", "aria-label")
        assert [] == found.complaints


def test_a_single_picture_and_a_single_charge_do_no_harm(chromium: Any, tmp_path: Path) -> None:
    run = pictured_run(tmp_path / "run", [(0.0, charges(1))], snapshots=(0,))
    with opened(chromium, page_of(run, tmp_path)) as found:
        settled(found)
        found.page.click("#dwp-play")
        found.page.click("#dwp-reset")
        settled(found)
        assert 1 == state(found, "there")
        assert [] == found.complaints


def test_it_fits_a_narrow_screen(chromium: Any, beam_page: Path) -> None:
    size = {"width": 360, "height": 740}
    with opened(chromium, beam_page, viewport=size, device_scale_factor=2) as found:
        settled(found)
        assert found.value("document.documentElement.scrollWidth") <= 360
        assert [] == found.complaints
