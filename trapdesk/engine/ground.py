"""The half-space under the wire: reflected-wave kernels, reflection coefficients, soil classes."""

from __future__ import annotations

import math
from dataclasses import dataclass
from itertools import pairwise

import numpy as np

from .constants import C0, EPS0
from .quadrature import barycentric, gauss_legendre
from .soils import GroundKind
from .special import bessel_j01

TAIL = 16.0
"""The spectra are followed until their decay e^-kZ has come to e^-16."""


@dataclass(frozen=True, kw_only=True)
class Ground:
    """What is under the wire; conductivity [S/m] and permittivity [1] matter for soil only."""

    kind: GroundKind
    conductivity: float = 0.0
    permittivity: float = 1.0

    def index_squared(self, frequency: np.ndarray) -> np.ndarray:
        """Return the complex relative permittivity of the soil at each frequency.

        Parameters
        ----------
        frequency : float or array
            Frequency. [Hz], > 0

        Returns
        -------
        complex array
            Permittivity, its imaginary part from the conductivity. [1]

        Source
        ------
        Definition: eps_r - j sigma / (w eps0), time running as exp(+jwt).
        """
        return self.permittivity - 1j * self.conductivity / (2 * np.pi * frequency * EPS0)


@dataclass(frozen=True)
class Reflected:
    """The four reflected-wave kernels between pairs of points, each of shape (frequencies, pairs).

    `along` couples horizontal currents, `upright` vertical ones; `cross` is what a horizontal current does
    to a vertical one along the line of sight (the other way round with the other sign); `charge` is the
    scalar potential's. All in 1/m.
    """

    along: np.ndarray
    upright: np.ndarray
    cross: np.ndarray
    charge: np.ndarray


def reflected_kernels(
    frequency: np.ndarray, distance: np.ndarray, height_sum: np.ndarray, ground: Ground
) -> Reflected:
    """Return what the ground adds to the potentials between pairs of points in the air.

    Parameters
    ----------
    frequency : array (f,)
        Frequency. [Hz], > 0
    distance : array (p,)
        Horizontal distance of the pair. [m], >= 0
    height_sum : array (p,)
        Sum of the two heights. [m], > 0
    ground : Ground
        `mirror` or `soil`. [-]

    Returns
    -------
    Reflected
        Arrays (f, p). [1/m]

    Raises
    ------
    ValueError
        If the ground is `space`, which reflects nothing, or a height sum is not above 0.

    Source
    ------
    Derived here: Sommerfeld half-space potentials of a horizontal and a vertical dipole in Lorenz gauge,
    brought to one scalar potential by a change of gauge (`michalski-zheng-1990`, formulation C).
    """
    if ground.kind is GroundKind.SPACE:
        raise ValueError("ground must be a mirror or soil: space reflects nothing")
    if not np.all(height_sum > 0):
        raise ValueError("height_sum must be above 0 for every pair")
    if ground.kind is GroundKind.MIRROR:
        image = np.hypot(distance, height_sum)
        wave = np.exp(-2j * np.pi / C0 * frequency[:, None] * image) / image
        return Reflected(-wave, wave, np.zeros_like(wave), -wave)
    return _soil_kernels(frequency, distance, height_sum, ground)


def _soil_kernels(
    frequency: np.ndarray, distance: np.ndarray, height_sum: np.ndarray, ground: Ground
) -> Reflected:
    """Integrate the Sommerfeld integrals along the real axis for every frequency and pair.

    Pairs of one height sum differ in distance only: a polynomial in the distance then serves them all.
    """
    reach, low, high = float(distance.max()), float(height_sum.min()), float(height_sum.max())
    spread = None
    if np.all(height_sum == low):
        count = 14 + math.ceil(1.5 * reach / low + 3 * reach * frequency.max() / C0)
        if count < distance.size:
            x = np.cos(np.pi * (np.arange(count) + 0.5) / count)
            spread = barycentric(
                x, np.sin(np.pi * (np.arange(count) + 0.5) / count), 2 * distance / reach - 1
            )
            distance, height_sum = reach * (1 + x) / 2, np.full(count, low)
    kernels = np.empty((4, frequency.size, distance.size), complex)
    for i, f in enumerate(frequency):
        k0 = 2 * math.pi * f / C0
        n2 = complex(ground.index_squared(np.float64(f)))
        k, u0, measure, waves = _path(k0, n2, reach, low, high)
        u1 = np.sqrt(k * k - n2 * k0 * k0)  # principal root: Re >= 0, and Im > 0 where Re vanishes
        te = (n2 - 1) * (k0 / (u0 + u1)) ** 2
        w = 2 * (n2 - 1) / ((u0 + u1) * (n2 * u0 + u1))
        tm = (n2 * u0 - u1) / (n2 * u0 + u1)
        # measure is k dk / u0, finite where the path passes u0 = 0.
        spectra = np.stack([te, tm + u0 * u0 * w, te - u0 * u0 * w, -w * k * u0]) * measure
        j0, j1 = bessel_j01(k[:, None] * distance)
        wave = np.exp(-u0[:waves, None] * height_sum)
        kernels[:3, i] = spectra[:3, :waves] @ (wave * j0[:waves])
        kernels[3, i] = spectra[3, :waves] @ (wave * j1[:waves])
        # Above k0 everything but the spectra is real, and half the work.
        decay = np.exp(-u0[waves:, None].real * height_sum)
        parts = spectra[:, waves:]
        parts = np.concatenate([parts.real, parts.imag])
        level, bend = parts[[0, 1, 2, 4, 5, 6]] @ (decay * j0[waves:]), parts[[3, 7]] @ (decay * j1[waves:])
        kernels[:3, i] += level[:3] + 1j * level[3:]
        kernels[3, i] += bend[0] + 1j * bend[1]
    if spread is not None:
        kernels = kernels @ spread.T
    along, upright, charge, cross = kernels
    return Reflected(along, upright, cross, charge)


