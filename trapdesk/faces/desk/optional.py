"""Parts that a design may have or lack: what one begins with, and putting it in or taking it out."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from typing import Any

from ...design.design import Design, get, with_value
from ...design.history import History
from ...design.measured_part import Measured
from ...design.station import (
    OWN,
    Choke,
    FeedLine,
    ListedLoss,
    Transmitter,
    Tuner,
    TunerCapacitor,
    TunerCoil,
)
from ...engine.cable_list import CABLES

STARTING_LENGTH = 25.0
"""Length of a line that was just added; the verb tuner takes the same. [m]"""
PARTS: dict[str, Any] = {
    "station.line": FeedLine(length=STARTING_LENGTH),
    "station.choke": Choke(),
    "station.tuner": Tuner(),
    "station.tuner.load_coil": TunerCoil(),
    "station.tuner.load_capacitor": TunerCapacitor(),
    "station.transmitter": Transmitter(),
    "antenna.trap.measured": Measured(),
    "history": History(),
}
"""Keys of the parts, and what each begins with."""
ADDED = "added"


def put_part(design: Design, key: str, wanted: bool, past: Iterator[Design]) -> Design:
    """Return the design with a part, as it was when there last was one, or without it."""
    present = get(design, key)
    if wanted == (present is not None):
        return design
    return with_value(design, key, (_last(key, past) or PARTS[key]) if wanted else None)


def _last(key: str, past: Iterator[Design]) -> Any:
    for design in past:
        try:
            part = get(design, key)
        except KeyError:
            continue
        if part is not None:
            return part
    return None


def own_line(line: FeedLine) -> FeedLine:
    """Return a line of one's own, its numbers those of the type it was, where none were given."""
    cable = CABLES.get(line.type)
    if cable is None:
        return line
    return replace(
        line,
        type=OWN,
        z0=line.z0 or cable.z0,
        velocity_factor=line.velocity_factor or cable.velocity_factor,
        losses=line.losses or tuple(ListedLoss(frequency=f, loss=loss) for f, loss in cable.losses),
    )
