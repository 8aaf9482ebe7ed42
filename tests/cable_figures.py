"""For the tests of cable traps: peak and Q of one, searched for on its impedance by scipy."""

from dataclasses import replace
from types import SimpleNamespace

import numpy as np
from scipy.optimize import brentq, minimize_scalar

from trapdesk.engine import cable_trap
from trapdesk.engine.cables import Line


def figures(trap):
    """Return resonance, peak, Q by the half-power points of one trap; it has resistance."""
    resonance = float(cable_trap.cable_trap_resonance(trap))
    # The coil's share of the loss is a scale for the search: the cable's makes the peak a few times wider.
    scale = trap.resistance / (2 * np.pi * resonance * trap.inductance)

    def size(x):
        """Return |Z| at x widths above the resonance."""
        return abs(complex(cable_trap.cable_trap_impedance(resonance * (1 + x * scale), trap)))

    within = {"bounds": (-2.0, 2.0), "method": "bounded", "options": {"xatol": 1e-9}}
    peak = minimize_scalar(lambda x: -size(x), **within).x
    edges = [brentq(lambda x: size(x) / size(peak) - np.sqrt(0.5), peak, peak + side) for side in (-4.0, 4.0)]
    return SimpleNamespace(
        resonance=resonance,
        electrical_length=2 * np.pi * resonance * trap.length / trap.line.velocity,
        peak_frequency=resonance * (1 + peak * scale),
        peak_impedance=size(peak),
        q=(1 / scale + peak) / (edges[1] - edges[0]),
    )


def low_inductance(trap):
    """Return the inductance at the terminals far below resonance, where losses would hide it left out."""
    lossless = replace(
        trap, resistance=0.0, line=Line(z0=trap.line.z0, velocity_factor=trap.line.velocity_factor)
    )
    return cable_trap.cable_trap_impedance(1e3, lossless).imag / (2e3 * np.pi)
