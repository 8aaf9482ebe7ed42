"""A quick solenoid for a search: the rings' inductance and loss as a fit, good to half a per cent and two.

Over Rosa's formula the rings depend on three numbers only: turns, diameter over pitch, wire over pitch. Both
ratios are smooth in them and stand here as products of Chebyshev polynomials, fitted by `fit`.
"""

import numpy as np
from numpy.polynomial.chebyshev import chebvander
from numpy.typing import ArrayLike, NDArray

from .coil_formulas import rosa_inductance
from .limits import positive
from .rings import solenoid_rings

FloatArray = NDArray[np.float64]

QUICK_RANGE = {
    "turns": (1.0, 80.0),
    "diameter_over_pitch": (2.2, 150.0),
    "wire_over_pitch": (0.12, 0.955),
}
QUICK_ERROR = {"inductance": 0.005, "proximity": 0.02}
"""Largest miss against the rings up to 60 turns, relative."""
DEGREES = (6, 5, 6)
FIT_TURNS = (1, 2, 3, 4, 5, 6, 8, 10, 13, 17, 22, 29, 38, 50, 64)


def _scaled(turns: FloatArray, diameter: FloatArray, wire: FloatArray) -> tuple[FloatArray, ...]:
    """Bring turns, diameter and wire, both over pitch, to -1 to 1, with room where the fit bends most."""
    x, y, z = np.log(turns), np.log(diameter), np.sqrt(1.0 - wire)
    ends = [np.log(QUICK_RANGE["turns"]), np.log(QUICK_RANGE["diameter_over_pitch"])]
    ends.append(np.sqrt(1.0 - np.array(QUICK_RANGE["wire_over_pitch"])))
    return tuple(2 * (v - a) / (b - a) - 1 for v, (a, b) in zip((x, y, z), ends, strict=True))


def in_range(diameter: ArrayLike, pitch: ArrayLike, wire_diameter: ArrayLike) -> NDArray[np.bool_]:
    """Return whether the fit covers a winding of these diameters and this pitch.

    Parameters
    ----------
    diameter, pitch, wire_diameter : float or array
        As of `quick_coil`. [m], > 0

    Returns
    -------
    bool array
        Whether both ratios lie in `QUICK_RANGE`.

    Raises
    ------
    ValueError
        If any value is outside the limits above; NaN counts as outside.
    """
    positive(diameter=diameter, pitch=pitch, wire_diameter=wire_diameter)
    low, high = QUICK_RANGE["diameter_over_pitch"]
    thin, thick = QUICK_RANGE["wire_over_pitch"]
    size, share = np.asarray(diameter, float) / pitch, np.asarray(wire_diameter, float) / pitch
    return (low <= size) & (size <= high) & (thin <= share) & (share <= thick)


def quick_coil(
    diameter: ArrayLike, pitch: ArrayLike, wire_diameter: ArrayLike, turns: ArrayLike
) -> tuple[FloatArray, FloatArray]:
    """Return inductance and proximity factor of solenoids, current on the surface only; inputs broadcast.

    Parameters
    ----------
    diameter : float or array
        Diameter of a turn, centre to centre of the wire. [m], 2.2 to 150 pitches
    pitch : float or array
        Distance from turn to turn. [m], > 0
    wire_diameter : float or array
        Diameter of the bare wire. [m], 0.12 to 0.955 pitches
    turns : float or array
        Number of turns, whole or not. [-], 1 to 80

    Returns
    -------
    tuple of float array
        Inductance [H] and proximity factor [-], as `solenoid_rings` gives them.

    Raises
    ------
    ValueError
        If any value is outside the limits above; NaN counts as outside.

    Source
    ------
    Derived here: `solenoid_rings`, fitted.
    """
    if not np.all(in_range(diameter, pitch, wire_diameter)):
        raise ValueError("diameter must be 2.2 to 150 pitches and wire_diameter 0.12 to 0.955 pitches")
    low, high = QUICK_RANGE["turns"]
    if not np.all((low <= np.asarray(turns)) & (np.asarray(turns) <= high)):
        raise ValueError("turns must be between 1 and 80")
    given = (turns, np.asarray(diameter, float) / pitch, np.asarray(wire_diameter, float) / pitch)
    x, y, z = _scaled(*(np.asarray(v, float) for v in given))
    vander = (chebvander(v, n) for v, n in zip((x, y, z), DEGREES, strict=True))
    first, second, third = vander
    logs = [
        np.einsum("...i,...i->...", first, _inner(table, second, third))
        for table in (_INDUCTANCE, _PROXIMITY)
    ]
    return rosa_inductance(diameter, pitch, wire_diameter, turns) * np.exp(logs[0]), np.exp(logs[1])


def _inner(table: FloatArray, second: FloatArray, third: FloatArray) -> FloatArray:
    """Sum a table over its last two axes."""
    over = third @ table.reshape(-1, table.shape[2]).T
    over = over.reshape(*third.shape[:-1], *table.shape[:2])
    return np.einsum("...ij,...j->...i", over, second)


