"""The wire engine: kept energy, published and independent impedances, limits, symmetries, ports."""

import math
from dataclasses import replace
from unittest import mock

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.optimize import brentq

from tests import oracles
from trapdesk.engine import wire as engine
from trapdesk.engine.conductors import coating_elastance, internal_impedance
from trapdesk.engine.constants import C0
from trapdesk.engine.ground import Ground
from trapdesk.engine.mesh import Side, nodes_of, plan_side
from trapdesk.engine.ports import chebyshev_nodes, polynomial_weights, terminate
from trapdesk.engine.soils import GroundKind
from trapdesk.engine.wire import BentWire, Wire, plan, solve_ports, solve_whole

SPACE, MIRROR = Ground(kind=GroundKind.SPACE), Ground(kind=GroundKind.MIRROR)
COPPER = 1.7241e-8


def soil(conductivity, permittivity):
    return Ground(kind=GroundKind.SOIL, conductivity=conductivity, permittivity=permittivity)


AVERAGE, DRY, SEA = soil(5e-3, 13.0), soil(3e-4, 7.0), soil(5.0, 70.0)
PLAIN = Wire(inner=10.2, end=None, height=10.0, slope=0.0, radius=1e-3, resistivity=COPPER, ground=AVERAGE)
TRAPPED = replace(PLAIN, inner=10.07, end=6.71, body=0.1)
TRAP_AT = 7.05e6


def trap_impedance(frequency, resonance=TRAP_AT, capacitance=60e-12, q=200.0):
    """Return a coil with its resistance beside a lossless capacitor."""
    w, w0 = 2 * np.pi * frequency, 2 * np.pi * resonance
    inductance = 1 / (w0 * w0 * capacitance)
    coil = w0 * inductance / q * np.sqrt(frequency / resonance) + 1j * w * inductance
    return 1 / (1 / coil + 1j * w * capacitance)


def solved(wire, frequency, *, finer=1, **options):
    counts = tuple(finer * n for n in plan(wire, frequency))
    return solve_ports(wire, np.array([frequency]), counts, frequency, **options)


def impedance(wire, frequency, *traps, finer=1):
    closed = terminate(solved(wire, frequency, finer=finer).impedance, *(np.array([t]) for t in traps))
    return complex(closed.impedance[0])


def resonance(wire, low, high, *traps):
    """Return where the reactance crosses zero, traps given by their own resonance."""
    ports = solve_ports(wire, chebyshev_nodes(low, high, 6), plan(wire, high), high)

    def reactance(frequency):
        loads = [np.array([trap_impedance(frequency, t)]) for t in traps]
        return terminate(ports.at(frequency).impedance, *loads).impedance[0].imag

    return brentq(reactance, low, high, xtol=0.1)


# --- Energy ---


def spied(solve):
    """Return ports and, one for each set of equations solved, the currents for one ampere into each port."""
    kept, real = [], engine._open

    def spy(matrix, columns):
        kept.append(real(matrix, columns))
        return kept[-1]

    with mock.patch.object(engine, "_open", spy):
        ports = solve()
    return ports, [currents[0] for currents, _ in kept]


def quadrature(nodes):
    x, w = np.polynomial.legendre.leggauss(4)
    h = np.diff(nodes)[:, None]
    return (nodes[:-1, None] + h * (x + 1) / 2).ravel(), (h * w / 2).ravel()


def on_nodes(nodes, currents):
    """Return the triangles' current at the quadrature points; it ends at zero."""
    return np.interp(quadrature(nodes)[0], nodes, np.append(currents, 0.0))


