"""How a field of a part is declared: once, with all that is known of it."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import MISSING, dataclass, field, fields, is_dataclass, replace
from enum import Enum
from functools import cache
from types import MappingProxyType
from typing import Any


class Solve(Enum):
    """Stands where a value is to be found by the desk."""

    SOLVE = "solve"


SOLVE = Solve.SOLVE
Value = float | Solve


@dataclass(frozen=True, kw_only=True)
class Declared:
    """What is known of a field: how it reads, what it measures, what it may be.

    `dimension` names a unit family, or is `text`, `print`, `choice`, `part`, or `parts` for a list of them.
    Limits are SI and include their ends, except `above`, which excludes its end. `choices` are the words a
    choice may be, or a registry of kinds; `longest` is how many characters a text may have.
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
    longest: int = 200
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


def text(label: str, help: str, *, default: Any = MISSING, longest: int = 200) -> Any:
    """Declare free text of at most so many characters."""
    return _declare(default, dimension="text", label=label, help=help, longest=longest)


def part(label: str, help: str, *, default: Any = MISSING, kinds: Any = (), optional: bool = False) -> Any:
    """Declare a part with fields of its own, of one kind or of a registry of kinds."""
    return _declare(default, dimension="part", label=label, help=help, choices=kinds, optional=optional)


def parts(label: str, help: str, *, kinds: Any, default: Any = ()) -> Any:
    """Declare a list of parts, each with fields of its own, of a registry of kinds."""
    return _declare(default, dimension="parts", label=label, help=help, choices=kinds)


def printed(label: str, help: str, *, example: str) -> Any:
    """Declare what is printed on a part."""
    return _declare(None, dimension="print", label=label, help=help, example=example)


def declared(part: Any) -> Mapping[str, Declared]:
    """Return the declarations of the fields of a part, or of a kind of part, by name, in order."""
    return _declared(part if isinstance(part, type) else type(part))


@cache
def _declared(kind: type) -> Mapping[str, Declared]:
    return MappingProxyType({f.name: f.metadata["declared"] for f in fields(kind)})


def walk(part: Any, prefix: str = "") -> Iterator[tuple[str, Declared, Any]]:
    """Yield dotted key, declaration and value of every field below a part, parts before what is in them.

    A part of a list has its place in it for a name, counted from 1.
    """
    for name, known in declared(part).items():
        key, value = prefix + name, getattr(part, name)
        yield key, known, value
        if known.dimension == "part" and is_dataclass(value):
            yield from walk(value, key + ".")
        elif known.dimension == "parts":
            for place, member in enumerate(value, start=1):
                yield f"{key}.{place}", member_of(known, place), member
                yield from walk(member, f"{key}.{place}.")


def member_of(known: Declared, place: int) -> Declared:
    """Return what is known of one part of a list."""
    return replace(known, dimension="part", label=f"{known.label}, {place}")
