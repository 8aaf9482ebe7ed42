"""The thin wire over its ground: an integral equation solved once, seen from the feed point and the traps.

Currents that are even about the feed point carry the feed, odd ones what unequal traps do: a wire of two
equal sides needs only how a side acts on itself and on its mirror image. Any other wire is solved whole, from
the same kernels.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from .conductors import internal_impedance
from .constants import C0, EPS0, MU0
from .ground import Ground, reflected_kernels
from .mesh import Pair, Plan, Samples, Side, SideMesh, nodes_of, plan_side
from .ports import Ports
from .sky import Sky
from .soils import GroundKind


@dataclass(frozen=True, kw_only=True)
class Wire:
    """A wire dipole of two equal sides, with or without a trap in each, lengths along one side. SI units.

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

    def sides(self) -> tuple[Side, Side]:
        """Return both sides.

        Returns
        -------
        tuple of Side
            Along +y and along -y. [m]
        """
        y, z = self.side * math.cos(self.slope), self.end_height
        trap = None if self.end is None else self.inner
        one, other = (
            Side(vertices=((0.0, 0.0, self.height), (0.0, sign * y, z)), trap=trap, body=self.body)
            for sign in (1, -1)
        )
        return one, other


@dataclass(frozen=True, kw_only=True)
class BentWire:
    """A wire dipole of any two sides that start at one feed point; the rest as of `Wire`."""

    sides: tuple[Side, Side]
    radius: float
    resistivity: float
    ground: Ground
    elastance: float = 0.0


