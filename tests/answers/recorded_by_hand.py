"""A record made of a few arrays, to ask questions of."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Any

import numpy as np
import pytest

from driftwell.answers.evidence import CloudFacts, Moments, Snapshot, TraceRequest
from driftwell.answers.form import QuestionForm
from driftwell.answers.table import QUESTION_KINDS
from driftwell.errors import AnswerError
from driftwell.forms.declared import kind_name
from driftwell.forms.faults import read_form
from driftwell.record.layout import dataset

MASS = 2.0e-25
CHARGE = 1.602176634e-19

LOSS = [("time", "f8"), ("id", "i8"), ("cloud", "i8")]
BIRTH = [("time", "f8"), ("id", "i8"), ("cloud", "i8")]
CROSSING = dataset("crossings").dtype()


def near(value: Any, rel: float = 1e-12) -> Any:
    """What equals `value` to the part `rel`, however small it is.

    The library's own default also takes whatever lies within 1e-12, which is every force.
    """
    return pytest.approx(value, rel=rel, abs=0.0)


def facts(name: str = "load", count: int = 0, **changes: Any) -> CloudFacts:
    """A cloud's facts; what is not given is invented."""
    given = {
        "name": name,
        "index": 0,
        "species": "invented",
        "mass": MASS,
        "charge": CHARGE,
        "weight": 1.0,
        "first_id": 0,
        "count": count,
    }
    return CloudFacts(**(given | changes))


def table(kind: Any, rows: list[tuple[Any, ...]]) -> np.ndarray:
    """Rows as a structured array; columns beyond what they hold are zero, weights one."""
    found = np.zeros(len(rows), dtype=kind)
    for name, column in zip(found.dtype.names, zip(*rows, strict=True), strict=False):
        found[name] = column
    if "weight" in found.dtype.names:
        found["weight"] = 1.0
    return found


def through(time: np.ndarray, cloud: CloudFacts, detector: int = 0, **columns: Any) -> np.ndarray:
    """The first charges of a cloud pass a detector along its normal at these times, (n,) s.

    columns : of the table of crossings, such as velocity (n, 3)
    """
    found = np.zeros(len(time), dtype=CROSSING)
    found["time"], found["id"] = time, cloud.first_id + np.arange(len(time))
    found["cloud"], found["detector"] = cloud.index, detector
    found["direction"], found["weight"] = 1, cloud.weight
    for name, values in columns.items():
        found[name] = values
    return found


@dataclass
class Recorded:
    """What a run recorded, filled by hand. `end_time` in s."""

    clouds: dict[str, CloudFacts] = field(default_factory=dict)
    detectors: list[str] = field(default_factory=list)
    softening: float = 0.0
    force_error: float = 0.0
    field_error: float = 0.0
    end_time: float = 1e-3
    shots: dict[float, Snapshot] = field(default_factory=dict)
    series: dict[str, Moments] = field(default_factory=dict)
    lost: np.ndarray = field(default_factory=lambda: table(LOSS, []))
    crossed: np.ndarray = field(default_factory=lambda: table(CROSSING, []))
    borne: np.ndarray = field(default_factory=lambda: table(BIRTH, []))
    traced: dict[TraceRequest, tuple[np.ndarray, np.ndarray]] = field(default_factory=dict)

    def coulomb_error(self, until: float) -> float:
        return self.force_error

    def snapshot(self, time: float) -> Snapshot:
        for known, shot in self.shots.items():
            if abs(known - time) <= 1e-9 * self.end_time:
                return shot
        raise AnswerError(f"no snapshot at {time}")

    def moments(self, cloud: str) -> Moments:
        return self.series[cloud]

    def losses(self) -> np.ndarray:
        return self.lost

    def crossings(self) -> np.ndarray:
        return self.crossed

    def births(self) -> np.ndarray:
        return self.borne

    def born(self, cloud: str, until: float = np.inf) -> int:
        facts = self.clouds[cloud]
        if not facts.emitted:
            return facts.count
        return int(np.sum((self.borne["cloud"] == facts.index) & (self.borne["time"] <= until)))

    def trace(self, request: TraceRequest) -> tuple[np.ndarray, np.ndarray]:
        return self.traced[request]

    def at(
        self, time: float, *present: tuple[CloudFacts, np.ndarray, np.ndarray, np.ndarray]
    ) -> Recorded:
        """Add a snapshot: for each cloud its facts, numbers, positions and velocities (n, 3)."""
        for cloud, *_ in present:
            self.clouds[cloud.name] = cloud
        ids = [cloud.first_id + number for cloud, number, _, _ in present]
        each = [(cloud, len(number)) for cloud, number, _, _ in present]

        def spread(name: str) -> np.ndarray:
            return np.concatenate([np.full(n, getattr(cloud, name)) for cloud, n in each])

        self.shots[time] = Snapshot(
            time,
            np.concatenate(ids),
            spread("index"),
            np.concatenate([place for _, _, place, _ in present]).reshape(-1, 3),
            np.concatenate([velocity for _, _, _, velocity in present]).reshape(-1, 3),
            spread("charge"),
            spread("mass"),
            spread("weight"),
        )
        return self


