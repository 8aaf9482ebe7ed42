"""Names of units: what a quantity may measure, and what people call its units."""

from dataclasses import dataclass
from enum import StrEnum


class Dimension(StrEnum):
    """What a quantity measures; the float is in the unit named here."""

    LENGTH = "length"  # m
    FREQUENCY = "frequency"  # Hz
    INDUCTANCE = "inductance"  # H
    CAPACITANCE = "capacitance"  # F
    RESISTANCE = "resistance"  # ohm
    POWER = "power"  # W
    VOLTAGE = "voltage"  # V
    CURRENT = "current"  # A
    ANGLE = "angle"  # rad
    CONDUCTIVITY = "conductivity"  # S/m
    TEMPERATURE = "temperature"  # degrees Celsius
    RATIO = "ratio"  # 1
    COUNT = "count"  # turns
    TIME = "time"  # s
    MASS = "mass"  # kg
    LOSS = "loss"  # dB
    LOSS_PER_LENGTH = "loss_per_length"  # dB/m
    TEMPERATURE_COEFFICIENT = "temperature_coefficient"  # 1/K
    CAPACITANCE_PER_LENGTH = "capacitance_per_length"  # F/m
    FLUX_DENSITY = "flux_density"  # T


@dataclass(frozen=True, kw_only=True, slots=True)
class Unit:
    """A unit as whole numbers: SI value = (number * top + shift) / bottom, rounded once."""

    top: int
    bottom: int = 1
    shift: int = 0


ELEMENTS = {
    "f": Dimension.FREQUENCY,
    "L": Dimension.INDUCTANCE,
    "C": Dimension.CAPACITANCE,
    "R": Dimension.RESISTANCE,
    "RD": Dimension.RESISTANCE,
    "Q": Dimension.RATIO,
    "B": Dimension.FREQUENCY,
}
"""Dimensions of the numbers that describe a tuned circuit."""

_POWERS = {"p": -12, "n": -9, "u": -6, "m": -3, "c": -2, "": 0, "k": 3, "M": 6, "G": 9}


def decimal_unit(power: int) -> Unit:
    """Return the unit that is 10**power of the SI unit.

    Parameters
    ----------
    power : int
        Power of ten. [1]

    Returns
    -------
    Unit
        The unit.
    """
    return Unit(top=10**power) if power >= 0 else Unit(top=1, bottom=10**-power)


def _prefixed(prefixes: str, *symbols: str) -> dict[str, Unit]:
    return {
        prefix + symbol: decimal_unit(_POWERS[prefix])
        for symbol in symbols
        for prefix in ("", *prefixes.split())
    }


INCH = Unit(top=254, bottom=10_000)
FOOT = Unit(top=3048, bottom=10_000)
ONE = Unit(top=1)
_CELSIUS = Unit(top=1)
_KELVIN = Unit(top=100, bottom=100, shift=-27_315)
_FAHRENHEIT = Unit(top=5, bottom=9, shift=-160)
DEGREE = Unit(top=31_415_926_535_897_932_385, bottom=180 * 10**19)
_PER_MILLION = Unit(top=1, bottom=10**6)