def _path(
    k0: float, n2: complex, reach: float, low: float, high: float
) -> tuple[np.ndarray, np.ndarray, np.ndarray, int]:
    """Return the nodes k, the decay u0, the weight k dk / u0 along the real axis, and how many lie below k0.

    Below k0 the path is k0 sin t, above it k0 cosh v: both take the root singularity at k0 away. It is broken
    at the soil's own root, and close to k0 over soil so dense that the reflection turns there.
    """
    turn = 4 / abs(n2) ** 0.5
    last = math.asinh(TAIL / (k0 * low))
    below, above = [0.0, math.pi / 2], [0.0]
    if turn < 0.5:
        below.insert(1, math.pi / 2 - turn)
        above.append(turn)
    kink = math.acosh(max(np.sqrt(n2).real, 1.0))
    if above[-1] + 0.1 < kink < 0.95 * last:
        above.append(kink)
    above.append(last)
    turns = 0.55 * k0 * (reach + 0.9 * high)
    t, wt = _pieces(below, [10 + turns * (to - from_) for from_, to in pairwise(below)])
    most = TAIL * reach / low
    phases = [
        min(k0 * reach * (math.cosh(to) - math.cosh(from_)), (to - from_) * most)
        for from_, to in pairwise(above)
    ]
    counts = [8 + 4 * (to - from_) + 0.45 * p for (from_, to), p in zip(pairwise(above), phases, strict=True)]
    v, wv = _pieces(above, counts)
    k = k0 * np.concatenate([np.sin(t), np.cosh(v)])
    u0 = k0 * np.concatenate([1j * np.cos(t), np.sinh(v)])
    measure = k0 * np.concatenate([-1j * np.sin(t) * wt, np.cosh(v) * wv])
    return k, u0, measure, t.size


def _pieces(stops: list[float], counts: list[float]) -> tuple[np.ndarray, np.ndarray]:
    """Return one Gauss rule over consecutive intervals."""
    rules = [gauss_legendre(_rounded(count)) for count in counts]
    x = [from_ + (to - from_) * r[0] for (from_, to), r in zip(pairwise(stops), rules, strict=True)]
    w = [(to - from_) * r[1] for (from_, to), r in zip(pairwise(stops), rules, strict=True)]
    return np.concatenate(x), np.concatenate(w)


def _rounded(count: float) -> int:
    """Round a node count up to a multiple of eight, so that few rules are ever made."""
    return 8 * math.ceil(min(count, 4000) / 8)


def fresnel(cosine: np.ndarray, index_squared: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Return the reflection coefficients of a plane wave for both polarisations.

    Parameters
    ----------
    cosine : array
        Cosine of the angle from the vertical. [1], 0 to 1
    index_squared : complex array
        Relative permittivity of the soil, broadcasting with `cosine`. [1]

    Returns
    -------
    tuple of complex array
        Horizontal (TE) and vertical (TM) coefficient, the latter +1 over a mirror. [1]

    Raises
    ------
    ValueError
        If a cosine lies outside 0 to 1.

    Source
    ------
    Definition: Fresnel's equations.
    """
    if not np.all((cosine >= 0) & (cosine <= 1)):
        raise ValueError("cosine must be within 0 and 1")
    root = np.sqrt(index_squared - 1 + cosine**2)
    horizontal = (cosine - root) / (cosine + root)
    vertical = (index_squared * cosine - root) / (index_squared * cosine + root)
    return horizontal, vertical
