"""What the tests of the desk share: opening it, typing, and reading its screen as plain lines."""

import asyncio
import io
from contextlib import asynccontextmanager, redirect_stdout

from textual.events import Key

from trapdesk.faces.cli import main
from trapdesk.faces.desk import form
from trapdesk.faces.desk.app import Desk
from trapdesk.faces.desk.form import DRAWERS
from trapdesk.faces.desk.session import Session
from trapdesk.faces.desk.terminal import Glyphs, Look
from trapdesk.services.antenna.solve import solve
from trapdesk.store import store

CHARACTERS = {"space": " ", "plus": "+", "minus": "-", "question_mark": "?", "slash": "/"}
PLAIN = Look(glyphs=Glyphs.ASCII, theme="plain")
LONGEST = 20
"""Seconds after which a test gives up waiting."""
BRAILLE = Look(glyphs=Glyphs.BRAILLE, theme="dark")


@asynccontextmanager
async def opened(size=(80, 24), *, document=None, look=PLAIN, solver=solve, wait=True, kept=None, **more):
    desk = Desk(Session(document or store.find()), look, solver, kept=kept, **more)
    async with desk.run_test(size=size) as pilot:
        if wait:
            await asyncio.wait_for(desk.settled(), LONGEST)
        await pilot.pause()
        yield desk, pilot


async def pressed(desk, pilot, *names):
    """Press keys one after the other, a character or a name each, then wait until all are dealt with."""
    for name in names:
        character = name if len(name) == 1 else CHARACTERS.get(name)
        desk.post_message(Key(name, character))
    await pilot.pause()


async def noted(desk, pilot):
    """Return the lines at the foot once a note that begins with a mark stands there."""
    for _ in range(100):
        foot = screen(desk)[-4:-1]
        if any(line.startswith("! ") for line in foot):
            return foot
        # Fitting the foot to a new note comes after the key that brought it.
        await pilot.pause(0.02)
    return screen(desk)[-4:-1]


async def typed(desk, pilot, text, *names):
    """Type a text, then press keys by name."""
    await pressed(desk, pilot, *text, *names)


async def settled(desk, pilot):
    await pilot.pause()
    await asyncio.wait_for(desk.settled(), LONGEST)
    await pilot.pause()


def screen(desk):
    """Return what is on the screen, line by line, without what ends each line in blanks."""
    width, height = desk.size
    strips = desk.screen._compositor.render_strips()
    lines = ["".join(segment.text for segment in strip) for strip in strips]
    assert len(lines) == height
    assert all(len(line) == width for line in lines), [len(line) for line in lines]
    return [line.rstrip() for line in lines]


def text(desk):
    return "\n".join(screen(desk))


async def go_to(desk, pilot, key):
    """Move the cursor to a row, by keys alone."""
    for _ in DRAWERS:
        rows = [row.key for row in form.rows(desk.session.design, None)[desk.drawers.drawer] if row.key]
        if key in rows:
            await pressed(desk, pilot, *["up"] * len(rows), *["down"] * rows.index(key))
            assert desk.drawers.row.key == key
            return
        await pressed(desk, pilot, "tab")
    raise AssertionError(f"no row {key}")


async def worked_out(desk, pilot):
    """Wait until all that the views on the screen want is there."""
    await settled(desk, pilot)
    await asyncio.wait_for(desk.session.aside.settled(), LONGEST)
    await pilot.pause()


async def shown(desk, pilot, letter):
    await pressed(desk, pilot, letter)
    await worked_out(desk, pilot)


def pane(desk):
    """Return the whole text of the pane that turns, also what is scrolled out of sight."""
    return desk.query_one("#below" if desk.screen.has_class("tall") else "#answer").plain()


def said(*words):
    """Return what a verb prints; the desk, where it runs, has a standard output of its own."""
    with redirect_stdout(io.StringIO()) as printed:
        assert main(list(words)) == 0
    assert len(lines_of(printed.getvalue())) > 5
    return printed.getvalue()


def lines_of(whole):
    """Return the lines of a text without their indentation, marks and gaps; layout aside."""
    return [" ".join(line.replace(">", " ").split()) for line in whole.splitlines() if line.strip()]


def missing(whole, within):
    """Return the lines of a text that are not in another, however that breaks them."""
    there = " ".join(lines_of(within))
    return [line for line in lines_of(whole) if line not in there]
