"""Solving aside: one design at a time, stale answers dropped, what the site does after the first answer."""

from __future__ import annotations

import asyncio
from collections.abc import Callable
from typing import TYPE_CHECKING

from textual.app import App
from textual.message import Message

from ...design.design import Design
from ...errors import TrapdeskError
from .aside import give_way
from .refusals import reason
from .session import Session

if TYPE_CHECKING:
    from ...services.antenna.figures import Figures

Solver = Callable[[Design, "Figures | None"], "Figures"]


class Solved(Message):
    """An answer from aside, the generation it belongs to, and whether it is all there is to know."""

    def __init__(self, generation: int, outcome: Figures | str, complete: bool) -> None:
        super().__init__()
        self.generation = generation
        self.outcome = outcome
        self.complete = complete


class Solving:
    """Threads that solve for an app, which is sent `Solved` and hands it back to `take`.

    A thread cannot be stopped, so only one solves at a time; a newer design waits for it to end.
    """

    def __init__(self, app: App, session: Session, solver: Solver | None = None) -> None:
        self._app = app
        self._session = session
        self._solver = solver
        self._busy = False
        self._settled = asyncio.Event()

    def begin(self) -> None:
        """Begin to solve the present design, at once or when the one before has ended."""
        self._settled.clear()
        if self._busy:
            return
        self._busy = True
        session = self._session
        generation, design, figures = session.generation, session.design, session.figures
        self._app.run_worker(lambda: self._solve(generation, design, figures), thread=True)

    def _solve(self, generation: int, design: Design, previous: Figures | None) -> None:
        # What computes and draws is imported here, aside: the inputs are on the screen before it.
        from ...services.antenna.solve import solve
        from . import plots

        give_way()
        plots.ready()
        try:
            outcome: Figures | str = (self._solver or solve)(design, previous)
        except TrapdeskError as error:
            outcome = reason(error)
        self._app.post_message(Solved(generation, outcome, complete=isinstance(outcome, str)))

    def _complete(self, generation: int, figures: Figures) -> None:
        from ...services.antenna.solve import with_site_effects

        self._app.post_message(Solved(generation, with_site_effects(figures), complete=True))

    def take(self, message: Solved) -> bool:
        """Take an answer in and return whether it was still wanted; if not, solve what has come since."""
        generation, outcome = message.generation, message.outcome
        if isinstance(outcome, str) or not message.complete:
            self._busy = False
        if not self._session.answer(generation, outcome):
            self.begin()
            return False
        if isinstance(outcome, str) or message.complete:
            self._settled.set()
        else:
            self._app.run_worker(lambda: self._complete(generation, outcome), thread=True)
        return True

    async def settled(self) -> None:
        """Wait until the present design has its whole answer, or the reason why there is none."""
        await self._settled.wait()
