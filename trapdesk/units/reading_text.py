"""Readings as they are typed: `name=value`, with what else is to be said behind commas."""

from __future__ import annotations

import difflib
import math
import re
from collections.abc import Iterable, Iterator
from types import MappingProxyType
from typing import NoReturn

from ..design.reading_kinds import GROUPS, KINDS, Doubt, Interval, Kind, Option, Reading
from ..engine.constants import C0
from ..errors import BadInput, Fault
from . import units
from .unit_names import Dimension

LONGEST = 400
MOST_READINGS = 200
# A comma begins something new only where a name and an equals sign follow: 14,05MHz is one value.
_NEXT = re.compile(r",(?=\s*[A-Za-z][\w.]*(?:@[^=,]*(?:,\d[^=,]*)?)?\s*=)")
_SHARE = re.compile(r".*(?:%|percent|ppm)", re.IGNORECASE)
_NUMBER_PAIR = re.compile(r"(?P<low>[^.]*(?:\.\d[^.]*)?)\.\.(?P<high>.*)")


def parse(texts: Iterable[str]) -> tuple[Reading, ...]:
    """Return the readings typed; one text may hold several.

    Parameters
    ----------
    texts : iterable of str
        Such as "trap.f0=14.05MHz,doubt=0.1%", "upper.swr@7.19MHz=2..3" or "lower.z@3.6MHz=42-j12,at=feed".

    Returns
    -------
    tuple of Reading
        In the order typed.

    Raises
    ------
    BadInput
        With everything that cannot be read.
    """
    found: list[Reading] = []
    faults: list[Fault] = []
    for text in texts:
        for name, value, options in _split(text, faults):
            try:
                found.append(_reading(name, value, options))
            except BadInput as refused:
                faults += refused.faults
    if len(found) > MOST_READINGS:
        faults.append(Fault("", f"{len(found)} readings are too many", help=f"at most {MOST_READINGS}"))
    if faults:
        raise BadInput(faults)
    return tuple(found)


def _split(text: str, faults: list[Fault]) -> Iterator[tuple[str, str, list[tuple[str, str]]]]:
    """Yield name, value and options of each reading in a text."""
    if len(text) > LONGEST:
        faults.append(Fault("", "too_long", text, help=f"at most {LONGEST} characters a reading"))
        return
    pairs: list[tuple[str, str]] = []
    for piece in _NEXT.split(text):
        name, equals, value = piece.partition("=")
        if not equals or not name.strip() or not value.strip():
            help = f"write name=value: {KINDS['trap.f0'].example} or {KINDS['band.dip'].example}"
            named = name.strip() if equals else ""
            code = "empty" if named or not piece.strip() else "unreadable"
            faults.append(Fault(named, code, piece, help=help))
            return
        pairs.append((name.strip(), value.strip()))
    reading: tuple[str, str, list[tuple[str, str]]] | None = None
    for name, value in pairs:
        if "." in name or reading is None:
            if reading is not None:
                yield reading
            reading = (name, value, [])
        else:
            reading[2].append((name, value))
    if reading is not None:
        yield reading


def _not_open(where: str, kind: Kind, text: str) -> None:
    """Refuse a value that ends in the name of an option nothing is given for."""
    ways = [word for word in kind.hows if word]
    _, comma, last = text.rpartition(",")
    name = last.strip().lower()
    if comma and name in (*kind.options, "doubt", *(["how"] if ways else [])):
        shown = {"doubt": "doubt=0.5%", "how": f"how={ways[0]}" if ways else ""}.get(name, kind.example)
        _refuse(f"{where} {name}", "empty", help=f"{name} wants a value, for example {shown}")


def _refuse(where: str, code: str, value: str = "", help: str = "", limit: str = "") -> NoReturn:
    raise BadInput(Fault(where, code, value, limit, help))


def _reading(name: str, value: str, options: list[tuple[str, str]]) -> Reading:
    head, at, place = name.partition("@")
    subject, what, kind = _kind(head)
    frequency = None
    if at and not kind.at_frequency:
        _refuse(head, "takes no frequency behind @", help=f"for example {kind.example}")
    if kind.at_frequency:
        if not at:
            _refuse(head, "a frequency is missing", help=f"for example {kind.example}")
        frequency = _positive(place, Dimension.FREQUENCY, name)
    _not_open(head, kind, options[-1][1] if options else value)
    said = _options(head, kind, options)
    how = str(said.pop("how", next(iter(kind.hows)) if not kind.how_is_needed else ""))
    if kind.how_is_needed and not how:
        help = f"say which: {', '.join(f'how={word}' for word in kind.hows)}"
        _refuse(head, "how it was measured is missing", help=help)
    read = _value(name, kind, value)
    doubt = kind.hows[how]
    if "doubt" in said:
        doubt = _doubt(f"{head} doubt", str(said.pop("doubt")), _DOUBTED.get(kind.takes, kind.takes))
    return Reading(
        subject=subject,
        what=what,
        value=read,
        typed=value,
        doubt=doubt,
        how=how,
        frequency=frequency,
        options=MappingProxyType(said),
    )


