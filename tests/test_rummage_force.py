"""Ranking of a rummage against trying everything by force, every antenna by the full solve."""

import math
from collections.abc import Callable, Iterator
from dataclasses import dataclass, replace
from functools import cache
from itertools import pairwise

import numpy as np
import pytest
from scipy.optimize import brentq

from tests.test_rummage import by_hand, finished, preset
from trapdesk.design.box import Box, Cable, Capacitor, Core, Former, Wire
from trapdesk.design.capacitor_kinds import GivenCapacitor
from trapdesk.design.coil_kinds import GivenCoil
from trapdesk.design.fields import SOLVE
from trapdesk.design.parts import Trap
from trapdesk.engine.cable_list import Terminals
from trapdesk.errors import NoAnswer
from trapdesk.services.antenna.solve import solve
from trapdesk.services.box.combos import STUB_DOUBT
from trapdesk.services.box.offers import END_ROOM, RING_ROOM, SNIP_STEP, SPREAD
from trapdesk.services.box.parts import cable_part, capacitor_part, solenoid_part, stub_part, toroid_part
from trapdesk.services.box.scoring import cost
from trapdesk.services.box.winders import SPACINGS
from trapdesk.services.trap.built import build, wanted_resonance
from trapdesk.services.trap.coils import COIL_DOUBT, CUT_TAIL

LEAST, MOST = 70.0, 640.0
"""Reactances within which traps are sought. [ohm]"""


@dataclass(frozen=True, kw_only=True)
class Try:
    """A trap that may be built: what is known of its cost before the antenna is solved, and its rating."""

    pair: tuple[str, str, str]
    shows: tuple
    trap: Trap
    length: float
    body: float
    volts: float
    fixed: dict

    def bound(self, least_losses) -> float:
        """What it costs at least: what the trap surely takes; width and volts cost nothing below nothing."""
        losses = least_losses(build(self.trap))
        return float(cost(losses=losses, fillings=[0], volts_share=0.0, rated=True, **self.fixed).total)


def small_box(seed):
    random = np.random.default_rng(seed)
    diameters = random.choice([0.04, 0.05, 0.063, 0.075, 0.09], 3, replace=False)
    wires = random.choice([1.25e-3, 1.4e-3, 1.6e-3, 1.8e-3, 2e-3], 3, replace=False)
    values = random.choice([15, 22, 27, 33, 39, 47, 56, 68, 82, 100], 6, replace=False)
    counts = random.permutation([2, 2, 2, 1, 1, 1])
    return Box(
        formers=tuple(
            Former(name=f"f{i}", diameter=float(d), length=float(random.uniform(0.032, 0.042)), count=2)
            for i, d in enumerate(diameters)
        ),
        wires=tuple(
            Wire(
                name=f"w{i}", diameter=float(d), coating=float(0.03 * d), length=float(random.uniform(4, 12))
            )
            for i, d in enumerate(wires)
        ),
        capacitors=tuple(
            Capacitor(
                capacitance=float(c) * 1e-12,
                tolerance=float(random.choice([0.02, 0.05, 0.1])),
                voltage=float(random.choice([500, 1000, 2000, 3000])),
                q=float(random.choice([500, 1000, 2000])),
                count=float(n),
            )
            for c, n in zip(values, counts, strict=True)
        ),
    )


def mixed_box(seed):
    """Return a box of which every kind of trap can be built; its former takes whole turns."""
    random = np.random.default_rng(seed)
    small = small_box(seed)
    former = replace(small.formers[0], length=0.045, turn_step="whole")
    cable = Cable(
        name="c0",
        impedance=float(random.choice([50.0, 75.0])),
        velocity_factor=0.66,
        outside=5e-3,
        shield=3.6e-3,
        loss=float(random.uniform(0.06, 0.12)),
        loss_at=30e6,
        voltage=2e3,
        length=8.0,
    )
    core = Core(
        name="r0", inductance_index=4.9e-9, outer=0.05, inner=0.032, height=0.014,
        q=float(random.uniform(150, 250)), count=2,
    )  # fmt: skip
    return replace(small, formers=(former,), wires=small.wires[:2], cables=(cable,), cores=(core,))


def force(design, box, most):
    """Return the best of each former or core and wire, the best `most` of them, all by full solves.

    What costs more than the best already found before its antenna is solved need not be solved.
    """
    wanted, found = wanted_resonance(design.antenna.trap), {}
    least = least_losses(design, wanted)
    bounds = [(one.bound(least), place, one) for place, one in enumerate(everything(box, wanted))]
    for bound, _, one in sorted(bounds):
        worst = sorted(found.values(), key=lambda v: v[0])[most - 1][0] if len(found) >= most else math.inf
        if bound > min(worst, found.get(one.pair, (math.inf,))[0]):
            continue
        points = priced(design, wanted, one)
        assert points is None or bound <= points
        if points is not None and points < found.get(one.pair, (math.inf,))[0]:
            found[one.pair] = (points, *one.pair, *one.shows)
    return sorted(found.values(), key=lambda v: v[0])[:most]


