"""The views that are worked out aside, by keyboard: the desk answers as the command line does."""

import asyncio
import re
import threading
from dataclasses import replace

import pytest

from tests.desk.screens import (
    LONGEST,
    go_to,
    missing,
    noted,
    opened,
    pane,
    pressed,
    said,
    screen,
    settled,
    shown,
    text,
    typed,
    worked_out,
)
from trapdesk.faces import tolerance_out
from trapdesk.faces.desk import form
from trapdesk.faces.desk.arrange import LETTERS, VIEWS, arrangement, names
from trapdesk.faces.desk.aside import Job
from trapdesk.faces.desk.lines import padded, width_of
from trapdesk.faces.desk.optional import PARTS
from trapdesk.faces.desk.panes.jobs import FOR_YIELD, RUMMAGE, TOLERANCE
from trapdesk.faces.desk.panes.texts import text_lines
from trapdesk.services.antenna.solve import solve
from trapdesk.store import store

PRESET = "40-20-vee"
HEIGHT = "site.height"


BOX = """
format = 1
kind = "box"
title = "[red]small[/red] box"

[[formers]]
name = "pipe"
diameter = "40 mm"
length = "30 cm"
count = 2

[[wires]]
name = "copper"
diameter = "1.6 mm"
length = "20 m"

[[wires]]
name = "thin copper"
diameter = "1 mm"
length = "20 m"

[[capacitors]]
capacitance = "47 pF"
voltage = "3 kV"
count = 4

[[capacitors]]
capacitance = "22 pF"
voltage = "3 kV"
count = 4
"""


@pytest.fixture
def small_box(tmp_path):
    """Return a box in which is little to look through."""
    file = tmp_path / "small.toml"
    file.write_text(BOX)
    return file


async def rummaged(desk, pilot, box):
    """Show what a box can build, asked for by keys."""
    await pressed(desk, pilot, "B", "b", "ctrl+u")
    await typed(desk, pilot, str(box), "enter")
    await worked_out(desk, pilot)


VERBS = [
    ("R", ("tolerance", PRESET)),
    ("C", ("choices", PRESET)),
    ("D", ("tuner", PRESET)),
    ("P", ("sheet", PRESET)),
    ("M", ("readings", PRESET)),
]


async def test_a_view_says_what_its_verb_prints():
    async with opened() as (desk, pilot):
        for letter, words in VERBS:
            await shown(desk, pilot, letter)
            assert missing(said(*words), pane(desk)) == [], words


async def test_an_edited_design_is_told_of_as_its_file_is(tmp_path):
    async with opened() as (desk, pilot):
        await go_to(desk, pilot, HEIGHT)
        await typed(desk, pilot, "8 m", "enter")
        await worked_out(desk, pilot)
        file = tmp_path / "lower.toml"
        store.save(desk.session.design, file, "")
        for letter, verb in (("R", "tolerance"), ("D", "tuner"), ("P", "sheet")):
            printed = said(verb, str(file))
            await shown(desk, pilot, letter)
            assert missing(printed, pane(desk)) == []


async def test_the_hill_card_is_that_of_the_sheet():
    async with opened() as (desk, pilot):
        await shown(desk, pilot, "P")
        sheet = pane(desk)
        await shown(desk, pilot, "H")
        card = "\n".join(pane(desk).splitlines()[1:])
        assert card.startswith("HILL CARD")
        assert missing(card, sheet) == []


async def test_every_view_is_reached_by_its_letter_and_fits_at_every_size(small_box):
    async with opened() as (desk, pilot):
        desk.session.aside.box = str(small_box)
        for letter, view in LETTERS.items():
            await shown(desk, pilot, letter)
            for size in ((120, 40), (40, 12), (80, 24)):
                await pilot.resize_terminal(*size)
                await pressed(desk, pilot, letter, "pagedown", "down")
                lines = screen(desk)
                whole = "\n".join(lines)
                assert whole.isascii()
                assert "estimate" in lines[0]
                assert any(f"{level}:" in whole for level in ("watch", "fine", "STOP"))
                assert lines[-1].strip()
                assert "working it out" not in whole
                if letter not in "IAFY":
                    assert f"[{view.name}]" in whole
                if size[0] >= 80:
                    assert "yield: as cut" in whole
                    assert "next: " in whole
        assert not desk.drawers.editing


