"""The thin wire over its ground: an integral equation solved once, seen from the feed point and the traps.

A wire is two equal straight sides from the feed point, level or sloping down. Its currents are triangles on
a mesh that is fine at the feed point, the trap and the end. Currents that are even about the feed point carry
the feed, odd ones what unequal traps do; both need only how a side acts on itself and on the other side.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from .conductors import internal_impedance
from .ground import (
    C0,
    EPS0,
    ETA0,
    MU0,
    Ground,
    GroundKind,
    barycentric,
    fresnel,
    gauss_legendre,
    reflected_kernels,
)
from .ports import Ports

GAP = 0.05
"""Length of the mesh elements at the feed point, the trap and the end. [m]"""
COARSE, GROWTH = 30.0, 0.6
"""Longest coarse element as a share of the wavelength (1/COARSE); how fast elements grow from the gap."""


@dataclass(frozen=True, kw_only=True)
class Wire:
    """A wire dipole with or without a trap in each side, lengths along one side. SI units.

    `end` is None without traps: then `inner` reaches from the feed point to the end. `slope` is the angle of
    each side below the horizontal [rad]; `elastance` is what a coating takes off the wire's own potential
    [m/F].
    """

    inner: float
    end: float | None
    height: float
    slope: float
    radius: float
    resistivity: float
    ground: Ground
    body: float = 0.0
    elastance: float = 0.0

    @property
    def side(self) -> float:
        """Length of one side, in m."""
        return self.inner + (self.end or 0.0)

    @property
    def end_height(self) -> float:
        """Height of the wire's ends, in m."""
        return self.height - self.side * math.sin(self.slope)


@dataclass(frozen=True)
class Plan:
    """How many elements a mesh has in each wire of a side, so that it does not jump as lengths are sought."""

    inner: int
    end: int


def plan(wire: Wire, frequency: float) -> Plan:
    """Return the coarse mesh for a wire at a frequency.

    Parameters
    ----------
    wire : Wire
        The wire. [-]
    frequency : float
        Highest frequency of interest. [Hz], > 0

    Returns
    -------
    Plan
        Element counts. [1]

    Raises
    ------
    ValueError
        If the frequency is not above 0.

    Source
    ------
    Derived here: elements grow from `GAP` to a share of the wavelength, as convergence asks.
    """
    if not frequency > 0:
        raise ValueError("frequency: must be > 0")
    longest = C0 / frequency / COARSE
    return Plan(*(_count(length, longest) for length in (wire.inner, wire.end or 0.0)))


def _count(length: float, longest: float) -> int:
    """Count the elements that lie between the two gap elements of one wire."""
    if length <= 0:
        return 0
    return max(2, round(_cumulative(length / 2 - GAP, longest) * 2))


def _cumulative(x: float, longest: float) -> float:
    """Return the number of elements from the gap element to a distance x from it."""
    grown = max((longest - GAP) / GROWTH, 0.0)
    if x <= grown:
        return math.log1p(GROWTH * max(x, 0.0) / GAP) / GROWTH
    return math.log1p(GROWTH * grown / GAP) / GROWTH + (x - grown) / max(longest, GAP)


def _stretch(length: float, count: int, longest: float) -> np.ndarray:
    """Return the nodes of one wire: a gap element, `count` graded ones, a gap element."""
    gap = min(GAP, length / 4)
    half = length / 2 - gap
    full = _cumulative(half, longest)
    grown = max((longest - GAP) / GROWTH, 0.0)
    knee = _cumulative(grown, longest)
    n = np.linspace(0.0, 2 * full, count + 1)
    m = np.minimum(n, 2 * full - n)
    rising = GAP * np.expm1(GROWTH * np.minimum(m, knee)) / GROWTH + np.maximum(m - knee, 0) * max(
        longest, GAP
    )
    inside = gap + np.where(n <= full, rising, 2 * half - rising)
    return np.concatenate([[0.0], inside, [length]])


