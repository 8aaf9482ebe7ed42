"""A desk of its own process in a pseudo-terminal, its screen kept by pyte, a general terminal emulator."""

import os
import pty
import re
import select
import signal
import struct
import sys
import termios
import time
from codecs import getincrementaldecoder
from fcntl import ioctl
from pathlib import Path

import pyte

ROOT = Path(__file__).resolve().parents[2]
LONGEST = 30
"""Seconds after which a test gives up waiting."""
# Private modes and questions that this emulator would print; what they ask for is not drawn.
_PRIVATE = re.compile(r"\x1b\[[<>=?][0-9;]*\$?[a-zA-Z]")
_UNFINISHED = re.compile(r"\x1b(\[[<>=?]?[0-9;]*\$?)?$")
DESK = (sys.executable, "-m", "trapdesk")


def environment(home: Path, **changes: str) -> dict[str, str]:
    """Return an environment in which a desk touches nothing outside a folder."""
    kept = {name: os.environ[name] for name in ("PATH",) if name in os.environ}
    return (
        kept
        | {
            "HOME": str(home),
            "XDG_STATE_HOME": str(home / "state"),
            "XDG_CONFIG_HOME": str(home / "config"),
            "PYTHONPATH": str(ROOT),
            "TERM": "xterm-256color",
            "LANG": "C.UTF-8",
            "OPENBLAS_NUM_THREADS": "1",
        }
        | changes
    )


class Screen:
    """What a person would see of the bytes that came."""

    def __init__(self, size=(80, 24)):
        self.screen = pyte.Screen(*size)
        self._stream = pyte.Stream(self.screen)
        self._pending = ""
        self._decode = getincrementaldecoder("utf-8")("replace").decode
        self.sent = b""

    def take(self, data: bytes) -> None:
        """Take in what came."""
        self.sent += data
        text = self._pending + self._decode(data)
        cut = _UNFINISHED.search(text)
        self._pending = text[cut.start() :] if cut else ""
        self._stream.feed(_PRIVATE.sub("", text[: cut.start()] if cut else text))

    def lines(self) -> list[str]:
        """Return the screen, line by line."""
        return [line.rstrip() for line in self.screen.display]

    def text(self) -> str:
        """Return the screen."""
        return "\n".join(self.lines())


class Terminal(Screen):
    """A pseudo-terminal with a program in it."""

    def __init__(self, command, env, size=(80, 24), cwd=None):
        super().__init__(size)
        columns, rows = size
        self.times: list[float] = []
        self.began = time.monotonic()
        self.pid, self.end = pty.fork()
        if self.pid == 0:
            try:
                ioctl(0, termios.TIOCSWINSZ, struct.pack("HHHH", rows, columns, 0, 0))
                os.chdir(cwd or env["HOME"])
                os.execvpe(command[0], list(command), env)
            finally:
                os._exit(127)
        self.before = termios.tcgetattr(self.end)
        self.code = None

    def __enter__(self):
        return self

    def __exit__(self, *_):
        if self.code is None:
            os.kill(self.pid, signal.SIGKILL)
            self.wait()
        os.close(self.end)

    def read(self, seconds=0.0) -> int:
        """Take in what comes within a time, and return how many bytes that was."""
        got, until = 0, time.monotonic() + seconds
        while select.select([self.end], [], [], max(0.0, until - time.monotonic()))[0]:
            try:
                data = os.read(self.end, 65536)
            except OSError:  # the other end is closed
                return got
            if not data:
                return got
            got += len(data)
            self.take(data)
            self.times.append(time.monotonic())
        return got

    def quiet(self, seconds=0.5) -> int:
        """Take in what comes until nothing has come for a time, and return how many bytes that was."""
        got = 0
        while more := self.read(seconds):
            got += more
        return got

    def until(self, wanted, seconds=LONGEST) -> str:
        """Wait until the screen holds a text, or meets a condition, and return the screen."""
        met = wanted if callable(wanted) else lambda text: wanted in text
        end = time.monotonic() + seconds
        while not met(self.text()):
            assert time.monotonic() < end, f"not within {seconds} s: {wanted}\n{self.text()}"
            self.read(0.02)
        return self.text()

    def type(self, text: str) -> None:
        """Send keys as a terminal would."""
        data = text.encode()
        while data:
            self.read()
            if select.select([], [self.end], [], 1)[1]:
                data = data[os.write(self.end, data[:1024]) :]

    def resize(self, columns, rows) -> None:
        """Give the terminal another size."""
        self.screen.resize(rows, columns)
        ioctl(self.end, termios.TIOCSWINSZ, struct.pack("HHHH", rows, columns, 0, 0))

    def signal(self, number) -> None:
        """Send a signal to the program."""
        os.kill(self.pid, number)

    def wait(self, seconds=LONGEST) -> int:
        """Wait for the program to end and return its exit code, negative for a signal."""
        end = time.monotonic() + seconds
        while self.code is None:
            assert time.monotonic() < end, f"still there after {seconds} s\n{self.text()}"
            self.read(0.02)
            done, status = os.waitpid(self.pid, os.WNOHANG)
            if done:
                self.code = os.waitstatus_to_exitcode(status)
        self.read(0.05)
        return self.code


SETTLED = "per cm"


def opened(home, *arguments, size=(80, 24), cwd=None, **changes) -> Terminal:
    """Open a desk in a terminal, without waiting for anything."""
    return Terminal((*DESK, *arguments), environment(home, **changes), size, cwd)
