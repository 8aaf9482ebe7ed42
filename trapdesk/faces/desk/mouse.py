"""The mouse as the desk wants it of a terminal: clicks, drags and the wheel, not every move over the screen.

A mouse that only passes by would send a report for each cell, up a thin link, and wake whoever reads them.
"""

from __future__ import annotations

from typing import Any

ON = "\x1b[?1000h\x1b[?1002h\x1b[?1006h"
OFF = "\x1b[?1006l\x1b[?1002l\x1b[?1000l"


def quieter(usual: type[Any]) -> type[Any]:
    """Return a driver as the usual one, but with a quieter mouse, where it has one."""
    if not all(hasattr(usual, name) for name in ("_enable_mouse_support", "_disable_mouse_support", "write")):
        return usual

    class Quieter(usual):
        def _enable_mouse_support(self) -> None:
            if self._mouse:
                self.write(ON)
                self.flush()

        def _disable_mouse_support(self) -> None:
            if self._mouse:
                self.write(OFF)
                self.flush()

    return Quieter


def switch(driver: Any, on: bool) -> bool:
    """Ask the terminal for the mouse, or give it back, and return whether there is one."""
    if not getattr(driver, "_mouse", False) or not hasattr(driver, "flush"):
        return False
    driver.write(ON if on else OFF)
    driver.flush()
    return True
