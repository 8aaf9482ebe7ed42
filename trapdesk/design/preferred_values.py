"""Preferred values of parts, IEC 60063: what a capacitor can be bought as."""

from __future__ import annotations

_E24 = (10, 11, 12, 13, 15, 16, 18, 20, 22, 24, 27, 30, 33, 36, 39, 43, 47, 51, 56, 62, 68, 75, 82, 91)


def _fine_series(count: int) -> tuple[float, ...]:
    """Return a series of three digits: powers of ten rounded, but for one value of the finest."""
    values = (round(100 * 10 ** (step / count)) / 10 for step in range(count))
    return tuple(92.0 if value == 91.9 else value for value in values)


SERIES: dict[str, tuple[float, ...]] = {
    "E3": _E24[::8],
    "E6": _E24[::4],
    "E12": _E24[::2],
    "E24": _E24,
    "E48": _fine_series(48),
    "E96": _fine_series(96),
    "E192": _fine_series(192),
}
"""One decade of each series, 10 up to below 100; 920 in place of 919 in E192.

E24 was read in copies of the table, the finer series are from memory.
"""