def _kind(head: str) -> tuple[str, str, Kind]:
    subject, _, what = head.lower().partition(".")
    group = GROUPS.get(subject)
    if group is not None and f"{group}.{what}" in KINDS:
        return subject, what, KINDS[f"{group}.{what}"]
    names = [f"{s}.{key.partition('.')[2]}" for s, g in GROUPS.items() for key in KINDS if key.startswith(g)]
    own = [n for n in names if n.startswith(f"{subject}.")]
    near = difflib.get_close_matches(head.lower()[:40], names, n=1, cutoff=0.8)
    help = f"did you mean {near[0]}?" if near else f"known are {', '.join(own or names)}"
    _refuse("", "unknown_key", head, help)


def _options(head: str, kind: Kind, given: list[tuple[str, str]]) -> dict[str, float | str | Doubt]:
    """Return what was said behind a reading; doubt and how as text, for they depend on its kind."""
    ways = [word for word in kind.hows if word]
    known = [*kind.options, "doubt", *(["how"] if ways else [])]
    said: dict[str, float | str | Doubt] = {}
    for name, value in given:
        key = name.lower()
        where = f"{head} {key}"
        if key not in known:
            near = difflib.get_close_matches(key[:40], known, n=1)
            help = f"did you mean {near[0]}?" if near else f"known here are {', '.join(known)}"
            _refuse(head, "unknown_key", name, help)
        if key in said:
            _refuse(head, "duplicate", key, "keep one of them")
        if key == "doubt":
            said[key] = value
        elif key == "how":
            said[key] = _word(where, value, ways)
        elif kind.options[key].choices:
            said[key] = _word(where, value, kind.options[key].choices)
        elif kind.options[key].doubt_of:
            said[key] = _doubt(where, value, kind.options[key].doubt_of)
        else:
            said[key] = _number(where, value, kind.options[key])
    missing = [key for key, option in kind.options.items() if option.needed and key not in said]
    if missing:
        _refuse(head, f"{missing[0]} is missing", help=f"for example {kind.example}")
    return said


def _word(where: str, value: str, words: Iterable[str]) -> str:
    words = list(words)
    if value.lower() in words:
        return value.lower()
    near = difflib.get_close_matches(value.lower()[:40], words, n=1)
    _refuse(where, "unknown_choice", value, f"did you mean {near[0]}?" if near else "", ", ".join(words))


LEAD_INDUCTANCE = 0.8e-6
"""Of a straight lead, per length. Common practice, no source: 0.6 to 1 nH per mm. [H/m]"""


def _number(where: str, text: str, option: Option) -> float:
    """Return an option's number in SI, a length turned into the delay or inductance that it stands for."""
    refused: BadInput | None = None
    for name in option.dimensions:
        try:
            value = units.read(text, Dimension(name), where)
        except BadInput as error:
            refused = refused or error
            continue
        if value < 0:
            _refuse(where, "negative", text, "from 0 up")
        per_metre = 1.0
        if name == "length":
            per_metre = LEAD_INDUCTANCE if "inductance" in option.dimensions else 1.0 / C0
        return value * per_metre
    assert refused is not None
    raise refused


def _positive(text: str, dimension: Dimension, where: str) -> float:
    value = units.read(text, dimension, where)
    if value <= 0:
        _refuse(where, "not_positive", text)
    return value


def _value(where: str, kind: Kind, text: str) -> float | complex | Interval | str:
    if kind.takes == "file":
        return text
    if kind.takes == "impedance":
        z = units.read_impedance(text, where)
        if z.real < 0:
            _refuse(where, "negative", text, "a resistance is at least 0: 42-j12")
        return z
    if kind.takes == "swr":
        return _swr(where, kind, text)
    if kind.takes == "ratio" and text.lower().endswith("db"):
        return 10.0 ** (-abs(units.read(text, Dimension.LOSS, where)) / 20.0)
    value = _positive(text, Dimension(kind.takes), where)
    if kind.at_frequency and kind.takes == "ratio" and value >= 1:
        _refuse(where, "too_large", text, "voltage beside resonance over that at resonance", "1")
    return value


def _swr(where: str, kind: Kind, text: str) -> Interval:
    """Return what a meter told: one number, from..to, or from.. for off the scale."""
    text = text.strip().removesuffix(":1").removeprefix("1:").strip()
    match = _NUMBER_PAIR.fullmatch(text)
    parts = (match["low"].strip(), match["high"].strip()) if match else (text, text)
    pair = [
        units.read(part, Dimension.RATIO, where) if part else end
        for part, end in zip(parts, (1.0, math.inf), strict=True)
    ]
    if min(pair) < 1:
        _refuse(where, "too_small", text, f"an SWR is at least 1: {kind.example}", "1")
    if not any(parts) or pair[0] > pair[1]:
        _refuse(where, "unreadable", text, "from..to with the lower first, or 3.. for off the scale")
    return Interval(low=pair[0], high=pair[1])


_DOUBTED = {"file": "frequency", "impedance": "resistance", "swr": "ratio"}
"""What the doubt of a value is read as, where that is not what the value measures."""


def _doubt(where: str, text: str, takes: str) -> Doubt:
    """Return a doubt: a share of the value in per cent, or a quantity of its own kind."""
    share = bool(_SHARE.fullmatch(text))
    value = units.read(text, Dimension.RATIO if share else Dimension(takes), where)
    if not value > 0:
        _refuse(where, "not_positive", text, "a share such as 0.5 %, or how much")
    if share and value >= 1:
        _refuse(where, "too_large", text, "a value that may be off by all of itself says nothing", "100 %")
    return Doubt(relative=value) if share else Doubt(absolute=value)
