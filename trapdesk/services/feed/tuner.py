"""A tuner's settings for a load: least loss within its limits, what each element bears, how touchy it is."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from ...design.station import TUNER_NETWORKS, Tuner, TunerCapacitor, TunerCoil
from ...engine.arms import Kind, Problem
from ...engine.ladder import Carried, carried
from ...engine.nearest import best_setting, snap
from ...engine.networks import NETWORKS, Network, ladder_of, touchiness
from ...engine.reflection import swr
from ...engine.spans import ArmLimits

MOST_COMBINATIONS = 4096
"""Combinations of steps that are tried; with more, only steps near the best setting without steps are."""
LEAST = 1e-15
"""Stands for a part at nothing, which a switch takes out. [H], [F]"""


@dataclass(frozen=True, kw_only=True)
class Element:
    """One element of a tuner as it is set, from the transmitter to the antenna.

    `value` in H or F, `low` and `high` what it can be, `step` its position counted from 1 where it has steps.
    For one watt into the tuner: `volts` peak and `amps` rms; `share` is the part of the power it turns to
    heat. `touch` is by how much of itself the SWR rises when it is 1 % off.
    """

    kind: str
    place: str
    value: float
    low: float
    high: float
    step: int | None
    volts: float
    amps: float
    share: float
    touch: float
    voltage: float | None
    current: float | None


@dataclass(frozen=True, kw_only=True)
class Short:
    """What stands in the way of a match: an element, the value it would need and the limit it breaks."""

    element: int
    kind: str
    place: str
    needed: float
    limit: float


@dataclass(frozen=True, kw_only=True)
class TunerSetting:
    """A tuner set for one load at one frequency. Without a match it is the nearest setting there is."""

    tuner: Tuner
    network: str
    frequency: float
    load: complex
    wanted: float
    values: tuple[float, ...]
    matched: bool
    impedance: complex
    swr: float
    efficiency: float
    elements: tuple[Element, ...]
    short: Short | None

    @property
    def loss(self) -> float:
        """Loss in dB."""
        return float(-10 * np.log10(self.efficiency))


@dataclass(frozen=True, kw_only=True)
class Tuned:
    """A tuner over many loads, arrays (n,).

    Shares of the power into it: what passes, what the hottest coil and capacitor take. For one watt into it
    the highest peak volts on a coil and on a capacitor.
    """

    matched: np.ndarray
    impedance: np.ndarray
    efficiency: np.ndarray
    coil_share: np.ndarray
    capacitor_share: np.ndarray
    coil_volts: np.ndarray
    capacitor_volts: np.ndarray
    all_coils: np.ndarray
    all_capacitors: np.ndarray


def parts_of(tuner: Tuner, network: Network) -> tuple[TunerCoil | TunerCapacitor, ...]:
    """Return what the arms of a network are made of, from the transmitter to the antenna."""
    chosen, seen = [], set()
    for arm in network.arms:
        first, second = (
            (tuner.coil, tuner.load_coil)
            if arm.kind is Kind.COIL
            else (tuner.capacitor, tuner.load_capacitor)
        )
        chosen.append(second if arm.kind in seen and second is not None else first)
        seen.add(arm.kind)
    return tuple(chosen)


def limits_of(tuner: Tuner, network: Network) -> ArmLimits:
    """Return the limits of a network's arms."""
    found = parts_of(tuner, network)
    return ArmLimits(low=tuple(_low(p) for p in found), high=tuple(_high(p) for p in found))


def _low(part: TunerCoil | TunerCapacitor) -> float:
    taps = getattr(part, "taps", ())
    return min(tap.inductance for tap in taps) if taps else part.low


def _high(part: TunerCoil | TunerCapacitor) -> float:
    taps = getattr(part, "taps", ())
    return max(tap.inductance for tap in taps) if taps else part.high


def steps_of(part: TunerCoil | TunerCapacitor) -> np.ndarray | None:
    """Return the values a part can be set to, None where it can be set to any."""
    taps = getattr(part, "taps", ())
    if taps:
        return np.array(sorted(tap.inductance for tap in taps))
    if part.steps is None:
        return None
    return np.maximum(np.linspace(part.low, part.high, round(part.steps)), LEAST)