def balance(wire, frequency, *traps):
    """Return the power fed, and its parts: sky, wire, traps, and into the soil by the oracle."""
    counts = tuple(2 * n for n in plan(wire, frequency))
    ports, halves = spied(
        lambda: solve_ports(wire, np.array([frequency]), counts, frequency, extrapolate=False)
    )
    closed = terminate(ports.impedance, *(np.array([t]) for t in traps))
    amps = closed.currents[0]
    right = left = halves[0][:, 0]
    if amps.size == 3:
        even = halves[0] @ np.array([amps[0], (amps[1] + amps[2]) / 2])
        odd = np.append(0.0, halves[1][:, 0]) * (amps[1] - amps[2]) / 2
        right, left = even + odd, even - odd
    nodes = nodes_of(wire.sides()[0], counts, C0 / frequency)
    current = oracles.on_vee(
        wire.height, wire.slope, *quadrature(nodes), on_nodes(nodes, right), on_nodes(nodes, left)
    )
    return parts(ports, closed, traps, current, wire.ground, frequency)


def parts(ports, closed, traps, current, ground, frequency):
    amps, pair = closed.currents[0], (traps * 2)[:2]
    n2 = oracles.index_squared(frequency, ground.conductivity, ground.permittivity)
    return closed.impedance[0].real, {
        "sky": (amps.conj() @ ports.sky[0] @ amps).real,
        "wire": (amps.conj() @ ports.loss[0] @ amps).real,
        "trap": sum((z.real * abs(i) ** 2 for z, i in zip(pair, amps[1:], strict=False)), 0.0),
        "soil": oracles.soil_power(current, frequency, n2),
    }


# A balance on one mesh is exact but for quadratures, measured at 2e-6 over sea and 1e-9 elsewhere.
KEPT = 1e-5


@pytest.mark.parametrize(
    ("height", "slope", "ground"),
    [
        (10.0, 0.0, AVERAGE),
        (2.0, 0.0, DRY),
        (1.5, 0.0, AVERAGE),
        (10.0, 30.0, AVERAGE),
        (10.0, 30.0, SEA),
        (8.0, 45.0, soil(1e-4, 3.0)),
        (20.0, 10.0, soil(1e-2, 30.0)),
    ],
)
def test_energy_is_kept(height, slope, ground):
    fed, found = balance(replace(PLAIN, height=height, slope=math.radians(slope), ground=ground), 7.1e6)
    assert sum(found.values()) == pytest.approx(fed, rel=KEPT)
    assert min(found["sky"], found["wire"], found["soil"]) > 0


@pytest.mark.parametrize("frequency", [3.65e6, 7.05e6])
@pytest.mark.parametrize("other", [TRAP_AT, 0.98 * TRAP_AT], ids=["equal", "unequal"])
@pytest.mark.parametrize(("height", "slope"), [(10.0, 0.0), (12.0, 30.0)])
def test_energy_is_kept_with_traps(frequency, other, height, slope):
    wire = replace(TRAPPED, height=height, slope=math.radians(slope))
    traps = tuple(trap_impedance(frequency, f) for f in (TRAP_AT, other))
    fed, found = balance(wire, frequency, *traps)
    assert sum(found.values()) == pytest.approx(fed, rel=KEPT)
    assert found["trap"] > 0.01 * fed


def test_energy_is_kept_by_the_limit_of_the_mesh():
    # What the figures show is the limit of both meshes; its ground share against the oracle's on one.
    fed, found = balance(PLAIN, 7.1e6)
    ports = solved(PLAIN, 7.1e6)
    z = ports.impedance[0, 0, 0].real
    ground = 1 - (ports.sky[0, 0, 0].real + ports.loss[0, 0, 0].real) / z
    assert ground == pytest.approx(found["soil"] / fed, abs=1e-3)


BENT = BentWire(
    sides=(
        Side(vertices=((0.0, 0.0, 9.0), (4.0, 1.0, 7.0), (6.0, 7.0, 5.0)), trap=5.0, body=0.08),
        Side(vertices=((0.0, 0.0, 9.0), (-7.0, -1.0, 3.0), (-9.5, -2.0, 3.5)), trap=5.4),
    ),
    radius=1e-3,
    resistivity=COPPER,
    ground=AVERAGE,
)


