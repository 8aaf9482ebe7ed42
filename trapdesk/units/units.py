"""Text to SI and back: the one grammar for every quantity a person types.

The number is read here, exactly, in whole numbers; a unit is looked up in `UNITS`. Only a name that is not
there is put to pint, which sees letters and never the number, and is imported at the first such name.
"""

import functools
import math
import re
from dataclasses import dataclass
from typing import Any

from ..errors import BadInput, Fault
from .numerals import (
    NUMBER,
    Number,
    Refuse,
    decimal_parts,
    exact_number,
    feet_and_inches,
    gauge_number,
    placed,
    plain_text,
    rounded,
    shortest_decimal,
    snapped,
    to_one,
)
from .unit_names import (
    DESCRIPTIONS,
    FOOT,
    IMPERIAL,
    INCH,
    LETTERS,
    LIKELY,
    ONE,
    SHOWN,
    SI_NAMES,
    SLIPS,
    UNITS,
    Dimension,
    Unit,
    decimal_unit,
)


@dataclass(frozen=True, kw_only=True, slots=True)
class Typed:
    """A typed value and how finely it was typed.

    Parameters
    ----------
    value : float
        The value. [SI]
    relative_slack : float
        Half a unit of the last typed digit, over the value; infinite for a typed zero. [1]
    """

    value: float
    relative_slack: float


_LONGEST = 80
_LETTERED = re.compile(r"(\d*)([A-Za-z])(\d+) ?([A-Za-z]*)", re.ASCII)
_PART = re.compile(rf"(?P<number>{NUMBER.pattern}) ?(?P<unit>[A-Za-z]+|['\"]|$)[ -]?", re.ASCII)
_PLAIN = r"[\d.,]*\d\.?(?:e[+-]?\d+)?"
_RESISTANCE = rf"(?P<sign>[+-]?) ?(?P<resistance>{_PLAIN})"
_IMAGINARY = rf"(?:[ji] ?(?P<after>{_PLAIN})|(?P<before>{_PLAIN}) ?[ji])"
_IMPEDANCES = [
    re.compile(rf"{form}(?: ?ohms?)?", re.ASCII | re.IGNORECASE)
    for form in (
        _RESISTANCE,
        rf"(?P<turn>[+-]?) ?{_IMAGINARY}",
        rf"{_RESISTANCE} ?(?P<turn>[+-]) ?{_IMAGINARY}",
        rf"{_RESISTANCE} (?P<turn>[+-]) ?(?P<before>{_PLAIN})",
    )
]
_NOT_FINITE = re.compile(r"[+-]? ?(?:nan|inf|infinity)\b.*", re.IGNORECASE | re.DOTALL)
_NAME = re.compile(r"[A-Za-z]{1,30}(?:/[A-Za-z]{1,30})?", re.ASCII)
# Dimensions in which a value may be written in two units, as feet and inches.
_COMPOUND = (Dimension.LENGTH, Dimension.TIME, Dimension.MASS)


def read(text: str, dimension: Dimension, where: str = "") -> float:
    """Return what a person typed as a float in SI.

    Parameters
    ----------
    text : str
        A number and its unit, such as "8.2 uH", "8u2", "32 ft 6 in", "1 1/4 in", "AWG 14" or "1,5 mm".
    dimension : Dimension
        What the field holds.
    where : str
        Dotted key of the field, for the fault.

    Returns
    -------
    float
        The value, the nearest float to what was typed. [SI]

    Raises
    ------
    BadInput
        If the text is not a finite quantity of this dimension, or can be read two ways.
    """
    return read_exact(text, dimension, where).value


