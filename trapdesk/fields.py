"""How a field of a part is declared: once, with all that is known of it."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import MISSING, dataclass, field, fields, is_dataclass
from enum import Enum
from typing import Any


class Solve(Enum):
    """Stands where a value is to be found by the desk."""

    SOLVE = "solve"


SOLVE = Solve.SOLVE
Value = float | Solve


@dataclass(frozen=True, kw_only=True)
class Declared:
    """What is known of a field: how it reads, what it measures, what it may be.

    `dimension` names a unit family, or is `text`, `choice` or `part`. Limits are SI and include their ends,
    except `above`, which excludes its end. `choices` are the words a choice may be, or a registry of kinds.
    """

    label: str
    help: str
    dimension: str
    low: float | None = None
    above: float | None = None
    high: float | None = None
    solvable: bool = False
    optional: bool = False
    choices: dict[str, Any] | tuple[str, ...] = ()
    alias: str = ""
    example: str = ""


def _declare(default: Any, **known: Any) -> Any:
    metadata = {"declared": Declared(**known)}
    if default is MISSING:
        return field(metadata=metadata)
    if is_dataclass(default):
        return field(default_factory=lambda: default, metadata=metadata)
    return field(default=default, metadata=metadata)


def quantity(dimension: str, label: str, help: str, *, default: Any = MISSING, **limits: Any) -> Any:
    """Declare a number with a unit."""
    return _declare(default, dimension=dimension, label=label, help=help, **limits)


def choice(choices: Any, label: str, help: str, *, default: Any = MISSING, optional: bool = False) -> Any:
    """Declare one word out of several."""
    words = tuple(str(c) for c in choices)
    return _declare(default, dimension="choice", label=label, help=help, choices=words, optional=optional)


def text(label: str, help: str, *, default: Any = MISSING) -> Any:
    """Declare free text."""
    return _declare(default, dimension="text", label=label, help=help)


def part(label: str, help: str, *, default: Any = MISSING, kinds: Any = (), optional: bool = False) -> Any:
    """Declare a part with fields of its own, of one kind or of a registry of kinds."""
    return _declare(default, dimension="part", label=label, help=help, choices=kinds, optional=optional)


def declared(part: Any) -> dict[str, Declared]:
    """Return the declarations of a part's fields, by name, in order."""
    return {f.name: f.metadata["declared"] for f in fields(part)}


def walk(part: Any, prefix: str = "") -> Iterator[tuple[str, Declared, Any]]:
    """Yield dotted key, declaration and value of every field below a part, parts before what is in them."""
    for name, known in declared(part).items():
        key, value = prefix + name, getattr(part, name)
        yield key, known, value
        if is_dataclass(value):
            yield from walk(value, key + ".")