# mHz, mF and nm are left to pint: here they would turn slips of case into two readings.
UNITS: dict[Dimension, dict[str, Unit]] = {
    Dimension.LENGTH: _prefixed("u m c k", "m")
    | dict.fromkeys(("in", "inch", "inches", '"'), INCH)
    | dict.fromkeys(("ft", "foot", "feet", "'"), FOOT)
    | {"yd": Unit(top=9144, bottom=10_000), "mil": Unit(top=254, bottom=10**7)},
    Dimension.FREQUENCY: _prefixed("k M G", "Hz"),
    Dimension.INDUCTANCE: _prefixed("p n u m", "H"),
    Dimension.CAPACITANCE: _prefixed("p n u", "F"),
    Dimension.RESISTANCE: _prefixed("m k M", "ohm", "ohms"),
    Dimension.POWER: _prefixed("n u m k M", "W"),
    Dimension.VOLTAGE: _prefixed("n u m k M", "V"),
    Dimension.CURRENT: _prefixed("n u m k", "A"),
    Dimension.ANGLE: {"deg": DEGREE, "degree": DEGREE, "degrees": DEGREE, "rad": ONE},
    Dimension.CONDUCTIVITY: _prefixed("u m k M", "S/m")
    | {"mS/cm": Unit(top=1, bottom=10), "uS/cm": Unit(top=1, bottom=10**4)}
    | {"mho/m": ONE, "mmho/m": Unit(top=1, bottom=1000), "%IACS": Unit(top=580_000)},
    Dimension.TEMPERATURE: dict.fromkeys(("C", "degC", "celsius"), _CELSIUS)
    | dict.fromkeys(("F", "degF", "fahrenheit"), _FAHRENHEIT)
    | dict.fromkeys(("K", "kelvin"), _KELVIN),
    Dimension.RATIO: {"": ONE, "%": Unit(top=1, bottom=100), "percent": Unit(top=1, bottom=100)}
    | {"ppm": _PER_MILLION},
    Dimension.COUNT: dict.fromkeys(("", "t", "turn", "turns"), ONE),
    Dimension.TIME: _prefixed("n u m", "s")
    | {"min": Unit(top=60), "h": Unit(top=3600), "hr": Unit(top=3600), "d": Unit(top=86_400)},
    Dimension.MASS: {"mg": Unit(top=1, bottom=10**6), "g": Unit(top=1, bottom=1000), "kg": ONE}
    | dict.fromkeys(("lb", "lbs"), Unit(top=45_359_237, bottom=10**8))
    | {"oz": Unit(top=45_359_237, bottom=16 * 10**8)},
    Dimension.LOSS: {"dB": ONE, "Np": Unit(top=8_685_889_638_065_036_553, bottom=10**18)},
    Dimension.LOSS_PER_LENGTH: {
        "dB/m": ONE,
        "dB/100m": Unit(top=1, bottom=100),
        "dB/km": Unit(top=1, bottom=1000),
        "dB/ft": Unit(top=10_000, bottom=3048),
        "dB/100ft": Unit(top=100, bottom=3048),
    },
    Dimension.TEMPERATURE_COEFFICIENT: dict.fromkeys(("ppm/K", "ppm/C", "ppm/degC"), _PER_MILLION)
    | dict.fromkeys(("%/K", "%/C", "%/degC"), Unit(top=1, bottom=100))
    | {"/K": ONE},
    Dimension.CAPACITANCE_PER_LENGTH: _prefixed("p n u", "F/m")
    | {"pF/cm": Unit(top=1, bottom=10**10), "pF/ft": Unit(top=10_000, bottom=3048 * 10**12)}
    | {"nF/km": Unit(top=1, bottom=10**12)},
    Dimension.FLUX_DENSITY: _prefixed("u m", "T") | {"gauss": Unit(top=1, bottom=10**4)},
}
"""Everyday unit names of every dimension; a test proves them equal to pint's conversions."""

LETTERS: dict[Dimension, dict[str, int]] = {
    Dimension.LENGTH: {"m": 0},
    Dimension.FREQUENCY: {"k": 3, "K": 3, "m": 6, "M": 6, "G": 9},
    Dimension.INDUCTANCE: {"p": -12, "n": -9, "N": -9, "u": -6, "U": -6, "m": -3, "H": 0},
    Dimension.CAPACITANCE: {"p": -12, "P": -12, "n": -9, "N": -9, "u": -6, "U": -6, "m": -3, "F": 0},
    Dimension.RESISTANCE: {"m": -3, "R": 0, "r": 0, "k": 3, "K": 3, "M": 6},
    Dimension.POWER: {"m": -3, "W": 0, "k": 3, "K": 3},
    Dimension.VOLTAGE: {"m": -3, "V": 0, "k": 3, "K": 3},
    Dimension.CURRENT: {"u": -6, "m": -3, "A": 0},
}
"""Letters that stand for the decimal point and the prefix, as in 4k7 (after IEC 60062), as powers of ten."""