def read_exact(text: str, dimension: Dimension, where: str = "") -> Typed:
    """Return what a person typed, and how finely it was typed.

    Parameters
    ----------
    text : str
        A number and its unit, as for `read`.
    dimension : Dimension
        What the field holds.
    where : str
        Dotted key of the field, for the fault.

    Returns
    -------
    Typed
        The value, and half a unit of its last typed digit relative to it. [SI, 1]

    Raises
    ------
    BadInput
        If the text is not a finite quantity of this dimension, or can be read two ways.
    """
    refuse = functools.partial(_refusal, text, dimension, where)
    if len(text) > _LONGEST:
        raise refuse("too_long")
    tidy = plain_text(text)
    if not tidy:
        raise refuse("empty")
    if not tidy.isprintable():
        raise refuse("unreadable")
    sign = -1 if tidy[0] == "-" else 1
    body = tidy[1:].lstrip(" ") if tidy[0] in "+-" else tidy
    if dimension is Dimension.LENGTH and (number := gauge_number(tidy)) is not None:
        return Typed(value=gauge_diameter(number), relative_slack=92.0 ** (0.5 / 39) - 1)
    if dimension is Dimension.RATIO and (ratio := to_one(tidy)) is not None:
        return _typed(ratio.top, ratio.bottom, ratio.step, refuse)
    match = NUMBER.match(body)
    if match is not None:
        name = _unit_name(body[match.end() :])
        unit = _own_unit(name, dimension)
        if unit is None and not any(character.isdigit() for character in name):
            if not name:
                number = exact_number(match, refuse, tidy[: len(tidy) - len(body)], "")
                raise refuse("no_unit", help=_suggestions(number, tidy, dimension, refuse))
            unit = _foreign_unit(name, dimension, refuse)
        if unit is not None:
            number = exact_number(match, refuse, tidy[: len(tidy) - len(body)], body[match.end() :])
            top, bottom = number.top * unit.top, number.bottom * unit.bottom
            return _typed(sign * top + unit.shift * number.bottom, bottom, number.step * unit.top, refuse)
    lettered = _lettered(body, dimension)
    if lettered is not None:
        return _typed(sign * lettered.top, lettered.bottom, lettered.step, refuse)
    if match is not None and dimension in _COMPOUND:
        total = _compound(body, dimension, refuse)
        if total is not None:
            return _typed(sign * total.top, total.bottom, total.step, refuse)
    raise refuse("not_finite" if _NOT_FINITE.fullmatch(tidy) else "unreadable")


def read_impedance(text: str, where: str = "") -> complex:
    """Return a typed impedance.

    Parameters
    ----------
    text : str
        Resistance and reactance, such as "35-j120", "35 - 120j", "35 -120", "j50" or "50", ohm or not.
    where : str
        Dotted key of the field, for the fault.

    Returns
    -------
    complex
        The impedance. [ohm]

    Raises
    ------
    BadInput
        If the text is not a finite impedance, or can be read two ways.
    """
    refuse = functools.partial(_refusal, text, None, where)
    if len(text) > _LONGEST:
        raise refuse("too_long")
    tidy = plain_text(text)
    if not tidy:
        raise refuse("empty")
    match = next((found for form in _IMPEDANCES if (found := form.fullmatch(tidy))), None)
    if match is None:
        raise refuse("not_finite" if _NOT_FINITE.fullmatch(tidy) else "unreadable")
    typed = match.groupdict()
    parts = []
    for sign, digits in (
        (typed.get("sign"), typed.get("resistance")),
        (typed.get("turn"), typed.get("after") or typed.get("before")),
    ):
        found = NUMBER.fullmatch(digits or "0")
        if found is None:
            raise refuse("unreadable")
        number = exact_number(found, refuse, "", "")
        top = -number.top if sign == "-" else number.top
        parts.append(_typed(top, number.bottom, number.step, refuse).value)
    return complex(*parts)


def gauge_diameter(number: int) -> float:
    """Return the diameter of a bare wire of American wire gauge.

    Parameters
    ----------
    number : int
        Gauge number; 0, -1, -2 and -3 for the sizes written 0, 00, 000 and 0000. [1]

    Returns
    -------
    float
        Diameter. [m]

    Source
    ------
    astm-b258, for the law and its two defining diameters.
    """
    return 0.127e-3 * 92.0 ** ((36 - number) / 39)


def _refusal(
    text: str, dimension: Dimension | None, where: str, code: str, *, limit: str = "", help: str = ""
) -> BadInput:
    if not help:
        examples = DESCRIPTIONS[dimension][1] if dimension else ("35-j120", "35-120j", "50")
        *first, last = examples
        help = f"for example {', '.join(first)} or {last}" if first else f"for example {last}"
    return BadInput(Fault(where=where, code=code, value=text, limit=limit, help=help))


def _unit_name(rest: str) -> str:
    return rest.replace(" per ", "/").replace(" ", "")


def _own_unit(name: str, dimension: Dimension) -> Unit | None:
    """Return the unit of this dimension a name means, slips of case and lone prefixes included."""
    unit = UNITS[dimension].get(name)
    if unit is not None or not name:
        return unit
    slips = SLIPS[dimension]
    unit = slips.get(name[0] + name[1:].lower()) or slips.get(name.lower())
    if unit is None and name in LETTERS.get(dimension, ()):
        return decimal_unit(LETTERS[dimension][name])
    return unit


