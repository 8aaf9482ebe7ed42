"""The resonator backwards: any sufficient few of f0, L, C, R, R_D, Q and B give the rest.

R is the coil's series resistance, the capacitor is lossless, f0 is the LC frequency and B = f0/Q. Each of the
seven is then a product of powers of L, C and R: its logarithm is linear in ln L, ln C, ln R, so that ranks
decide what is enough and null vectors are the relations that several typed values must obey.
"""

from collections.abc import Mapping
from dataclasses import dataclass
from enum import StrEnum
from functools import cache

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]

ALLOWANCE = 1e-3
"""How far typed values may disagree beyond their rounding, as a part of the value. [1]"""

VALUE_RANGE = {"value": (1e-30, 1e30)}
"""Values accepted, in SI; wide enough for any circuit, narrow enough that no power of them overflows."""


class TankQuantity(StrEnum):
    """The seven quantities, by the letters they are typed with."""

    FREQUENCY = "f"
    INDUCTANCE = "L"
    CAPACITANCE = "C"
    RESISTANCE = "R"
    DYNAMIC_RESISTANCE = "RD"
    QUALITY = "Q"
    BANDWIDTH = "B"


class TankStatus(StrEnum):
    """How the given values determine the circuit."""

    INSUFFICIENT = "insufficient"
    EXACT = "exact"
    OVERDETERMINED_CONSISTENT = "overdetermined_consistent"
    CONTRADICTORY = "contradictory"


@dataclass(frozen=True, kw_only=True)
class Disagreement:
    """One given value against what the other given values make of it.

    Parameters
    ----------
    quantity : TankQuantity
        Which value.
    given : float
        The value as given. [SI]
    implied : float
        What the others imply. [SI]
    relative : float
        given/implied - 1. [1]
    rest_agrees : bool
        Whether the others agree among themselves: only then can this value alone be at fault.
    """

    quantity: TankQuantity
    given: float
    implied: float
    relative: float
    rest_agrees: bool


