"""Ends nobody at the desk asked for: signals, and faults of its own."""

from __future__ import annotations

import asyncio
import os
import signal
import threading
import traceback
from collections.abc import Mapping

from textual.app import App

from ...errors import visible
from .journal import folder

NAME = "last-error.txt"
PATIENCE = 3.0
"""Seconds a desk that was told to end may take to leave the terminal as it was."""


def end_by_signals(app: App) -> None:
    """Have an app end in order when its link drops or it is told to end; the journal stays as it is.

    A terminal that is gone takes nothing more, so the process does not wait for it for ever.
    """

    def end(number: int) -> None:
        watch = threading.Timer(PATIENCE, os._exit, (128 + number,))
        watch.daemon = True
        watch.start()
        app.exit(return_code=128 + number)

    for number in (signal.SIGTERM, signal.SIGHUP):
        asyncio.get_running_loop().add_signal_handler(number, end, number)


def told(error: BaseException | None, environment: Mapping[str, str]) -> str:
    """Write an error with its traceback to a file and return the line to say; the journal stays as it is."""
    what = f"{type(error).__name__}: {visible(error, 100)}"
    file = folder(environment) / NAME
    try:
        file.parent.mkdir(mode=0o700, parents=True, exist_ok=True)
        file.write_text("".join(traceback.format_exception(error)), "utf-8")
        where = f"details are in {visible(file, 200)}"
    except OSError:
        where = "there is no place to write the details to"
    return f"trapdesk ended by a fault of its own ({what}); {where}; the next start offers the last edit"
