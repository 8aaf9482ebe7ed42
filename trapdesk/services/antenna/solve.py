"""From a design to its figures."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import replace

import numpy as np

from ...design.design import MODES, UNKNOWN, Band, Design
from ...design.doubts import SITE, Meaning, two_sigma
from ...design.fields import SOLVE
from ...design.rules import Breach, InvalidDesign, check
from ...engine.conductors import coating_elastance
from ...engine.constants import C0
from ...engine.ground import Ground
from ...engine.metals import MATERIALS
from ...engine.ports import Ports
from ...engine.soils import SOILS, UNKNOWN_SOIL, UNKNOWN_SOIL_FROM, GroundKind
from ...engine.wire import Wire, plan, solve_ports
from ...errors import NoAnswer
from ..feed.path import FeedFigures, Feeding, Passage, Path, View, feed_figures, path_of
from ..trap.built import BuiltTrap, build
from .effects import HEIGHT_STEP, effects, length_moves, site_moves
from .figures import (
    AtFrequency,
    BandFigures,
    Curve,
    Figures,
    LengthFigures,
    Shares,
    TrapStress,
)
from .findings import find
from .lengths import LEAST_END_HEIGHT, Search, find_lengths, first_guess, slope_of, solved_for
from .moved import Moved
from .part_stress import part_stress
from .response import Behaviour, Look, Response, behave, swr
from .trap_figures import off_as_made, trap_figures
from .weather import shifts

IMPEDANCE_DOUBT, UNKNOWN_IMPEDANCE_DOUBT = 0.05, 0.12
"""How far an impedance may be off over a named soil and over an unknown one, relative; an estimate."""
SHARE_DOUBT, UNKNOWN_SHARE_DOUBT = 0.02, 0.15
STRESS_DOUBT = 0.1
AIM_MET = 1e-4
"""How near a solved wire must bring the resonance to its aim, relative."""
WANTED_POINTS = 33


def solve(design: Design, previous: Figures | None = None, *, site_effects: bool = False) -> Figures:
    """Return everything a design does.

    Figures of a design with the same wire at the same site save the field solve. InvalidDesign names every
    rule that is broken; NoAnswer says why a value that is to be solved has no solution.
    """
    breaches = check(design)
    if breaches:
        raise InvalidDesign(breaches)
    trap = _built(design)
    wire = hang(design, trap)
    reusable = previous is not None and previous.wire == wire and previous.design.bands == design.bands
    path = path_of(design.station)
    responses = _responses(design, wire, trap, path, previous.ports if reusable else {})
    if _missed(design, responses) is not None:
        wire, reusable = hang(design, trap, thorough=True), False
        responses = _responses(design, wire, trap, path, {})
        _refuse_missed(design, wire, responses)
    moved = previous.moved if reusable else length_moves(wire, responses)
    bands = {role: _band(design, role, response, moved, path) for role, response in responses.items()}
    figures = Figures(
        design=design,
        lengths=_lengths(design, wire),
        trap=None if trap is None else trap_figures(design, trap, bands.values()),
        bands=bands,
        findings=(),
        wire=wire,
        ports={role: r.ports for role, r in responses.items()},
        moved=moved,
    )
    if site_effects:
        return with_site_effects(figures)
    return replace(figures, findings=find(figures))


def _responses(
    design: Design, wire: Wire, trap: BuiltTrap | None, path: Path | None, ports: dict[str, Ports]
) -> dict[str, Response]:
    return {
        role: Response(wire, band, trap, design.station.reference, ports.get(role), _looking(path))
        for role, band in design.bands.items()
    }


def _missed(design: Design, responses: dict[str, Response]) -> str | None:
    """Return a band for which a wire was solved and which is not resonant at its aim, or None."""
    for role in solved_for(design).values():
        found, aim = responses[role].resonance, responses[role].band.target
        if found is None or abs(found - aim) > AIM_MET * aim:
            return role
    return None


def _refuse_missed(design: Design, wire: Wire, responses: dict[str, Response]) -> None:
    """Refuse wires that are not resonant at an aim after all, as where the reactance falls through zero."""
    role = _missed(design, responses)
    if role is None:
        return
    response = responses[role]
    numbers = {"aim_hz": response.band.target, "inner_m": wire.inner}
    if wire.end is not None:
        numbers["end_m"] = wire.end
    if response.resonance is not None:
        numbers["nearest_resonance_hz"] = response.resonance
    raise NoAnswer(
        "aim_not_met",
        f"bands.{role}.aim",
        numbers,
        "another trap resonance, another L to C ratio, or set the wires yourself",
    )


def with_site_effects(figures: Figures) -> Figures:
    """Return the figures with what height, soil and weather are worth, and the findings that follow."""
    design, wire = figures.design, figures.wire
    trap = _built(design)
    if trap is not None and figures.trap is not None:
        found = shifts(figures, trap, figures.trap.heat)
        figures = replace(figures, trap=replace(figures.trap, shifts=found))
    there = {role: band for role, band in figures.bands.items() if band.resonance is not None}
    if wire.ground.kind is GroundKind.SPACE or not there:
        return replace(figures, findings=find(figures))
    soils = []
    if wire.ground.kind is GroundKind.SOIL:
        soils = [ground_of(design, soil) for soil in UNKNOWN_SOIL_FROM]
    moved = site_moves(wire, soils, {role: figures.moved.ranges[role] for role in there})
    bands = dict(figures.bands)
    for role, band in there.items():
        higher, lower, *by_soil = moved.by(role, band.resonance, trap)
        soil = (float(by_soil[0]), float(by_soil[1])) if soils else None
        doubt = band.frequency_doubt
        if soil is not None and design.site.soil_is_unknown:
            doubt = math.hypot(doubt, max(abs(s) for s in soil))
        height = float((higher - lower) / (2 * HEIGHT_STEP))
        bands[role] = replace(
            band, effects=replace(band.effects, height=height, soil=soil), frequency_doubt=doubt
        )
    figures = replace(figures, bands=bands)
    return replace(figures, findings=find(figures))


def _built(design: Design) -> BuiltTrap | None:
    return build(design.antenna.trap) if design.antenna.trap is not None else None


def hang(design: Design, trap: BuiltTrap | None, *, thorough: bool = False) -> Wire:
    """Return the wire with its lengths found and its slope known; `thorough` takes all the steps it needs."""
    site, lengths, material = design.site, design.antenna.lengths, design.antenna.wire
    resistivity = MATERIALS[material.material].resistivity
    if material.conductivity is not None:
        resistivity = 1 / material.conductivity
    blank = Wire(
        inner=1.0,
        end=None,
        height=site.height,
        slope=0.0,
        radius=material.diameter / 2,
        resistivity=resistivity,
        ground=ground_of(design),
        body=design.antenna.trap.body if design.antenna.trap is not None else 0.0,
        elastance=float(coating_elastance(material.diameter, material.coating, material.coating_permittivity))
        if material.coating
        else 0.0,
    )

    def make(inner: float, end: float | None) -> Wire:
        slope = slope_of(site.shape, site.height, inner + (end or 0.0), site.end_height, site.included_angle)
        if math.isnan(slope):
            raise NoAnswer(
                "side_shorter_than_its_drop",
                "site.end_height",
                {"side_m": inner + (end or 0.0), "drop_m": site.height - (site.end_height or 0.0)},
                "raise the ends",
            )
        return replace(blank, inner=inner, end=end, slope=slope)

    roles = solved_for(design)
    if not roles:
        side = lengths.inner + (lengths.end or 0.0)
        if site.end_height is not None and site.height - site.end_height >= side:
            lowest = site.height - side
            raise InvalidDesign(
                (
                    Breach(
                        where="site.end_height",
                        code="not_above",
                        value=site.end_height,
                        bound=lowest,
                        dimension="length",
                    ),
                )
            )
        wire = make(lengths.inner, lengths.end)
        _refuse_low_ends(wire)
        return wire
    bands = dict(design.bands.items())
    impedance = None if trap is None else trap.impedance
    search = Search(
        make=make,
        inner=None if lengths.inner is SOLVE else lengths.inner,
        end=None if lengths.end is SOLVE else lengths.end,
        has_trap=trap is not None,
        trap=impedance,
        aims=tuple(bands[r].target for r in roles.values()),
        keys=tuple(f"antenna.lengths.{n}" for n in roles),
        aim_keys=tuple(f"bands.{r}.aim" for r in roles.values()),
    )
    guess = first_guess(
        {role: band.target for role, band in bands.items()}, impedance, search.inner, blank.radius
    )
    return make(*find_lengths(search, guess, thorough=thorough))


def _refuse_low_ends(wire: Wire) -> None:
    """Refuse ends in or near the ground, where nothing here holds."""
    if wire.ground.kind is not GroundKind.SPACE and wire.end_height < LEAST_END_HEIGHT:
        raise InvalidDesign(
            (
                Breach(
                    where="site.height",
                    code="ends_too_low",
                    value=wire.end_height,
                    bound=LEAST_END_HEIGHT,
                    dimension="length",
                ),
            )
        )


def ground_of(design: Design, soil: str | None = None) -> Ground:
    """Return what lies under the wire; with a soil class, as if the soil were of that class."""
    site = design.site
    kind = GroundKind(site.ground)
    if kind is not GroundKind.SOIL:
        return Ground(kind=kind)
    if soil is None and site.conductivity is not None:
        return Ground(kind=kind, conductivity=site.conductivity, permittivity=site.permittivity)
    name = soil or site.soil or UNKNOWN
    known = UNKNOWN_SOIL if name == UNKNOWN else SOILS[name]
    return Ground(kind=kind, conductivity=known.conductivity, permittivity=known.permittivity)


def _looking(path: Path | None) -> Callable[[float, complex], View] | None:
    """Return how a band looks from where it is judged, the tuner set for its aim; None without a feed."""
    if path is None:
        return None
    return lambda aim, impedance: View(path=path, setting=path.set_at(aim, impedance))


def wanted_frequencies(band: Band) -> np.ndarray:
    """Return frequencies over the wanted part of a band, segment by segment."""
    return np.concatenate([np.linspace(*edges, WANTED_POINTS) for edges in band.segments_wanted])


def _band(
    design: Design, role: str, response: Response, moved: Moved, path: Path | None = None
) -> BandFigures:
    station, band, trap = design.station, response.band, response.trap
    feeding = None if path is None else Feeding(path, response.look)
    wanted = behave(
        response.ports.at(np.append(wanted_frequencies(band), band.target)),
        trap,
        station.reference,
        station.power,
        feeding,
    )
    aim = at_point(wanted, -1, design)
    part = wanted.swr[:-1]
    dip, dip_swr = response.dip
    usable = response.usable(station.swr_limit)
    unknown = design.site.soil_is_unknown
    relative = UNKNOWN_IMPEDANCE_DOUBT if unknown else IMPEDANCE_DOUBT
    by = effects(response, role, moved)
    of_trap = 0.0
    if by is not None and trap is not None:
        of_trap = abs(by.trap or 0.0) * off_as_made(design, trap)
    near = response.near
    feed = None if path is None else _feed(path, response, feeding.passage, aim)
    return BandFigures(
        role=role,
        name=design.bands.called(role),
        aim=band.target,
        aim_impedance=aim.impedance,
        aim_swr=aim.swr,
        resonance=response.resonance,
        resonance_resistance=response.resonance_resistance,
        dip=dip,
        dip_swr=dip_swr,
        low_swr=float(part[0]),
        high_swr=float(part[-1]),
        worst_swr=float(part.max()),
        width=None if usable is None else usable[1] - usable[0],
        usable=usable,
        shares=aim.shares,
        feed_current=aim.feed_current,
        stress=aim.stress,
        worst_stress=_worst(wanted, design),
        parts=() if trap is None else part_stress(design, trap, wanted),
        effects=by,
        curve=Curve(frequency=near.frequency[::2], impedance=near.impedance[::2], swr=near.swr[::2]),
        frequency_doubt=math.hypot(_site_doubt(design) * band.target, of_trap),
        impedance_doubt=relative * abs(aim.impedance),
        swr_doubt=relative * aim.swr,
        share_doubt=UNKNOWN_SHARE_DOUBT if unknown else SHARE_DOUBT,
        stress_doubt=STRESS_DOUBT,
        feed=feed,
    )


def _feed(path: Path, response: Response, over: Passage, aim: AtFrequency) -> FeedFigures:
    """Return what lies between feed point and transmitter does on a band."""
    setting, near = response.look.setting, response.near
    ratio = swr(path.other(near.frequency, near.impedance, setting), path.reference)
    dip = int(np.argmin(ratio))
    shares = {"sky": aim.shares.sky, "ground": aim.shares.ground, "wire": aim.shares.wire}
    if response.trap is not None:
        shares["traps"] = aim.shares.trap
    return feed_figures(path, setting, over, shares, (float(near.frequency[dip]), float(ratio[dip])))


def at_frequencies(figures: Figures, frequencies: Sequence[float]) -> tuple[AtFrequency, ...]:
    """Return what the antenna does at any frequencies, each solved by itself."""
    design, wire = figures.design, figures.wire
    trap, path = _built(design), path_of(design.station)
    feeding = None if path is None else Feeding(path, _retuned(path))
    found = []
    for frequency in frequencies:
        ports = solve_ports(wire, np.array([float(frequency)]), plan(wire, frequency), frequency)
        over = behave(ports, trap, design.station.reference, design.station.power, feeding)
        found.append(at_point(over, 0, design))
    return tuple(found)


def _retuned(path: Path) -> Look:
    """Return how single frequencies look from where they are judged, the tuner set for each."""

    def look(frequency: np.ndarray, feed: np.ndarray) -> np.ndarray:
        each = zip(frequency.tolist(), feed.tolist(), strict=True)
        settings = [path.set_at(f, z) for f, z in each]
        return np.array(
            [
                complex(path.judged(frequency[i : i + 1], feed[i : i + 1], setting)[0])
                for i, setting in enumerate(settings)
            ]
        )

    return look


def at_point(over: Behaviour, i: int, design: Design) -> AtFrequency:
    """Return one frequency of what the antenna does over several."""
    return AtFrequency(
        frequency=float(over.frequency[i]),
        impedance=complex(over.impedance[i]),
        swr=float(over.swr[i]),
        shares=Shares(
            sky=float(over.sky[i]),
            ground=float(over.ground[i]),
            wire=float(over.wire[i]),
            trap=float(over.trap[i]),
        ),
        feed_current=float(over.feed_current[i]),
        stress=_stress(over, design, lambda a: a[i], float(over.frequency[i])),
    )


def _stress(
    over: Behaviour, design: Design, pick: Callable[[np.ndarray], float], frequency: float
) -> TrapStress | None:
    """Return what one trap bears, each array of it brought to one number."""
    if over.stress is None:
        return None
    watts = float(pick(over.stress.total_power))
    return TrapStress(
        frequency=frequency,
        peak_voltage=float(pick(over.stress.peak_voltage)),
        rms_current=float(pick(over.trap_current)),
        coil_current=float(pick(over.stress.coil_current)),
        capacitor_current=float(pick(over.stress.capacitor_current)),
        watts=watts,
        average_watts=watts * MODES[design.station.mode].mean,
    )


def _worst(over: Behaviour, design: Design) -> TrapStress | None:
    """Return each kind of stress at its worst in the wanted part, and where the voltage is worst."""
    if over.stress is None:
        return None
    where = int(np.argmax(over.stress.peak_voltage))
    return _stress(over, design, np.max, float(over.frequency[where]))


def _site_doubt(design: Design) -> float:
    """Return how far the site may move a frequency; where it is switched off, still the usual."""
    doubts = design.doubts
    return two_sigma(doubts.site or SITE, Meaning(doubts.site_meaning))


def _lengths(design: Design, wire: Wire) -> LengthFigures:
    lengths, stretch = design.antenna.lengths, 1 + design.antenna.wire.stretch
    taken = wire.body / 2
    inner_mark = (wire.inner - taken) / stretch
    # Without a trap the inner wire ends at the insulator, else it is fastened at feed point and trap.
    last = lengths.loop if wire.end is None else lengths.knot
    end_mark = end_reel = None
    if wire.end is not None:
        end_mark = (wire.end - taken) / stretch
        end_reel = end_mark + lengths.knot + lengths.loop + lengths.reserve
    return LengthFigures(
        inner=wire.inner,
        inner_mark=inner_mark,
        inner_reel=inner_mark + lengths.knot + last + lengths.reserve,
        end=wire.end,
        end_mark=end_mark,
        end_reel=end_reel,
        total=2 * wire.side,
        half_wave=C0 / 2 / design.bands.lower.target,
        end_height=None if wire.ground.kind is GroundKind.SPACE else wire.end_height,
        slope=wire.slope,
        doubt=_site_doubt(design) * wire.inner,
    )
