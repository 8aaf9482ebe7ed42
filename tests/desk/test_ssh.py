"""The desk over SSH: a real server on the loopback address, a link that drops, and coming back.

The server is asyncssh, in pure Python, so that this is tested wherever the tests run. Where tmux is installed
it holds the desk while the link is down; where it is not, the desk's own journal brings the work back.
"""

import asyncio
import fcntl
import os
import pty
import shutil
import signal
import struct
import sys
import termios
import time
from contextlib import asynccontextmanager

import asyncssh
import pytest

from tests.desk.terminals import LONGEST, Screen, environment

TMUX = shutil.which("tmux")


def serving(command, env, over):
    """Return what gives each client a terminal with a program in it."""

    async def serve(process):
        ours, theirs = pty.openpty()
        columns, rows, *_ = process.term_size
        fcntl.ioctl(theirs, termios.TIOCSWINSZ, struct.pack("HHHH", rows, columns, 0, 0))
        child = await asyncio.create_subprocess_exec(
            *command, stdin=theirs, stdout=theirs, stderr=theirs, cwd=env["HOME"], start_new_session=True,
            env=env | {"TERM": process.term_type}, preexec_fn=lambda: fcntl.ioctl(0, termios.TIOCSCTTY, 0),
        )  # fmt: skip
        os.close(theirs)
        await process.redirect(stdin=os.dup(ours), stdout=ours)
        dropped = asyncio.ensure_future(process.channel.wait_closed())
        ended = asyncio.ensure_future(child.wait())
        await asyncio.wait((dropped, ended), return_when=asyncio.FIRST_COMPLETED)
        if ended.done():
            process.exit(child.returncode)
            await dropped
        else:  # a server hangs up on what ran over a link that is gone
            child.send_signal(signal.SIGHUP)
            await ended
        await process.wait_closed()  # what was passed on is closed too
        over.set()

    return serve


@asynccontextmanager
async def server(command, env, over):
    """Serve on the loopback address; yields a function that connects and returns link and session."""
    host, key = asyncssh.generate_private_key("ssh-ed25519"), asyncssh.generate_private_key("ssh-ed25519")

    class Door(asyncssh.SSHServer):
        def begin_auth(self, username):
            return True

        def public_key_auth_supported(self):
            return True

        def validate_public_key(self, username, offered):
            return offered == key.convert_to_public()

    listening = await asyncssh.create_server(
        Door,
        "127.0.0.1",
        0,
        server_host_keys=[host],
        process_factory=serving(command, env, over),
        encoding=None,
    )
    known = asyncssh.import_known_hosts(f"* {host.export_public_key().decode()}")

    async def connect():
        link = await asyncssh.connect(
            "127.0.0.1", listening.get_port(), client_keys=[key], known_hosts=known, username="operator",
            config=None,
        )  # fmt: skip
        session = await link.create_process(term_type="xterm-256color", term_size=(80, 24), encoding=None)
        return link, Remote(session)

    try:
        yield connect
    finally:
        listening.close()
        await listening.wait_closed()


class Remote(Screen):
    """The screen at this end of the link."""

    def __init__(self, session):
        super().__init__((80, 24))
        self.session = session

    async def until(self, wanted):
        end = time.monotonic() + LONGEST
        while wanted not in self.text():
            assert time.monotonic() < end, f"not within {LONGEST} s: {wanted}\n{self.text()}"
            try:
                self.take(await asyncio.wait_for(self.session.stdout.read(65536), 0.1))
            except TimeoutError:
                continue

    def type(self, text):
        self.session.stdin.write(text.encode())


HELD = "tmux" if TMUX else "the journal"


@pytest.mark.parametrize("holds", dict.fromkeys([HELD, "the journal"]))
async def test_open_edit_drop_the_link_and_come_back(tmp_path, holds):
    env = environment(tmp_path)
    desk = [sys.executable, "-m", "trapdesk"]
    socket = str(tmp_path / "tmux")
    held = [TMUX, "-S", socket, "-f", os.devnull, "new-session", "-A", "-s", "hill", *desk]
    over = asyncio.Event()
    async with server(held if holds == "tmux" else desk, env, over) as connect:
        try:
            link, remote = await connect()
            await remote.until("next: ")
            remote.type("\x1b[B\x1b[B12 m\r")
            await remote.until("height: 12 m, was 10 m")
            await remote.until("feed point at 12 m")
            link.abort()
            await link.wait_closed()
            await asyncio.wait_for(over.wait(), LONGEST)  # what ran over the link has been hung up on
            link, remote = await connect()
            if holds == "the journal":
                await remote.until("r resumes")
                remote.type("r")
            await remote.until("height            12 m")
            await remote.until("feed point at 12 m")
            remote.type("u")
            await remote.until("height            10 m")
            remote.type("q")
            await asyncio.wait_for(remote.session.wait_closed(), LONGEST)
            link.close()
            await link.wait_closed()
        finally:
            if holds == "tmux":
                await (await asyncio.create_subprocess_exec(
                    TMUX, "-S", socket, "kill-server", stderr=asyncio.subprocess.DEVNULL
                )).wait()  # fmt: skip
