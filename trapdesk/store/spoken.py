"""What is known of every key a design may have, and the words for a rule that a design breaks."""

from __future__ import annotations

import functools
import typing
from collections.abc import Iterator
from dataclasses import MISSING, Field, fields, is_dataclass
from typing import Any

from ..design.design import Design
from ..design.fields import SOLVE, Declared, declared
from ..design.rules import Breach
from ..errors import Fault
from ..units import units

_PLAIN = ("ratio", "count")
_LIMITS = {"below": "low", "not_above": "above", "over": "high"}
"""Which limit of a declaration a breach is of."""
_WORDS = ("text", "choice", "part", "parts", "print")
"""Kinds of values that are no numbers, and so have no unit."""


@functools.cache
def _hints(kind: type) -> dict[str, Any]:
    return typing.get_type_hints(kind)


def kinds(owner: type, field_name: str) -> dict[str, type]:
    """Return the classes a part may be, by kind; a part of one kind only has an empty name for it."""
    choices = declared(owner)[field_name].choices
    if isinstance(choices, dict):
        return choices
    hint = _hints(owner)[field_name]
    return {"": next(c for c in (hint, *typing.get_args(hint)) if is_dataclass(c))}


@functools.cache
def tables() -> dict[str, tuple[type, ...]]:
    """Return every table a design may have, by dotted key, with the classes it may describe."""
    tables: dict[str, tuple[type, ...]] = {"": (Design,)}
    waiting = [""]
    while waiting:
        key = waiting.pop(0)
        for kind in tables[key]:
            for name, known in declared(kind).items():
                # A list in a list of the same kinds is the same table again.
                inner = bare(f"{key}.{name}")
                if known.dimension in ("part", "parts") and inner not in tables:
                    tables[inner] = tuple(kinds(kind, name).values())
                    waiting.append(inner)
    return tables


def bare(key: str) -> str:
    """Return a dotted key without places in lists, a list within a list of its own name being one."""
    names: list[str] = []
    for name in key.lstrip(".").split("."):
        if not name.isdecimal() and not (names and names[-1] == name):
            names.append(name)
    return ".".join(names)


def _every_field(key: str) -> Iterator[Field[Any]]:
    """Yield the fields a dotted key may mean, one for each kind of part that has it."""
    table, _, name = bare(key).rpartition(".")
    for kind in tables()[table]:
        for field in fields(kind):
            if name in (field.name, field.metadata["declared"].alias):
                yield field


def _field(key: str) -> Field[Any]:
    """Return the field at a dotted key; KeyError for a key no design can have."""
    for field in _every_field(key):
        return field
    raise KeyError(key)


def declaration(key: str) -> Declared:
    """Return what is known of the field at a dotted key; KeyError for a key no design can have."""
    return _field(key).metadata["declared"]


def example(key: str) -> str:
    """Return in words what would be right for a key."""
    field = _field(key)
    known: Declared = field.metadata["declared"]
    if known.dimension in ("part", "parts"):
        inside = tables()[bare(key)][0]
        needed = [name for name in declared(inside) if _needed(inside, name)]
        head = f"[[{bare(key)}]]" if known.dimension == "parts" else f"[{key}]"
        return f"a table {head}" + (f" with {', '.join(needed)}" if needed else "")
    if known.dimension == "choice":
        return f"one of {', '.join(known.choices)}"
    value = known.example or ("40 m" if field.name == "name" else "")
    if not value and isinstance(field.default, float | int | str):
        value = _shown(field.default, known.dimension)
    if not value:
        value = _shown(next(v for v in (known.low, known.high, 1.0) if v is not None), known.dimension)
    quote = "" if known.dimension in _PLAIN and value[-1].isdigit() else '"'
    return f"for example {key.rpartition('.')[2]} = {quote}{value}{quote}"


def _needed(kind: type, name: str) -> bool:
    field = next(field for field in fields(kind) if field.name == name)
    return field.default is MISSING and field.default_factory is MISSING


def _shown(value: Any, dimension: str) -> str:
    """Return a value, or a stretch between two, as a person reads it."""
    if isinstance(value, tuple):
        return " to ".join(_shown(end, dimension) for end in value)
    if not isinstance(value, float | int) or not dimension or dimension in _WORDS:
        return str(value)
    return units.show(value, units.Dimension(dimension), digits=6)


def _both(value: Any, bound: Any, dimension: str) -> tuple[str, str]:
    """Return value and bound as a person reads them, in full where rounding would make them equal."""
    pair = _shown(value, dimension), _shown(bound, dimension)
    if pair[0] == pair[1] and value != bound:
        pair = tuple(units.to_text(number, units.Dimension(dimension)) for number in (value, bound))
    return pair


def _broken(breach: Breach) -> Declared:
    """Return the declaration a breach is of: kinds that share a key have limits of their own."""
    limit = _LIMITS.get(breach.code)
    every = [field.metadata["declared"] for field in _every_field(breach.where)]
    of_it = [known for known in every if limit is not None and getattr(known, limit) == breach.bound]
    return of_it[0] if of_it else declaration(breach.where)


def of_one_value(breach: Breach) -> bool:
    """Return whether a breach is of a value's own declaration, not of several values together."""
    limit = _LIMITS.get(breach.code)
    if limit is not None:
        return breach.bound == getattr(_broken(breach), limit)
    return breach.code in ("missing", "not_a_number", "not_a_choice")


