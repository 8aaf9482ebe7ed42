"""From a TOML text to a design: every fault of a file at once, each with what would be right."""

from __future__ import annotations

import difflib
import tomllib
import unicodedata
from collections.abc import Iterable
from dataclasses import MISSING, fields, replace
from typing import Any

from ..design.capacitor_kinds import MOST_DEEP
from ..design.coil_kinds import CableCoil
from ..design.design import Design, with_value
from ..design.fields import SOLVE, Declared, declared
from ..design.rules import check, check_part
from ..errors import BadInput, Fault, FileFault, visible
from ..units import prints, units
from .spoken import bare, example, kinds, of_one_value, spoken, tables

FORMAT = 1
KIND = "design"
HEAD = {"format": str(FORMAT), "kind": f'"{KIND}"'}
"""What a file says of itself before it says anything of the design, as TOML."""

OTHER_WORDS = {"coating": "insulation", "insulation": "coating", "diameter": "wire", "gauge": "wire"}
"""What one table calls by one name and another by another."""

LONGEST_TEXT = 200
MOST_FAULTS = 40


class DesignFault(BadInput):
    """A file that says no usable design; carries the file's name and every fault found."""

    def __init__(self, name: str, faults: Fault | Iterable[Fault]) -> None:
        super().__init__(faults)
        self.name = name

    def __str__(self) -> str:
        """Return one line a fault, each with the file's name."""
        return "\n".join(f"{visible(self.name, 200)}: {fault}" for fault in self.faults)


def read_text(text: str, name: str = "design") -> Design:
    """Return the design a TOML text says.

    `name` is what faults call the text. Raises FileFault when it is not TOML, and DesignFault with every
    unknown key, bad value and broken rule when it is.
    """
    try:
        table = tomllib.loads(text.removeprefix("\ufeff"))
    except RecursionError:
        raise FileFault(name, "not_toml", help="it is nested too deeply") from None
    except ValueError as error:
        raise FileFault(name, "not_toml", help=_in_words(error)) from None
    return _Reader(name).design(table)


def _in_words(error: ValueError) -> str:
    """Return what a parser of TOML refuses, with its line, and what would be right."""
    if not isinstance(error, tomllib.TOMLDecodeError):
        # Only a number so long that Python will not turn it into one ends so.
        return "a number in it has thousands of digits; text and quantities stand in quotes"
    said = str(error)
    if said.startswith(("Cannot overwrite", "Cannot declare", "Duplicate")):
        return f"something is given twice{said[said.rfind(' (at ') :]}; keep one of them"
    return f"{said}; text and quantities stand in quotes"


def _default(field: Any) -> Any:
    """Return a field's default; None, which the rules then call missing, where it has none."""
    if field.default_factory is not MISSING:
        return field.default_factory()
    return None if field.default is MISSING else field.default


