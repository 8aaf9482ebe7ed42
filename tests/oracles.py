"""Independent computations for the tests of wire and ground: other paths, other formulations, no engine code.

Everything here is written from the plane waves in which a current's field falls on the soil (transverse
electric and transverse magnetic, each a transmission line in height), while the engine works with potentials.
Time runs as exp(+jwt), currents are rms.
"""

import math
from dataclasses import dataclass

import numpy as np
from scipy.integrate import quad_vec
from scipy.special import jv

C0 = 299_792_458.0
MU0 = 4e-7 * math.pi
EPS0 = 1 / (MU0 * C0 * C0)


def index_squared(frequency, conductivity, permittivity):
    """Return the relative permittivity of a soil."""
    return permittivity - 1j * conductivity / (2 * math.pi * frequency * EPS0)


def decay(k, k0, n2=1.0):
    """Return how a wave of horizontal wave number k decays with height; without loss it travels away."""
    u = np.sqrt(np.asarray(k * k - n2 * k0 * k0, complex))
    return np.where((u.imag < 0) & (abs(u.real) < 1e-12 * abs(u)), -u, u)


def voltage_reflections(u0, u1, n2):
    """Return what a line of impedance jw mu/u (TE) or u/(jw eps) (TM) reflects of a tangential field."""
    return (u0 - u1) / (u0 + u1), (u1 - n2 * u0) / (u1 + n2 * u0)


def sommerfeld(frequency, distance, height_sum, n2):
    """Return the kernels along, upright, cross, charge by adaptive quadrature off the real axis.

    The path is a half ellipse above the branch points, then the real axis.
    """
    k0 = 2 * math.pi * frequency / C0
    end = 1.3 * max(1.0, math.sqrt(abs(n2))) * k0
    rise = min(0.3 * k0, 1.0 / max(distance, 1e-9))

    def integrand(k):
        u0, u1 = decay(k, k0), decay(k, k0, n2)
        te, tm = voltage_reflections(u0, u1, n2)
        w = (te - tm) / (k * k)
        charge = (u0 * tm + k0 * k0 * te / u0) / (k * k)
        j0, j1 = jv(0, k * distance), jv(1, k * distance)
        return (
            k
            * np.exp(-u0 * height_sum)
            * np.array([te / u0 * j0, (u0 * w - tm / u0) * j0, -w * k * j1, charge * j0])
        )

    def on_ellipse(t):
        k = end / 2 * (1 - math.cos(t)) + 1j * rise * math.sin(t)
        return integrand(k) * (end / 2 * math.sin(t) + 1j * rise * math.cos(t))

    first = quad_vec(on_ellipse, 1e-7, math.pi, epsrel=1e-10, limit=2000)[0]
    last = max(45.0 / height_sum, 2 * end)
    return first + quad_vec(integrand, end, last, epsrel=1e-10, limit=2000)[0]


@dataclass(frozen=True)
class Current:
    """A current as many short straight pieces: their places (n, 3), and current times length (n, 3)."""

    place: np.ndarray
    moment: np.ndarray


def on_side(vertices, corners, distance, weights, current, sign=1.0):
    """Return the current of a side from values at quadrature points; `sign` -1 turns its sense inward."""
    vertices = np.array(vertices, float)
    piece = np.clip(np.searchsorted(corners, distance) - 1, 0, len(corners) - 2)
    direction = (np.diff(vertices, axis=0) / np.diff(corners)[:, None])[piece]
    place = vertices[piece] + (distance - corners[piece])[:, None] * direction
    return Current(place, sign * (current * weights)[:, None] * direction)


def on_vee(height, slope, distance, weights, right, left=None):
    """Return the current of two straight sides; without `left` both carry the same along the wire."""
    reach = 2 * float(distance.max())
    sides = []
    for x, current, sign in ((1, right, 1.0), (-1, right if left is None else left, -1.0)):
        end = (x * reach * math.cos(slope), 0.0, height - reach * math.sin(slope))
        vertices = ((0.0, 0.0, height), end)
        sides.append(on_side(vertices, np.array([0.0, reach]), distance, weights, current, sign))
    return joined(*sides)


def joined(*currents):
    """Return several currents as one."""
    return Current(np.concatenate([c.place for c in currents]), np.concatenate([c.moment for c in currents]))


def _gauss(stops, count):
    x, w = np.polynomial.legendre.leggauss(count)
    pieces = [
        ((b - a) / 2 * x + (a + b) / 2, (b - a) / 2 * w) for a, b in zip(stops, stops[1:], strict=False)
    ]
    return np.concatenate([p[0] for p in pieces]), np.concatenate([p[1] for p in pieces])


