"""Antennas with something broken or mixed up, solved from scratch like the sound ones."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np

from tests.hung_antenna import Hung, World
from trapdesk.design.reading_kinds import Doubt, Interval, Reading

WIDE = World(wide=0.24)
STUB = 0.02


@dataclass(frozen=True, kw_only=True)
class Broken:
    """What is different: the wires of both sides (a list of dicts), or what the traps are to the wire."""

    wires: Callable[[list[dict[str, float]]], list[dict[str, float]]] = lambda sides: sides
    traps: Callable[[np.ndarray, list[np.ndarray]], list[np.ndarray]] = lambda frequency, own: own

    def lengths(self, sides):
        return self.wires([dict(side) for side in sides])

    def loads(self, frequency, own):
        return self.traps(frequency, list(own))


def _set(first, second):
    def traps(frequency, own):
        return [o if v is None else np.full_like(o, v) for v, o in zip((first, second), own, strict=True)]

    return traps


def _across(shift, q_left, capacitance, q, both):
    def traps(frequency, own):
        w = 2 * np.pi * frequency
        more = 1j * w * capacitance * (1 / (1 + shift) ** 2 - 1) + (1 / q_left - 1) / q * w * capacitance
        return [1 / (1 / o + more) if both or i == 0 else o for i, o in enumerate(own)]

    return traps


def _missing(sides):
    return [{**sides[0], "end": STUB}, sides[1]]


def make(code, ensemble, random):
    """Return a broken antenna's difference; sizes are drawn where a fault has one."""
    c, q = ensemble.trap.capacitance, ensemble.trap.q
    shift = random.uniform(0.02, 0.06)
    left = random.uniform(0.1, 0.4)
    share, by = random.uniform(0.15, 0.75), random.choice([1.0, -1.0, 0.3048, -0.3048])
    swap = lambda side: {"inner": side["end"], "end": side["inner"]}  # noqa: E731
    made = {
        "trap_shorted_one": Broken(traps=_set(0.1, None)),
        "trap_shorted_both": Broken(traps=_set(0.1, 0.1)),
        "trap_open_one": Broken(traps=_set(1e8, None)),
        "trap_open_both": Broken(traps=_set(1e8, 1e8)),
        "trap_open_and_shorted": Broken(traps=_set(1e8, 0.1)),
        "end_wire_missing": Broken(wires=_missing, traps=_set(1e8, None)),
        "end_wire_broken": Broken(wires=lambda s: [{**s[0], "end": share * s[0]["end"]}, s[1]]),
        "wires_swapped_both": Broken(wires=lambda s: [swap(s[0]), swap(s[1])]),
        "wires_swapped_one": Broken(wires=lambda s: [swap(s[0]), s[1]]),
        "water_one": Broken(traps=_across(-shift, left, c, q, False)),
        "water_both": Broken(traps=_across(-shift, left, c, q, True)),
        "unequal_traps": Broken(traps=_across(random.choice([-1, 1]) * shift, 1.0, c, q, False)),
        "traps_off": Broken(traps=_across(random.choice([-1, 1]) * shift, 1.0, c, q, True)),
        "slipped_inner": Broken(wires=lambda s: [{**x, "inner": max(x["inner"] + by, 0.3)} for x in s]),
        "slipped_end": Broken(wires=lambda s: [{**x, "end": max(x["end"] + by, 0.3)} for x in s]),
    }
    return made[code]


def readings_of(code, ensemble, random, read):
    """Return readings of one broken antenna, or of a sound one for an empty code."""
    hung = Hung(
        ensemble, random, WIDE, broken=make(code, ensemble, random) if code and code != "wrong_band" else None
    )
    view = hung.hang({})
    found = []
    for reading in view.read_dips(random):
        span = view.span(reading.subject)
        if span[4] < reading.value < span[-5]:
            found.append(reading)
            continue
        # No dip far and wide: that is what the meter shows inside the band.
        band = dict(ensemble.design.bands.items())[reading.subject]
        off_scale = Interval(low=3.0, high=math.inf)
        found.append(
            Reading(
                subject=reading.subject, what="swr", value=off_scale, typed="3..", doubt=Doubt(relative=0.08),
                frequency=band.target,
            )
        )  # fmt: skip
    if read != "dips":
        found += view.read_meter(random, places=2)
    if code == "wrong_band":
        other = {"upper": "lower", "lower": "upper"}
        found = [replace(r, subject=other[r.subject]) for r in found]
    return tuple(found)
