"""Values typed as name=value: read with every fault at once."""

from __future__ import annotations

import difflib
from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from ..errors import BadInput, Fault
from ..units.unit_names import Dimension
from ..units.units import read, read_impedance, show

LEAST_OHMS, MOST_OHMS = 1e-3, 1e9
"""Between these, in ohm, lie the resistance and the size of every load that is worth an answer."""
IMPEDANCE, OHMS, TEXT = "impedance", "ohms", "text"


@dataclass(frozen=True, kw_only=True)
class Name:
    """What may be typed: what it measures, an example, and its limits."""

    dimension: str
    example: str
    low: float | None = None
    above: float | None = None
    high: float | None = None


def split(texts: Sequence[str], names: Iterable[str], example: str) -> Iterator[tuple[str, str] | Fault]:
    """Yield each text's name as it stands in `names`, and what was typed for it; or what is wrong with it."""
    known = {name.lower(): name for name in names}
    seen: set[str] = set()
    for text in texts:
        typed, equals, value = text.partition("=")
        name = known.get(typed.strip().lower(), "")
        if not equals or not typed.strip():
            code = "unreadable" if text.strip() else "empty"
            yield Fault("", code, text, help=f"write name=value: {example}")
        elif not name:
            near = difflib.get_close_matches(typed.strip()[:10].lower(), known, n=1)
            help = f"did you mean {known[near[0]]}?" if near else f"names are {', '.join(known.values())}"
            yield Fault("", "unknown_key", typed, help=help)
        elif name in seen:
            yield Fault("", "duplicate", name, help="keep one of them")
        else:
            seen.add(name)
            yield name, value


def read_pairs(texts: Sequence[str], names: Mapping[str, Name], example: str) -> dict[str, Any]:
    """Return the values typed by name; BadInput names every text that cannot be used."""
    found: dict[str, Any] = {}
    faults: list[Fault] = []
    for piece in split(texts, names, example):
        if isinstance(piece, Fault):
            faults += [piece]
            continue
        name, value = piece
        try:
            found[name] = _value(name, names[name], value)
        except BadInput as refused:
            faults += refused.faults
    if faults:
        raise BadInput(faults)
    return found


def _value(name: str, what: Name, text: str) -> Any:
    if what.dimension == TEXT:
        if not text.strip():
            raise BadInput(Fault(name, "empty", help=f"for example {name}={what.example}"))
        return text.strip()
    if what.dimension in (IMPEDANCE, OHMS):
        help = f"a load takes power only with a resistance above zero: {name}={what.example}"
        value = bounded(read_impedance(text, name), name, text, help)
        if what.dimension == IMPEDANCE:
            return value
        if value.imag:
            raise BadInput(
                Fault(name, "is_not_a_resistance", text, help=f"for example {name}={what.example}")
            )
    kind = Dimension.RESISTANCE if what.dimension == OHMS else Dimension(what.dimension)
    number = value.real if what.dimension == OHMS else read(text, kind, name)
    for code, bound, broken in (
        ("too_small", what.low, what.low is not None and number < what.low),
        ("not_above", what.above, what.above is not None and number <= what.above),
        ("too_large", what.high, what.high is not None and number > what.high),
    ):
        if broken:
            raise BadInput(Fault(name, code, text, show(bound, kind), f"for example {name}={what.example}"))
    return number


def bounded(value: complex, where: str, text: str, help: str) -> complex:
    """Return an impedance that takes power and is of this world; BadInput else."""
    if value.real <= 0:
        raise BadInput(Fault(where, "resistance_is_not_above_zero", text, help=help))
    if value.real < LEAST_OHMS:
        raise BadInput(Fault(where, "too_small", text, show(LEAST_OHMS, Dimension.RESISTANCE), help))
    if abs(value) > MOST_OHMS:
        raise BadInput(Fault(where, "too_large", text, show(MOST_OHMS, Dimension.RESISTANCE), help))
    return value


def need(found: Mapping[str, Any], names: Mapping[str, Name], wanted: Sequence[str]) -> None:
    """Raise BadInput for each value that must be given and is not."""
    faults = [
        Fault(name, "missing", help=f"for example {name}={names[name].example}")
        for name in wanted
        if name not in found
    ]
    if faults:
        raise BadInput(faults)