def test_the_names_of_the_views_fit_at_every_width():
    for width in range(20, 200):
        cycle = arrangement(width, 24).cycle
        for view in cycle:
            for busy in ("", "200 of 1000 trials"):
                line = names(cycle, view, width, busy)
                assert width_of(line) <= width
                assert (f"[{view.name}]", "picked") in line
    assert len({view.letter for view in VIEWS}) == len(VIEWS)


async def test_the_yield_comes_by_itself_large_and_follows_an_edit():
    async with opened() as (desk, pilot):
        await worked_out(desk, pilot)
        before = desk.session.aside.found(TOLERANCE.name)
        assert before.trials == 1000
        share = f"as cut {100 * before.stages['as_cut'].within.share:.0f} %"
        assert share in text(desk)
        await shown(desk, pilot, "Y")
        figures = [line.partition("|")[2].strip() for line in screen(desk)]
        aimed = tolerance_out.chance(before.stages["aimed"].within)
        # The second of the three lines a large figure is made of stands beside what it comes to.
        assert re.search(r"[|_]+ +[|_. ]+" + re.escape(aimed), " ".join(figures))
        await go_to(desk, pilot, "station.swr_limit")
        await typed(desk, pilot, "3", "enter")
        await worked_out(desk, pilot)
        after = desk.session.aside.found(TOLERANCE.name)
        assert after.design.station.swr_limit == 3.0
        assert after.stages["as_cut"].within.share > before.stages["as_cut"].within.share
        assert "keep SWR 3" in text(desk)


async def test_at_120_columns_the_yield_stands_beside_plot_and_findings():
    async with opened((120, 40)) as (desk, pilot):
        await worked_out(desk, pilot)
        whole = text(desk)
        for word in ("[Site]", "answer", "findings", "[SWR]", "yield", "how many of 100", "brought to aim"):
            assert word in whole


async def test_work_aside_holds_nothing_up_and_what_is_stale_is_dropped(monkeypatch):
    gate, begun = threading.Event(), []

    def slow(task):
        begun.append(task.design.site.height)
        assert gate.wait(20)
        yield task.design.site.height

    monkeypatch.setattr("trapdesk.faces.desk.middle.TOLERANCE", Job(name=TOLERANCE.name + " slow", work=slow))
    async with opened() as (desk, pilot):
        await go_to(desk, pilot, HEIGHT)
        for height in ("11", "12", "13"):
            await typed(desk, pilot, f"{height} m", "enter")
            assert f"height            {height} m" in text(desk)
            await settled(desk, pilot)
        assert begun == [10.0]
        assert desk.session.aside.found(TOLERANCE.name + " slow") is None
        gate.set()
        await worked_out(desk, pilot)
        assert begun == [10.0, 13.0]
        assert desk.session.aside.found(TOLERANCE.name + " slow") == 13.0


async def test_the_box_says_what_its_verb_prints(small_box):
    printed = said("rummage", PRESET, "--box", str(small_box))
    async with opened() as (desk, pilot):
        await rummaged(desk, pilot, small_box)
        assert missing(printed, pane(desk)) == []
        assert "[red]small[/red] box" in pane(desk)


async def test_a_trap_of_the_box_is_taken_with_one_key_and_undone(small_box):
    async with opened() as (desk, pilot):
        await rummaged(desk, pilot, small_box)
        found = desk.session.aside.found(RUMMAGE.name).found
        before = desk.session.design
        assert " 1> " in text(desk)
        await pressed(desk, pilot, "down", "down", "up", "down")
        assert " 2> " in text(desk)
        await pilot.resize_terminal(40, 12)
        await pilot.pause()
        assert " 2> " in text(desk)
        await pressed(desk, pilot, "up", "down")
        assert " 2> " in text(desk)
        await pressed(desk, pilot, "enter")
        assert desk.session.design.antenna.trap == found.rows[1].trap
        assert "taken: " in text(desk)
        await worked_out(desk, pilot)
        assert desk.session.figures.trap.resonance == pytest.approx(found.rows[1].resonance, rel=1e-3)
        await pressed(desk, pilot, "u")
        assert desk.session.design is before
        await settled(desk, pilot)


