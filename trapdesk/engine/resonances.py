"""What a parallel resonator is known by: where it resonates, how high, how wide, how good.

Symbols as in `resonator`. With w0 = 1/sqrt(lc) and rho = sqrt(l/c), the closed forms use the pure numbers
a = r/rho, b = r_c/rho, g = rho/r_p and u = (w/w0)^2; then |Z|^2 = rho^2 P(u)/Q(u) with
P = (a^2 + u)(1 + b^2 u) and Q = (A - B u)^2 + d^2 u, where A = 1 + g a, B = 1 + g b, d = a + b + g(1 + a b).
Parts are taken as constant, with their values near resonance.
"""

from dataclasses import dataclass
from enum import StrEnum

import numpy as np
from numpy.typing import ArrayLike, NDArray

from .resonator import check_parts, lc_resonance

FloatArray = NDArray[np.float64]

ROUNDING = 16.0 * np.finfo(float).eps
"""Relative size below which a difference of two rounded terms is taken for zero."""


class UnityPowerFactor(StrEnum):
    """At how many frequencies the circuit is purely resistive."""

    ONE = "one"
    NONE = "none"
    EVERY = "every"


@dataclass(frozen=True, kw_only=True)
class Qualities:
    """The quality factor by each of its definitions; they agree to the order of 1/Q^2."""

    components: FloatArray
    """1/Q = (r + r_c)/(w0 l) + w0 l/r_p, at the LC frequency."""
    dynamic: FloatArray
    """Exact dynamic resistance over w0 l, at the LC frequency; NaN without unity power factor."""
    half_power: FloatArray
    """Frequency of largest |Z| over the half-power width; NaN where a side does not exist."""
    peak: FloatArray
    """Largest |Z| over the capacitor's reactance at that frequency; NaN without a peak."""


@dataclass(frozen=True, kw_only=True)
class _Circuit:
    """The checked parts: LC frequency, characteristic resistance rho, pure numbers."""

    lc: FloatArray
    rho: FloatArray
    a: FloatArray
    b: FloatArray
    g: FloatArray


def _circuit(
    inductance: ArrayLike,
    capacitance: ArrayLike,
    coil_resistance: ArrayLike = 0.0,
    capacitor_resistance: ArrayLike = 0.0,
    shunt_resistance: ArrayLike = np.inf,
) -> _Circuit:
    check_parts(inductance, capacitance, coil_resistance, capacitor_resistance, shunt_resistance)
    rho = np.sqrt(np.asarray(inductance, dtype=float)) / np.sqrt(np.asarray(capacitance, dtype=float))
    pure = (coil_resistance / rho, capacitor_resistance / rho, rho / shunt_resistance)
    lc, rho, a, b, g = np.broadcast_arrays(lc_resonance(inductance, capacitance), rho, *pure)
    return _Circuit(lc=lc, rho=rho, a=a, b=b, g=g)


def _near_unity(value: FloatArray) -> FloatArray:
    """Return 1 - value^2, with differences of rounding size put to zero."""
    difference = (1.0 - value) * (1.0 + value)
    return np.where(np.abs(difference) <= ROUNDING, 0.0, difference)


def unity_power_factor_status(
    inductance: ArrayLike,
    capacitance: ArrayLike,
    coil_resistance: ArrayLike,
    capacitor_resistance: ArrayLike = 0.0,
) -> NDArray[np.str_]:
    """Return whether the circuit is purely resistive at one frequency, at none or at every one.

    At none when only one of r and r_c exceeds sqrt(l/c) or equals it, at every one when both equal it.

    Parameters
    ----------
    inductance, capacitance, coil_resistance, capacitor_resistance : float or array
        The parts, within the limits of `impedance`. [H], [F], [ohm], [ohm]

    Returns
    -------
    array of str
        Values of `UnityPowerFactor`.

    Raises
    ------
    ValueError
        If any value is outside those limits; NaN counts as outside.

    Source
    ------
    Derived here: Im Y = 0 at u = (1 - a^2)/(1 - b^2), which is above 0, is not, or is 0/0.
    """
    parts = _circuit(inductance, capacitance, coil_resistance, capacitor_resistance)
    coil, capacitor = _near_unity(parts.a), _near_unity(parts.b)
    one = np.where(coil * capacitor > 0.0, UnityPowerFactor.ONE.value, UnityPowerFactor.NONE.value)
    return np.where((coil == 0.0) & (capacitor == 0.0), UnityPowerFactor.EVERY.value, one)[()]


