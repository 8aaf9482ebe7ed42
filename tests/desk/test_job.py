"""The whole job at the desk from an empty design, by keyboard alone; and what was found in doing it."""

import asyncio
from dataclasses import replace

import pytest
from textual.events import Key

from tests.desk.screens import LONGEST, go_to, opened, pressed, screen, settled, text, typed
from tests.desk.test_panes import BOX
from trapdesk.design.design import Shape
from trapdesk.design.history import History, Step
from trapdesk.engine.soils import GroundKind
from trapdesk.faces.desk.config import Config
from trapdesk.faces.desk.fresh import begun
from trapdesk.store import store

HEIGHT = "site.height"
MOST_KEYS = 260


class Operator:
    """Somebody at the keyboard, whose keys are counted."""

    def __init__(self, desk, pilot):
        self.desk, self.pilot, self.keys = desk, pilot, 0

    async def keys_of(self, *words):
        """Press keys by name, and type what begins with a blank; then wait for every answer."""
        for word in words:
            names = list(word[1:]) if word.startswith(" ") else [word]
            self.keys += len(names)
            await pressed(self.desk, self.pilot, *names)
        await settled(self.desk, self.pilot)
        await asyncio.wait_for(self.desk.session.aside.settled(), 4 * LONGEST)
        await self.pilot.pause()


