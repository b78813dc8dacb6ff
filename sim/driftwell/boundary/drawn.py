"""Electrodes drawn in a plane: their unit solutions, by charge on their outlines.

The potential of a surface charge on all electrodes is prescribed at the Gauss-Legendre nodes of
every element (collocation). Between the nodes and towards the ends of elements it is then compared
with the voltage; by the maximum principle the potential is nowhere more wrong than on the surface.
Elements are halved until it is nowhere wrong by more than asked. Only within 2e-8 of the size from
a tip or an edge is it let be: an error there fades at least like the root of the distance.

About z the potential vanishes far away. In a plane the potential of a charge grows like the
logarithm of the distance, so that all charges together vanish,

    phi(x) = sum over lines of -tau ln|x - x'| / (2 pi) + c,    sum of tau = 0              (1)

and the constant c, the potential far away, belongs to the solution: with one electrode at 1 V and
the others at 0 V it lies between. Inside an electrode around all others nothing of this is felt.

References
----------
Maximum principle: O. D. Kellogg, Foundations of Potential Theory (1929), ch. VIII.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.linalg import lu_factor, lu_solve
from scipy.spatial import cKDTree

from driftwell.boundary.drawn_elements import ORDER, Elements, elements_on
from driftwell.boundary.drawn_rows import sums_at, weights_at
from driftwell.boundary.drawn_surface import charged_surface, evenness, size_of
from driftwell.boundary.solution import Panels
from driftwell.constants import ELECTRIC_CONSTANT
from driftwell.errors import DriftwellError
from driftwell.geometry.outline import Outline

Floats = NDArray[np.float64]

MOST_NODES = 7000
"""Beyond this the matrix takes more than 0.4 gigabytes."""
BEST_ACCURACY = 1e-10
_PATIENCE, _NEARLY = 3, 10.0
"""Rounds that must halve the error, else one of this many times what was asked for is let be."""
_BLOCKS = 128
_SMALLEST = 2e-8
"""Length, in the electrodes' size, below which an element is not halved."""
_FADED = 1e-3
"""What is left of an error on such an element at a hundredth of the size from it, at most."""
_REACH = 2.5
"""Longest element, in distances from the nearest other electrode."""
_T, _W = np.polynomial.legendre.leggauss(ORDER)
_BETWEEN = np.concatenate([[-1.0], 0.5 * (_T[1:] + _T[:-1]), [1.0]])
_BETWEEN[[0, -1]] = 0.5 * (_T[[0, -1]] + [-1.0, 1.0])


@dataclass(frozen=True, slots=True)
class Quadrature:
    """Rules good enough for an accuracy; see drawn_rows.py."""

    ellipse: float
    floor: float
    rule: Floats
    transform: Floats


def quadrature(accuracy: float) -> Quadrature:
    """Rules whose errors lie an order of magnitude below `accuracy`."""
    error = 0.1 * accuracy
    axes = error ** (-1.0 / (2 * ORDER - 2))
    count = math.ceil(math.log(10.0 / error) / (2.0 * math.log(3.0))) + 2
    legendre = np.polynomial.legendre.legvander(_T, ORDER - 1).T
    return Quadrature(
        axes + 1.0 / axes,
        0.01 * error,
        np.array(np.polynomial.legendre.leggauss(count)),
        (np.arange(ORDER)[:, None] + 0.5) * legendre * _W,
    )