@pytest.mark.parametrize("ground", [AVERAGE, DRY, SEA], ids=["average", "dry", "sea"])
def test_energy_is_kept_by_a_wire_without_symmetry(ground):
    wire, frequency = replace(BENT, ground=ground), 7.1e6
    counts = tuple(tuple(2 * n for n in plan_side(s, C0 / frequency)) for s in wire.sides)
    ports, (columns,) = spied(
        lambda: solve_whole(wire, np.array([frequency]), counts, frequency, extrapolate=False)
    )
    traps = tuple(trap_impedance(frequency, f) for f in (TRAP_AT, 0.97 * TRAP_AT))
    closed = terminate(ports.impedance, *(np.array([t]) for t in traps))
    along = columns @ closed.currents[0]
    one, other = (nodes_of(s, n, C0 / frequency) for s, n in zip(wire.sides, counts, strict=True))
    # Unknowns: the first side from the feed point, then the other one without the feed point.
    sides = along[: one.size - 1], np.append(along[0], along[one.size - 1 :])
    current = oracles.joined(
        *(
            oracles.on_side(s.vertices, s.corners, *quadrature(n), on_nodes(n, i), sign)
            for s, n, i, sign in zip(wire.sides, (one, other), sides, (1.0, -1.0), strict=True)
        )
    )
    fed, found = parts(ports, closed, traps, current, ground, frequency)
    assert sum(found.values()) == pytest.approx(fed, rel=1e-4)


@pytest.mark.parametrize("ground", [SPACE, MIRROR], ids=str)
@pytest.mark.parametrize("slope", [0.0, 30.0])
def test_without_soil_nothing_is_lost_in_the_ground(ground, slope):
    wire = replace(PLAIN, slope=math.radians(slope), ground=ground)
    ports = solved(wire, 7.1e6)
    taken = (ports.sky + ports.loss)[0, 0, 0].real
    assert taken == pytest.approx(ports.impedance[0, 0, 0].real, rel=2e-4)


@pytest.mark.parametrize(
    ("side", "height", "frequency"), [(10.2, 60.0, 28.5e6), (10.2, 300.0, 7.1e6), (20.0, 12.0, 28.5e6)]
)
def test_sky_of_a_high_or_long_wire(side, height, frequency):
    # Many lobes: over a mirror and in space all that the wire does not lose goes to the sky.
    for ground in (MIRROR, SPACE):
        ports = solved(replace(PLAIN, inner=side, height=height, ground=ground), frequency)
        taken = (ports.sky + ports.loss)[0, 0, 0].real
        assert taken == pytest.approx(ports.impedance[0, 0, 0].real, rel=1e-3)


# --- Free space ---

# Half-wave dipole by radius in wavelengths. Independent reference computation: Hallen's equation with the
# exact kernel, delta gap, 80 intervals; R 1 %, X 1 ohm for the gap. Not published values.
HALF_WAVE = {1e-3: 86.2 + 46.2j, 5e-4: 83.6 + 46.0j, 1e-4: 80.3 + 45.2j, 1e-5: 78.05 + 44.4j}
# First resonance by length over diameter: length in wavelengths (+- 0.0006) and resistance. Same method.
FIRST_RESONANCE = {
    100: (0.4704, 72.6),
    500: (0.4788, 72.0),
    1000: (0.4812, 72.0),
    5000: (0.4852, 72.1),
    10000: (0.4865, 72.1),
    20000: (0.4875, 72.2),
    50000: (0.4887, 72.2),
}
# At 30 MHz the gap is 1/200 wavelength and never thinner than the thickest wire's radius.
WAVELENGTH = 10.0


def in_space(length, diameter):
    """Return a lossless dipole, both given in wavelengths."""
    return Wire(
        inner=length * WAVELENGTH / 2,
        end=None,
        height=10.0,
        slope=0.0,
        radius=diameter * WAVELENGTH / 2,
        resistivity=0.0,
        ground=SPACE,
    )


