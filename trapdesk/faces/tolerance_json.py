"""The ensemble as JSON: SI, unit in the key."""

from __future__ import annotations

from typing import Any

from ..services.trials.advice import ForYield, Improvement, Improvements
from ..services.trials.beliefs import Belief
from ..services.trials.tolerance import (
    RESULTS,
    Allowance,
    BandScatter,
    Scatter,
    StageScatter,
    Tolerance,
    Yield,
)
from .json_out import FORMAT


def document(
    found: Tolerance, advice: Improvements | None = None, chosen: ForYield | None = None
) -> dict[str, Any]:
    """Return everything for scripts: SI, unit in the key."""
    out: dict[str, Any] = {
        "format": FORMAT,
        "kind": "tolerance",
        "title": found.design.title,
        "seed": found.seed,
        "trials": found.trials,
        "wanted_trials": found.wanted_trials,
        "stopped": found.stopped,
        "swr_limit": found.design.station.swr_limit,
        "stages": {name: _stage(stage) for name, stage in found.stages.items()},
        "cutting": {name: _allowance(one, found.risk) for name, one in found.allowances.items()},
        "first_order": {
            "trap": None if found.check.trap is None else _pair(found.check.trap),
            "dips_hz": {role: _pair(pair) for role, pair in found.check.dips.items()},
        },
        "varies": {name: _belief(belief) for name, belief in found.varying.items()},
    }
    if advice is not None:
        out["advice"] = {
            "base": _yield(advice.base),
            "steps": [_step_document(step) for step in advice.steps],
            "then": [_step_document(step) for step in advice.then],
        }
    if chosen is not None:
        out["for_yield"] = {
            "stage": chosen.stage,
            "changes": {c.key: {"before": c.before, "after": c.after} for c in chosen.changes},
            "before": _yield(chosen.before),
            "after": _yield(chosen.after),
        }
    return out


def _pair(pair: tuple[float, float]) -> dict[str, float]:
    return {"first_order": pair[0], "trials": pair[1]}


def _yield(within: Yield) -> dict[str, Any]:
    return {
        "share": within.share,
        "low": within.low,
        "high": within.high,
        "passed": within.passed,
        "trials": within.trials,
    }


def _stage(stage: StageScatter) -> dict[str, Any]:
    return {
        "yield": _yield(stage.within),
        "not_brought_to_aim": stage.unreached,
        "bands": {role: _band(band) for role, band in stage.bands.items()},
    }


_KEYS = {
    "dip": "dip_hz",
    "aim_swr": "aim_swr",
    "worst_swr": "worst_swr",
    "volts": "trap_peak_v",
    "loss": "trap_share",
}


def _band(band: BandScatter) -> dict[str, Any]:
    curve = band.curve
    return {
        "name": band.name,
        "yield": _yield(band.within),
        "dip_outside": band.outside,
        **{_KEYS[name]: _scatter(band.results[name]) for name in RESULTS},
        "curve": {
            "f_hz": curve.frequency,
            "swr_5": curve.low,
            "swr_50": curve.middle,
            "swr_95": curve.high,
        },
    }


def _scatter(result: Scatter) -> dict[str, Any]:
    shares = result.causes
    return {
        "mean": result.mean,
        "deviation": result.deviation,
        "p5": result.low,
        "p50": result.middle,
        "p95": result.high,
        "worst_case_low": result.least,
        "worst_case_high": result.most,
        "causes": None if shares is None else {one.cause: one.share for one in shares.causes},
        "together": None if shares is None else shares.together,
    }


def _allowance(one: Allowance, risk: float) -> dict[str, Any]:
    return {
        "allowance_m": one.length,
        "risk": risk,
        "change_p5_m": one.shortest,
        "change_p95_m": one.longest,
        "reserve_m": one.reserve,
        "reserve_risk": one.reserve_risk,
    }


def _belief(belief: Belief) -> dict[str, Any]:
    low, high = belief.ends
    meaning = "limits" if belief.between else str(belief.meaning)
    return {"low": low, "high": high, "meaning": meaning, "alike": belief.alike if belief.pair else None}


def _step_document(step: Improvement) -> dict[str, Any]:
    return {"code": step.code, "yield": _yield(step.within), "gain": step.gain}
