"""The desk by keyboard, its screen read as plain lines of text."""

import asyncio
import threading
from dataclasses import replace

import pytest
from textual.events import Paste

from tests.desk.screens import BRAILLE, go_to, noted, opened, pressed, screen, settled, text, typed
from trapdesk.design.design import get
from trapdesk.design.fields import SOLVE
from trapdesk.faces import rows
from trapdesk.faces.desk.opening import run
from trapdesk.services.antenna.solve import solve
from trapdesk.store import store

HEIGHT = "site.height"


async def test_opens_on_the_preset_with_what_is_needed_to_trust_it():
    async with opened() as (desk, _):
        lines = screen(desk)
        whole = " ".join(lines)
        figures = desk.session.figures
        assert lines[0] == f"{desk.session.design.title}: an estimate, not measured"
        assert lines[1] == rows.site_line(figures)
        assert lines[2] == rows.station_line(figures.design)
        assert "[Site]" in lines[3]
        assert "[answer]" in lines[3]
        for band in figures.bands.values():
            dip = rows.band_line(figures, band).partition(",")[0]
            assert dip in whole
        for word in ("wires ", "1 cm ", "trap ", "check ", "extra on each wire", "next: "):
            assert word in whole
        assert "Enter edit" in lines[-1]


@pytest.mark.parametrize("size", [(80, 24), (120, 40), (40, 12), (72, 18), (100, 50), (200, 60), (110, 20)])
async def test_is_laid_out_at_every_size(size):
    async with opened(size) as (desk, pilot):
        for _ in range(7):
            lines = screen(desk)
            assert "estimate" in lines[0]
            assert any(level in " ".join(lines) for level in ("watch:", "fine:", "STOP:"))
            assert lines[-1].strip()
            await pressed(desk, pilot, "v")
        await pressed(desk, pilot, "question_mark")
        assert "[help]" in text(desk) or "help" in text(desk).splitlines()[3]


@pytest.mark.parametrize("size", [(39, 12), (40, 11), (10, 3), (1, 1), (200, 5)])
async def test_too_small_a_screen_says_so_in_one_line(size):
    async with opened(size) as (desk, _):
        lines = screen(desk)
        assert lines[0].startswith(f"the desk needs 40x12, not {size[0]}x{size[1]}"[: max(0, size[0] - 1)])
        assert not any(lines[1:])


async def test_wide_screen_has_inputs_answer_plot_and_findings_side_by_side():
    async with opened((120, 40), look=BRAILLE) as (desk, _):
        lines = screen(desk)
        names = lines[3]
        assert names.index("[Site]") < names.index("answer") < names.index("findings")
        whole = "\n".join(lines)
        for word in ("SWR", "MHz", "Site", "Bands", "helps: "):
            assert word in whole
        assert any(0x2801 <= ord(character) <= 0x28FF for character in whole)
        columns = {i for i, c in enumerate(lines[4]) if c == "│"}
        assert all(line[column] == "│" for line in lines[3:35] for column in columns & {36})


async def test_bare_terminal_gets_nothing_but_ascii():
    async with opened((120, 40)) as (desk, pilot):
        for _ in range(4):
            assert text(desk).isascii()
            await pressed(desk, pilot, "v")


async def test_an_edit_changes_the_design_and_the_figures():
    async with opened() as (desk, pilot):
        await go_to(desk, pilot, HEIGHT)
        before = desk.session.figures
        await typed(desk, pilot, "39 ft 4 in", "enter")
        await settled(desk, pilot)
        assert desk.session.design.site.height == pytest.approx(472 * 0.0254)
        assert desk.session.figures.bands["lower"].dip != before.bands["lower"].dip
        assert "height: 11.99 m, was 10 m" in text(desk)
        assert "feed point at 11.99 m" in screen(desk)[1]


async def test_a_gauge_is_typed_after_enter():
    async with opened() as (desk, pilot):
        await go_to(desk, pilot, "antenna.wire.diameter")
        await pressed(desk, pilot, "enter", "ctrl+u")
        await typed(desk, pilot, "AWG 12", "enter")
        # ASTM B258: AWG 12 is 0.0808 in.
        assert desk.session.design.antenna.wire.diameter == pytest.approx(0.0808 * 0.0254, rel=1e-3)


