"""A line by itself: from its type and what was typed to what it does to a load."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from ..design.station import OWN, FeedLine, LineWeather, ListedLoss
from ..engine.cable_list import CABLES
from ..engine.cable_types import LOSS_DOUBT
from ..errors import BadInput, Fault
from ..services.feed.lone_line import LoneLine, to_load, to_seen
from ..services.feed.path import laid_line, voltage_rating
from ..units.unit_names import Dimension
from ..units.units import read
from . import feed_json, json_out
from .feed_rows import line_name
from .layout import fitted, folded
from .pairs import IMPEDANCE, OHMS, TEXT, Name, need, read_pairs
from .shown import about, exact, megahertz

EXAMPLE = "trapdesk line RG-58/U length=20m f=7.1MHz Z=35-j120"
NAMES: dict[str, Name] = {
    "length": Name(dimension="length", example="20m", above=0.0, high=1e5),
    "f": Name(dimension="frequency", example="7.1MHz", low=1e3, high=1e11),
    "Z": Name(dimension=IMPEDANCE, example="35-j120"),
    "Zin": Name(dimension=IMPEDANCE, example="57+j50"),
    "power": Name(dimension="power", example="100W", above=0.0, high=1e6),
    "Z0": Name(dimension=OHMS, example="50", low=5.0, high=1500.0),
    "VF": Name(dimension="ratio", example="0.66", low=0.2, high=1.0),
    "loss": Name(dimension=TEXT, example="0.073dB/m@30MHz,0.144dB/m@100MHz"),
    "age": Name(dimension="ratio", example="10", low=0.0, high=60.0),
    "weather": Name(dimension=TEXT, example="wet"),
}


def cable_named(text: str, where: str = "type") -> str:
    """Return the type a person named, with or without dashes and the ending /U; BadInput for none of ours."""

    def plain(name: str) -> str:
        return "".join(c for c in name.lower().removesuffix("/u") if c.isalnum())

    for name in (*CABLES, OWN):
        if plain(name) == plain(text):
            return name
    listed = ", ".join(CABLES)
    if not text.strip():
        raise BadInput(Fault(where, "empty", help=f"one of {listed}"))
    help = f"with Z0, VF and loss of its own: {OWN}" if where == "type" else ""
    raise BadInput(Fault(where, "unknown_choice", text, f"{listed}, {OWN}", help))


def answer_to(texts: Sequence[str]) -> LoneLine:
    """Return the line and what it does to what was typed; BadInput names everything that cannot be used."""
    kinds = [text for text in texts if "=" not in text]
    found = read_pairs([text for text in texts if "=" in text], NAMES, EXAMPLE)
    kind = cable_named(" ".join(kinds)) if kinds else OWN
    need(found, NAMES, ("length", "f", *(("Z0", "VF") if kind == OWN else ())))
    if ("Z" in found) == ("Zin" in found):
        raise BadInput(
            Fault("Z", "give_one_of_both", help="Z at the far end, or Zin at the transmitter's end")
        )
    line = FeedLine(
        type=kind,
        length=found["length"],
        z0=found.get("Z0"),
        velocity_factor=found.get("VF"),
        losses=losses(found["loss"]) if "loss" in found else (),
        age=found.get("age", 0.0),
        weather=_weather(found.get("weather", "dry")),
    )
    return _answer(line, found)


def _weather(text: str) -> LineWeather:
    if text.lower() not in tuple(LineWeather):
        raise BadInput(Fault("weather", "unknown_choice", text, ", ".join(LineWeather)))
    return LineWeather(text.lower())


def losses(text: str) -> tuple[ListedLoss, ...]:
    """Return typed losses, each with the frequency it holds at, such as 0.073dB/m@30MHz, commas between."""
    rows = []
    for piece in text.split(","):
        loss, at, frequency = piece.partition("@")
        if not at:
            help = f"a loss and where it holds: loss={NAMES['loss'].example}"
            raise BadInput(Fault("loss", "unreadable", piece, help=help))
        row = ListedLoss(
            frequency=read(frequency, Dimension.FREQUENCY, "loss"),
            loss=read(loss, Dimension.LOSS_PER_LENGTH, "loss"),
        )
        if row.frequency <= 0 or row.loss <= 0:
            raise BadInput(Fault("loss", "not_positive", piece, help=f"loss={NAMES['loss'].example}"))
        rows.append(row)
    return tuple(rows)


def _answer(line: FeedLine, found: dict[str, Any]) -> LoneLine:
    try:
        laid_line(line)
    except ValueError as error:
        raise BadInput(Fault("loss", "cannot_be_fitted", help=str(error))) from None
    carried, end = (to_load, found["Z"]) if "Z" in found else (to_seen, found["Zin"])
    return carried(line, found["f"], end, found.get("power", 100.0))


def _ohms(z: complex) -> str:
    """Return R and X each to its own four digits: on a line both matter, however unlike they are."""
    x = f"{z.imag:+.4g}"
    return f"{z.real:.4g} {x[0]} j{x[1:]} ohm"


def _ratio(value: float) -> str:
    return f"{value:.3g}" if value < 1000 else "over 1000"


def lines(answer: LoneLine) -> list[str]:
    """Return the line in use as lines: both ends side by side, losses, and what stands along it."""
    use, line = answer.use, answer.line
    found = [f"{line_name(line)} at {megahertz(answer.frequency)}"]
    found += [f"  {'':<22}{'at the far end':<26}at the transmitter's end"]
    for label, far, near in (
        ("watts", f"{use.power_load:.4g} W", f"{use.power_input:.4g} W"),
        ("Z", _ohms(use.load), _ohms(use.input)),
        (f"SWR against {float(answer.constants.z0):.4g}", _ratio(use.swr_load), _ratio(use.swr_input)),
    ):
        found += [f"  {label:<22}{far:<26}{near}"]
    rated, carries = voltage_rating(line), line.current
    volts = f", rated {about(rated, 'voltage', 3)}" if rated else ""
    amps = f", rated {about(carries, 'current', 3)}" if carries else ""
    found += [
        f"  {'loss if matched':<22}{use.matched_loss:.3g} dB",
        f"  {'loss as it is':<22}{use.total_loss:.3g} dB",
        f"  {'highest volts, rms':<22}{about(use.largest_voltage, 'voltage', 3)}"
        f" at {exact(use.voltage_at, 'length', digits=3)} from the far end{volts}",
        f"  {'highest amps, rms':<22}{about(use.largest_current, 'current', 3)}"
        f" at {exact(use.current_at, 'length', digits=3)} from the far end{amps}",
        f"  {'line impedance':<22}{_ohms(answer.impedance)}",
        f"  {'velocity factor':<22}{float(answer.constants.velocity_factor):.3g}",
        f"  {'electrical length':<22}{answer.wavelengths:.3g} wavelengths",
    ]
    if line.type != OWN:
        cable = CABLES[line.type]
        read_there = "seen" if cable.seen else "from memory"
        text = (
            f"{cable.name} by {cable.source} ({read_there}); lists differ by {100 * LOSS_DOUBT:.0f} % in loss"
        )
        found += folded("  ", f"{text}{'; ' + cable.note if cable.note else ''}.")
    if line.age or line.weather is LineWeather.WET:
        found += folded("  ", "What age and rain do to it is an estimate, no source.")
    return fitted(found)


def document(answer: LoneLine) -> dict[str, Any]:
    """Return the same for scripts."""
    return {
        "format": json_out.FORMAT,
        "kind": "line",
        "type": answer.line.type,
        "length_m": answer.line.length,
        "f_hz": answer.frequency,
        "z0_ohm": float(answer.constants.z0),
        "velocity_factor": float(answer.constants.velocity_factor),
        "z_line_ohm": answer.impedance,
    } | feed_json.line(answer.use)


def text(texts: Sequence[str], *, as_json: bool) -> str:
    """Return what was typed and what was found, as text or JSON."""
    answer = answer_to(texts)
    return json_out.text(document(answer)) if as_json else "\n".join(lines(answer)) + "\n"
