"""Sweeps in files: what kind of file it is, how much of it may be read, and files written anew."""

from __future__ import annotations

import os
import stat
from pathlib import Path

from ..engine.fits import Sweep
from ..errors import FileFault
from . import sweep_columns, touchstone

LARGEST_FILE = 4_000_000
"""No sweep of a wire or trap needs more. [bytes]"""
TOUCHSTONE = {".s1p": 1, ".s2p": 2}
COLUMNS = (".csv", ".tsv", ".txt")


def read(path: str | os.PathLike[str]) -> tuple[Sweep, tuple[str, ...]]:
    """Return the sweep in a file, and remarks on it in words.

    Raises FileFault where there is no such file or it is too large, and SweepFault where it breaks a rule.
    """
    kind = Path(path).suffix.lower()
    if kind not in TOUCHSTONE and kind not in COLUMNS:
        known = ", ".join((*TOUCHSTONE, *COLUMNS))
        raise FileFault(path, "not_a_kind_of_sweep_known_here", help=f"its name must end in one of {known}")
    data = _bytes(path)
    if kind in TOUCHSTONE:
        return touchstone.read(os.fspath(path), data, TOUCHSTONE[kind])
    return sweep_columns.read(os.fspath(path), data)


def _bytes(path: str | os.PathLike[str]) -> bytes:
    """Return what is in a file; a huge one is refused before it is read."""
    try:
        found = os.stat(path)
        if stat.S_ISDIR(found.st_mode):
            raise FileFault(path, "is_directory", help="name a file in it")
        if not stat.S_ISREG(found.st_mode):
            raise FileFault(path, "not_readable", help="it is no file with data in it")
        if found.st_size > LARGEST_FILE:
            help = f"it has {found.st_size / 1e6:.0f} MB, a sweep at most {LARGEST_FILE // 1_000_000} MB"
            raise FileFault(path, "too_large_to_be_a_sweep", help=help)
        with open(path, "rb") as file:
            data = file.read(LARGEST_FILE + 1)
    except FileNotFoundError:
        raise FileFault(path, "not_found") from None
    except (OSError, ValueError) as error:
        reason = error.strerror if isinstance(error, OSError) else ""
        raise FileFault(path, "not_readable", help=reason or str(error)) from None
    if len(data) > LARGEST_FILE:
        raise FileFault(path, "too_large_to_be_a_sweep", help="it grew while it was read")
    return data


def write_new(path: str | os.PathLike[str], text: str, encoding: str = "ascii") -> None:
    """Write a file that is not there yet; FileFault when one is, or when it cannot be written."""
    try:
        with open(path, "x", encoding=encoding, newline="\n") as file:
            file.write(text)
    except FileExistsError:
        raise FileFault(path, "already_there", help="nothing is written over; choose another name") from None
    except (OSError, ValueError) as error:
        reason = error.strerror if isinstance(error, OSError) else ""
        raise FileFault(path, "not_writable", help=reason or str(error)) from None
