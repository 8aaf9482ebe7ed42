"""What a view tells, on its way to a file: written at once, or as soon as it is worked out."""

from __future__ import annotations

from dataclasses import dataclass

from ...errors import TrapdeskError, visible
from .aside import Job
from .session import Session
from .view import Acting, View


@dataclass(frozen=True, kw_only=True)
class Waiting:
    """A view to be written under a name once its text is there, for one design."""

    view: View
    name: str
    generation: int


class Writing:
    """Asks for the name of a file and writes there what a view tells."""

    def __init__(self, session: Session, acting: Acting) -> None:
        self._session, self._acting = session, acting
        self._waiting: Waiting | None = None

    @property
    def jobs(self) -> tuple[Job, ...]:
        """What is to be worked out for what waits to be written, also when its view is no longer shown."""
        return () if self._waiting is None else self._waiting.view.jobs

    def ask(self, view: View) -> None:
        """Ask for a name, unless there is nothing to write and nothing on its way."""
        if not self._pending(view) and not self._texts(view):
            self._refuse(view)
            return

        def named(given: str) -> None:
            if not given:
                self._acting.say("nothing was written")
            elif self._pending(view):
                self._waiting = Waiting(view=view, name=given, generation=self._session.generation)
                self._acting.say(f"{visible(given, 40)} will be written once it is worked out")
                # It may have been left for another view while the name was typed.
                self._acting.show_again()
            else:
                self._write(view, given)

        self._acting.ask(f"write {view.name} to", named, view.name.partition(" ")[0] + view.ending)

    def look(self) -> None:
        """Write what waits, if it is there by now."""
        waiting = self._waiting
        if waiting is None:
            return
        if waiting.generation != self._session.generation:
            self._waiting = None
            self._acting.say(
                f"the design has changed: {visible(waiting.name, 40)} was not written", refused=True
            )
        elif not self._pending(waiting.view):
            self._waiting = None
            self._write(waiting.view, waiting.name)

    def _pending(self, view: View) -> bool:
        return self._session.solving or self._session.aside.pending(view.jobs)

    def _texts(self, view: View) -> list[str]:
        """Return what a view tells of the present design."""
        assert view.told is not None
        needs_figures = not view.jobs or any(job.needs_figures for job in view.jobs)
        return [] if self._session.no_answer and needs_figures else view.told(self._session)

    def _refuse(self, view: View) -> None:
        reasons = (self._session.aside.refusal(job.name) for job in view.jobs)
        why = next(filter(None, reasons), "") or self._session.no_answer
        self._acting.say(f"nothing to write: {why}" if why else "there is nothing to write yet", refused=True)

    def _write(self, view: View, name: str) -> None:
        from ...store import sweep_files

        texts = self._texts(view)
        if not texts:
            self._refuse(view)
            return
        # What is not plain ASCII is written as the command line writes it.
        data = "".join(f"{text.rstrip()}\n" for text in texts).encode("ascii", "backslashreplace")
        try:
            sweep_files.write_new(name, data.decode("ascii"))
        except TrapdeskError as error:
            self._acting.say("; ".join(str(error).splitlines()), refused=True)
            return
        self._acting.say(f"written to {visible(name, 60)}")
