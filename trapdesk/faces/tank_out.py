"""A resonator from what was typed: what is missing or at odds in words, the answer in columns."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

from ..engine.tank import TankQuantity, TankStatus
from ..errors import BadInput, Fault
from ..services.bench import tank as service
from ..services.bench.tank import TankAnswer, TankBehaviour
from ..units.unit_names import ELEMENTS, Dimension
from ..units.units import read_exact, show
from .layout import fitted, folded
from .pairs import split
from .shown import exact, known

LABELS: dict[TankQuantity, str] = {
    TankQuantity.FREQUENCY: "f, LC resonance",
    TankQuantity.INDUCTANCE: "L, inductance",
    TankQuantity.CAPACITANCE: "C, capacitance",
    TankQuantity.RESISTANCE: "R, in series with L",
    TankQuantity.DYNAMIC_RESISTANCE: "RD, dynamic resistance",
    TankQuantity.QUALITY: "Q, reactance over R",
    TankQuantity.BANDWIDTH: "B, width f/Q",
}
EXAMPLES = {"f": "10.05MHz", "L": "5.3uH", "C": "47pF", "R": "1.9ohm", "RD": "60k", "Q": "180", "B": "56kHz"}
EXAMPLE = "trapdesk tank f=10.05MHz C=47pF Q=180"
RANGES = {
    "f": (1e3, 1e11),
    "L": (1e-12, 10.0),
    "C": (1e-15, 1.0),
    "R": (1e-9, 1e6),
    "RD": (1e-3, 1e12),
    "Q": (1e-3, 1e9),
    "B": (1e-3, 1e11),
}
"""Between these, in SI, lies each value of a circuit for radio; beyond them it is a slip of the prefix."""
MOST_SLACK = 0.5
ROUNDING = 1e-9
"""Relative difference below which two definitions agree but for rounding. [1]"""


def answer_to(texts: Sequence[str]) -> tuple[dict[str, float], TankAnswer]:
    """Return the values typed, and what they determine.

    BadInput names every text that cannot be read, what is missing, or which values are at odds.
    """
    given: dict[str, float] = {}
    slack: dict[str, float] = {}
    faults: list[Fault] = []
    for piece in split(texts, ELEMENTS, EXAMPLE):
        if isinstance(piece, Fault):
            faults += [piece]
            continue
        name, value = piece
        try:
            typed = read_exact(value, ELEMENTS[name], name)
        except BadInput as refused:
            faults += refused.faults
            continue
        given[name] = typed.value
        slack[name] = min(typed.relative_slack, MOST_SLACK)
        faults += _outside(name, typed.value, value)
    if faults:
        raise BadInput(faults)
    answer = service.answer(given, slack)
    if answer.status is TankStatus.INSUFFICIENT:
        raise BadInput(_missing(answer))
    if answer.status is TankStatus.CONTRADICTORY:
        raise BadInput(_at_odds(answer))
    return given, answer


def _outside(name: str, value: float, text: str) -> list[Fault]:
    low, high = RANGES[name]
    if value <= 0:
        return [Fault(name, "not_positive", text, help=f"for example {EXAMPLES[name]}")]
    if not low <= value <= high:
        limit = f"{show(low, Dimension(ELEMENTS[name]))} to {show(high, Dimension(ELEMENTS[name]))}"
        return [Fault(name, "outside", text, limit, f"for example {name}={EXAMPLES[name]}")]
    return []


def _missing(answer: TankAnswer) -> Fault:
    """Say how much is missing, and what would do."""
    would = ", ".join(answer.would_help)
    more = "one more value" if answer.missing == 1 else f"{answer.missing} more values"
    determined = [f"{n} = {_plain(n, v)}" for n, v in answer.values.items()]
    help = f"{'one' if answer.missing == 1 else 'some'} of {would} would do"
    if answer.missing > 1:
        help = f"any of {would} would do that do not follow from each other"
    found = f"; so far {', '.join(determined)}" if len(determined) > 1 else ""
    return Fault("", f"not enough is given: {more} needed{found}", help=help)


def _at_odds(answer: TankAnswer) -> Fault:
    """Say which values contradict each other, and by how much."""
    among = answer.relation
    names = f"{', '.join(among[:-1])} and {among[-1]}"
    suspects = answer.suspects or answer.disagreements[:1]
    wants = [
        f"{each.quantity} = {_plain(each.quantity, each.implied)} (given {_plain(each.quantity, each.given)})"
        for each in suspects
    ]
    if len(answer.suspects) == 1:
        help = f"the others agree among themselves: they want {wants[0]}"
    else:
        help = f"leave one of them out, or take {' or '.join(wants)}" if wants else "leave one of them out"
    return Fault("", f"{names} contradict each other", help=help)


def _plain(name: TankQuantity, value: float) -> str:
    return show(value, Dimension(ELEMENTS[str(name)]))


def lines(given: Mapping[str, float], answer: TankAnswer) -> list[str]:
    """Return what was given beside what was found, then every definition by itself."""
    found = [f"{'Parallel resonator, lossless C':<34}{'given':<17}found"]
    for quantity, label in LABELS.items():
        value = answer.values[quantity]
        dimension = str(ELEMENTS[str(quantity)])
        typed = str(exact(given[str(quantity)], dimension)) if str(quantity) in given else ""
        off = value * answer.doubt[quantity]
        text = known(value, off, dimension) if off else exact(value, dimension)
        shown = "" if typed and answer.status is TankStatus.EXACT else str(text)
        found += [f"  {label:<31} {typed:<16} {shown}".rstrip()]
    behaviour = answer.behaviour
    assert behaviour is not None
    found += ["", *_definitions(behaviour, answer)]
    found += folded("", "+- is what rounding of the typed values may come to; --json has every digit.")
    return fitted(found)


def _definitions(b: TankBehaviour, answer: TankAnswer) -> list[str]:
    """Return each meaning of resonance, dynamic resistance, width and Q."""
    doubts = answer.doubt

    def value(number: float | None, of: TankQuantity) -> str:
        dimension = str(ELEMENTS[str(of)])
        if number is None:
            return "none"
        off = number * doubts[of]
        return str(known(number, off, dimension)) if off else str(exact(number, dimension))

    def beside(number: float | None, first: float, of: TankQuantity) -> str:
        """Put a value beside that by the first definition; they differ by less than either is known."""
        if number is None:
            return "none"
        difference = number / first - 1
        told = "the same" if abs(difference) < ROUNDING else f"{100 * difference:+.2g} %"
        return f"{value(number, of):<22} {told}"

    def below(number: float | None) -> str:
        """How far below the LC resonance; that is known much better than the resonance itself."""
        if number is None:
            return "none: the loss is too large"
        gap = b.lc_resonance - number
        return "the same" if gap == 0 else f"{show(abs(gap), Dimension.FREQUENCY, digits=2)} {_side(gap)}"

    f, rd, q, width = (
        TankQuantity.FREQUENCY,
        TankQuantity.DYNAMIC_RESISTANCE,
        TankQuantity.QUALITY,
        TankQuantity.BANDWIDTH,
    )
    ratio, plain_width, plain_q = b.dynamic_resistance_high_q, b.lc_resonance / b.q_components, b.q_components
    return [
        "Resonance",
        f"  {'equal reactances (LC)':<31} {value(b.lc_resonance, f)}",
        f"  {'purely resistive':<31} {below(b.unity_power_factor_resonance)}",
        f"  {'largest impedance':<31} {below(b.peak_resonance)}",
        "Resistance there",
        f"  {'L/(C R)':<31} {value(ratio, rd)}",
        f"  {'where purely resistive':<31} {beside(b.dynamic_resistance, ratio, rd)}",
        f"  {'largest impedance':<31} {beside(b.peak_impedance, ratio, rd)}",
        "Width",
        f"  {'f/Q':<31} {value(plain_width, width)}",
        f"  {'where Z is its largest / sqrt 2':<31} {beside(b.half_power_width, plain_width, width)}",
        "Q",
        f"  {'reactance over R':<31} {value(plain_q, q)}",
        f"  {'RD over reactance':<31} {beside(b.q_dynamic, plain_q, q)}",
        f"  {'frequency over that width':<31} {beside(b.q_half_power, plain_q, q)}",
        f"  {'largest Z over reactance of C':<31} {beside(b.q_peak, plain_q, q)}",
        "",
    ]


def _side(gap: float) -> str:
    return "below it" if gap > 0 else "above it"