@pytest.mark.parametrize("radius", HALF_WAVE)
def test_half_wave_dipole_in_space(radius):
    z = impedance(in_space(0.5, 2 * radius), C0 / WAVELENGTH)
    assert z.real == pytest.approx(HALF_WAVE[radius].real, rel=0.01)
    assert z.imag == pytest.approx(HALF_WAVE[radius].imag, abs=1.0)


def infinitely_thin(length):
    """Return impedances of ever thinner wires and their limit: a parabola in 1/ln(length/radius)."""
    radii = (1e-12, 1e-24, 1e-48)
    x = np.array([1 / math.log(length / a) for a in radii])
    # The reactance grows with the logarithm, and so does what a mesh leaves of it: a finer one.
    z = np.array([impedance(in_space(length, 2 * a), C0 / WAVELENGTH, finer=3) for a in radii])
    return z, polynomial_weights(x, np.zeros(1))[0] @ z


def test_half_wave_dipole_of_a_thin_wire_heads_for_the_induced_emf_value():
    # Orfanidis, Electromagnetic Waves and Antennas, help text of the book's mutual-impedance function (public
    # copy, seen): 73.079 + j42.515 for a sinusoidal current, which an infinitely thin wire carries.
    # The reactance cannot be as near: the thinnest wire is a line of 13 kohm, on which 5 millionths of its
    # length are 0.1 ohm.
    _, limit = infinitely_thin(0.5)
    assert limit.real == pytest.approx(73.079, abs=0.02)
    assert limit.imag == pytest.approx(42.515, abs=0.1)


@pytest.mark.parametrize("ratio", FIRST_RESONANCE)
def test_first_resonance_in_space(ratio):
    length, resistance = FIRST_RESONANCE[ratio]

    def reactance(x):
        return impedance(in_space(x, x / ratio), C0 / WAVELENGTH).imag

    found = brentq(reactance, 0.45, 0.495, xtol=1e-6)
    assert found == pytest.approx(length, abs=6e-4)
    assert impedance(in_space(found, found / ratio), C0 / WAVELENGTH).real == pytest.approx(
        resistance, rel=0.01
    )


@pytest.mark.parametrize("share", [1 / 50, 1 / 25, 1 / 10])
def test_short_dipole_in_space(share):
    # Textbook: a triangular current, that of an infinitely thin short wire, radiates 20 pi^2 (l/lambda)^2
    # with eta0 = 120 pi; the next term of the series is of the order (pi l/lambda)^2/5.
    z, limit = infinitely_thin(share)
    assert limit.real == pytest.approx(20 * math.pi**2 * share**2, rel=0.005 + (math.pi * share) ** 2 / 4)
    assert max(z.imag) < -500


# --- Over ground ---

# Resistance of a half-wave dipole of sinusoidal current, by height in wavelengths: over perfect ground by
# Carter's closed form, over real ground (5 mS/m, 13; 7.1 MHz) by a Sommerfeld spectral integral. Independent
# reference computations.
OVER_MIRROR = {0.1: 21.72, 0.25: 85.60, 0.5: 69.07, 1.0: 72.00}
OVER_AVERAGE = {0.05: 57.31, 0.1: 52.98, 0.25: 84.19, 0.5: 68.44, 1.0: 71.28}


@pytest.mark.parametrize(
    ("ground", "height", "resistance"),
    [(MIRROR, *row) for row in OVER_MIRROR.items()] + [(AVERAGE, *row) for row in OVER_AVERAGE.items()],
)
def test_half_wave_over_ground(ground, height, resistance):
    # The current of a very thin wire is no sine: its resistance is 3.6 % higher in space. Held against that,
    # the rest goes with the square of the difference and with the height: 2 % is loose by intent, since the
    # kernels are held against these tables exactly elsewhere.
    wavelength = C0 / 7.1e6
    wire = Wire(
        inner=wavelength / 4,
        end=None,
        height=height * wavelength,
        slope=0.0,
        radius=1e-8 * wavelength,
        resistivity=0.0,
        ground=ground,
    )
    far = impedance(replace(wire, ground=SPACE), 7.1e6).real
    assert impedance(wire, 7.1e6).real / far == pytest.approx(resistance / 73.08, rel=0.02)