def least_losses(design, wanted):
    """Return what both traps surely take on each band, for any built trap, from plain ones solved in full.

    A trap takes power at least as its coil does, by its reactance and resistance at resonance; nine tenths of
    that leave room for a resistance that changes otherwise with frequency.
    """
    reactances, q, odds = np.geomspace(LEAST, MOST, 5), 300.0, []
    for x in reactances:
        capacitor = GivenCapacitor(capacitance=float(1 / (2 * math.pi * wanted * x)), q=None)
        plain = Trap(
            resonance=wanted, body=design.antenna.trap.body, coil=GivenCoil(q=q), capacitor=capacitor
        )
        full = solve(replace(design, antenna=replace(design.antenna, trap=plain)))
        odds.append([b.shares.trap / (1 - b.shares.trap) * q for b in full.bands.values()])

    def least(built):
        inductance, _, resistance, _ = built.circuit(np.float64(built.resonance))
        x = 2 * math.pi * built.resonance * float(inductance)
        at = [
            float(np.interp(math.log(x), np.log(reactances), of)) * resistance / x
            for of in zip(*odds, strict=True)
        ]
        return [float(0.9 * odd / (1 + odd)) for odd in at]

    return least


def everything(box, wanted):
    yield from coils(box, wanted)
    if box.cables:
        yield from coils_with_stubs(box, wanted)
        yield from cable_traps(box, wanted)
    if box.cores:
        yield from rings(box, wanted)


def joined_of(box):
    return {key: value for key, value in by_hand(box.capacitors).items() if 6e-12 < value[0] < 400e-12}


def spare_of(box, pieces):
    return min(box.capacitors[i].count - 2 * pieces.count(i) for i in pieces)


def coils(box, wanted):
    """Yield every former, wire, pitch and combination, the turns drawn apart until it resonates."""
    seen = set()
    for former in box.formers:
        for wire in box.wires:
            for spacing in SPACINGS:
                needed = asked(wanted, former, wire, spacing * wire.closest)
                for (way, pieces), (c, _, tolerance, volts) in joined_of(box).items():
                    turns = next((n for n, least in needed.items() if least <= c), None)
                    key = (former.name, wire.name, turns, way, pieces)
                    # Two turns that are enough already are none; another spacing may come to the same coil.
                    if turns in (None, 2.0) or key in seen:
                        continue
                    seen.add(key)
                    one = drawn_apart(box, wanted, former, wire, turns, way, pieces, tolerance, volts)
                    if one is not None:
                        yield one


def step_of(former):
    return 1.0 if former.turn_step == "whole" else 0.5


def asked(wanted, former, wire, pitch):
    """Return what capacitance each number of turns asks for, by the solved coil."""
    found = {}
    for turns in np.arange(2.0, (former.length - 2 * END_ROOM) / pitch, step_of(former)):
        coil = solenoid_part(former, wire, pitch, float(turns))
        try:
            found[float(turns)] = build(
                Trap(resonance=wanted, coil=coil, capacitor=GivenCapacitor(capacitance=SOLVE))
            ).fitted
        except NoAnswer:
            break
    return found


def drawn_apart(box, wanted, former, wire, up, way, pieces, tolerance, volts):
    room = former.length - 2 * END_ROOM
    capacitor = capacitor_part(box.capacitors, way, pieces)

    def trap(turns, pitch):
        return Trap(resonance=SOLVE, coil=solenoid_part(former, wire, pitch, turns), capacitor=capacitor)

    @cache
    def high(turns, pitch):
        return math.log(build(trap(turns, pitch)).resonance / wanted)

    if high(up, room / up) < 0 or high(up, wire.closest) > 0:
        return None
    pitch = brentq(lambda p: high(up, p), wire.closest, room / up, xtol=1e-6)
    built = build(trap(up, pitch))
    coil = built.wound
    reactance = 2 * math.pi * wanted * built.inductance
    if 2 * (coil.wire_length + 2 * CUT_TAIL) > wire.length or not LEAST <= reactance <= MOST:
        return None
    # What the coil adds of its own is known to a factor of two either way.
    own = built.self_capacitance[1]
    off = tolerance / 2 + COIL_DOUBT / 2 + math.log(2) / 2 * own / built.capacitance
    down, rise = reach(lambda p: high(up, p), pitch, wire, room, coil.length)
    return Try(
        pair=("solenoid", former.name, wire.name),
        shows=(up, pieces),
        trap=trap(up, pitch),
        length=coil.length,
        body=coil.length,
        volts=volts,
        fixed={
            "length": coil.length,
            "diameter": coil.diameter,
            "pieces": len(pieces),
            "uncovered": max(off - down, 0) + max(off - rise, 0),
            "spare": spare_of(box, pieces),
        },
    )


