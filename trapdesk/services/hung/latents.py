"""What one trial of an antenna is: standard normal numbers, and the quantities they stand for."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from ...engine.cables import Line
from ..trials.beliefs import Belief
from ..trials.ensemble import WIRES

FOLD = 0.004
"""How well a fold of both sides' wires comes out as told. One sigma. [m], an estimate, no source"""
LINE = {"line_length": 0.01, "line_loss": 0.15, "line_z0": 0.02}
"""How far a line may be off what is listed, one sigma, relative. [1], an estimate, no source"""
NOT_NOW = ("weather", "rain", "aim_upper", "aim_lower")
"""What varies in other weather, or is no part of an antenna that hangs."""
TRAP = ("capacitor", "coil", "turns", "pitch", "former", "self_capacitance", "q", "tuning", "sealing")
SITE = ("height", "sag", "soil", "site", "temperature")
"""What belongs to the site and the day, and is forgotten at the next; all else is carried along."""
TUNED = ("tuning",)
"""What is drawn anew when the traps are tuned again."""


class Latents:
    """The columns of standard normal numbers of a trial, and the values they stand for.

    `spread` is how much farther than believed, about its middle, each quantity may be.
    """

    def __init__(
        self,
        varying: Mapping[str, Belief],
        moves: int,
        tunings: int,
        has_line: bool,
        has_end: bool,
        spread: float = 1.0,
    ) -> None:
        self.spread = spread
        self.varying = {name: belief for name, belief in varying.items() if name not in NOT_NOW}
        self.columns: dict[str, slice] = {}
        self._at = 0
        for name, belief in self.varying.items():
            self._add(name, 3 if belief.pair else 1)
        for again in range(1, tunings + 1):
            for name in TUNED:
                if name in self.varying:
                    self._add(f"{name} {again}", 3 if self.varying[name].pair else 1)
        self._wires = WIRES if has_end else WIRES[:1]
        for move in range(1, moves + 1):
            self._add(f"fold {move}", len(self._wires))
        if has_line:
            for name in LINE:
                self._add(name, 1)
        self.size = self._at

    def _add(self, name: str, count: int) -> None:
        self.columns[name] = slice(self._at, self._at + count)
        self._at += count

    def draws(self, z: np.ndarray, tunings: int = 0) -> dict[str, np.ndarray]:
        """Return the quantities of trials (trials, numbers) once the traps were tuned so many times again."""
        found = {}
        for name, belief in self.varying.items():
            column = f"{name} {tunings}" if tunings and name in TUNED else name
            own = z[:, self.columns[column]]
            mixed = own[:, 0]
            if belief.pair:
                mixed = belief.mixed(own[:, :1], own[:, 1:])
            middle = sum(belief.ends) / 2
            found[name] = middle + self.spread * (belief.shaped(mixed, None) - middle)
        return found

    def change(self, z: np.ndarray, meant: Mapping[str, float], moves: int) -> dict[str, np.ndarray]:
        """Return how much longer than computed each wire is after moves, which come out nearly as told."""
        found = {wire: np.full(z.shape[0], meant.get(wire, 0.0)) for wire in WIRES}
        for move in range(1, moves + 1):
            own = z[:, self.columns[f"fold {move}"]]
            for i, wire in enumerate(self._wires):
                found[wire] = found[wire] + FOLD * own[:, i]
        return found

    def line(self, z: np.ndarray, line: Line, length: float) -> tuple[Line, np.ndarray]:
        """Return the line of each trial and its length, (trials, 1); its speed counts as length."""

        def of(name: str) -> np.ndarray:
            return np.exp(LINE[name] * z[:, self.columns[name]])

        loss = of("line_loss")
        mine = Line(
            z0=line.z0 * of("line_z0"),
            velocity_factor=line.velocity_factor,
            skin_loss=line.skin_loss * loss,
            dielectric_loss=line.dielectric_loss * loss,
        )
        return mine, length * of("line_length")

    def kept(self) -> np.ndarray:
        """Return which numbers belong to the antenna, and stay with it at another site."""
        found = np.ones(self.size, bool)
        for name, columns in self.columns.items():
            if name in SITE or name in LINE:
                found[columns] = False
        return found
