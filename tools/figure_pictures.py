"""Draw the pictures of docs/figures.md: `python tools/figure_pictures.py`.

The phase space of scenarios/beam-aperture.toml at its end, and the field of einzel-lens.toml.
"""

from __future__ import annotations

import sys
from pathlib import Path
from tempfile import TemporaryDirectory

sys.path.insert(0, str(Path(__file__).resolve().parent))

from readme_picture import ROOT, Silent

from driftwell.record.reader import open_run
from driftwell.report.figures.drawing import figure
from driftwell.report.figures.image_file import image, write_image
from driftwell.report.figures.options import FigureOptions
from driftwell.run import run
from driftwell.scenario.read import read_scenario

PICTURES = {
    "figure-phase-space": ("beam-aperture", "phase-space", FigureOptions()),
    "figure-field": ("einzel-lens", "field", FigureOptions()),
}


def main() -> int:
    """Run both scenarios and write the pictures."""
    for name, (scenario, what, options) in PICTURES.items():
        with TemporaryDirectory() as place:
            folder = Path(place, scenario)
            run(read_scenario(ROOT / "scenarios" / f"{scenario}.toml"), folder, Silent(), threads=2)
            kept = open_run(folder)
            made = image(figure(kept, what, options), "png", kept, what)
        write_image(ROOT / "docs" / "pictures" / f"{name}.png", made)
    return 0


if __name__ == "__main__":
    sys.exit(main())