@dataclass(frozen=True, slots=True)
class DrawnSolution:
    """Unit solutions of e electrodes drawn in (r, z) or (x, y); a Solution.

    axisymmetric : whether about z
    size : m, the length that elements are in units of
    elements : with ORDER nodes each
    density : (e, n) float64, sigma ds/du / eps0 at the nodes, of each unit solution
    constants : (e,) float64, c of equation (1); 0 about z
    accuracy : what was asked for
    capacitance, error, mirrors : as of Solution
    """

    axisymmetric: bool
    size: float
    elements: Elements
    density: Floats
    constants: Floats
    accuracy: float
    capacitance: Floats
    error: float
    mirrors: tuple[bool, ...]

    @property
    def panels(self) -> Panels:
        """One for each node, in their order along the outlines of each electrode."""
        points, rate = self.elements.places(_T)
        width = 0.5 * (self.elements.spans[:, 4:5] - self.elements.spans[:, 3:4])
        around = 2.0 * math.pi * points[..., 0] * self.size if self.axisymmetric else 1.0
        electrode = np.repeat(self.elements.electrode, ORDER)
        chain = np.repeat(self.elements.chain[:, 0], ORDER)
        order = np.lexsort((self.elements.along(_T).ravel(), chain, electrode))
        density = self.density * (width / rate).ravel() * (ELECTRIC_CONSTANT / self.size)
        return Panels(
            points.reshape(-1, 2)[order] * self.size,
            (rate * _W * around).ravel()[order] * self.size,
            electrode[order],
            density[:, order],
        )

    def potential(self, points: Floats) -> Floats:
        """Potentials (e, n), V per V, at points (n, 2), m."""
        return np.asarray(self._sums(points, False)[:, :, 0] + self.constants[:, None])

    def field(self, points: Floats) -> Floats:
        """Fields -grad phi (e, n, 2), 1/m, at points (n, 2), m.

        On a surface: the mean of both sides.
        """
        return self._sums(points, True) / self.size

    def _sums(self, points: Floats, with_field: bool) -> Floats:
        scaled = np.ascontiguousarray(points, dtype=np.float64) / self.size
        mirrored = self.axisymmetric & (scaled[:, 0] < 0.0)
        if self.axisymmetric:
            scaled[:, 0] = np.abs(scaled[:, 0])
        rules = quadrature(max(self.accuracy, BEST_ACCURACY))
        blocks = max(1, min(_BLOCKS, len(scaled)))
        count = len(self.elements) * ORDER
        out = np.empty((len(self.density), len(scaled), 2 if with_field else 1))
        sums_at(
            scaled,
            with_field,
            self.axisymmetric,
            rules.ellipse,
            rules.floor,
            self.elements.spans,
            self.elements.chain,
            self.elements.arcs,
            _nodes(self.elements, self.axisymmetric),
            rules.rule,
            rules.transform,
            self.density,
            np.empty((blocks, 2, ORDER)),
            np.empty((blocks, 2, count)),
            out,
        )
        if with_field:
            out[:, mirrored, 0] *= -1.0
        return out

    def arrays(self) -> dict[str, NDArray[np.generic]]:
        """All of it by name, to be kept."""
        return {
            "arcs": self.elements.arcs,
            "spans": self.elements.spans,
            "chain": self.elements.chain,
            "electrode": self.elements.electrode,
            "density": self.density,
            "constants": self.constants,
            "capacitance": self.capacitance,
            "numbers": np.array([self.size, self.accuracy, self.error]),
            "flags": np.array([self.axisymmetric, *self.mirrors]),
        }

    @classmethod
    def from_arrays(cls, arrays: dict[str, NDArray[np.generic]]) -> DrawnSolution:
        """The solution that gave these arrays."""

        def floats(name: str) -> Floats:
            return np.ascontiguousarray(arrays[name], dtype=np.float64)

        def whole(name: str) -> NDArray[np.int64]:
            return np.ascontiguousarray(arrays[name], dtype=np.int64)

        size, accuracy, error = floats("numbers").tolist()
        axisymmetric, first, second = (bool(flag) for flag in whole("flags"))
        return cls(
            axisymmetric,
            size,
            Elements(floats("arcs"), floats("spans"), whole("chain"), whole("electrode")),
            floats("density"),
            floats("constants"),
            accuracy,
            floats("capacitance"),
            error,
            (first, second),
        )


def _nodes(elements: Elements, rings: bool) -> Floats:
    """x, y and weight of all nodes, (3, n)."""
    points, _ = elements.places(_T)
    weight = _W * 0.5 * (elements.spans[:, 4:5] - elements.spans[:, 3:4])
    if rings:
        weight = weight * points[..., 0]
    return np.stack([points[..., 0].ravel(), points[..., 1].ravel(), weight.ravel()])


def _weights(
    points: Floats, elements: Elements, nodes: Floats, rings: bool, rules: Quadrature
) -> Floats:
    """Weights (n, k p) of all nodes' values in the potential at points (n, 2)."""
    out = np.empty((len(points), 1, nodes.shape[1]))
    weights_at(
        np.ascontiguousarray(points),
        rings,
        rules.ellipse,
        rules.floor,
        elements.spans,
        elements.chain,
        elements.arcs,
        nodes,
        rules.rule,
        rules.transform,
        np.empty((len(points), 1, ORDER)),
        out,
    )
    return out[:, 0]


@dataclass(frozen=True, slots=True)
class SolvedOn:
    """Unit solutions on given elements.

    density : (e, n) float64, constants : (e,) float64, as of DrawnSolution
    charge : (e, n) float64, at the nodes, over eps0 and (about z) 2 pi times the size
    wrong : (k,) float64, the largest error of potential seen on each element
    """

    density: Floats
    constants: Floats
    charge: Floats
    wrong: Floats


