"""Frequencies as they are typed for an antenna, several at once."""

from __future__ import annotations

from collections.abc import Sequence

from ..errors import BadInput, Fault
from ..units import units

LOWEST, HIGHEST = 1e6, 100e6
"""Between these the wire and its ground are computed. [Hz]"""


def frequencies_of(texts: Sequence[str]) -> list[float]:
    """Return the frequencies of --at in Hz; commas separate them, so decimals take a point."""
    if not texts:
        return []
    found, faults = [], []
    for piece in (piece for text in texts for piece in text.split(",")):
        try:
            frequency = units.read(piece, units.Dimension.FREQUENCY, "--at")
        except BadInput as refused:
            help = "commas separate frequencies, a decimal takes a point: --at 7.05MHz,14.2MHz"
            faults += [Fault(f.where, f.code, f.value or piece, f.limit, help) for f in refused.faults]
            continue
        if not LOWEST <= frequency <= HIGHEST:
            limit = f"{LOWEST / 1e6:.0f} to {HIGHEST / 1e6:.0f} MHz"
            faults += [Fault("--at", "outside the range", piece, limit)]
        found += [frequency]
    if faults:
        raise BadInput(faults)
    return found
