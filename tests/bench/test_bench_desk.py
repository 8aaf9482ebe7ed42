"""What the desk costs a thin line and a tired battery: bytes, wake-ups, memory, how soon a key is answered.

All at 80x24 on the default preset. The entries of the table are bytes, kilobytes or ratios, as they say.
"""

import os
import re
import statistics
import sys
import time
from pathlib import Path

import pytest

from tests.bench.yardstick import record
from tests.desk.terminals import Terminal, environment, opened
from trapdesk.faces.desk.app import SETTLING

READY = "next: "
SETTLED, SOON = SETTLING + 0.1, 0.1
"""Seconds after which a desk at rest has nothing more to send for an edit, and for any other key."""
# The least that Textual can be: one line of text.
BARE = """
from textual.app import App
from textual.widgets import Static
class Bare(App):
    ENABLE_COMMAND_PALETTE = False
    def compose(self):
        yield Static("Site")
Bare().run()
"""


def bare(home) -> Terminal:
    return Terminal((sys.executable, "-c", BARE), environment(home))


def spent(terminal, keys, seconds=SETTLED) -> int:
    """Return the bytes that keys cost with all that follows from them."""
    before = len(terminal.sent)
    terminal.type(keys)
    rest(terminal, seconds)
    return len(terminal.sent) - before


def ticks(pid) -> int:
    """Return how long a process has computed, in ticks of the system's clock."""
    fields = Path(f"/proc/{pid}/stat").read_text().rpartition(")")[2].split()
    return int(fields[11]) + int(fields[12])


def rest(terminal, seconds) -> None:
    """Take in what comes for a time, and then until the program neither sends nor computes."""
    terminal.read(seconds)
    while True:
        before = ticks(terminal.pid)
        if not terminal.read(0.3) and ticks(terminal.pid) - before <= 1:
            return


def cells(terminal):
    """Return what every cell shows, and its style as far as it shows."""
    rows = []
    for y in range(terminal.screen.lines):
        line = terminal.screen.buffer[y]
        row = []
        for x in range(terminal.screen.columns):
            cell = line[x]
            style = (cell.fg, cell.bold, cell.reverse, cell.underscore)
            row.append((cell.data, style if cell.data != " " else (cell.reverse, cell.underscore)))
        rows.append(row)
    return rows


def least(before, after) -> int:
    """Return the bytes of the shortest way from one screen to another that a cell differ could send.

    Each run of changed cells wants its characters and a way to get there: the shorter of a step to the right
    and the cells between once more, or an address for the first of a row. A change of style takes four bytes,
    the shortest there is for a colour; a blank rest of a row three.
    """
    total = 0
    for y, (old, new) in enumerate(zip(before, after, strict=True)):
        changed = [x for x in range(len(new)) if old[x] != new[x]]
        if not changed:
            continue
        end = max((x + 1 for x in range(len(new)) if new[x][0] != " "), default=0)
        total += len(f"\x1b[{y + 1};{changed[0] + 1}H")
        style, at = None, changed[0]
        for x in (x for x in changed if x < end):
            gap = x - at
            total += min(gap, 3 if gap < 2 else len(f"\x1b[{gap}C"))
            if new[x][1] != style:
                total += 4
                style = new[x][1]
            total += len(new[x][0].encode())
            at = x + 1
        total += 3 if changed[-1] >= end else 0
    return total


@pytest.fixture(scope="module")
def desk(tmp_path_factory):
    home = tmp_path_factory.mktemp("home")
    (home / "state" / "trapdesk").mkdir(parents=True)  # not the first run, which has a line to say
    with opened(home) as terminal:
        terminal.until(READY)
        rest(terminal, SETTLED)
        yield terminal


def test_bytes(desk):
    # One start asks the terminal what it can do and turns on mouse, paste and alternate screen: that counts.
    record("desk: first screen with its first figures, kB", len(desk.sent) / 1e3, limit=6.0)
    assert len(desk.sent) <= 6000
    moves = [
        spent(desk, key, SOON)
        for key in ("\x1b[B", "\x1b[B", "\x1b[A", "\x1b[A", "\x1b[B", "\x1b[B", "\x1b[B")
    ]
    record("desk: row move, bytes at most", max(moves), limit=300)
    assert max(moves) <= 300
    spent(desk, "\x1b[A\r\x15", SOON)
    typed = [spent(desk, character, SOON) for character in "12.5 m"]
    record("desk: typed character, bytes at most", max(typed), limit=120)
    assert max(typed) <= 120
    kept = spent(desk, "\r")
    record("desk: kept edit and all it changes, bytes", kept, limit=1500)
    assert kept <= 1500
    desk.type("S")
    desk.until("SWR  ")
    rest(desk, SOON)
    ratios = []
    for key in ("u", "U"):
        before = cells(desk)
        bytes_sent = spent(desk, key)
        ratios.append(bytes_sent / least(before, cells(desk)))
    record("desk: changed plot against the least possible", max(ratios), limit=1.3)


