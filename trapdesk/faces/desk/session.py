"""The one owner of what the desk knows: the designs so far, the figures of the last, and where it is kept."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path
from typing import Any

from ...design import Design
from ...errors import BadInput
from ...rules import check
from ...services.figures import Figures
from ...spoken import spoken
from ...store import Document
from .aside import Aside
from .form import FormRow, put


class Session:
    """Designs for undo and redo, and the last good figures with the generation they belong to.

    Every change of the design begins a new generation; an answer of an older one is dropped.
    """

    def __init__(self, document: Document) -> None:
        self.path = document.path
        self.text = document.text
        self.name = document.name
        self.figures: Figures | None = None
        self.no_answer = ""
        self.generation = 0
        self.answered = -1
        self._designs = [document.design]
        self._place = 0
        self._saved = document.design
        self.aside = Aside(self)

    @property
    def design(self) -> Design:
        """The present design."""
        return self._designs[self._place]

    @property
    def solving(self) -> bool:
        """Whether the present design has no answer yet."""
        return self.answered != self.generation

    @property
    def stale(self) -> bool:
        """Whether the figures at hand are not those of the present design."""
        return self.solving or bool(self.no_answer)

    @property
    def unsaved(self) -> bool:
        """Whether the present design differs from the one that was opened or saved last."""
        return self.design != self._saved

    def past(self) -> Iterator[Design]:
        """Return the designs that were, the latest first."""
        return reversed(self._designs[: self._place + 1])

    def set(self, row: FormRow, value: Any) -> bool:
        """Set a row's value and return whether that changed the design; BadInput when a rule forbids it."""
        return self.take(put(self.design, row.key, value, self.figures, self.past()))

    def take(self, changed: Design) -> bool:
        """Put another design in place of the present one, as an edit does."""
        if changed == self.design:
            return False
        breaches = check(changed)
        if breaches:
            raise BadInput([spoken(breach) for breach in breaches])
        del self._designs[self._place + 1 :]
        self._designs.append(changed)
        self._move(self._place + 1)
        return True

    def undo(self) -> bool:
        """Go back to the design before, and return whether there was one."""
        return self._move(self._place - 1)

    def redo(self) -> bool:
        """Take back an undo, and return whether there was one."""
        return self._move(self._place + 1)

    def _move(self, place: int) -> bool:
        if not 0 <= place < len(self._designs):
            return False
        self._place = place
        self.generation += 1
        return True

    def answer(self, generation: int, outcome: Figures | str) -> bool:
        """Take in figures, or the reason why there are none; return whether they are still wanted."""
        if generation != self.generation:
            return False
        self.answered = generation
        self.no_answer = outcome if isinstance(outcome, str) else ""
        if isinstance(outcome, Figures):
            self.figures = outcome
        return True

    def saved_as(self, path: Path, text: str) -> None:
        """Note that the present design is in a file, and how it reads there."""
        self.path, self.text = path, text
        self._saved = self.design
