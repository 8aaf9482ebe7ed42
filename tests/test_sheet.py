"""The build sheet: it fits paper and a small screen, says what to cut, and carries every caution."""

import json
import re
from dataclasses import replace

import pytest

from tests.sample_figures import BANDS, DESIGN, FIGURES, LENGTHS, PLAIN
from trapdesk.design.design import Bands
from trapdesk.design.parts import GivenCapacitor, GivenCoil
from trapdesk.faces import hill_card, json_out, sheet, words

GIVEN_COIL = replace(
    FIGURES,
    design=replace(
        DESIGN,
        antenna=replace(
            DESIGN.antenna,
            trap=replace(DESIGN.antenna.trap, coil=GivenCoil(), capacitor=GivenCapacitor(capacitance=47e-12)),
        ),
    ),
    trap=replace(FIGURES.trap, coil=None, inductance_doubt=0.0, resonance_doubt=0.0),
)
LOWER_ONLY = replace(
    FIGURES,
    design=replace(DESIGN, bands=Bands(lower=DESIGN.bands.lower)),
    bands={"lower": BANDS["lower"]},
)
EVERY = {"traps": FIGURES, "plain": PLAIN, "given coil": GIVEN_COIL, "one band": LOWER_ONLY}


@pytest.fixture(params=EVERY)
def figures(request):
    return EVERY[request.param]


def words_of(text: str) -> str:
    return " ".join(text.split())


def test_fits_paper(figures):
    lines = sheet.text(figures).splitlines()
    assert max(map(len, lines)) <= 79
    assert all(line.isascii() and line.isprintable() and line == line.rstrip() for line in lines)


def test_hill_card_fits_a_small_screen(figures):
    assert len(hill_card.lines(figures)) < 24
    assert all(len(line) <= 79 for line in hill_card.lines(figures))


def test_every_caution_is_on_it(figures):
    text = words_of(sheet.text(figures))
    for caution in words.CAUTIONS:
        assert words_of(caution) in text


def test_cautions_cover_what_can_kill():
    text = " ".join(words.CAUTIONS).lower()
    for danger in ("power lines", "length of antenna plus mast", "burn", "exposed", "mast", "thunderstorm"):
        assert danger in text
    assert "local codes and licensed practice decide" in text


def test_says_that_it_is_an_estimate(figures):
    assert sheet.text(figures).count("an estimate, not measured") >= 2


def test_three_lengths_of_each_wire():
    text = sheet.text(FIGURES)
    assert re.search(r"inner wire +5\.03 m +5\.03 m +5\.47 m", text)
    assert re.search(r"end wire +3\.22 m +3\.22 m +3\.69 m", text)
    flat = words_of(text)
    assert "feed point to trap centre" in flat
    assert "from the feed point terminal to the trap's near end" in flat
    assert "12 cm for each knot, 15 cm for the end loop, 20 cm to spare" in flat


def test_how_to_wind():
    text = words_of(sheet.text(FIGURES))
    assert "10.37 +- 0.08 turns of copper wire 1.6 mm on a former 50 mm outside" in text
    assert "Mean diameter 51.7 mm (former and one wire with its insulation), winding length 31.1 mm" in text
    assert "Cut 1.88 m: 1.68 m in the turns, 10 cm for each tail" in text
    assert "14.05 MHz by itself" in text


def test_peak_stands_apart_from_average():
    text = sheet.text(FIGURES)
    assert re.search(r"peak volts +coil, rms +steady heat +average SSB", text)
    assert re.search(r"20 m +1\.9 \+- 0\.4 kV +6 \+- 1 A +6 \+- 1 W +1\.3 \+- 0\.3 W", text)


def test_no_trap_no_word_of_traps():
    text = sheet.text(PLAIN)
    assert "TRAPS" not in text
    assert "STRESS" not in text


# By hand from the slopes of the sample: 50 kHz / (712 kHz/m) = 7.0 cm, and 40 m goes 0.0702 m * 491 kHz/m.
def test_hill_card_against_the_slopes():
    inner, end = hill_card.cards(FIGURES)
    assert (inner.band.name, inner.wire, inner.shorten_when_low) == ("20 m", "inner", True)
    assert (end.band.name, end.wire, end.other.name) == ("40 m", "end", "20 m")
    assert inner.moves[0].off == 20e3
    assert inner.moves[-1].off == 100e3
    assert inner.moves[-1].change == pytest.approx(100 / 712)
    assert inner.moves[-1].other == pytest.approx(100e3 * 491 / 712)
    lines = hill_card.lines(FIGURES)
    assert any(re.fullmatch(r" +100 kHz +14 cm +69 kHz", line) for line in lines)
    titles = [line for line in lines if re.match(r"\d\. ", line)]
    assert titles == [
        "1. 20 m, aim 14.15 MHz: dip too low, shorten; dip too high, let out.",
        "2. 40 m, aim 7.10 MHz: dip too low, shorten; dip too high, let out.",
    ]


def test_hill_card_turns_round_with_the_slope():
    odd = replace(BANDS["upper"], effects=replace(BANDS["upper"].effects, inner=712e3))
    card = hill_card.cards(replace(FIGURES, bands=FIGURES.bands | {"upper": odd}))[0]
    assert not card.shorten_when_low
    # Longer raises 20 m now and still lowers 40 m: the other band goes against it.
    assert card.moves[-1].other == pytest.approx(-100e3 * 491 / 712)
    assert "dip too low, let out" in "\n".join(
        hill_card.lines(replace(FIGURES, bands=FIGURES.bands | {"upper": odd}))
    )


def test_hill_card_without_resonance():
    bands = {role: replace(band, effects=None) for role, band in BANDS.items()}
    figures = replace(FIGURES, bands=bands)
    assert hill_card.cards(figures) == ()
    assert any("No resonance near the aim" in line for line in hill_card.lines(figures))


def test_one_band_moves_the_end_wires():
    (card,) = hill_card.cards(LOWER_ONLY)
    assert (card.wire, card.other) == ("end", None)


def test_stretch_is_told():
    wire = replace(DESIGN.antenna.wire, stretch=0.012)
    design = replace(DESIGN, antenna=replace(DESIGN.antenna, wire=wire))
    lengths = replace(LENGTHS, inner_mark=LENGTHS.inner / 1.012)
    assert "1.2 % longer" in words_of(sheet.text(replace(FIGURES, design=design, lengths=lengths)))


def test_json_carries_card_and_cautions(figures):
    document = json.loads(json_out.text(sheet.document(figures)))
    assert document["cautions"] == list(words.CAUTIONS)
    cards = document["hill_card"]
    assert len(cards) == (1 if figures in (PLAIN, LOWER_ONLY) else 2)
    assert cards[0]["moves"][0]["change_m"] > 0
    assert "bands" in document
