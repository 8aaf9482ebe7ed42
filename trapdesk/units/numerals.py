"""Numbers as people write them, to exact fractions and back to text; nothing here knows a unit."""

import math
import re
from collections.abc import Callable

from ..errors import BadInput

Refuse = Callable[..., BadInput]
"""Makes the refusal of a text from a code, with limit and help as keywords."""

_LARGEST_POWER = 400
_TRANSLATION: dict[int, str | None] = (
    {code: chr(code - 0xFEE0) for code in range(0xFF01, 0xFF5F)}
    | dict.fromkeys(map(ord, "\u2010\u2011\u2012\u2013\u2212\ufe63"), "-")
    | dict.fromkeys(map(ord, "\u00b5\u03bc"), "u")
    | dict.fromkeys(map(ord, "\u2126\u03a9\u03c9"), "ohm")
    | dict.fromkeys(map(ord, "\u00b0\u00ba\u02da"), "deg")
    | dict.fromkeys(map(ord, "\u2032\u2019\u2018\u02b9"), "'")
    | dict.fromkeys(map(ord, "\u2033\u201d\u201c\u02ba"), '"')
    | dict.fromkeys(map(ord, "\u2007\u2009\u202f"), "\u00a0")
    | dict.fromkeys(map(ord, "\u2002\u2003\u2004\u2005\u2006\u2008\u200a\u205f\u3000"), " ")
    | {0x2044: "/", 0x2215: "/", 0x212A: "K", 0x2103: "degC", 0x2109: "degF"}
    | {0xBD: " 1/2", 0xBC: " 1/4", 0xBE: " 3/4", 0x2153: " 1/3", 0x2154: " 2/3"}
    | {0x215B: " 1/8", 0x215C: " 3/8", 0x215D: " 5/8", 0x215E: " 7/8"}
)
_FIXED_GROUPS = re.compile(r"(?<![\d.,])\d{1,3}(?:\u00a0\d{3})+(?![\d/])", re.ASCII)
NUMBER = re.compile(
    r"(?:(?P<whole>\d+)[ -])?(?P<over>\d+) ?/ ?(?P<under>\d+)"
    r"|(?P<digits>\d{1,3}(?: \d{3})+(?![\d/])(?:[.,]\d+)?|[\d.,]*\d\.?)(?:[eE](?P<power>[+-]?\d+))?",
    re.ASCII,
)
_GAUGE = re.compile(r"(?:#|awg ?#?|# ?awg) ?(0{1,4}|[1-4]/0|[1-9]\d?)(?: ?awg)?", re.ASCII)
_GAUGE_LAST = re.compile(r"(0{1,4}|[1-4]/0|[1-9]\d?) ?awg", re.ASCII)
_TO_ONE = re.compile(r"(\d+(?:[.,]\d+)?) ?: ?(\d+(?:[.,]\d+)?)", re.ASCII)


class Number:
    """A typed number as whole numbers: value = top / bottom, last digit worth step / bottom."""

    __slots__ = ("bottom", "step", "top")

    def __init__(self, top: int, bottom: int, step: int) -> None:
        self.top = top
        self.bottom = bottom
        self.step = step


def plain_text(text: str) -> str:
    """Return the text in plain letters, with single spaces.

    Parameters
    ----------
    text : str
        As typed or pasted.

    Returns
    -------
    str
        The same with signs, primes, fractions and spaces of print in their plain form.
    """
    if not text.isascii():
        text = text.translate(_TRANSLATION)
        text = _FIXED_GROUPS.sub(lambda groups: groups[0].replace("\u00a0", ""), text)
        text = text.replace("\u00a0", " ")
    text = text.replace("\t", " ").strip()
    while "  " in text:
        text = text.replace("  ", " ")
    return text.replace("''", '"')


