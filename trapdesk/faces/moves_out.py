"""The next move as text and JSON: what is believed, what fits, what to do, how sure that is, when to stop."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from typing import Any

from ..design.reading_kinds import KINDS, Reading
from ..errors import visible
from ..services.hung.moves import Advice, Option
from ..services.hung.next_move import NextMove
from ..services.hung.updating import Learned
from . import hill_card, move_words
from .json_out import FORMAT
from .layout import WIDTH, folded
from .lines import band_name
from .shown import fraction, imperial, megahertz, rounded, small_step, swr
from .tolerance_out import percent

ROLES = ("upper", "lower")
FEW = 3


def _cm(length: float, *, sign: bool = False) -> str:
    """Return a length in centimetres, halves where there are some, or in inches, without the unit."""
    value = 100 * length
    text = fraction(length).removesuffix(" in") if imperial("length") else f"{value:.1f}".removesuffix(".0")
    return f"+{text}" if sign and value > 0 else text


def done(wire: str, change: float, lacking: float) -> str:
    """Return what to do to a wire of both sides, in builder's words."""
    if lacking > 0:
        return (
            f"add {_cm(lacking)} {small_step()[0]} to each {wire} wire after letting out all that is folded"
        )
    if change < 0:
        return f"fold {_cm(-change)} {small_step()[0]} more of each {wire} wire back along itself"
    return f"let out {_cm(change)} {small_step()[0]} of each {wire} wire"


def lines(found: NextMove, readings: Sequence[Reading], kept: Sequence[str] = ()) -> list[str]:
    """Return everything as lines of at most 79 columns."""
    advice = found.advice
    count = len(found.posterior.forward.readings)
    read = f"after {count} reading{'s' * (count != 1)}" if count else "nothing read yet"
    read += " at the new site" * found.new_site
    out = folded("", f"NEXT MOVE: {visible(found.figures.design.title, 48)}; {read}")
    if found.unread and not found.new_site:
        out += ["", *_nothing_read(found)]
    if found.diagnosis.named:
        out += ["", *_faults(found)]
    elif found.diagnosis.misfits:
        text = (
            "These readings fit no antenna of this design, sound or broken as known here. Read both dips"
            " again, with the line gripped and let go: a reading that moves means nothing."
        )
        out += ["", *folded("CANNOT TELL  ", text)]
    elif found.cannot_tell:
        text = f"What was read says too little for a move. Best next: {_best_reading(found)}."
        out += ["", *folded("CANNOT TELL  ", text)]
    elif found.unread and not found.new_site:
        out += ["", *_chances(found, (advice.now,))]
    else:
        out += ["", *_move(found), "", *_chances(found, (advice.now, *advice.options)), "", *_rest(found)]
        out += ["", *card(found)] if count else []
    # Of something broken nothing is believed that holds for a sound antenna.
    out += ["", *_believed(found)] if not found.unread and not found.diagnosis.named else []
    if advice.verdict != "stop":
        out += ["", *(line for text in move_words.AT_THE_HALYARD for line in folded("! ", text))]
    out += [line for text in kept for line in folded("", text)]
    return [line.rstrip() for line in out]


def _nothing_read(found: NextMove) -> Iterator[str]:
    yield from folded("", "Nothing was read yet: what follows is believed of an antenna built by the sheet.")
    yield "Readings of the antenna"
    for name, kind in KINDS.items():
        if name.startswith(("band.", "line.")):
            yield from folded(f"  {kind.example:<30} ", kind.label)
    yield from folded("", f"Best first: {_best_reading(found)}.")


def _best_reading(found: NextMove) -> str:
    """Return which reading to take next: a dip where nothing was read, else SWR where the limit is judged."""
    read = {r.subject for r in found.posterior.forward.readings}
    roles = sorted(found.figures.bands, key=lambda role: found.advice.now.chances[role])
    for role in roles:
        if role not in read:
            name = band_name(found.figures.bands[role])
            return f"the dip on {name}, as {role}.dip=..., at the radio's end of the line"
    edges = " and ".join(megahertz(f) for f in _edges(found, roles[0]))
    return f"the SWR on {band_name(found.figures.bands[roles[0]])} at {edges}, as {roles[0]}.swr@...=..."


