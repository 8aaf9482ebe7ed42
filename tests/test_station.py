"""Line, choke, tuner, transmitter and wanted segments in a design's file: read, written, edited, refused."""

from dataclasses import replace

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from trapdesk.design.design import Band, with_value
from trapdesk.design.rules import check
from trapdesk.design.station import (
    TUNER_NETWORKS,
    Choke,
    FeedLine,
    Foldback,
    LineWeather,
    ListedLoss,
    Segment,
    Tap,
    Transmitter,
    Tuner,
    TunerCapacitor,
    TunerCoil,
    TunerPlace,
)
from trapdesk.engine.cable_list import CABLES
from trapdesk.engine.networks import NETWORKS
from trapdesk.store import store
from trapdesk.store.toml_read import DesignFault

TEXT = """\
[bands.lower]
name = "40 m"
low = "7 MHz"
high = "7.2 MHz"
# Two nets, the morning one matters more.
wanted = [
  { low = "7.03 MHz", high = "7.05 MHz", weight = 3 },   # morning
  { low = "7.1 MHz", high = "7.15 MHz" },
]

[station.line]               # what hangs there
type = "rg-58/u"
length = "82 ft"
losses = [{ frequency = "10 MHz", loss = "4.5 dB/100m" }, { frequency = "30 MHz", loss = "8 dB/100m" }]

[station.choke]
lower = "2k5"                # measured

[station.tuner]
network = "l-low-pass"
place = "feed"
[station.tuner.coil]
low = "0 uH"
high = "16 uH"
steps = 128

# As read off its meter.
[[station.transmitter.table]]
swr = 2
watts = "100 W"
[[station.transmitter.table]]
swr = 3
watts = "30 W"
"""


def faults(text):
    with pytest.raises(DesignFault) as caught:
        store.read_text(text, "d")
    return [line.removeprefix("d: ") for line in str(caught.value).splitlines()]


def test_what_a_person_writes():
    design = store.read_text(TEXT)
    lower, station = design.bands.lower, design.station
    assert lower.wanted == (Segment(low=7.03e6, high=7.05e6, weight=3.0), Segment(low=7.1e6, high=7.15e6))
    assert lower.wanted_edges == (7.03e6, 7.15e6)
    # The middles, 7.04 and 7.125 MHz, by weight.
    assert lower.target == pytest.approx((3 * 7.04e6 + 7.125e6) / 4, rel=1e-12)
    assert station.line.type == "RG-58/U" and station.line.length == pytest.approx(82 * 0.3048, rel=1e-12)
    assert station.line.losses[1] == ListedLoss(frequency=30e6, loss=0.08)
    assert station.choke == Choke(lower=2500.0)
    assert (station.tuner.place, station.tuner.coil.steps) == (TunerPlace.FEED, 128)
    assert station.transmitter.table == (Foldback(swr=2.0, watts=100.0), Foldback(swr=3.0, watts=30.0))


def test_one_wanted_part_keeps_its_meaning():
    band = Band(name="40 m", low=7e6, high=7.2e6, wanted_low=7.05e6, wanted_high=7.12e6)
    assert band.wanted_edges == (7.05e6, 7.12e6) and band.target == 7.085e6
    assert band.segments == (Segment(low=7.05e6, high=7.12e6),)
    assert replace(band, wanted_low=None).wanted_edges == (7e6, 7.12e6)


def test_saving_leaves_what_did_not_change_as_it_was_written():
    design = store.read_text(TEXT)
    assert store.to_text(design, TEXT) == TEXT
    longer = with_value(design, "station.line.length", 30.0)
    assert store.to_text(longer, TEXT) == TEXT.replace('"82 ft"', '"30 m"')
    heavier = with_value(design, "bands.lower.wanted.2.weight", 2.0)
    assert store.read_text(store.to_text(heavier, TEXT)) == heavier
    dearer = with_value(design, "station.transmitter.table.2.watts", 20.0)
    assert store.to_text(dearer, TEXT) == TEXT.replace('"30 W"', '"20 W"')


def positive(low, high):
    return st.floats(low, high)