def problem_of(
    tuner: Tuner, frequency: np.ndarray | float, load: np.ndarray | complex, wanted: float
) -> Problem:
    """Return what a tuner is to do."""
    return Problem(
        frequency=frequency, load=load, wanted=wanted, coil_q=tuner.coil.q, capacitor_q=tuner.capacitor.q
    )


def _best(tuner: Tuner, problem: Problem) -> tuple[list[Network], np.ndarray, list]:
    """Return the circuits of a tuner, which is best for each load (n,), and the settings of each."""
    networks = [NETWORKS[name] for name in TUNER_NETWORKS[tuner.network]]
    settings = [best_setting(network, problem, limits_of(tuner, network)) for network in networks]
    if len(networks) == 1:
        return networks, np.zeros(problem.shape, int), settings
    # What matches comes before what does not, then the least loss, else the least SWR.
    cost = np.stack([np.where(s.matched, s.loss_db, 1e6 + s.swr) for s in settings])
    return networks, np.argmin(cost, axis=0), settings


def tune(tuner: Tuner, frequency: np.ndarray, load: np.ndarray, wanted: float) -> Tuned:
    """Return a tuner set for each of many loads (n,), as if it had no steps."""
    problem = problem_of(tuner, frequency, load, wanted)
    networks, chosen, settings = _best(tuner, problem)
    found = [
        _tuned(network, carried(ladder_of(network, s.values, problem), load), s.matched)
        for network, s in zip(networks, settings, strict=True)
    ]
    if len(found) == 1:
        return found[0]
    names = Tuned.__dataclass_fields__
    return Tuned(**{name: np.choose(chosen, [getattr(each, name) for each in found]) for name in names})


def _tuned(network: Network, bears: Carried, matched: np.ndarray) -> Tuned:
    def of(kind: Kind, values: np.ndarray, gather: Callable) -> np.ndarray:
        mine = [i for i, arm in enumerate(network.arms) if arm.kind is kind]
        return gather(values[mine], axis=0) if mine else np.zeros(values.shape[1:])

    peak = np.sqrt(2) * bears.voltages
    return Tuned(
        matched=np.broadcast_to(matched, np.shape(bears.efficiency)),
        impedance=bears.input_impedance,
        efficiency=bears.efficiency,
        coil_share=of(Kind.COIL, bears.powers, np.max),
        capacitor_share=of(Kind.CAPACITOR, bears.powers, np.max),
        coil_volts=of(Kind.COIL, peak, np.max),
        capacitor_volts=of(Kind.CAPACITOR, peak, np.max),
        all_coils=of(Kind.COIL, bears.powers, np.sum),
        all_capacitors=of(Kind.CAPACITOR, bears.powers, np.sum),
    )


def tune_at(tuner: Tuner, frequency: float, load: complex, wanted: float) -> TunerSetting:
    """Return a tuner set for one load: the least loss of all its matches, else the least SWR."""
    return tune_all(tuner, np.array([frequency]), np.array([load]), wanted)[0]


def tune_all(
    tuner: Tuner, frequency: np.ndarray, load: np.ndarray, wanted: float
) -> tuple[TunerSetting, ...]:
    """Return a tuner set for each of a few loads (n,), with its steps."""
    problem = problem_of(tuner, frequency, load, wanted)
    networks, chosen, settings = _best(tuner, problem)
    found = []
    for i, (f, z) in enumerate(zip(frequency.tolist(), load.tolist(), strict=True)):
        one = problem_of(tuner, f, z, wanted)
        tries = range(len(networks)) if _has_steps(tuner, networks) else (int(chosen[i]),)
        candidates = [_one(tuner, networks[k], one, settings[k], i) for k in tries]
        found.append(min(candidates, key=lambda s: s.swr))
    return tuple(found)


def _has_steps(tuner: Tuner, networks: list[Network]) -> bool:
    return any(steps_of(part) is not None for network in networks for part in parts_of(tuner, network))


