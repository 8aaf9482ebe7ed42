"""What the tests of the desk share: opening it, typing, and reading its screen as plain lines."""

import asyncio
from contextlib import asynccontextmanager

from trapdesk import store
from trapdesk.faces.desk.app import Desk
from trapdesk.faces.desk.session import Session
from trapdesk.faces.desk.terminal import Glyphs, Look
from trapdesk.services.solve import solve

PLAIN = Look(glyphs=Glyphs.ASCII, theme="plain")
LONGEST = 20
"""Seconds after which a test gives up waiting."""
BRAILLE = Look(glyphs=Glyphs.BRAILLE, theme="dark")


@asynccontextmanager
async def opened(size=(80, 24), *, document=None, look=PLAIN, solver=solve, wait=True):
    desk = Desk(Session(document or store.find()), look, solver)
    async with desk.run_test(size=size) as pilot:
        if wait:
            await asyncio.wait_for(desk.settled(), LONGEST)
        await pilot.pause()
        yield desk, pilot


async def typed(pilot, text, *keys):
    """Press a key a character, then others by name."""
    await pilot.press(*text, *keys)
    await pilot.pause()


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
    for _ in range(6):
        for _ in range(40):
            if desk.drawers.row is not None and desk.drawers.row.key == key:
                return
            before = desk.drawers.row
            await pilot.press("down")
            if desk.drawers.row == before:
                break
        await pilot.press("tab")
        await pilot.press("home")
    raise AssertionError(f"no row {key}")