def _nodes(wire: Wire, counts: Plan, longest: float) -> np.ndarray:
    """Return the mesh nodes along one side, from the feed point to the end."""
    nodes = _stretch(wire.inner, counts.inner, longest)
    if wire.end is None:
        return nodes
    return np.concatenate([nodes, wire.inner + _stretch(wire.end, counts.end, longest)[1:]])


def solve_ports(
    wire: Wire,
    frequency: np.ndarray,
    counts: Plan,
    mesh_frequency: float,
    *,
    extrapolate: bool = True,
    odd: bool = True,
    power: bool = True,
) -> Ports:
    """Return the port matrices of a wire: feed point, and the trap gap of each side.

    The error of the coarse mesh falls with the square of the element: a mesh of twice the elements and the
    difference between both give the value that is returned, unless `extrapolate` is off.

    Parameters
    ----------
    wire : Wire
        The wire. [-]
    frequency : array (f,)
        Frequency. [Hz], > 0
    counts : Plan
        Coarse mesh, from `plan`. [1]
    mesh_frequency : float
        Frequency the mesh was planned for. [Hz], > 0
    extrapolate : bool
        Solve the finer mesh too. [-]
    odd : bool
        Solve the odd half too; without it the traps are taken to be equal. [-]
    power : bool
        Return the loss and sky matrices too. [-]

    Returns
    -------
    Ports
        Matrices (f, p, p), p = 3 with traps and 1 without. [ohm]

    Raises
    ------
    ValueError
        If a frequency is not above 0, or an end of the wire is not above the ground.

    Source
    ------
    Derived here: mixed-potential integral equation of a thin wire (`harrington-1968`), Galerkin, triangles.
    """
    frequency = np.atleast_1d(np.asarray(frequency, float))
    if not (np.all(frequency > 0) and mesh_frequency > 0):
        raise ValueError("frequency: must be > 0")
    if wire.ground.kind is not GroundKind.SPACE and not wire.end_height > 0:
        raise ValueError("wire: its ends must be above the ground")
    longest = C0 / mesh_frequency / COARSE
    samples = _Samples(wire, frequency)
    coarse = _solve(wire, frequency, _nodes(wire, counts, longest), samples, odd, power)
    if not extrapolate:
        return coarse
    finer = Plan(2 * counts.inner, 2 * counts.end)
    fine = _solve(wire, frequency, _nodes(wire, finer, longest), samples, odd, power)
    return fine.extrapolated(coarse)


class _Samples:
    """Smooth kernels on a few points of each side: the ground's, and the direct wave's imaginary part.

    They do not depend on the mesh. `vector` and `charge` hold one array (f, q, q) for a side with itself and
    one for it with the other side.
    """

    def __init__(self, wire: Wire, frequency: np.ndarray) -> None:
        # Enough points for the phase along a side, and for a kernel as narrow as a low level side is high; a side
        # that is low at its end only needs few, for they crowd there.
        longest = 2 * np.pi / C0 * float(frequency.max()) * wire.side
        width = 2 * wire.end_height + 0.4 * (wire.height - wire.end_height)
        narrow = 2.2 * wire.side / width if wire.ground.kind is not GroundKind.SPACE else 0.0
        count = math.ceil(max(12, 8 + 1.2 * longest, 6 + narrow))
        angle = np.pi * (np.arange(count) + 0.5) / count
        self.points = wire.side * (1 + np.cos(angle)) / 2
        self._weights = np.sin(angle)
        c, s = math.cos(wire.slope), math.sin(wire.slope)
        i, j = np.triu_indices(count)
        a, b = self.points[i], self.points[j]
        separation = np.concatenate([abs(a - b), np.sqrt(a * a + b * b + 2 * a * b * (c * c - s * s))])
        k = 2 * np.pi / C0 * frequency[:, None]
        direct = -1j * k * np.sinc(k * separation / np.pi)
        parallel = np.repeat([1.0, s * s - c * c], i.size)
        vector, charge = direct * parallel, direct
        if wire.ground.kind is not GroundKind.SPACE:
            distance = c * np.concatenate([abs(a - b), a + b])
            heights = np.tile(2 * wire.height - s * (a + b), 2)
            seen = reflected_kernels(frequency, distance, heights, wire.ground)
            level = np.repeat([c * c, -c * c], i.size)
            across = np.repeat([0.0, 2 * s * c], i.size)
            vector = vector + level * seen.along + s * s * seen.upright + across * seen.cross
            charge = charge + seen.charge
        self.vector = self._square(vector, i, j, count)
        self.charge = self._square(charge, i, j, count)

    @staticmethod
    def _square(
        values: np.ndarray, i: np.ndarray, j: np.ndarray, count: int
    ) -> tuple[np.ndarray, np.ndarray]:
        """Unpack the triangle of pairs into full symmetric arrays, same side and other side."""
        halves = []
        for half in np.split(values, 2, axis=1):
            full = np.empty((values.shape[0], count, count), complex)
            full[:, i, j] = full[:, j, i] = half
            halves.append(full)
        return halves[0], halves[1]

    def interpolate(self, position: np.ndarray) -> np.ndarray:
        """Return the values (positions, q) of each sample point's polynomial at positions along a side."""
        return barycentric(self.points, self._weights, position)