@pytest.mark.parametrize(
    ("key", "wrong", "says"),
    [
        (HEIGHT, "5 parsnips", "unit"),
        (HEIGHT, "12 pF", "a length is wanted"),
        (HEIGHT, "9000 m", "300 m"),
        (HEIGHT, "0.1 m", "50 cm"),
        (HEIGHT, "[red]x[/red]", "[red]x[/red]"),
        (HEIGHT, "nan", "not a finite number"),
        ("site.included_angle", "500 deg", "180 deg"),
        ("bands.lower.high", "6 MHz", ""),
        (HEIGHT, "solve", "solve"),
        ("antenna.trap.coil.pitch", "1 mm", ""),
    ],
)
async def test_what_cannot_be_is_refused_in_a_line_and_the_old_value_stays(key, wrong, says):
    async with opened() as (desk, pilot):
        await go_to(desk, pilot, key)
        before = desk.session.design
        await pressed(desk, pilot, "enter", "ctrl+u")
        await typed(desk, pilot, wrong, "enter")
        foot = await noted(desk, pilot)
        assert len([line for line in foot if line.startswith("! ")]) == 1
        assert says in " ".join(foot)
        assert "Traceback" not in text(desk)
        assert desk.session.design is before
        assert desk.drawers.editing
        await pressed(desk, pilot, "escape")
        assert not desk.drawers.editing
        assert desk.session.design is before


async def test_escape_restores():
    async with opened() as (desk, pilot):
        await go_to(desk, pilot, HEIGHT)
        before = desk.session.design
        await typed(desk, pilot, "99 m", "escape")
        assert desk.session.design is before
        assert "height            10 m" in text(desk)


async def test_letters_are_commands_only_while_browsing():
    async with opened() as (desk, pilot):
        await go_to(desk, pilot, "title")
        await pressed(desk, pilot, "enter", "ctrl+u")
        await typed(desk, pilot, "quiver vows tea", "enter")
        assert desk.session.design.title == "quiver vows tea"
        assert desk.is_running


async def test_undo_and_redo():
    async with opened() as (desk, pilot):
        first = desk.session.design
        await go_to(desk, pilot, HEIGHT)
        await typed(desk, pilot, "12 m", "enter")
        await pressed(desk, pilot, "plus")
        await settled(desk, pilot)
        assert desk.session.design.site.height == pytest.approx(12.01)
        await pressed(desk, pilot, "u", "u")
        await settled(desk, pilot)
        assert desk.session.design is first
        assert desk.session.figures.design == first
        await pressed(desk, pilot, "u")
        assert "nothing to undo" in text(desk)
        await pressed(desk, pilot, "U", "ctrl+r")
        await settled(desk, pilot)
        assert desk.session.design.site.height == pytest.approx(12.01)


async def test_solved_becomes_set_to_what_was_found_and_back():
    async with opened() as (desk, pilot):
        key = "antenna.lengths.inner"
        await go_to(desk, pilot, key)
        found = desk.session.figures.lengths.inner
        await pressed(desk, pilot, "s")
        await settled(desk, pilot)
        assert get(desk.session.design, key) == pytest.approx(found, rel=1e-4)
        await pressed(desk, pilot, "s")
        await settled(desk, pilot)
        assert get(desk.session.design, key) is SOLVE


async def test_one_of_the_traps_three_values_is_always_solved():
    async with opened() as (desk, pilot):
        await go_to(desk, pilot, "antenna.trap.coil.turns")
        turns = desk.session.figures.trap.coil.turns
        await pressed(desk, pilot, "s")
        assert "press s on" in " ".join(await noted(desk, pilot))
        await go_to(desk, pilot, "antenna.trap.capacitor.capacitance")
        await pressed(desk, pilot, "s")
        await settled(desk, pilot)
        trap = desk.session.design.antenna.trap
        assert trap.capacitor.capacitance is SOLVE
        assert trap.coil.turns == pytest.approx(turns, rel=1e-4)
        # Turns were set to five digits of what 47 pF asked for, so 47 pF comes back.
        assert desk.session.figures.trap.fitted_capacitance == pytest.approx(47e-12, rel=1e-3)


async def test_choices_take_the_next_word_and_what_hangs_on_them_follows():
    async with opened() as (desk, pilot):
        await go_to(desk, pilot, "site.shape")
        await pressed(desk, pilot, "enter")
        await settled(desk, pilot)
        assert desk.session.design.site.shape == "flat"
        assert desk.session.design.site.included_angle is None
        assert screen(desk)[1].startswith("flat, feed point at 10 m")
        await pressed(desk, pilot, "e", "ctrl+u")
        await typed(desk, pilot, "v", "enter")
        await settled(desk, pilot)
        assert desk.session.design.site.shape == "vee"
        assert desk.session.design.site.included_angle is not None