LINES = st.builds(
    FeedLine,
    type=st.sampled_from([*CABLES]),
    length=positive(1e-3, 2000),
    z0=st.none() | positive(5, 1500),
    velocity_factor=st.none() | positive(0.2, 1),
    voltage=st.none() | positive(1, 1e6),
    age=positive(0, 60),
    weather=st.sampled_from(list(LineWeather)),
    losses=st.just(())
    | st.tuples(st.builds(ListedLoss, frequency=positive(1e5, 1e9), loss=positive(1e-6, 10))),
)
COILS = st.builds(
    TunerCoil,
    low=positive(0, 1e-6),
    high=positive(2e-6, 1e-3),
    taps=st.just(()) | st.tuples(st.builds(Tap, inductance=positive(1e-9, 1e-3))),
    current=st.none() | positive(0.01, 1000),
)
CAPACITORS = st.builds(
    TunerCapacitor,
    low=positive(0, 1e-10),
    high=positive(2e-10, 1e-6),
    steps=st.none() | st.integers(2, 4096).map(float),
)
TUNERS = st.builds(
    Tuner,
    network=st.sampled_from([*TUNER_NETWORKS]),
    place=st.sampled_from(list(TunerPlace)),
    coil=COILS,
    capacitor=CAPACITORS,
    load_coil=st.none() | COILS,
    load_capacitor=st.none() | CAPACITORS,
)
TABLES = st.lists(st.floats(1, 100), max_size=4, unique=True).map(
    lambda swrs: tuple(Foldback(swr=s, watts=100 / s) for s in sorted(swrs))
)


@settings(max_examples=80, deadline=None, derandomize=True, database=None)
@given(
    st.none() | LINES,
    st.none() | st.builds(Choke, upper=st.none() | positive(1, 1e6), ratio=positive(0.01, 100)),
    st.none() | TUNERS,
    st.none() | st.builds(Transmitter, table=TABLES),
    st.lists(st.floats(7e6, 7.2e6), min_size=2, max_size=6, unique=True).filter(lambda f: len(f) % 2 == 0),
)
def test_a_station_comes_back_exactly(line, choke, tuner, transmitter, edges):
    design = store.read_text(TEXT)
    edges = sorted(edges)
    wanted = tuple(
        Segment(low=a, high=b, weight=1 + a / 7e6) for a, b in zip(edges[::2], edges[1::2], strict=True)
    )
    station = replace(design.station, line=line, choke=choke, tuner=tuner, transmitter=transmitter)
    design = with_value(replace(design, station=station), "bands.lower.wanted", wanted)
    assert check(design) == ()
    assert store.read_text(store.to_text(design)) == design
    assert store.read_text(store.to_text(design, TEXT)) == design


@pytest.mark.parametrize(
    ("old", "new", "told"),
    [
        ('"82 ft"', '"0 m"', "station.line.length: '0 m' is not above 0 m; above 0 m up to 2000 m"),
        ('length = "82 ft"\n', "", "station.line.length: a value is missing; for example length ="),
        ('"rg-58/u"', '"rg-99"', "station.line.type: 'rg-99' is not one of RG-58/U,"),
        (
            '"8 dB/100m"',
            '"1 dB/100m"',
            "station.line.losses: cannot be fitted; loss must rise with frequency",
        ),
        ("swr = 3", "swr = 2", "station.transmitter.table.2.swr: '2' is not above 2;"),
        ('"30 W"', '"130 W"', "station.transmitter.table.2.watts: '130 W' is more than 100 W;"),
        ("steps = 128", "steps = 12.5", "station.tuner.coil.steps: is not whole;"),
        ('low = "0 uH"', 'low = "20 uH"', "station.tuner.coil.high: '16 uH' is not above 20 uH;"),
        ('"l-low-pass"', '"t"', "station.tuner.network: 't' is not one of t-clc,"),
        ('"7.15 MHz" }', '"7.25 MHz" }', "bands.lower.wanted.2.high: '7.25 MHz' is outside 7 MHz to 7.2 MHz"),
        (
            'low = "7.1 MHz"',
            'low = "7.16 MHz"',
            "bands.lower.wanted.2.high: '7.15 MHz' is not above 7.16 MHz;",
        ),
        (
            'low = "7.1 MHz"',
            'low = "7.04 MHz"',
            "bands.lower.wanted.2.low: '7.04 MHz' is less than 7.05 MHz;",
        ),
        ("# Two nets", 'wanted_low = "7.1 MHz"\n#', "bands.lower.wanted: only one may be given;"),
        ('place = "feed"', 'placed = "feed"', "station.tuner.placed: 'placed' is not a known name; did you"),
    ],
)
def test_refused_in_one_line(old, new, told):
    assert old in TEXT
    (line,) = faults(TEXT.replace(old, new, 1))
    assert line.startswith(told)


def test_a_line_of_its_own_needs_every_number():
    text = TEXT.replace('"rg-58/u"', '"own"').replace("losses = [", "x = [").replace("x = [", "age = 0 #")
    assert [fault.partition(":")[0] for fault in faults(text)] == [
        f"station.line.{name}" for name in ("z0", "velocity_factor", "losses")
    ]


def test_every_circuit_of_a_tuner_is_a_network_of_the_engine():
    assert {circuit for circuits in TUNER_NETWORKS.values() for circuit in circuits} <= set(NETWORKS)
    assert set(TUNER_NETWORKS) >= {name for name in NETWORKS if name.startswith("l-")}
