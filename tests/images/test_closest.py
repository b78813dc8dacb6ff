"""How near a conductor the images' force still grows: what "auto" comes to is told and kept."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import numpy as np
import pytest

from driftwell.assembly import Assembly, assembled, remarks
from driftwell.constants import COULOMB_CONSTANT, ELEMENTARY_CHARGE
from driftwell.judgement import Finding, judged
from driftwell.record.summary import summary
from driftwell.scenario.explain import explain
from driftwell.scenario.read import read_scenario
from driftwell.study.convergence.differences import error_of_step
from tests.images.images_at import images_at
from tests.running import carried_out, points, species
from tests.scenario.good_scenarios import toml_file

MASS, WEIGHT, RADIUS = 1.66e-25, 1e6, 5e-3
BALL = {"kind": "sphere", "radius": "5 mm"}


def packet(images: dict[str, Any], step: str = "100 ns", **more: Any) -> dict[str, Any]:
    """Sections of a scenario: a million ions as one, 20 um off the middle of a ball."""
    return {
        "species": {"ion": species(MASS)},
        "cloud": [{**points("packet", "ion", [[0.0, 0.0, 20e-6]]), "weight": WEIGHT}],
        "stepping": {"step": step},
        "images": images,
        **more,
    }


def begun(folder: Path, **sections: Any) -> Assembly:
    """The parts of such a scenario."""
    path = folder / "packet.toml"
    path.write_text(toml_file({"title": "a check", "duration": "10 us", **sections}))
    return assembled(read_scenario(path))


def followed_to(step: float) -> float:
    """The distance, m, whose well turns a charge by 0.3 rad in a step: docs/numerics/images.md."""
    square = WEIGHT * ELEMENTARY_CHARGE**2
    return float(np.cbrt(COULOMB_CONSTANT * square * step**2 / (0.36 * MASS)))


def weakened(folder: Path, images: dict[str, Any]) -> Finding | None:
    """What the judgement of a run says of its images."""
    run = carried_out(folder, 1e-5, **packet(images))
    told = {each.name: each for each in judged(run)}
    return told.get("images weakened near the conductor")


def test_a_run_says_what_the_automatic_distance_is_and_what_it_takes(tmp_path: Path) -> None:
    """In the middle of a ball D = a: the force loses 1 - (1 + (2 c/a)^2)^(-3/2)."""
    closest = followed_to(100e-9)
    parts = begun(tmp_path, **packet(BALL))
    assert closest == pytest.approx(parts.closest, rel=1e-6, abs=0.0)
    (told,) = (each for each in remarks(parts) if "closest" in each)
    assert 'closest = "auto"' in told
    assert "338 um from the conductor" in told
    assert "steps of 100 ns" in told
    assert "2.7 % too weak" in told


def test_nothing_is_said_of_a_distance_that_the_file_states(tmp_path: Path) -> None:
    parts = begun(tmp_path, **packet({**BALL, "closest": "10 um"}))
    assert 10e-6 == pytest.approx(parts.closest, rel=1e-12, abs=0.0)
    assert [] == [each for each in remarks(parts) if "closest" in each]


def test_images_as_blurred_as_their_charges_are_told_as_such(tmp_path: Path) -> None:
    parts = begun(tmp_path, **packet(BALL, coulomb={"softening": "1 mm"}))
    (told,) = (each for each in remarks(parts) if "closest" in each)
    assert "half of coulomb.softening, 500 um" in told


def test_check_and_the_record_say_how_near_the_force_grows(tmp_path: Path) -> None:
    run = carried_out(tmp_path, 1e-6, **packet(BALL))
    assert followed_to(100e-9) == pytest.approx(run.header.images_closest, rel=1e-6, abs=0.0)
    assert "their force stops growing within 338 um of it" in "\n".join(summary(run))
    words = " ".join(" ".join(explain(read_scenario(tmp_path / "scenario0.toml"))).split())
    assert "the force stops growing at the distance that steps can follow" in words


def test_images_that_lost_force_where_charges_were_are_judged(tmp_path: Path) -> None:
    told = weakened(tmp_path, BALL)
    assert told is not None
    part = 1.0 - (1.0 + (2.0 * followed_to(100e-9) / RADIUS) ** 2) ** -1.5
    assert part == pytest.approx(told.figure, rel=0.01, abs=0.0)  # 20 um off the middle
    assert 0.01 == told.limit
    assert 'images.closest = "210 um"' in told.remedy
    assert weakened(tmp_path, {**BALL, "closest": "200 um"}) is None


def test_the_automatic_distance_is_part_of_the_error_of_the_step(tmp_path: Path) -> None:
    """c goes with h^(2/3) and the force errs by its square, so the order is 4/3; the limit is the
    image's own potential without any distance, -K q/a in the middle of a ball."""
    steps, values = [100e-9, 50e-9, 25e-9], []
    for step in steps:
        images = begun(tmp_path, **packet(BALL, f"{step!r} s")).images
        assert images is not None
        values.append(float(images_at(images, np.zeros((3, 1)), 1.0)[3, 0]))
    found = error_of_step(values, steps, 2.0, 0.0, values[:1])
    assert 4.0 / 3.0 == pytest.approx(found.order, rel=0.03, abs=0.0)
    assert -1.0 / RADIUS == pytest.approx(found.limit, rel=1e-4, abs=0.0)
