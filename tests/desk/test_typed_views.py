"""The views that are typed into, by keyboard: readings, the next move, sums, loads; as their verbs answer."""

import pytest

from tests.desk.screens import (
    lines_of,
    missing,
    noted,
    opened,
    pane,
    pressed,
    said,
    settled,
    shown,
    text,
    typed,
    worked_out,
)

PRESET = "40-20-vee"
READINGS = "trap.f0=13.98MHz trap.f0_with=11.6MHz,added=22pF"


async def test_readings_come_to_what_the_verb_says_and_are_kept():
    printed = said("readings", PRESET, *READINGS.split())
    async with opened() as (desk, pilot):
        await shown(desk, pilot, "M")
        for reading in READINGS.split():
            await pressed(desk, pilot, "enter")
            await typed(desk, pilot, reading, "enter")
            await worked_out(desk, pilot)
        assert missing(printed, pane(desk)) == []
        before = desk.session.design
        await pressed(desk, pilot, "a")
        await worked_out(desk, pilot)
        assert desk.session.design.antenna.trap.measured.resonance == pytest.approx(13.98e6, rel=1e-3)
        await pressed(desk, pilot, "u")
        assert desk.session.design is before
        await pressed(desk, pilot, "backspace")
        assert desk.session.aside.readings == (READINGS.split()[0],)
        await worked_out(desk, pilot)


async def test_a_reading_that_cannot_be_read_is_refused_and_can_be_mended():
    async with opened() as (desk, pilot):
        await shown(desk, pilot, "M")
        for wrong in ("trap.f0=13 parsnips", "nonsense", "trap.f0=", "x" * 150, "[red]=1MHz"):
            await pressed(desk, pilot, "enter")
            await typed(desk, pilot, wrong, "enter")
            assert desk.session.aside.readings == (), wrong
            assert desk.foot.asking, wrong
            await pressed(desk, pilot, "escape")
            assert not desk.foot.asking


HUNG = "upper.dip=14.07MHz lower.dip=7.05MHz"


async def test_the_next_move_is_that_of_the_verb_and_is_kept():
    async with opened() as (desk, pilot):
        await shown(desk, pilot, "N")
        assert "Nothing was read yet" in pane(desk)
        await pressed(desk, pilot, "a")
        assert "! there are no readings to keep yet" in text(desk)
        await pressed(desk, pilot, "enter", "ctrl+u")
        await typed(desk, pilot, "trap.f0=14MHz", "enter")
        assert desk.foot.asking
        await pressed(desk, pilot, "ctrl+u")
        await typed(desk, pilot, HUNG, "enter")
        await worked_out(desk, pilot)
        assert missing(said("next", PRESET, *HUNG.split()), pane(desk)) == []
        assert "next: MOVE Both sides alike: fold" in text(desk)
        before = desk.session.design
        await pressed(desk, pilot, "a")
        kept = desk.session.design
        assert kept.history.steps[0].readings == HUNG
        assert kept.history.steps[0].inner < -0.1
        await pressed(desk, pilot, "d", "ctrl+u")
        await typed(desk, pilot, "inner=-20cm", "enter")
        assert desk.session.design.history.steps[0].inner == pytest.approx(-0.2)
        await pressed(desk, pilot, "u", "u")
        assert desk.session.design is before
        await pressed(desk, pilot, "tab")
        await settled(desk, pilot)


SUMS = [
    "tank f=10.05MHz C=47pF Q=180",
    "match Z=35-j120 f=7.1MHz",
    "line RG-58/U length=20m f=7.1MHz Z=35-j120",
]


async def test_sums_are_those_of_their_verbs():
    async with opened() as (desk, pilot):
        await shown(desk, pilot, "Q")
        for words in SUMS:
            printed = said(*words.split())
            await pressed(desk, pilot, "enter", "ctrl+u")
            await typed(desk, pilot, words, "enter")
            await worked_out(desk, pilot)
            assert missing(printed, pane(desk)) == []
        printed = said("figures", PRESET, "--at", "7.05MHz,14.2MHz")
        await pressed(desk, pilot, "enter", "ctrl+u")
        await typed(desk, pilot, "at 7.05MHz,14.2MHz", "enter")
        await worked_out(desk, pilot)
        asked = [line for line in lines_of(pane(desk))[2:] if line]
        assert len(asked) == 4
        assert missing("\n".join(asked), printed) == []


async def test_a_sum_that_cannot_be_done_is_answered_in_words():
    async with opened() as (desk, pilot):
        await shown(desk, pilot, "Q")
        for wrong in ("parsnips", "tank", "tank f=1 parsnip", "line", "match Z=0", "at 7"):
            await pressed(desk, pilot, "enter", "ctrl+u")
            await typed(desk, pilot, wrong, "enter")
            await worked_out(desk, pilot)
            assert any(line.startswith("! ") for line in pane(desk).splitlines()), wrong
            assert "Traceback" not in text(desk)


async def test_a_load_is_read_off_the_map_as_the_verb_does():
    printed = said("tuner", PRESET, "--load", "35-j120")
    async with opened() as (desk, pilot):
        await shown(desk, pilot, "L")
        await pressed(desk, pilot, "enter", "ctrl+u")
        await typed(desk, pilot, "-5+j0", "enter")
        assert any(line.startswith("! ") for line in await noted(desk, pilot))
        await pressed(desk, pilot, "enter", "ctrl+u")
        await typed(desk, pilot, "35-j120", "enter")
        told = [line for line in lines_of(printed) if "35 - j120" in line]
        assert len(told) == 2
        assert missing("\n".join(told), pane(desk)) == []
