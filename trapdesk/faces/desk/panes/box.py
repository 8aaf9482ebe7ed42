"""Traps that a box can build, as they are found; the one picked can be taken into the design."""

from __future__ import annotations

from dataclasses import replace

from ....errors import BadInput, visible
from ..lines import Line, wrapped
from ..session import Session
from ..view import Acting, Sight
from .asking import STAGES
from .jobs import RUMMAGE
from .texts import text_lines, waiting_lines

KEYS = (
    ("Enter", "take the trap"), ("arrows", "pick"), ("y", "by yield"), ("b", "other box"),
    ("Esc", "stop, back"), ("x", "write to a file"), ("Tab", "inputs"),
)  # fmt: skip
_MARK = 2


def box_told(session: Session) -> list[str]:
    """Return what was found so far."""
    from ... import rummage_out

    found = session.aside.found(RUMMAGE.name)
    if found is None:
        return []
    rummaged = found.found
    if session.aside.running(RUMMAGE.name):
        # While it goes on, nothing was stopped early.
        rummaged = replace(rummaged, finished=True)
    lines = rummage_out.lines(session.design, found.box, rummaged)
    return [*lines, *(["", *found.fault.splitlines()] if found.fault else [])]


def box_lines(sight: Sight) -> list[Line]:
    """Return the ranked traps, the picked one marked; above them how far the search is."""
    session = sight.session
    texts = box_told(session)
    if not texts:
        return waiting_lines(session, RUMMAGE, sight.width)
    aside = session.aside
    aside.place = max(0, min(aside.place, len(aside.found(RUMMAGE.name).found.rows) - 1))
    lines: list[Line] = []
    if aside.running(RUMMAGE.name):
        words = f"still looking, {aside.progress(RUMMAGE.name)} done; Esc stops and keeps these"
        lines = [[(piece, "watch")] for piece in wrapped(words, sight.width)]
    for line in text_lines(texts, sight.width, sight.left):
        text, style = line[0] if line else ("", "text")
        if _row_of(text) == aside.place + 1:
            text, style = f"{text[:_MARK]}>{text[_MARK + 1 :]}", "cursor"
        lines.append([(text, style)])
    return lines


def _row_of(text: str) -> int:
    """Return which row begins with a line, 0 for none."""
    head = text[:_MARK].strip()
    return int(head) if head.isdecimal() and text[_MARK : _MARK + 2] in ("  ", "> ") else 0


def box_picked(session: Session, lines: list[Line]) -> int:
    """Return the line of the picked trap, -1 when there is none."""
    place = session.aside.place + 1
    return next((n for n, line in enumerate(lines) if line and _row_of(line[0][0]) == place), -1)


def box_press(key: str, acting: Acting) -> bool:
    """Pick, take, stop, or ask for another box."""
    session = acting.session
    aside = session.aside
    found = aside.found(RUMMAGE.name)
    rows = found.found.rows if found is not None else ()
    steps = {"up": -1, "down": 1}
    if key in steps:
        aside.place = max(0, min(aside.place + steps[key], len(rows) - 1))
        acting.show_again()
    elif key == "enter":
        _take(acting)
    elif key == "escape" and aside.running(RUMMAGE.name):
        aside.stop(RUMMAGE.name)
        acting.say("stopped; what was found stays")
    elif key == "b":
        acting.ask("rummage in which box", lambda given: _open(given, acting), aside.box or "relief-box")
    elif key == "y":
        words = f"order by yield at ({', '.join(STAGES)}; nothing: by cost)"
        acting.ask(words, lambda given: _order(given, acting), aside.order or STAGES[-1])
    else:
        return False
    return True


def _order(given: str, acting: Acting) -> None:
    """Have the rows ordered by their yield at a stage, or by cost again."""
    if given and given not in STAGES:
        acting.say(f"{visible(given, 30)} is no stage: {', '.join(STAGES)}", refused=True)
        return
    acting.session.aside.order = given
    acting.session.aside.place = 0
    acting.say("")
    acting.show_again()


def _open(given: str, acting: Acting) -> None:
    if given:
        acting.session.aside.box = given
        acting.session.aside.place = 0
        acting.say(f"rummaging in {visible(given, 60)}")
    acting.show_again()


def _take(acting: Acting) -> None:
    """Put the picked trap into the design, an edit as any other."""
    from ....services.box.rummage import take
    from ... import rummage_out

    session = acting.session
    found = session.aside.found(RUMMAGE.name)
    if found is None or not found.found.rows:
        acting.say("there is no trap to take yet", refused=True)
        return
    if not session.aside.fresh(RUMMAGE):
        acting.say("these were found for another design; wait for the new ones", refused=True)
        return
    row = found.found.rows[session.aside.place]
    try:
        changed = session.take(take(session.design, row))
    except BadInput as refusal:
        acting.say(str(refusal.faults[0]), refused=True)
        return
    acting.say(
        f"taken: {rummage_out.coil_text(row)}; u undoes it" if changed else "it is in the design already"
    )
    if changed:
        acting.changed()