def test_metal_soil_is_a_mirror():
    for slope in (0.0, 0.5):
        wire = replace(PLAIN, slope=slope, resistivity=0.0)
        metal = impedance(replace(wire, ground=soil(1e7, 1.0)), 7.1e6)
        assert metal == pytest.approx(impedance(replace(wire, ground=MIRROR), 7.1e6), abs=0.05)


def test_soil_of_air_is_space():
    for slope in (0.0, 0.5):
        wire = replace(PLAIN, slope=slope)
        air = impedance(replace(wire, ground=soil(0.0, 1.0)), 7.1e6)
        assert air == pytest.approx(impedance(replace(wire, ground=SPACE), 7.1e6), abs=1e-3)


@pytest.mark.parametrize("height", [100.0, 200.0, 300.0])
def test_high_above_ground_is_space(height):
    # Broadside, a half wave at a distance d couples by 60 lambda/(pi d), its image d = 2 h away and weaker.
    high = impedance(replace(PLAIN, height=height), 7.1e6)
    image = 60 * C0 / 7.1e6 / (math.pi * 2 * height)
    assert abs(high - impedance(replace(PLAIN, ground=SPACE), 7.1e6)) < image


def test_height_in_space_means_nothing():
    here, there = (impedance(replace(PLAIN, ground=SPACE, height=h), 7.1e6) for h in (0.1, 77.0))
    assert here == pytest.approx(there, rel=1e-12)


@pytest.mark.parametrize("ground", [SPACE, MIRROR, AVERAGE, SEA], ids=str)
def test_a_vee_becomes_flat(ground):
    flat = impedance(replace(PLAIN, ground=ground), 7.1e6)
    hardly = impedance(replace(PLAIN, ground=ground, slope=1e-6), 7.1e6)
    bent = impedance(replace(PLAIN, ground=ground, slope=1e-3), 7.1e6)
    assert abs(hardly - flat) < 1e-3
    assert abs(bent - flat) < 0.1


# --- Wire and mesh ---


def test_thicker_wire_resonates_lower():
    found = [resonance(replace(PLAIN, radius=r), 6.5e6, 7.5e6) for r in (2e-4, 1e-3, 5e-3)]
    assert found[0] > found[1] > found[2]


def test_coated_wire_resonates_lower():
    # A starting rule, seen as an anecdote, is 453/f for insulated and 468/f for bare wire, about 3 %. A
    # coating of 0.6 mm on 2 mm of wire, permittivity 2.3 to 4, should be of that size.
    bare = resonance(PLAIN, 6.5e6, 7.5e6)
    for permittivity in (2.3, 4.0):
        elastance = float(coating_elastance(2e-3, 0.6e-3, permittivity))
        lower = resonance(replace(PLAIN, elastance=elastance), 6.5e6, 7.5e6)
        assert 0.01 < 1 - lower / bare < 0.04


def test_wire_loss_is_that_of_a_sinusoidal_current():
    # A sine on a half wave loses half of what a uniform current would; a real one is a little fuller.
    per_metre = internal_impedance(np.array([7.1e6]), 2e-3, COPPER)[0].real
    loss = solved(PLAIN, 7.1e6).loss[0, 0, 0].real
    assert loss == pytest.approx(PLAIN.inner * per_metre, rel=0.05)


@pytest.mark.parametrize("wire", [PLAIN, replace(PLAIN, slope=0.5), TRAPPED], ids=["flat", "vee", "traps"])
def test_mesh_has_converged(wire):
    # The limit of the meshes against that of twice as fine ones, in what the figures need: a resonance moves
    # by X/(dX/df), some 20 ohm a percent, so 0.1 ohm is 0.005 %.
    traps = (trap_impedance(3.65e6),) if wire.end else ()
    frequency = 3.65e6 if wire.end else 7.1e6
    here, finer = (impedance(wire, frequency, *traps, finer=n) for n in (1, 2))
    assert abs(here - finer) < 0.1


