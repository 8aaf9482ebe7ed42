"""What the parts of a trap must obey together, each kind of part by itself, in registries."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from typing import Any

from ..engine.cable_list import CABLES
from .capacitor_kinds import MOST_DEEP, ParallelCapacitors, SeriesCapacitors, SingleCapacitor
from .coil_kinds import CableCoil, Solenoid, Toroid
from .parts import Trap


@dataclass(frozen=True, kw_only=True)
class Breach:
    """A value that a rule forbids: where, which rule, the value, and the bound or the other key it meets.

    `code` is one of: missing, below, not_above, over, not_a_choice, not_a_number, not_whole, unexpected,
    needs, needs_one_of, not_both, order, outside, solve_one, ends_too_low, cannot_be_fitted,
    too_few_members, nested_too_deeply.
    """

    where: str
    code: str
    value: Any = None
    bound: Any = None
    dimension: str = ""


def trap_rules(trap: Trap, key: str) -> Iterator[Breach]:
    """Yield every rule the parts of a trap break."""
    of_cable = isinstance(trap.coil, CableCoil)
    if trap.capacitor is None and not of_cable:
        yield Breach(where=f"{key}.capacitor", code="missing", dimension="part")
    elif trap.capacitor is not None and of_cable:
        yield Breach(where=f"{key}.capacitor", code="unexpected", bound='kind = "cable" of the coil')
    for name in ("coil", "capacitor"):
        part = getattr(trap, name)
        if part is not None:
            yield from part_rules(part, f"{key}.{name}")


def part_rules(part: Any, key: str) -> Iterator[Breach]:
    """Yield every rule a coil or a capacitor breaks, with what is in it."""
    rules = RULES.get(type(part))
    if rules is not None:
        yield from rules(part, key)


def _above(key: str, value: float | None, bound: float | None) -> Iterator[Breach]:
    """Hold one length of a part to be more than another; one that is not set is not held."""
    if value is not None and bound is not None and value <= bound:
        yield Breach(where=key, code="not_above", value=value, bound=bound, dimension="length")


def _solenoid(coil: Solenoid, key: str) -> Iterator[Breach]:
    if coil.pitch is not None and coil.length is not None:
        yield Breach(where=f"{key}.pitch", code="not_both", bound=(f"{key}.pitch", f"{key}.length"))
    yield from _above(f"{key}.pitch", coil.pitch, coil.wire)
    yield from _above(f"{key}.former", coil.former, coil.wire)
    if coil.pitch is None and coil.length is None:
        yield from _above(f"{key}.insulation", coil.insulation, 0.0)
    if coil.length is not None and isinstance(coil.turns, float | int):
        yield from _above(f"{key}.length", coil.length, coil.turns * coil.wire)


def cable_numbers(coil: CableCoil) -> tuple[float | None, float | None]:
    """Return diameter outside and over the shield, given or listed; None where neither is."""
    listed = CABLES[coil.cable]
    return coil.outside or listed.outside, coil.shield or listed.shield


def _cable(coil: CableCoil, key: str) -> Iterator[Breach]:
    outside, shield = cable_numbers(coil)
    for name, value in (("outside", outside), ("shield", shield)):
        if value is None:
            yield Breach(where=f"{key}.{name}", code="missing", dimension="length")
    yield from _above(f"{key}.outside", outside, shield)
    yield from _above(f"{key}.former", coil.former, outside)
    if coil.pitch is not None and outside is not None and coil.pitch < outside:
        yield Breach(where=f"{key}.pitch", code="below", value=coil.pitch, bound=outside, dimension="length")


def _toroid(coil: Toroid, key: str) -> Iterator[Breach]:
    yield from _above(f"{key}.outer", coil.outer, coil.inner)
    yield from _above(f"{key}.inner", coil.inner, 2 * (coil.wire + 2 * coil.insulation))


def _single(part: SingleCapacitor, key: str) -> Iterator[Breach]:
    if part.print is None or part.print.capacitance is None:
        yield Breach(where=f"{key}.print", code="missing", dimension="print")
    if part.count != int(part.count):
        yield Breach(where=f"{key}.count", code="not_whole", value=part.count, dimension="count")


def _joined(part: SeriesCapacitors | ParallelCapacitors, key: str) -> Iterator[Breach]:
    if len(part.members) < 2:
        yield Breach(where=f"{key}.members", code="too_few_members", value=len(part.members), bound=2)
    if key.count(".members") >= MOST_DEEP:
        yield Breach(where=f"{key}.members", code="nested_too_deeply", bound=MOST_DEEP)
        return
    for place, member in enumerate(part.members, start=1):
        yield from part_rules(member, f"{key}.members.{place}")


RULES: dict[type, Callable[[Any, str], Iterator[Breach]]] = {
    Solenoid: _solenoid,
    CableCoil: _cable,
    Toroid: _toroid,
    SingleCapacitor: _single,
    SeriesCapacitors: _joined,
    ParallelCapacitors: _joined,
}
