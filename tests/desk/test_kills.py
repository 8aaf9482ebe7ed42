"""A desk killed again and again at random moments resumes each time at the last edit that it showed.

Twenty kills by default; as many as TRAPDESK_KILLS says when it is set, two hundred for the bench.
"""

import os
import random
import re
import signal
from pathlib import Path

from tests.desk.terminals import ROOT, opened

KILLS = int(os.environ.get("TRAPDESK_KILLS", "20"))
SOON = 0.05
"""Half of the kills come within so many seconds of an edit."""
KINDS = ("kill", "hang up", "power cut")
# Read by Python at its start: notes how much of each file is on the disk, and under which names.
NOTES_SYNCS = """
import os, stat
synced = os.fsync
def fsync(handle):
    synced(handle)
    about = os.fstat(handle)
    line = f"file {about.st_ino} {about.st_size}"
    if stat.S_ISDIR(about.st_mode):
        line = "names " + " ".join(os.listdir(os.environ["STATE_FOLDER"]))
    with open(os.environ["SYNC_NOTES"], "a") as notes:
        notes.write(line + "\\n")
os.fsync = fsync
"""


def cut(folder: Path, notes: Path) -> None:
    """Discard what was not on the disk: bytes past the last sync of a file, names past that of the folder."""
    lines = [line.split() for line in notes.read_text().splitlines()]
    sizes = {int(words[1]): int(words[2]) for words in lines if words[0] == "file"}
    names = [words[1:] for words in lines if words[0] == "names"]
    for file in folder.iterdir():
        if not file.name.endswith(".journal"):
            continue
        size = sizes.get(file.stat().st_ino)
        if size is None or not any(file.name in listed for listed in names[-1:]):
            file.unlink()
        else:
            os.truncate(file, size)


def shown_height(text: str) -> float:
    """Return the height in the row of inputs."""
    return float(re.search(r"height {12}([0-9.]+) m", text)[1])


def told_height(text: str) -> float | None:
    """Return the height that the last note says was kept."""
    told = re.findall(r"height: ([0-9.]+) m, was", text)
    return float(told[-1]) if told else None


def test_every_kill_resumes_at_the_last_edit(tmp_path):
    luck = random.Random(7)
    folder, notes = tmp_path / "state" / "trapdesk", tmp_path / "notes"
    (tmp_path / "sitecustomize.py").write_text(NOTES_SYNCS)
    settings = {
        "PYTHONPATH": f"{tmp_path}:{ROOT}", "STATE_FOLDER": str(folder), "SYNC_NOTES": str(notes),
    }  # fmt: skip
    expected: set[float] = set()
    resumed = 0
    for number in range(KILLS + 1):
        with opened(tmp_path, **settings) as terminal:
            if expected:
                terminal.until("r resumes")
                terminal.type("r")
                terminal.until("as it was after the last edit")
                assert shown_height(terminal.text()) in expected, f"kill {number}: not one of {expected}"
                resumed += 1
            else:
                terminal.until("Enter edit")
            if number == KILLS:
                break
            height = shown_height(terminal.text())
            terminal.type("\x1b[H\x1b[B\x1b[B")  # home, then down to the height
            heights = [height]
            for _ in range(luck.randint(2, 6)):
                # A centimetre more each time, so that each height tells which edit it was.
                heights.append(round(heights[-1] + 0.01, 2))
                terminal.type("+")
                terminal.read(luck.choice((0.0, 0.0, 0.15)))
            if not expected:
                terminal.until(lambda text: told_height(text) is not None)
            terminal.read(luck.uniform(0, SOON) if number % 2 else luck.uniform(SOON, 0.4))
            shown = told_height(terminal.text()) or height
            kind = KINDS[number % len(KINDS)]
            terminal.signal(signal.SIGHUP if kind == "hang up" else signal.SIGKILL)
            terminal.wait()
            # An edit on its way when the end came may be kept or not; one that was shown is kept.
            expected = {one for one in heights if one >= shown}
            if kind == "power cut":
                cut(folder, notes)
    assert resumed == KILLS
