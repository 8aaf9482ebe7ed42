"""From readings of a trap and its parts to what it is, how sure that is, and what does not fit together.

Inductance and capacitance are sought together in their logarithms, each reading weighted by its doubt; what
the readings leave open stays open. What hung across the trap while it was measured is taken off again.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace

import numpy as np

from ...design.design import Design
from ...design.reading_kinds import Reading
from ...engine import fits
from ...engine.fits import Sweep
from ...engine.measured import Estimate, half_power_centre
from ...errors import NoAnswer
from ..trap import sweep_suspects
from ..trap.built import BuiltTrap, build
from ..trap.part_quality import half_power, quality
from ..trap.part_values import (
    PartsFound,
    ReadingRefused,
    ReadingsDisagree,
    Remark,
    Strain,
    SweepFit,
    unlikely,
)

METER_FREQUENCY = 100e3
"""Of a low-frequency inductance meter, unless said. [Hz]"""
GIVEN_COIL_DOUBT = 0.02
"""How much more a coil of unknown making may have at low frequency, relative. An estimate."""
ADDED_DOUBT, FIXTURE_DOUBT, LEAD_DOUBT = 0.01, 0.2, 0.3
UNSAID_FIXTURE, UNSAID_LEAD = 3e-11, 1e-8
"""Doubt of a fixture and of leads that nobody spoke of, about a centimetre each. [s], [H]"""
FARTHEST, FARTHEST_PART = 0.25, 3.0
"""Resonance this far from the computed one, or a part off by this factor, belongs to something else. [1]"""
PRIOR = 0.2
"""Doubt of the computed parts that the correction for a probe rests on, relative. An estimate. [1]"""
LONE = 0.2
"""Part of a resonance that may rest on the computed parts, and no more. [1]"""
VAGUE = 0.3
"""A value less sure than this counts as not told. [1]"""
LEAST_METER_INDUCTANCE = 1e-6
CABLE = "cable"
"""The kind of coil that is its own capacitor: neither can be read without the other."""
RESONANCES = ("trap.f0", "trap.f0_with")


@dataclass(frozen=True, kw_only=True)
class _Seen:
    """One equation for ln L and ln C: a resonance with capacitance across, or L, or C itself.

    `sigma` is relative; `typed` over `value` is what a correction made of it.
    """

    name: str
    dimension: str
    value: float
    sigma: float
    typed: float
    across: float = 0.0

    def residual(self, at: np.ndarray) -> float:
        """Return how far this reading is from the trap at (ln L, ln C), in its sigmas."""
        if self.dimension == "frequency":
            total = math.exp(at[1]) + self.across
            predicted = -0.5 * (at[0] + math.log(total)) - math.log(2 * math.pi)
        else:
            predicted = at[0] if self.dimension == "inductance" else at[1]
        return (predicted - math.log(self.value)) / self.sigma

    def slope(self, at: np.ndarray) -> np.ndarray:
        own = math.exp(at[1])
        row = {
            "frequency": (-0.5, -0.5 * own / (own + self.across)),
            "inductance": (1.0, 0.0),
            "capacitance": (0.0, 1.0),
        }
        return np.array(row[self.dimension]) / self.sigma

    def wanted(self, at: np.ndarray) -> float:
        return self.value * math.exp(self.residual(at) * self.sigma)


def find(design: Design, readings: Sequence[Reading], sweeps: Mapping[str, Sweep]) -> PartsFound:
    """Return what readings of a trap and its parts say of it; `sweeps` are by the file's name as typed.

    Raises ReadingRefused for one that cannot be used, ReadingsDisagree where no trap fits them, NoAnswer
    for a design without a trap.
    """
    if design.antenna.trap is None:
        raise NoAnswer("no_trap_to_build", "antenna.trap", {}, "add a table [antenna.trap]")
    computed = build(replace(design.antenna.trap, **_unmeasured(design)))
    if design.antenna.trap.coil.kind == CABLE:
        for reading in readings:
            if reading.subject in ("coil", "capacitor"):
                raise ReadingRefused("cable_is_both", reading.name)
    remarks: list[Remark] = []
    fitted = tuple(_fit(reading, sweeps, remarks) for reading in readings if reading.what == "sweep")
    for one in fitted:
        _hold_to_band(one.reading.name, one.fitted.values["resonance_hz"], computed.resonance)
    seen = [s for r in readings for s in _seen(r, computed, remarks)]
    seen += [s for one in fitted if one.used for s in _seen_in_sweep(one)]
    pair = half_power(readings)
    if pair is not None and not any(s.dimension == "frequency" for s in seen):
        seen.append(_centre(*pair))
    at, covariance = _solve(seen, computed)
    values = _values(seen, at, covariance)
    reactance = math.exp((at[0] - at[1]) / 2)
    resonance = values["resonance"].value if values["resonance"] else None
    q, loaded, told = quality(readings, pair, fitted, resonance, reactance, remarks)
    _check_parts(values, computed, fitted)
    names = {name: tuple(dict.fromkeys(_tellers(name, seen))) for name, v in values.items() if v}
    return PartsFound(
        **values,
        q=q,
        computed={
            "resonance": computed.resonance,
            "inductance": computed.inductance,
            "capacitance": computed.capacitance,
            "q": computed.q,
        },
        told_by=names | ({"q": told} if q else {}),
        loaded_q=loaded,
        fits=fitted,
        remarks=tuple(remarks),
    )


def _unmeasured(design: Design) -> dict[str, None]:
    """Return the change that takes earlier readings out of a trap, so that it is computed afresh."""
    return {"measured": None} if hasattr(design.antenna.trap, "measured") else {}


def _hold_to_band(name: str, resonance: float, computed: float) -> None:
    """Refuse a resonance that belongs to another band or another trap."""
    if abs(math.log(resonance / computed)) > math.log1p(FARTHEST):
        raise ReadingRefused("another_band", name, {"read_hz": resonance, "computed_hz": computed})


def _seen(reading: Reading, computed: BuiltTrap, remarks: list[Remark]) -> list[_Seen]:
    """Return what a reading says of L and C."""
    name = reading.name
    value = reading.value
    if not isinstance(value, float):
        return []
    sigma = reading.doubt.of(value) / value
    if name in RESONANCES:
        probe, added = reading.option("probe"), reading.option("added")
        total = computed.capacitance + probe + added
        if added:
            doubt = reading.option_doubt("added_doubt", ADDED_DOUBT).of(added)
            sigma = math.hypot(sigma, 0.5 * doubt / total)
        without = value * math.sqrt(total / computed.capacitance)
        _hold_to_band(name, without, computed.resonance)
        return [
            _Seen(
                name=name, dimension="frequency", value=value, typed=value, sigma=sigma, across=probe + added
            )
        ]
    if name == "coil.l":
        return [_low_frequency(reading, value, sigma, computed, remarks)]
    if name == "capacitor.c":
        least, own, most = computed.self_capacitance
        fitted = value - reading.option("probe")
        if fitted <= 0:
            raise ReadingRefused("probe_is_more_than_all", name, {"read_f": value})
        total = fitted + own
        _hold_to_part(name, total, computed.capacitance, "f")
        off = math.hypot(reading.doubt.of(value), (most - least) / 4)
        return [_Seen(name=name, dimension="capacitance", value=total, typed=value, sigma=off / total)]
    return []


def _low_frequency(
    reading: Reading, value: float, sigma: float, computed: BuiltTrap, remarks: list[Remark]
) -> _Seen:
    """Return the inductance at radio frequency from a meter's at low frequency."""
    at = reading.option("at", METER_FREQUENCY)
    if at > computed.resonance / 3:
        raise ReadingRefused("meter_near_resonance", reading.name, {"at_hz": at})
    _hold_to_part(reading.name, value, computed.inductance, "h")
    if value < LEAST_METER_INDUCTANCE:
        remarks.append(Remark(code="leads_of_the_meter", where=reading.name, value=value))
    if computed.wound is None:
        remarks.append(Remark(code="low_frequency_reads_high", where=reading.name, value=GIVEN_COIL_DOUBT))
        return _Seen(
            name=reading.name,
            dimension="inductance",
            value=value,
            typed=value,
            sigma=math.hypot(sigma, GIVEN_COIL_DOUBT),
        )
    there, here = (float(computed.circuit(np.array([f]))[0][0]) for f in (computed.resonance, at))
    drop = there / here
    remarks.append(Remark(code="brought_to_radio_frequency", where=reading.name, value=1 - drop))
    # The step between the frequencies is computed: half of it is a fair doubt of it.
    return _Seen(
        name=reading.name,
        dimension="inductance",
        value=value * drop,
        typed=value,
        sigma=math.hypot(sigma, (1 - drop) / 2),
    )


