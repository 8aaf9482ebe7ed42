"""The cell differ against a terminal: what it sends must leave the same screen as the whole update would.

The terminal is pyte, a general-purpose terminal emulator in Python.
"""

import pyte
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from rich.console import Console
from rich.segment import Segment
from rich.style import Style
from textual._compositor import ChopsUpdate, LayoutUpdate
from textual.geometry import Region
from textual.strip import Strip

from trapdesk.faces.desk.thin import Thin

COLUMNS, ROWS = 24, 5
CONSOLE = Console(force_terminal=True, color_system="truecolor", width=COLUMNS)
STYLES = [None, Style(bold=True), Style(color="red"), Style(bgcolor="#102030"), Style(reverse=True, dim=True)]

strips = st.lists(
    st.tuples(st.text(alphabet="ab  .#", min_size=1, max_size=12), st.sampled_from(STYLES)), max_size=4
)
screens = st.lists(st.lists(strips, min_size=ROWS, max_size=ROWS), min_size=1, max_size=4)


def strip_of(parts) -> Strip:
    """Return a strip as wide as the screen."""
    return Strip([Segment(text, style) for text, style in parts]).adjust_cell_length(COLUMNS)


def whole(rows) -> LayoutUpdate:
    return LayoutUpdate([[strip_of(parts)] for parts in rows], Region(0, 0, COLUMNS, ROWS))


def shown(terminal: pyte.Screen) -> list:
    """Return what a person sees: characters, and what of their style shows on them."""
    rows = []
    for y in range(ROWS):
        row = []
        for x in range(COLUMNS):
            cell = terminal.buffer[y][x]
            blank = cell.data == " "
            row.append(
                (cell.data, cell.bg, cell.reverse) + (() if blank else (cell.fg, cell.bold, cell.underscore))
            )
        rows.append(row)
    return rows


def feed(terminal: pyte.Screen, update) -> int:
    """Send an update to a terminal and return how many bytes that took."""
    text = update.render_segments(CONSOLE)
    pyte.Stream(terminal).feed(text)
    return len(text.encode())


@settings(derandomize=True, deadline=None, max_examples=150)
@given(screens)
def test_the_screen_is_that_of_the_whole_updates(sequence):
    thin, ours, theirs = Thin(), pyte.Screen(COLUMNS, ROWS), pyte.Screen(COLUMNS, ROWS)
    for rows in sequence:
        update = whole(rows)
        feed(theirs, update)
        feed(ours, thin.reduced(update, (COLUMNS, ROWS), CONSOLE))
        assert shown(ours) == shown(theirs)


def test_one_character_costs_a_move_and_itself():
    thin = Thin()
    rows = [[("height 10 m", None)]] * ROWS
    thin.reduced(whole(rows), (COLUMNS, ROWS), CONSOLE)
    rows = [*rows[:2], [("height 12 m", None)], *rows[3:]]
    assert thin.reduced(whole(rows), (COLUMNS, ROWS), CONSOLE).text == "\x1b[3;9H2"
    assert thin.reduced(whole(rows), (COLUMNS, ROWS), CONSOLE).text == ""


def test_a_part_of_a_row_is_put_where_it_belongs():
    thin, terminal = Thin(), pyte.Screen(COLUMNS, ROWS)
    feed(terminal, thin.reduced(whole([[("." * COLUMNS, None)]] * ROWS), (COLUMNS, ROWS), CONSOLE))
    part = ChopsUpdate(
        [{}, {4: Strip([Segment("wire", STYLES[1])])}, {}, {}, {}], [(1, 4, 8)], [[], [8], [], [], []]
    )
    feed(terminal, thin.reduced(part, (COLUMNS, ROWS), CONSOLE))
    assert terminal.display[1] == "....wire" + "." * (COLUMNS - 8)


def test_wide_and_combining_characters_keep_their_cells():
    thin, terminal = Thin(), pyte.Screen(COLUMNS, ROWS)
    rows = [[("a漢b e\u0301x", None)]] + [[("", None)]] * (ROWS - 1)
    feed(terminal, thin.reduced(whole(rows), (COLUMNS, ROWS), CONSOLE))
    assert terminal.buffer[0][1].data == "漢" and terminal.buffer[0][3].data == "b"
    rows[0] = [("a漢c e\u0301x", None)]
    assert thin.reduced(whole(rows), (COLUMNS, ROWS), CONSOLE).text == "\x1b[1;4Hc"


@pytest.mark.parametrize("strange", [object(), "text", LayoutUpdate(None, Region(0, 0, 1, 1))])
def test_what_is_not_understood_passes_and_the_next_is_whole(strange):
    thin = Thin()
    rows = whole([[("x", None)]] * ROWS)
    first = thin.reduced(rows, (COLUMNS, ROWS), CONSOLE).text
    assert thin.reduced(strange, (COLUMNS, ROWS), CONSOLE) is strange
    assert thin.reduced(rows, (COLUMNS, ROWS), CONSOLE).text == first


def test_another_size_is_sent_whole():
    thin = Thin()
    rows = whole([[("x", None)]] * ROWS)
    first = thin.reduced(rows, (COLUMNS, ROWS), CONSOLE).text
    thin.reduced(rows, (COLUMNS, ROWS + 1), CONSOLE)
    assert thin.reduced(rows, (COLUMNS, ROWS), CONSOLE).text == first
