"""Draw the picture of docs/report.md: `python tools/report_picture.py`; it needs Chromium.

The player of scenarios/beam-aperture.toml as its pulse meets the plate.
"""

from __future__ import annotations

import sys
from pathlib import Path
from tempfile import TemporaryDirectory

sys.path.insert(0, str(Path(__file__).resolve().parents[1]))
sys.path.insert(0, str(Path(__file__).resolve().parent))

from readme_picture import ROOT, Silent

from driftwell.report.written import write_report
from driftwell.run import run
from driftwell.scenario.read import read_scenario
from tests.browser import browser, opened

WHEN = 0.62
"""Part of the run at which the player stands."""
SIZE = {"width": 1100, "height": 900}


def main() -> int:
    """Run the scenario, write its page and take the picture."""
    with TemporaryDirectory() as place:
        folder = Path(place, "pulse")
        run(read_scenario(ROOT / "scenarios" / "beam-aperture.toml"), folder, Silent(), threads=2)
        page = write_report(folder, None).path
        with browser() as started, opened(started, page, viewport=SIZE) as shown:
            slider = shown.page.locator("#dwp-time")
            most = float(slider.get_attribute("max"))
            slider.evaluate(
                "(it, at) => { it.value = at; it.dispatchEvent(new Event('input')); }", WHEN * most
            )
            shown.page.wait_for_timeout(1000)
            picture = shown.page.locator("#dwp").screenshot(type="png")
    (ROOT / "docs" / "pictures" / "report-player.png").write_bytes(picture)
    return 0


if __name__ == "__main__":
    sys.exit(main())