GOOD_MATCH = 1.5
"""SWR up to which a tuner with steps counts as matched: an estimate, no source."""


def _one(tuner: Tuner, network: Network, problem: Problem, settings, i: int) -> TunerSetting:  # noqa: ANN001
    """Return one setting with all there is to say of it."""
    values = settings.values[:, i]
    found = parts_of(tuner, network)
    steps = [steps_of(part) for part in found]
    matched = bool(settings.matched[i])
    stepped = any(each is not None for each in steps)
    if stepped:
        values, ratio = snap(network, problem, limits_of(tuner, network), _near(steps, values))
        matched = bool(ratio <= GOOD_MATCH)
    bears = carried(ladder_of(network, values, problem), problem.load)
    touch = touchiness(network, np.maximum(values, LEAST), problem)
    elements = tuple(
        Element(
            kind=str(arm.kind),
            place=str(arm.place),
            value=float(values[k]),
            low=_low(part),
            high=_high(part),
            step=None if steps[k] is None else int(np.argmin(np.abs(steps[k] - values[k]))) + 1,
            volts=float(np.sqrt(2) * bears.voltages[k]),
            amps=float(bears.currents[k]),
            share=float(bears.powers[k]),
            touch=float(touch[k]),
            voltage=part.voltage,
            current=part.current,
        )
        for k, (arm, part) in enumerate(zip(network.arms, found, strict=True))
    )
    arm = int(settings.short_arm[i])
    short = None
    if not settings.matched[i] and arm >= 0:
        short = Short(
            element=arm,
            kind=elements[arm].kind,
            place=elements[arm].place,
            needed=float(settings.needed[i]),
            limit=float(settings.limit[i]),
        )
    return TunerSetting(
        tuner=tuner,
        network=next(name for name, known in NETWORKS.items() if known is network),
        frequency=float(problem.frequency),
        load=complex(problem.load),
        wanted=float(np.real(problem.wanted)),
        values=tuple(float(v) for v in values),
        matched=matched,
        impedance=complex(bears.input_impedance),
        swr=float(swr(bears.input_impedance, problem.wanted)),
        efficiency=float(bears.efficiency),
        elements=elements,
        short=short,
    )


def _near(steps: list[np.ndarray | None], values: np.ndarray) -> list[np.ndarray | None]:
    """Return the steps to try: all, or those nearest the values where all would be too many."""
    stepped = [each for each in steps if each is not None]
    if np.prod([float(each.size) for each in stepped]) <= MOST_COMBINATIONS:
        return steps
    most = int(MOST_COMBINATIONS ** (1 / len(stepped)))
    near = []
    for each, value in zip(steps, values, strict=True):
        if each is None or each.size <= most:
            near.append(each)
            continue
        nearest = np.sort(np.argsort(np.abs(each - value), kind="stable")[:most])
        near.append(each[nearest])
    return near


def _ladder_over(setting: TunerSetting, frequency: np.ndarray, load: np.ndarray) -> tuple[Network, Carried]:
    network = NETWORKS[setting.network]
    problem = problem_of(setting.tuner, frequency, load, setting.wanted)
    values = np.array(setting.values)[:, None] * np.ones(np.shape(frequency))
    return network, carried(ladder_of(network, values, problem), load)


def setting_seen(setting: TunerSetting, frequency: np.ndarray, load: np.ndarray) -> np.ndarray:
    """Return what a tuner left as it is set makes of loads over frequency (n,)."""
    shape = np.shape(frequency)
    return _ladder_over(setting, np.atleast_1d(frequency), np.atleast_1d(load))[1].input_impedance.reshape(
        shape
    )


def setting_share(setting: TunerSetting, frequency: np.ndarray, load: np.ndarray) -> Tuned:
    """Return a tuner left as it is set over many loads (n,)."""
    network, bears = _ladder_over(setting, frequency, load)
    ratio = swr(bears.input_impedance, setting.wanted)
    return _tuned(network, bears, ratio <= GOOD_MATCH)