async def test_rows_appear_as_they_are_found_and_escape_stops():
    async with opened() as (desk, pilot):
        await settled(desk, pilot)
        await pressed(desk, pilot, "B")
        aside = desk.session.aside
        for _ in range(2000):
            if aside.found(RUMMAGE.name) is not None:
                break
            await asyncio.sleep(0.005)
        first = len(aside.found(RUMMAGE.name).found.rows)
        assert aside.running(RUMMAGE.name)
        assert "still looking" in pane(desk)
        await pressed(desk, pilot, "escape")
        await worked_out(desk, pilot)
        found = aside.found(RUMMAGE.name).found
        assert not found.finished
        assert first <= len(found.rows) < 20
        assert "Stopped early" in pane(desk)
        await pressed(desk, pilot, "escape")
        assert "[answer]" in text(desk)


async def test_a_box_that_is_not_there_is_told_in_a_line():
    async with opened() as (desk, pilot):
        await rummaged(desk, pilot, "none.toml")
        assert "! " in pane(desk)
        assert "none.toml" in pane(desk)
        assert "there is no such file" in pane(desk)


async def test_a_design_chosen_for_its_yield_can_be_accepted(monkeypatch):
    """The search itself has its tests; here another design stands for what it found."""
    other = replace(store.find().design.station, swr_limit=2.5)
    async with opened() as (desk, pilot):
        await pressed(desk, pilot, "R", "a")
        assert "no design was chosen yet" in text(desk)
        chosen = type("Chosen", (), {"design": replace(desk.session.design, station=other)})
        monkeypatch.setattr(
            desk.session.aside, "found", lambda name: chosen if name == FOR_YIELD.name else None
        )
        monkeypatch.setattr(desk.session.aside, "fresh", lambda job: job is FOR_YIELD)
        before = desk.session.design
        await pressed(desk, pilot, "a")
        assert desk.session.design.station.swr_limit == 2.5
        monkeypatch.undo()
        await pressed(desk, pilot, "u")
        assert desk.session.design is before


