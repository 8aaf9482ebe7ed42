"""What is worked out beside the figures: a piece of work at a time, stopped when the design has changed."""

from __future__ import annotations

import asyncio
import os
import sys
import threading
from collections.abc import Callable, Hashable, Iterable, Iterator, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any, Protocol

from textual.app import App

from ...design.design import Design
from ...errors import TrapdeskError
from .refusals import reason

if TYPE_CHECKING:
    from ...services.antenna.figures import Figures

SWITCHING = 0.0005
"""How long work aside may hold a key up before it is interrupted. [s]"""

RANK = 10
"""The niceness of work aside: of two threads that want a processor, the one that answers keys has it."""


def give_way() -> None:
    """Have this thread of work wait for those that answer keys, where the system ranks single threads."""
    if sys.platform == "linux":
        thread = threading.get_native_id()
        os.setpriority(os.PRIO_PROCESS, thread, max(RANK, os.getpriority(os.PRIO_PROCESS, thread)))


def give_back() -> None:
    """Return memory that is free to the system, where the C library keeps it until it is told (glibc)."""
    import ctypes

    if sys.platform == "linux" and (trim := getattr(ctypes.CDLL(None), "malloc_trim", None)) is not None:
        trim(0)


class Subject(Protocol):
    """What the work is about: the design of a session, and how far its own answer is."""

    @property
    def design(self) -> Design:
        """The present design."""

    @property
    def generation(self) -> int:
        """Which design it is, counted up with each change."""

    @property
    def figures(self) -> Figures | None:
        """The figures at hand."""

    @property
    def no_answer(self) -> str:
        """Why the design has no figures, empty when it has or may have."""

    @property
    def solving(self) -> bool:
        """Whether it has no answer yet."""

    @property
    def stale(self) -> bool:
        """Whether the figures at hand are not its own."""


@dataclass(frozen=True, kw_only=True)
class Task:
    """What a piece of work is given. `tell` shows how far it is; it ends soon once `stopped` says so."""

    design: Design
    figures: Figures | None
    asked: Any
    stopped: Callable[[], bool]
    tell: Callable[[str], None]


@dataclass(frozen=True, kw_only=True)
class Job:
    """A piece of work: yields what it has found, more each time.

    `asked` is what it depends on beside the design. One that `needs_figures` waits for an answer. A `slow`
    one cannot be stopped, and does not keep the others waiting.
    """

    name: str
    work: Callable[[Task], Iterator[Any]]
    asked: Callable[[Aside], Hashable] = lambda aside: None
    needs_figures: bool = True
    slow: bool = False


@dataclass
class Known:
    """What a job has found, for which design, and whether that is all."""

    token: Hashable = None
    value: Any = None
    refusal: str = ""
    whole: bool = False


