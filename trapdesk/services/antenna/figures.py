"""Everything a design does, as frozen numbers in SI units: what `solve` returns and every face shows."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np

from ...design.design import Design
from ...engine.ports import Ports
from ...engine.wire import Wire
from ..feed.path import FeedFigures
from .levels import Level
from .moved import Moved


@dataclass(frozen=True, kw_only=True)
class Finding:
    """A remark on the figures: which rule, where, the number behind it and the limit it was held against.

    `where` is a dotted key of the design, or `bands.upper` and the like. `dimension` is that of value and
    limit.
    """

    code: str
    level: Level
    where: str
    value: float
    limit: float | None = None
    dimension: str = "ratio"


@dataclass(frozen=True, kw_only=True)
class Shares:
    """Where the power accepted at the feed point goes; the four add to 1."""

    sky: float
    ground: float
    wire: float
    trap: float


@dataclass(frozen=True, kw_only=True)
class TrapStress:
    """What one trap bears at the stated power as a steady carrier, and on average in the stated mode.

    Coil and capacitor share the peak voltage; their currents are those that circulate in the trap.
    """

    frequency: float
    peak_voltage: float
    rms_current: float
    coil_current: float
    capacitor_current: float
    watts: float
    average_watts: float


@dataclass(frozen=True, kw_only=True)
class Curve:
    """The band over frequency, arrays (n,)."""

    frequency: np.ndarray
    impedance: np.ndarray
    swr: np.ndarray


@dataclass(frozen=True, kw_only=True)
class Effects:
    """What moving something does to a band's resonance.

    Of one metre of each wire of both sides [Hz/m]; of both traps' resonance by its whole, moved by the
    capacitor [Hz]; of the height [Hz/m]; of the driest and the wettest soil it may be [Hz], both None until
    asked for.
    """

    inner: float
    end: float | None
    trap: float | None
    height: float | None = None
    soil: tuple[float, float] | None = None


@dataclass(frozen=True, kw_only=True)
class BandFigures:
    """What the antenna does on one band. None where a thing does not exist.

    `frequency_doubt` [Hz] goes with resonance and dip before anything is tuned and is about two standard
    deviations, `impedance_doubt` [ohm] goes with impedances, `swr_doubt` [1] with every SWR, `share_doubt`
    [1] with the shares, `stress_doubt` [1] is the relative one of volts, amps and watts. Every SWR is that
    where it is judged; impedances are those at the feed point. `feed` is None where nothing lies between feed
    point and transmitter.
    """

    role: str
    name: str
    aim: float
    aim_impedance: complex
    aim_swr: float
    resonance: float | None
    resonance_resistance: float | None
    dip: float
    dip_swr: float
    low_swr: float
    high_swr: float
    worst_swr: float
    width: float | None
    usable: tuple[float, float] | None
    shares: Shares
    feed_current: float
    stress: TrapStress | None
    worst_stress: TrapStress | None
    effects: Effects | None
    curve: Curve
    frequency_doubt: float
    impedance_doubt: float
    swr_doubt: float
    share_doubt: float
    stress_doubt: float
    feed: FeedFigures | None = None
    parts: tuple[PartStress, ...] = ()


@dataclass(frozen=True, kw_only=True)
class CoilFigures:
    """A wound coil: what to wind. Diameters and lengths to the centre of the wire, `outer_…` over all.

    `turns_range` is that of a cable's braid, `wind` the turns to begin with, `cut` the wire or cable to cut;
    `mass` [kg] is without former and core. `half_turns` are the turns to the half, and `half_resonance` is
    where the trap then is. `most_turns` is what fits on a core. `own_resonance` is that of the coil alone,
    None where nothing is known of it.
    """

    turns: float
    diameter: float
    length: float
    wire_length: float
    self_capacitance: tuple[float, float, float]
    crowding: float
    pitch: float = 0.0
    cut: float = 0.0
    outer_diameter: float = 0.0
    outer_length: float = 0.0
    mass: float = 0.0
    turns_range: tuple[float, float] | None = None
    wind: int | None = None
    most_turns: int | None = None
    half_turns: float | None = None
    half_resonance: float | None = None
    own_resonance: float | None = None


@dataclass(frozen=True, kw_only=True)
class Adjustment:
    """What can be moved on a built trap, and what that does to its resonance.

    `raises` [Hz] is what moving it one way may give at most and `lowers` the other way, 0 where it does not
    go; `rate` [Hz/m] is per metre taken off, None where nothing is taken off.
    """

    what: str
    where: str
    raises: float
    lowers: float
    rate: float | None = None


@dataclass(frozen=True, kw_only=True)
class PartFigures:
    """A capacitor of the trap, or its cable: what it is and what makes it up.

    `loss_source` says where its loss comes from: "given", "none" (counted as lossless), "estimate" or the key
    of a source. `length` is that of a stub or cable.
    """

    key: str
    name: str
    capacitance: float
    loss_tangent: float
    loss_source: str
    tolerance: tuple[float, float] | None
    drift: float | None
    pieces: int
    length: float | None


@dataclass(frozen=True, kw_only=True)
class PartStress:
    """What one part of the trap bears at its worst in the wanted part of a band.

    Volts, amps and steady watts each at its own worst; `average` are watts on average while sending. `share`
    is the largest of what it bears over what it stands, at `frequency`, and `rules` says by which limit;
    both None where no limit is known. `allowed` [V peak] is the voltage at which the limit would be reached.
    """

    key: str
    name: str
    frequency: float
    peak_voltage: float
    rms_current: float
    watts: float
    average: float
    share: float | None
    rules: str | None
    allowed: float | None


@dataclass(frozen=True, kw_only=True)
class Heat:
    """How warm a trap gets, an estimate: `lasting` [K] without a pause, `over` [K] at the end of an over.

    `hottest` [degC] is that on top of the sun, `softens` [degC] what the former stands, None for no limit.
    """

    watts: float
    lasting: float
    over: float
    hottest: float
    softens: float | None


@dataclass(frozen=True, kw_only=True)
class Shift:
    """What one thing does to the trap's resonance [Hz], and then to each band by role.

    `dips` are shifts of the dip [Hz], `swr` the worst SWR in the wanted part after it.
    """

    what: str
    trap: float
    dips: dict[str, float]
    swr: dict[str, float]


@dataclass(frozen=True, kw_only=True)
class TrapFigures:
    """The trap by itself, at its resonance unless said otherwise; `impedance` by band role, at the aim.

    `bring_to` is where to bring it before it is closed, so that it ends at its resonance. `tolerance` is that
    of the capacitor, down and up; `varies` is how far class 2 ceramics in it may go with heat and cold, which
    `shifts` leave out.
    """

    resonance: float
    inductance: float
    capacitance: float
    fitted_capacitance: float
    q: float
    dynamic_resistance: float
    impedance: dict[str, complex]
    coil: CoilFigures | None
    curve: Curve
    resonance_doubt: float
    inductance_doubt: float
    q_range: tuple[float, float]
    bring_to: float | None = None
    parts: tuple[PartFigures, ...] = ()
    tolerance: tuple[float, float] | None = None
    varies: float = 0.0
    adjustments: tuple[Adjustment, ...] = ()
    heat: Heat | None = None
    shifts: tuple[Shift, ...] = ()


@dataclass(frozen=True, kw_only=True)
class LengthFigures:
    """The wires of one side. `mark` is where the tape mark goes, `reel` what to cut off the reel.

    `half_wave` is a plain half wave in free space at the lower aim, for comparison with `total`, both sides.
    """

    inner: float
    inner_mark: float
    inner_reel: float
    end: float | None
    end_mark: float | None
    end_reel: float | None
    total: float
    half_wave: float
    end_height: float | None
    slope: float
    doubt: float


@dataclass(frozen=True, kw_only=True)
class Figures:
    """Everything computed for a design.

    `wire`, `ports` by band role and `moved` are kept for what comes after, not for show.
    """

    design: Design
    lengths: LengthFigures
    trap: TrapFigures | None
    bands: dict[str, BandFigures]
    findings: tuple[Finding, ...]
    wire: Wire = field(repr=False)
    ports: dict[str, Ports] = field(repr=False)
    moved: Moved = field(repr=False)


@dataclass(frozen=True, kw_only=True)
class AtFrequency:
    """The antenna at one frequency, inside a band or not."""

    frequency: float
    impedance: complex
    swr: float
    shares: Shares
    feed_current: float
    stress: TrapStress | None