SI_NAMES: dict[Dimension, str] = {
    Dimension.LENGTH: "meter",
    Dimension.FREQUENCY: "hertz",
    Dimension.INDUCTANCE: "henry",
    Dimension.CAPACITANCE: "farad",
    Dimension.RESISTANCE: "ohm",
    Dimension.POWER: "watt",
    Dimension.VOLTAGE: "volt",
    Dimension.CURRENT: "ampere",
    Dimension.ANGLE: "radian",
    Dimension.CONDUCTIVITY: "siemens/meter",
    Dimension.RATIO: "percent",
    Dimension.COUNT: "turn",
    Dimension.TIME: "second",
    Dimension.MASS: "kilogram",
    Dimension.LOSS: "decibel",
    Dimension.LOSS_PER_LENGTH: "decibel/meter",
    Dimension.TEMPERATURE_COEFFICIENT: "1/kelvin",
    Dimension.CAPACITANCE_PER_LENGTH: "farad/meter",
    Dimension.FLUX_DENSITY: "tesla",
}
"""The SI unit in words pint knows; temperatures are not its business, for they have a shifted zero."""

DESCRIPTIONS = {
    Dimension.LENGTH: ("a length", ("9.91 m", "32 ft 6 in", "AWG 14"), ("m", "ft")),
    Dimension.FREQUENCY: ("a frequency", ("7.05 MHz", "7050 kHz"), ("MHz", "kHz", "Hz")),
    Dimension.INDUCTANCE: ("an inductance", ("8.2 uH", "8u2"), ("uH", "nH")),
    Dimension.CAPACITANCE: ("a capacitance", ("47 pF", "4p7"), ("pF", "nF")),
    Dimension.RESISTANCE: ("a resistance", ("50 ohm", "4k7"), ("ohm", "kohm")),
    Dimension.POWER: ("a power", ("100 W", "1.5 kW"), ("W", "mW")),
    Dimension.VOLTAGE: ("a voltage", ("500 V", "3 kV"), ("V", "kV")),
    Dimension.CURRENT: ("a current", ("1.4 A", "250 mA"), ("A", "mA")),
    Dimension.ANGLE: ("an angle", ("120 deg",), ("deg", "rad")),
    Dimension.CONDUCTIVITY: ("a conductivity", ("5 mS/m", "58 MS/m"), ("mS/m", "S/m", "MS/m")),
    Dimension.TEMPERATURE: ("a temperature", ("20 degC", "68 degF"), ("degC", "degF")),
    Dimension.RATIO: ("a plain number", ("0.66", "66 %"), ("",)),
    Dimension.COUNT: ("a number of turns", ("12", "12.5 turns"), ("",)),
    Dimension.TIME: ("a time", ("30 s", "10 min"), ("s", "min")),
    Dimension.MASS: ("a mass", ("450 g", "12 oz"), ("g", "kg")),
    Dimension.LOSS: ("a loss", ("0.8 dB",), ("dB",)),
    Dimension.LOSS_PER_LENGTH: (
        "a loss per length",
        ("4.3 dB/100 m", "1.3 dB/100 ft"),
        ("dB/100m", "dB/100ft"),
    ),
    Dimension.TEMPERATURE_COEFFICIENT: ("a temperature coefficient", ("30 ppm/K",), ("ppm/K",)),
    Dimension.CAPACITANCE_PER_LENGTH: (
        "a capacitance per length",
        ("100 pF/m", "30 pF/ft"),
        ("pF/m", "pF/ft"),
    ),
    Dimension.FLUX_DENSITY: ("a flux density", ("5 mT", "50 gauss"), ("mT", "T")),
}
# Units a value is shown in, with the least value each is used for; powers of ten except the degree.
SHOWN: dict[Dimension, tuple[tuple[str, float], ...]] = {
    Dimension.LENGTH: (("mm", 1e-3), ("cm", 0.1), ("m", 1.0), ("km", 1e4)),
    Dimension.FREQUENCY: (("Hz", 1.0), ("kHz", 1e3), ("MHz", 1e6), ("GHz", 1e9)),
    Dimension.INDUCTANCE: (("pH", 1e-12), ("nH", 1e-9), ("uH", 1e-6), ("mH", 1e-3), ("H", 1.0)),
    Dimension.CAPACITANCE: (("pF", 1e-12), ("nF", 1e-9), ("uF", 1e-6), ("F", 1.0)),
    Dimension.RESISTANCE: (("mohm", 1e-3), ("ohm", 1.0), ("kohm", 1e3), ("Mohm", 1e6)),
    Dimension.POWER: (("nW", 1e-9), ("uW", 1e-6), ("mW", 1e-3), ("W", 1.0), ("kW", 1e3), ("MW", 1e6)),
    Dimension.VOLTAGE: (("nV", 1e-9), ("uV", 1e-6), ("mV", 1e-3), ("V", 1.0), ("kV", 1e3), ("MV", 1e6)),
    Dimension.CURRENT: (("nA", 1e-9), ("uA", 1e-6), ("mA", 1e-3), ("A", 1.0), ("kA", 1e3)),
    Dimension.ANGLE: (("deg", 1.0),),
    Dimension.CONDUCTIVITY: (("uS/m", 1e-6), ("mS/m", 1e-3), ("S/m", 1.0), ("MS/m", 1e6)),
    Dimension.TEMPERATURE: (("degC", 1.0),),
    Dimension.RATIO: (("", 1.0),),
    Dimension.COUNT: (("", 1.0),),
    Dimension.TIME: (("ns", 1e-9), ("us", 1e-6), ("ms", 1e-3), ("s", 1.0)),
    Dimension.MASS: (("mg", 1e-6), ("g", 1e-3), ("kg", 1.0)),
    Dimension.LOSS: (("dB", 1.0),),
    Dimension.LOSS_PER_LENGTH: (("dB/100m", 0.0),),
    Dimension.TEMPERATURE_COEFFICIENT: (("ppm/K", 0.0),),
    Dimension.CAPACITANCE_PER_LENGTH: (("pF/m", 1e-12), ("nF/m", 1e-9), ("uF/m", 1e-6)),
    Dimension.FLUX_DENSITY: (("uT", 1e-6), ("mT", 1e-3), ("T", 1.0)),
}
IMPERIAL: dict[Dimension, tuple[tuple[str, float], ...]] = {
    Dimension.LENGTH: (("in", 1e-3), ("ft", 0.3048)),
    Dimension.TEMPERATURE: (("degF", 1.0),),
    Dimension.MASS: (("oz", 0.0), ("lb", 0.45359237)),
    Dimension.LOSS_PER_LENGTH: (("dB/100ft", 0.0),),
    Dimension.CAPACITANCE_PER_LENGTH: (("pF/ft", 0.0),),
}
# Value between which a bare number with a unit added is worth suggesting.
LIKELY = {Dimension.FREQUENCY: (1e3, 1e9), Dimension.CONDUCTIVITY: (1e-5, 1e8)}


def _slips() -> dict[Dimension, dict[str, Unit | None]]:
    """Return folded spellings of the unit names; the first letter's case is honoured where it decides."""
    slips: dict[Dimension, dict[str, Unit | None]] = {}
    for dimension, names in UNITS.items():
        table: dict[str, Unit | None] = {name[:1] + name[1:].lower(): unit for name, unit in names.items()}
        for name, unit in names.items():
            folded = name.lower()
            if folded not in table:
                table[folded] = unit
        slips[dimension] = table
    return slips


SLIPS = _slips()
