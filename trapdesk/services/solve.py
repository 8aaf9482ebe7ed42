"""From a design to its figures."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import replace

import numpy as np

from ..design import MODES, UNKNOWN, Design
from ..engine.conductors import MATERIALS, coating_elastance
from ..engine.ground import C0, SOILS, UNKNOWN_SOIL, UNKNOWN_SOIL_FROM, Ground, GroundKind
from ..engine.resonator import dynamic_resistance
from ..engine.wire import Wire, plan, solve_ports
from ..errors import NoAnswer
from ..fields import SOLVE
from ..rules import Breach, InvalidDesign, check
from .effects import HEIGHT_STEP, effects, length_moves, site_moves
from .figures import (
    AtFrequency,
    BandFigures,
    CoilFigures,
    Curve,
    Figures,
    LengthFigures,
    Shares,
    Stress,
    TrapFigures,
)
from .findings import find
from .lengths import LEAST_END_HEIGHT, Search, find_lengths, first_guess, slope_of
from .moved import Moved
from .response import Behaviour, Response, behave, swr
from .trap import BuiltTrap, build

SITE_DOUBT = 0.007
"""How far trees, slopes and masts may move a frequency, relative. Common practice, no source."""
IMPEDANCE_DOUBT, UNKNOWN_IMPEDANCE_DOUBT = 0.05, 0.12
"""How far an impedance may be off over a named soil and over an unknown one, relative; an estimate."""
SHARE_DOUBT, UNKNOWN_SHARE_DOUBT = 0.02, 0.15
STRESS_DOUBT = 0.1
WANTED_POINTS, TRAP_POINTS = 33, 61


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
    responses = {
        role: Response(wire, band, trap, design.station.reference, previous.ports[role] if reusable else None)
        for role, band in design.bands.items()
    }
    moved = previous.moved if reusable else length_moves(wire, responses)
    figures = Figures(
        design=design,
        lengths=_lengths(design, wire),
        trap=_trap(design, trap) if trap is not None else None,
        bands={role: _band(design, role, response, moved) for role, response in responses.items()},
        findings=(),
        wire=wire,
        ports={role: r.ports for role, r in responses.items()},
        moved=moved,
    )
    if site_effects:
        return with_site_effects(figures)
    return replace(figures, findings=find(figures))


def with_site_effects(figures: Figures) -> Figures:
    """Return the figures with what the height and the soil are worth, and the findings that follow."""
    design, wire = figures.design, figures.wire
    there = {role: band for role, band in figures.bands.items() if band.resonance is not None}
    if wire.ground.kind is GroundKind.SPACE or not there:
        return figures
    soils = []
    if wire.ground.kind is GroundKind.SOIL:
        soils = [ground_of(design, soil) for soil in UNKNOWN_SOIL_FROM]
    moved = site_moves(wire, soils, {role: figures.moved.ranges[role] for role in there})
    trap = _built(design)
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


def hang(design: Design, trap: BuiltTrap | None) -> Wire:
    """Return the wire with its lengths found and its slope known."""
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

    unknown = [name for name in ("inner", "end") if getattr(lengths, name) is SOLVE]
    if not unknown:
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
    role_for = {"inner": "upper", "end": "lower"}
    bands = dict(design.bands.items())
    roles = [role_for[n] if trap is not None and role_for[n] in bands else "lower" for n in unknown]
    impedance = None if trap is None else trap.impedance
    search = Search(
        make=make,
        inner=None if lengths.inner is SOLVE else lengths.inner,
        end=None if lengths.end is SOLVE else lengths.end,
        has_trap=trap is not None,
        trap=impedance,
        aims=tuple(bands[r].target for r in roles),
        keys=tuple(f"antenna.lengths.{n}" for n in unknown),
        aim_keys=tuple(f"bands.{r}.aim" for r in roles),
    )
    guess = first_guess(
        {role: band.target for role, band in bands.items()}, impedance, search.inner, blank.radius
    )
    return make(*find_lengths(search, guess))


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


def _band(design: Design, role: str, response: Response, moved: Moved) -> BandFigures:
    station, band, trap = design.station, response.band, response.trap
    wanted = behave(
        response.ports.at(np.append(np.linspace(*band.wanted, WANTED_POINTS), band.target)),
        trap,
        station.reference,
        station.power,
    )
    aim = at_point(wanted, -1, design)
    part = wanted.swr[:-1]
    dip, dip_swr = response.dip
    usable = response.usable(station.swr_limit)
    unknown = design.site.soil_is_unknown
    relative = UNKNOWN_IMPEDANCE_DOUBT if unknown else IMPEDANCE_DOUBT
    by = effects(response, role, moved)
    of_trap = abs(by.trap or 0.0) * trap.doubt / 2 if by is not None and trap is not None else 0.0
    near = response.near
    return BandFigures(
        role=role,
        name=band.name,
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
        effects=by,
        curve=Curve(frequency=near.frequency[::2], impedance=near.impedance[::2], swr=near.swr[::2]),
        frequency_doubt=math.hypot(SITE_DOUBT * band.target, of_trap),
        impedance_doubt=relative * abs(aim.impedance),
        swr_doubt=relative * aim.swr,
        share_doubt=UNKNOWN_SHARE_DOUBT if unknown else SHARE_DOUBT,
        stress_doubt=STRESS_DOUBT,
    )


def at_frequencies(figures: Figures, frequencies: Sequence[float]) -> tuple[AtFrequency, ...]:
    """Return what the antenna does at any frequencies, each solved by itself."""
    design, wire = figures.design, figures.wire
    trap = _built(design)
    found = []
    for frequency in frequencies:
        ports = solve_ports(wire, np.array([float(frequency)]), plan(wire, frequency), frequency)
        found.append(at_point(behave(ports, trap, design.station.reference, design.station.power), 0, design))
    return tuple(found)


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
) -> Stress | None:
    """Return what one trap bears, each array of it brought to one number."""
    if over.stress is None:
        return None
    watts = float(pick(over.stress.total_power))
    return Stress(
        frequency=frequency,
        peak_voltage=float(pick(over.stress.peak_voltage)),
        rms_current=float(pick(over.trap_current)),
        coil_current=float(pick(over.stress.coil_current)),
        capacitor_current=float(pick(over.stress.capacitor_current)),
        watts=watts,
        average_watts=watts * MODES[design.station.mode].mean,
    )


def _worst(over: Behaviour, design: Design) -> Stress | None:
    """Return each kind of stress at its worst in the wanted part, and where the voltage is worst."""
    if over.stress is None:
        return None
    where = int(np.argmax(over.stress.peak_voltage))
    return _stress(over, design, np.max, float(over.frequency[where]))


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
        doubt=SITE_DOUBT * wire.inner,
    )


def _trap(design: Design, trap: BuiltTrap) -> TrapFigures:
    at = np.float64(trap.resonance)
    roles = {role: band.target for role, band in design.bands.items()}
    wound = trap.wound
    edges = [f for _, band in design.bands.items() for f in (band.low, band.high)] + [trap.resonance]
    frequency = np.linspace(0.9 * min(edges), 1.1 * max(edges), TRAP_POINTS)
    impedance = trap.impedance(frequency)
    return TrapFigures(
        resonance=trap.resonance,
        inductance=trap.inductance,
        capacitance=trap.capacitance,
        fitted_capacitance=trap.fitted,
        q=trap.q,
        dynamic_resistance=float(dynamic_resistance(*trap.circuit(at))),
        impedance={
            role: complex(z)
            for role, z in zip(roles, trap.impedance(np.array(list(roles.values()))), strict=True)
        },
        coil=None
        if wound is None
        else CoilFigures(
            turns=wound.turns,
            diameter=wound.diameter,
            length=wound.length,
            wire_length=wound.wire_length,
            self_capacitance=trap.self_capacitance,
            crowding=wound.proximity_factor,
        ),
        curve=Curve(frequency=frequency, impedance=impedance, swr=swr(impedance, design.station.reference)),
        resonance_doubt=trap.resonance * trap.doubt / 2,
        inductance_doubt=trap.inductance * trap.doubt,
        q_range=(trap.q * trap.q_factors[0], trap.q * trap.q_factors[1]),
    )
