"""From a TOML text to a box: every fault of a file at once, by key and row; the ready box."""

from __future__ import annotations

import difflib
import os
import tomllib
import unicodedata
from dataclasses import MISSING, fields
from typing import Any

from ..design.box import TABLES, Box, Cable, Capacitor, Core
from ..design.fields import Declared, declared
from ..engine.cable_list import CABLES
from ..errors import BadInput, Fault, FileFault, visible
from ..units import prints, units
from .store import BOX_ENDING, read_file, shelf
from .toml_read import FORMAT, LONGEST_TEXT, DesignFault

KIND = "box"
READY_BOX = "relief-box"
"""The box that is looked through when no other is named."""
HEAD = ("format", "kind", "title")
MOST_FAULTS = 40


class BoxFault(DesignFault):
    """A file that says no usable box; carries the file's name and every fault found.

    `box` is what could be read all the same, every entry that has no fault.
    """

    def __init__(self, name: str, faults: list[Fault], box: Box) -> None:
        super().__init__(name, faults)
        self.box = box


def find_box(argument: str | os.PathLike[str] = READY_BOX) -> Box:
    """Return the box a person named: a file, or else a ready one, with or without .toml."""
    name = os.fspath(argument)
    known = name.removesuffix(".toml")
    if not os.path.lexists(argument) and known in boxes():
        return read_box(shelf().joinpath(f"{known}.toml").read_text("utf-8"), known)
    return load_box(argument)


def boxes() -> list[str]:
    """Return the names of the ready boxes."""
    names = (f.name for f in shelf().iterdir())
    return sorted(name.removesuffix(".toml") for name in names if name.endswith(BOX_ENDING))


def load_box(path: str | os.PathLike[str]) -> Box:
    """Return the box in a file; FileFault when there is none, BoxFault with all that is wrong in it."""
    return read_box(read_file(path), os.fspath(path))


def read_box(text: str, name: str = "box") -> Box:
    """Return the box a TOML text says; `name` is what faults call the text.

    FileFault when it is not TOML, BoxFault with every unknown key, bad value and bad entry when it is.
    """
    try:
        table = tomllib.loads(text.removeprefix("\ufeff"))
    except RecursionError:
        raise FileFault(name, "not_toml", help="it is nested too deeply") from None
    except ValueError as error:
        help = f"{error}; text and quantities stand in quotes"
        raise FileFault(name, "not_toml", help=help) from None
    reader = _Reader()
    box = reader.box(table)
    if reader.faults:
        more = len(reader.faults) - MOST_FAULTS
        if more > 0:
            reader.faults[MOST_FAULTS:] = [Fault("", f"{more}_more_faults", help="mend these first")]
        raise BoxFault(name, reader.faults, box)
    return box