@pytest.mark.parametrize(
    ("key", "word"),
    [
        ("antenna.trap.coil.kind", "given"),
        ("antenna.trap", "none"),
        ("bands.upper", "none"),
        ("station.mode", "CW"),
    ],
)
async def test_kinds_and_what_may_be_absent_are_chosen_by_a_word(key, word):
    async with opened() as (desk, pilot):
        await go_to(desk, pilot, key)
        before = desk.session.design
        await pressed(desk, pilot, "e", "ctrl+u")
        await typed(desk, pilot, word, "enter")
        await settled(desk, pilot)
        assert desk.session.design != before
        assert not desk.session.no_answer
        assert desk.drawers.row.text == word
        await pressed(desk, pilot, "u")
        await settled(desk, pilot)
        assert desk.session.design is before


@pytest.mark.parametrize("key", ["antenna.trap.coil.kind", "antenna.trap.capacitor.kind"])
async def test_every_kind_can_be_tried(key):
    async with opened() as (desk, pilot):
        await go_to(desk, pilot, key)
        for _ in range(6):
            await pressed(desk, pilot, "enter")
            await settled(desk, pilot)
            screen(desk)
            assert desk.is_running


async def test_why_there_is_no_answer_is_said_and_the_last_figures_stay():
    async with opened() as (desk, pilot):
        await go_to(desk, pilot, HEIGHT)
        await typed(desk, pilot, "1 m", "enter")
        await settled(desk, pilot)
        assert desk.session.no_answer
        assert screen(desk)[0].endswith("no answer")
        assert any(line.startswith("! ") for line in screen(desk)[-7:])
        assert "dip" in text(desk)
        assert desk.query_one("#answer").stale


