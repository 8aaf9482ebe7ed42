"""The desk in a terminal: what it sends, how it leaves it, what it does with whatever comes."""

import os
import re
import signal
import subprocess
import sys
import termios
from dataclasses import replace

import pytest

from tests.desk.terminals import ROOT, opened
from trapdesk.store import store

READY = "next: "


@pytest.mark.parametrize(
    ("end", "code"),
    [
        (lambda terminal: terminal.type("q"), 0),
        (lambda terminal: terminal.signal(signal.SIGTERM), 128 + signal.SIGTERM),
        (lambda terminal: terminal.signal(signal.SIGHUP), 128 + signal.SIGHUP),
    ],
)
def test_the_terminal_is_left_as_it_was_found(tmp_path, end, code):
    with opened(tmp_path) as terminal:
        terminal.until(READY)
        end(terminal)
        assert terminal.wait() == code
        assert termios.tcgetattr(terminal.end) == terminal.before
        last = {}
        for mode, state in re.findall(rb"\x1b\[\?(\d+)([hl])", terminal.sent):
            last[mode] = state
        # Lines wrap and the caret shows again; what else was turned on, mouse and paste too, is off.
        assert {mode for mode, state in last.items() if state == b"h"} == {b"7", b"25"}
        assert b"Traceback" not in terminal.sent


def test_a_fault_of_its_own_is_one_line_and_a_file_and_loses_nothing(tmp_path):
    (tmp_path / "sitecustomize.py").write_text(
        "from trapdesk.faces.desk import deeds\n"
        "def fails(self):\n"
        "    raise RuntimeError('of a [b]kind[/b] \\x1b[2J')\n"
        "deeds.Deeds.zoom = fails\n"
    )
    path = f"{tmp_path}:{os.path.dirname(os.path.dirname(os.path.dirname(__file__)))}"
    with opened(tmp_path, PYTHONPATH=path) as terminal:
        terminal.until(READY)
        terminal.type("\x1b[B\x1b[B12 m\r")
        terminal.until("height: 12 m, was 10 m")
        terminal.type("z")
        assert terminal.wait() == 1
        said = terminal.sent.rpartition(b"\x1b[?1004l")[2].decode()
        assert "Traceback" not in said
        assert "of a [b]kind[/b] \\x1b[2J" in said.replace("\r\n", " ")
    assert "RuntimeError" in (tmp_path / "state" / "trapdesk" / "last-error.txt").read_text()
    with opened(tmp_path) as terminal:
        terminal.until("r resumes")
        terminal.type("r")
        terminal.until("height            12 m")


@pytest.mark.parametrize(
    ("changes", "ascii_", "colours"),
    [
        ({"TERM": "xterm-256color"}, False, True),
        ({"TERM": "screen"}, False, True),
        ({"TERM": "tmux-256color"}, False, True),
        ({"TERM": "linux"}, True, True),
        ({"TERM": "vt100"}, True, False),
        ({"TERM": "dumb"}, True, False),
        ({"TERM": "xterm-256color", "LANG": "C"}, True, True),
        ({"TERM": "xterm-256color", "NO_COLOR": "1"}, False, False),
    ],
)
def test_every_terminal_gets_what_it_can_show(tmp_path, changes, ascii_, colours):
    store.save(replace(store.find().design, title="30 \u03a9 hill"), tmp_path / "omega.toml")
    with opened(tmp_path, "omega.toml", size=(120, 40), **changes) as terminal:
        terminal.until(READY)
        terminal.type("v")
        terminal.until("SWR")
        terminal.quiet(0.3)
        assert terminal.sent.isascii() is ascii_
        codes = {
            int(n) for run in re.findall(rb"\x1b\[([\d;]*)m", terminal.sent) for n in run.split(b";") if n
        }
        assert bool(codes & {*range(30, 39), *range(40, 49), *range(90, 108)}) is colours
        assert "30 " in terminal.lines()[0]


def test_a_hundred_kilobytes_pasted_break_nothing(tmp_path):
    with opened(tmp_path) as terminal:
        terminal.until(READY)
        terminal.type("\x1b[200~" + "12 m \x07\x9b2J" * 10_000 + "\x1b[201~")
        terminal.until("12 m")
        terminal.type("\x1b")
        terminal.until("as it was")
        terminal.type("y" * 5000)  # and as many keys without the brackets
        terminal.type("\x1b[<0;5;5M\x1b[999;999R\x1b]0;title\x07\x1bP$q\x1b\\")
        terminal.quiet(1.0)
        terminal.type("\x1b")
        terminal.until("? help  q quit")
        terminal.type("q")
        assert terminal.wait() == 0
        assert b"Traceback" not in terminal.sent


def test_keys_faster_than_it_solves_are_all_dealt_with(tmp_path):
    with opened(tmp_path) as terminal:
        terminal.until("Site")
        terminal.type("\x1b[B\x1b[B" + "+" * 100 + "-" * 40)
        terminal.until("height            10.6 m")
        terminal.until("feed point at 10.6 m")


def test_sizes_come_and_go_while_it_solves(tmp_path):
    with opened(tmp_path) as terminal:
        terminal.until("Site")
        for size in ((120, 40), (40, 12), (20, 5), (200, 60), (80, 24)):
            terminal.type("+")
            terminal.resize(*size)
            terminal.read(0.05)
        terminal.until(lambda text: READY in text and "solving" not in text)
        terminal.quiet(2.0)
        before = terminal.text()
        terminal.type("\x0c")  # the whole screen again: what was pieced together is what is there
        terminal.quiet(0.5)
        assert terminal.text() == before
        assert terminal.signal(signal.SIGTERM) is None
        assert terminal.wait() == 128 + signal.SIGTERM


def test_asleep_and_awake_again_the_screen_is_whole(tmp_path):
    with opened(tmp_path) as terminal:
        terminal.until(READY)
        terminal.quiet(0.5)
        before = terminal.lines()
        terminal.type("\x1a")
        terminal.until(lambda text: b"\x1b[?1049l" in terminal.sent)
        assert os.WIFSTOPPED(os.waitpid(terminal.pid, os.WUNTRACED)[1])
        terminal.screen.reset()
        terminal.signal(signal.SIGCONT)
        terminal.until(READY)
        terminal.quiet(0.5)
        assert terminal.lines() == before


def test_what_computes_and_draws_is_imported_after_the_inputs_are_shown():
    code = (
        "import sys\n"
        "from trapdesk.faces.desk import app, opening\n"
        "from trapdesk.store import store\n"
        "store.find()\n"
        "print(*{'numpy', 'pint', 'plotext', 'textual'} & sys.modules.keys())"
    )
    done = subprocess.run([sys.executable, "-c", code], cwd=ROOT, capture_output=True, text=True, check=True)
    assert done.stdout.split() == ["textual"]