def one_cloud(position: np.ndarray, velocity: np.ndarray | None = None, **changes: Any) -> Recorded:
    """A record whose end holds one whole cloud "load" at positions and velocities (n, 3)."""
    count = len(position)
    cloud = facts(count=count, **changes)
    velocity = np.zeros((count, 3)) if velocity is None else velocity
    recorded = Recorded()
    return recorded.at(recorded.end_time, (cloud, np.arange(count), position, velocity))


def passing(times: np.ndarray, count: int | None = None, **changes: Any) -> Recorded:
    """A record in which the first charges of "load" pass the detector "exit" at `times`, s."""
    cloud = facts(count=len(times) if count is None else count, **changes)
    rows = [(time, cloud.first_id + i, cloud.index, 0, 1) for i, time in enumerate(times)]
    return Recorded({"load": cloud}, ["exit"], end_time=1.0, crossed=table(CROSSING, rows))


def in_time(time: np.ndarray, rows: list[Any], **changes: Any) -> Recorded:
    """A record of moments of "load" at times (k,), from :class:`MomentsRow` values."""
    series = Moments(
        time,
        np.array([row.count for row in rows]),
        np.array([row.centre for row in rows]),
        np.array([row.covariance for row in rows]),
        np.array([row.kinetic_energy for row in rows]),
        np.array([row.kinetic_variance for row in rows]),
    )
    cloud = facts(count=int(series.count.max()), **changes)
    return Recorded({"load": cloud}, end_time=float(time[-1]), series={"load": series})


def asked(ask: str, **keys: Any) -> QuestionForm:
    """The question a scenario would ask with these keys; of "load" where nothing else is said."""
    form = next(kind for kind in QUESTION_KINDS if kind_name(kind, "ask") == ask)
    question, faults = read_form(form, {"name": "asked", "ask": ask, "of": "load"} | keys)
    assert question is not None, faults
    return question


ONE_OF_EACH: tuple[dict[str, Any], ...] = (
    {"ask": "fraction-left"},
    {"ask": "fraction-through", "of": "exit", "cloud": "load"},
    {"ask": "centre", "axis": "x"},
    {"ask": "rms-size", "axis": "y"},
    {"ask": "temperature", "axis": "z"},
    {"ask": "kinetic-energy"},
    {"ask": "kinetic-energy-spread"},
    {"ask": "emittance", "plane": "x", "normalised": True},
    {"ask": "arrival-time", "of": "exit", "statistic": "rms"},
    {"ask": "frequency", "axis": "z"},
    {"ask": "peak-density"},
    {"ask": "nearest-neighbour"},
    {"ask": "force", "charge": 0},
    {"ask": "transmission", "of": "exit", "entrance": "slit"},
    {"ask": "lifetime"},
    {"ask": "heating-rate", "over": ["0 s", "1 ms"]},
    {"ask": "beam-envelope", "thickness": "0.2 mm"},
    {"ask": "envelope-tune", "axis": "x", "period": "1 us"},
    {"ask": "arrival-energy", "of": "exit"},
    {"ask": "spot-size", "of": "exit"},
    {"ask": "current", "of": "exit", "over": ["0 s", "1 ms"]},
    {"ask": "perveance", "of": "exit", "over": ["0 s", "1 ms"]},
    {"ask": "generalised-perveance", "of": "exit", "over": ["0 s", "1 ms"]},
    {"ask": "brightness", "of": "exit", "over": ["0 s", "1 ms"]},
    {"ask": "mass-resolving-power", "of": "exit"},
    {"ask": "spectrum-peak", "axis": "z"},
    {"ask": "frequency-shift", "axis": "z", "reference": "49.9 kHz"},
    {"ask": "line-resolving-power", "axis": "z"},
    {"ask": "tune", "axis": "z", "period": "1 us", "charges": 2},
    {"ask": "tune-depression", "axis": "z", "without": "60 kHz", "charges": 2},
    {"ask": "rotation-frequency"},
    {"ask": "mobility", "field": "100 V/m", "over": ["0 s", "1 ms"]},
    {"ask": "plasma-frequency"},
    {"ask": "debye-length"},
    {"ask": "coupling-parameter"},
)
"""One question of every kind, for :func:`asked`."""
