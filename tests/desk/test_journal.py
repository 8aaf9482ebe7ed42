"""Nothing is lost: the journal against torn writes, power cuts, full disks, and other desks."""

import ast
import errno
import inspect
import os
import stat
from dataclasses import replace

import pytest

from tests.desk.screens import go_to, opened, pressed, screen, settled, text, typed
from trapdesk.design.design import with_value
from trapdesk.faces.desk import journal
from trapdesk.faces.desk.journal import Journal, Owner
from trapdesk.faces.desk.session import Session
from trapdesk.store import store

HEIGHT = "site.height"


@pytest.fixture
def folder(tmp_path):
    return tmp_path / "state" / "trapdesk"


@pytest.fixture
def reboot(monkeypatch):
    """Return what makes this process another one, in a machine that was started again."""
    boots = []

    def again():
        boots.append(f"boot {len(boots)}")
        monkeypatch.setattr(journal, "_boot", lambda: boots[-1])

    again()
    return again


def journalled(folder, document=None):
    """Return a session whose changes go into a journal, and that journal."""
    session, kept = Session(document or store.find()), Journal(folder=folder)
    troubles = []
    session.note = lambda opened: troubles.append(kept.note(session, opened))
    session.note(False)
    return session, kept, troubles


def at_height(session, height):
    session.take(with_value(session.design, HEIGHT, height))


def left(folder):
    return journal.look_through(folder).left


def test_what_is_left_is_the_state_after_the_last_edit_with_undo_and_redo(folder, reboot):
    session, _, troubles = journalled(folder)
    for height in (11.0, 12.0, 13.0):
        at_height(session, height)
    session.undo()
    reboot()
    (found,) = left(folder)
    assert found.design == session.design
    assert (found.designs, found.place) == session.designs
    assert found.document == store.find()
    assert troubles == [""] * 5


def test_an_edit_after_undo_forgets_what_was_undone(folder, reboot):
    session, _, _ = journalled(folder)
    at_height(session, 11.0)
    at_height(session, 12.0)
    session.undo()
    at_height(session, 13.0)
    reboot()
    assert (left(folder)[0].designs, left(folder)[0].place) == session.designs


def test_saved_designs_are_not_offered_and_their_journal_goes(folder, reboot, tmp_path):
    session, kept, _ = journalled(folder)
    at_height(session, 11.0)
    path = tmp_path / "a.toml"
    store.save(session.design, path, session.text)
    session.saved_as(path, store.read_file(path))
    reboot()
    assert not left(folder)
    assert not kept.file.exists()


def test_edits_after_a_save_come_back_with_their_file(folder, reboot, tmp_path):
    session, _, _ = journalled(folder)
    at_height(session, 11.0)
    path = tmp_path / "a.toml"
    store.save(session.design, path, session.text)
    session.saved_as(path, store.read_file(path))
    at_height(session, 12.0)
    reboot()
    (found,) = left(folder)
    assert found.document.path == path
    assert found.document.text == path.read_text()
    assert found.design.site.height == 12.0
    assert found.designs[0].site.height == 10.0


def test_a_journal_torn_anywhere_holds_what_was_whole(folder, reboot):
    session, kept, _ = journalled(folder)
    at_height(session, 11.0)
    at_height(session, 12.0)
    data = kept.file.read_bytes()
    ends = [index + 1 for index, byte in enumerate(data) if byte == ord("\n")]
    assert len(ends) == 3
    for length in {*range(0, len(data) + 1, 61), *ends, *(end - 1 for end in ends)}:
        kept.file.write_bytes(data[:length])
        found, whole = journal.read(kept.file), sum(end <= length for end in ends)
        assert (found.design.site.height if found else None) == [None, 10.0, 11.0, 12.0][whole]
    for place in range(0, ends[0], 97):  # a byte gone wrong
        kept.file.write_bytes(data[:place] + bytes([data[place] ^ 1]) + data[place + 1 :])
        assert journal.read(kept.file) is None


