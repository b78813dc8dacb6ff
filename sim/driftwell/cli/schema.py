"""``driftwell schema``: the JSON Schema of scenario or study files, for editors."""

from __future__ import annotations

import json

from driftwell.cli.terminal.printing import answer
from driftwell.exit_codes import FINISHED, UNUSABLE
from driftwell.scenario.schema import json_schema
from driftwell.study.form import StudyForm


def schema(study: bool = False) -> int:
    """Print the schema, of study files where that is asked for, and return 0."""
    found = json_schema(StudyForm, "driftwell study") if study else json_schema()
    return FINISHED if answer([json.dumps(found, indent=2, ensure_ascii=True)]) else UNUSABLE