def test_error_of_a_mesh_falls_with_its_square():
    limit = solved(PLAIN, 7.1e6, finer=4).impedance[0, 0, 0]
    coarse, fine = (
        abs(solved(PLAIN, 7.1e6, finer=n, extrapolate=False).impedance[0, 0, 0] - limit) for n in (1, 2)
    )
    assert 3.0 < coarse / fine < 5.0


# --- Traps ---


@pytest.mark.parametrize("slope", [0.0, 0.5])
@pytest.mark.parametrize("body", [0.0, 0.1])
def test_shorted_traps_are_plain_wire(slope, body):
    whole = replace(PLAIN, slope=slope)
    split = replace(whole, inner=6.0, end=4.2, body=body)
    assert abs(impedance(split, 7.1e6, 0.0) - impedance(whole, 7.1e6)) < 0.3


def test_open_traps_leave_the_inner_wire():
    # What is left beyond an open trap is a wire of its own, far from resonance: it couples by its end only.
    split = replace(PLAIN, inner=6.0, end=4.2)
    left, alone = impedance(split, 7.1e6, 1e9), impedance(replace(PLAIN, inner=6.0), 7.1e6)
    assert abs(left - alone) < 0.01 * abs(alone)
    closed = terminate(solved(split, 7.1e6).impedance, np.array([1e9]))
    assert abs(closed.currents[0, 1]) < 1e-4


def test_body_of_a_trap_moves_the_upper_resonance():
    # Independent reference computation, 80/40 m with 60 pF: 10 cm move the upper resonance by +11 kHz.
    none, some = (resonance(replace(TRAPPED, body=b), 6.8e6, 7.4e6, TRAP_AT) for b in (0.0, 0.1))
    assert some - none == pytest.approx(11e3, abs=3e3)


@pytest.mark.parametrize(("off", "expect"), [(0.01, 1e-4), (0.04, 2e-3)])
def test_unequal_traps_count_by_their_mean(off, expect):
    # Independent reference computation, one digit each: 1 % either way moves the upper band by 0.01 %, 4 % by
    # 0.2 %. One trap alone moves it by some 0.5 % for each.
    equal = resonance(TRAPPED, 6.8e6, 7.4e6, TRAP_AT)
    apart = resonance(TRAPPED, 6.8e6, 7.4e6, TRAP_AT * (1 + off), TRAP_AT * (1 - off))
    assert abs(apart / equal - 1) == pytest.approx(expect, rel=0.55)


def test_either_side_may_have_either_trap():
    first, second = trap_impedance(7.05e6, 7.0e6), trap_impedance(7.05e6, 7.1e6)
    assert impedance(TRAPPED, 7.05e6, first, second) == pytest.approx(
        impedance(TRAPPED, 7.05e6, second, first), rel=1e-12
    )


def test_equal_traps_do_without_the_odd_half():
    trap = np.array([trap_impedance(7.05e6)])
    both = terminate(solved(TRAPPED, 7.05e6).impedance, trap)
    even = terminate(solved(TRAPPED, 7.05e6, odd=False).impedance, trap)
    assert even.impedance == pytest.approx(both.impedance, rel=1e-9)
    assert even.currents == pytest.approx(both.currents, rel=1e-9)


# --- Ports ---

fixed = settings(derandomize=True, deadline=None, database=None, max_examples=15)