def plan(wire: Wire, frequency: float) -> Plan:
    """Return the coarse mesh for each side of a wire at a frequency.

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
    Derived here, see `mesh.plan_side`.
    """
    if not frequency > 0:
        raise ValueError("frequency must be above 0")
    return plan_side(wire.sides()[0], C0 / frequency)


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
        Matrices (f, p, p), p = 3 with traps and 1 without; the first trap is that of the +y side. [ohm]

    Raises
    ------
    ValueError
        If a frequency is not above 0, or an end of the wire is not above the ground.

    Source
    ------
    Derived here: mixed-potential integral equation of a thin wire (`harrington-1968`), Galerkin, triangles.
    """
    frequency = _checked(frequency, wire.ground, wire.end_height)
    sides = wire.sides()
    samples = [Samples(side, float(frequency.max()), _reflects(wire), C0) for side in sides]
    kernels = _sampled(wire.ground, frequency, samples, mirrored=True)
    sky = Sky(wire.ground, frequency, samples, mirrored=True) if power else None
    internal = internal_impedance(frequency, 2 * wire.radius, wire.resistivity)[:, None, None]

    def on(counts: Plan) -> Ports:
        nodes = nodes_of(sides[0], counts, C0 / mesh_frequency)
        mesh = SideMesh(sides[0], nodes, samples[0])
        meshes = [mesh, mesh.mirrored(sides[1])]
        return _solve_halves(wire, frequency, meshes, kernels, internal, sky, odd=odd)

    coarse = on(counts)
    return on(tuple(2 * n for n in counts)).extrapolated(coarse) if extrapolate else coarse


def solve_whole(
    wire: BentWire,
    frequency: np.ndarray,
    counts: tuple[Plan, Plan],
    mesh_frequency: float,
    *,
    extrapolate: bool = True,
    power: bool = True,
) -> Ports:
    """Return the port matrices of any wire: feed point, trap of the first side, trap of the second.

    Currents count from the end of the second side to that of the first.

    Parameters
    ----------
    wire : BentWire
        The wire. [-]
    frequency : array (f,)
        Frequency. [Hz], > 0
    counts : tuple of Plan
        Coarse mesh of each side, from `mesh.plan_side`. [1]
    mesh_frequency : float
        Frequency the mesh was planned for. [Hz], > 0
    extrapolate : bool
        Solve the finer mesh too. [-]
    power : bool
        Return the loss and sky matrices too. [-]

    Returns
    -------
    Ports
        Matrices (f, p, p), p = 3 with traps and 1 without. [ohm]

    Raises
    ------
    ValueError
        If a frequency is not above 0, or the wire is not above the ground.

    Source
    ------
    Derived here, as `solve_ports`.
    """
    lowest = min(z for side in wire.sides for _, _, z in side.vertices)
    frequency = _checked(frequency, wire.ground, lowest)
    samples = [Samples(side, float(frequency.max()), _reflects(wire), C0) for side in wire.sides]
    kernels = _sampled(wire.ground, frequency, samples)
    sky = Sky(wire.ground, frequency, samples, mirrored=False) if power else None
    internal = internal_impedance(frequency, 2 * wire.radius, wire.resistivity)[:, None, None]

    def on(counts: tuple[Plan, ...]) -> Ports:
        meshes = [
            SideMesh(side, nodes_of(side, n, C0 / mesh_frequency), s)
            for side, n, s in zip(wire.sides, counts, samples, strict=True)
        ]
        return _solve_all(wire, frequency, meshes, kernels, internal, sky)

    coarse = on(counts)
    finer = tuple(tuple(2 * n for n in side) for side in counts)
    return on(finer).extrapolated(coarse) if extrapolate else coarse


def _checked(frequency: np.ndarray, ground: Ground, lowest: float) -> np.ndarray:
    frequency = np.atleast_1d(np.asarray(frequency, float))
    if not np.all(frequency > 0):
        raise ValueError("frequency must be above 0")
    if ground.kind is not GroundKind.SPACE and not lowest > 0:
        raise ValueError("wire must have its ends above the ground")
    return frequency


def _reflects(wire: Wire | BentWire) -> bool:
    return wire.ground.kind is not GroundKind.SPACE


Kernels = list[tuple[np.ndarray, np.ndarray]]
"""Vector and charge kernel, each (f, q, q), of the first side with itself, with the second, of the second."""


def _sampled(
    ground: Ground, frequency: np.ndarray, samples: list[Samples], *, mirrored: bool = False
) -> Kernels:
    """Sample the smooth kernels: the ground's, and the direct wave's imaginary part.

    Of two mirrored sides the last block is that of the first and is left out, and both others are symmetric.
    """
    one, other = samples
    blocks = [(one, one, True), (one, other, mirrored)] + ([] if mirrored else [(other, other, True)])
    index = [
        np.triu_indices(a.count) if symmetric else np.divmod(np.arange(a.count * b.count), b.count)
        for a, b, symmetric in blocks
    ]
    p, t, q, u = (
        np.concatenate([array(a, b)[n[which]] for (a, b, _), n in zip(blocks, index, strict=True)])
        for array, which in (
            (lambda a, b: a.position, 0),
            (lambda a, b: a.direction, 0),
            (lambda a, b: b.position, 1),
            (lambda a, b: b.direction, 1),
        )
    )
    away = p - q
    k = 2 * np.pi / C0 * frequency[:, None]
    direct = -1j * k * np.sinc(k * np.linalg.norm(away, axis=1) / np.pi)
    vector, charge = direct * np.einsum("ij,ij->i", t, u), direct
    if ground.kind is not GroundKind.SPACE:
        distance = np.hypot(away[:, 0], away[:, 1])
        sight = away[:, :2] / np.maximum(distance, 1e-12)[:, None]
        seen = reflected_kernels(frequency, distance, p[:, 2] + q[:, 2], ground)
        level = np.einsum("ij,ij->i", t[:, :2], u[:, :2])
        upright = t[:, 2] * u[:, 2]
        across = t[:, 2] * np.einsum("ij,ij->i", u[:, :2], sight) - u[:, 2] * np.einsum(
            "ij,ij->i", t[:, :2], sight
        )
        vector = vector + level * seen.along + upright * seen.upright + across * seen.cross
        charge = charge + seen.charge
    found, begin = [], 0
    for (a, b, symmetric), (i, j) in zip(blocks, index, strict=True):
        part = []
        for values in (vector, charge):
            full = np.empty((frequency.size, a.count, b.count), complex)
            full[:, i, j] = values[:, begin : begin + i.size]
            if symmetric:
                full[:, j, i] = values[:, begin : begin + i.size]
            part.append(full)
        found.append((part[0], part[1]))
        begin += i.size
    return found


def _block(pair: Pair, kernels: tuple[np.ndarray, np.ndarray], frequency: np.ndarray) -> np.ndarray:
    """Return the impedances (f, n, m) between the triangles of two sides, outward currents, no wire loss."""
    one, other, (vector, charge) = pair.one, pair.other, kernels
    w = 2 * np.pi * frequency[:, None, None]
    rest = (np.cos(w / C0 * pair.distance) - 1) / pair.distance
    charge = one.project_slopes @ charge @ other.project_slopes.T + one.slopes @ rest @ other.slopes.T
    vector = one.project @ vector @ other.project.T + one.values @ (pair.turn * rest) @ other.values.T
    return 1j * w * MU0 / (4 * np.pi) * (vector + pair.vector) + (charge + pair.charge) / (
        4j * np.pi * w * EPS0
    )


def _own(wire: Wire | BentWire, mesh: SideMesh, frequency: np.ndarray, internal: np.ndarray) -> np.ndarray:
    """Return what a side's conductor and coating add to its block."""
    return internal * mesh.mass - wire.elastance / (2j * np.pi * frequency[:, None, None]) * mesh.stiffness


