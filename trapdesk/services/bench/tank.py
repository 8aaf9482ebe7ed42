"""A resonator from any few of its quantities: the rest of them, and how the finished circuit behaves."""

from collections.abc import Mapping
from dataclasses import dataclass
from types import MappingProxyType

import numpy as np

from ...engine import resonances, resonator
from ...engine.tank import Disagreement, TankQuantity, TankStatus, solve_tank


@dataclass(frozen=True, kw_only=True)
class TankBehaviour:
    """What the circuit does, its capacitor lossless; None stands for what does not exist.

    Parameters
    ----------
    lc_resonance : float
        Equal reactances. [Hz]
    unity_power_factor_resonance : float or None
        Purely resistive. [Hz]
    unity_power_factor : str
        Whether that is at "one" frequency or at "none".
    peak_resonance : float or None
        Largest |Z|. [Hz]
    peak_impedance : float or None
        Largest |Z|. [ohm]
    half_power_low, half_power_high : float or None
        |Z| down by sqrt(2) from its largest. [Hz]
    half_power_width : float or None
        Distance of the two. [Hz]
    dynamic_resistance : float or None
        Exact, at unity power factor. [ohm]
    dynamic_resistance_high_q : float
        L/(C R). [ohm]
    dynamic_resistance_difference : float or None
        The former less the latter: nothing but rounding, since the capacitor is lossless. [ohm]
    peak_excess : float or None
        Largest |Z| over L/(C R), less 1: about 1/(2 Q^2). [1]
    q_components : float
        w0 L/R. [1]
    q_dynamic : float or None
        Exact dynamic resistance over w0 L. [1]
    q_half_power : float or None
        Frequency of largest |Z| over the half-power width. [1]
    q_peak : float or None
        Largest |Z| over the capacitor's reactance there. [1]
    """

    lc_resonance: float
    unity_power_factor_resonance: float | None
    unity_power_factor: str
    peak_resonance: float | None
    peak_impedance: float | None
    half_power_low: float | None
    half_power_high: float | None
    half_power_width: float | None
    dynamic_resistance: float | None
    dynamic_resistance_high_q: float
    dynamic_resistance_difference: float | None
    peak_excess: float | None
    q_components: float
    q_dynamic: float | None
    q_half_power: float | None
    q_peak: float | None


@dataclass(frozen=True, kw_only=True)
class TankAnswer:
    """What the given values determine; the fields up to `disagreements` are those of `TankSolution`.

    Parameters
    ----------
    status : TankStatus
        Whether the values are enough, and whether they agree.
    values : mapping of TankQuantity to float
        Every value determined: all seven when they are enough. [SI]
    doubt : mapping of TankQuantity to float
        How far rounding of what was typed may move each, at the most. [1]
    max_log_residual : float
        Largest logarithmic distance of a given value from the fit. [1]
    missing : int
        How many more values are needed.
    would_help : tuple of TankQuantity
        Those of which one more would determine something new.
    relation : tuple of TankQuantity
        The given values whose relation is strained most.
    strain : float
        Disagreement along that relation over what is permitted; above 1 it is a contradiction. [1]
    disagreements : tuple of Disagreement
        What each given value differs by from what the others imply, likeliest culprit first.
    suspects : tuple of Disagreement
        Those of them that alone can be at fault; a single one names the culprit.
    behaviour : TankBehaviour or None
        None while values are missing or contradict each other.
    """

    status: TankStatus
    values: Mapping[TankQuantity, float]
    doubt: Mapping[TankQuantity, float]
    max_log_residual: float
    missing: int
    would_help: tuple[TankQuantity, ...]
    relation: tuple[TankQuantity, ...]
    strain: float
    disagreements: tuple[Disagreement, ...]
    suspects: tuple[Disagreement, ...]
    behaviour: TankBehaviour | None


def behaviour(inductance: float, capacitance: float, coil_resistance: float) -> TankBehaviour:
    """Return how a coil with series resistance and a lossless capacitor behave in parallel.

    Parameters
    ----------
    inductance : float
        Coil inductance. [H], > 0
    capacitance : float
        All capacitance across the coil. [F], > 0
    coil_resistance : float
        Series resistance of the coil. [ohm], > 0

    Returns
    -------
    TankBehaviour
        Resonances, peak, width, dynamic resistance and Q by each definition.

    Raises
    ------
    ValueError
        If any value is outside the limits above; NaN counts as outside.
    """
    parts = (inductance, capacitance, coil_resistance)
    low, high = resonances.half_power_frequencies(*parts)
    exact = resonances.dynamic_resistance(*parts)
    high_q = resonances.dynamic_resistance_high_q(*parts)
    largest = resonances.peak_impedance(*parts)
    q = resonances.qualities(*parts)
    return TankBehaviour(
        lc_resonance=float(resonator.lc_resonance(inductance, capacitance)),
        unity_power_factor_resonance=_real(resonances.unity_power_factor_resonance(*parts)),
        unity_power_factor=str(resonances.unity_power_factor_status(*parts)),
        peak_resonance=_real(resonances.peak_resonance(*parts)),
        peak_impedance=_real(largest),
        half_power_low=_real(low),
        half_power_high=_real(high),
        half_power_width=_real(resonances.bandwidth(*parts)),
        dynamic_resistance=_real(exact),
        dynamic_resistance_high_q=float(high_q),
        dynamic_resistance_difference=_real(exact - high_q),
        peak_excess=_real(largest / high_q - 1.0),
        q_components=float(q.components),
        q_dynamic=_real(q.dynamic),
        q_half_power=_real(q.half_power),
        q_peak=_real(q.peak),
    )


def _real(value: float) -> float | None:
    return float(value) if np.isfinite(value) else None


def answer(given: Mapping[str, float], slack: Mapping[str, float] | None = None) -> TankAnswer:
    """Return what any of f, L, C, R, RD, Q and B make of a resonator.

    Parameters
    ----------
    given : mapping of str to float
        Values by the letters of `TankQuantity`, at least one. [SI], > 0
    slack : mapping of str to float
        Half a unit of the last digit typed, over the value; 0 for those left out. [1], 0 to 0.5

    Returns
    -------
    TankAnswer
        The values determined, what is missing or disagrees, and the behaviour when nothing does.

    Raises
    ------
    ValueError
        If a name is unknown, a value outside its limits or nothing is given.
    """
    solution = solve_tank(given, slack)
    finished = solution.status in (TankStatus.EXACT, TankStatus.OVERDETERMINED_CONSISTENT)
    parts = (TankQuantity.INDUCTANCE, TankQuantity.CAPACITANCE, TankQuantity.RESISTANCE)
    return TankAnswer(
        status=solution.status,
        values=MappingProxyType(dict(solution.values)),
        doubt=MappingProxyType(dict(solution.doubt)),
        max_log_residual=solution.max_log_residual,
        missing=solution.missing,
        would_help=solution.would_help,
        relation=solution.relation,
        strain=solution.strain,
        disagreements=solution.disagreements,
        suspects=solution.suspects,
        behaviour=behaviour(*(solution.values[part] for part in parts)) if finished else None,
    )