class Aside:
    """What the jobs of a session have found, and those that run: one, and beside it a slow one.

    `box` is the box to rummage in, empty for the ready one, `place` the row picked in what was found, `order`
    the stage by whose yield its rows go. `stage` is the one to choose a design for, `readings` of parts,
    `hung` of the antenna, `command` and `load` what was typed, `other` the design of another site.
    """

    def __init__(self, subject: Subject) -> None:
        self._subject = subject
        self._known: dict[str, Known] = {}
        self._running: dict[bool, tuple[str, Hashable]] = {}
        self._stopped: set[str] = set()
        self._progress: dict[str, str] = {}
        self._wanted: Sequence[Job] = ()
        self._idle = asyncio.Event()
        self._app: App | None = None
        self._changed: Callable[[], None] = lambda: None
        self._moved_on: Callable[[], None] = lambda: None
        self.box = ""
        self.place = 0
        self.readings: tuple[str, ...] = ()
        self.hung: tuple[str, ...] = ()
        self.other = ""
        self.command = ""
        self.load = ""
        self.stage = ""
        self.order = ""

    def forget(self) -> None:
        """Drop what was found, and what was typed, of another design than the one that was just opened."""
        self._known.clear()
        self.readings = self.hung = ()
        self.place, self.other, self.stage = 0, "", ""

    def found(self, name: str) -> Any:
        """Return what a job found last, None for nothing yet."""
        known = self._known.get(name)
        return known.value if known is not None else None

    def refusal(self, name: str) -> str:
        """Return why a job found nothing, in words."""
        known = self._known.get(name)
        return known.refusal if known is not None else ""

    def fresh(self, job: Job) -> bool:
        """Return whether what a job found last belongs to the present design."""
        known = self._known.get(job.name)
        stale = job.needs_figures and self._subject.stale
        return known is not None and known.token == self._token(job) and not stale

    def running(self, name: str) -> bool:
        """Return whether a job is at work."""
        return any(running == name for running, _ in self._running.values())

    def pending(self, jobs: Sequence[Job]) -> bool:
        """Return whether any of these jobs is at work, or wanted and not there."""
        return any(self.running(job.name) for job in jobs) or any(job in jobs for job in self._due())

    def progress(self, name: str) -> str:
        """Return how far a job is, empty when it is not at work."""
        return self._progress.get(name, "") if self.running(name) else ""

    def _token(self, job: Job) -> Hashable:
        return (self._subject.generation, job.asked(self))

    def want(
        self, app: App, jobs: Iterable[Job], changed: Callable[[], None], moved_on: Callable[[], None]
    ) -> None:
        """Have these jobs done for the present design, the first first.

        `changed` is called at each find, `moved_on` when one tells how far it is.
        """
        self._app, self._wanted = app, tuple(jobs)
        self._changed, self._moved_on = changed, moved_on
        self._next()

    def stop(self, name: str) -> None:
        """End a job; what it found stays."""
        self._stopped.add(name)

    async def settled(self) -> None:
        """Wait until everything wanted is there."""
        await self._idle.wait()

    def _due(self) -> Iterator[Job]:
        """Yield what is wanted and not there."""
        for job in self._wanted:
            known = self._known.get(job.name)
            done = known is not None and known.whole and known.token == self._token(job)
            if not done and not (job.needs_figures and self._subject.no_answer):
                yield job

    def _next(self) -> None:
        """Begin what is due and can begin."""
        if self._subject.solving:
            self._idle.clear()
            return
        due = list(self._due())
        if not due and not self._running:
            self._idle.set()
            return
        self._idle.clear()
        for job in due:
            if job.slow not in self._running:
                self._begin(job)

    def _begin(self, job: Job) -> None:
        app, subject, token = self._app, self._subject, self._token(job)
        assert app is not None
        self._running[job.slow] = (job.name, token)
        self._stopped.discard(job.name)
        self._progress.pop(job.name, None)

        def stopped() -> bool:
            return job.name in self._stopped or self._token(job) != token or not app.is_running

        task = Task(
            design=subject.design,
            figures=None if subject.no_answer else subject.figures,
            asked=job.asked(self),
            stopped=stopped,
            tell=lambda text: self._post(self._told, job.name, text),
        )
        # Quitting does not wait for a daemon, and a slow job cannot be stopped.
        threading.Thread(target=self._work, args=(job, token, task), daemon=True).start()

    def _post(self, call: Callable[..., None], *values: Any) -> None:
        if self._app is not None and self._app.is_running:
            self._app.call_later(call, *values)

    def _work(self, job: Job, token: Hashable, task: Task) -> None:
        """Run a job in a thread and hand over what it finds."""
        give_way()
        sys.setswitchinterval(SWITCHING)
        refusal = ""
        try:
            for value in job.work(task):
                self._post(self._take, job.name, token, value)
                if task.stopped():
                    break
        except TrapdeskError as error:
            refusal = reason(error)
        except Exception as error:
            self._post(self._failed, error)
            return
        give_back()
        self._post(self._ended, job, token, refusal)

    def _failed(self, error: Exception) -> None:
        """Let what nobody foresaw be seen where it ends the desk."""
        raise error

    def _told(self, name: str, text: str) -> None:
        if self._progress.get(name) != text:
            self._progress[name] = text
            self._moved_on()

    def _take(self, name: str, token: Hashable, value: Any) -> None:
        """Take in what was found; what is for an older design is dropped."""
        if token[0] == self._subject.generation:
            self._known[name] = Known(token=token, value=value)
            self._changed()

    def _ended(self, job: Job, token: Hashable, refusal: str) -> None:
        self._running.pop(job.slow, None)
        if token[0] == self._subject.generation:
            known = self._known.setdefault(job.name, Known())
            if refusal:
                known = self._known[job.name] = Known(refusal=refusal)
            known.token, known.whole = token, True
        self._changed()
        self._next()
