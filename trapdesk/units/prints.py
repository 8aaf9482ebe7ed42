"""What is printed on capacitors: text to numbers and back, by the tables of the standards.

Values and tolerance letters after IEC 60062, preferred values after IEC 60063, temperature characteristics
of class 1 ceramics by their three-sign codes, their trade names and the two letters of IEC 60384; see
`print_tables` and the preferred values for what of it was read and what is from memory.

Source
------
capacitor-codes: copies of the tables; the standards themselves were not seen.
"""

from __future__ import annotations

import math
import re
from collections.abc import Iterator
from itertools import pairwise

from ..design.capacitor_kinds import Printed
from ..design.preferred_values import SERIES
from ..errors import BadInput, Fault
from .print_tables import (
    ALLOWED,
    COLD,
    FIGURE,
    IEC_FIRST,
    MULTIPLIER,
    PERCENT,
    PICOFARADS,
    SMALL,
    TRADE,
    VARIES,
    WARM,
)

_EXPONENT = {"p": -12, "n": -9, "u": -6, "m": -3, "R": -12}
_CODE = re.compile(r"(\d)(\d)([0-9])")
_LETTERED = re.compile(r"(\d*)([pnumR])(\d*)F?", re.ASCII)
_PLAIN = re.compile(r"(\d{1,2}|\d+\.\d+|\.\d+)(pF|nF|uF|p|n|u)?|(\d+)(pF|nF|uF)", re.ASCII)
_VOLTS = re.compile(r"(\d+(?:\.\d+)?)(V|kV|KV|Vdc|VDC|kVdc|kVDC)", re.ASCII)
_RKM_VOLTS = re.compile(r"(\d+)kV?(\d+)V?", re.ASCII)
_PERCENT = re.compile(r"(?:\+-|\+/-|±)?(\d+(?:\.\d+)?)%")
_CLASS_1 = re.compile(r"[A-Z][0-9][A-Z]")
_CLASS_2 = re.compile(r"[XYZ][0-9][A-Z]")
LONGEST = 60
LEAST, MOST = 1e-13, 1e-6
"""Between these lies the capacitance of a part of a tuned circuit. [F]"""


def _refuse(text: str, place: int, code: str, help: str, value: str = "") -> BadInput:
    """Return a refusal that says at which sign of the print it is."""
    shown = value or text[place : place + 12].split(" ")[0]
    return BadInput(Fault("", code, shown, f"sign {place + 1} of {text.strip()!r}", help))


_HELP = "a value such as 470, 4n7 or 47pF, then a tolerance letter, volts, a characteristic: 470J 3kV N150"


def read(text: str, where: str = "") -> Printed:
    """Return what a print says.

    Parameters
    ----------
    text : str
        The print, its pieces apart by spaces, such as "470J 3kV", "4n7", "101K N150" or "47pF 5% C0G".
    where : str
        Dotted key of the field, for the fault.

    Returns
    -------
    Printed
        What it says. [SI]

    Raises
    ------
    BadInput
        Where a piece means nothing, says a second time what another says, or none is a value.
    """
    try:
        return _read(text)
    except BadInput as refused:
        raise BadInput(
            Fault(where, fault.code, fault.value, fault.limit, fault.help) for fault in refused.faults
        ) from None


def _read(text: str) -> Printed:
    if not text.strip():
        raise _refuse(text, 0, "empty", _HELP)
    if len(text) > LONGEST:
        raise _refuse(text[:LONGEST], 0, "too_long", f"at most {LONGEST} signs")
    found: dict[str, object] = {}
    places: dict[str, int] = {}
    letter: tuple[str, int] | None = None
    for piece, place in _pieces(text):
        said = _piece(text, piece, place)
        if "letter" in said:
            if letter is not None or "tolerance" in found:
                raise _refuse(text, place, "says_the_tolerance_twice", "keep one of them", piece)
            letter = (str(said.pop("letter")), place)
        for name in said:
            if name in found or (name == "tolerance" and letter is not None):
                what = {"capacitance": "value", "drift": "characteristic", "varies": "characteristic"}
                raise _refuse(
                    text, place, f"says_the_{what.get(name, name)}_twice", "keep one of them", piece
                )
        found |= said
        places |= dict.fromkeys(said, place)
    if "capacitance" not in found:
        raise _refuse(text, 0, "says_no_capacitance", _HELP, text.strip())
    size = float(found["capacitance"])  # type: ignore[arg-type]
    if not LEAST <= size <= MOST:
        help = "0.1 pF to 1 uF; a code counts in pF: 470 is 47 pF, 471 is 470 pF"
        raise _refuse(text, places["capacitance"], "is_no_value_for_a_tuned_circuit", help)
    if letter is not None:
        found["tolerance"] = _of_letter(text, *letter, size)
    return Printed(text=text, **found)  # type: ignore[arg-type]