def solved_on(elements: Elements, rings: bool, count: int, rules: Quadrature) -> SolvedOn:
    """Unit solutions on given elements, and how wrong the potential is on them."""
    nodes = _nodes(elements, rings)
    size = nodes.shape[1]
    points, _ = elements.places(_T)
    voltage = (np.repeat(elements.electrode, ORDER)[:, None] == np.arange(count)) * 1.0
    matrix = _weights(points.reshape(-1, 2), elements, nodes, rings, rules)
    if not rings:
        # the constant first: eliminated last it lets rounding grow a millionfold
        matrix = np.block([[np.zeros((1, 1)), nodes[2:3]], [np.ones((size, 1)), matrix]])
        voltage = np.concatenate([np.zeros((1, count)), voltage])
    found = lu_solve(lu_factor(matrix, overwrite_a=True, check_finite=False), voltage)
    del matrix
    density = np.ascontiguousarray(found[-size:].T)
    constants = np.zeros(count) if rings else found[0]
    checked, _ = elements.places(_BETWEEN)
    potential = _weights(checked.reshape(-1, 2), elements, nodes, rings, rules) @ density.T
    expected = np.repeat(elements.electrode, len(_BETWEEN))[:, None] == np.arange(count)
    gap = np.abs(potential + constants - expected).max(axis=1)
    wrong = gap.reshape(len(elements), -1).max(axis=1)
    return SolvedOn(density, constants, density * nodes[2], wrong)


def _fit_to_gaps(elements: Elements) -> Elements:
    """Elements none of which is long against its distance from other electrodes.

    That is told from points on all of them: where one of two neighbours is long, it is halved until
    its points lie as dense as the gap is wide.
    """
    while len(elements) * ORDER < MOST_NODES:
        points, _ = elements.places(np.linspace(-1.0, 1.0, 9))
        nearest = np.full(len(elements), np.inf)
        for number in np.unique(elements.electrode):
            own = elements.electrode == number
            if own.all():
                break
            others = cKDTree(points[~own].reshape(-1, 2))
            distance = np.asarray(others.query(points[own].reshape(-1, 2))[0])
            nearest[own] = distance.reshape(-1, 9).min(axis=1)
        long = elements.lengths() > _REACH * nearest
        if not long.any():
            break
        elements = elements.halved(long)
    return elements


def solve_drawn(
    outlines: Sequence[tuple[Outline, ...]], axisymmetric: bool, accuracy: float
) -> DrawnSolution:
    """Unit solutions of electrodes of one outline or several each.

    accuracy : largest error of potentials, in parts of the voltage. Where it cannot be had, as on
        curves that are themselves made of arcs to 1e-8, `error` of the solution may be up to ten
        times as large.

    Runs on as many threads as `driftwell.kernels.threads.on_threads` allows.

    Raises
    ------
    DriftwellError
        Where electrodes touch, or the accuracy cannot be reached; the message says with how much.
    """
    accuracy = max(accuracy, BEST_ACCURACY)
    size = size_of(outlines)
    surface = charged_surface(outlines, axisymmetric, size)
    rules = quadrature(accuracy)
    elements = _fit_to_gaps(elements_on(surface, axisymmetric))
    history: list[float] = []
    while True:
        found = solved_on(elements, axisymmetric, len(outlines), rules)
        small = elements.lengths() < _SMALLEST
        wrong = np.where(small, _FADED, 1.0) * found.wrong
        worst = float(wrong.max())
        history.append(worst)
        slow = len(history) > _PATIENCE and worst > 0.5 * history[-1 - _PATIENCE]
        if worst <= accuracy or (slow and worst <= _NEARLY * accuracy):
            break
        finer = elements.halved((wrong > max(0.3 * accuracy, 0.01 * worst)) & ~small)
        if len(finer) == len(elements) or len(finer) * ORDER > MOST_NODES:
            break
        elements = finer
    if not worst <= _NEARLY * accuracy:
        raise DriftwellError(
            f"the electrodes' potential is known to {worst:.1e} of the voltage only, with "
            f"{len(elements) * ORDER} unknowns; {accuracy:.1e} was asked for. Ask for a larger "
            "`field_accuracy`, or draw simpler electrodes, without needles or gaps that are thin "
            "against their length."
        )
    owners = np.repeat(elements.electrode, ORDER)
    charges = found.charge * (2.0 * math.pi * size if axisymmetric else 1.0)
    capacitance = np.stack([charges[:, owners == k].sum(axis=1) for k in range(len(outlines))])
    return DrawnSolution(
        axisymmetric,
        size,
        elements,
        found.density,
        found.constants,
        accuracy,
        ELECTRIC_CONSTANT * capacitance,
        worst,
        evenness(surface, axisymmetric),
    )