def unity_power_factor_resonance(
    inductance: ArrayLike,
    capacitance: ArrayLike,
    coil_resistance: ArrayLike,
    capacitor_resistance: ArrayLike = 0.0,
) -> FloatArray:
    """Return the frequency at which the circuit is purely resistive; a shunt does not move it.

    Parameters
    ----------
    inductance, capacitance, coil_resistance, capacitor_resistance : float or array
        The parts, within the limits of `impedance`. [H], [F], [ohm], [ohm]

    Returns
    -------
    array
        Frequency; NaN where there is none or any would do (`unity_power_factor_status` tells which). [Hz]

    Raises
    ------
    ValueError
        If any value is outside those limits; NaN counts as outside.

    Source
    ------
    Derived here: Im Y = 0 at u = (1 - a^2)/(1 - b^2).
    """
    circuit = _circuit(inductance, capacitance, coil_resistance, capacitor_resistance)
    coil, capacitor = _near_unity(circuit.a), _near_unity(circuit.b)
    one = coil * capacitor > 0.0
    # Im Y = 0 gives u = (1 - a^2)/(1 - b^2).
    u = np.divide(coil, capacitor, out=np.full(one.shape, np.nan), where=one)
    return (circuit.lc * np.sqrt(u))[()]


@dataclass(frozen=True, kw_only=True)
class _Peak:
    """Where |Z|^2 is largest, and what its quadratics are there; NaN where it has no peak."""

    u: FloatArray
    top: FloatArray
    bottom: FloatArray
    slope: FloatArray


def _peak(circuit: _Circuit) -> _Peak:
    """Solve (P/Q)' = 0, that is e2 u^2 - 2 e1 u - e0 = 0.

    Where e0 and e2 are both positive one root is positive and it is the largest |Z| of all. Otherwise |Z| is
    largest at an end of the frequency axis: e0 <= 0 < e2 implies b < a, hence e1 < 0, and both roots are
    negative; e2 <= 0 < e0 mirrors this; with both <= 0 the only root is a minimum.
    """
    a, b, g = circuit.a, circuit.b, circuit.g
    big_a, big_b, d = 1.0 + g * a, 1.0 + g * b, a + b + g * (1.0 + a * b)
    s, t = 1.0 + (a * b) ** 2, d * d - 2.0 * big_a * big_b
    e0 = s * big_a**2 - a * a * t
    e1 = (b - a) * (a + b + 2.0 * g * a * b)
    e2 = s * big_b**2 - b * b * t
    exists = (e0 > 0.0) & (e2 > 0.0)
    with np.errstate(divide="ignore", invalid="ignore"):
        root = np.sqrt(e1 * e1 + e0 * e2)
        u = np.where(exists, np.where(e1 >= 0.0, (e1 + root) / e2, e0 / (root - e1)), np.nan)
    return _Peak(
        u=u,
        top=(a * a + u) * (1.0 + b * b * u),
        bottom=(big_a - big_b * u) ** 2 + d * d * u,
        slope=s + 2.0 * b * b * u,
    )


def peak_resonance(
    inductance: ArrayLike,
    capacitance: ArrayLike,
    coil_resistance: ArrayLike,
    capacitor_resistance: ArrayLike = 0.0,
    shunt_resistance: ArrayLike = np.inf,
) -> FloatArray:
    """Return the frequency of largest |Z|.

    Parameters
    ----------
    inductance, capacitance, coil_resistance, capacitor_resistance, shunt_resistance : float or array
        The parts, within the limits of `impedance`. [H], [F], [ohm], [ohm], [ohm]

    Returns
    -------
    array
        Frequency; NaN where the loss leaves no peak (|Z| largest at zero or infinite frequency). [Hz]

    Raises
    ------
    ValueError
        If any value is outside those limits; NaN counts as outside.

    Source
    ------
    Derived here: (P/Q)' = 0, a quadratic in u.
    """
    circuit = _circuit(inductance, capacitance, coil_resistance, capacitor_resistance, shunt_resistance)
    return (circuit.lc * np.sqrt(_peak(circuit).u))[()]