def _pieces(text: str) -> Iterator[tuple[str, int]]:
    """Yield the pieces of a print and where they begin; a number and its unit apart by a space are one."""
    found = [(match[0], match.start()) for match in re.finditer(r"[^\s,;/]+", text.replace("µ", "u"))]
    skip = False
    for (piece, place), (after, _) in pairwise([*found, ("", 0)]):
        if skip:
            skip = False
        elif re.fullmatch(r"\d+(?:\.\d+)?", piece) and re.fullmatch(r"pF|nF|uF|V|kV|KV|%", after):
            skip = True
            yield piece + after, place
        else:
            yield piece, place


def _piece(text: str, piece: str, place: int) -> dict[str, object]:
    """Return what one piece says, by the name of the field."""
    if (volts := read_voltage(piece)) is not None:
        return {"voltage": volts}
    if match := _PERCENT.fullmatch(piece):
        share = float(match[1]) / 100
        if not 0 < share < 1:
            raise _refuse(text, place, "is_no_tolerance", "above 0 and below 100 %", piece)
        return {"tolerance": (share, share)}
    if _looks_like_a_characteristic(piece):
        return _characteristic(text, piece, place)
    if len(piece) == 1 and piece.isalpha():
        return {"letter": piece}
    head, letter = piece, ""
    if len(piece) > 1 and piece[-1].isalpha() and piece[-1].isupper() and piece[-1] not in "RF":
        head, letter = piece[:-1], piece[-1]
    elif piece[-1] == "F" and re.fullmatch(r"\d+(?:\.\d+)?|\d+R\d+", piece[:-1]):
        head, letter = piece[:-1], "F"
    said: dict[str, object] = {"capacitance": _value(text, head, place)}
    if letter:
        said["letter"] = letter
    return said


def _value(text: str, piece: str, place: int) -> float:
    """Return the capacitance of a piece in farads."""
    if match := _CODE.fullmatch(piece):
        return read_code(piece)
    if match := _LETTERED.fullmatch(piece):
        whole, letter, decimals = match.groups()
        if whole or decimals:
            digits = (whole + decimals).lstrip("0") or "0"
            return _scaled(int(digits), _EXPONENT[letter] - len(decimals))
    if match := _PLAIN.fullmatch(piece):
        number, unit = (match[1], match[2]) if match[1] else (match[3], match[4])
        whole, _, decimals = number.partition(".")
        power = _EXPONENT[(unit or "p")[0]]
        return _scaled(int(whole + decimals), power - len(decimals))
    wrong = next((n for n, sign in enumerate(piece) if sign not in "0123456789pnumR.F"), 0)
    raise _refuse(text, place + wrong, "means_nothing", _HELP, piece)


def _scaled(digits: int, power: int) -> float:
    """Return digits times a power of ten, rounded once."""
    return float(digits * 10**power) if power >= 0 else digits / 10**-power


def read_code(code: str) -> float:
    """Return the capacitance of a three-digit code: two digits and a power of ten, in pF.

    Parameters
    ----------
    code : str
        Three digits; 8 and 9 as the last stand for hundredths and tenths.

    Returns
    -------
    float
        Capacitance. [F]

    Raises
    ------
    BadInput
        If it is no such code.
    """
    if not _CODE.fullmatch(code):
        wrong = next((n for n, sign in enumerate(code) if not sign.isdigit()), min(len(code), 3))
        raise _refuse(code, wrong, "is_no_code", "three digits such as 470, which is 47 pF", code)
    power = {"8": -2, "9": -1}.get(code[2], int(code[2]))
    return _scaled(int(code[:2]), power - 12)