def _antiderivatives(x: np.ndarray, radius: float) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Return the second, third and fourth antiderivative of 1/sqrt(x^2 + radius^2)."""
    a2 = radius * radius
    r = np.sqrt(x * x + a2)
    g1 = np.arcsinh(x / radius)
    g2 = x * g1 - r
    g3 = (x * x / 2 - a2 / 4) * g1 - 0.75 * x * r
    g4 = (x**3 / 6 - a2 * x / 4) * g1 - 11 / 36 * r**3 + 5 / 12 * a2 * r
    return g2, g3, g4


def _same_side_moments(nodes: np.ndarray, radius: float) -> tuple[np.ndarray, ...]:
    """Integrate 1/R over pairs of elements of one straight side, against 1, u, v and uv, each 0 to 1."""
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
    return one, u / h, v / g, uv / (h * g)


def _other_side_moments(nodes: np.ndarray, radius: float, cosine: float) -> tuple[np.ndarray, ...]:
    """Integrate 1/R over pairs of elements of both sides, which meet at the feed point at an angle.

    The inner integral is closed; the outer one is a Gauss rule, crowded towards the feed point where the two
    first elements meet.
    """
    x, w = gauss_legendre(3)
    t, wt = gauss_legendre(10)
    h = np.diff(nodes)
    s = np.concatenate([nodes[1] * t**3, (nodes[1:-1, None] + h[1:, None] * x).ravel()])
    weight = np.concatenate([nodes[1] * 3 * t**2 * wt, (h[1:, None] * w).ravel()])
    u = np.concatenate([t**3, np.tile(x, h.size - 1)])
    q = (cosine * s)[:, None]
    across = np.sqrt(s * s * (1 - cosine * cosine) + radius * radius)[:, None]
    along = nodes - q
    angle = np.diff(np.arcsinh(along / across), axis=1)
    level = np.diff(np.hypot(along, across), axis=1) - along[:, :-1] * angle
    level /= h
    outer = np.array([weight, weight * u])
    edges = np.concatenate([[0], 10 + 3 * np.arange(h.size - 1)])
    one, first = (np.add.reduceat(row[:, None] * angle, edges, axis=0) for row in outer)
    second, both = (np.add.reduceat(row[:, None] * level, edges, axis=0) for row in outer)
    return (one + one.T) / 2, (first + second.T) / 2, (second + first.T) / 2, (both + both.T) / 2


def _on_triangles(one: np.ndarray, u: np.ndarray, v: np.ndarray, uv: np.ndarray) -> np.ndarray:
    """Turn element moments into products of triangles, one for each node but the last."""
    full = np.zeros((one.shape[0] + 1, one.shape[1] + 1))
    full[:-1, :-1] += one - u - v + uv
    full[:-1, 1:] += v - uv
    full[1:, :-1] += u - uv
    full[1:, 1:] += uv
    return full[:-1, :-1]


def _on_slopes(one: np.ndarray, h: np.ndarray) -> np.ndarray:
    """Turn element moments into products of the triangles' slopes."""
    q = one / h[:, None] / h
    full = np.zeros((h.size + 1, h.size + 1))
    full[:-1, :-1] += q
    full[:-1, 1:] -= q
    full[1:, :-1] -= q
    full[1:, 1:] += q
    return full[:-1, :-1]


