"""How long a design takes to its figures, in yardsticks, and how much memory they ask for.

No coil is remembered from one run to the next. Only what belongs to no design stays: Gauss rules, directions
of the sky, the table of Bessel functions.
"""

import math
import subprocess
import sys
from dataclasses import replace

import pytest

from tests.bench.yardstick import ratio, record
from trapdesk.design.design import Shape, Site, with_value
from trapdesk.design.fields import SOLVE
from trapdesk.design.parts import GivenCoil, Solenoid
from trapdesk.engine import rings
from trapdesk.services.antenna.solve import solve
from trapdesk.store import store

WOUND = Solenoid(former=0.04, wire=1.6e-3, pitch=2.4e-3, turns=SOLVE)
COILS = {"given coil": GivenCoil(q=200.0), "solenoid": WOUND}


def design_of(name, coil, *, vee):
    """Return a preset with another coil, flat or as an inverted V of 120 degrees."""
    design, _ = store.preset(name)
    site = {"height": design.site.height, "ground": design.site.ground, "soil": design.site.soil}
    if vee:
        site |= {"shape": Shape.VEE, "height": max(10.0, site["height"])}
        site["included_angle"] = math.radians(120)
    design = replace(design, site=Site(**site))
    return with_value(design, "antenna.trap.coil", COILS[coil])


def uncached(design, *previous, **options):
    rings._whole_rings.cache_clear()
    return solve(design, *previous, **options)


SHAPES = {"flat": (False, 14.0, 24.0), "inverted V": (True, 16.0, 28.0)}


@pytest.mark.parametrize("coil", COILS)
@pytest.mark.parametrize("shape", SHAPES)
@pytest.mark.parametrize("name", ["40-20-vee", "80-40-flat", "20-10-flat"])
def test_figures_with_solved_wires_over_soil(name, shape, coil):
    vee, limit, limit_with_site = SHAPES[shape]
    design = design_of(name, coil, vee=vee)
    what = f"{name[:5]} m, {shape}, {coil}"
    record(f"figures, {what}", ratio(lambda: uncached(design)), limit)
    record(f"with site, {what}", ratio(lambda: uncached(design, site_effects=True), runs=10), limit_with_site)


@pytest.mark.parametrize("coil", COILS)
@pytest.mark.parametrize("name", ["40-20-vee", "80-40-flat"])
def test_change_of_the_trap_only(name, coil):
    design = design_of(name, coil, vee=False)
    wire = solve(design).wire
    for key, value in (("inner", wire.inner), ("end", wire.end)):
        design = with_value(design, f"antenna.lengths.{key}", value)
    before = solve(design)
    other = with_value(design, "antenna.trap.resonance", 0.995 * design.antenna.trap.resonance)
    # The rings of a coil have a limit of their own, and stay known from one change to the next.
    record(f"trap changed, {name[:5]} m, {coil}", ratio(lambda: solve(other, before)), limit=1.0)


MOST_MEMORY = 80e6
"""What the command line may hold at its peak. [B]"""


@pytest.mark.parametrize("name", store.presets())
def test_memory_of_the_command_line(name):
    # The peak is that of the child alone: a process in between waits for it.
    inner = f"""
import resource, subprocess, sys
subprocess.run([sys.executable, "-m", "trapdesk", "figures", "{name}"], check=True, stdout=subprocess.DEVNULL)
print(resource.getrusage(resource.RUSAGE_CHILDREN).ru_maxrss)
"""
    done = subprocess.run(
        [sys.executable, "-c", inner], check=True, capture_output=True, text=True, timeout=60
    )
    unit = 1 if sys.platform == "darwin" else 1024
    assert int(done.stdout) * unit <= MOST_MEMORY
