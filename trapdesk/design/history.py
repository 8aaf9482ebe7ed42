"""What was read of the hung antenna and what was done to it since, kept with the design."""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum
from typing import Any

from .fields import choice, parts, quantity, text


class TrapsWere(StrEnum):
    """How the traps were brought into the wire."""

    TUNED = "tuned"
    AS_BUILT = "as built"


class Again(StrEnum):
    """Whether the traps were tuned again."""

    NO = "no"
    YES = "yes"


def _moved(wire: str) -> float:
    return quantity(
        "length",
        f"{wire} wire moved by",
        f"How much longer the {wire} wire of each side was made after these readings; folding is below 0.",
        default=0.0,
        low=-20.0,
        high=20.0,
        example="-6 cm",
    )


@dataclass(frozen=True, kw_only=True)
class Step:
    """One lowering: what was read before it, and what was done to the wires of both sides."""

    readings: str = text(
        "readings", "What was read, as it is typed, with a blank between readings.", default="", longest=4000
    )
    inner: float = _moved("inner")
    end: float = _moved("end")
    traps: Again = choice(
        Again,
        "traps tuned again",
        "yes where both traps were brought to their frequency anew.",
        default=Again.NO,
    )


STAYS: dict[str, type] = {}
"""What a site it left is kept as; it is declared where sites are."""


@dataclass(frozen=True, kw_only=True)
class History:
    """Readings and moves in the order they were made."""

    traps: TrapsWere = choice(
        TrapsWere,
        "traps were",
        "tuned: brought to their frequency on the bench; as built: closed as they came out.",
        default=TrapsWere.TUNED,
    )
    stays: tuple[Any, ...] = parts(
        "sites before", "Where it hung before, with what was read and moved there.", kinds=STAYS
    )
    steps: tuple[Step, ...] = parts(
        "lowerings", "Readings and moves, one for each time it came down.", kinds={"": Step}
    )

    @property
    def all_steps(self) -> tuple[Step, ...]:
        """All readings and moves at all sites, in order."""
        return (*(step for stay in self.stays for step in stay.steps), *self.steps)
