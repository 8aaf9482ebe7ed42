"""The whole path from a design to its figures against an independent reference computation.

Source of every expected value: tests/reference/antenna.json and antenna-site.json, an independent
method-of-moments reference with exact ground whose own uncertainty travels with each value; that is the
tolerance here.
"""

import json
import math
from pathlib import Path

import numpy as np
import pytest

from trapdesk.design.design import Antenna, AntennaWire, Band, Bands, Design, Lengths, Site, Station
from trapdesk.design.fields import SOLVE
from trapdesk.design.parts import GivenCapacitor, GivenCoil, Trap
from trapdesk.engine.ports import terminate
from trapdesk.engine.wire import plan, solve_ports
from trapdesk.services.antenna.solve import at_frequencies, hang, solve
from trapdesk.services.trap.built import build

REFERENCE = Path(__file__).parent / "reference"
CASES = json.loads((REFERENCE / "antenna.json").read_text())["cases"]
SITES = json.loads((REFERENCE / "antenna-site.json").read_text())["cases"]
GROUNDS = {"free": "space", "perfect": "mirror", "real": "soil"}


def trap_of(given: dict) -> Trap:
    """Return a trap of a stated L, C and Q, lossless capacitor."""
    return Trap(
        coil=GivenCoil(inductance=given["L_H"], q=given["Q0"]),
        capacitor=GivenCapacitor(capacitance=given["C_F"]),
    )


def design_of(inputs: dict, bands: list[tuple[str, float]], lengths: Lengths) -> Design:
    """Return the design of a reference case; the first band is the upper one where there are two."""
    made = [Band(name=name, low=0.97 * centre, high=1.03 * centre, aim=centre) for name, centre in bands]
    geometry, wire, ground = inputs["geometry"], inputs["wire"], inputs["ground"]
    site = {"ground": GROUNDS[ground["kind"]]}
    if geometry["shape"] == "flat":
        site["height"] = geometry["height_m"] or 10.0
    else:
        site |= {"shape": "vee", "height": geometry["apex_m"]}
        site["included_angle"] = math.radians(geometry["included_deg"])
    if ground["kind"] == "real":
        site |= {"conductivity": ground["sigma_S_per_m"], "permittivity": ground["eps_r"]}
    metal = {"diameter": 2 * wire["radius_m"]}
    if wire["conductor"] == "perfect":
        metal["material"] = "perfect"
    else:
        metal["conductivity"] = wire["sigma_S_per_m"]
    if coating := wire.get("coating"):
        metal["coating"] = coating["outer_radius_m"] - wire["radius_m"]
        metal["coating_permittivity"] = coating["eps_r"]
    return Design(
        bands=Bands(lower=made[-1], upper=made[0] if len(made) == 2 else None),
        antenna=Antenna(
            wire=AntennaWire(**metal),
            lengths=lengths,
            trap=trap_of(inputs["trap"]) if "trap" in inputs else None,
        ),
        site=Site(**site),
        station=Station(mode="carrier"),
    )


def band_values(band, at) -> dict[str, float]:
    """Name a band's figures as the reference does; `at` are the figures at its listed frequencies."""
    found = {
        "R": band.aim_impedance.real,
        "X": band.aim_impedance.imag,
        "f_res_hz": band.resonance,
        "R_at_res_ohm": band.resonance_resistance,
        "f_swrmin_hz": band.dip,
        "swr_min": band.dip_swr,
        "eff_sky": band.shares.sky,
        "loss_wire": band.shares.wire,
        "loss_ground": band.shares.ground,
        "loss_traps": band.shares.trap,
        "I_feed_rms": band.feed_current,
    }
    if band.stress is not None:
        found["trap_V_peak"] = band.stress.peak_voltage
        found["trap_I_rms"] = band.stress.rms_current
        found["trap_W_each"] = band.stress.watts
    for one in at:
        mark = f"@{one.frequency / 1e6:.4f}MHz"
        found |= {"R" + mark: one.impedance.real, "X" + mark: one.impedance.imag, "swr" + mark: one.swr}
    return found


def outside(
    found: dict[str, float], expected: dict, prefix: str, extra: dict[str, float] | None = None
) -> list[str]:
    """Return every value that leaves its uncertainty, in words; fails when nothing could be compared."""
    shared = [key for key in found if prefix + key in expected]
    assert shared
    wrong = []
    for key in shared:
        want, allowed = expected[prefix + key], expected[prefix + key]["unc"] + (extra or {}).get(key, 0.0)
        if not abs(found[key] - want["value"]) <= allowed:
            wrong.append(f"{prefix}{key}: {found[key]:.7g} expected {want['value']:.7g} +- {allowed:.3g}")
    return wrong