def _foreign_unit(name: str, dimension: Dimension, refuse: Refuse) -> Unit:
    """Return a unit by pint's word for it, or refuse it and say what it is."""
    found: Dimension | None = None
    for tables in (UNITS, SLIPS):
        key = name if tables is UNITS else name[:1] + name[1:].lower()
        found = found or next((other for other in tables if key in tables[other]), None)
    unit = None
    if found is None and _NAME.fullmatch(name):
        found, unit = _ask_pint(name)
        if found is None and len(name) > 3:
            found, unit = _ask_pint(name.lower())
    if found is None:
        raise refuse("unknown_unit")
    if found is not dimension or unit is None:
        raise refuse(
            "wrong_dimension", limit=f"{DESCRIPTIONS[found][0]}, where {DESCRIPTIONS[dimension][0]} is wanted"
        )
    return unit


@functools.cache
def _registry() -> tuple[Any, dict[Any, Dimension], type[Exception]]:
    """Return pint's registry of `units.txt`, the dimensions it knows, and its word for an unknown name."""
    import fractions
    from importlib import resources

    import pint

    registry: Any = pint.UnitRegistry(None, non_int_type=fractions.Fraction)
    registry.load_definitions(
        resources.files("trapdesk.units").joinpath("units.txt").read_text("utf-8").splitlines()
    )
    known = {registry.Quantity(1, name).dimensionality: dimension for dimension, name in SI_NAMES.items()}
    return registry, known, pint.UndefinedUnitError


@functools.lru_cache(maxsize=256)
def _ask_pint(name: str) -> tuple[Dimension | None, Unit | None]:
    """Return the dimension and size of a unit by its name alone; (None, None) when pint does not know it."""
    registry, known, undefined = _registry()
    try:
        # Resolved one by one: pint's parser would take some words, such as nan, for numbers.
        parts = [registry.get_name(part) for part in name.split("/")]
    except undefined:
        return None, None
    if "" in parts:
        return None, None
    units = registry.UnitsContainer({parts[0]: 1})
    if len(parts) == 2:
        units /= registry.UnitsContainer({parts[1]: 1})
    quantity = registry.Quantity(1, units).to_base_units()
    dimension = known.get(quantity.dimensionality)
    if dimension is None:
        return None, None
    top, bottom = quantity.magnitude.as_integer_ratio()
    return dimension, Unit(top=top, bottom=bottom)


def _typed(top: int, bottom: int, step: int, refuse: Refuse) -> Typed:
    """Return the nearest float to top / bottom; Python divides whole numbers with a single rounding."""
    try:
        value = top / bottom
    except OverflowError:
        raise refuse("not_finite") from None
    if value == 0.0 and top != 0:
        raise refuse("too_small", limit="the least number that can be held")
    return Typed(value=value, relative_slack=step / (2 * abs(top)) if top else math.inf)


def _suggestions(number: Number, body: str, dimension: Dimension, refuse: Refuse) -> str:
    """Return the number with the units it may have lacked."""
    units = DESCRIPTIONS[dimension][2]
    low, high = LIKELY.get(dimension, (0.0, math.inf))
    value = abs(_typed(number.top, number.bottom, number.step, refuse).value)
    own = UNITS[dimension]
    likely = [name for name in units if low <= value * own[name].top / own[name].bottom <= high]
    return " or ".join(f"{body} {name}" for name in (likely or units)[:2]) + "?"


def _lettered(body: str, dimension: Dimension) -> Number | None:
    """Return a number with a letter for its decimal point, already in SI."""
    match = _LETTERED.fullmatch(body)
    if match is None:
        return None
    whole, letter, fraction, name = match.groups()
    power = LETTERS.get(dimension, {}).get(letter)
    if power is None or (name and _own_unit(name, dimension) != ONE):
        return None
    top, bottom = int(whole + fraction), 10 ** len(fraction)
    unit = decimal_unit(power)
    return Number(top * unit.top, bottom * unit.bottom, unit.top)


