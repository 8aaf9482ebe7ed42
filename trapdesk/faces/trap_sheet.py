"""The trap on the build sheet: what to buy and cut, how to wind each kind, which side to build on."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from typing import Any

from ..design.coil_kinds import CableCoil, GivenCoil, Solenoid, Toroid
from ..engine.cable_list import Terminals
from ..services.antenna.figures import Figures, PartFigures
from ..services.trap.coils import CUT_TAIL
from .layout import folded
from .lines import inductance_text, rating, turns_doubt
from .shown import about, exact, known, measured, megahertz, percent
from .trap_rows import HARDLY, adjustment_text, as_wound, part_label, part_text, side_text

ALIKE = 0.005
"""How far the two traps may differ. [1], common practice, no source"""
HEAD = "           "


def parts(figures: Figures) -> Iterator[str]:
    """Yield what both traps take."""
    trap, design = figures.trap, figures.design
    if trap is None:
        return
    of_cable = isinstance(design.antenna.trap.coil, CableCoil)
    rated = rating(design)
    if not of_cable:
        volts = f"rated {about(rated, 'voltage', 3)} peak at radio frequency" if rated else "rating not given"
        if len(trap.parts) > 1 or (trap.parts and trap.parts[0].name != "capacitor"):
            for part in trap.parts:
                place = part_label(part).removeprefix("capacitor").strip()
                called = f" (capacitor {place})" if place else ""
                yield from folded("  capacitors ", f"2 of {part_text(part)}{called}")
        else:
            fitted = exact(trap.fitted_capacitance, "capacitance", digits=3)
            yield from folded("  capacitors ", f"2 of {fitted}, {volts}")
    if trap.coil is not None:
        name = "cable     " if of_cable else "coil wire "
        yield from folded(f"  {name} ", f"2 of {measured(_cut(figures), 'm', 2)}")


def _cut(figures: Figures) -> float:
    """Return the wire or cable of one trap, its tails included."""
    coil = figures.trap.coil
    return coil.cut or coil.wire_length + 2 * CUT_TAIL


def lines(figures: Figures) -> Iterator[str]:
    """Yield how to build a trap, and what to check."""
    trap, part = figures.trap, figures.design.antenna.trap
    yield "TRAPS: build two alike"
    yield from KINDS[type(part.coil)](figures, part.coil)
    if not isinstance(part.coil, CableCoil):
        fitted = exact(trap.fitted_capacitance, "capacitance", digits=3)
        how = _joined(part.capacitor)
        yield from folded("  with     ", f"{fitted} across the coil{how and ': ' + how}")
        for stub in (part for part in trap.parts if part.length is not None):
            yield from folded(HEAD, _stub(figures, stub))
    yield from folded("  build    ", f"{side_text(trap.adjustments)}.")
    for adjustment in trap.adjustments:
        yield from folded(HEAD, f"Then {adjustment_text(adjustment)}.")
    target = trap.bring_to or trap.resonance
    check = f"{megahertz(target)} by itself, hanging free, before it goes into the wire."
    if target != trap.resonance:
        check += f" Closing it brings it to {megahertz(trap.resonance)}: measure again after that."
    if off := as_wound(figures):
        check += f" As wound it may be {about(off, 'frequency', 1)} off: bring it there."
    yield from folded("  check    ", f"{check} Both within {ALIKE * 100:.1f} % of each other.")
    yield from folded("  Q        ", f"about {about(trap.q, 'ratio')}")


def _joined(part: Any, place: str = "") -> str:
    """Return how capacitors are joined, by their places; empty for a single one."""
    members = getattr(part, "members", ())
    if not members:
        return place and f"capacitor {place}"
    places = (f"{place}.{n}".lstrip(".") for n in range(1, len(members) + 1))
    each = [_joined(member, at) for member, at in zip(members, places, strict=True)]
    text = (" in series with " if part.kind == "series" else " beside ").join(each)
    return f"({text})" if place else text


def _stub(figures: Figures, stub: PartFigures) -> str:
    """Return how to cut a stub: so long that snipping mends all that the trap may be off."""
    text = f"The stub is {measured(stub.length, 'cm', 1)} long in the end, open and sealed at its far end"
    rate = next((a.rate for a in figures.trap.adjustments if a.where == stub.key), None)
    if not rate:
        return f"{text}."
    return (
        f"{text}: cut {measured(stub.length + as_wound(figures) / rate, 'cm', 0)} and snip it to frequency."
    )


def _given(figures: Figures, made: GivenCoil) -> Iterator[str]:
    yield from folded("  coil     ", f"{inductance_text(figures)} at the trap's resonance")


def _solenoid(figures: Figures, made: Solenoid) -> Iterator[str]:
    coil = figures.trap.coil
    turns = known(coil.turns, turns_doubt(figures), "count")
    spaced = made.pitch is not None or made.length is not None
    pitch = coil.pitch or made.pitch or 0.0
    how = f"{exact(pitch, 'length', digits=3)} from turn to turn" if spaced else "wound close"
    coat = " with its insulation" if made.insulation else ""
    yield from folded(
        "  coil     ",
        f"{turns.value} turns of {made.material} wire {exact(made.wire, 'length', digits=3)} on a former"
        f" {exact(made.former, 'length')} outside, {how}.",
    )
    yield from folded(
        HEAD,
        f"Mean diameter {measured(coil.diameter, 'mm', 1)} (former and one wire{coat}), winding length"
        f" {measured(coil.length, 'mm', 1)} (turns times pitch). Cut {measured(_cut(figures), 'm', 2)}:"
        f" {measured(coil.wire_length, 'm', 2)} in the turns, {measured(CUT_TAIL, 'cm', 0)} for each tail"
        + (f", {exact(made.lead, 'length')} for each lead." if made.lead else "."),
    )
    lowers = any(a.what == "turns" and a.lowers > HARDLY for a in figures.trap.adjustments)
    moved = (
        "turns pushed together lower the trap, pulled apart raise it"
        if lowers
        else "pulled apart they raise it"
    )
    yield from folded(HEAD, f"Wind one turn more and take off: {moved}.")


def _cable(figures: Figures, made: CableCoil) -> Iterator[str]:
    coil = figures.trap.coil
    if coil.turns_range is not None:
        low, high = coil.turns_range
        first = f"Wind {coil.wind} turns and trim: {low:.2f} to {high:.2f} bring it to its resonance."
    else:
        first = f"{coil.turns:.2f} turns."
    how = f"{exact(coil.pitch, 'length', digits=3)} from turn to turn" if made.pitch else "wound close"
    yield from folded(
        "  cable    ", f"{made.cable} on a former {exact(made.former, 'length')} outside, {how}."
    )
    yield from folded(
        HEAD,
        f"{first} Cut {measured(coil.cut, 'm', 2)} of cable,"
        f" {exact(made.tail, 'length')} of it for each tail.",
    )
    where = (
        "the two ends that are left go to the wires"
        if made.terminals is Terminals.SERIES
        else "the joint and the shield's other end go to the wires, the inner conductor there stays open"
    )
    yield from folded(
        "  join     ", f"Inner conductor at one end to the shield at the other; {where} ({made.terminals})."
    )
    lost = 1 - 1 / coil.crowding
    yield from folded(HEAD, f"Crowding costs {percent(lost)} of Q; weave and tinning cost more.")


def _toroid(figures: Figures, made: Toroid) -> Iterator[str]:
    coil = figures.trap.coil
    turns = known(coil.turns, turns_doubt(figures), "count")
    size = " x ".join(str(exact(each, "length")) for each in (made.outer, made.inner, made.height))
    yield from folded(
        "  coil     ",
        f"{turns.value} turns, each once through the hole, of wire {exact(made.wire, 'length', digits=3)}"
        f" on a core {size}, {exact(made.inductance_index, 'inductance')} for one turn, by turns squared;"
        f" {coil.most_turns} would fit.",
    )
    yield from folded(HEAD, f"Cut {measured(_cut(figures), 'm', 2)}. Wind one turn more and take off.")


KINDS: dict[type, Callable[[Figures, Any], Iterator[str]]] = {
    GivenCoil: _given,
    Solenoid: _solenoid,
    CableCoil: _cable,
    Toroid: _toroid,
}
