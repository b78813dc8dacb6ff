"""What to take of a file that holds more than one group of charges, or more than one time."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

import numpy as np

from driftwell.forms.columns import ColumnError

SAME_TIME = 1e-9
"""Part of the latest time within which a time in a file is the time asked for."""
SHOWN = 8


@dataclass(frozen=True, slots=True)
class Choice:
    """What is asked for; None of any: the only one there is.

    of : name of the group
    at : ``start``, ``end`` or a time, s
    iteration : number of the iteration
    """

    of: str | None = None
    at: Literal["start", "end"] | float | None = None
    iteration: int | None = None

    def group(self, names: Sequence[str], key: str = "of") -> str:
        """The one of these groups; raises ColumnError."""
        if self.of is not None:
            if self.of not in names:
                raise ColumnError(f': has no charges of "{self.of}"; needs {_listed(names)}')
            return self.of
        if len(names) != 1:
            raise ColumnError(
                f": holds charges of {_listed(names)}; needs `{key}` to say which"
                if names
                else ": holds no charges at that time"
            )
        return names[0]

    def moment(self, times: Sequence[float], numbers: Sequence[int] | None = None) -> int:
        """The place among `times`, s, whose iterations have these `numbers`; raises ColumnError."""
        if self.iteration is not None:
            if numbers is None:
                raise ColumnError(": has no iterations; leave out `iteration`, use `at`")
            if self.iteration not in numbers:
                raise ColumnError(
                    f": has no iteration {self.iteration}; needs {_listed([*map(str, numbers)])}"
                )
            return list(numbers).index(self.iteration)
        spelled = [f"{time:.9g} s" for time in times]
        if self.at is None:
            if len(times) != 1:
                raise ColumnError(
                    f": holds {len(times)} times, {_listed(spelled)}; needs `at` to say which: "
                    "start, end or one of them"
                )
            return 0
        if not times:
            raise ColumnError(": holds no times")
        if isinstance(self.at, str):
            return int(np.argmin(times) if self.at == "start" else np.argmax(times))
        away = np.abs(np.array(times) - self.at)
        if away.min() > SAME_TIME * max(map(abs, times)):
            raise ColumnError(f": holds nothing at {self.at:.9g} s; needs {_listed(spelled)}")
        return int(np.argmin(away))


def _listed(items: Sequence[str]) -> str:
    """A few of the items in words."""
    shown = [item[:60] for item in items]
    if len(shown) > SHOWN:
        shown = [*shown[:4], "...", *shown[-3:]]
    return ", ".join(shown) or "none"