def _candidates(digits: str) -> list[str]:
    """Return the plain decimals a run of digits, commas, dots and spaces can mean: none, one or two."""
    if digits.isdigit():
        return [digits]
    if " " in digits:
        head, *groups = re.sub(r"[.,]\d+$", "", digits).split(" ")
        joined = digits.replace(" ", "").replace(",", ".")
        return [joined, f"{head}.{groups[0]}"] if digits == f"{head} {groups[0]}" else [joined]
    commas, dots = digits.count(","), digits.count(".")
    if not commas and dots <= 1:
        return [digits]
    if commas + dots == 1:
        both = re.fullmatch(r"[1-9]\d{0,2},\d{3}", digits)
        return [digits.replace(",", ""), digits.replace(",", ".")] if both else [digits.replace(",", ".")]
    comma_first = commas and (not dots or digits.index(",") < digits.index("."))
    group, point = (",", ".") if comma_first else (".", ",")
    grouped = rf"\d{{1,3}}(?:{re.escape(group)}\d{{3}})+(?:{re.escape(point)}\d+)?"
    if re.fullmatch(grouped, digits) is None:
        return []
    return [digits.replace(group, "").replace(point, ".")]


def exact_number(match: re.Match[str], refuse: Refuse, before: str, after: str) -> Number:
    """Return the number a person meant.

    Parameters
    ----------
    match : match
        A match of `NUMBER`.
    refuse : callable
        Makes the refusal from a code, with limit and help as keywords.
    before, after : str
        The text around the number, to complete what a refusal suggests.

    Returns
    -------
    Number
        The number, exactly.

    Raises
    ------
    BadInput
        If the digits are no number, can be read two ways, or have an absurd exponent.
    """
    if match["over"] is not None:
        over, under = int(match["over"]), int(match["under"])
        if under == 0 or (match["whole"] is not None and over >= under):
            raise refuse("unreadable")
        return Number(int(match["whole"] or 0) * under + over, under, 1)
    readings = _candidates(match["digits"])
    if not readings:
        raise refuse("unreadable")
    if len(readings) > 1:
        help = " or ".join(f"{before}{reading}{after}" for reading in readings)
        raise refuse("two_meanings", help=f"{help}?")
    whole, _, fraction = readings[0].partition(".")
    power = int(match["power"] or 0)
    if abs(power) > _LARGEST_POWER:
        raise refuse("not_finite")
    top, power = int(whole + fraction or "0"), power - len(fraction)
    return Number(top * 10**power, 1, 10**power) if power >= 0 else Number(top, 10**-power, 1)


def gauge_number(text: str) -> int | None:
    """Return the number of a wire gauge written as AWG 14, 14 AWG, #14, AWG 00 or 2/0 AWG.

    Parameters
    ----------
    text : str
        Plain text.

    Returns
    -------
    int or None
        The gauge, 0, -1, -2 and -3 for 0, 00, 000 and 0000; None for any other text. [1]
    """
    folded = text.lower()
    match = _GAUGE.fullmatch(folded) or _GAUGE_LAST.fullmatch(folded)
    if match is None:
        return None
    typed = match[1]
    if "/" in typed:
        return 1 - int(typed[0])
    return 1 - len(typed) if typed[0] == "0" else int(typed)


def to_one(text: str) -> Number | None:
    """Return a ratio written as 2:1 or 1.5:1.

    Parameters
    ----------
    text : str
        Plain text.

    Returns
    -------
    Number or None
        The ratio; None for any other text, and when either side is zero.
    """
    match = _TO_ONE.fullmatch(text)
    if match is None:
        return None
    over, under = (side.replace(",", ".").partition(".") for side in match.groups())
    top, bottom = int(over[0] + over[2]), int(under[0] + under[2])
    if top == 0 or bottom == 0:
        return None
    shift = 10 ** len(under[2])
    return Number(top * shift, bottom * 10 ** len(over[2]), shift)


def decimal_parts(text: str) -> tuple[str, int]:
    """Return the text of a float as digits without zeros at either end, and a power of ten.

    Parameters
    ----------
    text : str
        A number >= 0 as Python writes it.

    Returns
    -------
    tuple of str and int
        Digits, and a power of ten.
    """
    number, _, power = text.partition("e")
    whole, _, fraction = number.partition(".")
    mantissa = (whole + fraction).lstrip("0")
    kept = mantissa.rstrip("0")
    if not kept:
        return "0", 0
    return kept, int(power or 0) - len(fraction) + len(mantissa) - len(kept)


def placed(mantissa: str, power: int) -> str:
    """Return digits times a power of ten as a plain decimal, or with an exponent when that is far shorter.

    Parameters
    ----------
    mantissa : str
        Decimal digits.
    power : int
        Power of ten. [1]

    Returns
    -------
    str
        The number.
    """
    if mantissa.strip("0") and not (-24 < power and power + len(mantissa) < 17):
        return f"{mantissa}e{power}"
    if power >= 0:
        return mantissa if mantissa == "0" else mantissa + "0" * power
    mantissa = mantissa.rjust(1 - power, "0")
    return f"{mantissa[:power]}.{mantissa[power:]}"