class _Mesh:
    """What a mesh needs once, whatever the frequency: static integrals, projections, port columns."""

    def __init__(self, wire: Wire, nodes: np.ndarray, samples: _Samples) -> None:
        self.nodes, self.count = nodes, nodes.size - 1
        h = self.h = np.diff(nodes)
        cosine = math.sin(wire.slope) ** 2 - math.cos(wire.slope) ** 2
        self.cosine = cosine
        same, other = _same_side_moments(nodes, wire.radius), _other_side_moments(nodes, wire.radius, cosine)
        self.vector = (_on_triangles(*same), cosine * _on_triangles(*other))
        self.charge = (_on_slopes(same[0], h), _on_slopes(other[0], h))
        x, w = gauss_legendre(2)
        s = (nodes[:-1, None] + h[:, None] * x).ravel()
        self.values, self.slopes = self._quadrature(x, w)
        r = np.array(
            [
                np.hypot(s[:, None] - s, wire.radius),
                np.sqrt(s[:, None] ** 2 + s**2 - 2 * cosine * np.outer(s, s)),
            ]
        )
        self.distance = r
        x, w = gauss_legendre(4)
        values, slopes = self._quadrature(x, w)
        polynomials = samples.interpolate((nodes[:-1, None] + h[:, None] * x).ravel())
        self.project, self.project_slopes = values @ polynomials, slopes @ polynomials
        self.mass, self.stiffness = self._tridiagonal(1 / 3, 1 / 6, h), self._tridiagonal(1.0, -1.0, 1 / h)
        self.trap = self._gap_column(wire) if wire.end is not None else None

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

    def _gap_column(self, wire: Wire) -> np.ndarray:
        """Return the mean of each triangle over the trap's body; at a point for a trap without length."""
        if wire.body <= 0:
            return (self.nodes[:-1] == wire.inner).astype(float)
        x, w = gauss_legendre(8)
        column = np.zeros(self.count + 1)
        for from_, to in ((wire.inner - wire.body / 2, wire.inner), (wire.inner, wire.inner + wire.body / 2)):
            s = from_ + (to - from_) * x
            e = np.clip(np.searchsorted(self.nodes, s, side="right") - 1, 0, self.count - 1)
            u = (s - self.nodes[e]) / self.h[e]
            np.add.at(column, e, w / 2 * (1 - u))
            np.add.at(column, e + 1, w / 2 * u)
        return column[:-1]


def _solve(
    wire: Wire, frequency: np.ndarray, nodes: np.ndarray, samples: _Samples, odd: bool, power: bool
) -> Ports:
    """Solve both halves on one mesh and return the port matrices."""
    mesh = _Mesh(wire, nodes, samples)
    w = 2 * np.pi * frequency[:, None, None]
    k = w / C0
    internal = internal_impedance(frequency, 2 * wire.radius, wire.resistivity)[:, None, None]
    blocks = []
    for side in (0, 1):
        r = mesh.distance[side]
        rest = (np.cos(k * r) - 1) / r
        charge = mesh.charge[side] + mesh.slopes @ rest @ mesh.slopes.T
        charge = charge + mesh.project_slopes @ samples.charge[side] @ mesh.project_slopes.T
        turn = mesh.cosine if side else 1.0
        vector = mesh.vector[side] + turn * (mesh.values @ rest @ mesh.values.T)
        vector = vector + mesh.project @ samples.vector[side] @ mesh.project.T
        blocks.append(1j * w * MU0 / (4 * np.pi) * vector + charge / (4j * np.pi * w * EPS0))
    blocks[0] += internal * mesh.mass - wire.elastance / (1j * w) * mesh.stiffness
    feed = np.eye(mesh.count)[:, :1]
    columns = feed if mesh.trap is None else np.column_stack([feed, mesh.trap])
    halves = [_half(blocks[0] - blocks[1], columns)]
    if mesh.trap is not None and odd:
        currents, impedance = _half((blocks[0] + blocks[1])[:, 1:, 1:], mesh.trap[1:, None])
        halves.append((np.pad(currents, ((0, 0), (1, 0), (0, 0))), impedance))
    matrices = [_full([2 * z for _, z in halves])]
    if power:
        adjoint = [np.conj(c.transpose(0, 2, 1)) for c, _ in halves]
        matrices.append(
            _full(
                [2 * internal.real * (a @ mesh.mass @ c) for a, (c, _) in zip(adjoint, halves, strict=True)]
            )
        )
        matrices.append(
            _full(
                [
                    _sky(wire, frequency, samples.points, mesh.project.T @ c, even)
                    for (c, _), even in zip(halves, (True, False), strict=False)
                ]
            )
        )
    return Ports(frequency, *matrices)