class Disk:
    """What a power cut leaves: of every file what was synced last, under the names its folder had then."""

    def __init__(self, folder, monkeypatch):
        self.folder, self.contents, self.names = folder, {}, {}
        synced = os.fsync

        def fsync(handle):
            synced(handle)
            about = os.fstat(handle)
            if stat.S_ISDIR(about.st_mode):
                self.names = {name: os.stat(folder / name).st_ino for name in os.listdir(folder)}
            else:
                files = [file for file in folder.iterdir() if file.stat().st_ino == about.st_ino]
                self.contents[about.st_ino] = files[0].read_bytes()

        monkeypatch.setattr(os, "fsync", fsync)

    def cut(self):
        for file in list(self.folder.iterdir()):
            file.unlink()
        for name, inode in self.names.items():
            (self.folder / name).write_bytes(self.contents.get(inode, b""))


@pytest.mark.parametrize("edits", [1, 2, 5])
def test_a_power_cut_loses_nothing_that_was_kept(folder, reboot, monkeypatch, edits):
    disk = Disk(folder, monkeypatch)
    session, _, _ = journalled(folder)
    for number in range(edits):
        at_height(session, 11.0 + number)
    kept = session.designs
    disk.cut()
    reboot()
    (found,) = left(folder)
    assert (found.designs, found.place) == kept


def test_a_power_cut_while_resuming_leaves_one_journal_or_the_other(folder, reboot, monkeypatch):
    session, _, _ = journalled(folder)
    at_height(session, 11.0)
    reboot()
    (before,) = left(folder)
    disk = Disk(folder, monkeypatch)
    again, _, _ = journalled(folder)
    again.open(before.document, before.designs, before.place)
    disk.cut()  # before the old one is removed
    reboot()
    assert {found.design for found in left(folder)} == {session.design}


async def test_what_cannot_be_journalled_is_said_at_once_and_the_desk_goes_on(tmp_path, reboot):
    (tmp_path / "file").write_text("no folder")
    async with opened(kept=Journal(folder=tmp_path / "file" / "state")) as (desk, pilot):
        assert "edits cannot be kept safe here (Not a directory)" in text(desk)
        assert "(no journal)" in screen(desk)[0]
        await go_to(desk, pilot, HEIGHT)
        await typed(desk, pilot, "12 m", "enter")
        await settled(desk, pilot)
        assert desk.session.design.site.height == 12.0
        assert "feed point at 12 m" in screen(desk)[1]


async def test_a_disk_that_fills_up_keeps_the_last_state_written_and_is_used_again(
    folder, reboot, monkeypatch
):
    full, written = [], os.write

    def write(handle, data):
        if full:
            if len(data) > 10 and not full[-1]:
                full[-1] = True
                return written(handle, data[:10])  # the last bytes that there was room for
            raise OSError(errno.ENOSPC, os.strerror(errno.ENOSPC))
        return written(handle, data)

    async with opened(kept=Journal(folder=folder)) as (desk, pilot):
        await go_to(desk, pilot, HEIGHT)
        await typed(desk, pilot, "12 m", "enter")
        full.append(False)
        monkeypatch.setattr(os, "write", write)
        await typed(desk, pilot, "13 m", "enter")
        assert "edits cannot be kept safe here (No space left on device)" in text(desk)
        assert desk.session.design.site.height == 13.0
        await typed(desk, pilot, "14 m", "enter")
        assert "(no journal)" in screen(desk)[0]
        (file,) = folder.glob("*" + journal.ENDING)
        assert journal.read(file).design.site.height == 12.0
        full.clear()
        await typed(desk, pilot, "15 m", "enter")
        assert "(no journal)" not in screen(desk)[0]
        await settled(desk, pilot)
    reboot()
    (found,) = left(folder)
    assert found.design.site.height == 15.0
    assert [design.site.height for design in found.designs] == [10.0, 12.0, 13.0, 14.0, 15.0]