def _range(known: Declared) -> str:
    """Return the limits of a field in words."""
    words = []
    if known.low is not None:
        words.append(f"from {_shown(known.low, known.dimension)}")
    if known.above is not None:
        words.append(f"above {_shown(known.above, known.dimension)}")
    if known.high is not None:
        words.append(f"up to {_shown(known.high, known.dimension)}")
    return " ".join(words)


# What would be right where a value meets another one, by code and key.
_TOGETHER = {
    ("not_above", "antenna.trap.coil.pitch"): "turns must not lie in each other: more than the coil's wire",
    ("not_above", "antenna.trap.coil.length"): "so many turns of this wire are longer than the winding",
    ("not_above", "antenna.trap.coil.former"): "a former thicker than what is wound on it",
    ("not_above", "antenna.trap.coil.insulation"): "turns wound close need insulation: or give a pitch",
    ("not_above", "antenna.trap.coil.outer"): "more than the core's inside",
    ("not_above", "antenna.trap.coil.inner"): "two wires must fit through the core",
    ("not_above", "antenna.trap.coil.outside"): "more than the shield's diameter",
    ("below", "antenna.trap.coil.pitch"): "cables must not lie in each other: at least the cable's diameter",
    ("missing", "antenna.trap.coil.outside"): "the list has none: give the cable's diameter",
    ("missing", "antenna.trap.coil.shield"): "no list has one for it: give the diameter over the braid",
    ("unexpected", "antenna.trap.capacitor"): "take it out: a coil of cable is its own capacitor",
    ("not_above", "antenna.lengths.inner"): "more than half of antenna.trap.body, which reaches into it",
    ("not_above", "antenna.lengths.end"): "more than half of antenna.trap.body, which reaches into it",
    ("over", "site.end_height"): "no higher than the feed point, site.height",
    ("not_above", "site.end_height"): "a side of this length does not reach down that far",
    ("ends_too_low", "site.height"): "hang it higher, hang it flatter, or make the wires shorter",
    ("order", "bands.upper.aim"): "the upper band's aim must lie above the lower band's",
    ("unexpected", "antenna.lengths.end"): "take it out, or add a table [antenna.trap]",
    ("unexpected", "site.end_height"): 'take it out, or set shape = "vee"',
    ("unexpected", "site.included_angle"): 'take it out, or set shape = "vee"',
    **{
        ("over", f"doubts.{name}"): "with this meaning the value itself could come out at nothing or less"
        for name in ("coil", "pitch", "former", "capacitor", "q", "coating")
    },
    ("over", "doubts.sealing_least"): "no more than sealing_most",
    ("over", "doubts.rain_least"): "no more than rain_most",
    ("needs", "antenna.lengths.inner"): "with one band set inner or end, or add a table [bands.upper]",
}
_ENDS = {
    "high": "it must lie above low",
    "wanted_low": "within low to high",
    "wanted_high": "above wanted_low and within low to high",
    "aim": "within low to high",
}


def spoken(breach: Breach) -> Fault:
    """Return a broken rule as a fault: the values as a person reads them, and what would be right."""
    known, where, code = _broken(breach), breach.where, breach.code
    help = _TOGETHER.get((code, where), "")
    if where.startswith("bands.") and code in ("order", "outside") and not help:
        help = _ENDS.get(where.rpartition(".")[2], "")
    if code in ("below", "over", "not_above", "order", "outside", "ends_too_low"):
        value, limit = _both(breach.value, breach.bound, breach.dimension)
        code = {"below": "too_small", "over": "too_large", "order": "not_above"}.get(code, code)
        return Fault(where, code, value, limit, help or _range(known))
    if code == "not_a_number":
        if breach.value == SOLVE.value:
            return Fault(where, "cannot_be_solved", help=example(where))
        return Fault(where, "not_finite", str(breach.value), help=example(where))
    if code == "not_a_choice":
        return Fault(where, "unknown_choice", str(breach.value), ", ".join(breach.bound))
    if code == "solve_one":
        code = "too_much_is_to_be_solved" if breach.value else "nothing_is_to_be_solved"
        help = f'exactly one of these may be "solve": {", ".join(breach.bound)}'
        return Fault(where, code, limit=" and ".join(breach.value), help=help)
    if code == "missing":
        code = "a_table_is_missing" if known.dimension == "part" else "missing"
        return Fault(where, code, help=help or example(where))
    bound = " and ".join(breach.bound) if isinstance(breach.bound, tuple) else str(breach.bound)
    words = {
        "cannot_be_fitted": ("cannot_be_fitted", str(breach.bound)),
        "too_few_members": ("too_few_members", "a combination has at least two"),
        "nested_too_deeply": ("nested_too_deeply", f"at most {bound} combinations in each other"),
        "not_whole": ("is_not_whole", "a whole number of pieces"),
        "unexpected": ("has_no_use_here", f"it goes with {bound}"),
        "needs": ("cannot_stand_alone", f"give {bound} too"),
        "needs_one_of": ("a_value_is_missing", f"give one of {bound}"),
        "not_both": ("only_one_may_be_given", f"keep one of {bound}"),
    }
    code, otherwise = words.get(code, (code, f"it meets {bound}"))
    return Fault(where, code, help=help or otherwise)