async def test_the_whole_job_from_an_empty_design_by_keyboard_alone(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    (tmp_path / "my-box.toml").write_text(BOX)
    async with opened() as (desk, pilot):
        person, session = Operator(desk, pilot), desk.session
        await person.keys_of("n", " 40 20", "enter")
        await person.keys_of("slash", " wanted", "enter", " 14.1MHz", "enter", "down", " 14.25MHz", "enter")
        await person.keys_of(*["down"] * 6, " 7.05MHz", "enter", "down", " 7.12MHz", "enter")
        await person.keys_of("slash", " wire", "enter", "enter", " AWG 14", "enter")
        await person.keys_of("slash", " shape", "enter", "enter", "slash", " height", "enter", " 8m", "enter")
        await person.keys_of("slash", " trap r", "enter", " 14.05MHz", "enter")
        await person.keys_of("B", "b", " my-box.toml", "enter")
        await person.keys_of("enter")
        assert session.design.antenna.trap.coil.kind == "solenoid"
        await person.keys_of("Y")
        assert "how many of 100" in text(desk)
        await person.keys_of("slash", " line", "enter", "enter", "slash", " line len", "enter", " 20m")
        await person.keys_of("enter")
        await person.keys_of("slash", " tuner", "enter", "enter", "slash", " power", "enter", " 50W", "enter")
        await person.keys_of("w", "enter")
        # A text is written once it is there: the view says so until then.
        await person.keys_of("P")
        await person.keys_of("x", "enter", "H", "x", "enter")
        await person.keys_of("M", "enter", " trap.f0=14.0MHz", "enter", "a")
        assert session.design.antenna.trap.measured.resonance == pytest.approx(14.0e6)
        await person.keys_of("N", "enter", " 14.08MHz lower.dip=7.03MHz", "enter")
        assert "next: MOVE" in text(desk)
        # What to do stands in sight, above what it rests on.
        assert any(line.startswith("MOVE ") for line in screen(desk)[4:18])
        await person.keys_of("a")
        assert "next: hoist it as it was moved" in text(desk)
        await person.keys_of("p", " 80-40-flat", "enter")
        assert "nothing read yet" in desk.query_one("#answer").plain()
        await person.keys_of("a", "w")
        assert person.keys <= MOST_KEYS, person.keys
        assert not session.unsaved
        saved = store.load("40-20.toml")
    stay, *_ = saved.history.stays
    assert stay.steps[0].readings == "upper.dip=14.08MHz lower.dip=7.03MHz"
    assert (stay.site.shape, stay.site.height) == (Shape.VEE, 8.0)
    assert saved.site == store.preset("80-40-flat")[0].site
    assert saved.station.line.length == 20.0
    assert saved.station.power == 50.0
    assert (tmp_path / "paper.txt").read_text().startswith("BUILD SHEET: 40/20 m, new")
    assert (tmp_path / "hill.txt").read_text().startswith("HILL CARD: 40/20 m, new")


async def test_a_word_chosen_stands_for_the_kind_it_names():
    async with opened(document=begun("40 20", Config())) as (desk, pilot):
        await go_to(desk, pilot, "site.shape")
        await pressed(desk, pilot, "enter")
        await settled(desk, pilot)
        assert desk.session.design.site.shape is Shape.VEE
        # Where the ends hang is told of a vee alone.
        assert ", ends at " in screen(desk)[1]
        await go_to(desk, pilot, "site.ground")
        await pressed(desk, pilot, "e", *"space", "enter")
        await settled(desk, pilot)
        assert desk.session.design.site.ground is GroundKind.SPACE
        assert "far from any ground" in screen(desk)[1]


async def test_typing_replaces_what_enter_began_with_and_arrows_mend_it():
    async with opened() as (desk, pilot):
        await go_to(desk, pilot, "antenna.wire.diameter")
        await pressed(desk, pilot, "enter")
        await typed(desk, pilot, "AWG 12", "enter")
        assert desk.session.design.antenna.wire.diameter == pytest.approx(0.0808 * 0.0254, rel=1e-3)
        await go_to(desk, pilot, HEIGHT)
        await pressed(desk, pilot, "enter", "home", "1", "enter")
        assert desk.session.design.site.height == 110.0
        await pressed(desk, pilot, "u", "u")
        await settled(desk, pilot)


async def test_escape_and_a_letter_that_come_at_once_are_both_taken():
    async with opened() as (desk, pilot):
        await go_to(desk, pilot, HEIGHT)
        before = desk.session.design
        await typed(desk, pilot, "99 m")
        desk.post_message(Key("alt+v", "v"))
        await pilot.pause()
        assert not desk.drawers.editing
        assert desk.session.design is before
        assert "[SWR]" in text(desk)
        desk.post_message(Key("alt+shift+a", "A"))
        await pilot.pause()
        assert "[answer]" in text(desk)


async def test_nothing_found_of_another_design_is_shown():
    async with opened() as (desk, pilot):
        await asyncio.wait_for(desk.session.aside.settled(), 20)
        await pilot.pause()
        assert "yield: as cut" in text(desk)
        desk.session.aside.hung = ("upper.dip=14MHz",)
        desk.session.open(begun("80 40", Config()))
        desk.solve()
        assert "yield: being worked out" in text(desk)
        assert desk.session.aside.hung == ()
        await settled(desk, pilot)


async def test_another_site_is_asked_about_once_readings_were_kept():
    async with opened() as (desk, pilot):
        history = History(steps=(Step(readings="upper.dip=14.1MHz", inner=-0.05),))
        desk.session.take(replace(desk.session.design, history=history))
        desk.solve()
        await settled(desk, pilot)
        before, wires = desk.session.design, desk.session.figures.lengths
        assert "next: hoist it as it was moved" in text(desk)
        await go_to(desk, pilot, HEIGHT)
        for key, height in (("escape", 10.0), ("c", 9.0), ("n", 9.0)):
            await typed(desk, pilot, "9 m", "enter")
            assert "readings were kept at this site" in text(desk)
            await pressed(desk, pilot, key)
            assert desk.session.design.site.height == height
            assert (desk.session.design.history == history) is (key != "n")
            moved = desk.session.design
            if moved != before:
                await pressed(desk, pilot, "u")
                await settled(desk, pilot)
                assert desk.session.design == before
        await pressed(desk, pilot, "U")
        assert moved.history.steps == ()
        assert moved.history.stays[0].steps == history.steps
        assert moved.history.stays[0].site == before.site
        # The wires stay as they were cut, wherever they hang.
        assert moved.antenna.lengths.inner == pytest.approx(wires.inner, abs=1e-4)
        assert moved.antenna.lengths.end == pytest.approx(wires.end, abs=1e-4)
        await settled(desk, pilot)
        assert not desk.session.no_answer
        await typed(desk, pilot, "8 m", "enter")
        assert desk.session.design.site.height == 8.0
        await settled(desk, pilot)
