"""The mouse in a real terminal: reports in the SGR form of xterm's control sequences, from memory."""

from tests.desk.terminals import opened

READY = "next: "
CHANGED = "\x1b[?1003h"


def report(button, column, line, down=True):
    """Return what a terminal sends for a button at a cell; cells count from 1."""
    return f"\x1b[<{button};{column};{line}{'M' if down else 'm'}"


def click(column, line):
    return report(0, column, line) + report(0, column, line, down=False)


def place(terminal, word):
    """Return column and line of a word on the screen."""
    for line, text in enumerate(terminal.lines(), start=1):
        if word in text:
            return text.index(word) + 1, line
    raise AssertionError(f"no {word!r} on\n{terminal.text()}")


def test_rows_drawers_views_and_wheel(tmp_path):
    with opened(tmp_path) as terminal:
        terminal.until(READY)
        terminal.type(click(*place(terminal, "height of ends")))
        terminal.until("> height of ends")
        terminal.type(2 * click(*place(terminal, "height of ends")))
        terminal.until("Enter keeps")
        terminal.type("6 m\r")
        terminal.until("height of ends: 6 m")
        terminal.type(click(*place(terminal, "Trap  Wire")))
        terminal.until("[Trap]")
        terminal.type(click(*place(terminal, "Yield")))
        terminal.until("[yield]")
        terminal.type(click(*place(terminal, "Z at feed")))
        terminal.until("[Z at feed]")
        terminal.type(click(*place(terminal, "SWR [Z")))
        terminal.until("[SWR]")
        column, line = place(terminal, "trap resonance")
        terminal.type(report(65, column, line) * 3)
        terminal.until(lambda text: "trap resonance" not in text.splitlines()[line - 1])
        terminal.type(report(64, column, line) * 3)
        terminal.until(lambda text: "trap resonance" in text.splitlines()[line - 1])
        # What lies outside, or is no report, changes nothing.
        terminal.type(click(900, 900) + click(1, 24) + "\x1b[<0;;M")
        terminal.quiet()
        assert "[Trap]" in terminal.text()


def test_a_mouse_that_passes_by_is_not_asked_for_and_the_terminal_can_have_it_back(tmp_path):
    with opened(tmp_path) as terminal:
        terminal.until(READY)
        assert CHANGED.encode() not in terminal.sent
        assert b"\x1b[?1000h" in terminal.sent
        terminal.type("m")
        terminal.until("the mouse is the terminal's")
        assert terminal.sent.rfind(b"\x1b[?1000l") > terminal.sent.rfind(b"\x1b[?1000h")
        terminal.type("m")
        terminal.until("the mouse is the desk's")
        assert terminal.sent.rfind(b"\x1b[?1000h") > terminal.sent.rfind(b"\x1b[?1000l")