class _Reader:
    """Reads one file, and gathers what is wrong with it."""

    def __init__(self, name: str) -> None:
        self.name = name
        self.faults: list[Fault] = []
        self.more = 0

    def fault(self, where: str, code: str, value: object = "", limit: str = "", help: str = "") -> None:
        self.add(Fault(where=where, code=code, value=str(value), limit=limit, help=help))

    def add(self, fault: Fault) -> None:
        if len(self.faults) < MOST_FAULTS:
            self.faults.append(fault)
        else:
            self.more += 1

    def design(self, table: dict[str, Any]) -> Design:
        """Return the design of a whole file, or raise all that is wrong."""
        head = {name: table.pop(name) for name in HEAD if name in table}
        self.check_head(head.get("format", FORMAT), head.get("kind", KIND))
        design: Design = self.part(Design, table, "")
        if design.antenna.trap is not None and design.antenna.lengths.end is None:
            design = with_value(design, "antenna.lengths.end", SOLVE)
        trap = design.antenna.trap
        if trap is not None and isinstance(trap.coil, CableCoil) and not _has(table, "capacitor"):
            design = with_value(design, "antenna.trap.capacitor", None)
        self.hold_to_rules(design)
        if self.more:
            self.fault_more()
        if self.faults:
            raise DesignFault(self.name, self.faults)
        return design

    def fault_more(self) -> None:
        self.faults.append(Fault(where="", code=f"{self.more}_more_faults", help="mend these first"))

    def check_head(self, version: Any, kind: Any) -> None:
        """Refuse a file that is none of ours to read, with that one fault alone."""
        if type(version) is not int or version < 1:
            fault = Fault("format", "unknown_format", str(version), help=f"format = {FORMAT}")
        elif version > FORMAT:
            help = f"this one reads format {FORMAT}: update trapdesk, or save the design in that format"
            fault = Fault("format", "written_by_a_newer_trapdesk", str(version), help=help)
        elif kind != KIND:
            help = f'a design is wanted here, kind = "{KIND}"; this file is for another command'
            fault = Fault("kind", "not_a_design", str(kind), help=help)
        else:
            return
        raise DesignFault(self.name, fault)

    def hold_to_rules(self, design: Design) -> None:
        """Add the rules the design breaks, except where a fault already found may be the cause."""
        faulty = {fault.where for fault in self.faults}
        areas = {where.partition(".")[0] for where in faulty}
        for breach in check(design):
            alone = of_one_value(breach)
            if breach.where not in faulty and (alone or breach.where.partition(".")[0] not in areas):
                self.add(spoken(breach))

    def part(self, kind: type, table: dict[str, Any], key: str) -> Any:
        """Return the part a table describes; a default stands in for what is faulty."""
        dot = f"{key}." if key else ""
        known = declared(kind)
        second = {d.alias: name for name, d in known.items() if d.alias}
        for name in table:
            if name not in known and name not in second:
                self.unknown(name, kind, key)
        values = {}
        for field in fields(kind):
            spec = known[field.name]
            value = default = _default(field)
            if spec.alias in table and field.name in table:
                help = f"keep one of {field.name} and {spec.alias}"
                self.fault(dot + spec.alias, "duplicate", spec.label, help=help)
            elif field.name in table or spec.alias in table:
                name = field.name if field.name in table else spec.alias
                given, where = table[name], dot + name
                if spec.dimension == "part":
                    value = self.inner(kind, field.name, default, given, where)
                elif spec.dimension == "parts":
                    value = self.members(spec, given, where)
                elif spec.dimension == "print":
                    value = self.print(spec, default, given, where)
                elif spec.dimension == "text":
                    value = self.text(spec, default, given, where)
                elif spec.dimension == "choice":
                    value = self.choice(spec, default, given, where)
                else:
                    value = self.quantity(spec, default, given, where)
            values[field.name] = value
        return kind(**values)

    def unknown(self, name: str, kind: type, key: str) -> None:
        """Add the fault of a key that is not known, with the place or the name it may have meant."""
        if len(self.faults) >= MOST_FAULTS:
            self.more += 1
            return
        names = [*declared(kind), *(d.alias for d in declared(kind).values() if d.alias)]
        names += list(HEAD) if kind is Design else []
        here = bare(key)
        others = [c for c in tables()[here] if c is not kind and name in declared(c)]
        places = [t for t, kinds in tables().items() if t != here and any(name in declared(c) for c in kinds)]
        near = difflib.get_close_matches(name[:40], names, n=1)
        if name in OTHER_WORDS and OTHER_WORDS[name] in names:
            help = f"here it is called {OTHER_WORDS[name]}"
        elif others:
            help = f'it goes with kind = "{others[0].kind}"'  # type: ignore[attr-defined]
        elif near:
            help = f"did you mean {near[0]}?"
        elif places:
            places = _nearest(places, here)
            help = f"it stands in {' or '.join(f'[{t}]' if t else 'the head of the file' for t in places)}"
        else:
            help = f"known here: {', '.join(names)}"
        self.fault(f"{key}.{name}" if key else name, "unknown_key", name, help=help)

    def inner(self, owner: type, field_name: str, default: Any, given: Any, where: str) -> Any:
        """Return a part inside a part."""
        if not isinstance(given, dict):
            help = f"[{where}] on a line of its own, its keys below"
            self.fault(where, f"{_what(given)}_stands_where_a_table_is_wanted", help=help)
            return default
        known = kinds(owner, field_name)
        if "" in known:
            return self.part(known[""], given, where)
        usual = next(iter(known)) if default is None else default.kind
        return self.of_kind(known, usual, default, given, where)

    def of_kind(
        self, known: dict[str, type], usual: str, default: Any, given: dict[str, Any], where: str
    ) -> Any:
        """Return a part of one kind out of several."""
        word = given.get("kind", usual)
        if not isinstance(word, str) or word not in known:
            near = difflib.get_close_matches(str(word)[:40], known, n=1)
            help = f'did you mean kind = "{near[0]}"?' if near else ""
            self.fault(f"{where}.kind", "unknown_choice", word, ", ".join(known), help)
            return default
        return self.part(known[word], {name: v for name, v in given.items() if name != "kind"}, where)

    def members(self, spec: Declared, given: Any, where: str) -> tuple[Any, ...]:
        """Return the parts of a list, those left out that are none."""
        if not isinstance(given, list):
            help = f"[[{bare(where)}]] on a line of its own, once for each, its keys below"
            self.fault(where, f"{_what(given)}_stands_where_a_list_is_wanted", help=help)
            return ()
        if where.count(".members") > MOST_DEEP:
            self.fault(where, "nested_too_deeply", help=f"at most {MOST_DEEP} combinations in each other")
            return ()
        found = []
        for place, table in enumerate(given, start=1):
            at = f"{where}.{place}"
            if not isinstance(table, dict):
                help = f"[[{bare(where)}]] on a line of its own, its keys below"
                self.fault(at, f"{_what(table)}_stands_where_a_table_is_wanted", help=help)
            elif "" in spec.choices:
                found.append(self.part(spec.choices[""], table, at))
            else:
                found.append(self.of_kind(spec.choices, next(iter(spec.choices)), None, table, at))
        return tuple(member for member in found if member is not None)

    def print(self, spec: Declared, default: Any, given: Any, where: str) -> Any:
        """Return what a print says."""
        if isinstance(given, bool) or not isinstance(given, str | int):
            self.fault(where, f"{_what(given)}_stands_where_a_print_is_wanted", help=example(where))
            return default
        try:
            return prints.read(str(given), where)
        except BadInput as refused:
            for fault in refused.faults:
                self.add(fault)
        return default

    def text(self, spec: Declared, default: Any, given: Any, where: str) -> Any:
        if not isinstance(given, str):
            help = f"text stands in quotes: {example(where)}"
            self.fault(where, f"{_what(given)}_stands_where_text_is_wanted", help=help)
        elif len(given) > spec.longest:
            help = f"at most {spec.longest} characters, not {len(given)}"
            self.fault(where, "too_long", help=help)
        elif bad := next((c for c in given if unicodedata.category(c) in ("Cc", "Cs", "Zl", "Zp")), ""):
            self.fault(where, "holds_a_control_character", bad, help="letters, digits and signs on one line")
        else:
            return given
        return default

    def choice(self, spec: Declared, default: Any, given: Any, where: str) -> Any:
        words = {str(word).casefold(): str(word) for word in spec.choices}
        if isinstance(given, str) and given.strip().casefold() in words:
            word = words[given.strip().casefold()]
            return type(default)(word) if isinstance(default, str) else word
        if isinstance(given, str):
            near = difflib.get_close_matches(given[:40], spec.choices, n=1)
            help = f"did you mean {near[0]}?" if near else ""
            self.fault(where, "unknown_choice", given, ", ".join(spec.choices), help)
        else:
            self.fault(where, f"{_what(given)}_stands_where_a_word_is_wanted", help=example(where))
        return default

    def quantity(self, spec: Declared, default: Any, given: Any, where: str) -> Any:
        """Return a quantity in SI; a bare number is held to be text, so that `units` asks for its unit."""
        if isinstance(given, bool) or not isinstance(given, str | int | float):
            self.fault(where, f"{_what(given)}_stands_where_a_value_is_wanted", help=example(where))
            return default
        if isinstance(given, str) and given.strip().casefold() == SOLVE.value:
            if spec.solvable:
                return SOLVE
            self.fault(where, "cannot_be_solved", help=example(where))
            return default
        try:
            text = given if isinstance(given, str) else repr(given)
            return units.read(text, units.Dimension(spec.dimension), where)
        except BadInput as refused:
            for fault in refused.faults:
                if spec.alias and where.endswith(f".{spec.alias}"):
                    fault = replace(fault, help=example(where))
                elif fault.code == "no_unit":
                    fault = replace(fault, help=f"{fault.help} (in quotes)")
                self.add(fault)
        return default