def write_code(capacitance: float) -> str:
    """Return the three-digit code of a capacitance.

    Parameters
    ----------
    capacitance : float
        Capacitance of two digits. [F]

    Returns
    -------
    str
        The code.

    Raises
    ------
    ValueError
        If it has more than two digits or no code.
    """
    picofarads = capacitance * 1e12
    for sign, power in zip("890123456", (-2, -1, 0, 1, 2, 3, 4, 5, 6), strict=True):
        digits = picofarads / 10.0**power
        # A tenth and above only: 10 to 99 by each power, the smaller power where two would do.
        if round(digits) in range(10, 100) and math.isclose(digits, round(digits), rel_tol=1e-9):
            return f"{round(digits):02d}{sign}"
    raise ValueError("capacitance must have two digits, 0.1 pF to 99 uF")


def write_letters(capacitance: float) -> str:
    """Return a capacitance with its letter for a point, as 4n7.

    Parameters
    ----------
    capacitance : float
        Capacitance of up to three digits. [F]

    Returns
    -------
    str
        After IEC 60062.

    Raises
    ------
    ValueError
        If it is not above zero or has more digits.
    """
    if not capacitance > 0:
        raise ValueError("capacitance must be above 0")
    letter, size = next((s, capacitance * 10.0**-p) for s, p in _RISING if capacitance * 10.0**-p < 999.5)
    text = f"{size:.3g}"
    if not math.isclose(float(text), size, rel_tol=1e-9):
        raise ValueError("capacitance must have at most three digits")
    whole, _, decimals = text.partition(".")
    return f"{'' if whole == '0' else whole}{letter}{decimals}"


_RISING = (("p", -12), ("n", -9), ("u", -6), ("m", -3))


def read_voltage(piece: str) -> float | None:
    """Return the voltage of a piece such as 3kV, 500V or 2kV5.

    Parameters
    ----------
    piece : str
        The piece.

    Returns
    -------
    float or None
        Voltage, None where it says none. [V]
    """
    if match := _VOLTS.fullmatch(piece):
        return float(match[1]) * (1e3 if match[2][0] in "kK" else 1.0)
    if match := _RKM_VOLTS.fullmatch(piece):
        return float(f"{match[1]}.{match[2]}") * 1e3
    return None


def _of_letter(text: str, letter: str, place: int, capacitance: float) -> tuple[float, float]:
    """Return the relative tolerance a letter stands for; the place is where its piece begins."""
    found = read_tolerance(letter, capacitance)
    if found is None:
        at = text.find(letter, place)
        help = f"a tolerance letter is one of {', '.join(PERCENT)}"
        raise _refuse(text, at, "is_no_tolerance_letter", help, letter)
    return found


def read_tolerance(letter: str, capacitance: float) -> tuple[float, float] | None:
    """Return the tolerance a letter stands for.

    Parameters
    ----------
    letter : str
        The letter.
    capacitance : float
        Capacitance it goes with: below 10 pF some letters mean picofarads. [F]

    Returns
    -------
    tuple of float or None
        Relative error down and up, None for no such letter. [1]
    """
    if capacitance < SMALL and letter in PICOFARADS:
        share = PICOFARADS[letter] * 1e-12 / capacitance
        return (share, share)
    if letter not in PERCENT:
        return None
    down, up = PERCENT[letter]
    return (down / 100, up / 100)


def write_tolerance(tolerance: tuple[float, float], capacitance: float) -> str:
    """Return the letter of a tolerance.

    Parameters
    ----------
    tolerance : tuple of float
        Relative error down and up. [1]
    capacitance : float
        Capacitance it goes with. [F]

    Returns
    -------
    str
        The letter.

    Raises
    ------
    ValueError
        If no letter stands for it.
    """
    for letter in PERCENT:
        known = read_tolerance(letter, capacitance)
        if known and all(math.isclose(a, b, rel_tol=1e-9) for a, b in zip(known, tolerance, strict=True)):
            return letter
    raise ValueError("tolerance must be one that a letter stands for")


def _looks_like_a_characteristic(piece: str) -> bool:
    if piece.upper().replace("NPO", "NP0") in TRADE or re.fullmatch(r"[NP]\d{3,4}", piece):
        return True
    two = len(piece) == 2 and piece.isalpha() and piece.isupper()
    return bool(_CLASS_1.fullmatch(piece) or two)


