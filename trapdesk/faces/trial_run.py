"""A tolerance run from the command line: numbers checked, progress on stderr, Ctrl-C keeps what there is."""

from __future__ import annotations

import signal
import sys
from collections.abc import Iterator
from contextlib import contextmanager
from typing import Any

from ..errors import BadInput, Fault

LONG = 50_000
"""Trials from which on progress is told."""
LARGEST_SEED = 2**64 - 1


def whole(name: str, text: str, low: int, high: int, example: str) -> int:
    """Return a whole number of an option; BadInput says what would be right."""
    plain = text.strip().replace("_", "").replace(" ", "")
    if not plain.lstrip("+-").isdecimal() or not plain.isascii() or len(plain) > 30:
        raise BadInput(Fault(name, "not_a_whole_number", text, help=f"for example {name} {example}"))
    number = int(plain)
    if not low <= number <= high:
        why = ""
        if name == "--trials" and number < low:
            why = "one antenna tells nothing of the others; some thousand do"
        raise BadInput(Fault(name, "outside_the_range", text, f"{low} to {high}", why))
    return number


class _Watch:
    """Tells progress, and whether to go on."""

    def __init__(self, trials: int) -> None:
        self.stopped, self._told = False, trials < LONG
        self._last = -1

    def __call__(self, done: int, trials: int) -> bool:
        tenth = 10 * done // trials
        if not self._told and tenth != self._last and sys.stderr is not None:
            self._last = tenth
            try:
                print(f"trapdesk: {done} of {trials} trials; Ctrl-C stops and keeps them", file=sys.stderr)
            except OSError:
                self._told = True
        return not self.stopped


@contextmanager
def _stoppable(watch: _Watch) -> Iterator[None]:
    """Have the first Ctrl-C stop the run after the trials at hand; a second one ends it at once."""

    def stop(number: int, frame: object) -> None:
        if watch.stopped:
            raise KeyboardInterrupt
        watch.stopped = True

    before = signal.signal(signal.SIGINT, stop)
    try:
        yield
    finally:
        signal.signal(signal.SIGINT, before)


def run(file: str, trials: str, seed: str, for_yield: str | None) -> tuple[Any, Any, Any]:
    """Return the ensemble of a design, what would help, and the design chosen for yield if asked for."""
    from ..services.antenna.solve import solve
    from ..services.trials import advice
    from ..services.trials import tolerance as service
    from ..services.trials.ensemble import Ensemble
    from ..store import store

    count = whole("--trials", trials, service.FEWEST, service.MOST, "10000")
    start = whole("--seed", seed, 0, LARGEST_SEED - 1, "7")
    figures = solve(store.find(file).design)
    ensemble = Ensemble(figures)
    watch = _Watch(count)
    with _stoppable(watch):
        found = service.tolerance(figures, trials=count, seed=start, progress=watch, ensemble=ensemble)
    few = max(min(found.trials, advice.TRIALS), advice.FEWEST)
    helps = advice.improvements(ensemble, trials=few, seed=start)
    chosen = None
    if for_yield is not None:
        chosen = advice.for_yield(figures, stage=for_yield, seed=start)
    return found, helps, chosen