def fit() -> tuple[FloatArray, FloatArray]:
    """Solve the rings of some 800 windings and return both tables; this is what made the numbers below.

    Returns
    -------
    tuple of float array
        Coefficients of the logarithm of inductance over Rosa's, and of that of the proximity factor. [1]

    Source
    ------
    Derived here: least squares at Chebyshev points of both ratios.
    """
    (small, large), (thin, thick) = QUICK_RANGE["diameter_over_pitch"], QUICK_RANGE["wire_over_pitch"]
    across = 0.5 * (1 - np.cos(np.pi * (np.arange(6) + 0.5) / 6))
    gaps = 0.5 * (1 - np.cos(np.pi * (np.arange(9) + 0.5) / 9))
    diameters = np.exp(np.log(small) + np.log(large / small) * across)
    wires = 1 - (np.sqrt(1 - thin) + (np.sqrt(1 - thick) - np.sqrt(1 - thin)) * gaps) ** 2
    shapes = [(n, d, w) for n in FIT_TURNS for w in wires for d in diameters]
    solved = np.array([solenoid_rings(d, 1.0, w, n) for n, d, w in shapes])
    turns, diameter, wire = np.array(shapes).T
    solved[:, 0] /= rosa_inductance(diameter, 1.0, wire, turns)
    first, second, third = (
        chebvander(v, n) for v, n in zip(_scaled(turns, diameter, wire), DEGREES, strict=True)
    )
    products = np.einsum("ni,nj,nk->nijk", first, second, third).reshape(turns.size, -1)
    tables = np.linalg.lstsq(products, np.log(solved), rcond=None)[0]
    shape = tuple(n + 1 for n in DEGREES)
    return tables[:, 0].reshape(shape), tables[:, 1].reshape(shape)


def _read(text: str) -> FloatArray:
    """Return a table written as whole numbers of a hundred thousandth."""
    return np.array(text.split(), float).reshape(tuple(n + 1 for n in DEGREES)) * 1e-5


_INDUCTANCE = _read(
    """
    -6751 -6702 -74 319 -42 3 -1 9280 8926 -124 -484 50 -7 0 -4977 -4786 16 254 -18 2 0 2152 2121 67
    -103 1 0 0 -780 -796 -56 37 4 -1 0 235 249 27 -11 -3 0 0 -2323 -2584 -30 106 -34 5 -1 3241 3532 -174
    -238 41 -11 1 -1300 -1590 0 109 -16 3 0 251 458 71 -29 2 0 0 44 -44 -36 6 1 0 0 -45 -20 9 -1 -1 0 0
    1286 1447 126 -72 1 1 0 -1132 -1219 -52 66 -9 -1 0 472 468 -40 -41 5 -1 0 -190 -206 11 18 -2 0 0 53
    81 12 -5 0 0 0 -2 -16 -7 2 1 0 0 -410 -417 5 45 1 -2 0 275 332 88 -15 -5 2 0 -103 -122 -50 -2 2 -1 0
    39 23 -4 -2 0 0 0 -24 -15 8 2 0 0 0 13 14 1 0 0 0 0 65 46 -26 -10 3 0 0 -24 -28 -3 11 3 0 0 21 43 31
    0 -3 0 0 -8 -17 -20 -4 1 0 0 -3 -9 -2 1 0 0 0 -1 5 5 1 0 0 0 1 8 8 -2 -2 0 0 -15 -25 -16 -3 1 0 0 1
    5 9 6 1 0 0 13 22 9 -2 -2 0 0 -6 -15 -12 -2 1 0 0 -5 -4 4 2 0 0 0 -4 -3 1 2 0 0 0 9 11 3 -3 -1 0 0
    -10 -17 -9 0 1 0 0 4 9 9 3 0 0 0 8 10 0 -2 -1 0 0 -10 -15 -5 0 1 0 0
    """
)
_PROXIMITY = _read(
    """
    51502 50637 2237 1279 1115 -9 92 14305 27113 11124 326 626 246 -64 -351 -797 -79 -229 -267 -35 -36
    -194 -1065 -1261 -371 -53 -31 10 -777 -923 -15 143 51 24 8 284 410 156 59 29 6 0 43710 44875 4821
    2290 996 26 121 23441 36293 12697 1267 833 236 -40 -158 2277 1875 -603 -303 -13 -71 -549 -2362 -2079
    -529 -144 -46 8 -950 -1300 -271 147 90 33 16 204 420 307 132 48 13 0 -9205 -9710 168 734 -208 -27 28
    1763 1619 1033 1046 113 -28 42 3719 6492 2418 -70 59 27 -29 -172 -232 -317 -386 -151 -26 -17 -569
    -1208 -662 -64 5 5 10 -188 -188 74 137 80 29 9 -3058 -4647 -1927 -331 -18 -23 0 -4163 -6158 -1713
    168 -29 -14 29 1368 1956 875 345 76 3 8 1072 1838 594 -148 -52 -15 -19 -282 -555 -372 -151 -40 -3 -1
    -302 -537 -222 32 48 24 12 1049 1251 179 -11 49 23 3 -334 -518 -308 -97 25 17 2 -930 -1372 -271 147
    9 -3 10 576 944 456 118 13 -9 -4 311 467 66 -103 -31 -6 -6 -232 -476 -315 -90 1 14 8 -13 81 129 12
    -35 -12 -2 373 517 96 -61 -25 -8 -4 -326 -509 -224 -40 7 6 2 -230 -268 88 138 22 -1 3 302 478 175 1
    -11 -7 -3 32 -56 -188 -122 -19 5 2 -72 -109 -40 3 4 -4 -2 -30 -25 29 16 -10 -6 -1 115 146 -16 -52
    -12 -3 -2 -186 -273 -70 29 20 6 2 -32 -7 75 59 10 1 1 180 235 -1 -77 -33 -8 -2
    """
)