def _characteristic(text: str, piece: str, place: int) -> dict[str, object]:
    if _CLASS_2.fullmatch(piece):
        return {"varies": _class_2(text, piece, place)}
    drift, doubt = _class_1(text, piece, place)
    return {"drift": drift, "drift_doubt": doubt}


def _class_2(text: str, piece: str, place: int) -> tuple[float, float]:
    for n, (table, what) in enumerate(((COLD, "X, Y, Z"), (WARM, "4 to 8"), (VARIES, "A to V"))):
        if piece[n] not in table:
            raise _refuse(text, place + n, "is_no_characteristic", f"here stands one of {what}", piece)
    down, up = VARIES[piece[2]]
    return (down / 100, up / 100)


def read_characteristic(code: str) -> tuple[float, float]:
    """Return the temperature coefficient of a class 1 ceramic and how far it may be off.

    Parameters
    ----------
    code : str
        Such as C0G, U2J, NP0, N150 or CG.

    Returns
    -------
    tuple of float
        Coefficient and its tolerance either way. [1/K]

    Raises
    ------
    BadInput
        If it is no such code, with the sign that is wrong.
    """
    return _class_1(code, code, 0)


def _class_1(text: str, piece: str, place: int) -> tuple[float, float]:
    name = piece.upper().replace("NPO", "NP0")
    if name in TRADE:
        signs = TRADE[name]
        size = 0.0 if name == "NP0" else float(name[1:]) * (-1 if name[0] == "N" else 1)
        return size * 1e-6, ALLOWED[signs[2]] * 1e-6
    if re.fullmatch(r"[NP]\d{3,4}", piece):
        raise _refuse(text, place, "is_no_characteristic", f"known are {', '.join(TRADE)}", piece)
    if len(piece) == 2:
        for n, table in enumerate((IEC_FIRST, ALLOWED)):
            if piece[n] not in table:
                help = f"here stands one of {', '.join(table)}"
                raise _refuse(text, place + n, "is_no_characteristic", help, piece)
        return IEC_FIRST[piece[0]] * 1e-6, ALLOWED[piece[1]] * 1e-6
    tables: tuple[dict, ...] = (FIGURE, MULTIPLIER, ALLOWED)
    for n, table in enumerate(tables):
        if n >= len(piece) or piece[n] not in table:
            help = f"here stands one of {', '.join(table)}"
            raise _refuse(text, place + n, "is_no_characteristic", help, piece)
    # The figure has one decimal: whole tenths times a whole multiplier are exact.
    size = round(FIGURE[piece[0]] * 10) * MULTIPLIER[piece[1]] / 10
    return (size * 1e-6 if size else 0.0), ALLOWED[piece[2]] * 1e-6


def write_characteristic(drift: float, doubt: float) -> str:
    """Return the code of a class 1 characteristic.

    Parameters
    ----------
    drift : float
        Temperature coefficient. [1/K]
    doubt : float
        How far it may be off either way. [1/K]

    Returns
    -------
    str
        The three signs; of several with one meaning the first by its figure.

    Raises
    ------
    ValueError
        If no code stands for it.
    """
    third = next((sign for sign, size in ALLOWED.items() if math.isclose(size * 1e-6, doubt)), None)
    for first, figure in FIGURE.items():
        for second, factor in MULTIPLIER.items():
            if third and math.isclose(round(figure * 10) * factor * 1e-7, drift, abs_tol=1e-12):
                return first + second + third
    raise ValueError("drift and doubt must be ones that a code stands for")


def preferred(value: float, series: str = "E24") -> float:
    """Return the preferred value nearest to a value, by their ratio.

    Parameters
    ----------
    value : float
        The value. [any unit], > 0
    series : str
        One of `SERIES`.

    Returns
    -------
    float
        The preferred value. [the same unit]

    Raises
    ------
    ValueError
        If the value is not above zero.
    """
    if not (value > 0 and math.isfinite(value)):
        raise ValueError("value must be finite and above 0")
    power = math.floor(math.log10(value)) - 1
    among = [size * 10.0**p for p in (power - 1, power, power + 1) for size in SERIES[series]]
    return min(among, key=lambda size: abs(math.log(size / value)))
