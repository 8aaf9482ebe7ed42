"""One band of the antenna over frequency: resonance, dip, usable width, from ports solved at a few points."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from ...design.design import Band
from ...engine import reflection
from ...engine.ports import Ports, chebyshev_nodes, polynomial_weights, terminate
from ...engine.stress import Stress
from ...engine.wire import Wire, plan, solve_ports
from ..trap.built import BuiltTrap
from .figures import Curve

MARGIN = 0.04
WIDE = (0.75, 1.3)
WIDE_NODES = 10
GRID = 161
"""Points over the band and its margins: close enough for a cubic through four of them to find a zero."""


LARGEST = 1e9
"""SWR of what takes no power, also where the polynomial between ports has it give some."""


def swr(impedance: np.ndarray, reference: float) -> np.ndarray:
    """Return the standing wave ratio of impedances against a real reference, finite for any of them."""
    if impedance.real.min() <= 0.0:
        impedance = np.maximum(impedance.real, 0.0) + 1j * impedance.imag
        return np.minimum(reflection.swr(impedance, reference), LARGEST)
    return reflection.swr(impedance, reference)


@dataclass(frozen=True, kw_only=True)
class Behaviour:
    """The antenna with its traps in place over frequency, arrays (n,): impedance, shares, stress."""

    frequency: np.ndarray
    impedance: np.ndarray
    swr: np.ndarray
    sky: np.ndarray
    ground: np.ndarray
    wire: np.ndarray
    trap: np.ndarray
    feed_current: np.ndarray
    trap_current: np.ndarray | None
    stress: Stress | None


Look = Callable[[np.ndarray, np.ndarray], np.ndarray]
"""From frequencies and feed impedances to the impedance that is judged."""


def behave(
    ports: Ports,
    trap: BuiltTrap | None,
    reference: float,
    power: float,
    feeding: Callable[[np.ndarray, np.ndarray], tuple[np.ndarray, np.ndarray]] | None = None,
) -> Behaviour:
    """Return what a wire does with its traps, at its ports' frequencies and a power at the feed point.

    `feeding` says instead, for frequencies and feed impedances, what power arrives and which impedance is
    judged.
    """
    frequency = ports.frequency
    closed = terminate(ports.impedance, *(() if trap is None else (trap.impedance(frequency),)))
    feed = closed.impedance.real
    wire, sky = (
        np.einsum("fp,fpq,fq->f", np.conj(closed.currents), m, closed.currents, optimize=False).real / feed
        for m in (ports.loss, ports.sky)
    )
    arriving, judged = (power, closed.impedance) if feeding is None else feeding(frequency, closed.impedance)
    amps = np.sqrt(arriving / feed)
    current = borne = None
    in_traps = np.zeros(frequency.size)
    if trap is not None:
        current = amps * np.abs(closed.currents[:, 1])
        borne = trap.stress(frequency, current)
        heat = borne.total_power
        if feeding is not None:
            # A transmitter that has tripped gives nothing to share, so the share is taken at the full power.
            heat = trap.stress(frequency, np.sqrt(power / feed) * np.abs(closed.currents[:, 1])).total_power
        in_traps = 2 * heat / power
    return Behaviour(
        frequency=frequency,
        impedance=closed.impedance,
        swr=swr(judged, reference),
        sky=sky,
        ground=1 - sky - wire - in_traps,
        wire=wire,
        trap=in_traps,
        feed_current=amps,
        trap_current=current,
        stress=borne,
    )


class Response:
    """A band with its solved ports; looks further out for what is not near the band."""

    def __init__(
        self,
        wire: Wire,
        band: Band,
        trap: BuiltTrap | None,
        reference: float,
        ports: Ports | None = None,
        looking: Callable[[float, complex], Look] | None = None,
    ) -> None:
        self.wire, self.band, self.trap, self.reference = wire, band, trap, reference
        self.low, self.high = band.low * (1 - MARGIN), band.high * (1 + MARGIN)
        if ports is None:
            nodes = chebyshev_nodes(self.low, self.high, 3 + math.ceil(math.log(self.high / self.low) / 0.06))
            ports = solve_ports(wire, nodes, plan(wire, band.target), band.target)
        self.ports = ports
        # How it looks from where it is judged may hang on what a tuner is set to at the aim.
        self.look = None if looking is None else looking(band.target, self.at(band.target))
        self.near = self._curve(ports, np.linspace(self.low, self.high, GRID))
        self._find_resonance()
        self.dip = self._find_dip()

    def _curve(self, ports: Ports, frequency: np.ndarray) -> Curve:
        weights = polynomial_weights(ports.frequency, frequency)
        loads = () if self.trap is None else (self.trap.impedance(frequency),)
        impedance = terminate(np.tensordot(weights, ports.impedance, 1), *loads).impedance
        judged = impedance if self.look is None else self.look(frequency, impedance)
        return Curve(frequency=frequency, impedance=impedance, swr=swr(judged, self.reference))

    def at(self, frequency: float) -> complex:
        """Return the feed impedance at a frequency in or near the band."""
        here = np.array([frequency])
        loads = () if self.trap is None else (self.trap.impedance(here),)
        return complex(terminate(self.ports.at(here).impedance, *loads).impedance[0])

    @cached_property
    def _wide_ports(self) -> Ports:
        nodes = chebyshev_nodes(self.band.low * WIDE[0], self.band.high * WIDE[1], WIDE_NODES)
        counts = plan(self.wire, self.band.target)
        return solve_ports(self.wire, nodes, counts, self.band.target, power=False, odd=False)

    @cached_property
    def far(self) -> Curve:
        """The band and what lies up to a quarter below and above it, solved when it is first asked for."""
        frequency = np.linspace(self.band.low * WIDE[0], self.band.high * WIDE[1], 4 * GRID)
        return self._curve(self._wide_ports, frequency)

    def _find_resonance(self) -> None:
        """Find where the reactance rises through zero nearest the aim, near the band or further out."""
        self.resonance: float | None = None
        self.resonance_resistance: float | None = None
        curve, i = self.near, _rising_zero(self.near, self.band.target)
        if i is None:
            curve, i = self.far, _rising_zero(self.far, self.band.target)
        if i is None:
            return
        start = min(max(i - 1, 0), curve.frequency.size - 4)
        f, z = curve.frequency[start : start + 4], curve.impedance[start : start + 4]
        low, step = f[i - start], f[1] - f[0]
        nodes = (f - low) / step
        reactance = z.imag / max(abs(z.imag).max(), 1e-12)
        # A few secant steps on the cubic through the four points around the crossing.
        a, b = 0.0, 1.0
        at = a - reactance[i - start] / (reactance[i - start + 1] - reactance[i - start])
        for _ in range(6):
            value = float(polynomial_weights(nodes, np.array([at]))[0] @ reactance)
            a, b = (at, b) if value < 0 else (a, at)
            slope = (float(polynomial_weights(nodes, np.array([at + 1e-4]))[0] @ reactance) - value) / 1e-4
            if abs(value) < 1e-12:
                break
            at = float(np.clip(at - value / slope, a, b))
        self.resonance = float(low + at * step)
        self.resonance_resistance = float(polynomial_weights(nodes, np.array([at]))[0] @ z.real)

    def _find_dip(self) -> tuple[float, float]:
        """Return where the SWR is least, and how much it is there.

        The square of the reflection is smooth where the SWR may have a corner: it takes the parabola.
        """
        curve, ports = self.near, self.ports
        i = int(np.argmin(curve.swr))
        if i in (0, curve.frequency.size - 1):
            further = int(np.argmin(self.far.swr))
            # A least value at the far edge too is no dip: then the nearest the band comes to one is given.
            if 0 < further < self.far.frequency.size - 1:
                curve, ports, i = self.far, self._wide_ports, further
        last = curve.frequency.size - 1
        i = min(max(i, 1), last - 1)
        f, s = curve.frequency[i - 1 : i + 2], curve.swr[i - 1 : i + 2]
        at, step = float(reflection.dip_among_three(f, s)), (f[1] - f[0]) / 8
        f = np.clip(at + step * np.array([-1.0, 0.0, 1.0, 0.0]), curve.frequency[0], curve.frequency[-1])
        s = self._curve(ports, f).swr
        if f[0] < f[1] < f[2]:
            f[3] = reflection.dip_among_three(f[:3], s[:3])
        close = self._curve(ports, f[3:])
        return float(close.frequency[0]), float(close.swr[0])

    def usable(self, limit: float) -> tuple[float, float] | None:
        """Return the contiguous range around the dip with the SWR under a limit; None above it."""
        if self.dip[1] > limit:
            return None
        edges: list[float | None] = [None, None]
        if self.low < self.dip[0] < self.high:
            edges = [self._edge(self.near, limit, -1), self._edge(self.near, limit, 1)]
        if None in edges:
            edges = [self._edge(self.far, limit, -1), self._edge(self.far, limit, 1)]
        ends = self.far.frequency if None in edges else self.near.frequency
        return edges[0] or float(ends[0]), edges[1] or float(ends[-1])

    def _edge(self, curve: Curve, limit: float, direction: int) -> float | None:
        """Return where the SWR first reaches the limit going one way from the dip; None if nowhere."""
        f, s = curve.frequency[::direction], curve.swr[::direction]
        above = np.flatnonzero((s > limit) & ((f - self.dip[0]) * direction > 0))
        if not above.size:
            return None
        i = above[0]
        f0, s0 = (f[i - 1], s[i - 1]) if i and (f[i - 1] - self.dip[0]) * direction > 0 else self.dip
        return float(f0 + (limit - s0) * (f[i] - f0) / (s[i] - s0))


def _rising_zero(curve: Curve, aim: float) -> int | None:
    """Return the interval, nearest the aim, in which the reactance rises through zero."""
    x = curve.impedance.imag
    found = np.flatnonzero((x[:-1] < 0) & (x[1:] >= 0))
    if not found.size:
        return None
    return int(found[np.argmin(np.abs(curve.frequency[found] - aim))])
