"""The keys that say which charges of a file are meant."""

from __future__ import annotations

from typing import Self

from driftwell.forms.choice import Choice
from driftwell.forms.form import Form, checked, key, or_word, refuse
from driftwell.forms.quantities import Count, Name, Time


class ChoiceForm(Form):
    """Base of forms that name a file of charges."""

    of: Name | None = key(
        "cloud (column `cloud`) or openPMD species whose charges are taken, where the file holds "
        "several",
        default=None,
        example="load",
    )
    at: or_word(("start", "end"), Time) | None = key(  # type: ignore[valid-type]
        "time at which they are taken, where the file holds several: start, end, or one of its "
        "times",
        default=None,
        example="end",
    )
    iteration: Count | None = key(
        "openPMD iteration that is taken; in the place of `at`", default=None, example=500
    )

    @checked
    def _one_time(self) -> Self:
        if self.at is not None and self.iteration is not None:
            raise refuse("needs either `at` or `iteration`, not both")
        return self

    def choice(self) -> Choice:
        """What is asked for."""
        return Choice(self.of, self.at, self.iteration)