def _nearest(places: list[str], here: str) -> list[str]:
    """Return the tables that have most of their path in common with one; a list in a list not by itself."""

    def common(place: str) -> int:
        pairs = zip(place.split("."), here.split("."), strict=False)
        return next(
            (n for n, (a, b) in enumerate(pairs) if a != b), min(place.count("."), here.count(".")) + 1
        )

    known = [place for place in places if place.removesuffix(".members") == place or len(places) == 1]
    most = max(common(place) for place in known)
    return [place for place in known if common(place) == most]


def _has(table: dict[str, Any], name: str) -> bool:
    """Return whether a file says something of a part of the trap."""
    trap = table["antenna"]["trap"]
    return isinstance(trap, dict) and name in trap


def _what(value: Any) -> str:
    """Return what a TOML value is, in a word for a fault's code."""
    words = {dict: "a_table", list: "a_list", bool: "true_or_false", str: "text", int: "a_number"}
    return words.get(type(value), "a_number" if isinstance(value, float) else "a_date")


def read_part(kinds: dict[str, type], table: dict[str, Any], where: str) -> Any:
    """Return a part by itself, of one kind out of several; BadInput with every fault, keys as in a design."""
    reader = _Reader("")
    usual = next(iter(kinds))
    part = reader.of_kind(kinds, usual, None, table, where)
    if not reader.faults:
        for breach in check_part(part, where):
            reader.add(spoken(breach))
    if reader.faults:
        raise BadInput(reader.faults)
    return part
