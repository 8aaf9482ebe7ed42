"""Sides of a wire cut into elements: what an integral equation needs of them, whatever the frequency.

A side runs from the feed point to its end in straight pieces. Its currents are triangles, one at every node
but the last; all currents and coordinates count outward from the feed point.
"""

from __future__ import annotations

import math
from copy import copy
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from .quadrature import barycentric, gauss_legendre

GAP = 0.05
"""Length of the mesh elements at the feed point, the trap and the end. [m]"""
COARSE, GROWTH = 30.0, 0.6
"""Longest coarse element as a share of the wavelength (1/COARSE); how fast elements grow from the gap."""
SAME_PLACE = 1e-3
"""A bend this near to the trap is at the trap: no element is made of the rest. [m]"""
SNAP = 0.35
"""Share of an element within which a node is moved to a bend instead of cutting the element in two."""


@dataclass(frozen=True, kw_only=True)
class Side:
    """One side of a wire.

    `vertices` are points (x, y, z) from the feed point to the end; `trap` is the distance of the trap's
    centre from the feed point along the wire, None without a trap; `body` is its length. All in m.
    """

    vertices: tuple[tuple[float, float, float], ...]
    trap: float | None = None
    body: float = 0.0

    @cached_property
    def corners(self) -> np.ndarray:
        """Distance of every vertex from the feed point along the wire, in m."""
        steps = np.linalg.norm(np.diff(np.array(self.vertices), axis=0), axis=1)
        return np.concatenate([[0.0], np.cumsum(steps)])

    @property
    def length(self) -> float:
        """Length of the side, in m."""
        return float(self.corners[-1])

    @property
    def stretches(self) -> tuple[float, ...]:
        """Lengths between feed point, trap and end, in m."""
        return (self.length,) if self.trap is None else (self.trap, self.length - self.trap)


Plan = tuple[int, ...]
"""Elements of each stretch of a side, so that a mesh does not jump as lengths are sought."""


def plan_side(side: Side, wavelength: float) -> Plan:
    """Return the coarse mesh of a side.

    Parameters
    ----------
    side : Side
        The side. [-]
    wavelength : float
        Shortest wavelength of interest. [m], > 0

    Returns
    -------
    tuple of int
        Elements of each stretch between its two gap elements. [1]

    Raises
    ------
    ValueError
        If the wavelength is not above 0.

    Source
    ------
    Derived here: elements grow from `GAP` to a share of the wavelength, as convergence asks.
    """
    if not wavelength > 0:
        raise ValueError("wavelength must be above 0")
    longest = wavelength / COARSE
    return tuple(max(2, round(2 * _cumulative(length / 2 - GAP, longest))) for length in side.stretches)


def nodes_of(side: Side, counts: Plan, wavelength: float) -> np.ndarray:
    """Return the mesh nodes along a side, with a node at the trap and at every bend.

    Parameters
    ----------
    side : Side
        The side. [-]
    counts : tuple of int
        Elements of each stretch, from `plan_side` or twice those. [1]
    wavelength : float
        Wavelength the mesh was planned for. [m], > 0

    Returns
    -------
    array (n,)
        Distances from the feed point, ascending. [m]

    Source
    ------
    Derived here: equal steps of the elements counted from both gap elements of a stretch.
    """
    nodes, begin = [np.zeros(1)], 0.0
    for length, count in zip(side.stretches, counts, strict=True):
        nodes.append(begin + _stretch(length, count, wavelength / COARSE)[1:])
        begin += length
    return _with_bends(np.concatenate(nodes), side)


def _cumulative(x: float, longest: float) -> float:
    """Return the number of elements from the gap element to a distance x from it."""
    grown = max((longest - GAP) / GROWTH, 0.0)
    if x <= grown:
        return math.log1p(GROWTH * max(x, 0.0) / GAP) / GROWTH
    return math.log1p(GROWTH * grown / GAP) / GROWTH + (x - grown) / max(longest, GAP)


def _stretch(length: float, count: int, longest: float) -> np.ndarray:
    """Return the nodes of one stretch: a gap element, `count` graded ones, a gap element."""
    gap = min(GAP, length / 4)
    half = length / 2 - gap
    full = _cumulative(half, longest)
    grown = max((longest - GAP) / GROWTH, 0.0)
    knee = _cumulative(grown, longest)
    n = np.linspace(0.0, 2 * full, count + 1)
    m = np.minimum(n, 2 * full - n)
    straight = np.maximum(m - knee, 0) * max(longest, GAP)
    rising = GAP * np.expm1(GROWTH * np.minimum(m, knee)) / GROWTH + straight
    inside = gap + np.where(n <= full, rising, 2 * half - rising)
    return np.concatenate([[0.0], inside, [length]])


