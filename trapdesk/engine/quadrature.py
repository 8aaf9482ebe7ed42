"""Integrals by nodes and weights, and values between Chebyshev nodes."""

from __future__ import annotations

import numpy as np


def barycentric(nodes: np.ndarray, weights: np.ndarray, position: np.ndarray) -> np.ndarray:
    """Return the values (positions, nodes) of each Chebyshev node's polynomial at positions.

    Parameters
    ----------
    nodes : array (n,)
        Chebyshev nodes of the first kind, any scale. [any unit]
    weights : array (n,)
        Sizes of their barycentric weights; the signs alternate. [1]
    position : array (m,)
        Where the polynomials are wanted. [the unit of the nodes]

    Returns
    -------
    array (m, n)
        Rows of sum 1. [1]

    Source
    ------
    Definition: barycentric form of Lagrange's polynomial (`berrut-trefethen-2004`).
    """
    gap = position[:, None] - nodes
    gap[gap == 0] = 1e-300
    terms = weights * (-1.0) ** np.arange(nodes.size) / gap
    return terms / terms.sum(axis=1, keepdims=True)


_RULES: dict[int, tuple[np.ndarray, np.ndarray]] = {}


def gauss_legendre(count: int) -> tuple[np.ndarray, np.ndarray]:
    """Return nodes and weights of the Gauss-Legendre rule on (0, 1), remembered.

    Parameters
    ----------
    count : int
        Number of nodes. [1], >= 1

    Returns
    -------
    tuple of array (count,)
        Nodes and weights. [1]

    Raises
    ------
    ValueError
        If count is below 1.

    Source
    ------
    Definition: numpy's rule on (-1, 1), mapped.
    """
    if count < 1:
        raise ValueError("count must be at least 1")
    if count not in _RULES:
        x, w = np.polynomial.legendre.leggauss(count)
        _RULES[count] = ((x + 1) / 2, w / 2)
    return _RULES[count]
