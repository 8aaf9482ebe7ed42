"""The same seed gives the same trials by other code of the libraries, as other processors take it.

Each setting is a process of its own: the matrix library takes its kernels for another processor, numpy goes
without its wide instructions. With TRAPDESK_LONG set all presets and many settings are run.
"""

import itertools
import json
import os
import subprocess
import sys
import warnings
from collections.abc import Iterator
from functools import cache
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from trapdesk.store import store

ROOT = Path(__file__).resolve().parent.parent
LONG = bool(os.environ.get("TRAPDESK_LONG"))
PRESETS = tuple(store.presets()) if LONG else ("40-20-vee",)
TRIALS = (1000, 10_000) if LONG else (500,)

with warnings.catch_warnings():
    # Older numpy has it under another name, newer numpy warns of that one.
    warnings.simplefilter("ignore")
    UFUNCS = getattr(np, "_core", None) or np.core
WIDE = [
    name
    for name in UFUNCS._multiarray_umath.__cpu_dispatch__
    if name in {key for key, there in UFUNCS._multiarray_umath.__cpu_features__.items() if there}
]
PLAIN = {"OPENBLAS_NUM_THREADS": "1"}
NARROW = {"NPY_DISABLE_CPU_FEATURES": " ".join(WIDE)} if WIDE else {}
SETTINGS = {
    "oldest": {"OPENBLAS_CORETYPE": "Prescott", **NARROW},
    "two threads, other kernels": {"OPENBLAS_CORETYPE": "Haswell", "OPENBLAS_NUM_THREADS": "2"},
}
if LONG:
    KINDS = ("Prescott", "Nehalem", "Sandybridge", "Haswell", "Zen", "SkylakeX")
    SETTINGS |= {
        f"{kind}, {n}": {"OPENBLAS_CORETYPE": kind, "OPENBLAS_NUM_THREADS": n}
        for kind, n in itertools.product(KINDS, "12")
    }
    SETTINGS |= {
        f"without {' '.join(WIDE[i:])}": {"NPY_DISABLE_CPU_FEATURES": " ".join(WIDE[i:])}
        for i in range(len(WIDE))
    }


def run(name: str, trials: int, setting: dict[str, str]) -> dict[str, Any]:
    """Return the numbers of a run by their places in its document."""
    command = [sys.executable, "-m", "trapdesk", "tolerance", name, "--trials", str(trials), "--json"]
    done = subprocess.run(
        command, cwd=ROOT, env={**os.environ, **PLAIN, **setting}, capture_output=True, text=True, timeout=300
    )
    assert done.returncode == 0, done.stderr
    return dict(leaves(json.loads(done.stdout), ""))


plain = cache(lambda name, trials: run(name, trials, {}))


def leaves(value: Any, place: str) -> Iterator[tuple[str, Any]]:
    """Yield everything that holds nothing more, with where it stands."""
    pairs = (
        value.items() if isinstance(value, dict) else enumerate(value) if isinstance(value, list) else None
    )
    if pairs is None:
        yield place, value
        return
    for key, inner in pairs:
        yield from leaves(inner, f"{place}.{key}")


def allowed(place: str, one: float, trials: int) -> float:
    """Return how far a number may be off: a trial where it counts trials, else a millionth of itself."""
    last = place.rpartition(".")[2]
    if last == "passed":
        return 1
    if place.startswith(".advice"):
        trials = min(trials, 2000)
    if last in ("share", "reserve_risk", "dip_outside", "not_brought_to_aim"):
        return 1.01 / trials
    if last == "gain" or last in ("low", "high") and ".yield." in place:
        # A difference of two shares, or an end of an interval, which near none and all moves a little more.
        return 3 / trials
    # What is told of causes is a share of the whole.
    return 1e-6 * (1.0 if ".causes." in place or last == "together" else abs(one))


@pytest.mark.parametrize("setting", SETTINGS)
@pytest.mark.parametrize("trials", TRIALS)
@pytest.mark.parametrize("name", PRESETS)
def test_same_trials_on_another_processor(name, trials, setting):
    one, other = plain(name, trials), run(name, trials, SETTINGS[setting])
    assert set(one) == set(other)
    off = {
        place: (value, other[place])
        for place, value in one.items()
        if value != other[place]
        and not (
            isinstance(value, int | float) and abs(value - other[place]) <= allowed(place, value, trials)
        )
    }
    assert not off
