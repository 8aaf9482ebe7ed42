"""Signatures of broken antennas against an independent reference computation of the same wires."""

import json
from pathlib import Path

import numpy as np
import pytest

from trapdesk.services.antenna.solve import solve
from trapdesk.services.hung.faults import Bench
from trapdesk.services.hung.readings import Forward, Hoist
from trapdesk.services.hung.updating import latents_of, stage_of
from trapdesk.services.trials.ensemble import Ensemble
from trapdesk.store.toml_read import read_text

HERE = Path(__file__).parent / "reference"


REFERENCE = {
    case["id"]: case["expected"] for case in json.loads((HERE / "faults.json").read_text("utf-8"))["cases"]
}
DESIGN = """
format = 1
kind = "design"
[bands]
upper = {{ name = "upper", low = "{upper[0]} MHz", high = "{upper[1]} MHz" }}
lower = {{ name = "lower", low = "{lower[0]} MHz", high = "{lower[1]} MHz" }}
[antenna.wire]
diameter = "2 mm"
[antenna.lengths]
inner = "{lengths[0]} m"
end = "{lengths[1]} m"
[antenna.trap]
resonance = "{trap[0]} MHz"
body = "0 m"
coil = {{ kind = "given", inductance = "solve", q = {trap[1]} }}
capacitor = {{ kind = "given", capacitance = "{trap[2]} pF" }}
[site]
{site}
height = "10 m"
conductivity = "2 mS/m"
permittivity = 15
"""
VEE = DESIGN.format(
    upper=(14, 14.35),
    lower=(7, 7.2),
    lengths=(5.14, 4.08),
    trap=(14.0999981, 250, 40),
    site='shape = "vee"\nincluded_angle = "120 deg"',
)
FLAT = DESIGN.format(
    upper=(7, 7.2),
    lower=(3.5, 3.8),
    lengths=(10.02, 7.25),
    trap=(7.0500005, 200, 60),
    site='shape = "flat"',
)


@pytest.mark.parametrize(
    ("text", "case", "code", "band", "role"),
    [
        (VEE, "fail-4020-v120-open2", "trap_open_both", "20m", "upper"),
        (VEE, "fail-4020-v120-short2", "trap_shorted_both", "40m", "lower"),
        (FLAT, "fail-8040-flat-short1", "trap_shorted_one", "40m", "upper"),
        (FLAT, "fail-8040-flat-short1", "trap_shorted_one", "80m", "lower"),
        (FLAT, "fail-8040-flat-open1", "trap_open_one", "40m", "upper"),
        (FLAT, "fail-8040-flat-open1", "trap_open_one", "80m", "lower"),
        (FLAT, "fail-8040-flat-noend1", "end_wire_missing", "40m", "upper"),
        (FLAT, "fail-8040-flat-noend1", "end_wire_missing", "80m", "lower"),
    ],
)
def test_signatures_against_an_independent_reference(text, case, code, band, role):
    """Resonances of broken antennas, within 0.7 %: a coarse mesh, a stub for nothing, sums of differences."""
    expected = REFERENCE[case].get(f"{band}.f_res_hz")
    if expected is None:
        pytest.fail(f"{case} has no resonance on {band}")
    ensemble = Ensemble(solve(read_text(text)))
    here = Bench(ensemble)
    altered = here.shape(code, "")
    latents = latents_of(ensemble, 0, 0)
    forward = Forward(ensemble, latents, [Hoist()], stage_of(True), {}, altered)
    frequency = np.linspace(0.8, 1.25, 400) * expected["value"]
    ranges = here.ranges(role).values()
    low, high = min(r[0] for r in ranges), max(r[1] for r in ranges)
    frequency = frequency[(frequency > low) & (frequency < high)]
    z = np.zeros((1, forward.size))
    x = forward.feed(role, ("test",), frequency, forward.hoists[0], z)[0].imag
    rising = np.flatnonzero((x[:-1] < 0) & (x[1:] >= 0))
    found = frequency[rising[np.argmin(np.abs(frequency[rising] - expected["value"]))]]
    assert found == pytest.approx(expected["value"], rel=7e-3)