def _compound(body: str, dimension: Dimension, refuse: Refuse) -> Number | None:
    """Return a value in falling units, such as feet and inches, already in SI."""
    total: Number | None = None
    larger: Unit | None = None
    position = 0
    while position < len(body):
        match = _PART.match(body, position)
        if match is None:
            return None
        inches = not match["unit"] and larger == FOOT
        unit = INCH if inches else _own_unit(match["unit"], dimension)
        if unit is None:
            return None
        number = exact_number(match, refuse, body[:position], body[match.end("number") :])
        part = Number(number.top * unit.top, number.bottom * unit.bottom, number.step * unit.top)
        if total is None or larger is None:
            total = part
        elif part.top * larger.bottom >= larger.top * part.bottom:
            raise refuse("unreadable", help="the smaller unit must come to less than one of the larger")
        else:
            total = Number(
                total.top * part.bottom + part.top * total.bottom,
                total.bottom * part.bottom,
                part.step * total.bottom,
            )
        whole = match["over"] is None and match["power"] is None and match["digits"].isdigit()
        if not whole and match.end() < len(body):
            return None
        larger, position = unit, match.end()
    return total


def show(
    value: float,
    dimension: Dimension,
    system: str = "metric",
    digits: int = 4,
    resolution: float | None = None,
) -> str:
    """Return a value for a person to read, no finer than asked.

    Parameters
    ----------
    value, dimension, system, digits, resolution
        As for `show_parts`.

    Returns
    -------
    str
        Number and unit, which `read` takes back unless the value is NaN ("not known") or infinite.
    """
    return " ".join(part for part in show_parts(value, dimension, system, digits, resolution) if part)


def show_parts(
    value: float,
    dimension: Dimension,
    system: str = "metric",
    digits: int = 4,
    resolution: float | None = None,
) -> tuple[str, str]:
    """Return the number and the unit of `show` apart, for columns.

    Parameters
    ----------
    value : float
        The value. [SI]
    dimension : Dimension
        What it measures.
    system : str
        "metric" or "imperial".
    digits : int
        Significant digits, used without a resolution; zeros at the end are dropped. [1], >= 1
    resolution : float, optional
        The step to round to, taken to the nearest 1, 2 or 5; zeros at the end are kept. [SI], > 0

    Returns
    -------
    tuple of str
        Number and unit name; the name is empty for a plain number.

    Raises
    ------
    ValueError
        If the system is unknown, digits is below 1 or the resolution is not above 0.
    """
    if system not in ("metric", "imperial"):
        raise ValueError(f'system must be "metric" or "imperial", not {system!r}')
    if digits < 1:
        raise ValueError(f"digits must be at least 1, not {digits}")
    if resolution is not None and not 0 < resolution < math.inf:
        raise ValueError(f"resolution must be above 0, not {resolution}")
    shown = IMPERIAL.get(dimension, SHOWN[dimension]) if system == "imperial" else SHOWN[dimension]
    if not math.isfinite(value):
        return ("not known" if math.isnan(value) else "infinite" if value > 0 else "-infinite"), ""
    if resolution is None:
        size = abs(float(f"{value:.{digits - 1}e}"))
    else:
        lead, power = snapped(resolution)
        step = lead * 10.0**power
        size = abs(value) if abs(value) > 1e15 * step else round(abs(value) / step) * step * (1 + 1e-12)
    name = _fitting(size, shown)
    if name == "ft":
        step = None if resolution is None else resolution / 0.0254
        return feet_and_inches(value / 0.0254, digits, step), "in"
    unit = UNITS[dimension][name]
    number = (value * unit.bottom - unit.shift) / unit.top
    if resolution is not None:
        resolution *= unit.bottom / unit.top
    return rounded(number, digits, resolution), "turns" if dimension is Dimension.COUNT else name


def to_text(value: float, dimension: Dimension) -> str:
    """Return the shortest text that `read` turns back into the very same float.

    Parameters
    ----------
    value : float
        The value. [SI]
    dimension : Dimension
        What it measures.

    Returns
    -------
    str
        Number and unit, metric, as it is kept in files.

    Raises
    ------
    ValueError
        If the value is not finite.
    """
    if not math.isfinite(value):
        raise ValueError(f"value must be finite, not {value}")
    shown = SHOWN[dimension]
    name = _fitting(abs(value), shown)
    unit = UNITS[dimension][name]
    if dimension is Dimension.ANGLE:
        mantissa, power = shortest_decimal(abs(value), unit.top, unit.bottom)
    else:
        mantissa, power = decimal_parts(repr(abs(value)))
        power += len(str(unit.bottom)) - len(str(unit.top))
    return f"{'-' if value < 0 else ''}{placed(mantissa, power)} {name}".rstrip()


def _fitting(size: float, shown: tuple[tuple[str, float], ...]) -> str:
    """Return the largest of the units (name, least value) a size reaches; the base unit for a zero."""
    if size == 0.0:
        return next((name for name, least in shown if least == 1.0), shown[0][0])
    return next((name for name, least in reversed(shown) if size >= least), shown[0][0])