def _half(matrix: np.ndarray, columns: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Return the currents (f, n, p) for one ampere into each port, and the open-circuit matrix (f, p, p)."""
    currents = np.linalg.solve(matrix, columns.astype(complex)[None])
    impedance = np.linalg.inv(columns.T @ currents)
    return currents @ impedance, impedance


def _full(halves: list[np.ndarray]) -> np.ndarray:
    """Bring even and odd quadratic forms to the ports: feed point, trap of one side, trap of the other.

    Without the odd form the traps are taken to be equal, and any odd form does: the even one is used.
    """
    if halves[0].shape[-1] == 1:
        return halves[0]
    even = np.array([[1, 0, 0], [0, 0.5, 0.5]])
    odd = np.array([[0, 0.5, -0.5]])
    return even.T @ halves[0] @ even + odd.T @ (halves[1] if len(halves) > 1 else halves[0][:, 1:, 1:]) @ odd


def _sky(
    wire: Wire, frequency: np.ndarray, points: np.ndarray, moments: np.ndarray, even: bool
) -> np.ndarray:
    """Return the power sent to the sky as a quadratic form (f, p, p) in the port currents.

    Current moments (f, q, p) sit at sample points of one side; the other side follows by symmetry, and so do
    all but a quarter of the directions.
    """
    space = wire.ground.kind is GroundKind.SPACE
    up, weight_up = gauss_legendre(24)
    if space:
        up, weight_up = 2 * up - 1, 2 * weight_up
    turn, weight_turn = gauss_legendre(8)
    turn, weight_turn = turn * np.pi / 2, weight_turn * 2 * np.pi
    cosine, phi = (a.ravel() for a in np.meshgrid(up, turn, indexing="ij"))
    weight = np.outer(weight_up, weight_turn).ravel()
    sine = np.sqrt(1 - cosine**2)
    c, s = math.cos(wire.slope), math.sin(wire.slope)
    height = wire.height - s * points
    result = []
    for f, moment in zip(frequency, moments, strict=True):
        k = 2 * np.pi * f / C0
        sideways = k * np.outer(sine * np.cos(phi), c * points)
        level, upright = 2 * np.cos(sideways), 2j * np.sin(sideways)
        if not even:
            level, upright = upright, level
        direct = np.exp(1j * k * np.outer(cosine, height))
        horizontal = vertical = np.zeros(1)
        if wire.ground.kind is GroundKind.MIRROR:
            horizontal, vertical = -np.ones(1), np.ones(1)
        elif not space:
            horizontal, vertical = fresnel(cosine, wire.ground.index_squared(np.float64(f)))
        image = np.conj(direct)
        across = (c * np.sin(phi))[:, None] * level * (direct + horizontal[:, None] * image)
        along = (c * np.cos(phi) * cosine)[:, None] * level * (direct - vertical[:, None] * image)
        along = along + (s * sine)[:, None] * upright * (direct + vertical[:, None] * image)
        field = np.stack([across, along]) @ moment
        power = np.einsum("cdp,d,cdq->pq", np.conj(field), weight, field, optimize=True)
        result.append(k * k * ETA0 / (16 * np.pi**2) * power)
    return np.array(result)
