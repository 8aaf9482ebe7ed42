"""Capacitors put together from their parts: impedance, what each carries, tolerance, drift."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from typing import Any

import numpy as np

from ...design.capacitor_kinds import (
    AnyCapacitor,
    GivenCapacitor,
    ParallelCapacitors,
    SeriesCapacitors,
    SingleCapacitor,
    StubCapacitor,
)
from ...design.coil_kinds import CableCoil
from ...design.fields import SOLVE
from ...design.parts import solvable
from ...engine import capacitors as engine
from ...engine.cable_list import CABLES
from ...engine.cable_types import cable_line, loss_constants
from ...engine.cables import Line
from ...engine.dielectrics import DIELECTRICS
from ...errors import NoAnswer

WHERE = "antenna.trap.capacitor"
UNSAID_TOLERANCE = 0.05
"""Tolerance of a capacitor nobody says anything of. [1], common practice, no source"""


@dataclass(frozen=True, kw_only=True)
class Limits:
    """What a part stands: peak voltage [V], current [A rms], heat [W], peak flux density [T]; None: unknown.

    `reach` is the largest voltage inside it over that at its ends.
    """

    voltage: float | None = None
    current: float | None = None
    heat: float | None = None
    flux: float | None = None
    reach: Callable[[np.ndarray], np.ndarray] | None = None


@dataclass(frozen=True, kw_only=True)
class FittedCapacitor:
    """One capacitor, or equal ones side by side.

    `key` is its place in the design, `tolerance` the relative error down and up, None where nobody said;
    `loss_source` says where its loss comes from. `length` is that of a stub.
    """

    key: str
    name: str
    impedance: Callable[[Any], Any]
    limits: Limits
    tolerance: tuple[float, float] | None = None
    drift: float | None = None
    drift_doubt: float = 0.0
    varies: tuple[float, float] | None = None
    loss_source: str = "given"
    pieces: int = 1
    length: float | None = None
    line: Line | None = None

    def shares(self, frequency: np.ndarray) -> Iterator[tuple[FittedCapacitor, np.ndarray, np.ndarray]]:
        """Yield every capacitor with its volts and amps per volt across the whole."""
        yield self, np.ones_like(frequency), 1 / np.abs(self.impedance(frequency))


@dataclass(frozen=True, kw_only=True)
class Joined:
    """Capacitors in series or side by side."""

    key: str
    in_series: bool
    members: tuple[FittedCapacitor | Joined, ...]

    def impedance(self, frequency: Any) -> Any:
        """Return the impedance of all of it, in ohm."""
        each = [member.impedance(frequency) for member in self.members]
        return sum(each) if self.in_series else 1 / sum(1 / z for z in each)

    def shares(self, frequency: np.ndarray) -> Iterator[tuple[FittedCapacitor, np.ndarray, np.ndarray]]:
        """Yield every capacitor with its volts and amps per volt across the whole."""
        whole = np.abs(self.impedance(frequency))
        for member in self.members:
            volts = np.abs(member.impedance(frequency)) / whole if self.in_series else np.ones_like(whole)
            for part, share, amps in member.shares(frequency):
                yield part, share * volts, amps * volts


BuiltCapacitor = FittedCapacitor | Joined


def capacitance_of(impedance: Any, frequency: Any) -> Any:
    """Return the capacitance a reactance is at a frequency."""
    return -1 / (2 * np.pi * frequency * np.imag(impedance))


def is_open(part: AnyCapacitor) -> bool:
    """Return whether something in a capacitor is to be solved."""
    return any(value is SOLVE for _, value in solvable(part, ""))


def build_capacitor(
    part: AnyCapacitor, key: str = WHERE, frequency: float | None = None, reactance: float | None = None
) -> BuiltCapacitor:
    """Return a capacitor put together; what is solved in it makes up the reactance [ohm] at a frequency."""
    return BUILDERS[type(part)](part, key, frequency, reactance)


def _given(
    part: GivenCapacitor, key: str, frequency: float | None, reactance: float | None
) -> FittedCapacitor:
    capacitance = part.capacitance
    if capacitance is SOLVE:
        capacitance = 1 / (2 * math.pi * frequency * reactance)
    z = _lossy(capacitance, 1 / part.q if part.q else 0.0)
    return FittedCapacitor(
        key=key,
        name=key.rpartition(".")[2],
        impedance=z,
        limits=Limits(voltage=part.voltage, current=part.current, heat=part.heat),
        drift=part.drift,
        loss_source="given" if part.q else "none",
    )


def _lossy(capacitance: float, loss_tangent: float) -> Callable[[Any], Any]:
    # With a constant loss tangent all of it goes with 1/f.
    at_one_hertz = engine.lossy_impedance(1.0, capacitance, loss_tangent)
    return lambda frequency: at_one_hertz / frequency


def _single(
    part: SingleCapacitor, key: str, frequency: float | None, reactance: float | None
) -> FittedCapacitor:
    said, pieces = part.print, int(part.count)
    dielectric = DIELECTRICS["ceramic, class 2" if said.varies else part.dielectric]
    loss, source = part.loss_tangent, "given"
    if loss is None:
        loss, source = dielectric.loss_tangent, dielectric.source
        if dielectric is DIELECTRICS["ceramic"]:
            loss = 1 / float(engine.ceramic_q(said.capacitance))
    voltage, current, heat = part.voltage or said.voltage, part.current, part.heat
    return FittedCapacitor(
        key=key,
        name=said.text,
        impedance=_lossy(said.capacitance * pieces, loss),
        limits=Limits(
            voltage=voltage,
            current=None if current is None else current * pieces,
            heat=None if heat is None else heat * pieces,
        ),
        tolerance=said.tolerance,
        drift=said.drift if part.drift is None else part.drift,
        drift_doubt=said.drift_doubt or 0.0,
        varies=said.varies,
        loss_source=source,
        pieces=pieces,
    )


def line_of(part: StubCapacitor | CableCoil) -> Line:
    """Return the line of a cable kind, its listed numbers replaced by those given."""
    listed = CABLES[part.cable]
    line = cable_line(listed)
    skin, dielectric = line.skin_loss, line.dielectric_loss
    if part.loss is not None:
        skin, dielectric = loss_constants(part.loss_at, part.loss)
    return Line(
        z0=part.impedance or listed.z0,
        velocity_factor=part.velocity_factor or listed.velocity_factor,
        skin_loss=skin,
        dielectric_loss=dielectric,
    )


def cable_rating(part: StubCapacitor | CableCoil) -> float | None:
    """Return the peak voltage a cable stands: given, or that to work by of its specification."""
    working = CABLES[part.cable].working_voltage
    return part.voltage or (None if working is None else math.sqrt(2) * working)


def _stub(part: StubCapacitor, key: str, frequency: float | None, reactance: float | None) -> FittedCapacitor:
    line, length = line_of(part), part.length
    if length is SOLVE:
        length = float(engine.stub_length(frequency, line, reactance))
    return FittedCapacitor(
        key=key,
        name=f"stub of {part.cable}",
        impedance=lambda f: engine.stub_impedance(f, line, length),
        limits=Limits(voltage=cable_rating(part), reach=lambda f: engine.stub_end_voltage(f, line, length)),
        drift=part.drift,
        loss_source="given" if part.loss is not None else CABLES[part.cable].source,
        length=length,
        line=line,
    )


def _joined(
    part: SeriesCapacitors | ParallelCapacitors, key: str, frequency: float | None, reactance: float | None
) -> Joined:
    in_series = isinstance(part, SeriesCapacitors)
    built: dict[int, BuiltCapacitor] = {}
    left = None
    waiting = None
    for place, member in enumerate(part.members, start=1):
        if is_open(member):
            waiting = place
        else:
            built[place] = build_capacitor(member, f"{key}.members.{place}")
    if waiting is not None:
        others = [-float(np.imag(member.impedance(frequency))) for member in built.values()]
        if in_series:
            left = reactance - sum(others)
        else:
            admittance = 1 / reactance - sum(1 / x for x in others)
            left = 1 / admittance if admittance > 0 else -1.0
        where = f"{key}.members.{waiting}"
        if not left > 0:
            numbers = {
                "wanted_f": 1 / (2 * math.pi * frequency * reactance),
                "others_f": 1
                / (2 * math.pi * frequency * (sum(others) if in_series else 1 / sum(1 / x for x in others))),
            }
            help = "larger members" if in_series else "smaller members"
            raise NoAnswer("no_capacitor_makes_up_the_rest", where, numbers, help)
        built[waiting] = build_capacitor(part.members[waiting - 1], where, frequency, left)
    return Joined(key=key, in_series=in_series, members=tuple(built[n] for n in sorted(built)))


BUILDERS: dict[type, Callable[[Any, str, float | None, float | None], BuiltCapacitor]] = {
    GivenCapacitor: _given,
    SingleCapacitor: _single,
    StubCapacitor: _stub,
    SeriesCapacitors: _joined,
    ParallelCapacitors: _joined,
}


def weights(built: BuiltCapacitor, frequency: float) -> list[tuple[FittedCapacitor, float]]:
    """Return every capacitor with the share of the whole's relative change that its own makes."""
    at = np.float64(frequency)
    # A part's reactive power over that of the whole is how much the whole follows it.
    whole = 1 / abs(complex(built.impedance(at)))
    return [(part, float(volts * amps / whole)) for part, volts, amps in built.shares(at)]


def tolerance_of(built: BuiltCapacitor, frequency: float) -> tuple[float, float] | None:
    """Return how far the whole may be off at worst, down and up; None where nobody said of any part."""
    found = [(part.tolerance, weight) for part, weight in weights(built, frequency)]
    if all(tolerance is None for tolerance, _ in found):
        return None
    down, up = (sum(weight * (t[n] if t else 0.0) for t, weight in found) for n in (0, 1))
    return down, up


def drift_of(built: BuiltCapacitor, frequency: float) -> tuple[float, float, bool]:
    """Return the whole's temperature coefficient, its doubt, and whether that of every part is known."""
    found = weights(built, frequency)
    drift = sum(weight * (part.drift or 0.0) for part, weight in found)
    doubt = sum(weight * part.drift_doubt for part, weight in found)
    return drift, doubt, all(part.drift is not None for part, _ in found)


def varies_of(built: BuiltCapacitor, frequency: float) -> float:
    """Return how far the whole may go either way over temperature for class 2 ceramics in it, relative."""
    found = weights(built, frequency)
    return sum(weight * max(part.varies) for part, weight in found if part.varies is not None)