def reach(high: Callable[[float], float], pitch, wire, room, length):
    """Return how far the resonance moves with turns together and apart, by the solved coil itself."""
    slope = (
        (high(pitch * 1.005) - high(pitch / 1.005)) / (2 * math.log(1.005))
        if pitch > 1.005 * wire.closest
        else (high(pitch * 1.01) - high(pitch)) / math.log(1.01)
    )
    down = slope * math.log(pitch / wire.closest)
    return down, slope * math.log(max(min(SPREAD, room / length), 1.0))


def coils_with_stubs(box, wanted) -> Iterator[Try]:
    """Yield every number of turns at close and wider pitches, the stub solved."""
    for former in box.formers:
        room = former.length - 2 * END_ROOM
        for wire in box.wires:
            for cable in box.cables:
                for pitch in wire.closest * np.geomspace(1.0, SPACINGS[-1], 9):
                    for turns in np.arange(3.0, room / pitch, step_of(former)):
                        coil = solenoid_part(former, wire, pitch, float(turns))
                        one = with_stub(wanted, coil, cable)
                        if one is None:
                            continue
                        trap, built, fixed = one
                        if 2 * (built.wound.wire_length + 2 * CUT_TAIL) > wire.length:
                            continue
                        fixed_stub = replace(trap.capacitor, length=built.capacitor.length)

                        def high(p, turns=turns, former=former, wire=wire, stub=fixed_stub):
                            part = solenoid_part(former, wire, p, float(turns))
                            found = build(Trap(resonance=SOLVE, coil=part, capacitor=stub))
                            return math.log(found.resonance / wanted)

                        down, rise = reach(high, pitch, wire, room, built.wound.length)
                        off = fixed.pop("off")
                        yield Try(
                            pair=("stub", former.name, wire.name),
                            shows=(float(turns), ()),
                            trap=trap,
                            length=built.wound.length,
                            body=built.wound.length,
                            volts=fixed.pop("volts"),
                            fixed=fixed
                            | {
                                "length": built.wound.length,
                                "diameter": built.wound.diameter,
                                "uncovered": max(off - down, 0) + max(off - rise, 0),
                            },
                        )


def with_stub(wanted, coil, cable):
    """Return a coil with the stub it asks for, and what that costs; None where there is no cable for it."""
    trap = Trap(resonance=wanted, coil=coil, capacitor=stub_part(cable))
    try:
        built = build(trap)
    except NoAnswer:
        return None
    length, share = built.capacitor.length, built.fitted / built.capacitance
    doubt = STUB_DOUBT + COIL_DOUBT + math.log(2) * built.self_capacitance[1] / built.capacitance
    cut = length * (1 + doubt / share)
    if not LEAST <= 2 * math.pi * wanted * built.inductance <= MOST or 2 * cut > cable.length:
        return None
    # Half a step of snipping, by how much capacitance that takes away.
    off = SNIP_STEP / 2 / length * share / 2
    swell = 1 / math.cos(2 * math.pi * wanted * length / (299792458.0 * cable.velocity_factor))
    return trap, built, {"off": off, "pieces": 1, "spare": 1, "stub": cut, "volts": cable.voltage / swell}


def cable_traps(box, wanted) -> Iterator[Try]:
    """Yield every former and cable both ways, turns solved."""
    for former in box.formers:
        for cable in box.cables:
            for terminals in Terminals:
                trap = Trap(resonance=wanted, coil=cable_part(former, cable, terminals), capacitor=None)
                built = build(trap)
                wound = built.wound
                reactance = 1 / (2 * math.pi * wanted * built.capacitance)
                if 2 * wound.cut > cable.length or not LEAST <= reactance <= MOST:
                    continue
                yield Try(
                    pair=("cable", former.name, cable.name),
                    shows=(wound.turns, ()),
                    trap=trap,
                    length=wound.length,
                    body=wound.length,
                    volts=cable.voltage / float(built.capacitor.limits.reach(np.array([wanted]))[0]),
                    fixed={
                        "length": wound.length,
                        "diameter": wound.diameter,
                        "pieces": 0,
                        "uncovered": 0.0,
                        "spare": 1,
                    },
                )


