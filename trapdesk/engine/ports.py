"""The wire seen from its ports: matrices over frequency, traps as terminations, interpolation."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np


@dataclass(frozen=True)
class Ports:
    """Open-circuit port matrices of a wire, each (f, p, p): feed point first, then the trap of each side.

    All currents count along the wire in the same sense. With rms port currents j, `j^H loss j` is what the
    wire's resistance takes and `j^H sky j` what goes to the sky [ohm]; both are None when not asked for.
    """

    frequency: np.ndarray
    impedance: np.ndarray
    loss: np.ndarray | None = None
    sky: np.ndarray | None = None

    def _paired(self, other: Ports, rule) -> Ports:  # noqa: ANN001 - a local combination of two arrays
        pairs = ((self.impedance, other.impedance), (self.loss, other.loss), (self.sky, other.sky))
        return Ports(self.frequency, *(None if a is None else rule(a, b) for a, b in pairs))

    def extrapolated(self, coarse: Ports) -> Ports:
        """Return the limit of the mesh, from this mesh and one of elements twice as long.

        Parameters
        ----------
        coarse : Ports
            The same wire at the same frequencies on the coarser mesh. [-]

        Returns
        -------
        Ports
            What both head for, at the same frequencies. [-]

        Source
        ------
        Derived here: an error that falls with the square of the element leaves a third of the difference.
        """
        return self._paired(coarse, lambda fine, rough: fine + (fine - rough) / 3)

    def at(self, frequency: np.ndarray) -> Ports:
        """Return the matrices at other frequencies, by the polynomial through the solved ones.

        Parameters
        ----------
        frequency : float or array (n,)
            Where they are wanted, within the solved range. [Hz]

        Returns
        -------
        Ports
            Matrices (n, p, p). [-]

        Source
        ------
        Derived here: open-circuit matrices have no poles near a band, so few nodes serve.
        """
        weights = polynomial_weights(self.frequency, np.atleast_1d(np.asarray(frequency, float)))
        parts = (self.impedance, self.loss, self.sky)
        return Ports(np.atleast_1d(frequency), *(None if a is None else _sum(weights, a) for a in parts))


def _sum(weights: np.ndarray, matrices: np.ndarray) -> np.ndarray:
    """Return sums of matrices (n, p, p) by weights (m, n), with real arithmetic alone."""
    flat = np.ascontiguousarray(matrices).reshape(matrices.shape[0], -1)
    found = (weights @ flat.view(float)).view(flat.dtype)
    return found.reshape(weights.shape[0], *matrices.shape[1:])


def polynomial_weights(nodes: np.ndarray, position: np.ndarray) -> np.ndarray:
    """Return the weights (positions, nodes) of the polynomial through values at nodes.

    Parameters
    ----------
    nodes : array (n,)
        Where values are known, all different. [any unit]
    position : array (m,)
        Where they are wanted. [the same unit]

    Returns
    -------
    array (m, n)
        Weights, each row of sum 1. [1]

    Raises
    ------
    ValueError
        If two nodes coincide.

    Source
    ------
    Definition: Lagrange's form of the interpolating polynomial.
    """
    n = nodes.size
    spread = nodes[:, None] - nodes
    spread.flat[:: n + 1] = 1.0
    if not spread.all():
        raise ValueError("nodes: must all be different")
    gaps = position[:, None] - nodes
    weights = np.empty((position.size, n))
    # What lies before a node and what lies after it, each product grown by one factor from node to node.
    weights[:, 0] = 1.0
    np.multiply.accumulate(gaps[:, :-1], axis=1, out=weights[:, 1:])
    weights[:, :-1] *= np.multiply.accumulate(gaps[:, :0:-1], axis=1)[:, ::-1]
    weights /= spread.prod(axis=1)
    return weights


def chebyshev_nodes(low: float, high: float, count: int) -> np.ndarray:
    """Return frequencies at which to solve so that the polynomial through them serves from low to high.

    Parameters
    ----------
    low, high : float
        Ends of the range. [Hz], 0 < low < high
    count : int
        Number of nodes. [1], >= 1

    Returns
    -------
    array (count,)
        Ascending. [Hz]

    Raises
    ------
    ValueError
        If the range is empty or the count below 1.

    Source
    ------
    Definition: zeros of the Chebyshev polynomial of the first kind.
    """
    if not (0 < low < high and count >= 1):
        raise ValueError("low, high: must be 0 < low < high, and count >= 1")
    x = np.cos(np.pi * (np.arange(count)[::-1] + 0.5) / count)
    return (low + high) / 2 + (high - low) / 2 * x


@dataclass(frozen=True)
class Terminated:
    """A wire with its traps in place: feed impedance, and all port currents per ampere into the feed."""

    impedance: np.ndarray
    currents: np.ndarray


def terminate(impedance: np.ndarray, *traps: np.ndarray) -> Terminated:
    """Close the trap ports with their traps; everything broadcasts over trials and frequencies.

    Parameters
    ----------
    impedance : complex array (..., p, p)
        Open-circuit port matrix, feed point first. [ohm]
    traps : complex array (...)
        Impedance of the trap in each side: none, one for both sides, or two. [ohm]

    Returns
    -------
    Terminated
        Feed impedance (...) and port currents (..., p) for one ampere into the feed. [ohm], [1]

    Raises
    ------
    ValueError
        If the matrix has no trap ports for the traps given.

    Source
    ------
    Derived here: `V = Z I` with `V = -Z_trap I` at the traps.
    """
    z11 = impedance[..., 0, 0]
    if impedance.shape[-1] == 1:
        if traps:
            raise ValueError("traps: the matrix has no trap ports; limit: 0 traps")
        return Terminated(z11, np.ones((*z11.shape, 1), complex))
    if not 1 <= len(traps) <= 2:
        raise ValueError("traps: must be one for both sides, or two")
    z = impedance
    entries = (z11, z[..., 0, 1], z[..., 0, 2], z[..., 1, 1], z[..., 2, 2], z[..., 1, 2])
    shape = np.broadcast_shapes(z11.shape, *(np.shape(trap) for trap in traps))
    first, second = (
        trap if np.shape(trap) == shape else np.broadcast_to(trap, shape) for trap in (traps[0], traps[-1])
    )
    feed, i2, i3 = terminate_entries(*entries, first, second)
    currents = np.ones((*shape, 3), complex)
    currents[..., 1], currents[..., 2] = i2.reshape(shape), i3.reshape(shape)
    return Terminated(feed.reshape(shape)[()], currents)


def terminate_entries(
    feed: np.ndarray,
    to_first: np.ndarray,
    to_second: np.ndarray,
    first: np.ndarray,
    second: np.ndarray,
    between: np.ndarray,
    first_trap: np.ndarray,
    second_trap: np.ndarray,
) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Close the trap ports of a matrix whose entries are arrays of their own, as many trials have them.

    Parameters
    ----------
    feed, to_first, to_second : complex array
        Open-circuit impedance of the feed point, and between it and the traps. [ohm]
    first, second, between : complex array
        Open-circuit impedance of each trap gap, and between both. [ohm]
    first_trap, second_trap : complex array
        Impedance of the trap in each side, of the full shape. [ohm]

    Returns
    -------
    tuple of complex array
        Feed impedance, and the current in each trap for one ampere into the feed, of one axis at least.
        [ohm], [1]

    Source
    ------
    Derived here: `V = Z I` with `V = -Z_trap I` at the traps.
    """
    # Work in place: this is what an ensemble spends its time on.
    a, d = first + np.atleast_1d(first_trap), second + np.atleast_1d(second_trap)
    b, p, q = between, to_first, to_second
    scale = a * d
    scale -= b * b
    np.divide(1.0, scale, out=scale)
    d *= p
    i2 = b * q - d
    i2 *= scale
    a *= q
    i3 = b * p - a
    i3 *= scale
    fed = np.multiply(p, i2, out=a)
    fed += np.multiply(q, i3, out=d)
    fed += feed
    return fed, i2, i3