class _Reader:
    """Reads one box, and gathers what is wrong with it."""

    def __init__(self) -> None:
        self.faults: list[Fault] = []
        self.places: dict[int, str] = {}

    def fault(self, where: str, code: str, value: object = "", limit: str = "", help: str = "") -> None:
        self.faults.append(Fault(where=where, code=code, value=str(value), limit=limit, help=help))

    def box(self, table: dict[str, Any]) -> Box:
        """Return the box of a whole file, every entry with a fault left out."""
        version = table.get("format", FORMAT)
        if version != FORMAT or isinstance(version, bool):
            self.fault("format", "unknown_format", version, help=f"format = {FORMAT}")
            return Box()
        if table.get("kind", "design") != KIND:
            help = f'a box is wanted here, kind = "{KIND}" at its head'
            self.fault("kind", "not_a_box", table.get("kind", ""), help=help)
            return Box()
        for key in table:
            if key not in HEAD and key not in TABLES:
                near = difflib.get_close_matches(key[:40], TABLES, n=1)
                help = f"did you mean [[{near[0]}]]?" if near else f"known here: {', '.join(TABLES)}"
                self.fault(visible(key), "unknown_key", key, help=help)
        title = self.text("title", table.get("title", "box"))
        found = {name: self.rows(kind, table.get(name, [])) for name, kind in TABLES.items()}
        self.thin_formers(found)
        box = Box(title=title or "box", **found)
        if box.is_empty and not self.faults:
            help = "list what there is, for example [[formers]] with name, diameter and length below it"
            self.fault("", "the box is empty", help=help)
        return box

    def thin_formers(self, found: dict[str, tuple[Any, ...]]) -> None:
        """Drop formers on which no wire or cable of the box could lie, and name each."""
        thinnest = min(
            [w.diameter for w in found["wires"]] + [c.over_jacket for c in found["cables"] if c.is_wound],
            default=0,
        )
        for former in found["formers"]:
            if former.diameter <= thinnest:
                row = self.places[id(former)]
                limit = f"the thinnest wire, {units.show(thinnest, units.Dimension.LENGTH)}"
                shown = units.show(former.diameter, units.Dimension.LENGTH)
                self.fault(f"{row}: diameter", "not_above", shown, limit)
        found["formers"] = tuple(f for f in found["formers"] if f.diameter > thinnest)

    def rows(self, kind: type, given: Any) -> tuple[Any, ...]:
        """Return the good entries of one list."""
        name = kind.table  # type: ignore[attr-defined]
        if not isinstance(given, list) or not all(isinstance(entry, dict) for entry in given):
            self.fault(name, "a_list_of_tables_is_wanted", help=f"[[{name}]] before each entry")
            return ()
        entries = (self.entry(kind, entry, f"{name}, row {n}") for n, entry in enumerate(given, start=1))
        return tuple(entry for entry in entries if entry is not None)

    def entry(self, kind: type, table: dict[str, Any], where: str) -> Any:
        """Return one entry, or None when anything is wrong with it."""
        known, before = declared(kind), len(self.faults)
        if isinstance(name := table.get("name"), str) and name.strip():
            where = f"{where} ({visible(name, 30)})"
        names = {d.alias or n: n for n, d in known.items()} | {n: n for n in known}
        values: dict[str, Any] = {}
        for key, value in table.items():
            place = f"{where}: {visible(key, 30)}"
            if key not in names:
                near = difflib.get_close_matches(key[:40], names, n=1)
                help = f"did you mean {near[0]}?" if near else f"known here: {', '.join(known)}"
                self.fault(place, "unknown_key", key, help=help)
            elif names[key] in values:
                self.fault(place, "duplicate", known[names[key]].label, help="keep one of both")
            else:
                values[names[key]] = self.value(known[names[key]], key, value, place)
        if kind is Capacitor:
            self.printed(values, where)
        for field in fields(kind):
            if field.name not in values and field.default is MISSING:
                spec = known[field.name]
                self.fault(f"{where}: {field.name}", "missing", help=_example(field.name, spec))
        if len(self.faults) > before:
            return None
        entry = kind(**values)
        self.places[id(entry)] = where
        self.together(entry, where)
        return entry if len(self.faults) == before else None

    def printed(self, values: dict[str, Any], where: str) -> None:
        """Take from a capacitor's print what is not said by itself."""
        if not values.get("print"):
            return
        place = f"{where}: print"
        try:
            said = prints.read(values["print"], place)
        except BadInput as refused:
            self.faults += refused.faults
            values.setdefault("capacitance", 1e-12)
            return
        if "capacitance" in values:
            self.fault(place, "duplicate", "the capacitance", help="keep one of print and capacitance")
        values["capacitance"] = said.capacitance
        if said.tolerance is not None:
            values.setdefault("tolerance", max(said.tolerance))
        if said.voltage is not None:
            values.setdefault("voltage", said.voltage)

    def value(self, spec: Declared, key: str, given: Any, where: str) -> Any:
        """Return one value; after a fault anything, for the entry is dropped."""
        if spec.dimension == "text":
            return self.text(where, given)
        if spec.dimension == "choice":
            words = {str(word).casefold(): word for word in spec.choices}
            if isinstance(given, str) and given.strip().casefold() in words:
                return words[given.strip().casefold()]
            self.fault(where, "unknown_choice", given, ", ".join(spec.choices))
            return None
        if isinstance(given, bool) or not isinstance(given, str | int | float):
            self.fault(where, "a_value_is_wanted", help=_example(key, spec))
            return None
        try:
            text = given if isinstance(given, str) else repr(given)
            value = units.read(text, units.Dimension(spec.dimension), where)
        except BadInput as refused:
            self.faults += refused.faults
            return None
        return self.limited(spec, value, where)

    def limited(self, spec: Declared, value: float, where: str) -> float:
        """Hold a number against its limits."""
        kind = units.Dimension(spec.dimension)
        for code, bound, sign in (("too_small", spec.low, 1), ("too_large", spec.high, -1)):
            if bound is not None and sign * value < sign * bound:
                self.fault(where, code, units.show(value, kind, digits=6), units.show(bound, kind, digits=6))
        if spec.label == "pieces" and value % 1:
            self.fault(where, "a_whole_number_is_wanted", f"{value:g}", help="for example count = 4")
        return value

    def text(self, where: str, given: Any) -> str:
        if not isinstance(given, str):
            self.fault(where, "text_is_wanted", help="in quotes")
        elif len(given) > LONGEST_TEXT:
            self.fault(where, "too_long", help=f"at most {LONGEST_TEXT} characters, not {len(given)}")
        elif bad := next((c for c in given if unicodedata.category(c) in ("Cc", "Cs", "Zl", "Zp")), ""):
            self.fault(where, "holds_a_control_character", bad, help="letters, digits and signs on one line")
        else:
            return given
        return ""

    def together(self, entry: Any, where: str) -> None:
        """Hold the values of one entry against each other."""
        length = units.Dimension.LENGTH

        def order(key: str, small: float, large_key: str, large: float) -> None:
            if small >= large:
                limit = f"{large_key}, {units.show(large, length)}"
                self.fault(f"{where}: {key}", "not_below", units.show(small, length), limit)

        if isinstance(entry, Core):
            order("inner", entry.inner, "outer", entry.outer)
        if isinstance(entry, Cable):
            for key in entry.missing:
                help = f"{_example(key, declared(Cable)[key])}, or type, one of {', '.join(CABLES)}"
                self.fault(f"{where}: {key}", "missing", help=help)
            if entry.shield is not None and entry.outside is not None:
                order("shield", entry.shield, "outside", entry.outside)


def _example(key: str, spec: Declared) -> str:
    return f'for example {key} = "{spec.example or spec.label}"'