@fixed
@given(
    inner=st.floats(2.0, 20.0),
    end=st.floats(0.5, 12.0),
    height=st.floats(1.0, 20.0),
    steep=st.floats(0.0, 0.9),
    wavelengths=st.floats(0.05, 1.2),
    ground=st.sampled_from([SPACE, MIRROR, AVERAGE, DRY, SEA]),
)
def test_ports_are_reciprocal_and_passive(inner, end, height, steep, wavelengths, ground):
    frequency = wavelengths * C0 / (inner + end)
    slope = math.asin(min(steep * (height - 0.5) / (inner + end), 0.9))
    wire = replace(TRAPPED, inner=inner, end=end, height=height, slope=slope, ground=ground)
    ports = solved(wire, frequency, extrapolate=False)
    z = ports.impedance[0]
    assert z == pytest.approx(z.T, rel=1e-6, abs=1e-6 * abs(z).max())
    lossy = [np.linalg.eigvalsh(m) for m in (z.real, (ports.loss[0] + ports.loss[0].conj().T) / 2)]
    lossy.append(np.linalg.eigvalsh((ports.sky[0] + ports.sky[0].conj().T) / 2))
    assert min(lossy[0].min(), lossy[1].min()) > 0
    # Odd currents of a low wire radiate next to nothing: what is left there is rounding.
    assert lossy[2].min() > -1e-6 * lossy[2].max()
    # The ground takes, it never gives; an ideal one and space take nothing.
    rest = z.real - (ports.sky[0] + ports.loss[0]).real
    assert np.linalg.eigvalsh((rest + rest.T) / 2).min() > -5e-4 * np.linalg.eigvalsh(z.real).max()


@pytest.mark.parametrize(("low", "high"), [(6.72e6, 7.49e6), (3.36e6, 3.95e6)])
def test_interpolated_ports_give_the_swr(low, high):
    # The solved range of a band with its margins, four or more nodes, the wire near resonance in it.
    nodes = chebyshev_nodes(low, high, 3 + math.ceil(math.log(high / low) / 0.06))
    ports = solve_ports(TRAPPED, nodes, plan(TRAPPED, high), high)
    frequency = np.linspace(low, high, 9)
    straight = solve_ports(TRAPPED, frequency, plan(TRAPPED, high), high)
    loads = trap_impedance(frequency)
    swr = []
    for z in (ports.at(frequency).impedance, straight.impedance):
        feed = terminate(z, loads).impedance
        size = abs((feed - 50) / (feed + 50))
        swr.append((1 + size) / (1 - size))
    assert swr[0] == pytest.approx(swr[1], rel=1e-3)


def test_frequencies_together_are_each_by_itself():
    frequency = np.array([6.9e6, 7.05e6, 7.3e6])
    together = solve_ports(TRAPPED, frequency, plan(TRAPPED, 7.3e6), 7.3e6)
    for i, f in enumerate(frequency):
        one = solve_ports(TRAPPED, np.array([f]), plan(TRAPPED, 7.3e6), 7.3e6)
        for name in ("impedance", "loss", "sky"):
            a, b = getattr(one, name)[0], getattr(together, name)[i]
            assert np.abs(a - b).max() < 1e-4 * np.abs(b).max()


def test_the_whole_wire_is_its_halves():
    frequency = np.array([7.05e6])
    for wire in (TRAPPED, replace(TRAPPED, slope=0.4, height=12.0)):
        counts = plan(wire, 7.05e6)
        halves = solve_ports(wire, frequency, counts, 7.05e6)
        both = BentWire(
            sides=wire.sides(), radius=wire.radius, resistivity=wire.resistivity, ground=wire.ground
        )
        whole = solve_whole(both, frequency, (counts, counts), 7.05e6)
        for name in ("impedance", "loss", "sky"):
            a, b = getattr(whole, name)[0], getattr(halves, name)[0]
            assert np.abs(a - b).max() < 1e-3 * np.abs(b).max()


def test_nonsense_is_refused():
    with pytest.raises(ValueError, match="frequency"):
        plan(PLAIN, 0.0)
    for frequency in (0.0, -7e6, math.nan):
        with pytest.raises(ValueError, match="frequency"):
            solve_ports(PLAIN, np.array([frequency]), plan(PLAIN, 7e6), 7e6)
    for wire in (replace(PLAIN, height=0.0), replace(PLAIN, height=5.0, slope=0.6)):
        with pytest.raises(ValueError, match="above the ground"):
            solved(wire, 7e6)
    assert solved(replace(PLAIN, height=0.0, ground=SPACE), 7e6).impedance.shape == (1, 1, 1)
