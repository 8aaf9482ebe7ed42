"""Trials taken through the stages: as cut, traps tuned, brought to aim, wet."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from .ensemble import Ensemble, Outcome
from .traps import AIMED, Stage, Traps


def run_stage(
    ensemble: Ensemble,
    stages: tuple[Stage, ...],
    draws: Mapping[str, np.ndarray],
    count: int,
    most: Mapping[str, float] | None,
    free: Mapping[str, np.ndarray] | None = None,
    cut: Mapping[str, float] | None = None,
) -> tuple[dict[str, dict[str, Outcome]], dict[str, np.ndarray]]:
    """Return what every band does at each stage, and which trials no wire brought to aim, by stage.

    Stages that share their wires share their ports. `free` is what brings tuned traps to the aims,
    `cut` how much longer than computed the wires were cut.
    """
    groups: list[tuple[list[Stage], Mapping[str, np.ndarray] | None]] = []
    as_cut = [stage for stage in stages if not stage.aimed]
    longer = None if cut is None else {name: np.full(count, extra) for name, extra in cut.items()}
    groups += [(as_cut, longer)] if as_cut else []
    unreached = {stage.name: np.zeros(count, bool) for stage in stages}
    for tuned in (True, False):
        aimed = [stage for stage in stages if stage.aimed and stage.tuned is tuned]
        if aimed:
            dry = next((stage for stage in aimed if not stage.wet), aimed[0])
            known = free if dry == AIMED else None
            change = ensemble.to_aim(draws, _dry(dry), count, most, known)
            lost = np.any([np.isnan(value) for value in change.values()], axis=0)
            for stage in aimed:
                unreached[stage.name] = lost
            groups += [(aimed, {name: np.nan_to_num(value) for name, value in change.items()})]
    found: dict[str, dict[str, Outcome]] = {}
    for members, change in groups:
        features = ensemble.features(draws, count, change)
        traps: list[Traps | None] = [ensemble.traps(draws, stage, count) for stage in members]
        for role in ensemble.roles:
            for stage, pieces in zip(members, ensemble.outcome(role, features, traps), strict=True):
                found.setdefault(stage.name, {})[role] = _joined(pieces)
    return found, unreached


def _dry(stage: Stage) -> Stage:
    """Return the stage on the day the wires are adjusted: dry, and as warm as it then is."""
    return Stage(
        name=stage.name, tuned=stage.tuned, sealed=stage.sealed, sealed_first=stage.sealed_first, aimed=True
    )


def _joined(pieces: list[Outcome]) -> Outcome:
    names = ("dip", "dip_reflection", "aim", "worst", "volts", "loss", "reflection")
    return Outcome(**{n: np.concatenate([getattr(piece, n) for piece in pieces]) for n in names})
