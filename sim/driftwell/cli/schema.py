"""``driftwell schema``: the JSON Schema of scenario files, for editors."""

from __future__ import annotations

import json

from driftwell.cli.printing import answer
from driftwell.scenario.schema import json_schema


def schema() -> int:
    """Print the schema and return 0."""
    return 0 if answer([json.dumps(json_schema(), indent=2, ensure_ascii=True)]) else 2
