"""How long the tuner's answer, its map and the table of ways take, in yardsticks, on the solved preset."""

from dataclasses import replace

import pytest

from tests.bench.yardstick import ratio, record
from trapdesk.design.design import with_value
from trapdesk.design.station import FeedLine, Transmitter, Tuner, TunerCapacitor, TunerCoil
from trapdesk.services.antenna.solve import solve
from trapdesk.services.compare.reach import reach_map, tuner_answer
from trapdesk.services.compare.worth import worth
from trapdesk.store import store


def fed(name, **tuner):
    design, _ = store.preset(name)
    station = replace(
        design.station, line=FeedLine(length=25.0), tuner=Tuner(**tuner), transmitter=Transmitter()
    )
    return replace(design, station=station)


TUNERS = {
    "T": {},
    "L in steps": {
        "network": "l-low-pass",
        "coil": TunerCoil(low=0.0, high=16e-6, steps=256.0),
        "capacitor": TunerCapacitor(low=0.0, high=2e-9, steps=256.0),
    },
}


@pytest.mark.parametrize("tuner", TUNERS)
@pytest.mark.parametrize("name", ["40-20-vee", "80-40-flat"])
def test_tuner_answer_and_map(name, tuner):
    figures = solve(fed(name, **TUNERS[tuner]))
    what = f"{name[:5]} m, {tuner}"
    record(
        f"tuner, both bands, {what}", ratio(lambda: [tuner_answer(figures, r) for r in figures.bands]), 8.0
    )
    record(f"reach of one band, {what}", ratio(lambda: reach_map(figures, "lower")), 8.0)


@pytest.mark.parametrize("name", ["40-20-vee", "80-40-flat"])
def test_table_of_ways(name):
    design = fed(name)
    solved = solve(design)
    record(f"four ways but re-cut, {name[:5]} m", ratio(lambda: worth(solved)), 8.0)
    for key, value in (("inner", solved.wire.inner + 0.3), ("end", solved.wire.end + 0.3)):
        design = with_value(design, f"antenna.lengths.{key}", value)
    figures = solve(design)
    bare = fed(name)
    bare = replace(bare, station=replace(bare.station, line=None, tuner=None, transmitter=None))
    wires = ratio(lambda: solve(bare), runs=8)
    record(f"four ways, {name[:5]} m", ratio(lambda: worth(figures), runs=8), 8.0 + wires)