def test_idle(tmp_path, desk):
    spent(desk, "\x1b", SOON)
    spent(desk, "A")
    seconds = 3.0
    assert desk.read(seconds) == 0
    ours = woken(desk.pid, seconds)
    with bare(tmp_path) as terminal:
        terminal.until("Site")
        rest(terminal, SOON)
        theirs = woken(terminal.pid, seconds)
    record("desk: wake-ups idle, against a bare app's", ours / theirs, limit=1.05)
    memory = re.search(r"VmHWM:\s+(\d+) kB", Path(f"/proc/{desk.pid}/status").read_text())
    record("desk: memory at its most, MB", int(memory[1]) / 1e3, limit=100)


def woken(pid, seconds) -> int:
    """Return how often the threads of a process were woken in a time."""

    def count() -> int:
        total = 0
        for task in os.listdir(f"/proc/{pid}/task"):
            status = Path(f"/proc/{pid}/task/{task}/status").read_text()
            total += int(re.search(r"\nvoluntary_ctxt_switches:\s+(\d+)", status)[1])
        return total

    before = count()
    time.sleep(seconds)
    return count() - before


def test_first_paint(tmp_path):
    times = {"bare": [], "sign": [], "screen": []}
    for _ in range(5):
        with bare(tmp_path) as terminal:
            terminal.until("Site")
            times["bare"].append(time.monotonic() - terminal.began)
        with opened(tmp_path) as terminal:
            terminal.until("opening the first design")
            times["sign"].append(time.monotonic() - terminal.began)
            terminal.until("Site")  # the first of the inputs
            times["screen"].append(time.monotonic() - terminal.began)
    bare_ = statistics.median(times["bare"])
    record("desk: first sign of life against a bare app", statistics.median(times["sign"]) / bare_, limit=1.5)
    record("desk: first paint against a bare app's", statistics.median(times["screen"]) / bare_, limit=1.5)


def echoes(desk, count) -> list[float]:
    """Return how long each of so many characters, typed into a line, took to be on the screen."""
    desk.type("w")
    desk.until("write to ")
    desk.type("\x15")  # what is suggested goes
    desk.until(lambda text: not typed_text(desk))
    taken = []
    for number in range(count):
        wanted = str(number % 10)
        before = typed_text(desk)
        start = time.perf_counter()
        desk.type(wanted)
        while typed_text(desk) != before + wanted:
            assert time.perf_counter() - start < 10
            desk.read(0.001)
        taken.append(time.perf_counter() - start)
        desk.read(0.005)
    return taken


def typed_text(desk) -> str:
    return next((line for line in desk.lines() if line.startswith("write to ")), "").removeprefix("write to ")


def test_echo_while_the_ensemble_runs(desk):
    count, rounds, idle, running = 10, 8, [], []
    for _ in range(rounds):
        idle += echoes(desk, count)
        desk.type("\x1b")
        desk.until("nothing was written")
        desk.type("R")  # the reasons for the yield take the whole ensemble
        desk.read(0.05)
        taken = echoes(desk, count)
        # A fast machine may be done with the ensemble before the last key: such a round says nothing.
        running += taken if busy(desk) else []
        desk.type("\x1b")
        desk.until("nothing was written")
        desk.type("A\x1b[H\x1b[B\x1b[B+")  # another design, for another ensemble
        rest(desk, SETTLED)
    assert len(running) >= len(idle) / 2, "the ensemble ended before the last key"
    late = [statistics.quantiles(taken, n=20)[-1] for taken in (running, idle)]
    record("desk: 95 % of echoes while 10,000 trials run, against idle", late[0] / late[1], limit=3.0)


def busy(desk) -> bool:
    """Return whether the process computes."""

    before = ticks(desk.pid)
    desk.read(0.2)
    return (ticks(desk.pid) - before) / os.sysconf("SC_CLK_TCK") > 0.05
