"""The input rows, made from the declared fields, and what typing into one means for the design."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass, fields, replace
from enum import StrEnum
from typing import TYPE_CHECKING, Any

from ...design.design import UNKNOWN, Band, Design, Shape, get, known_at, with_value
from ...design.fields import SOLVE, Declared, declared, walk
from ...design.parts import Trap
from ...design.rules import trap_unknowns
from ...design.station import OWN
from ...engine.soils import UNKNOWN_SOIL
from ...errors import BadInput, Fault, visible
from ...units import prints
from ...units.units import Dimension, read, show, to_text
from .. import rows as presenter
from .. import shown
from .kinds import begun, mended
from .lists import list_of, read_count, with_count
from .optional import ADDED, PARTS, own_line, put_part

if TYPE_CHECKING:
    from ...services.antenna.figures import Figures

DRAWERS: dict[str, tuple[str, ...]] = {
    "Site": ("title", "site."),
    "Bands": ("bands.",),
    "Trap": ("antenna.trap",),
    "Wire": ("antenna.wire.", "antenna.lengths."),
    "Feed": ("station.",),
    "Tuner": ("station.tuner", "station.transmitter"),
    "Parts": ("antenna.trap.measured", "history"),
    "Doubts": ("doubts.",),
}
"""Drawers and the beginnings of the keys that lie in them.