def rings(box, wanted) -> Iterator[Try]:
    """Yield every whole number of turns on a ring with every combination and stub that suits it."""
    w = 2 * math.pi * wanted
    for core in box.cores:
        for wire in box.wires:
            over = wire.diameter + 2 * wire.coating
            for turns in range(1, int(math.pi * (core.inner - over) / wire.closest) + 1):
                inductance = turns**2 * core.inductance_index
                wire_length = turns * (2 * core.height + core.outer - core.inner + 4 * over) + 2 * CUT_TAIL
                if 2 * wire_length > wire.length or not 0.9 * LEAST <= w * inductance <= 1.1 * MOST:
                    continue
                common = {"length": core.height, "diameter": core.outer}
                pair = ("toroid", core.name, wire.name)
                for (way, pieces), (c, _, tolerance, volts) in joined_of(box).items():
                    moved = w * w * inductance * (c + toroid_part(core, wire, 1.0).self_capacitance)
                    if abs(math.log(moved)) > RING_ROOM:
                        continue
                    shift, off = math.log(moved), (tolerance + core.tolerance) / 2
                    lost = max(off - (RING_ROOM - shift) / 2, 0) + max(off - (RING_ROOM + shift) / 2, 0)
                    coil = toroid_part(core, wire, float(turns), 1 / moved - 1)
                    capacitor = capacitor_part(box.capacitors, way, pieces)
                    yield Try(
                        pair=pair,
                        shows=(float(turns), pieces),
                        trap=Trap(resonance=SOLVE, coil=coil, capacitor=capacitor),
                        length=core.height,
                        body=core.height,
                        volts=volts,
                        fixed=common
                        | {"pieces": len(pieces), "uncovered": lost, "spare": spare_of(box, pieces)},
                    )
                for cable in box.cables:
                    one = with_stub(wanted, toroid_part(core, wire, float(turns)), cable)
                    if one is not None:
                        trap, _, fixed = one
                        off, volts = fixed.pop("off"), fixed.pop("volts")
                        lost = 2 * max(off - RING_ROOM / 2, 0.0)
                        yield Try(
                            pair=pair,
                            shows=(float(turns), ()),
                            trap=trap,
                            length=core.height,
                            body=core.height,
                            volts=volts,
                            fixed=fixed | common | {"uncovered": lost},
                        )


def priced(design, wanted, one):
    """Return what a trap costs by the full solve; None where its rating or no wire does."""
    body = max(design.antenna.trap.body, math.ceil((one.body + 0.02) * 100) / 100)
    try:
        full = solve(replace(design, antenna=replace(design.antenna, trap=replace(one.trap, body=body))))
    except NoAnswer:
        return None
    worst = max(b.worst_stress.peak_voltage for b in full.bands.values())
    if worst > one.volts:
        return None
    edges = {role: band.wanted_edges for role, band in design.bands.items()}
    points = cost(
        losses=[b.shares.trap for b in full.bands.values()],
        fillings=[
            math.inf if b.width is None else (edges[r][1] - edges[r][0]) / b.width
            for r, b in full.bands.items()
        ],
        volts_share=worst / one.volts,
        rated=True,
        **one.fixed,
    )
    return float(points.total)


@pytest.mark.parametrize(("name", "seed"), [("40-20-vee", 11), ("20-10-flat", 12), ("80-40-flat", 13)])
def test_ranking_is_that_of_trying_everything(name, seed):
    design, box = preset(name), small_box(seed)
    box = replace(box, wires=box.wires[:2])
    expected = force(design, box, 5)
    rows = finished(design, box).rows[:5]
    assert len(expected) >= 3
    assert [(r.kind, r.former, r.wire, r.turns, r.pieces) for r in rows] == [one[1:] for one in expected]
    for row, one in zip(rows, expected, strict=True):
        assert float(row.cost.total) == pytest.approx(one[0], abs=0.1)


def test_ranking_of_every_kind_is_that_of_trying_everything():
    design, box = preset("20-10-flat"), mixed_box(20)
    expected = {one[1:4]: one for one in force(design, box, 20)}
    rows = finished(design, box).rows
    assert {kind for kind, *_ in expected} == {"solenoid", "stub", "cable", "toroid"}
    assert {(r.kind, r.former, r.wire) for r in rows} == set(expected)
    forced = [expected[r.kind, r.former, r.wire] for r in rows]
    for row, one in zip(rows, forced, strict=True):
        assert float(row.cost.total) == pytest.approx(one[0], abs=0.1)
        assert row.pieces == one[5]
        assert row.turns == pytest.approx(one[4], rel=1e-6)
    # What costs the same may stand either way round.
    assert all(one[0] <= after[0] + 0.01 for one, after in pairwise(forced))