@dataclass(frozen=True, kw_only=True)
class TankSolution:
    """What the given values determine.

    Parameters
    ----------
    status : TankStatus
        Whether they are enough, and whether they agree.
    values : mapping of TankQuantity to float
        Every value they determine; where they disagree, the fit by least squares in the logarithms. [SI]
    doubt : mapping of TankQuantity to float
        How far rounding of the given values may move each of these, at the most. [1]
    max_log_residual : float
        Largest logarithmic distance of a given value from the fit. [1]
    missing : int
        How many more values are needed.
    would_help : tuple of TankQuantity
        Those of which one more would determine something new.
    relation : tuple of TankQuantity
        The given values whose relation is strained most; empty if no relation holds among them.
    strain : float
        Disagreement along that relation over what rounding and `ALLOWANCE` permit. [1]
    disagreements : tuple of Disagreement
        For contradictory values only: those that may be at fault alone first, the coarsest first among them.
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

    @property
    def suspects(self) -> tuple[Disagreement, ...]:
        """The values each of which, taken away, leaves the others in agreement."""
        return tuple(each for each in self.disagreements if each.rest_agrees)


# Exponents of L, C and R, and the logarithm of the factor before them.
_TWO_PI = float(np.log(2.0 * np.pi))
_POWERS: dict[TankQuantity, tuple[tuple[float, float, float], float]] = {
    TankQuantity.FREQUENCY: ((-0.5, -0.5, 0.0), -_TWO_PI),  # 1/(2 pi sqrt(L C))
    TankQuantity.INDUCTANCE: ((1.0, 0.0, 0.0), 0.0),
    TankQuantity.CAPACITANCE: ((0.0, 1.0, 0.0), 0.0),
    TankQuantity.RESISTANCE: ((0.0, 0.0, 1.0), 0.0),
    TankQuantity.DYNAMIC_RESISTANCE: ((1.0, -1.0, -1.0), 0.0),  # L/(C R)
    TankQuantity.QUALITY: ((0.5, -0.5, -1.0), 0.0),  # sqrt(L/C)/R
    TankQuantity.BANDWIDTH: ((-1.0, 0.0, 1.0), -_TWO_PI),  # f0/Q = R/(2 pi L)
}


def _rows(names: tuple[TankQuantity, ...]) -> FloatArray:
    return np.array([_POWERS[name][0] for name in names], dtype=float).reshape(len(names), 3)


def _rank(names: tuple[TankQuantity, ...]) -> int:
    return int(np.linalg.matrix_rank(_rows(names), tol=1e-9)) if names else 0


@cache
def relations() -> tuple[Mapping[TankQuantity, float], ...]:
    """Return every relation among as few of the seven as possible, as exponents whose product is fixed.

    Returns
    -------
    tuple of mapping of TankQuantity to number
        Exponents, the first of them 1. [1]

    Source
    ------
    Derived here: the null vectors of the smallest dependent sets of rows.
    """
    found: list[Mapping[TankQuantity, float]] = []
    for chosen in range(1, 2 ** len(TankQuantity)):
        names = tuple(name for bit, name in enumerate(TankQuantity) if chosen >> bit & 1)
        if 2 <= len(names) <= 4 and _rank(names) == len(names) - 1:
            null = np.linalg.svd(_rows(names).T)[2][-1]
            # A zero exponent means that a smaller set already holds this relation.
            if np.all(np.abs(null) > 1e-9):
                found.append(dict(zip(names, (null / null[0]).tolist(), strict=True)))
    return tuple(found)


def _strain(
    logs: Mapping[TankQuantity, float], permitted: Mapping[TankQuantity, float]
) -> tuple[float, tuple[TankQuantity, ...]]:
    """Return the largest strain of any relation among the values, and which relation it is.

    A strain up to 1 means that true values exist within what is permitted for each: by duality of linear
    programmes the least possible largest misfit is the largest over these relations.
    """
    worst, among = 0.0, ()
    for relation in relations():
        if relation.keys() <= logs.keys():
            misfit = sum(power * (logs[name] - _POWERS[name][1]) for name, power in relation.items())
            strain = abs(misfit) / sum(abs(power) * permitted[name] for name, power in relation.items())
            if strain > worst or not among:
                worst, among = strain, tuple(relation)
    return float(worst), among


def _fit(
    logs: Mapping[TankQuantity, float], permitted: Mapping[TankQuantity, float]
) -> tuple[dict[TankQuantity, float], dict[TankQuantity, FloatArray], float]:
    """Fit (ln L, ln C, ln R) by least squares, each value weighted by what is permitted for it.

    Returns the logarithm of every value determined, its derivatives by the given ones, the largest residual.
    """
    names = tuple(logs)
    rows = _rows(names)
    weight = np.array([1.0 / permitted[name] for name in names])
    aim = np.array([logs[name] - _POWERS[name][1] for name in names])
    inverse = np.linalg.pinv(rows * weight[:, None], rcond=1e-9) * weight
    solution = inverse @ aim
    values, gains = {}, {}
    for name in TankQuantity:
        power, offset = _POWERS[name]
        gain = np.array(power) @ inverse
        if np.allclose(gain @ rows, power, rtol=0.0, atol=1e-9):
            values[name], gains[name] = float(np.array(power) @ solution + offset), gain
    return values, gains, float(np.max(np.abs(rows @ solution - aim)))


def _checked(values: Mapping[str, float], what: str, low: float, high: float) -> dict[TankQuantity, float]:
    known = [quantity.value for quantity in TankQuantity]
    unknown = [name for name in values if name not in known]
    if unknown:
        raise ValueError(f"{what} must be named by {', '.join(known)}, not {unknown[0]!r}")
    for name, value in values.items():
        if not low <= value <= high:
            raise ValueError(f"{what} {name} must be from {low:g} to {high:g}, not {value:g}")
    return {quantity: float(values[quantity]) for quantity in TankQuantity if quantity in values}


def solve_tank(given: Mapping[str, float], slack: Mapping[str, float] | None = None) -> TankSolution:
    """Return what any of f0, L, C, R, R_D, Q and B determine of the circuit.

    Values are contradictory when no circuit has all of them within their rounding and `ALLOWANCE`.

    Parameters
    ----------
    given : mapping of str to float
        Values by the letters of `TankQuantity`, at least one. [SI], > 0
    slack : mapping of str to float
        Half a unit of the last digit typed, over the value; 0 for those left out. [1], 0 to 0.5

    Returns
    -------
    TankSolution
        Status, the values determined and what disagrees.

    Raises
    ------
    ValueError
        If a name is unknown, a value outside its limits or nothing is given.

    Source
    ------
    Derived here from the definitions of the seven quantities.
    """
    values = _checked(given, "value", *VALUE_RANGE["value"])
    if not values:
        raise ValueError("given must hold at least one value")
    rounding = dict.fromkeys(values, 0.0) | _checked(slack or {}, "slack", 0.0, 0.5)
    if len(rounding) > len(values):
        raise ValueError("slack must be given only for values that are given")
    names = tuple(values)
    logs = {name: float(np.log(value)) for name, value in values.items()}
    permitted = {name: ALLOWANCE + rounding[name] for name in names}
    rank = _rank(names)
    strain, relation = _strain(logs, permitted)
    fitted, gains, residual = _fit(logs, permitted)

    disagreements: tuple[Disagreement, ...] = ()
    if strain > 1.0:
        status = TankStatus.CONTRADICTORY
        disagreements = _disagreements(values, logs, permitted)
    elif rank < 3:
        status = TankStatus.INSUFFICIENT
    else:
        status = TankStatus.OVERDETERMINED_CONSISTENT if relation else TankStatus.EXACT
    found = {name: float(np.exp(value)) for name, value in fitted.items()}
    if not relation:  # nothing to compromise about: a typed value comes back as typed
        found |= values
    each = np.array([rounding[name] for name in names])
    return TankSolution(
        status=status,
        values=found,
        doubt={name: float(np.abs(gain) @ each) for name, gain in gains.items()},
        max_log_residual=residual,
        missing=3 - rank,
        would_help=tuple(name for name in TankQuantity if _rank((*names, name)) > rank),
        relation=relation,
        strain=strain,
        disagreements=disagreements,
    )


def _disagreements(
    values: Mapping[TankQuantity, float],
    logs: Mapping[TankQuantity, float],
    permitted: Mapping[TankQuantity, float],
) -> tuple[Disagreement, ...]:
    """Leave each value out in turn and compare it with what the others imply."""
    found: list[tuple[tuple[float, float], Disagreement]] = []
    for name, value in values.items():
        rest = {other: log for other, log in logs.items() if other != name}
        implied_log = _fit(rest, permitted)[0].get(name)
        if implied_log is None:
            continue
        strain = _strain(rest, permitted)[0]
        implied = float(np.exp(implied_log))
        disagreement = Disagreement(
            quantity=name,
            given=value,
            implied=implied,
            relative=value / implied - 1.0,
            rest_agrees=strain <= 1.0,
        )
        found.append(((max(strain, 1.0), -permitted[name]), disagreement))
    found.sort(key=lambda pair: pair[0])
    return tuple(disagreement for _, disagreement in found)
