"""What a wire sends to the sky: its far field over the ground, summed over all directions."""

from __future__ import annotations

import math
from functools import cache

import numpy as np

from .constants import C0, ETA0
from .ground import Ground, fresnel
from .mesh import Samples
from .quadrature import gauss_legendre
from .soils import GroundKind


class Sky:
    """The far field of a wire over its ground in every direction that is summed.

    Of a wire that x and y mirror, with its currents up to a sign, a quarter of the directions do.
    """

    def __init__(
        self, ground: Ground, frequency: np.ndarray, samples: list[Samples], *, mirrored: bool
    ) -> None:
        position = np.concatenate([s.position for s in samples])
        # A long or a high wire has many lobes: their number goes with its size in wavelengths.
        wave = 2 * np.pi * float(frequency.max()) / C0
        wide, tall = wave * np.ptp(position[:, :2], axis=0).max() / 2, wave * position[:, 2].max()
        if ground.kind is GroundKind.SPACE:
            tall = wave * np.ptp(position[:, 2])
        ups, turns = 8 * math.ceil((16 + 0.75 * tall + wide) / 8), 4 * math.ceil((6 + 0.6 * wide) / 4)
        cosine, phi, self._weight = _directions(ground.kind is GroundKind.SPACE, mirrored, ups, turns)
        direction = np.concatenate([s.direction for s in samples])
        sine, east, north = np.sqrt(1 - cosine**2), np.sin(phi), np.cos(phi)
        level = np.outer(sine * east, position[:, 0]) + np.outer(sine * north, position[:, 1])
        height = np.outer(cosine, position[:, 2])
        across = np.outer(north, direction[:, 0]) - np.outer(east, direction[:, 1])
        outward = np.outer(east, direction[:, 0]) + np.outer(north, direction[:, 1])
        outward, upward = outward * cosine[:, None], np.outer(sine, direction[:, 2])
        self._scale, self._fields = [], []
        for f in frequency:
            k = 2 * np.pi * f / C0
            turned, rise = np.exp(1j * k * level), np.exp(1j * k * height)
            if ground.kind is GroundKind.SPACE:
                fields = turned * rise * across, turned * rise * (outward - upward)
            else:
                te, tm = -1.0, 1.0
                if ground.kind is GroundKind.SOIL:
                    te, tm = (r[:, None] for r in fresnel(cosine, ground.index_squared(np.float64(f))))
                fall = np.conj(rise)
                fields = (
                    turned * across * (rise + te * fall),
                    turned * (outward * (rise - tm * fall) - upward * (rise + tm * fall)),
                )
            self._fields.append(np.concatenate(fields))
            self._scale.append(k * k * ETA0 / (16 * np.pi**2))

    def form(self, moments: np.ndarray) -> np.ndarray:
        """Return the power sent to the sky as a quadratic form in the port currents.

        Parameters
        ----------
        moments : complex array (f, q, p)
            Outward current moments at all sample points for one ampere into each port. [m]

        Returns
        -------
        complex array (f, p, p)
            Hermitian form. [ohm]

        Source
        ------
        Derived here: far field of current elements with Fresnel's coefficients, space wave only.
        """
        weight = np.concatenate([self._weight, self._weight])[:, None]
        found = np.empty((moments.shape[0], moments.shape[2], moments.shape[2]), complex)
        for i, (scale, fields, moment) in enumerate(zip(self._scale, self._fields, moments, strict=True)):
            field = fields @ moment
            found[i] = scale * (np.conj(field.T) @ (weight * field))
        return found


@cache
def _directions(
    all_around: bool, quarter: bool, ups: int, turns: int
) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Return cosines from the vertical, angles from +y towards +x, and solid angles of the directions."""
    up, weight_up = gauss_legendre(ups)
    if all_around:
        up, weight_up = 2 * up - 1, 2 * weight_up
    if quarter:
        turn, weight_turn = gauss_legendre(turns)
        turn, weight_turn = turn * np.pi / 2, weight_turn * 2 * np.pi
    else:
        count = 4 * turns
        turn, weight_turn = np.arange(count) * 2 * np.pi / count, np.full(count, 2 * np.pi / count)
    cosine, phi = (a.ravel() for a in np.meshgrid(up, turn, indexing="ij"))
    return cosine, phi, np.outer(weight_up, weight_turn).ravel()