def peak_impedance(
    inductance: ArrayLike,
    capacitance: ArrayLike,
    coil_resistance: ArrayLike,
    capacitor_resistance: ArrayLike = 0.0,
    shunt_resistance: ArrayLike = np.inf,
) -> FloatArray:
    """Return the largest |Z| over all frequencies.

    Parameters
    ----------
    inductance, capacitance, coil_resistance, capacitor_resistance, shunt_resistance : float or array
        The parts, within the limits of `impedance`. [H], [F], [ohm], [ohm], [ohm]

    Returns
    -------
    array
        Magnitude; infinite without loss, NaN where there is no peak. [ohm]

    Raises
    ------
    ValueError
        If any value is outside those limits; NaN counts as outside.

    Source
    ------
    Derived here: |Z| where (P/Q)' = 0.
    """
    circuit = _circuit(inductance, capacitance, coil_resistance, capacitor_resistance, shunt_resistance)
    peak = _peak(circuit)
    with np.errstate(divide="ignore"):
        return (circuit.rho * np.sqrt(peak.top / peak.bottom))[()]


def _half_power(circuit: _Circuit) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Return u at the lower and upper half-power point, and the width in u, each NaN where it is missing.

    About the peak, u = u_m + v, the condition P/Q = P_m/(2 Q_m) is k v^2 - Q_m P'_m v - P_m Q_m = 0: the
    width comes out of it to full precision at any Q, which a difference of two frequencies would not give.
    """
    peak = _peak(circuit)
    big_a, big_b = 1.0 + circuit.g * circuit.a, 1.0 + circuit.g * circuit.b
    k = peak.top * big_b**2 - 2.0 * peak.bottom * circuit.b**2
    low = peak.top * big_a**2 - 2.0 * peak.bottom * circuit.a**2
    linear = peak.bottom * peak.slope
    with np.errstate(divide="ignore", invalid="ignore"):
        root = np.sqrt(linear * linear + 4.0 * k * peak.top * peak.bottom)
        upper = np.where(k > 0.0, peak.u + (linear + root) / (2.0 * k), np.nan)
        lower = np.where(low > 0.0, low / (k * peak.u + 0.5 * (linear + root)), np.nan)
        width = np.where((k > 0.0) & (low > 0.0), root / k, np.nan)
    return lower, upper, width


def half_power_frequencies(
    inductance: ArrayLike,
    capacitance: ArrayLike,
    coil_resistance: ArrayLike,
    capacitor_resistance: ArrayLike = 0.0,
    shunt_resistance: ArrayLike = np.inf,
) -> tuple[FloatArray, FloatArray]:
    """Return the frequencies below and above the peak at which |Z| is its largest value over sqrt(2).

    Parameters
    ----------
    inductance, capacitance, coil_resistance, capacitor_resistance, shunt_resistance : float or array
        The parts, within the limits of `impedance`. [H], [F], [ohm], [ohm], [ohm]

    Returns
    -------
    tuple of two arrays
        Lower and upper frequency; NaN where |Z| does not fall so far on that side. [Hz]

    Raises
    ------
    ValueError
        If any value is outside those limits; NaN counts as outside.

    Source
    ------
    Derived here: P/Q = P_m/(2 Q_m) about the peak, a quadratic in u - u_m.
    """
    circuit = _circuit(inductance, capacitance, coil_resistance, capacitor_resistance, shunt_resistance)
    lower, upper, _ = _half_power(circuit)
    return (circuit.lc * np.sqrt(lower))[()], (circuit.lc * np.sqrt(upper))[()]


def bandwidth(
    inductance: ArrayLike,
    capacitance: ArrayLike,
    coil_resistance: ArrayLike,
    capacitor_resistance: ArrayLike = 0.0,
    shunt_resistance: ArrayLike = np.inf,
) -> FloatArray:
    """Return the distance between the half-power frequencies.

    Parameters
    ----------
    inductance, capacitance, coil_resistance, capacitor_resistance, shunt_resistance : float or array
        The parts, within the limits of `impedance`. [H], [F], [ohm], [ohm], [ohm]

    Returns
    -------
    array
        Width, 0 without loss; NaN where a side does not exist. [Hz]

    Raises
    ------
    ValueError
        If any value is outside those limits; NaN counts as outside.

    Source
    ------
    Derived here: the distance of the roots of that quadratic, by its discriminant.
    """
    circuit = _circuit(inductance, capacitance, coil_resistance, capacitor_resistance, shunt_resistance)
    lower, upper, width = _half_power(circuit)
    return (circuit.lc * width / (np.sqrt(lower) + np.sqrt(upper)))[()]


def dynamic_resistance(
    inductance: ArrayLike,
    capacitance: ArrayLike,
    coil_resistance: ArrayLike,
    capacitor_resistance: ArrayLike = 0.0,
    shunt_resistance: ArrayLike = np.inf,
) -> FloatArray:
    """Return the resistance the circuit shows at unity power factor.

    Parameters
    ----------
    inductance, capacitance, coil_resistance, capacitor_resistance, shunt_resistance : float or array
        The parts, within the limits of `impedance`. [H], [F], [ohm], [ohm], [ohm]

    Returns
    -------
    array
        Resistance; infinite without loss, NaN where unity power factor does not occur. [ohm]

    Raises
    ------
    ValueError
        If any value is outside those limits; NaN counts as outside.

    Source
    ------
    Derived here: the branches' conductances at unity power factor add up to (a + b)/(1 + a b)/rho.
    """
    circuit = _circuit(inductance, capacitance, coil_resistance, capacitor_resistance, shunt_resistance)
    a, b, g = circuit.a, circuit.b, circuit.g
    status = unity_power_factor_status(inductance, capacitance, coil_resistance, capacitor_resistance)
    # At u = (1 - a^2)/(1 - b^2) the branches' conductances add up to (a + b)/(1 + a b)/rho.
    with np.errstate(divide="ignore"):
        exact = circuit.rho / (g + (a + b) / (1.0 + a * b))
    return np.where(status == UnityPowerFactor.NONE.value, np.nan, exact)[()]


def dynamic_resistance_high_q(
    inductance: ArrayLike,
    capacitance: ArrayLike,
    coil_resistance: ArrayLike,
    capacitor_resistance: ArrayLike = 0.0,
    shunt_resistance: ArrayLike = np.inf,
) -> FloatArray:
    """Return l/(c (r + r_c)) with the shunt in parallel, exact only for a lossless capacitor.

    Parameters
    ----------
    inductance, capacitance, coil_resistance, capacitor_resistance, shunt_resistance : float or array
        The parts, within the limits of `impedance`. [H], [F], [ohm], [ohm], [ohm]

    Returns
    -------
    array
        Resistance; infinite without loss. [ohm]

    Raises
    ------
    ValueError
        If any value is outside those limits; NaN counts as outside.

    Source
    ------
    Definition, found in every text on the circuit: l/(c r) with all series loss in r.
    """
    circuit = _circuit(inductance, capacitance, coil_resistance, capacitor_resistance, shunt_resistance)
    with np.errstate(divide="ignore"):
        return (circuit.rho / (circuit.g + circuit.a + circuit.b))[()]


def qualities(
    inductance: ArrayLike,
    capacitance: ArrayLike,
    coil_resistance: ArrayLike,
    capacitor_resistance: ArrayLike = 0.0,
    shunt_resistance: ArrayLike = np.inf,
) -> Qualities:
    """Return the quality factor by every definition in use.

    Parameters
    ----------
    inductance, capacitance, coil_resistance, capacitor_resistance, shunt_resistance : float or array
        The parts, within the limits of `impedance`. [H], [F], [ohm], [ohm], [ohm]

    Returns
    -------
    Qualities
        Each definition, infinite without loss, NaN where it does not apply. [1]

    Raises
    ------
    ValueError
        If any value is outside those limits; NaN counts as outside.

    Source
    ------
    Definition of each; derived here as closed forms in a, b, g and u of the peak.
    """
    parts = (inductance, capacitance, coil_resistance, capacitor_resistance, shunt_resistance)
    circuit = _circuit(*parts)
    peak = _peak(circuit)
    with np.errstate(divide="ignore"):
        return Qualities(
            components=(1.0 / (circuit.a + circuit.b + circuit.g))[()],
            dynamic=(dynamic_resistance(*parts) / circuit.rho)[()],
            half_power=(circuit.lc * np.sqrt(peak.u) / bandwidth(*parts))[()],
            peak=(np.sqrt(peak.u * peak.top / peak.bottom))[()],
        )
