"""What was measured of a trap, kept with it: it takes the place of what is computed."""

from __future__ import annotations

from dataclasses import dataclass

from .fields import quantity


def _doubt(dimension: str, of: str, high: float) -> float:
    return quantity(
        dimension,
        f"doubt of the measured {of}",
        f"One standard deviation of the measured {of}.",
        default=0.0,
        low=0.0,
        high=high,
    )


@dataclass(frozen=True, kw_only=True)
class Measured:
    """What readings of the built trap came to, each with one standard deviation; what is unset is computed.

    A measured resonance alone leaves the capacitance as it was computed: coils vary more than capacitors.
    """

    resonance: float | None = quantity(
        "frequency",
        "measured resonance",
        "Resonance of the built trap by itself.",
        default=None,
        optional=True,
        low=1e6,
        high=100e6,
        example="14.05 MHz",
    )
    resonance_doubt: float = _doubt("frequency", "resonance", 10e6)
    inductance: float | None = quantity(
        "inductance",
        "measured inductance",
        "Inductance of the built coil at the trap's resonance.",
        default=None,
        optional=True,
        low=1e-8,
        high=1e-3,
        example="2.7 uH",
    )
    inductance_doubt: float = _doubt("inductance", "inductance", 1e-3)
    capacitance: float | None = quantity(
        "capacitance",
        "measured capacitance",
        "All capacitance of the built trap, with what the coil adds.",
        default=None,
        optional=True,
        low=1e-13,
        high=1e-7,
        example="48 pF",
    )
    capacitance_doubt: float = _doubt("capacitance", "capacitance", 1e-7)
    q: float | None = quantity(
        "ratio",
        "measured Q",
        "Q of the built trap by itself, coil and capacitor together.",
        default=None,
        optional=True,
        low=1.0,
        high=5000.0,
        example="240",
    )
    q_doubt: float = _doubt("ratio", "Q", 5000.0)