def _fit(reading: Reading, sweeps: Mapping[str, Sweep], remarks: list[Remark]) -> SweepFit:
    """Return the model fitted to a sweep, what fixture and leads are in doubt by being in its sigmas."""
    sweep = sweeps[str(reading.value)]
    wanted = "transmission" if reading.how == "through" else "reflection"
    if getattr(sweep, wanted) is None:
        raise ReadingRefused(f"no_{wanted}", reading.name)
    delay, lead, probe = (reading.option(name) for name in ("fixture", "lead", "probe"))
    try:
        fitted = sweep_suspects.fit(reading.how, sweep, delay, lead, probe)
    except ValueError:
        fitted = None
    if fitted is None or not sweep_suspects.resonates(reading.how, sweep, fitted):
        likely = sweep_suspects.suspects(reading.how, sweep, None, delay, lead)
        numbers = {"from_hz": float(sweep.frequency[0]), "to_hz": float(sweep.frequency[-1])}
        raise ReadingRefused("nothing_resonates", reading.name, numbers, likely)
    sigmas = {name: [sigma] for name, sigma in fitted.sigmas.items()}
    for change in _changes(reading, delay, lead):
        moved = sweep_suspects.fit(reading.how, sweep, **change, probe=probe)
        for name, value in moved.values.items():
            sigmas[name].append(value - fitted.values[name])
    sigmas["resonance_hz"].append(reading.doubt.of(fitted.values["resonance_hz"]))
    if reading.how == "loop" and fitted.values["coupling"] > fits.SMALL_LOOP:
        remarks.append(Remark(code="no_small_loop", where=reading.name, value=fitted.values["coupling"]))
    return SweepFit(
        reading=reading,
        fitted=fitted,
        estimates={
            name: Estimate(value=value, sigma=math.hypot(*sigmas[name]))
            for name, value in fitted.values.items()
        },
        suspects=() if fitted.holds else sweep_suspects.suspects(reading.how, sweep, fitted, delay, lead),
    )