def _with_bends(nodes: np.ndarray, side: Side) -> np.ndarray:
    """Put a node at every bend: the nearest one moved there, or a new one where none is near or may move."""
    nodes = nodes.copy()
    nodes[-1] = side.length
    fixed = [0.0, side.length] + ([] if side.trap is None else [side.trap])
    for bend in side.corners[1:-1]:
        i = int(np.argmin(np.abs(nodes - bend)))
        gap = abs(nodes[i] - bend)
        if gap < SAME_PLACE:
            nodes[i] = bend
            continue
        near = min(nodes[i] - nodes[i - 1] if i else math.inf, nodes[min(i + 1, nodes.size - 1)] - nodes[i])
        movable = 0 < i < nodes.size - 1 and min(abs(nodes[i] - f) for f in fixed) > SAME_PLACE
        if movable and gap < SNAP * near:
            nodes[i] = bend
        else:
            nodes = np.sort(np.append(nodes, bend))
        fixed.append(float(bend))
    return nodes


class Samples:
    """A few points of every piece of a side, at which smooth kernels are sampled; polynomials in between."""

    def __init__(self, side: Side, frequency: float, over_ground: bool, light: float) -> None:
        vertices, k = np.array(side.vertices), 2 * np.pi * frequency / light
        self.corners = side.corners
        self._local: list[tuple[np.ndarray, np.ndarray]] = []
        positions, directions = [], []
        for begin, end in zip(vertices[:-1], vertices[1:], strict=True):
            length = float(np.linalg.norm(end - begin))
            # Enough points for the phase along a piece, and for a kernel as narrow as a low level piece is
            # high; one that is low at an end only needs few, for they crowd there.
            low, high = sorted((begin[2], end[2]))
            narrow = 2.2 * length / (2 * low + 0.4 * (high - low)) if over_ground else 0.0
            count = math.ceil(
                max(
                    min(12, 4 + 6 * k * length),
                    8 + 1.2 * k * length if k * length > 2 else 0,
                    6 + narrow if narrow > 2 else 0,
                )
            )
            angle = np.pi * (np.arange(count) + 0.5) / count
            along = length * (1 + np.cos(angle)) / 2
            self._local.append((along, np.sin(angle)))
            direction = (end - begin) / length
            positions.append(begin + along[:, None] * direction)
            directions.append(np.broadcast_to(direction, (count, 3)))
        self.position, self.direction = np.concatenate(positions), np.concatenate(directions)
        self.count = self.position.shape[0]

    def polynomials(self, distance: np.ndarray, piece: np.ndarray) -> np.ndarray:
        """Return the value of each sample's polynomial at places along the side.

        Parameters
        ----------
        distance : array (n,)
            Distance from the feed point. [m]
        piece : int array (n,)
            Straight piece of each place. [1]

        Returns
        -------
        array (n, samples)
            Zero off the sample's own piece. [1]

        Source
        ------
        Definition: see `quadrature.barycentric`.
        """
        values, begin = np.zeros((distance.size, self.count)), 0
        for i, (along, weights) in enumerate(self._local):
            on = piece == i
            values[on, begin : begin + along.size] = barycentric(
                along, weights, distance[on] - self.corners[i]
            )
            begin += along.size
        return values


