"""Every shape in space, as a scenario states it, with its volume where it has one."""

from __future__ import annotations

import math

CYLINDER = math.pi * 9.0 * 40.0
SPATIAL = {
    "box": ({"centre": ["1 mm", "2 mm", "3 mm"], "size": ["4 mm", "5 mm", "6 mm"]}, 120.0),
    "turned box": (
        {
            "kind": "box",
            "centre": ["1 mm", "2 mm", "3 mm"],
            "size": ["4 mm", "5 mm", "6 mm"],
            "axis": [1.0, 1.0, 0.5],
            "turn": "20 deg",
        },
        120.0,
    ),
    "plate": (
        {
            "centre": ["0 mm", "0 mm", "0 mm"],
            "size": ["20 mm", "10 mm"],
            "thickness": "0.5 mm",
            "holes": [{"radius": "1 mm"}, {"at": ["5 mm", "1 mm"], "radius": "2 mm"}],
            "slits": [
                {"at": ["-5 mm", "0 mm"], "length": "6 mm", "width": "1 mm", "angle": "60 deg"}
            ],
        },
        0.5 * (200.0 - math.pi - 4.0 * math.pi - 5.0 - 0.25 * math.pi),
    ),
    "rod": ({"centre": ["0 mm", "9 mm", "0 mm"], "radius": "3 mm", "length": "40 mm"}, CYLINDER),
    "lying rod": (
        {
            "kind": "rod",
            "centre": ["0 mm", "9 mm", "0 mm"],
            "radius": "3 mm",
            "length": "40 mm",
            "axis": [1.0, 0.0, 0.0],
        },
        CYLINDER,
    ),
    "tube": (
        {
            "centre": ["0 mm", "0 mm", "0 mm"],
            "radius": "5 mm",
            "thickness": "1 mm",
            "length": "20 mm",
        },
        math.pi * 11.0 * 20.0,
    ),
    "ring": (
        {"centre": ["0 mm", "0 mm", "0 mm"], "radius": "8 mm", "section_radius": "2 mm"},
        2.0 * math.pi**2 * 8.0 * 4.0,
    ),
    "flat ring": (
        {
            "kind": "ring",
            "centre": ["0 mm", "0 mm", "0 mm"],
            "radius": "8 mm",
            "section": ["4 mm", "1 mm"],
        },
        math.pi * (100.0 - 36.0),
    ),
    "sphere": (
        {"centre": ["0 mm", "0 mm", "1 mm"], "radius": "3 mm"},
        4.0 / 3.0 * math.pi * 27.0,
    ),
    "cone": (
        {"centre": ["0 mm", "0 mm", "0 mm"], "radii": ["4 mm", "1 mm"], "length": "6 mm"},
        math.pi / 3.0 * 6.0 * 21.0,
    ),
    "pointed cone": (
        {
            "kind": "cone",
            "centre": ["0 mm", "0 mm", "0 mm"],
            "radii": ["0 mm", "4 mm"],
            "length": "6 mm",
        },
        math.pi / 3.0 * 6.0 * 16.0,
    ),
    "wire": (
        {
            "start": ["0 mm", "-5 mm", "0 mm"],
            "end": ["0 mm", "5 mm", "3 mm"],
            "radius": "1 mm",
        },
        math.pi * math.hypot(10.0, 3.0) + 4.0 / 3.0 * math.pi,
    ),
}
"""Name: (keys, volume, mm^3); the name is the kind where none is given."""
SHEETS = {
    "plate": {
        "centre": ["0 mm", "0 mm", "0 mm"],
        "size": ["20 mm", "10 mm"],
        "thickness": "0 mm",
        "holes": [{"radius": "1 mm"}],
    },
    "tube": {
        "centre": ["0 mm", "0 mm", "0 mm"],
        "radius": "5 mm",
        "thickness": "0 mm",
        "length": "20 mm",
    },
}
