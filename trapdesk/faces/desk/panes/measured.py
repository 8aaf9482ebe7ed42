"""Readings typed one by one, what they come to, and keeping that in the design."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

from ....errors import TrapdeskError, visible
from ..aside import Job, Task
from ..lines import Line, wrapped
from ..session import Session
from ..view import Acting, Sight
from .texts import text_lines, waiting_lines

KEYS = (
    ("Enter", "type a reading"), ("a", "accept into the design"), ("Backspace", "drop the last"),
    ("arrows", "scroll"), ("x", "write to a file"), ("Tab", "inputs"),
)  # fmt: skip
EXAMPLE = "for example trap.f0=13.98MHz"


def _readings(task: Task) -> Iterator[Any]:
    """Yield readings, what they come to, and remarks on their files; nothing without readings."""
    from ... import readings_out

    if not task.asked:
        yield None
        return
    given = readings_out.parts_of(task.asked)
    sweeps, notes = readings_out.sweeps_of(given)
    yield given, readings_out.answer(task.design, given, sweeps), notes


READINGS = Job(name="readings", work=_readings, asked=lambda aside: aside.readings, needs_figures=False)


def measured_told(session: Session) -> list[str]:
    """Return what the readings come to; without any, how each is done."""
    from ... import readings_out

    aside = session.aside
    if not aside.readings:
        return readings_out.kinds_lines()
    found = aside.found(READINGS.name)
    if found is None or not aside.fresh(READINGS):
        return []
    given, parts, notes = found
    return readings_out.lines(parts, given, notes)


def measured_lines(sight: Sight) -> list[Line]:
    """Return the readings typed, and what they come to or why that cannot be said."""
    session = sight.session
    lines: list[Line] = []
    for text in session.aside.readings:
        lines += [[(piece, "found")] for piece in wrapped(visible(text, 200), sight.width, 2)]
    lines += [[]] if lines else []
    texts = measured_told(session)
    return lines + (
        text_lines(texts, sight.width, sight.left) if texts else waiting_lines(session, READINGS, sight.width)
    )


def measured_press(key: str, acting: Acting) -> bool:
    """Ask for a reading, drop the last, or keep what they come to."""
    aside = acting.session.aside
    if key == "enter":
        acting.ask("reading", lambda given: _add(given, acting), "")
        if not aside.readings:
            acting.say(EXAMPLE)
    elif key == "backspace" and aside.readings:
        acting.say(f"dropped {visible(aside.readings[-1], 60)}")
        aside.readings = aside.readings[:-1]
        acting.show_again()
    elif key == "a":
        _keep(acting)
    else:
        return False
    return True


def _add(given: str, acting: Acting) -> None:
    """Take in a reading that can be read; several may be typed with blanks between them."""
    from ....units import reading_text

    if not given:
        acting.say("")
        return
    texts = tuple(given.split())
    try:
        reading_text.parse(texts)
    except TrapdeskError as error:
        acting.say("; ".join(str(error).splitlines()), refused=True)
        acting.ask("reading", lambda again: _add(again, acting), given)
        return
    acting.session.aside.readings += texts
    acting.say("")
    acting.show_again()


def _keep(acting: Acting) -> None:
    from ... import readings_out
    from ..refusals import reason

    session = acting.session
    found = session.aside.found(READINGS.name)
    if found is None or not session.aside.fresh(READINGS):
        acting.say("there is nothing to keep yet", refused=True)
        return
    try:
        changed = session.take(readings_out.keep(session.design, found[1]))
    except TrapdeskError as error:
        acting.say(reason(error), refused=True)
        return
    acting.say("kept: what was measured replaces what is computed; u undoes it" if changed else "as before")
    if changed:
        acting.changed()
