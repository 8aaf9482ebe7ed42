"""Parts that a design may have or lack: what one begins with, and putting it in or taking it out."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

from ...design.design import Design, get, with_value
from ...design.measured_part import Measured
from ...design.station import Choke, FeedLine, Transmitter, Tuner, TunerCapacitor, TunerCoil

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