async def test_a_text_is_written_to_a_file_never_over_one(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    async with opened() as (desk, pilot):
        for letter, name in (("P", "sheet.txt"), ("H", "card.txt"), ("S", "feed.s1p")):
            await shown(desk, pilot, letter)
            for _ in range(2):
                await pressed(desk, pilot, "x", "ctrl+u")
                await typed(desk, pilot, name, "enter")
            assert "already" in text(desk)
    assert (tmp_path / "sheet.txt").read_text("ascii") == said("sheet", PRESET)
    assert (tmp_path / "feed.s1p").read_text("ascii") == said("touchstone", PRESET)
    assert (tmp_path / "card.txt").read_text("ascii").startswith("HILL CARD")


def held_back():
    """Return a gate, and a solver that waits until it is opened."""
    gate = threading.Event()

    def solver(*given):
        assert gate.wait(LONGEST)
        return solve(*given)

    return gate, solver


async def test_a_text_asked_for_early_is_written_once_it_is_there(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    gate, solver = held_back()
    async with opened(solver=solver, wait=False) as (desk, pilot):
        await pressed(desk, pilot, "P", "x", "ctrl+u")
        await typed(desk, pilot, "early.txt", "enter")
        assert "early.txt will be written once it is worked out" in text(desk)
        # It is also when another view is looked at meanwhile.
        await pressed(desk, pilot, "A")
        assert not (tmp_path / "early.txt").exists()
        gate.set()
        await worked_out(desk, pilot)
        assert "written to early.txt" in text(desk)
    assert (tmp_path / "early.txt").read_text("ascii") == said("sheet", PRESET)


async def test_what_waits_to_be_written_is_dropped_when_the_design_changes(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    gate, solver = held_back()
    async with opened(solver=solver, wait=False) as (desk, pilot):
        await pressed(desk, pilot, "S", "x", "ctrl+u")
        await typed(desk, pilot, "early.s1p", "enter")
        await go_to(desk, pilot, HEIGHT)
        await typed(desk, pilot, "8 m", "enter")
        assert any("early.s1p was not written" in line for line in await noted(desk, pilot))
        gate.set()
        await worked_out(desk, pilot)
    assert not (tmp_path / "early.s1p").exists()


async def test_keys_for_the_inputs_do_nothing_while_a_text_hides_them():
    async with opened() as (desk, pilot):
        await shown(desk, pilot, "C")
        before = desk.session.design
        await pressed(desk, pilot, "9", "enter", "s", "plus", "minus", "e", "space")
        assert desk.session.design is before
        assert not desk.drawers.editing
        assert "Tab goes to the inputs" in text(desk)
        await pressed(desk, pilot, "tab")
        assert "[answer]" in text(desk)
        await go_to(desk, pilot, HEIGHT)
        await typed(desk, pilot, "9 m", "enter")
        assert desk.session.design.site.height == 9.0
        await settled(desk, pilot)


async def test_beside_a_text_the_inputs_can_be_edited_where_there_is_room():
    async with opened((120, 40)) as (desk, pilot):
        await shown(desk, pilot, "C")
        assert "[Site]" in text(desk)
        await pressed(desk, pilot, "tab")
        await go_to(desk, pilot, HEIGHT)
        await typed(desk, pilot, "9 m", "enter")
        assert desk.session.design.site.height == 9.0
        assert "[choices]" in text(desk)
        await worked_out(desk, pilot)


async def test_what_may_be_absent_is_added_with_a_key_and_comes_back_as_it_was():
    async with opened() as (desk, pilot):
        for key in ("station.line", "station.choke", "station.tuner", "station.transmitter"):
            await go_to(desk, pilot, key)
            assert desk.drawers.row.text == "none"
            assert "add it" in screen(desk)[-1]
            for part in (PARTS[key], None, PARTS[key]):
                await pressed(desk, pilot, "enter")
                assert getattr(desk.session.design.station, key.partition(".")[2]) == part
            await settled(desk, pilot)
            assert not desk.session.no_answer


def test_every_row_has_a_drawer_of_its_own():
    document = store.find()
    design = document.design
    for key in PARTS:
        design = form.put(design, key, "added", None, iter([design]))
    drawers = form.rows(design, None)
    keys = [row.key for rows in drawers.values() for row in rows if row.key]
    assert len(keys) == len(set(keys))
    assert {"station.tuner.coil.q", "station.transmitter.table"} <= {row.key for row in drawers["Tuner"]}
    assert {"station.line.length", "station.choke.ratio"} <= {row.key for row in drawers["Feed"]}
    assert "doubts.capacitor" in {row.key for row in drawers["Doubts"]}
    assert {"antenna.trap.measured.resonance", "history.traps"} <= {row.key for row in drawers["Parts"]}


def test_a_text_is_folded_anew_where_there_is_no_room_for_it():
    texts = [
        "A sentence that was folded at the seventy-ninth column, as all sentences of the",
        "command line are, and that goes on here.",
        "",
        "  left         middle                                                  right",
    ]
    for width in range(12, 90):
        lines = text_lines(texts, width)
        assert all(width_of(line) <= max(width, 79 if width >= 79 else 0) for line in lines)
    assert text_lines([" 1  " + "coil " * 12], 40)[0][0][0].startswith(" 1  coil coil")
    narrow = [line[0][0] for line in text_lines(texts, 40)]
    assert " ".join(" ".join(narrow[:-2]).split()) == f"{texts[0]} {texts[1]}"
    assert narrow[-1] == "  left  middle  right"
    assert text_lines(texts, 16)[-1][0][0] == "  left  middle ~"
    assert text_lines(texts, 16, 10)[-1][0][0] == "ddle  right"
    drawing = "  0 |" + " " * 50 + "x"
    assert text_lines([drawing], 40)[0][0][0] == padded(drawing, 40).rstrip()
    run_on = ["CARD: a name" + " " * 50 + "not measured, all", "Marks: inner 5 m"]
    assert text_lines(run_on, 40)[-1][0][0] == "Marks: inner 5 m"
