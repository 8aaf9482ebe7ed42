"""One coil typed as name=value: read with every fault at once, shown in given and found columns."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import replace
from typing import Any

from ..design.coil_kinds import COILS
from ..design.fields import SOLVE, declared
from ..errors import BadInput, Fault
from ..services.bench.coil_check import CoilAnswer, check_coil
from ..store import toml_read
from . import trap_json
from .json_out import FORMAT, inputs
from .layout import WIDTH, fitted, folded
from .pairs import Name, need, read_pairs
from .shown import about, exact, impedance_range, known, measured, megahertz, percent
from .trap_rows import adjustment_text, side_text

EXAMPLE = "trapdesk coil former=40mm wire=AWG14 pitch=2.4mm turns=8 f=14.1MHz"
KEY = "antenna.trap.coil"
USUAL = "solenoid"
ASKED: dict[str, Name] = {
    "f": Name(dimension="frequency", example="14.1MHz", low=1e5, high=1e9),
    "L": Name(dimension="inductance", example="2.7uH", low=1e-8, high=1e-2),
    "C": Name(dimension="capacitance", example="47pF", low=1e-13, high=1e-7),
}
"""What is asked of the coil, beside what it is made from."""


def answer_to(texts: Sequence[str]) -> CoilAnswer:
    """Return the coil that was typed; BadInput names every text that cannot be used."""
    asked = [text for text in texts if text.partition("=")[0].strip().lower() in ("f", "l", "c")]
    table: dict[str, str] = {"kind": USUAL}
    faults: list[Fault] = []
    for text in (text for text in texts if text not in asked):
        name, equals, value = (piece.strip() for piece in text.partition("="))
        if not equals or not name:
            faults += [Fault("", "unreadable", text, help=f"write name=value: {EXAMPLE}")]
        elif name in table and name != "kind":
            faults += [Fault("", "duplicate", name, help="keep one of them")]
        else:
            table[name] = value
    found: dict[str, Any] = {}
    try:
        found = read_pairs(asked, ASKED, EXAMPLE)
        need(found, ASKED, ("f",))
    except BadInput as refused:
        faults += refused.faults
    part = None
    try:
        part = toml_read.read_part(COILS, dict(table), KEY)
    except BadInput as refused:
        faults += [_typed(fault) for fault in refused.faults]
    if part is not None and not faults:
        faults += _enough(part, found)
    if faults:
        raise BadInput(faults)
    return check_coil(part, found["f"], found.get("L"), found.get("C"))


def _typed(fault: Fault) -> Fault:
    """Return a fault with the name as it is typed here."""
    where = fault.where.removeprefix(f"{KEY}.").removeprefix(KEY)
    help = fault.help.replace(f"{KEY}.", "").replace(" = ", "=").replace(" (in quotes)", "").replace('"', "")
    return replace(fault, where=where, help=help)


def _enough(part: Any, found: dict[str, Any]) -> list[Fault]:
    """Say what is missing or too much for one coil."""
    open_ = [name for name, what in declared(part).items() if what.solvable and getattr(part, name) is SOLVE]
    wanted = [name for name in ("L", "C") if name in found]
    if part.kind == "cable":
        if wanted:
            return [Fault(wanted[0], "has_no_use_here", help="turns of cable are solved for f alone")]
        return []
    if open_ and len(wanted) != 1:
        name = open_[0]
        help = f"give {name}, or the L it shall have, or the C it shall resonate with at f"
        return [Fault(name, "missing" if not wanted else "only_one_of_L_and_C_may_be_given", help=help)]
    if open_ and open_[0] == "inductance" and "L" in found:
        return [Fault("L", "has_no_use_here", help="write inductance=... for a given coil")]
    if not open_ and "L" in found:
        return [Fault("L", "has_no_use_here", help="take out turns, and they are solved for L")]
    return []


def _line(label: str, given: str, found: str) -> Iterator[str]:
    line = f"  {label:<27} {given:<16} {found}".rstrip()
    if len(line) > WIDTH:
        yield from folded(f"  {label:<27} ", f"{given} {found}".strip())
    else:
        yield line


def lines(answer: CoilAnswer) -> list[str]:
    """Return what was given beside what was found."""
    found = [f"{'Coil, ' + answer.part.kind:<30}{'given':<17}found"]
    for name, what in declared(answer.part).items():
        value = getattr(answer.part, name)
        if value is None or value is SOLVE or what.dimension == "part":
            continue
        text = str(value) if what.dimension == "choice" else str(exact(value, what.dimension))
        found += _line(what.label, text, "")
    for label, text in _found(answer):
        found += _line(label, "", text)
    found += folded("", "An estimate until it is measured; --json has every digit.")
    return fitted(found)


def _found(answer: CoilAnswer) -> Iterator[tuple[str, str]]:
    coil = answer.coil
    of_cable = answer.capacitance is None
    if of_cable:
        yield "build it", side_text(answer.adjustments)
        for adjustment in answer.adjustments:
            yield "then", adjustment_text(adjustment)
        if coil.turns_range is not None:
            yield "turns", f"{coil.turns_range[0]:.2f} to {coil.turns_range[1]:.2f}"
            yield "wind first", f"{coil.wind} turns, {measured(coil.cut, 'm', 2)} of cable, then trim"
        yield "resonance", megahertz(answer.resonance, 4)
    doubt = answer.inductance_doubt
    at = f" at {megahertz(answer.frequency, 4)}"
    shown = known(answer.inductance, doubt, "inductance") if doubt else exact(answer.inductance, "inductance")
    yield "inductance", f"{shown}{' of the plain circuit alike' if of_cable else at}"
    least, most = answer.q_range
    spread = f" ({about(least, 'ratio')} to {about(most, 'ratio')})" if most > least else ""
    yield "Q", f"{about(answer.q, 'ratio', 2)}{spread}"
    if coil is not None and coil.crowding > 1.02:
        yield "crowding", f"costs {percent(1 - 1 / coil.crowding)} of Q"
    yield "impedance", f"{impedance_range(answer.impedance)}{at}"
    if not of_cable:
        yield "resonates with", f"{answer.capacitance * 1e12:.3g} pF at {megahertz(answer.resonance, 4)}"
    if coil is None:
        return
    if coil.turns_range is None:
        yield "turns", f"{coil.turns:.2f}"
    if coil.half_turns is not None and abs(coil.half_turns - coil.turns) > 0.01:
        yield "to half a turn", f"{coil.half_turns:g}: at {megahertz(coil.half_resonance, 4)} with the same C"
    if coil.most_turns is not None:
        yield "turns that fit", f"{coil.most_turns}"
    else:
        yield "pitch", measured(coil.pitch, "mm", 2)
        yield (
            "winding length",
            f"{measured(coil.length, 'mm', 0)}, diameter {measured(coil.diameter, 'mm', 1)}",
        )
    yield "cut", f"{measured(coil.cut, 'm', 2)}, {measured(coil.wire_length, 'm', 2)} of it on the coil"
    yield (
        "size",
        f"{measured(coil.outer_diameter, 'mm', 0)} across, {measured(coil.outer_length, 'mm', 0)} long",
    )
    yield "weight", f"about {coil.mass * 1e3:.0f} g without former and core"
    low, middle, high = (c * 1e12 for c in coil.self_capacitance)
    yield "its own capacitance", f"{middle:.1f} ({low:.1f} to {high:.1f}) pF"
    if coil.own_resonance is not None:
        yield "by itself", f"resonates near {about(coil.own_resonance, 'frequency')}"
    if not of_cable:
        yield "build it", side_text(answer.adjustments)
        for adjustment in answer.adjustments:
            yield "then", adjustment_text(adjustment)


def document(answer: CoilAnswer) -> dict[str, Any]:
    """Return a coil for scripts."""
    return {
        "format": FORMAT,
        "kind": "coil",
        "given": inputs(answer.part),
        "f_hz": answer.frequency,
        "inductance_h": answer.inductance,
        "inductance_doubt_h": answer.inductance_doubt,
        "resistance_ohm": answer.resistance,
        "q": answer.q,
        "q_range": answer.q_range,
        "z_ohm": answer.impedance,
        "resonance_hz": answer.resonance,
        "capacitance_f": answer.capacitance,
        "coil": None if answer.coil is None else trap_json.coil(answer.coil),
        "adjustments": trap_json.adjustments(answer.adjustments),
    }
