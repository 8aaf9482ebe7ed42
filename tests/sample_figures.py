"""Figures written by hand, for the tests of what presents them; no number here claims to be physics."""

import math
from dataclasses import replace

import numpy as np

from trapdesk.design.design import Antenna, AntennaWire, Band, Bands, Design, Lengths, Shape, Site, Station
from trapdesk.design.fields import SOLVE
from trapdesk.design.parts import GivenCapacitor, Solenoid, Trap
from trapdesk.engine.ground import Ground
from trapdesk.engine.soils import GroundKind
from trapdesk.engine.wire import Wire
from trapdesk.services.antenna.figures import (
    BandFigures,
    CoilFigures,
    Curve,
    Effects,
    Figures,
    Finding,
    LengthFigures,
    Level,
    Shares,
    TrapFigures,
    TrapStress,
)

DESIGN = Design(
    title="Relief station",
    bands=Bands(
        upper=Band(name="20 m", low=14.0e6, high=14.35e6, aim=14.15e6),
        lower=Band(name="40 m", low=7.0e6, high=7.2e6),
    ),
    antenna=Antenna(
        wire=AntennaWire(diameter=0.002),
        lengths=Lengths(inner=SOLVE, end=SOLVE),
        trap=Trap(
            resonance=14.05e6,
            body=0.1,
            coil=Solenoid(turns=SOLVE),
            capacitor=GivenCapacitor(capacitance=47e-12, voltage=3000.0),
        ),
    ),
    site=Site(shape=Shape.VEE, height=10.0, end_height=3.0),
    station=Station(power=100.0, mode="SSB"),
)


def curve(centre: float) -> Curve:
    frequency = centre * np.linspace(0.97, 1.03, 5)
    impedance = 60.0 + 2000j * (frequency / centre - 1)
    return Curve(frequency=frequency, impedance=impedance, swr=np.array([3.1, 1.8, 1.2, 1.8, 3.1]))


def stress(frequency: float) -> TrapStress:
    return TrapStress(
        frequency=frequency,
        peak_voltage=1854.3,
        rms_current=0.2123,
        coil_current=5.51,
        capacitor_current=5.43,
        watts=6.37,
        average_watts=1.274,
    )


BANDS = {
    "upper": BandFigures(
        role="upper",
        name="20 m",
        aim=14.15e6,
        aim_impedance=61.23 + 0.51j,
        aim_swr=1.2249,
        resonance=14.1483e6,
        resonance_resistance=61.2,
        dip=14.1391e6,
        dip_swr=1.2212,
        low_swr=1.5823,
        high_swr=1.8421,
        worst_swr=1.8421,
        width=412.3e3,
        usable=(13.94e6, 14.3523e6),
        shares=Shares(sky=0.8123, ground=0.1021, wire=0.0231, trap=0.0625),
        feed_current=1.2779,
        stress=stress(14.15e6),
        worst_stress=stress(14.0e6),
        effects=Effects(
            inner=-712e3, end=-31.2e3, trap=10.2e6, height=-12.1e3, soil=(14.121e6 - 14.15e6, 11e3)
        ),
        curve=curve(14.15e6),
        frequency_doubt=96.2e3,
        impedance_doubt=6.1,
        swr_doubt=0.12,
        share_doubt=0.04,
        stress_doubt=0.23,
    ),
    "lower": BandFigures(
        role="lower",
        name="40 m",
        aim=7.1e6,
        aim_impedance=48.2 - 0.2j,
        aim_swr=1.0376,
        resonance=7.1004e6,
        resonance_resistance=48.2,
        dip=7.1021e6,
        dip_swr=1.0371,
        low_swr=2.6123,
        high_swr=2.5312,
        worst_swr=2.6123,
        width=131.2e3,
        usable=(7.036e6, 7.1672e6),
        shares=Shares(sky=0.7012, ground=0.2013, wire=0.0312, trap=0.0663),
        feed_current=1.4403,
        stress=replace(stress(7.1e6), peak_voltage=412.7, watts=3.31, average_watts=0.662),
        worst_stress=replace(stress(7.2e6), peak_voltage=431.2, watts=3.4, average_watts=0.68),
        effects=Effects(inner=-491e3, end=-803e3, trap=1.21e6, height=-8.1e3, soil=None),
        curve=curve(7.1e6),
        frequency_doubt=51.1e3,
        impedance_doubt=5.2,
        swr_doubt=0.11,
        share_doubt=0.05,
        stress_doubt=0.2,
    ),
}

TRAP = TrapFigures(
    resonance=14.05e6,
    inductance=2.6431e-6,
    capacitance=48.55e-12,
    fitted_capacitance=47e-12,
    q=212.3,
    dynamic_resistance=49.5e3,
    impedance={"upper": 3210.0 - 12400j, "lower": 1.9 + 158.2j},
    coil=CoilFigures(
        turns=10.37,
        diameter=0.0517,
        length=0.0311,
        wire_length=1.682,
        self_capacitance=(1.1e-12, 1.55e-12, 2.0e-12),
        crowding=1.24,
    ),
    curve=curve(14.05e6),
    resonance_doubt=112e3,
    inductance_doubt=0.04e-6,
    q_range=(140.0, 260.0),
)

LENGTHS = LengthFigures(
    inner=5.0312,
    inner_mark=5.0312,
    inner_reel=5.4712,
    end=3.2219,
    end_mark=3.2219,
    end_reel=3.6919,
    total=16.5062,
    half_wave=21.1122,
    end_height=3.0,
    slope=math.asin(7 / 8.2531),
    doubt=0.031,
)

FINDINGS = (
    Finding(code="swr_wanted", level=Level.WATCH, where="bands.lower", value=2.6123, limit=2.0),
    Finding(code="soil_unknown", level=Level.WATCH, where="site.soil", value=40e3, dimension="frequency"),
)


def wire(inner: float, end: float | None) -> Wire:
    return Wire(
        inner=inner,
        end=end,
        height=10.0,
        slope=0.0,
        radius=1e-3,
        resistivity=1.7241e-8,
        ground=Ground(kind=GroundKind.SOIL, conductivity=5e-3, permittivity=13.0),
    )


FIGURES = Figures(
    design=DESIGN,
    lengths=LENGTHS,
    trap=TRAP,
    bands=BANDS,
    findings=FINDINGS,
    wire=wire(5.0312, 3.2219),
    ports={},
    moved=None,
)

PLAIN = Figures(
    design=replace(
        DESIGN,
        title="One band",
        bands=Bands(lower=DESIGN.bands.lower),
        antenna=Antenna(lengths=Lengths(inner=SOLVE)),
        site=Site(),
    ),
    lengths=replace(
        LENGTHS,
        inner=10.11,
        inner_mark=10.11,
        inner_reel=10.58,
        end=None,
        end_mark=None,
        end_reel=None,
        total=20.22,
        end_height=10.0,
        slope=0.0,
    ),
    trap=None,
    bands={
        "lower": replace(
            BANDS["lower"],
            resonance=None,
            resonance_resistance=None,
            width=None,
            usable=None,
            stress=None,
            worst_stress=None,
            low_swr=math.inf,
            effects=Effects(inner=-690e3, end=None, trap=None),
        )
    },
    findings=(),
    wire=wire(10.11, None),
    ports={},
    moved=None,
)
"""One band, no trap, and everything missing that can be missing."""
