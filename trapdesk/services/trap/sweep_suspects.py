"""Why a sweep does not look like a trap: the slips that are usually made, each tried on the data."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import numpy as np

from ...engine import fits
from ...engine.fits import Fitted, Sweep

MUCH_BETTER = 0.3
"""Errors left by a suspect over those without it, below which it is named. [1]"""


def fit(how: str, sweep: Sweep, delay: float, lead: float, probe: float = 0.0) -> Fitted:
    """Return the model of a way of measuring fitted to a sweep; ValueError where nothing resonates."""
    if how == "loop":
        return fits.fit_loop(sweep, delay)
    model = fits.fit_direct if how == "direct" else fits.fit_through
    return model(sweep, delay, lead, probe)


def _radians(wave: np.ndarray) -> np.ndarray:
    """Return waves whose angles were in radians and read as degrees."""
    return np.abs(wave) * np.exp(1j * np.degrees(np.angle(wave)))


SLIPS: dict[str, Callable[[np.ndarray], np.ndarray]] = {
    "angles_in_radians": _radians,
    "real_and_imaginary_swapped": lambda wave: wave.imag + 1j * wave.real,
    "sign_of_reactance": np.conj,
}
"""What may have gone wrong with the numbers, and how they are put right to see whether it did."""


def suspects(how: str, sweep: Sweep, plain: Fitted | None, delay: float, lead: float) -> tuple[str, ...]:
    """Return the codes of slips that would explain a sweep no model holds for, the likeliest first.

    `plain` is the fit that does not hold, None where there was nothing to fit.
    """
    found: list[tuple[float, str]] = []
    for code, mend in SLIPS.items():
        _try(found, code, plain, how, mended_by(mend, sweep), delay, lead)
    if how != "through":
        other = "direct" if how == "loop" else "loop"
        _try(found, f"how_is_{other}", plain, other, sweep, delay, lead)
    if sweep.transmission is not None and how != "through":
        _try(found, "how_is_through", plain, "through", sweep, delay, lead)
    return tuple(code for _, code in sorted(found))


def mended_by(mend: Callable[[np.ndarray], np.ndarray], sweep: Sweep) -> Sweep:
    """Return a sweep with its numbers put right from a slip."""
    waves = {name: getattr(sweep, name) for name in ("reflection", "transmission")}
    return replace(sweep, **{name: mend(wave) for name, wave in waves.items() if wave is not None})


def _try(
    found: list[tuple[float, str]],
    code: str,
    plain: Fitted | None,
    how: str,
    sweep: Sweep,
    delay: float,
    lead: float,
) -> None:
    """Add a suspect if the model fits with it and did not without."""
    try:
        fitted = fit(how, sweep, delay, lead)
    except ValueError:
        return
    if resonates(how, sweep, fitted):
        if fitted.holds or (plain is not None and fitted.structure < MUCH_BETTER * plain.structure):
            found.append((fitted.structure, code))


def resonates(how: str, sweep: Sweep, fitted: Fitted) -> bool:
    """Return whether a fit found a resonance within its sweep, clear of the noise."""
    values, sigmas = fitted.values, fitted.sigmas
    inside = sweep.frequency[0] <= values["resonance_hz"] <= sweep.frequency[-1]
    weak = how == "loop" and not values["coupling"] > 4 * sigmas["coupling"]
    return bool(inside and not weak and sigmas["q"] < values["q"] / 2)