def snapped(step: float) -> tuple[int, int]:
    """Return the nearest step of 1, 2 or 5 times a power of ten.

    Parameters
    ----------
    step : float
        A step. [1], > 0

    Returns
    -------
    tuple of int
        1, 2 or 5, and the power of ten.
    """
    lead, power = f"{step:.1e}".split("e")
    for limit, whole in ((1.5, 1), (3.5, 2), (7.5, 5)):
        if float(lead) < limit:
            return whole, int(power)
    return 1, int(power) + 1


def rounded(number: float, digits: int, step: float | None) -> str:
    """Return a decimal, rounded to significant digits or to the nearest step.

    Parameters
    ----------
    number : float
        A finite number. [1]
    digits : int
        Significant digits, used without a step; zeros at the end are dropped. [1], >= 1
    step : float, optional
        Step, taken to the nearest 1, 2 or 5; zeros at the end are kept. [1], > 0

    Returns
    -------
    str
        The number; no minus before a zero.
    """
    if step is None or abs(number) > 1e15 * step:
        text = placed(*decimal_parts(f"{abs(number):.{min(digits, 15) - 1}e}"))
    else:
        lead, power = snapped(step)
        count = round(abs(number) / (lead * 10.0**power)) * lead
        text = placed(str(count), power) if count else "0"
    return f"-{text}" if number < 0 and text != "0" else text


def shortest_decimal(value: float, top: int, bottom: int) -> tuple[str, int]:
    """Return the shortest decimal that, times top / bottom, is nearest to this float of all floats.

    Seventeen digits always do: decimals are then closer together than floats are.

    Parameters
    ----------
    value : float
        A finite float. [1], >= 0
    top, bottom : int
        The unit as a fraction. [1], > 0

    Returns
    -------
    tuple of str and int
        Digits, and a power of ten.
    """
    if value == 0.0:
        return "0", 0
    over, under = value.as_integer_ratio()
    over, under = over * bottom, under * top
    first = math.floor(math.log10(value) + math.log10(bottom / top))
    for count in range(1, 19):
        power = first + 1 - count
        up, down = (10**power, 1) if power >= 0 else (1, 10**-power)
        mantissa = (2 * over * down + under * up) // (2 * under * up)
        if _nearest(mantissa * up * top, bottom * down) == value:
            return decimal_parts(f"{mantissa}e{power}")
    raise ArithmeticError(f"no short decimal times {top}/{bottom} is {value!r}")


def _nearest(top: int, bottom: int) -> float:
    try:
        return top / bottom
    except OverflowError:
        return math.inf


def feet_and_inches(inches: float, digits: int, step: float | None) -> str:
    """Return a length as a tape measure in feet and inches shows it.

    Parameters
    ----------
    inches : float
        The length. [in]
    digits : int
        Significant digits, used without a step. [1], >= 1
    step : float, optional
        How fine to be, from feet down to 1/64 inch; a little coarser is let pass. [in], > 0

    Returns
    -------
    str
        Such as "32 ft 6" or "32 ft 6 1/2"; the unit of the last number is the inch.
    """
    sign = "-" if inches < 0 else ""
    if step is None:
        feet, rest = divmod(float(f"{abs(inches):.{min(digits, 9) - 1}e}"), 12)
        return f"{sign}{int(feet)} ft {rounded(rest, 12, None)}"
    marks = ((12, 1), (6, 1), (3, 1), (2, 1), (1, 1), (1, 2), (1, 4), (1, 8), (1, 16), (1, 32))
    coarse, part = next(((up, down) for up, down in marks if up / down <= 1.3 * step), (1, 64))
    feet, count = divmod(round(abs(inches) * part / coarse) * coarse, 12 * part)
    whole, over = divmod(count, part)
    if not over:
        return f"{sign}{feet} ft {whole}"
    divisor = math.gcd(over, part)
    fraction = f"{over // divisor}/{part // divisor}"
    return f"{sign}{feet} ft {whole} {fraction}" if whole else f"{sign}{feet} ft {fraction}"