async def test_the_next_start_offers_what_was_left(folder, reboot):
    async with opened(kept=Journal(folder=folder)) as (desk, pilot):
        await go_to(desk, pilot, HEIGHT)
        await typed(desk, pilot, "12 m", "enter", "plus")
        await settled(desk, pilot)
        was = desk.session.designs
    reboot()
    async with opened(kept=Journal(folder=folder)) as (desk, pilot):
        assert "was left unsaved by a desk that ended: r resumes" in text(desk).replace("\n", " ")
        await pressed(desk, pilot, "n")
        assert not desk.session.unsaved
    reboot()
    async with opened(kept=Journal(folder=folder)) as (desk, pilot):
        await pressed(desk, pilot, "r")
        await settled(desk, pilot)
        assert desk.session.designs == was
        assert "(unsaved)" in screen(desk)[0]
        assert desk.session.figures.design.site.height == pytest.approx(12.01)
        await pressed(desk, pilot, "u")
        assert desk.session.design.site.height == 12.0
        await settled(desk, pilot)
    reboot()
    async with opened(kept=Journal(folder=folder)) as (desk, pilot):
        await pressed(desk, pilot, "d")
        assert "dropped" in text(desk)
    reboot()
    assert not left(folder)


async def test_leaving_on_purpose_leaves_nothing(folder, reboot):
    async with opened(kept=Journal(folder=folder)) as (desk, pilot):
        await go_to(desk, pilot, HEIGHT)
        await typed(desk, pilot, "12 m", "enter")
        await pressed(desk, pilot, "q", "q")
        assert not desk.is_running
    reboot()
    assert not left(folder)
    assert not list(folder.glob("*" + journal.ENDING))


def test_the_latest_is_told_by_number_and_not_by_any_clock(folder, reboot):
    for number, height in enumerate((11.0, 12.0, 13.0)):
        reboot()
        session, kept, _ = journalled(folder)
        at_height(session, height)
        # The clock of a small computer without a network: the later, the earlier it says.
        os.utime(kept.file, (10**9 - 1000 * number,) * 2)
    reboot()
    assert [found.design.site.height for found in left(folder)] == [13.0, 12.0, 11.0]
    for module in (journal, Session.__module__ and inspect.getmodule(Session)):
        names = {
            node.attr
            for node in ast.walk(ast.parse(inspect.getsource(module)))
            if isinstance(node, ast.Attribute)
        }
        assert not names & {"time", "monotonic", "st_mtime", "now", "utcnow", "st_ctime"}


@pytest.mark.parametrize(
    ("change", "alive"),
    [({}, True), ({"boot": "another"}, False), ({"start": "1"}, False), ({"pid": 2**22 + 1}, False)],
)
def test_stale_locks_are_told_from_live_ones(change, alive):
    # A number past the largest there can be is nobody's; one used again has another start.
    assert replace(journal.myself(), **change).alive is alive


async def test_what_is_unsaved_at_a_desk_that_still_runs_is_told(folder, monkeypatch):
    session, _, _ = journalled(folder)
    at_height(session, 11.0)
    monkeypatch.setattr(journal, "myself", lambda: Owner(pid=1, start="not mine", boot="here"))
    async with opened(kept=Journal(folder=folder)) as (desk, _):
        assert f"kill -HUP {os.getpid()} ends it" in " ".join(text(desk).split())
        assert not desk.foot.asking
        found = journal.look_through(folder)
    assert session.design in [held.design for held in found.running]
    assert not found.left


async def test_two_desks_on_a_file_are_noticed(folder, tmp_path, monkeypatch):
    path = tmp_path / "hill.toml"
    store.save(store.find().design, path)
    other, _, _ = journalled(folder, store.find(path))
    assert other.path == path
    me = Owner(pid=1, start="not mine", boot="here")
    monkeypatch.setattr(journal, "myself", lambda: me)
    link = tmp_path / "link.toml"
    link.symlink_to(path)
    async with opened(document=store.find(link), kept=Journal(folder=folder)) as (desk, pilot):
        assert f"another desk (process {os.getpid()}) has this file open" in text(desk)
        await pressed(desk, pilot, "o")
        await typed(
            desk, pilot, "80-40-vee" if "80-40-vee" in store.presets() else store.presets()[-1], "enter"
        )
        assert "another desk" not in text(desk)
        await pressed(desk, pilot, "o")
        await typed(desk, pilot, str(path), "enter")
        assert "another desk" in text(desk)
        await settled(desk, pilot)
