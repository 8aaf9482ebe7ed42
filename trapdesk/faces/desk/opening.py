"""Opening the desk, with a sign of life before what takes a small computer seconds to import."""

from __future__ import annotations

import gc
import os
import sys

from ...errors import TrapdeskError, visible


def run(argument: str | None) -> int:
    """Open the desk on a file or preset, the first preset without one, and return the exit code."""
    # All that is made up to the first paint stays: looking for garbage among it only delays that.
    gc.disable()
    terminal = sys.stdin.isatty() and sys.stdout.isatty()
    said = _sign(argument) if terminal else ""
    from ...store import store
    from . import config, fresh, journal
    from .app import Desk
    from .session import Session
    from .terminal import as_started, look

    chosen, trouble = config.load(config.place(os.environ))
    try:
        document = store.find(argument) if argument is not None else fresh.begun(store.FIRST_PRESET, chosen)
    except TrapdeskError as error:
        _wipe(said)
        print(error, file=sys.stderr)
        return error.exit_code
    if not terminal:
        print("the desk needs a terminal; trapdesk figures FILE prints the figures", file=sys.stderr)
        return 2
    kept = journal.Journal(folder=journal.folder(os.environ))
    drawn = look(as_started(os.environ), chosen.theme)
    # The library would answer this by turning even the terminal's own colours to black.
    os.environ.pop("NO_COLOR", None)
    desk = Desk(Session(document), drawn, chosen=chosen, kept=kept, trouble=trouble)
    _wipe(said)
    desk.run()
    return desk.return_code or 0


def _sign(name: str | None) -> str:
    """Say on the terminal's own screen what is being opened, and return what was said."""
    text = f"trapdesk: opening {visible(name or 'the first design', 40)} ..."
    text = text if text.isascii() else "trapdesk: opening ..."
    print(text, end="", flush=True)
    return text


def _wipe(said: str) -> None:
    """Leave the line as it was found."""
    if said:
        print("\r" + " " * len(said) + "\r", end="", flush=True)
