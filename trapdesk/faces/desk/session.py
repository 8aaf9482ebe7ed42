"""The one owner of what the desk knows: the designs so far, the figures of the last, and where it is kept."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from pathlib import Path
from typing import TYPE_CHECKING, Any

from ...design.design import Design
from ...design.rules import check
from ...errors import BadInput
from ...store.spoken import spoken
from ...store.store import Document
from .aside import Aside
from .form import FormRow, put

if TYPE_CHECKING:
    from ...services.antenna.figures import Figures


class Session:
    """Designs for undo and redo, and the last good figures with the generation they belong to.

    Every change of the design begins a new generation; an answer of an older one is dropped. `note` is called
    after each change of the design or of where it is kept, with whether another design was opened. `ghost`
    are figures to compare with; `cursor` is a place along the axes of the plots, from 0 to 1; `zoom` is the
    role of the one band to plot, empty for all.
    `settling` is true for a moment after a change.
    """

    def __init__(self, document: Document) -> None:
        self.note: Callable[[bool], None] = lambda opened: None
        self.figures: Figures | None = None
        self.ghost: Figures | None = None
        self.cursor: float | None = None
        self.zoom = ""
        self.no_answer = ""
        self.unsafe = False
        self.settling = False
        self.generation = 0
        self.answered = -1
        self.aside = Aside(self)
        self._hold(document, (document.design,), 0)

    def _hold(self, document: Document, designs: tuple[Design, ...], place: int) -> None:
        self.path: Path | None = document.path
        self.text = document.text
        self.name = document.name
        self._designs = list(designs)
        self._place = place
        self._saved = document.design

    def open(self, document: Document, designs: tuple[Design, ...] = (), place: int = 0) -> None:
        """Begin with another document, or with the designs that were made from it."""
        self._hold(document, designs or (document.design,), place)
        self.generation += 1
        self.no_answer = ""
        self.aside.forget()
        self.note(True)

    @property
    def design(self) -> Design:
        """The present design."""
        return self._designs[self._place]

    @property
    def designs(self) -> tuple[tuple[Design, ...], int]:
        """The designs for undo and redo, and the place of the present one."""
        return tuple(self._designs), self._place

    @property
    def solving(self) -> bool:
        """Whether the present design has no answer yet."""
        return self.answered != self.generation

    @property
    def stale(self) -> bool:
        """Whether the figures at hand are not those of the present design."""
        return self.solving or bool(self.no_answer)

    @property
    def dimmed(self) -> bool:
        """Whether figures at hand are to be dimmed: old ones, when new ones have been waited for a while."""
        return (self.stale and not self.settling) or bool(self.no_answer)

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
        """Take a design as an edit and return whether it is another; BadInput when a rule forbids it."""
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
        self.note(False)
        return True

    def answer(self, generation: int, outcome: Figures | str) -> bool:
        """Take in figures, or the reason why there are none; return whether they are still wanted."""
        if generation != self.generation:
            return False
        self.answered = generation
        if isinstance(outcome, str):
            self.no_answer = outcome
        else:
            self.figures, self.no_answer = outcome, ""
        return True

    def saved_as(self, path: Path, text: str) -> None:
        """Note that the present design is in a file, and how it reads there."""
        self.path, self.text = path, text
        self._saved = self.design
        self.note(False)