def _edges(found: NextMove, role: str) -> tuple[float, float]:
    return dict(found.figures.design.bands.items())[role].wanted_edges


def _believed(found: NextMove) -> Iterator[str]:
    yield f"{'What is believed, 90 of 100':<28}{'before':<19}{'now':<19}"
    for one in found.learned:
        yield (
            f"  {move_words.LEARNED[one.code]:<25} {_span(one, one.before):<18} {_span(one, one.after):<18} "
            + ("site" if one.belongs == "site" else one.belongs)
        )
    yield from folded(
        "  ", "antenna: stays with it. site: forgotten at the next one. Estimates from these readings alone."
    )
    told = found.posterior.told
    if told:
        names = found.posterior.forward.readings
        order = sorted(range(len(told)), key=lambda i: -told[i])[:FEW]
        most = ", then ".join(_named(names[i]) for i in order if told[i] > 0.05)
        yield from folded("  ", f"Told most: {most or 'none of them much'}.")


def _named(reading: Reading) -> str:
    at = f"@{megahertz(reading.frequency).replace(' ', '')}" if reading.frequency is not None else ""
    return f"{reading.name}{at}={visible(reading.typed, 30)}"


def _span(one: Learned, ends: tuple[float, float, float]) -> str:
    low, _, high = ends
    if one.dimension == "frequency" and high > 1e6:
        return f"{low / 1e6:.3f}-{high / 1e6:.3f} MHz"
    if one.dimension == "frequency":
        return f"{low / 1e3:.0f}-{high / 1e3:.0f} kHz"
    if one.dimension == "length":
        if imperial("length"):
            return f"{low / 0.3048:.2f}-{high / 0.3048:.2f} ft"
        return f"{low:.2f}-{high:.2f} m"
    if one.code == "soil":
        return f"{rounded(low, 0.1)} to {rounded(high, 0.1)}"
    return f"{100 * low:+.1f} to {100 * high:+.1f} %"


def _faults(found: NextMove) -> Iterator[str]:
    named = found.diagnosis.named
    first = move_words.FAULTS[named[0].code]
    text = f"These readings fit {first[0]}; no sound antenna fits nearly as well."
    yield from folded("SOMETHING IS WRONG  ", f"{text} Fold and cut nothing: {first[1]}.")
    for other in named[1 : 1 + FEW]:
        says, look = move_words.FAULTS[other.code]
        yield from folded("  or it is ", f"{says}: {look}.")
    more = [move_words.FAULTS[other.code][0] for other in named[1 + FEW :]]
    if more:
        yield from folded("  or ", f"{', '.join(more)}.")
    text = "Mend it, read again, and only then think of wire. Nothing found? Read once more: if it says the"
    yield from folded(
        "  ", f"{text} same again, measure both traps by themselves; trapdesk readings takes that."
    )


def _move(found: NextMove) -> Iterator[str]:
    advice = found.advice
    if advice.verdict == "stop":
        text = (
            f"It meets the limit in {percent(advice.now.all_bands)} of what is believed: leave it as it is."
        )
        yield from folded("STOP  ", text)
        return
    if advice.verdict == "measure":
        reading = _best_reading(found)
        chance = percent(advice.now.all_bands)
        text = f"It meets the limit in {chance} of what is believed, and no move is worth a lowering."
        yield from folded("LEAVE IT  ", f"{text} To be surer, read {reading}.")
        return
    if found.new_site and max(abs(x) for x in advice.best.change.values()) == 0:
        yield from folded("HANG IT  ", "as it is.")
        return
    best = advice.best
    if best.tuning:
        yield from folded("TRAPS  ", _tuning(found))
    texts = []
    for wire, change in best.change.items():
        if change:
            texts.append(done(_wire(found, wire), change, advice.lacking[wire]))
    yield from folded("MOVE  ", f"Both sides alike: {'; '.join(texts)}." if texts else "No wire.")
    one = advice.one_wire
    if one is not None and one.name != best.name:
        wire = next(wire for wire, change in one.change.items() if change or wire == one.name)
        told = done(_wire(found, wire), one.change[wire], 0.0) if one.change[wire] else "leave both"
        yield from folded(
            "  if only one wire: ", f"{told}; both bands then meet it in {percent(one.all_bands)}."
        )
    for wire, need in advice.needs.items():
        if not best.tuning:
            name = _wire(found, wire)
            yield from folded(f"  {name} wire: ", f"for its aim {_range(need.low, need.high)}, in 90 of 100.")
    yield from folded("  ", "The move is about the middle, and told no finer than it is known.")