class SideMesh:
    """A side cut into elements, with the quadratures and projections of its triangles."""

    def __init__(self, side: Side, nodes: np.ndarray, samples: Samples) -> None:
        self.side, self.nodes = side, nodes
        h = self.h = np.diff(nodes)
        self.count = h.size
        self.piece = np.searchsorted(side.corners[1:-1], nodes[:-1] + h / 2)
        vertices = np.array(side.vertices)
        self.directions = np.diff(vertices, axis=0) / np.diff(side.corners)[:, None]
        self.starts = vertices[:-1]
        x, w = gauss_legendre(2)
        self.values, self.slopes = self._quadrature(x, w)
        self._distances = (nodes[:-1, None] + h[:, None] * x).ravel()
        self.points = self._position(self._distances, np.repeat(self.piece, 2))
        x, w = gauss_legendre(4)
        values, slopes = self._quadrature(x, w)
        s = (nodes[:-1, None] + h[:, None] * x).ravel()
        polynomials = samples.polynomials(s, np.repeat(self.piece, 4))
        self.project, self.project_slopes = values @ polynomials, slopes @ polynomials
        self.mass, self.stiffness = self._tridiagonal(1 / 3, 1 / 6, h), self._tridiagonal(1.0, -1.0, 1 / h)
        self.trap = self._trap_column() if side.trap is not None else None

    def _position(self, s: np.ndarray, piece: np.ndarray) -> np.ndarray:
        """Return points (n, 3) at distances s along the side, on given pieces."""
        return self.starts[piece] + (s - self.side.corners[piece])[:, None] * self.directions[piece]

    def mirrored(self, side: Side) -> SideMesh:
        """Return the same mesh on the mirror image of the side.

        Parameters
        ----------
        side : Side
            The mirror image. [-]

        Returns
        -------
        SideMesh
            It shares all that does not know where the side is. [-]
        """
        image = copy(self)
        vertices = np.array(side.vertices)
        image.side, image.starts = side, vertices[:-1]
        image.directions = np.diff(vertices, axis=0) / np.diff(side.corners)[:, None]
        image.points = image._position(self._distances, np.repeat(self.piece, 2))
        return image

    @property
    def slices(self) -> list[slice]:
        """Elements of each straight piece."""
        return [
            slice(int(np.searchsorted(self.piece, i)), int(np.searchsorted(self.piece, i, side="right")))
            for i in range(self.starts.shape[0])
        ]

    def _ends(self, piece: int) -> np.ndarray:
        """Return both ends (2, 3) of a straight piece."""
        return np.array(self.side.vertices[piece : piece + 2])

    def _quadrature(self, x: np.ndarray, w: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        """Return weighted triangle values and slopes at a rule's points on every element, (n, points)."""
        n, q = self.count, x.size
        values, slopes = np.zeros((n + 1, n, q)), np.zeros((n + 1, n, q))
        e = np.arange(n)
        values[e, e], values[e + 1, e] = self.h[:, None] * w * (1 - x), self.h[:, None] * w * x
        slopes[e, e], slopes[e + 1, e] = -w, w
        return values[:-1].reshape(n, -1), slopes[:-1].reshape(n, -1)

    def _tridiagonal(self, on: float, off: float, h: np.ndarray) -> np.ndarray:
        """Return sum over elements of h times the 2x2 element matrix with `on` and `off`."""
        diagonal = on * h
        diagonal[1:] = diagonal[1:] + on * h[:-1]
        return np.diag(diagonal) + np.diag(off * h[:-1], 1) + np.diag(off * h[:-1], -1)

    def _trap_column(self) -> np.ndarray:
        """Return the mean of each triangle over the trap's body; at a point for a trap without length."""
        centre, body = self.side.trap, self.side.body
        if body <= 0:
            return (np.abs(self.nodes[:-1] - centre) < SAME_PLACE).astype(float)
        x, w = gauss_legendre(8)
        column = np.zeros(self.count + 1)
        for begin in (centre - body / 2, centre):
            s = begin + body / 2 * x
            e = np.clip(np.searchsorted(self.nodes, s, side="right") - 1, 0, self.count - 1)
            u = (s - self.nodes[e]) / self.h[e]
            np.add.at(column, e, w / 2 * (1 - u))
            np.add.at(column, e + 1, w / 2 * u)
        return column[:-1]


class Pair:
    """A meshed side with itself or with another: static integrals and distances between their elements.

    Of two `mirrored` sides either direction of the integration gives the other one too.
    """

    def __init__(self, one: SideMesh, other: SideMesh, radius: float, *, mirrored: bool = False) -> None:
        self.one, self.other = one, other
        cosines = one.directions @ other.directions.T
        single = cosines.size == 1
        cosine = float(cosines[0, 0]) if single else cosines[one.piece][:, other.piece]
        self.turn = cosine if single else np.repeat(np.repeat(cosine, 2, axis=0), 2, axis=1)
        moments = _moments(one, other, radius)
        back = moments if mirrored or one is other else _moments(other, one, radius)
        moments = (moments + back[[0, 2, 1, 3]].transpose(0, 2, 1)) / 2
        self.vector = _on_triangles(*(cosine * moments))
        self.charge = _on_slopes(moments[0], one.h, other.h)
        difference = one.points[:, None] - other.points
        self.distance = np.sqrt(np.einsum("ijk,ijk->ij", difference, difference) + radius * radius)


def _moments(one: SideMesh, other: SideMesh, radius: float) -> np.ndarray:
    """Integrate 1/R over pairs of elements of two sides against 1, u, v and uv, each running from 0 to 1."""
    found = np.empty((4, one.count, other.count))
    for i, rows in enumerate(one.slices):
        for j, columns in enumerate(other.slices):
            if one is other and i == j:
                found[:, rows, columns] = _straight(one.nodes[rows.start : rows.stop + 1], radius)
            else:
                found[:, rows, columns] = _skew(one, i, rows, other, j, columns, radius)
    return found


def _antiderivatives(x: np.ndarray, radius: float) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Return the second, third and fourth antiderivative of 1/sqrt(x^2 + radius^2)."""
    a2 = radius * radius
    r = np.sqrt(x * x + a2)
    g1 = np.arcsinh(x / radius)
    g2 = x * g1 - r
    g3 = (x * x / 2 - a2 / 4) * g1 - 0.75 * x * r
    g4 = (x**3 / 6 - a2 * x / 4) * g1 - 11 / 36 * r**3 + 5 / 12 * a2 * r
    return g2, g3, g4


def _straight(nodes: np.ndarray, radius: float) -> np.ndarray:
    """Return the moments of one straight piece with itself, in closed form."""
    g2, g3, g4 = _antiderivatives(nodes[:, None] - nodes, radius)
    h = np.diff(nodes)[:, None]
    g = np.diff(nodes)[None, :]
    # x = u - v + d: the element's far end minus the other's near end, and so on.
    far, near = slice(1, None), slice(None, -1)
    fn, nn, ff, nf = (far, near), (near, near), (far, far), (near, far)
    one = g2[fn] - g2[nn] - g2[ff] + g2[nf]
    u = h * (g2[fn] - g2[ff]) - g3[fn] + g3[nn] + g3[ff] - g3[nf]
    v = -g * (g2[ff] - g2[nf]) + g3[fn] - g3[nn] - g3[ff] + g3[nf]
    uv = -g * (h * g2[ff] - g3[ff] + g3[nf]) + h * (g3[fn] - g3[ff]) - g4[fn] + g4[nn] + g4[ff] - g4[nf]
    return np.array([one, u / h, v / g, uv / (h * g)])


def _skew(
    one: SideMesh, i: int, rows: slice, other: SideMesh, j: int, columns: slice, radius: float
) -> np.ndarray:
    """Return the moments of two different straight pieces.

    The inner integral is closed; the outer one is a Gauss rule, crowded towards a corner that both share.
    """
    x, w = gauss_legendre(3)
    t, wt = gauss_legendre(10)
    count = rows.stop - rows.start
    rules, sizes = [(x, w)] * count, [3] * count
    begins, ends = one._ends(i), other._ends(j)
    for e, corner in ((0, begins[0]), (count - 1, begins[1])):
        if np.linalg.norm(ends - corner, axis=1).min() < 1e-9:
            rules[e] = (t**3, 3 * t**2 * wt) if e == 0 else (1 - t**3, 3 * t**2 * wt)
            sizes[e] = t.size
    edges = np.concatenate([[0], np.cumsum(sizes)[:-1]])
    h = np.repeat(one.h[rows], sizes)
    u, weight = np.concatenate([r[0] for r in rules]), h * np.concatenate([r[1] for r in rules])
    local = np.repeat(one.nodes[rows], sizes) + h * u - one.side.corners[i]
    away = one.starts[i] - other.starts[j] + local[:, None] * one.directions[i]
    q = away @ other.directions[j]
    across = np.sqrt(np.maximum(np.einsum("ij,ij->i", away, away) - q * q, 0) + radius * radius)[:, None]
    along = other.nodes[columns.start : columns.stop + 1] - other.side.corners[j] - q[:, None]
    angle = np.diff(np.arcsinh(along / across), axis=1)
    level = np.diff(np.hypot(along, across), axis=1) - along[:, :-1] * angle
    level /= other.h[columns]
    outer = weight[:, None] * np.stack([angle, u[:, None] * angle, level, u[:, None] * level])
    return np.add.reduceat(outer, edges, axis=1)


def _on_triangles(one: np.ndarray, u: np.ndarray, v: np.ndarray, uv: np.ndarray) -> np.ndarray:
    """Turn element moments into products of triangles, one for each node but the last."""
    full = np.zeros((one.shape[0] + 1, one.shape[1] + 1))
    full[:-1, :-1] += one - u - v + uv
    full[:-1, 1:] += v - uv
    full[1:, :-1] += u - uv
    full[1:, 1:] += uv
    return full[:-1, :-1]


def _on_slopes(one: np.ndarray, h: np.ndarray, g: np.ndarray) -> np.ndarray:
    """Turn element moments into products of the triangles' slopes."""
    q = one / h[:, None] / g
    full = np.zeros((h.size + 1, g.size + 1))
    full[:-1, :-1] += q
    full[:-1, 1:] -= q
    full[1:, :-1] -= q
    full[1:, 1:] += q
    return full[:-1, :-1]