Parts holds what was read of the parts as they were built and hung; what they are made of is in Trap and Wire.
"""

# Where nothing is set: what then holds, in a word.
UNSET = {
    "wanted_low": "band edge",
    "wanted_high": "band edge",
    "aim": "middle",
    "antenna.trap.capacitor.q": "lossless",
    "antenna.trap.capacitor.voltage": "not known",
    "antenna.wire.conductivity": "by metal",
    "station.line.z0": "by type",
    "station.line.velocity_factor": "by type",
    "station.line.voltage": "by type",
    "station.line.current": "not known",
    "station.line.wet_loss": "by type",
    "station.line.wet_slower": "by type",
    "station.choke.upper": "not known",
    "station.choke.lower": "not known",
    "steps": "any value",
    "station.line.losses": "by type",
    "station.transmitter.table": "typical",
    "site.soil": UNKNOWN,
    "site.conductivity": "by class",
    "site.permittivity": "by class",
}
NONE = "none"
_YES = {"antenna.trap": "fitted", "bands.upper": "wanted"} | dict.fromkeys(PARTS, ADDED)
_STARTING_ANGLE = math.radians(120)
_UPPER = Band(name="20 m", low=14.0e6, high=14.35e6)


@dataclass(frozen=True, kw_only=True)
class FormRow:
    """One input: its key, what is declared of it, how its value reads, and whether that was found, not set.

    `words` are the words it may be, when it is a choice. Of a list the value is how many members it has. A
    row without a key is a heading. `listed` is the key of the innermost list the row lies in, if any.
    """

    key: str
    known: Declared
    value: Any
    text: str
    found: bool = False
    unset: bool = False
    words: tuple[str, ...] = ()
    listed: str = ""

    @property
    def solvable(self) -> bool:
        """Whether the desk can find this value."""
        return self.known.solvable

    @property
    def name(self) -> str:
        """The label as it stands in its drawer, without what the rows around it say already."""
        label = self.known.label
        if ": " in label:
            return "  " + label.partition(": ")[2]
        if self.key.startswith("station.tuner."):
            return label.removeprefix("tuner ")
        return "  doubt" if label.startswith("doubt of ") else label.replace(" on the ", ", ")

    @property
    def counts(self) -> bool:
        """Whether the row says how many members a list has."""
        return self.known.dimension == "parts"


def drawer_of(key: str) -> str:
    """Return the drawer a key lies in; empty for one that has none."""
    heads = [(len(head), name) for name, begins in DRAWERS.items() for head in begins if key.startswith(head)]
    return max(heads)[1] if heads else ""


def rows(design: Design, figures: Figures | None) -> dict[str, list[FormRow]]:
    """Return the rows of every drawer; headings are rows without a key."""
    drawers: dict[str, list[FormRow]] = {name: [] for name in DRAWERS}
    answers = _answers(figures)
    for key, known, value in walk(design):
        drawer = drawer_of(key)
        if not drawer or (key == "antenna.lengths.end" and design.antenna.trap is None):
            continue
        if known.dimension == "parts":
            drawers[drawer].append(_count(key, known, value))
            continue
        listed = list_of(design, key)
        if listed is not None and known.dimension == "part" and len(fields(value)) > 1:
            drawers[drawer].append(_heading(known.label))
        if known.dimension != "part":
            row = _row(design, key, known, value, answers.get(key, ""))
            drawers[drawer].append(row if listed is None else _member(design, row, *listed))
            continue
        if key in _YES:
            drawers[drawer].append(_presence(key, known, value))
        if isinstance(value, Band):
            drawers[drawer].append(_heading(visible(value.name, 20)))
        if (
            isinstance(known.choices, dict)
            and known.choices
            and "" not in known.choices
            and value is not None
        ):
            kinds = tuple(known.choices)
            row = FormRow(key=f"{key}.kind", known=known, value=value.kind, text=value.kind, words=kinds)
            if listed is not None:
                row = replace(row, known=replace(known, label="kind"), listed=key.rpartition(".")[0])
            drawers[drawer].append(row)
    # The upper band comes first wherever bands are shown; its row of presence divides the two.
    bands = drawers["Bands"]
    divide = next(place for place, row in enumerate(bands) if row.key == "bands.upper")
    drawers["Bands"] = bands[divide:] + bands[:divide]
    return drawers


def _heading(text: str) -> FormRow:
    return FormRow(key="", known=Declared(label=text, help="", dimension="part"), value=None, text="")


def _count(key: str, known: Declared, members: tuple[Any, ...]) -> FormRow:
    """Return the row that says how many members a list has."""
    count = len(members)
    return FormRow(
        key=key, known=known, value=count, text=str(count or UNSET.get(key, NONE)), unset=not count
    )


def _member(design: Design, row: FormRow, above: str, place: int) -> FormRow:
    """Return a row of a member of a list; where that is all there is of it, it tells its place."""
    alone = len(fields(get(design, f"{above}.{place}"))) == 1
    known = replace(row.known, label=f"{row.known.label} {place}") if alone else row.known
    return replace(row, known=known, listed=above)


def _presence(key: str, known: Declared, value: Any) -> FormRow:
    text = NONE if value is None else _YES[key]
    return FormRow(key=key, known=known, value=text, text=text, words=(_YES[key], NONE))


def _row(design: Design, key: str, known: Declared, value: Any, answer: str) -> FormRow:
    words = tuple(known.choices) if known.dimension == "choice" else ()
    if value is SOLVE:
        return FormRow(key=key, known=known, value=value, text=answer or "...", found=True)
    if value is not None:
        text = _percent(known, value) or presenter.given(design, key)
        return FormRow(key=key, known=known, value=value, text=text, words=words)
    text = answer or UNSET.get(key) or UNSET.get(key.rpartition(".")[2], _unset(key))
    return FormRow(key=key, known=known, value=value, text=text, unset=True, found=bool(answer), words=words)


def _percent(known: Declared, value: Any) -> str:
    """Return a share in per cent where people write it so; nothing for any other value."""
    return f"{100 * value:.6g} %" if known.dimension == "ratio" and known.example.endswith("%") else ""


def _unset(key: str) -> str:
    return "usual" if key.startswith("doubts.") else "not set"


def _answers(figures: Figures | None) -> dict[str, str]:
    """Return what was found for values of the design, as the rows have it, without the doubt."""
    if figures is None:
        return {}
    answers = {}
    for row in presenter.rows(figures):
        if found(figures, row.key) is not None and row.value:
            answers[row.key] = f"{row.value.partition(' +-')[0]} {row.unit}".rstrip()
    angle = found(figures, "site.included_angle")
    if angle is not None:
        answers["site.included_angle"] = f"{math.degrees(angle):.0f} deg"
    return answers


def found(figures: Figures | None, key: str) -> float | None:
    """Return what the figures found for a value that is solved or follows from others, in SI."""
    if figures is None:
        return None
    lengths, trap = figures.lengths, figures.trap
    if key == "antenna.lengths.inner":
        return lengths.inner
    if key == "antenna.lengths.end":
        return lengths.end
    if key == "site.end_height":
        return lengths.end_height if figures.design.site.shape == Shape.VEE else None
    if key == "site.included_angle":
        return math.pi - 2 * lengths.slope if figures.design.site.shape == Shape.VEE else None
    if trap is None:
        return None
    turns = trap.coil.turns if trap.coil is not None else None
    return {
        "antenna.trap.resonance": trap.resonance,
        "antenna.trap.coil.inductance": trap.inductance,
        "antenna.trap.coil.turns": turns,
        "antenna.trap.capacitor.capacitance": trap.fitted_capacitance,
    }.get(key)


def starting_text(row: FormRow) -> str:
    """Return the text an edit of a row starts with."""
    if row.counts:
        return str(row.value)
    if row.words or row.known.dimension in ("text", "print"):
        return "" if row.value is None else str(row.value)
    if row.value is SOLVE:
        return "solve"
    if row.value is None:
        return ""
    if shown.imperial(row.known.dimension):
        return row.text
    return _percent(row.known, row.value) or to_text(row.value, Dimension(row.known.dimension))


def read_row(row: FormRow, typed: str) -> Any:
    """Return the value a person typed into a row; BadInput says what would be right."""
    text = typed.strip()
    if row.counts:
        return read_count(text)
    if row.known.dimension == "text":
        if not text:
            raise BadInput(Fault(where="", code="empty", help="a few words"))
        return text
    if row.known.dimension == "print":
        return prints.read(text)
    if row.words:
        return _word(row, text)
    if not text and row.known.optional:
        return None
    if text.lower() in ("solve", "solved"):
        if row.solvable:
            return SOLVE
        raise BadInput(Fault(where="", code="cannot_be_solved", value=text, help=_example(row)))
    return read(text, Dimension(row.known.dimension))


def _example(row: FormRow) -> str:
    return f"for example {row.known.example}" if row.known.example else "a value is needed"


def _word(row: FormRow, text: str) -> str | None:
    if not text and row.known.optional and row.key not in _YES:
        return None
    lowered = text.lower()
    exact = [word for word in row.words if word.lower() == lowered]
    begun = [word for word in row.words if word.lower().startswith(lowered)] if text else []
    if exact or len(begun) == 1:
        return (exact or begun)[0]
    code = "two_meanings" if begun else "unknown_choice"
    raise BadInput(Fault(where="", code=code, value=text, limit=", ".join(row.words), help=_among(begun)))


def _among(words: list[str]) -> str:
    return " or ".join(words[:4])


def following_word(row: FormRow) -> str:
    """Return the word after the present one of a choice, the first after the last."""
    present = str(row.value) if row.value is not None else UNSET.get(row.key, "")
    place = row.words.index(present) + 1 if present in row.words else 0
    return row.words[place % len(row.words)]


def put(design: Design, key: str, value: Any, figures: Figures | None, past: Iterator[Design]) -> Design:
    """Return the design with a value set, and with what must change along with it.

    A value that takes another's place (a soil class those of measured numbers, the height of the ends the
    angle) clears the other; one that stops being solved keeps what was found for it.
    """
    name = key.rpartition(".")[2]
    if name == "kind":
        return _with_kind(design, key.removesuffix(".kind"), value, figures, past)
    if key == "antenna.trap":
        return _with_trap(design, value != NONE, past)
    if known_at(design, key).dimension == "parts":
        return with_count(design, key, value)
    if key in PARTS:
        return put_part(design, key, value != NONE, past)
    if key == "bands.upper":
        return _with_upper(design, value != NONE, figures, past)
    present = get(design, key)
    if isinstance(present, StrEnum) and isinstance(value, str):
        # A word that was typed stands for the kind of that name, as in a file.
        value = type(present)(value)
    changed = with_value(design, key, value)
    site = changed.site
    if key == "site.shape":
        sloping = site.end_height is not None or site.included_angle is not None
        if site.shape == Shape.VEE and not sloping:
            changed = replace(changed, site=replace(site, included_angle=_STARTING_ANGLE))
        elif site.shape == Shape.FLAT:
            changed = replace(changed, site=replace(site, end_height=None, included_angle=None))
    elif key == "site.end_height" and value is not None:
        changed = replace(changed, site=replace(site, included_angle=None))
    elif key == "site.included_angle" and value is not None:
        changed = replace(changed, site=replace(site, end_height=None))
    elif key == "site.soil" and value is not None:
        changed = replace(changed, site=replace(site, conductivity=None, permittivity=None))
    elif key in ("site.conductivity", "site.permittivity"):
        changed = _with_soil_numbers(changed, value)
    elif key == "station.line.type" and value == OWN:
        changed = replace(changed, station=replace(changed.station, line=own_line(design.station.line)))
    elif changed.antenna.trap is not None and key in trap_unknowns(changed.antenna.trap):
        changed = _one_solved(changed, key, figures)
    return changed


def _with_soil_numbers(design: Design, value: float | None) -> Design:
    """Return the design with both numbers of the soil, or with neither."""
    site = design.site
    if value is None:
        return replace(design, site=replace(site, conductivity=None, permittivity=None))
    conductivity = UNKNOWN_SOIL.conductivity if site.conductivity is None else site.conductivity
    permittivity = UNKNOWN_SOIL.permittivity if site.permittivity is None else site.permittivity
    return replace(
        design, site=replace(site, soil=None, conductivity=conductivity, permittivity=permittivity)
    )


def _with_kind(
    design: Design, key: str, kind: str, figures: Figures | None, past: Iterator[Design]
) -> Design:
    known = known_at(design, key)
    present = get(design, key)
    if present.kind == kind:
        return design
    farads = figures.trap.fitted_capacitance if figures is not None and figures.trap is not None else None
    changed = mended(with_value(design, key, begun(known.choices[kind], present, farads)), past)
    unknown = trap_unknowns(changed.antenna.trap)
    open_ = [k for k in unknown if get(changed, k) is SOLVE]
    if not open_:
        # Of what is left the coil is the easiest to make to measure.
        return with_value(changed, next((k for k in unknown if ".coil." in k), unknown[0]), SOLVE)
    keep = next((k for k in open_ if k.startswith(f"{key}.")), open_[0])
    return _one_solved(changed, keep, figures)


def _with_trap(design: Design, fitted: bool, past: Iterator[Design]) -> Design:
    if fitted == (design.antenna.trap is not None):
        return design
    antenna = design.antenna
    if not fitted:
        lengths = replace(antenna.lengths, end=None)
        return replace(design, antenna=replace(antenna, trap=None, lengths=lengths))
    trap = next((old.antenna.trap for old in past if old.antenna.trap is not None), None)
    upper = design.bands.upper
    if trap is None:
        resonance = upper.target if upper is not None else 2 * design.bands.lower.target
        trap = replace(Trap(), resonance=resonance, coil=replace(Trap().coil, inductance=5e-6))
    lengths = replace(antenna.lengths, end=SOLVE)
    return replace(design, antenna=replace(antenna, trap=trap, lengths=lengths))


def _with_upper(design: Design, wanted: bool, figures: Figures | None, past: Iterator[Design]) -> Design:
    if wanted == (design.bands.upper is not None):
        return design
    if wanted:
        upper = next((old.bands.upper for old in past if old.bands.upper is not None), _UPPER)
        return replace(design, bands=replace(design.bands, upper=upper))
    lengths = design.antenna.lengths
    changed = replace(design, bands=replace(design.bands, upper=None))
    if design.antenna.trap is not None and lengths.inner is SOLVE and lengths.end is SOLVE:
        inner = settled_value(found(figures, "antenna.lengths.inner"), Dimension.LENGTH)
        changed = with_value(changed, "antenna.lengths.inner", inner)
    return changed


def _one_solved(design: Design, key: str, figures: Figures | None) -> Design:
    """Return the design with this one of the trap's values solved, if it is, and the others set as found."""
    if get(design, key) is not SOLVE:
        return design
    changed = design
    for other in trap_unknowns(design.antenna.trap):
        if other != key and get(design, other) is SOLVE:
            known = declared(get(design, other.rpartition(".")[0]))[other.rpartition(".")[2]]
            value = settled_value(found(figures, other), Dimension(known.dimension))
            changed = with_value(changed, other, value)
    return changed