def _range(low: float, high: float) -> str:
    unit, size = small_step()
    first, last = (round(end / size) for end in (low, high))
    if last <= 0:
        return f"{-last} to {-first} {unit} are to be folded"
    if first >= 0:
        return f"{first} to {last} {unit} are to be let out"
    return f"anything from {-first} {unit} to be folded to {last} {unit} to be let out"


def _wire(found: NextMove, wire: str) -> str:
    return wire if found.figures.trap is not None else "side's"


def _tuning(found: NextMove) -> str:
    trap = found.figures.trap
    assert trap is not None
    return (
        f"Mending the traps beats wire: take both down and bring them to {megahertz(trap.resonance)} by"
        " themselves, closed as they will hang; then move the wires as below."
    )


def _option_words(option: Option) -> str:
    names = {"now": "as it hangs", "both": "both wires", "inner": "inner wires only", "end": "end wires only"}
    return names.get(option.name, "traps and both wires")


def _chances(found: NextMove, options: Sequence[Option]) -> Iterator[str]:
    limit = found.figures.design.station.swr_limit
    bands = found.figures.bands
    head = "".join(f"{band_name(band):>8}" for band in bands.values())
    last = f"{'all':>8}" if len(bands) > 1 else ""
    yield f"{f'Chance of SWR {limit:.3g} over the wanted part, moves in {small_step()[0]}':<46}{head}{last}"
    for option in options:
        cells = "".join(f"{percent(option.chances[role]):>8}" for role in bands)
        both = f"{percent(option.all_bands):>8}" if len(bands) > 1 else ""
        moved = ", ".join(f"{wire} {_cm(x, sign=True)}" for wire, x in option.change.items() if x)
        mark = "> " if option is found.advice.best else "  "
        yield f"{mark}{_option_words(option):<22}{moved:<22}".ljust(46) + cells + both


def _rest(found: NextMove) -> Iterator[str]:
    advice = found.advice
    none, one, two = advice.lowerings
    never = max(1 - none - one - two, 0.0)
    if advice.verdict in ("wires", "traps"):
        text = f"one is enough in {percent(one + none)}, two in {percent(min(one + two + none, 1.0))}"
        if never > 0.02:
            text += f"; in {percent(never)} no wire length does, and the traps, the site or a tuner must"
        yield from folded("Lowerings: ", f"{text}.")
        yield from folded("Stop: ", "when the SWR at both wanted edges is under the limit on both bands.")
    if found.new_site:
        parts = [
            f"{band_name(found.figures.bands[role])} {swr(ends[0])}, seldom over {swr(ends[1])}"
            for role, ends in found.worst_swr.items()
        ]
        yield from folded(
            "Or the tuner: ", f"as it is, the worst SWR in the wanted part is {'; '.join(parts)}."
        )
    yield from _cutting(found, advice)


def _cutting(found: NextMove, advice: Advice) -> Iterator[str]:
    if found.unread:
        return
    risk = found.figures.design.doubts.risk
    for wire, spare in advice.spare.items():
        if spare <= 0:
            continue
        name = _wire(found, wire)
        cut = advice.cut[wire]
        text = f"{_cm(spare)} {small_step()[0]} are folded back on each then. "
        text += (
            f"{_cm(cut)} {small_step()[0]} may be cut off for good; keep the rest folded."
            if cut
            else "Cut nothing yet: a fold can be undone."
        )
        yield from folded(f"Cutting, {name} wire: ", text)
    yield from folded(
        "  ", f"Risk of cutting too much over the whole story: {percent(risk)} at most, as set."
    )


