"""The half-space under the wire: reflected-wave kernels, reflection coefficients, soil classes."""

from __future__ import annotations

import math
from dataclasses import dataclass
from enum import StrEnum

import numpy as np

from .special import bessel_j01

C0 = 299_792_458.0
EPS0 = 8.854_187_8188e-12
MU0 = 1.256_637_061_27e-6
ETA0 = MU0 * C0


class GroundKind(StrEnum):
    """What lies under the wire."""

    SPACE = "space"
    MIRROR = "mirror"
    SOIL = "soil"


@dataclass(frozen=True, kw_only=True)
class Soil:
    """A class of soil: conductivity [S/m] and relative permittivity [1]."""

    conductivity: float
    permittivity: float
    source: str
    seen: bool


SOILS: dict[str, Soil] = {
    name: Soil(conductivity=sigma, permittivity=eps, source="itu-r-p368", seen=True)
    for name, sigma, eps in (
        ("sea water", 5.0, 70.0),
        ("brackish water", 1.0, 80.0),
        ("fresh water", 3e-3, 80.0),
        ("very wet ground", 3e-2, 40.0),
        ("wet ground", 1e-2, 30.0),
        ("land", 3e-3, 22.0),
        ("medium dry ground", 1e-3, 15.0),
        ("dry ground", 3e-4, 7.0),
        ("very dry ground", 1e-4, 3.0),
    )
}
UNKNOWN_SOIL = Soil(conductivity=5e-3, permittivity=13.0, source="common practice, no source", seen=False)
"""Stands for a soil nobody has looked at; its doubt reaches from `dry ground` to `wet ground`."""
UNKNOWN_SOIL_FROM = ("dry ground", "wet ground")


@dataclass(frozen=True, kw_only=True)
class Ground:
    """What is under the wire; conductivity [S/m] and permittivity [1] matter for soil only."""

    kind: GroundKind
    conductivity: float = 0.0
    permittivity: float = 1.0

    def index_squared(self, frequency: np.ndarray) -> np.ndarray:
        """Return the complex relative permittivity of the soil at each frequency. [1]."""
        return self.permittivity - 1j * self.conductivity / (2 * np.pi * frequency * EPS0)


@dataclass(frozen=True)
class Reflected:
    """The four reflected-wave kernels between pairs of points, each of shape (frequencies, pairs).

    `along` couples horizontal currents, `upright` vertical ones [1/m]; `cross` is what a horizontal current does
    to a vertical one along the line of sight (the other way round with the other sign) [1/m]; `charge` is the
    scalar potential's [1/m].
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
    Derived here: Sommerfeld half-space potentials of a horizontal and a vertical dipole in Lorenz gauge, brought to
    one common scalar potential by a gauge change of the vertical dipole (`michalski-zheng-1990`, formulation C).
    """
    if ground.kind is GroundKind.SPACE:
        raise ValueError("ground: space reflects nothing; limit: mirror or soil")
    if not np.all(height_sum > 0):
        raise ValueError("height_sum: must be > 0 for every pair")
    if ground.kind is GroundKind.MIRROR:
        image = np.hypot(distance, height_sum)
        wave = np.exp(-2j * np.pi / C0 * frequency[:, None] * image) / image
        return Reflected(-wave, wave, np.zeros_like(wave), -wave)
    return _soil_kernels(frequency, distance, height_sum, ground)


def _soil_kernels(
    frequency: np.ndarray, distance: np.ndarray, height_sum: np.ndarray, ground: Ground
) -> Reflected:
    """Integrate the Sommerfeld integrals along the real axis for every frequency and pair."""
    shape = (frequency.size, distance.size)
    along, upright, cross, charge = (np.empty(shape, complex) for _ in range(4))
    for i, f in enumerate(frequency):
        k0 = 2 * math.pi * f / C0
        k, u0, measure = _path(k0, float(distance.max()), float(height_sum.min()))
        n2 = complex(ground.index_squared(np.float64(f)))
        u1 = np.sqrt(k * k - n2 * k0 * k0)  # principal root: Re >= 0, and Im > 0 where Re vanishes
        te = (n2 - 1) * (k0 / (u0 + u1)) ** 2
        w = 2 * (n2 - 1) / ((u0 + u1) * (n2 * u0 + u1))
        # measure is k dk / u0, finite where the path passes u0 = 0.
        spectra = np.stack(
            [
                te,
                (n2 * u0 - u1) / (n2 * u0 + u1) + u0 * u0 * w,
                te - u0 * u0 * w,
            ]
        )
        spectra *= measure
        bend = -w * k * u0 * measure
        j0, j1 = bessel_j01(k[:, None] * distance)
        decay = np.exp(-u0[:, None] * height_sum)
        along[i], upright[i], charge[i] = spectra @ (decay * j0)
        cross[i] = bend @ (decay * j1)
    return Reflected(along, upright, cross, charge)


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
        raise ValueError("count: must be >= 1")
    if count not in _RULES:
        x, w = np.polynomial.legendre.leggauss(count)
        _RULES[count] = ((x + 1) / 2, w / 2)
    return _RULES[count]


def _path(k0: float, reach: float, least_height_sum: float) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Return the nodes k, the decay u0 and the weight k dk / u0 along the real axis.

    Below k0 the path is k0 sin t, above it k0 cosh v: both take the root singularity at k0 away.
    """
    t, wt = gauss_legendre(_rounded(20 + 1.2 * k0 * reach))
    t, wt = t * (math.pi / 2), wt * (math.pi / 2)
    last = math.asinh(23.0 / (k0 * least_height_sum))
    v, wv = gauss_legendre(_rounded(24 + 3 * last + 1.1 * last * reach / least_height_sum))
    v, wv = v * last, wv * last
    k = k0 * np.concatenate([np.sin(t), np.cosh(v)])
    u0 = k0 * np.concatenate([1j * np.cos(t), np.sinh(v)])
    measure = k0 * np.concatenate([-1j * np.sin(t) * wt, np.cosh(v) * wv])
    return k, u0, measure


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
        raise ValueError("cosine: must be within 0 and 1")
    root = np.sqrt(index_squared - 1 + cosine**2)
    horizontal = (cosine - root) / (cosine + root)
    vertical = (index_squared * cosine - root) / (index_squared * cosine + root)
    return horizontal, vertical
