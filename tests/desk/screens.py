"""What the tests of the desk share: opening it, typing, and reading its screen as plain lines."""

import asyncio
from contextlib import asynccontextmanager

from textual.events import Key

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