def card(found: NextMove) -> list[str]:
    """Return what to carry to the halyard: where each dip may be next, and the move that goes with it."""
    heads = ("each inner wire", "each end wire") if found.figures.trap is not None else ("each side", "")
    out = [f"{'FOR THE CARD: after this move, dip at':<40}{heads[0]:>18}{heads[1]:>18}".rstrip()]
    bands = found.figures.bands
    for role in ROLES:
        band = bands.get(role)
        if band is None or band.effects is None or not band.effects.inner:
            continue
        step = hill_card.even(band.frequency_doubt / 2)
        for n in (-2, -1, 0, 1, 2):
            moves = moves_for(found, role, n * step)
            cells = "".join(f"{_card_move(move):>18}" for move in moves)
            place = (found.dips[role] + n * step) / 1e6
            out.append(
                f"  {band_name(band):<8}{place:>10.{3 if step < 1e4 else 2}f} MHz{'':<16}{cells}"[:WIDTH]
            )
    unit = {"cm": "centimetres", "in": "inches"}[small_step()[0]]
    out += folded("  ", f"- fold, + let out, {unit}; one band's row at a time, the upper band first.")
    return out


def _card_move(move: float | None) -> str:
    if move is None:
        return ""
    if abs(move) < 0.005:
        return "leave"
    return f"{_cm(move, sign=True)} in" if imperial("length") else f"{100 * move:+.0f} cm"


def moves_for(found: NextMove, role: str, off: float) -> tuple[float | None, float | None]:
    """Return the changes of inner and end wire [m] for a dip that is off [Hz], the other band staying."""
    bands = found.figures.bands
    effects = bands[role].effects
    assert effects is not None
    if effects.end is None:
        return -off / effects.inner, None
    if role == "lower":
        return None, -off / effects.end
    inner = -off / effects.inner
    lower = bands["lower"].effects
    if lower is None or not lower.end:
        return inner, None
    return inner, -inner * lower.inner / lower.end


def document(found: NextMove, kept: bool) -> dict[str, Any]:
    """Return the next move as JSON: SI, the unit in the key."""
    advice = found.advice
    readings = found.posterior.forward.readings
    verdict = "fault" if found.diagnosis.named else "cannot_tell" if _no_move(found) else advice.verdict
    return {
        "format": FORMAT,
        "kind": "next",
        "kept": kept,
        "verdict": verdict,
        "new_site": found.new_site,
        "readings": [
            {"name": r.name, "frequency_hz": r.frequency, "typed": r.typed, "told": told, "strain": strain}
            for r, told, strain in zip(readings, found.posterior.told, found.posterior.strain, strict=True)
        ],
        "survivors": found.posterior.survivors,
        "believed": {
            one.code: {
                "belongs": one.belongs,
                "dimension": one.dimension,
                "before": list(one.before),
                "now": list(one.after),
            }
            for one in found.learned
        },
        "faults": [{"code": s.code, "ratio": s.ratio} for s in found.diagnosis.looked_at],
        "named": [s.code for s in found.diagnosis.named],
        "now": _option(advice.now),
        "move": _option(advice.best),
        "options": [_option(option) for option in advice.options],
        "one_wire": None if advice.one_wire is None else _option(advice.one_wire),
        "needs": {
            w: {"low_m": n.low, "middle_m": n.middle, "high_m": n.high} for w, n in advice.needs.items()
        },
        "lowerings": dict(zip(("none", "one", "two"), advice.lowerings, strict=True)),
        "cut_m": dict(advice.cut),
        "spare_m": dict(advice.spare),
        "lacking_m": dict(advice.lacking),
        "dips_after_hz": dict(found.dips),
        "worst_swr": {role: list(ends) for role, ends in found.worst_swr.items()},
    }


def _no_move(found: NextMove) -> bool:
    return found.cannot_tell or found.diagnosis.misfits


def _option(option: Option) -> Mapping[str, Any]:
    return {
        "name": option.name,
        "change_m": dict(option.change),
        "traps_tuned_again": option.tuning,
        "chances": dict(option.chances),
        "chance": option.all_bands,
    }