def wave_numbers(k0, last, pieces=12, count=24):
    """Return horizontal wave numbers and weights up to `last`; squares of a new variable meet at k0.

    That takes away the root singularity of air there.
    """
    t, wt = _gauss(np.linspace(0.0, math.sqrt(k0), pieces), count)
    v, wv = _gauss(math.sqrt(last - k0) * np.linspace(0.0, 1.0, 3 * pieces) ** 1.5, count)
    return np.concatenate([k0 - t * t, k0 + v * v]), np.concatenate([2 * t * wt, 2 * v * wv])


def falling(current, frequency, k, angles, sense=1):
    """Return what one plane wave of each k and angle carries of a current: along rho, across it, and upright.

    Each is an array (k, angles): sums of exp(sense j k rho) exp(-u0 z) over the pieces.
    """
    k0 = 2 * math.pi * frequency / C0
    (x, y, z), moment = current.place.T, current.moment
    loss = np.exp(-decay(k, k0)[:, None] * z)
    along, across, upright = (np.empty((k.size, angles.size), complex) for _ in range(3))
    for i, phi in enumerate(angles):
        c, s = math.cos(phi), math.sin(phi)
        frame = np.column_stack(
            [c * moment[:, 0] + s * moment[:, 1], c * moment[:, 1] - s * moment[:, 0], moment[:, 2]]
        )
        waves = (loss * np.exp(sense * 1j * k[:, None] * (c * x + s * y))) @ frame
        along[:, i], across[:, i], upright[:, i] = waves.T
    return along, across, upright


def tangential(current, frequency, k, angles):
    """Return the field that falls on z = 0 along rho (TM) and across it (TE), and both decays."""
    w = 2 * math.pi * frequency
    k0 = w / C0
    u0 = decay(k, k0)[:, None]
    along, across, upright = falling(current, frequency, k, angles)
    tm = 1j * w * MU0 / (2 * k0 * k0) * (u0 * along + 1j * k[:, None] * upright)
    return tm, -1j * w * MU0 / (2 * u0) * across


def angles_of(current, last):
    """Return evenly spaced angles and their weight; the trapezoid is spectral on a circle."""
    extent = 2 * np.linalg.norm(current.place[:, :2] - current.place[:, :2].mean(axis=0), axis=1).max()
    count = 32 + math.ceil(1.1 * last * float(extent))
    return (np.arange(count) + 0.5) * 2 * math.pi / count, 2 * math.pi / count


def soil_power(current, frequency, n2, pieces=12):
    """Return the power that flows through z = 0 into the soil, evanescent waves included."""
    w = 2 * math.pi * frequency
    k0 = w / C0
    last = k0 + 14.0 / float(current.place[:, 2].min())
    k, weight = wave_numbers(k0, last, pieces)
    phi, turn = angles_of(current, last)
    tm, te = tangential(current, frequency, k, phi)
    u0, u1 = decay(k, k0), decay(k, k0, n2)
    into_te, into_tm = 2 * u0 / (u0 + u1), 2 * u1 / (u1 + n2 * u0)
    flow_te, flow_tm = (u1 / (1j * w * MU0)).real, (1j * w * EPS0 * n2 / u1).real
    density = (flow_tm * abs(into_tm) ** 2)[:, None] * abs(tm) ** 2
    density = density + (flow_te * abs(into_te) ** 2)[:, None] * abs(te) ** 2
    return float((weight * k) @ density.sum(1)) * turn / (4 * math.pi**2)


def ground_reaction(current, frequency, n2, pieces=12):
    """Return -integral E . J of the reflected field over its own current: an impedance for one ampere."""
    k0 = 2 * math.pi * frequency / C0
    last = k0 + 20.0 / float(current.place[:, 2].min())
    k, weight = wave_numbers(k0, last, pieces)
    phi, turn = angles_of(current, last)
    tm, te = tangential(current, frequency, k, phi)
    u0, u1 = decay(k, k0), decay(k, k0, n2)
    back_te, back_tm = voltage_reflections(u0, u1, n2)
    along, across, upright = falling(current, frequency, k, phi, sense=-1)
    # Without charge in the air a wave going up has u0 E_z = -jk E_rho.
    field = (
        back_tm[:, None] * tm * (along - 1j * (k / u0)[:, None] * upright) + back_te[:, None] * te * across
    )
    return -complex((weight * k) @ field.sum(1)) * turn / (4 * math.pi**2)
