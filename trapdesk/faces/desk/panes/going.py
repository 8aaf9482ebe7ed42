"""The next move: readings of the hung antenna typed one by one, what to do by them, and keeping both."""

from __future__ import annotations

import itertools
from collections.abc import Callable, Iterator
from typing import Any

from ....design.design import Design
from ....errors import TrapdeskError, visible
from ..aside import Job, Task
from ..lines import Line, wrapped
from ..session import Session
from ..view import Acting, Sight
from .texts import text_lines, waiting_lines

KEYS = (
    ("Enter", "type a reading"), ("a", "accept"), ("Tab", "inputs"), ("d", "done otherwise"),
    ("Backspace", "drop the last"), ("p", "other place"), ("x", "write to a file"), ("arrows", "scroll"),
)  # fmt: skip


def _next(task: Task) -> Iterator[Any]:
    """Yield the readings typed and what to do next by all that was read."""
    from ... import next_run

    texts, place = task.asked
    given = next_run.antenna_readings(list(texts))
    task.tell("weighing what was read")
    yield given, next_run.found_next(task.design, given, place or None)


NEXT = Job(
    name="next", work=_next, asked=lambda aside: (aside.hung, aside.other), needs_figures=False, slow=True
)


def next_told(session: Session) -> list[str]:
    """Return what to do next."""
    from ... import moves_out

    aside = session.aside
    found = aside.found(NEXT.name)
    return [] if found is None or not aside.fresh(NEXT) else moves_out.lines(found[1], found[0])


def next_line(session: Session) -> str:
    """Return what to do by what was read and done, in a line; empty while nothing was."""
    found = session.aside.found(NEXT.name)
    history = session.design.history
    if history is not None and history.steps and not session.aside.hung:
        return "hoist it as it was moved, read both bands again, and type that in N"
    if found is None or not found[0] or not session.aside.fresh(NEXT):
        return ""
    texts = iter(next_told(session))
    first = next((text for text in texts if text.startswith(_VERDICTS)), "")
    rest = itertools.takewhile(lambda text: text.startswith(_HANGING), texts)
    return " ".join(" ".join([first, *rest]).split())


def _verdict_first(texts: list[str]) -> list[str]:
    """Return the lines with what to do moved up, right below the title: it is what is looked for."""
    at = next((place for place, text in enumerate(texts) if text.startswith(_VERDICTS)), 0)
    if not at:
        return texts
    end = next((place for place in range(at, len(texts)) if not texts[place].strip()), len(texts))
    return [*texts[:1], "", *texts[at:end], *texts[1:at], *texts[end + 1 :]]


_VERDICTS = ("MOVE ", "STOP ", "TRAPS ", "LEAVE IT ", "HANG IT ", "SOMETHING IS WRONG ", "CANNOT TELL ")
_HANGING = " " * 6


def next_lines(sight: Sight) -> list[Line]:
    """Return the readings typed, and what to do by them or why that cannot be said."""
    session = sight.session
    lines: list[Line] = []
    for text in session.aside.hung:
        lines += [[(piece, "found")] for piece in wrapped(visible(text, 200), sight.width, 2)]
    lines += [[]] if lines else []
    texts = next_told(session)
    texts = _verdict_first(texts)
    return lines + (
        text_lines(texts, sight.width, sight.left) if texts else waiting_lines(session, NEXT, sight.width)
    )


def next_press(key: str, acting: Acting) -> bool:
    """Ask for a reading, drop one, keep readings and move, or say what was moved or where it hangs."""
    aside = acting.session.aside
    if key == "enter":
        acting.ask("reading", lambda given: _add(given, acting), "upper.dip=")
    elif key == "backspace" and aside.hung:
        acting.say(f"dropped {visible(aside.hung[-1], 60)}")
        aside.hung = aside.hung[:-1]
        acting.show_again()
    elif key == "backspace":
        _edit(acting, _without_last, "the last readings and their move are taken out; u puts them back")
    elif key == "a":
        what = ["the new site"] * bool(aside.other) + ["these readings"] * bool(aside.hung)
        words = f"kept: {', '.join(what)}, and this move as made; d says otherwise, u undoes it"
        _edit(acting, _kept, words)
    elif key == "d":
        acting.ask("what was really moved", lambda given: _moved(given, acting), "inner=")
    elif key == "p":
        acting.ask("at the site of which design", lambda given: _place(given, acting), aside.other)
    else:
        return False
    return True


def _add(given: str, acting: Acting) -> None:
    """Take in readings that can be read."""
    from ... import next_run

    if not given:
        acting.say("")
        return
    texts = given.split()
    try:
        next_run.antenna_readings(texts)
    except TrapdeskError as error:
        acting.say("; ".join(str(error).splitlines()), refused=True)
        acting.ask("reading", lambda again: _add(again, acting), given)
        return
    acting.session.aside.hung += tuple(texts)
    acting.say("")
    acting.show_again()


def _place(given: str, acting: Acting) -> None:
    acting.session.aside.other = given
    acting.say("")
    acting.show_again()


def _moved(given: str, acting: Acting) -> None:
    from ... import next_run

    if given:
        texts = given.split()
        _edit(acting, lambda session: next_run.with_moves(session.design, texts), "kept as it was moved")
    else:
        acting.say("")


def _without_last(session: Session) -> Design:
    from ... import next_run

    return next_run.without_last(session.design)


def _kept(session: Session) -> Design:
    from ....errors import BadInput, Fault
    from ... import next_run

    aside = session.aside
    found = aside.found(NEXT.name)
    if found is None or not (found[0] or aside.other) or not aside.fresh(NEXT):
        raise BadInput(Fault("", "there_are_no_readings_to_keep_yet", help="Enter takes one"))
    return next_run.with_step(session.design, list(aside.hung), found[1], at=found[1].figures.design.site)


def _edit(acting: Acting, change: Callable[[Session], Design], words: str) -> None:
    """Put a changed design in place, an edit as any other."""
    from ..refusals import reason

    session = acting.session
    try:
        changed = session.take(change(session))
    except TrapdeskError as error:
        acting.say(reason(error), refused=True)
        return
    session.aside.hung, session.aside.other = (), ""
    acting.say(words)
    if changed:
        acting.changed()