async def test_saves_a_preset_under_a_name_it_asks_for(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    target = tmp_path / "hill.toml"
    async with opened() as (desk, pilot):
        await go_to(desk, pilot, HEIGHT)
        await typed(desk, pilot, "9.5 m", "enter")
        assert "(unsaved)" in screen(desk)[0]
        await pressed(desk, pilot, "w")
        assert "write to 40-20-vee.toml" in text(desk)
        await pressed(desk, pilot, "ctrl+u")
        await typed(desk, pilot, target.name, "enter")
        assert not desk.session.unsaved
        assert "written to" in text(desk)
        assert "(unsaved)" not in screen(desk)[0]
        assert store.load(target) == desk.session.design
        assert "# of the feed point" in target.read_text("utf-8")
        await typed(desk, pilot, "12 m", "enter")
        await pressed(desk, pilot, "w")
        assert store.load(target).site.height == 12.0


async def test_a_file_that_is_there_is_not_replaced_without_a_word(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    target = tmp_path / "other.toml"
    target.write_text("keep me")
    async with opened() as (desk, pilot):
        for key, left in (("escape", "keep me"), ("x", "keep me"), ("r", None)):
            await pressed(desk, pilot, "w", "ctrl+u")
            await typed(desk, pilot, target.name, "enter")
            assert "is there already" in text(desk)
            await pressed(desk, pilot, key)
            assert left is None or target.read_text() == left
        assert store.load(target) == desk.session.design


async def test_a_place_that_cannot_be_written_is_told_in_a_line(tmp_path):
    async with opened() as (desk, pilot):
        await pressed(desk, pilot, "w", "ctrl+u")
        await typed(desk, pilot, str(tmp_path / "no" / "such.toml"), "enter")
        assert "! such.toml: the file may not be written; No such file or directory" in text(desk)
        assert desk.session.path is None


async def test_quitting_asks_only_when_something_is_not_saved():
    async with opened() as (desk, pilot):
        await go_to(desk, pilot, HEIGHT)
        await typed(desk, pilot, "11 m", "enter")
        await pressed(desk, pilot, "q")
        assert "not saved: w writes it and quits" in text(desk)
        await pressed(desk, pilot, "escape")
        assert desk.is_running
        await pressed(desk, pilot, "u")
        await settled(desk, pilot)
        await pressed(desk, pilot, "q")
        assert not desk.is_running
    async with opened() as (desk, pilot):
        await go_to(desk, pilot, HEIGHT)
        await typed(desk, pilot, "11 m", "enter")
        await pressed(desk, pilot, "q", "q")
        assert not desk.is_running


async def test_typing_and_resizing_do_not_wait_for_a_solve_and_stale_answers_are_dropped():
    gate, asked = threading.Event(), []

    def slow(design, previous):
        asked.append(design.site.height)
        assert gate.wait(20)
        return solve(design, previous)

    async with opened(solver=slow, wait=False) as (desk, pilot):
        assert "working out" in text(desk)
        await go_to(desk, pilot, HEIGHT)
        for height in ("11", "12", "13"):
            await typed(desk, pilot, f"{height} m", "enter")
            assert f"height            {height} m" in text(desk)
        for size in ((120, 40), (40, 12), (30, 5), (80, 24)):
            await pilot.resize_terminal(*size)
            await pilot.pause()
            screen(desk)
        assert screen(desk)[0].endswith("solving")
        gate.set()
        await settled(desk, pilot)
        assert desk.session.figures.design.site.height == 13.0
        assert asked == [10.0, 13.0]
        assert "feed point at 13 m" in screen(desk)[1]


async def test_what_the_site_does_comes_after_the_first_answer():
    async with opened() as (desk, _):
        effects = desk.session.figures.bands["lower"].effects
        assert effects.height is not None
        assert effects.soil is not None


@pytest.mark.parametrize("size", [(80, 24), (120, 40), (40, 12)])
async def test_foreign_text_is_shown_and_does_nothing(size):
    title = "[red]x[/red]\x1b[2J[/x]\u202e"
    document = store.find()
    document = replace(document, design=replace(document.design, title=title), text="")
    async with opened(size, document=document) as (desk, pilot):
        shown = "[red]x[/red]\\x1b[2J[/x]\\u202e" if size[0] > 40 else "[red]x[/red]\\x1b[2J[/x]"
        assert screen(desk)[0].startswith(shown)
        for key in ("v", "v", "question_mark", "enter"):
            await pressed(desk, pilot, key)
            assert "\x1b" not in text(desk)
            assert "\u202e" not in text(desk)
        await pressed(desk, pilot, "escape")


async def test_keys_typed_ahead_are_dealt_with_in_their_order(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    async with opened() as (desk, pilot):
        await go_to(desk, pilot, HEIGHT)
        await typed(desk, pilot, "12 m", "enter", "plus", "u", "plus", "w", "ctrl+u", *"a.toml", "enter")
        await settled(desk, pilot)
        assert store.load("a.toml").site.height == pytest.approx(12.01)
        await pressed(desk, pilot, "plus", "q", "w")
        assert not desk.is_running
    assert store.load("a.toml").site.height == pytest.approx(12.02)


async def test_a_paste_types_its_first_line_only():
    async with opened() as (desk, pilot):
        await go_to(desk, pilot, HEIGHT)
        desk.post_message(Paste("8.5 m\n\x1b[2Jq"))
        await pilot.pause()
        assert desk.drawers.typed.text == "8.5 m"
        await pressed(desk, pilot, "enter")
        assert desk.session.design.site.height == 8.5


async def test_help_tells_of_the_row_under_the_cursor():
    async with opened() as (desk, pilot):
        await go_to(desk, pilot, HEIGHT)
        await pressed(desk, pilot, "question_mark")
        whole = text(desk)
        assert "Height of the feed point above ground." in whole
        assert "from 50 cm up to 300 m" in whole
        assert "views, each by its capital letter" in whole
        await pressed(desk, pilot, *["pagedown"] * 3)
        assert "Enter keeps, Esc restores" in text(desk)
        await pressed(desk, pilot, "h")
        assert "[answer]" in text(desk)


async def test_colours_can_be_gone_through():
    async with opened() as (desk, pilot):
        seen = set()
        for _ in range(5):
            await pressed(desk, pilot, "t")
            seen.add(desk.theme)
        assert seen == {"own", "dark", "daylight", "red-light", "plain"}


async def test_any_keys_leave_it_standing():
    keys = "enter j j 9 escape tab s minus plus v k space e x enter escape pagedown w escape t u U h q escape"
    async with opened((80, 24)) as (desk, pilot):
        for _ in range(4):
            await pressed(desk, pilot, *keys.split())
            assert desk.is_running
            screen(desk)
        await asyncio.wait_for(desk.settled(), 20)


def test_a_file_that_is_not_there_ends_in_a_line(capsys, tmp_path):
    assert run(str(tmp_path / "none.toml")) == 3
    said = capsys.readouterr()
    assert said.out == ""
    assert len(said.err.splitlines()) == 1
    assert "there is no such file" in said.err


def test_without_a_terminal_it_says_what_to_do(capsys, monkeypatch):
    monkeypatch.setattr("sys.stdin.isatty", lambda: False, raising=False)
    assert run(None) == 2
    assert "needs a terminal" in capsys.readouterr().err
