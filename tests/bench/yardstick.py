"""A machine's own measure of time, so that a speed limit means the same on a laptop and on a small board.

A bench is an ordinary test::

    from tests.bench.yardstick import ratio, record

    def test_sweep_of_two_bands():
        record("sweep, 2 x 101 points", ratio(lambda: sweep(design)), limit=3.0)

``record`` fails the test past twice the limit: the limit is what is aimed at, the factor two is the unrest
of a machine that does other things as well. All records are printed in a table after the tests.
"""

import time
from collections.abc import Callable
from dataclasses import dataclass
from statistics import median

import numpy as np

SYSTEMS = 100
SIZE = 64
RUNS = 20


@dataclass(frozen=True, kw_only=True)
class Record:
    """One measured bench: its time and its limit, both in yardsticks."""

    name: str
    ratio: float
    limit: float

    @property
    def passed(self) -> bool:
        """Whether the ratio is within twice the limit; a NaN is not."""
        return self.ratio <= 2 * self.limit


RECORDS: list[Record] = []


def _problems() -> list[tuple[np.ndarray, np.ndarray]]:
    random = np.random.default_rng(64)

    def draw(*shape: int) -> np.ndarray:
        return random.standard_normal(shape) + 1j * random.standard_normal(shape)

    # A heavy diagonal keeps every system far from singular.
    return [(draw(SIZE, SIZE) + SIZE * np.eye(SIZE), draw(SIZE)) for _ in range(SYSTEMS)]


PROBLEMS = _problems()


def _solve_all() -> None:
    for matrix, right in PROBLEMS:
        np.linalg.solve(matrix, right)


def _seconds(function: Callable[[], object]) -> float:
    start = time.perf_counter()
    function()
    return time.perf_counter() - start


def yardstick(runs: int = RUNS) -> float:
    """Return the median time of 100 complex solves of 64 x 64, one right-hand side each, in seconds."""
    _solve_all()
    return median(_seconds(_solve_all) for _ in range(runs))


def ratio(function: Callable[[], object], runs: int = RUNS) -> float:
    """Return the median time of a call in yardsticks, both timed in turn so that a busy moment hits both."""
    function()
    _solve_all()
    pairs = [(_seconds(function), _seconds(_solve_all)) for _ in range(runs)]
    return median(own for own, _ in pairs) / median(unit for _, unit in pairs)


def record(name: str, ratio: float, limit: float) -> None:
    """Keep a measured ratio for the table and fail if it is more than twice its limit."""
    entry = Record(name=name, ratio=ratio, limit=limit)
    RECORDS.append(entry)
    assert entry.passed, f"{name}: {ratio:.3g} yardsticks, more than twice the limit of {limit:.3g}"


def table(records: list[Record]) -> list[str]:
    """Return the records as lines of text, a heading first; no lines without records."""
    if not records:
        return []
    width = max(len("bench"), *(len(entry.name) for entry in records))
    lines = [f"{'bench':<{width}}  {'ratio':>9}  {'limit':>9}"]
    for entry in records:
        remark = "" if entry.ratio <= entry.limit else "  over the limit" if entry.passed else "  FAILED"
        lines.append(f"{entry.name:<{width}}  {entry.ratio:>9.3g}  {entry.limit:>9.3g}{remark}")
    return lines