def _solve_halves(
    wire: Wire,
    frequency: np.ndarray,
    meshes: list[SideMesh],
    kernels: Kernels,
    internal: np.ndarray,
    sky: Sky | None,
    *,
    odd: bool,
) -> Ports:
    """Solve the even and the odd half of a symmetric wire on one mesh."""
    one, other = meshes
    same = _block(Pair(one, one, wire.radius), kernels[0], frequency) + _own(wire, one, frequency, internal)
    mirror = _block(Pair(one, other, wire.radius, mirrored=True), kernels[1], frequency)
    feed = np.eye(one.count)[:, :1]
    columns = feed if one.trap is None else np.column_stack([feed, one.trap])
    halves = [_open(same - mirror, columns)]
    if one.trap is not None and odd:
        currents, impedance = _open((same + mirror)[:, 1:, 1:], one.trap[1:, None])
        halves.append((np.pad(currents, ((0, 0), (1, 0), (0, 0))), impedance))
    impedance = _full([2 * z for _, z in halves])
    if sky is None:
        return Ports(frequency, impedance)
    moments = [one.project.T @ c for c, _ in halves]
    return Ports(
        frequency,
        impedance,
        _full([2 * _loss(internal, one, c) for c, _ in halves]),
        # Outward on the other side an even current counts against the one on this side.
        _full(
            [
                sky.form(np.concatenate([m, sign * m], axis=1))
                for m, sign in zip(moments, (-1, 1), strict=False)
            ]
        ),
    )


def _solve_all(
    wire: BentWire,
    frequency: np.ndarray,
    meshes: list[SideMesh],
    kernels: Kernels,
    internal: np.ndarray,
    sky: Sky | None,
) -> Ports:
    """Solve both sides of any wire at once on one mesh."""
    one, other = meshes
    first, second = (
        _block(Pair(m, m, wire.radius), k, frequency) + _own(wire, m, frequency, internal)
        for m, k in ((one, kernels[0]), (other, kernels[2]))
    )
    across = _block(Pair(one, other, wire.radius), kernels[1], frequency)
    full = np.block([[first, across], [across.transpose(0, 2, 1), second]])
    # Outward currents of the second side run against the sense of the wire, and both first triangles are one.
    join = np.zeros((one.count + other.count, one.count + other.count - 1))
    join[: one.count, : one.count] = np.eye(one.count)
    join[one.count, 0] = -1.0
    join[one.count + 1 :, one.count :] = -np.eye(other.count - 1)
    columns = np.eye(join.shape[1])[:, :1]
    if one.trap is not None and other.trap is not None:
        traps = np.zeros((join.shape[0], 2))
        traps[: one.count, 0], traps[one.count :, 1] = one.trap, -other.trap
        columns = np.column_stack([columns, join.T @ traps])
    currents, impedance = _open(join.T @ full @ join, columns)
    if sky is None:
        return Ports(frequency, impedance)
    outward = join @ currents
    halves = outward[:, : one.count], outward[:, one.count :]
    moments = [m.project.T @ c for m, c in zip(meshes, halves, strict=True)]
    loss = sum(_loss(internal, m, c) for m, c in zip(meshes, halves, strict=True))
    return Ports(frequency, impedance, loss, sky.form(np.concatenate(moments, axis=1)))


def _loss(internal: np.ndarray, mesh: SideMesh, currents: np.ndarray) -> np.ndarray:
    """Return the power lost in a side's conductor as a quadratic form (f, p, p) in the port currents."""
    return internal.real * (np.conj(currents.transpose(0, 2, 1)) @ mesh.mass @ currents)


def _open(matrix: np.ndarray, columns: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
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
