"""What is worked out beside the figures: one piece of work at a time, stopped when the design has changed."""

from __future__ import annotations

import asyncio
import sys
from collections.abc import Callable, Hashable, Iterable, Iterator, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from textual.app import App

from ...design import Design
from ...errors import TrapdeskError
from ...services.figures import Figures

if TYPE_CHECKING:
    from .session import Session

SWITCHING = 0.0005
"""How long work aside may hold a key up before it is interrupted. [s]"""


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

    `asked` is what it depends on beside the design. One that `needs_figures` waits for an answer.
    """

    name: str
    work: Callable[[Task], Iterator[Any]]
    asked: Callable[[Aside], Hashable] = lambda aside: None
    needs_figures: bool = True


@dataclass
class Known:
    """What a job has found, for which design, and whether that is all."""

    token: Hashable = None
    value: Any = None
    refusal: str = ""
    whole: bool = False


class Aside:
    """What the jobs of a session have found, and the one that runs.

    `box` is the box to rummage in, empty for the ready one, `place` the row picked in what was found,
    `readings` and `command` what was typed.
    """

    def __init__(self, session: Session) -> None:
        self._session = session
        self._known: dict[str, Known] = {}
        self._running: tuple[str, Hashable] | None = None
        self._stopped = False
        self._wanted: Sequence[Job] = ()
        self._idle = asyncio.Event()
        self._app: App | None = None
        self._changed: Callable[[], None] = lambda: None
        self.progress = ""
        self.box = ""
        self.place = 0
        self.readings: tuple[str, ...] = ()
        self.command = ""

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
        stale = job.needs_figures and self._session.stale
        return known is not None and known.token == self._token(job) and not stale

    def running(self, name: str) -> bool:
        """Return whether a job is at work."""
        return self._running is not None and self._running[0] == name

    def _token(self, job: Job) -> Hashable:
        return (self._session.generation, job.asked(self))

    def want(self, app: App, jobs: Iterable[Job], changed: Callable[[], None]) -> None:
        """Have these jobs done for the present design, the first first; `changed` is called at each find."""
        self._app, self._wanted, self._changed = app, tuple(jobs), changed
        self._next()

    def stop(self) -> None:
        """End what runs; what it found stays."""
        self._stopped = True

    async def settled(self) -> None:
        """Wait until everything wanted is there."""
        await self._idle.wait()

    def _due(self) -> Job | None:
        """Return the next job to begin."""
        session = self._session
        for job in self._wanted:
            known = self._known.get(job.name)
            done = known is not None and known.whole and known.token == self._token(job)
            if not done and not (job.needs_figures and session.no_answer):
                return job
        return None

    def _next(self) -> None:
        job = None if self._session.solving else self._due()
        if job is None and self._running is None and not self._session.solving:
            self._idle.set()
            return
        self._idle.clear()
        if job is None or self._running is not None or self._app is None:
            return
        token = self._token(job)
        self._running, self._stopped, self.progress = (job.name, token), False, ""
        app, session = self._app, self._session
        stopped = lambda: self._stopped or self._token(job) != token or not app.is_running  # noqa: E731
        task = Task(
            design=session.design,
            figures=session.figures,
            asked=job.asked(self),
            stopped=stopped,
            tell=lambda text: self._post(self._told, token, text),
        )
        app.run_worker(lambda: self._work(job, token, task), thread=True)

    def _post(self, call: Callable[..., None], *values: Any) -> None:
        if self._app is not None and self._app.is_running:
            self._app.call_later(call, *values)

    def _work(self, job: Job, token: Hashable, task: Task) -> None:
        """Run a job in a thread and hand over what it finds."""
        from .solving import reason

        before = sys.getswitchinterval()
        sys.setswitchinterval(SWITCHING)
        refusal = ""
        try:
            for value in job.work(task):
                self._post(self._take, job.name, token, value)
                if task.stopped():
                    break
        except TrapdeskError as error:
            refusal = reason(error)
        finally:
            sys.setswitchinterval(before)
        self._post(self._ended, job.name, token, refusal)

    def _told(self, token: Hashable, text: str) -> None:
        if self._running is not None and self._running[1] == token:
            self.progress = text
            self._changed()

    def _take(self, name: str, token: Hashable, value: Any) -> None:
        """Take in what was found; what is for an older design is dropped."""
        if token[0] == self._session.generation:
            self._known[name] = Known(token=token, value=value)
            self._changed()

    def _ended(self, name: str, token: Hashable, refusal: str) -> None:
        self._running, self.progress = None, ""
        if token[0] == self._session.generation:
            known = self._known.setdefault(name, Known())
            if refusal:
                known = self._known[name] = Known(value=None, refusal=refusal)
            known.token, known.whole = token, True
        self._changed()
        self._next()