@pytest.mark.parametrize("case", [c for c in CASES if c["kind"] == "eval"], ids=lambda c: c["id"])
def test_figures_are_those_of_the_reference(case):
    inputs = case["inputs"]
    lengths = Lengths(inner=inputs["lengths"]["inner_m"], end=inputs["lengths"].get("outer_m"))
    figures = solve(design_of(inputs, [(b["name"], b["centre_hz"]) for b in inputs["bands"]], lengths))
    wrong = []
    for given in inputs["bands"]:
        band = next(b for b in figures.bands.values() if b.name == given["name"])
        at = at_frequencies(figures, given.get("swr_at_hz", []))
        wrong += outside(band_values(band, at), case["expected"], given["name"] + ".")
    assert not wrong, "\n".join(wrong)


@pytest.mark.parametrize("case", [c for c in CASES if c["kind"] == "legs"], ids=lambda c: c["id"])
def test_solved_wires_are_those_of_the_reference(case):
    inputs, targets = case["inputs"], case["inputs"]["targets"]
    bands = [
        (name, targets[key]) for name, key in (("upper", "f_hi_hz"), ("lower", "f_lo_hz")) if key in targets
    ]
    lengths = Lengths(inner=SOLVE, end=SOLVE if "trap" in inputs else None)
    wire = solve(design_of(inputs, bands, lengths)).wire
    wrong = outside({"inner_m": wire.inner, "outer_m": wire.end}, case["expected"], "")
    assert not wrong, "\n".join(wrong)


def site_design(case: dict) -> Design:
    """Return the design of a case given as a polyline that is symmetric about its feed point."""
    inputs = dict(case["inputs"])
    points, legs = inputs["geometry"]["vertices_m"], inputs["legs_m"]["arm_A"]
    geometry = {"shape": "flat", "height_m": points[0][2]}
    if len(points) == 3:
        (_, _, top), (x, y, z) = points[1], points[2]
        half = math.atan2(math.hypot(x - points[1][0], y - points[1][1]), top - z)
        geometry = {"shape": "vee", "apex_m": top, "included_deg": 2 * math.degrees(half)}
    inputs |= {"geometry": geometry}
    if "traps" in inputs:
        inputs["trap"] = inputs["traps"][0]
    bands = [(b["name"], b["centre_hz"]) for b in inputs["bands"]]
    return design_of(inputs, bands, Lengths(inner=legs["inner_m"], end=legs.get("outer_m")))


@pytest.mark.parametrize("case", [c for c in SITES if c["kind"] == "eval"], ids=lambda c: c["id"])
def test_unequal_traps_are_those_of_the_reference(case):
    design = site_design(case)
    traps = [build(trap_of(t)) for t in case["inputs"].get("traps", [])]
    wire = hang(design, traps[0] if traps else None)
    wrong = []
    for given in case["inputs"]["bands"]:
        at = np.array([given["centre_hz"]])
        ports = solve_ports(wire, at, plan(wire, at[0]), at[0])
        closed = terminate(ports.impedance, *(t.impedance(at) for t in traps))
        z, currents = closed.impedance[0], closed.currents[0]
        amps = math.sqrt(100 / z.real)
        found = {"R": z.real, "X": z.imag, "I_feed_rms": amps}
        for name, form in (("eff_sky", ports.sky[0]), ("loss_wire", ports.loss[0])):
            found[name] = (np.conj(currents) @ form @ currents).real / z.real
        for k, trap in enumerate(traps, 1):
            load, current = trap.impedance(at)[0], abs(currents[k]) * amps
            found[f"trap{k}_V_peak"] = math.sqrt(2) * abs(load) * current
            found[f"trap{k}_I_rms"], found[f"trap{k}_W"] = current, load.real * current**2
        for i, row in enumerate(ports.impedance[0], 1):
            for j, value in enumerate(row, 1):
                found |= {f"Zoc{i}{j}_R": value.real, f"Zoc{i}{j}_X": value.imag}
        wrong += outside(found, case["expected"], given["name"] + ".")
    assert not wrong, "\n".join(wrong)


@pytest.mark.parametrize("case", [c for c in SITES if c["kind"] == "sensitivity"], ids=lambda c: c["id"])
def test_effects_are_those_of_the_reference(case):
    # Effects are first-order differences on the coarse mesh, 0.4 % off the limit of ever finer ones, and
    # shown to two digits. What an end wire does to its trap's band is the small rest of two large terms: it
    # is held against what the inner wire does there.
    figures = solve(site_design(case), site_effects=True)
    wrong = []
    for band in figures.bands.values():
        effects = band.effects
        found = {
            "f_res_hz": band.resonance,
            "R_at_res_ohm": band.resonance_resistance,
            "df_res_inner_hz_per_cm": effects.inner / 100,
            "df_res_outer_hz_per_cm": effects.end / 100,
            "df_res_trapf0_by_C_hz_per_percent": effects.trap / 100,
            "df_res_height_hz_per_m": effects.height,
        }
        extra = {key: 0.006 * abs(value) for key, value in found.items() if key.startswith("df_")}
        extra["df_res_outer_hz_per_cm"] = 0.006 * max(abs(effects.inner), abs(effects.end)) / 100
        wrong += outside(found, case["expected"], band.name + ".", extra)
    assert not wrong, "\n".join(wrong)
