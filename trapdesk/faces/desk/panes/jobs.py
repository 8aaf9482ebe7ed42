"""What the views have worked out aside, each with the same calls as its verb on the command line."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from ..aside import Job, Task

if TYPE_CHECKING:
    from ....design.box import Box
    from ....services.box.rummage import Found
    from ....services.trials.advice import Improvements
    from ....services.trials.tolerance import Tolerance

QUICK, SHEET, FULL = 1000, 2000, 10_000
"""Trials after each edit, those of the sheet, and those of the verb unless it is told otherwise."""
ROWS = 20


def _trials(task: Task, count: int, ensemble: Any = None) -> Tolerance:
    from ....services.trials.tolerance import tolerance

    assert task.figures is not None

    def progress(done: int, trials: int) -> bool:
        task.tell(f"{done} of {trials} trials")
        return not task.stopped()

    return tolerance(task.figures, trials=count, progress=progress, ensemble=ensemble)


def _quick(task: Task) -> Iterator[Tolerance]:
    yield _trials(task, QUICK)


def _for_sheet(task: Task) -> Iterator[Tolerance]:
    yield _trials(task, SHEET)


def _full(task: Task) -> Iterator[tuple[Tolerance, Improvements]]:
    """Yield few trials first, then as many as the verb takes."""
    from ....services.trials import advice
    from ....services.trials.ensemble import Ensemble

    assert task.figures is not None
    ensemble = Ensemble(task.figures)
    for count in (QUICK, FULL):
        found = _trials(task, count, ensemble)
        if task.stopped():
            return
        task.tell("what would help")
        yield found, advice.improvements(ensemble, trials=min(found.trials, advice.TRIALS), seed=found.seed)


def _choices(task: Task) -> Iterator[Any]:
    from ....services.compare.choices import choices

    yield choices(task.design)


@dataclass(frozen=True, kw_only=True)
class Rummaged:
    """What a rummage found so far in which box, and what is wrong in the box."""

    box: Box
    found: Found
    fault: str


def _rummage(task: Task) -> Iterator[Rummaged]:
    from ....services.box.by_yield import by_yield
    from ....services.box.rummage import rummage
    from ....store import box_read

    fault = ""
    name, order = task.asked
    try:
        box = box_read.find_box(name or box_read.READY_BOX)
    except box_read.BoxFault as error:
        if error.box.is_empty:
            raise
        box, fault = error.box, str(error)
    for found in rummage(task.design, box, ROWS):
        task.tell(f"{found.done} of {found.total} pairs")
        yield Rummaged(box=box, found=found, fault=fault)
    if order and found.rows:
        for ordered in by_yield(task.design, found, order):
            task.tell(f"{ordered.done} of {ordered.total} yields")
            yield Rummaged(box=box, found=ordered, fault=fault)


@dataclass(frozen=True, kw_only=True)
class Fed:
    """Settings and map of the tuner by band, and the table of ways."""

    answers: dict[str, Any]
    maps: dict[str, Any]
    table: Any


def _tuner(task: Task) -> Iterator[Fed]:
    from ....services.compare.reach import reach_map, tuner_answer
    from ....services.compare.worth import worth

    figures = task.figures
    assert figures is not None
    yield Fed(
        answers={role: tuner_answer(figures, role) for role in figures.bands},
        maps={role: reach_map(figures, role) for role in figures.bands},
        table=worth(figures),
    )


def _for_yield(task: Task) -> Iterator[Any]:
    """Yield the design chosen for the stage that was asked for, nothing without one."""
    from ....services.trials.advice import for_yield
    from ....services.trials.tolerance import SEED

    if task.asked:
        task.tell("trying other traps and aims")
        yield for_yield(task.figures, stage=task.asked, seed=SEED)
    else:
        yield None


TOLERANCE = Job(name="tolerance", work=_quick)
FULL_TOLERANCE = Job(name="full tolerance", work=_full)
SHEET_TOLERANCE = Job(name="sheet", work=_for_sheet)
FOR_YIELD = Job(name="for yield", work=_for_yield, asked=lambda aside: aside.stage, slow=True)
CHOICES = Job(name="choices", work=_choices, needs_figures=False)
RUMMAGE = Job(
    name="rummage", work=_rummage, asked=lambda aside: (aside.box, aside.order), needs_figures=False
)
TUNER = Job(name="tuner", work=_tuner)
