"""Which runs the cases of a study are: the digests of their scenarios."""

from __future__ import annotations

from collections.abc import Iterator
from copy import deepcopy

from driftwell.errors import ScenarioError
from driftwell.forms.faults import read_form
from driftwell.scenario.digest import digest
from driftwell.scenario.model import Scenario
from driftwell.scenario.settings import apply_settings
from driftwell.scenario.source import raw_table, shown_path
from driftwell.study.read import Study


def digests(study: Study) -> Iterator[str | None]:
    """The digest of each case in order; None where its settings do not make a scenario.

    They are those of ``read_scenario(study.scenario_path, case.settings)``, which costs several
    times as much: here the text is parsed once, and no charges are placed. So a case that has a
    digest may still have faults, which its reading will tell.
    """
    data = raw_table(study.scenario_text, shown_path(study.scenario_path))
    folder = study.scenario_path.parent
    for case in study.cases:
        table = deepcopy(data)
        _, unusable = apply_settings(table, case.settings, Scenario)
        scenario, _ = read_form(Scenario, table)
        if unusable or scenario is None:
            yield None
            continue
        try:
            yield digest(scenario, folder)
        except ScenarioError:  # a file that it names cannot be read
            yield None