def _changes(reading: Reading, delay: float, lead: float) -> list[dict[str, float]]:
    """Return fixture and leads as they might be, one standard deviation off, one after the other."""
    off = reading.option_doubt("fixture_doubt", FIXTURE_DOUBT).of(delay) if delay else UNSAID_FIXTURE
    changes = [{"delay": delay + off, "lead": lead}]
    if reading.how != "loop":
        off = reading.option_doubt("lead_doubt", LEAD_DOUBT).of(lead) if lead else UNSAID_LEAD
        changes.append({"delay": delay, "lead": lead + off})
    return changes


def _seen_in_sweep(one: SweepFit) -> list[_Seen]:
    names = {"resonance_hz": "frequency", "inductance_h": "inductance"}
    return [
        _Seen(
            name=one.reading.name,
            dimension=dimension,
            value=one.estimates[name].value,
            typed=one.estimates[name].value,
            sigma=one.estimates[name].sigma / one.estimates[name].value,
        )
        for name, dimension in names.items()
        if name in one.estimates
    ]


def _centre(low: Reading, high: Reading) -> _Seen:
    width = high.value - low.value
    centre = half_power_centre(low.value, high.value)
    off = math.hypot(low.doubt.of(low.value), high.doubt.of(high.value), 0.1 * width) / 2
    return _Seen(name="trap.low", dimension="frequency", value=centre, typed=centre, sigma=off / centre)


def _solve(seen: Sequence[_Seen], computed: BuiltTrap) -> tuple[np.ndarray, np.ndarray]:
    """Return (ln L, ln C) and their covariance; directions that nothing tells of stay as computed.

    Raises ReadingsDisagree where the readings are too far apart for their doubts.
    """
    start = np.log([computed.inductance, computed.capacitance])
    at, covariance, cost, freedom = _least_squares(seen, start)
    if freedom > 0 and cost > unlikely(freedom):
        strains = []
        for one in seen:
            rest = [other for other in seen if other is not one]
            there, _, left, free = _least_squares(rest, start)
            if not _determines(rest, one, there):
                continue
            strains.append(
                Strain(
                    name=one.name,
                    dimension=one.dimension,
                    given=one.typed,
                    wanted=one.wanted(there) * one.typed / one.value,
                    alone=free <= 0 or left <= unlikely(free),
                )
            )
        raise ReadingsDisagree(sorted(strains, key=lambda s: not s.alone))
    return at, covariance


