"""Is it worth it: the four ways by hand, the cheapest improvement, the table as text."""

from dataclasses import replace

import numpy as np
import pytest

from trapdesk.design.design import MODES, with_value
from trapdesk.design.fields import SOLVE
from trapdesk.design.station import Choke, FeedLine, Foldback, Segment, Transmitter, Tuner, TunerPlace
from trapdesk.engine.cables import line_figures, propagation
from trapdesk.faces import feed_out
from trapdesk.services.antenna.feed_point import FeedPoint
from trapdesk.services.antenna.solve import solve
from trapdesk.services.compare.worth import POINTS, Way, worth
from trapdesk.services.feed.path import given_power, laid_line
from trapdesk.store import store

DESIGN, _ = store.preset("40-20-vee")
FED = replace(DESIGN, station=replace(DESIGN.station, line=FeedLine(length=25.0), transmitter=Transmitter()))


def cut(design, inner, end):
    design = with_value(design, "antenna.lengths.inner", inner)
    return with_value(design, "antenna.lengths.end", end)


SOLVED = solve(FED)
WIRE = SOLVED.wire
LONG = solve(cut(FED, WIRE.inner + 0.45, WIRE.end + 0.4))
TABLE = worth(LONG)


def ways(table, role):
    return {row.way: row for row in table.bands[role]}


def test_as_it_is_by_hand():
    """Line, transmitter and wire put together once more, point by point."""
    point, line = FeedPoint(LONG), laid_line(FED.station.line)
    for role in LONG.bands:
        low, high = getattr(FED.bands, role).wanted_edges
        frequency = np.linspace(low, high, POINTS)
        feed = point.impedance(role, frequency)
        use = line_figures(*propagation(line, frequency), 25.0, feed, 50.0)
        r = np.abs((use.input_impedance - 50) / (use.input_impedance + 50))
        ratio = (1 + r) / (1 - r)
        given = given_power(FED.station, ratio)
        row = ways(TABLE, role)[Way.AS_IS]
        assert row.worst_swr == pytest.approx(ratio.max(), rel=1e-9)
        assert row.made == pytest.approx(given.mean(), rel=1e-9)
        assert row.least_given == pytest.approx(given.min(), rel=1e-9)
        assert row.least_given < FED.station.power
        # The sky's share hardly changes over the band: that at the aim, within a few per cent.
        sky = LONG.bands[role].shares.sky
        assert row.radiated == pytest.approx((given * use.power_load).mean() * sky, rel=0.05)
        lost = (given * (1 - use.power_load)).max() * MODES["SSB"].mean
        assert (row.hottest, row.hottest_watts) == ("line", pytest.approx(lost, rel=1e-9))


def test_a_tuner_lets_the_transmitter_give_all_and_the_feed_point_is_the_better_place():
    for role in LONG.bands:
        rows = ways(TABLE, role)
        for way in (Way.AT_TRANSMITTER, Way.AT_FEED):
            assert rows[way].matched and rows[way].worst_swr < 1.05
            assert rows[way].made == pytest.approx(100.0)
        assert rows[Way.AT_FEED].radiated > rows[Way.AT_TRANSMITTER].radiated > rows[Way.AS_IS].radiated
        # A tuner at the radio changes nothing on the line: it gains by the watts made, less its own loss.
        gain = rows[Way.AT_TRANSMITTER].share / rows[Way.AS_IS].share
        assert 0.8 < gain < 1.02


def test_recut_wires_are_those_of_the_solved_design():
    fresh = worth(SOLVED)
    for role in LONG.bands:
        again, there = ways(TABLE, role)[Way.RECUT], ways(fresh, role)[Way.AS_IS]
        assert again.radiated == pytest.approx(there.radiated, rel=1e-6)
        assert again.worst_swr == pytest.approx(there.worst_swr, rel=1e-6)
    assert fresh.no_recut == "already_cut_for_the_aims" and Way.RECUT not in ways(fresh, "upper")


def test_the_cheapest_improvement():
    assert TABLE.advice is Way.RECUT and TABLE.gain > 1
    fresh = worth(SOLVED)
    assert (fresh.advice, fresh.gaining) == (Way.AS_IS, "")
    # Wanted at both ends of the band with wires that are right: then it is a tuner.
    wide = replace(DESIGN.bands.upper, wanted_low=None, wanted_high=None)
    wider = replace(DESIGN.bands.lower, wanted_low=None, wanted_high=None)
    table = (Foldback(swr=1.2, watts=100.0), Foldback(swr=1.4, watts=30.0))
    station = replace(
        FED.station, line=FeedLine(type="RG-213/U", length=10.0), transmitter=Transmitter(table=table)
    )
    asked = worth(solve(replace(FED, bands=replace(DESIGN.bands, upper=wide, lower=wider), station=station)))
    assert asked.advice is Way.AT_TRANSMITTER
    assert "a tuner at the transmitter" in feed_out.advice(SOLVED, asked)


def test_weights_of_segments():
    upper = replace(
        DESIGN.bands.upper,
        wanted_low=None,
        wanted_high=None,
        wanted=(Segment(low=14.0e6, high=14.05e6, weight=3.0), Segment(low=14.3e6, high=14.35e6)),
    )
    weighed = worth(solve(replace(FED, bands=replace(DESIGN.bands, upper=upper))))
    alone = []
    for segment in upper.wanted:
        band = replace(upper, wanted=(), wanted_low=segment.low, wanted_high=segment.high, aim=upper.target)
        alone.append(
            ways(worth(solve(replace(FED, bands=replace(DESIGN.bands, upper=band)))), "upper")[Way.AS_IS]
        )
    row = ways(weighed, "upper")[Way.AS_IS]
    assert row.radiated == pytest.approx((3 * alone[0].radiated + alone[1].radiated) / 4, rel=1e-6)
    assert row.worst_swr == pytest.approx(max(a.worst_swr for a in alone), rel=1e-6)


def test_what_stands_in_is_said():
    table = worth(solve(replace(DESIGN, station=replace(DESIGN.station, line=FeedLine(length=25.0)))))
    assert table.typical_transmitter and table.standing_in
    text = " ".join(feed_out.table_lines(SOLVED, table))
    assert "a typical one is taken" in " ".join(text.split()) and "stands in" in text
    own = replace(
        FED.station,
        transmitter=Transmitter(table=(Foldback(swr=2.0, watts=100.0), Foldback(swr=3.0, watts=10.0))),
        tuner=Tuner(place=TunerPlace.FEED),
        choke=Choke(upper=2e3, lower=2e3),
    )
    table = worth(solve(replace(FED, station=own)))
    assert not table.typical_transmitter and not table.standing_in


def test_table_as_text():
    for figures, table in ((LONG, TABLE), (SOLVED, worth(SOLVED))):
        lines = list(feed_out.table_lines(figures, table))
        assert max(map(len, lines)) <= 79 and all(line.isascii() for line in lines)
        assert sum("as it is" in line and " W" in line for line in lines) == 2
    assert any("wires re-cut" in line and "already cut" in line for line in lines)


def test_one_band_without_a_trap():
    lengths = replace(DESIGN.antenna.lengths, inner=11.5, end=None)
    design = replace(
        FED,
        bands=replace(DESIGN.bands, upper=None),
        antenna=replace(DESIGN.antenna, trap=None, lengths=lengths),
    )
    table = worth(solve(design))
    rows = ways(table, "lower")
    assert set(rows) == set(Way) and table.advice is Way.RECUT
    assert worth(solve(with_value(design, "antenna.lengths.inner", SOLVE))).no_recut