def settled_value(value: float | None, dimension: Dimension) -> float:
    """Return a found value as a person would set it, to five digits; BadInput when there is none yet."""
    if value is None:
        raise BadInput(Fault(where="", code="nothing_was_found_for_it_yet", help="type a value instead"))
    return read(show(value, dimension, digits=5), dimension)


def toggled(design: Design, row: FormRow, figures: Figures | None) -> Any:
    """Return the value that turns a row from set to solved or back."""
    if not row.solvable:
        raise BadInput(Fault(where="", code="this_is_always_set", help="Enter changes it"))
    if row.value is not SOLVE:
        return SOLVE
    trap = design.antenna.trap
    if trap is not None and row.key in trap_unknowns(trap):
        labels = [
            declared(get(design, k.rpartition(".")[0]))[k.rpartition(".")[2]].label
            for k in trap_unknowns(trap)
        ]
        others = " or ".join(label for label in labels if label != row.known.label)
        raise BadInput(Fault(where="", code="one_of_the_three_is_always_solved", help=f"press s on {others}"))
    return settled_value(found(figures, row.key), Dimension(row.known.dimension))


_STEPS = {
    Dimension.FREQUENCY: 10e3,
    Dimension.COUNT: 0.5,
    Dimension.ANGLE: math.radians(5),
    Dimension.CAPACITANCE: 1e-12,
    Dimension.INDUCTANCE: 0.1e-6,
}


def nudged(row: FormRow, direction: int) -> float:
    """Return a row's value one step further: one member, half a turn, a centimetre, else its second digit."""
    dimension = row.known.dimension
    if row.counts:
        return max(0, row.value + direction)
    if row.words or dimension in ("text", "print"):
        raise BadInput(Fault(where="", code="there_is_nothing_to_step", help="Enter changes it"))
    if row.value is None or row.value is SOLVE:
        raise BadInput(Fault(where="", code="only_a_set_value_can_be_stepped", help="Enter sets it"))
    kind = Dimension(dimension)
    size = abs(row.value)
    step = _STEPS.get(kind) or (10.0 ** (math.floor(math.log10(size) + 1e-9) - 1) if size else 0.001)
    if kind is Dimension.LENGTH and size >= 0.1:
        step = 0.01
    count = round(row.value / step, 9)
    whole = math.floor(count) + 1 if direction > 0 else math.ceil(count) - 1
    return whole * step