def _least_squares(seen: Sequence[_Seen], start: np.ndarray) -> tuple[np.ndarray, np.ndarray, float, int]:
    """Return unknowns, covariance, sum of squares and degrees of freedom; least steps from the start."""
    at = start.copy()
    rank, covariance = 0, np.full((2, 2), np.inf)
    for _ in range(50 if seen else 0):
        slope = np.array([s.slope(at) for s in seen])
        left = np.array([s.residual(at) for s in seen])
        move, _, rank, _ = np.linalg.lstsq(slope, -left, rcond=1e-9)
        at = at + np.clip(move, -1.0, 1.0)
        if np.abs(move).max() < 1e-13:
            break
    if seen:
        slope = np.array([s.slope(at) for s in seen])
        inverse = np.linalg.pinv(slope, rcond=1e-9)
        covariance = inverse @ inverse.T
    left = np.array([s.residual(at) for s in seen])
    return at, covariance, float(left @ left), len(seen) - int(rank)


def _determines(seen: Sequence[_Seen], other: _Seen, at: np.ndarray) -> bool:
    """Return whether readings tell what another one should be."""
    if not seen:
        return False
    rows = np.array([s.slope(at) * s.sigma for s in seen])
    more = np.vstack([rows, other.slope(at) * other.sigma])
    return np.linalg.matrix_rank(more, tol=1e-6) == np.linalg.matrix_rank(rows, tol=1e-6)


_DIRECTIONS = {"resonance": (-0.5, -0.5), "inductance": (1.0, 0.0), "capacitance": (0.0, 1.0)}


def _values(seen: Sequence[_Seen], at: np.ndarray, covariance: np.ndarray) -> dict[str, Estimate | None]:
    """Return resonance, inductance and capacitance, None where nothing tells them."""
    found: dict[str, Estimate | None] = dict.fromkeys(_DIRECTIONS)
    if not seen:
        return found
    rows = np.array([s.slope(at) * s.sigma for s in seen])
    for name, direction in _DIRECTIONS.items():
        d = np.array(direction)
        fit = np.linalg.lstsq(rows.T, d, rcond=1e-9)[0]
        # A probe turns the direction of a lone resonance a little: that much rests on the computed parts.
        open_part = float(np.linalg.norm(rows.T @ fit - d))
        if open_part > (LONE if name == "resonance" else 1e-6):
            continue
        sigma = math.hypot(math.sqrt(float(d @ covariance @ d)), PRIOR * open_part)
        if sigma < VAGUE:
            value = math.exp(float(d @ at)) / (2 * math.pi if name == "resonance" else 1.0)
            found[name] = Estimate(value=value, sigma=sigma * value)
    return found


def _tellers(name: str, seen: Sequence[_Seen]) -> list[str]:
    direct = {"resonance": "frequency"}.get(name, name)
    alone = [s.name for s in seen if s.dimension == direct and s.across == 0.0]
    return [s.name for s in seen] if name != "resonance" or not alone else alone


def _check_parts(
    values: Mapping[str, Estimate | None], computed: BuiltTrap, fitted: Sequence[SweepFit]
) -> None:
    """Refuse parts that are off by a factor: a slipped unit, or another trap."""
    for name, one in values.items():
        if one is None:
            continue
        # Small angles taken for degrees that were radians scale the parts by as much, and still fit.
        factor = abs(math.log(one.value / getattr(computed, name)))
        swept = any(each.used and each.reading.how != "loop" for each in fitted)
        slipped = swept and abs(factor - math.log(math.degrees(1.0))) < math.log(1.5)
        suspects = ("angles_in_radians",) if slipped else ()
        _hold_to_part(f"antenna.trap.{name}", one.value, getattr(computed, name), _SUFFIXES[name], suspects)


_SUFFIXES = {"resonance": "hz", "inductance": "h", "capacitance": "f"}


def _hold_to_part(
    where: str, value: float, computed: float, suffix: str, suspects: tuple[str, ...] = ()
) -> None:
    if abs(math.log(value / computed)) > math.log(FARTHEST_PART):
        numbers = {f"read_{suffix}": value, f"computed_{suffix}": computed}
        raise ReadingRefused("another_part", where, numbers, suspects)
