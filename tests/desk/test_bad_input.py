"""What nobody should type, open or do, at the desk: shown, never obeyed, and nothing is lost by it."""

import asyncio
import os
import time
from dataclasses import replace

import pytest

from tests.desk.screens import LONGEST, opened, pressed, screen, settled, text, typed
from tests.desk.terminals import opened as in_terminal
from tests.desk.test_lists import LISTS, furnished
from trapdesk.design.station import Transmitter
from trapdesk.faces.desk import form
from trapdesk.faces.desk.arrange import LETTERS
from trapdesk.faces.desk.form import DRAWERS
from trapdesk.store import store

HOSTILE = "[red]x[/red]\x1b[2J[/x]\u202e\x07\x9b1m\r\n\t\U000e0041"


def hostile():
    """Return a design whose every name is an attack."""
    design = store.find().design
    bands = replace(
        design.bands,
        lower=replace(design.bands.lower, name=HOSTILE),
        upper=replace(design.bands.upper, name=HOSTILE[::-1]),
    )
    station = replace(design.station, transmitter=Transmitter(name=HOSTILE))
    return replace(design, title=HOSTILE, bands=bands, station=station)


@pytest.mark.parametrize("size", [(80, 24), (120, 40), (40, 12)])
async def test_foreign_names_are_shown_in_every_view_and_drawer_and_do_nothing(size):
    document = replace(store.find(), design=hostile(), text="", name=HOSTILE)
    async with opened(size, document=document) as (desk, pilot):
        # Those whose work takes long have the same names in the same lines.
        for letter in [*(letter for letter in LETTERS if letter not in "RBCN"), *["tab"] * len(DRAWERS), "w"]:
            await pressed(desk, pilot, letter)
            await asyncio.wait_for(desk.session.aside.settled(), LONGEST)
            await pilot.pause()
            whole = text(desk)
            assert whole.replace("\n", "").isprintable(), letter
            assert whole.isascii(), letter
        assert "\\x1b[2J" in whole or size[0] == 40
        await pressed(desk, pilot, "escape")


async def test_files_with_foreign_names(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    name = HOSTILE.replace("/", "|") + ".toml"
    store.save(store.find().design, tmp_path / name)
    async with opened(document=store.find(name)) as (desk, pilot):
        await pressed(desk, pilot, "plus", "down", "down", "plus", "w")
        assert text(desk).replace("\n", "").isprintable()
        assert not desk.session.unsaved
        for key in ("o", "W", "n"):
            await pressed(desk, pilot, key)
            await typed(desk, pilot, "\x1b[2J/../\x00x" + "y" * 400, "enter")
            assert text(desk).replace("\n", "").isprintable()
            await pressed(desk, pilot, "escape")
        await settled(desk, pilot)
    assert store.load(tmp_path / name).site.height == pytest.approx(10.01)


@pytest.mark.parametrize("size", [(80, 24), (40, 12), (120, 40)])
async def test_a_design_with_more_than_fits_any_screen(size):
    design = furnished()
    for key in LISTS:
        design = form.put(design, key, 8 if key.endswith("wanted") else 20, None, iter([]))
    design = replace(design, title="long " * 1000)
    document = replace(store.find(), design=design, text="")
    async with opened(size, document=document) as (desk, pilot):
        for _ in DRAWERS:
            await pressed(desk, pilot, "end")
            shown = screen(desk)
            assert desk.drawers.row is not None
            if size[0] > 40:
                assert any(">" in line or "*" in line for line in shown[4:-6])
            await pressed(desk, pilot, "home", "tab")
        await pressed(desk, pilot, "E", "end")
        screen(desk)


def test_a_file_too_large_is_refused_in_a_line(tmp_path):
    (tmp_path / "large.toml").write_text('title = "' + "x" * 1_100_000 + '"')
    with in_terminal(tmp_path, "large.toml") as terminal:
        assert terminal.wait() == 3
        assert "at most 1000 kB" in terminal.text()
        assert len([line for line in terminal.lines() if line]) <= 2


@pytest.mark.parametrize("later", [0.0, 0.01, 0.05])
def test_a_terminal_that_closes_while_it_writes_leaves_a_whole_file(tmp_path, later):
    design = store.find().design
    store.save(design, tmp_path / "hill.toml")
    terminal = in_terminal(tmp_path, "hill.toml")
    terminal.until("next: ")
    terminal.type("\x1b[B\x1b[B12 m\r")
    terminal.until("height: 12 m, was 10 m")
    terminal.type("w")
    time.sleep(later)
    os.close(terminal.end)
    for _ in range(500):
        done, _ = os.waitpid(terminal.pid, os.WNOHANG)
        if done:
            break
        time.sleep(0.02)
    assert done
    # Either it was written or it was not; what was edited is offered if not.
    height = store.load(tmp_path / "hill.toml").site.height
    assert height in (10.0, 12.0)
    assert not [one for one in tmp_path.iterdir() if one.name.startswith("hill.toml.")]
    if height == 10.0:
        with in_terminal(tmp_path, "hill.toml") as again:
            again.until("r resumes")
            again.type("r")
            again.until("height            12 m")
