"""Wire lengths that bring the feed point to resonance at the aims."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from ...design.design import Design
from ...design.fields import SOLVE
from ...engine.constants import C0
from ...engine.ports import terminate
from ...engine.soils import GroundKind
from ...engine.wire import Plan, Wire, plan, solve_ports
from ...errors import NoAnswer

LEAST_END_HEIGHT = 0.5
"""The ground kernels are held to be exact down to here. [m]"""
SHORTEST, LONGEST = 0.2, 200.0
STEP_LIMIT = 0.2
STEPS = 25
NEAR_ENOUGH = 0.05
"""Reactance at the aim that counts as none, on the coarse mesh. [ohm]"""

TrapImpedance = Callable[[np.ndarray], np.ndarray]


@dataclass(frozen=True, kw_only=True)
class Search:
    """A wire whose unknown lengths are sought: `make` hangs it, and there is one aim for each unknown."""

    make: Callable[[float, float | None], Wire]
    inner: float | None
    end: float | None
    has_trap: bool
    trap: TrapImpedance | None
    aims: tuple[float, ...]
    keys: tuple[str, ...]
    aim_keys: tuple[str, ...]


def reactances(
    wire: Wire, counts: Plan, aims: np.ndarray, trap: TrapImpedance | None, *, extrapolate: bool = False
) -> np.ndarray:
    """Return the reactance at the feed point at each aim, in ohm."""
    ports = solve_ports(
        wire, aims, counts, float(aims.max()), extrapolate=extrapolate, odd=False, power=False
    )
    loads = () if trap is None else (trap(aims),)
    return terminate(ports.impedance, *loads).impedance.imag


def solved_for(design: Design) -> dict[str, str]:
    """Return the band role whose aim each solved wire has to meet, by wire."""
    lengths, bands = design.antenna.lengths, dict(design.bands.items())
    role_of = {"inner": "upper", "end": "lower"}
    trap = design.antenna.trap is not None
    return {
        name: role if trap and role in bands else "lower"
        for name, role in role_of.items()
        if getattr(lengths, name) is SOLVE
    }


def find_lengths(
    search: Search, guess: tuple[float, float | None], *, thorough: bool = False
) -> tuple[float, float | None]:
    """Return inner and end wire for which the feed point is resonant at every aim.

    Newton steps on a coarse mesh, then one on the fine mesh's limit with the same slopes; `thorough` takes as
    many there as it needs. NoAnswer says which aim is missed and how near it came.
    """
    aims = np.array(search.aims)
    known = (search.inner, search.end) if search.has_trap else (search.inner,)
    x = np.array([g for g, k in zip(guess, known, strict=False) if k is None], float)
    wire = _hang(search, x)
    counts = plan(wire, float(aims.max()))
    miss = reactances(wire, counts, aims, search.trap)
    slopes = _slopes(search, x, counts, aims, miss)
    best = (math.inf, x, miss)
    for step in range(STEPS):
        size = float(np.abs(miss).max())
        if size < best[0]:
            best = (size, x, miss)
        if size < NEAR_ENOUGH:
            break
        move = _bounded(np.linalg.lstsq(slopes, -miss, rcond=None)[0], x)
        moved = np.clip(x + move, SHORTEST, LONGEST)
        try:
            new = reactances(_hang(search, moved), counts, aims, search.trap)
        except NoAnswer:
            raise _missed(search, x, miss, ends_too_low=True) from None
        move = moved - x
        if not np.any(move):
            raise _missed(search, best[1], best[2])
        if np.abs(new).max() > 1.5 * size and step:
            x, miss = moved, new
            slopes = _slopes(search, x, counts, aims, miss)
            continue
        slopes = _updated(slopes, move, new - miss)
        x, miss = moved, new
    else:
        raise _missed(search, best[1], best[2])
    miss = reactances(_hang(search, x), counts, aims, search.trap, extrapolate=True)
    for _ in range(STEPS if thorough else 1):
        if np.abs(miss).max() < NEAR_ENOUGH:
            break
        move = _bounded(np.linalg.solve(slopes, -miss), x)
        x = x + move
        wire = _hang(search, x)
        if thorough:
            new = reactances(wire, counts, aims, search.trap, extrapolate=True)
            slopes, miss = _updated(slopes, move, new - miss), new
    return _lengths(search, x)


def _updated(slopes: np.ndarray, move: np.ndarray, change: np.ndarray) -> np.ndarray:
    """Return slopes that are right along the step just made (Broyden's update)."""
    return slopes + np.outer(change - slopes @ move, move) / (move @ move)


def _lengths(search: Search, x: np.ndarray) -> tuple[float, float | None]:
    """Put the unknowns among the known lengths."""
    unknown = iter(x.tolist())
    inner = next(unknown) if search.inner is None else search.inner
    if not search.has_trap:
        return inner, None
    return inner, next(unknown) if search.end is None else search.end


def _hang(search: Search, x: np.ndarray) -> Wire:
    wire = search.make(*_lengths(search, x))
    if wire.ground.kind is not GroundKind.SPACE and wire.end_height < LEAST_END_HEIGHT:
        raise NoAnswer(
            "ends_too_low",
            search.keys[-1],
            {"end_height_m": wire.end_height},
            "hang it higher, or flatter, or raise the ends",
        )
    return wire


def _slopes(search: Search, x: np.ndarray, counts: Plan, aims: np.ndarray, miss: np.ndarray) -> np.ndarray:
    """Return the change of each reactance with each length, in ohm per metre."""
    columns = []
    for i in range(x.size):
        step = np.zeros_like(x)
        step[i] = -0.005 * x[i]
        near = reactances(_hang(search, x + step), counts, aims, search.trap)
        columns.append((near - miss) / step[i])
    return np.column_stack(columns)


def _bounded(move: np.ndarray, x: np.ndarray) -> np.ndarray:
    """Shorten a step that would change a length by more than the limit."""
    return move / max(1.0, float(np.max(np.abs(move) / x)) / STEP_LIMIT)


def _missed(search: Search, x: np.ndarray, miss: np.ndarray, *, ends_too_low: bool = False) -> NoAnswer:
    """Say which aim no length meets, and how near it came."""
    worst = int(np.argmax(np.abs(miss)))
    numbers = {"aim_hz": search.aims[worst], "reactance_left_ohm": float(miss[worst])}
    numbers |= {key.rpartition(".")[2] + "_m": float(v) for key, v in zip(search.keys, x, strict=True)}
    code = "ends_too_low" if ends_too_low else "aim_not_met"
    help = (
        "hang it higher, or flatter, or raise the ends"
        if ends_too_low
        else "another trap resonance, another L to C ratio, or set the wires yourself"
    )
    return NoAnswer(code, search.aim_keys[worst], numbers, help)


def first_guess(
    aims: dict[str, float], trap: TrapImpedance | None, inner: float | None, radius: float
) -> tuple[float, float | None]:
    """Return lengths to start from, taking the wire for a line of one characteristic impedance."""
    lower = aims["lower"]
    quarter = 0.237 * C0 / lower
    if trap is None:
        return quarter, None
    if inner is None:
        inner = 0.237 * C0 / aims["upper"] if "upper" in aims else 0.6 * quarter
    wave = 60 * (math.log(2 * quarter / radius) - 1)
    theta = 2 * math.pi * lower / C0 / 0.95
    reactance = float(trap(np.array([lower])).imag[0])
    inward = math.tan(min(theta * inner, 1.45)) + reactance / wave
    end = math.atan2(1.0, inward) / theta
    return inner, max(end, 0.05 * inner)


def slope_of(
    site_shape: str, height: float, side: float, end_height: float | None, angle: float | None
) -> float:
    """Return the angle of a side below the horizontal, in radians; NaN when it is too short for its drop."""
    if site_shape == "flat":
        return 0.0
    if angle is not None:
        return (math.pi - angle) / 2
    drop = height - (end_height or 0.0)
    return math.asin(drop / side) if drop < side else math.nan
