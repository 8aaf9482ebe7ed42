"""A load of one's own: every way to match it, network by network, with what each part bears."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

import numpy as np

from ...engine.arms import Kind, LineConstants, Problem
from ...engine.cables import Line, propagation
from ...engine.ladder import carried
from ...engine.networks import NETWORKS, MatchStatus, ladder_of, match, touchiness
from ...engine.reflection import swr

LINE_KINDS = (Kind.OPEN_STUB, Kind.SHORTED_STUB, Kind.LINE)


@dataclass(frozen=True, kw_only=True)
class MatchedPart:
    """A part of a network, from the source to the load: its value with loss and without.

    Values are in H, F or m; `volts` peak, `amps` rms and `watts` at the stated power; of a stretch of line
    volts and amps are those at its end towards the source.
    """

    kind: str
    place: str
    value: float
    lossless: float
    volts: float
    amps: float
    watts: float
    touch: float


@dataclass(frozen=True, kw_only=True)
class Solution:
    """One way to match a load: power lost [dB], SWR with its loss, and with the values found without loss."""

    network: str
    parts: tuple[MatchedPart, ...]
    loss: float
    swr: float
    not_retuned: float


@dataclass(frozen=True, kw_only=True)
class NotMatched:
    """A network that does not match a load, and whether it would with other kinds of parts in its places."""

    network: str
    other_kinds: bool


def with_line(names: Iterable[str]) -> list[str]:
    """Return those of some networks that have line in them."""
    return [name for name in names if any(arm.kind in LINE_KINDS for arm in NETWORKS[name].arms)]


def solutions(
    name: str,
    frequency: float,
    load: complex,
    wanted: complex,
    *,
    coil_q: float,
    capacitor_q: float,
    power: float,
    quality: float | None = None,
    line: Line | None = None,
) -> tuple[tuple[Solution, ...], NotMatched | None]:
    """Return every way in which a network matches a load with loss, least loss first; or why there is none.

    `quality` is wanted by networks of three arms, `line` by those of line.
    """
    network = NETWORKS[name]
    constants = None
    if line is not None:
        gamma, impedance = propagation(line, frequency)
        constants = LineConstants(gamma=complex(gamma), impedance=complex(impedance))
    problem = Problem(
        frequency=frequency, load=load, wanted=wanted, coil_q=coil_q, capacitor_q=capacitor_q, line=constants
    )
    choice = quality if len(network.arms) == 3 else None
    lossy, plain = match(network, problem, choice), match(network, problem.lossless(), choice)
    found = []
    for values, bare in zip(lossy.values, plain.values, strict=True):
        if np.any(np.isnan(values)):
            continue
        bears = carried(ladder_of(network, values, problem), load, power)
        touch = touchiness(network, values, problem)
        kept = carried(ladder_of(network, bare, problem), load) if not np.any(np.isnan(bare)) else None
        found.append(
            Solution(
                network=name,
                parts=tuple(
                    MatchedPart(
                        kind=str(arm.kind),
                        place=str(arm.place),
                        value=float(values[k]),
                        lossless=float(bare[k]),
                        volts=float(np.sqrt(2) * bears.voltages[k]),
                        amps=float(bears.currents[k]),
                        watts=float(bears.powers[k]),
                        touch=float(touch[k]),
                    )
                    for k, arm in enumerate(network.arms)
                ),
                loss=float(bears.loss_db),
                swr=float(swr(bears.input_impedance, wanted)),
                not_retuned=float("nan") if kept is None else float(swr(kept.input_impedance, wanted)),
            )
        )
    found.sort(key=lambda one: one.loss)
    if found:
        return tuple(found), None
    return (), NotMatched(network=name, other_kinds=bool(lossy.status == MatchStatus.OTHER_KINDS))
