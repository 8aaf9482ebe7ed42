"""Sums beside the design: a resonator, a match, a line, typed in one line as on the command line."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from typing import TYPE_CHECKING

from ....errors import BadInput, Fault, visible
from ..aside import Job, Task
from ..lines import Line, wrapped
from ..session import Session
from ..view import Acting, Sight
from .texts import text_lines, waiting_lines

if TYPE_CHECKING:
    from ....services.antenna.figures import Figures

KEYS = (
    ("Enter", "type one"), ("arrows", "scroll"), ("x", "write to a file"), ("Tab", "inputs"), ("v", "view"),
    ("q", "quit"),
)  # fmt: skip
EXAMPLES = (
    "tank f=10.05MHz C=47pF Q=180",
    "match Z=35-j120 f=7.1MHz",
    "line RG-58/U length=20m f=7.1MHz Z=35-j120",
    "at 7.05MHz,14.2MHz",
)
ABOUT = (
    "tank: a parallel resonator from any few of f L C R RD Q B.",
    "match: a load of your own matched, network by network.",
    "line: what a line does to a load.",
    "at: this antenna at single frequencies.",
)


def _tank(words: Sequence[str]) -> list[str]:
    from ... import tank_out

    return tank_out.lines(*tank_out.answer_to(words))


def _match(words: Sequence[str]) -> list[str]:
    from ... import match_out

    return list(match_out.lines(match_out.answer_to(words)))


def _line(words: Sequence[str]) -> list[str]:
    from ... import line_out

    return list(line_out.lines(line_out.answer_to(words)))


def _at(figures: Figures | None, words: Sequence[str]) -> list[str]:
    """Return the design at single frequencies, as `figures --at` has it."""
    from ....services.antenna.solve import at_frequencies
    from ...frequencies import frequencies_of
    from ...layout import at_lines

    if figures is None:
        raise BadInput(Fault("at", "there_is_no_answer_for_this_design", help="mend the design first"))
    return at_lines(figures, at_frequencies(figures, frequencies_of(words)))[1:]


SUMS: dict[str, Callable[[Sequence[str]], list[str]]] = {"tank": _tank, "match": _match, "line": _line}
VERBS = (*SUMS, "at")


def _quick(task: Task) -> Iterator[list[str]]:
    verb, *words = task.asked.split() or [""]
    if verb and verb not in VERBS:
        raise BadInput(
            Fault(verb, "unknown_choice", limit=", ".join(VERBS), help=f"for example {EXAMPLES[0]}")
        )
    if verb and not words:
        example = next(text for text in EXAMPLES if text.startswith(verb))
        raise BadInput(Fault(verb, "nothing_is_given", help=f"for example {example}"))
    yield [] if not verb else _at(task.figures, words) if verb == "at" else SUMS[verb](words)


SUM = Job(name="sum", work=_quick, asked=lambda aside: aside.command, needs_figures=False)


def quick_told(session: Session) -> list[str]:
    """Return the answer to what was typed last, what can be typed before."""
    aside = session.aside
    if not aside.command:
        pairs = zip(ABOUT, EXAMPLES, strict=True)
        return ["Type one of these, with your own values:", *(t for a, e in pairs for t in ("", a, f"  {e}"))]
    found = aside.found(SUM.name)
    return found if found and aside.fresh(SUM) else []


def quick_lines(sight: Sight) -> list[Line]:
    """Return what was typed, and its answer or why there is none."""
    session = sight.session
    lines: list[Line] = []
    if command := session.aside.command:
        lines = [[(piece, "found")] for piece in wrapped(visible(command, 200), sight.width, 2)] + [[]]
    texts = quick_told(session)
    return lines + (
        text_lines(texts, sight.width, sight.left) if texts else waiting_lines(session, SUM, sight.width)
    )


def quick_press(key: str, acting: Acting) -> bool:
    """Ask for something to work out."""
    if key != "enter":
        return False
    acting.ask("work out", lambda given: _given(given, acting), acting.session.aside.command or EXAMPLES[0])
    return True


def _given(given: str, acting: Acting) -> None:
    if given:
        acting.session.aside.command = given
    acting.show_again()
