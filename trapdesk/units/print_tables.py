"""Tables behind what is printed on capacitors, after IEC 60062 and the codes of class 1 ceramics.

The three-sign codes, the trade names and the letters B to K, M and Z were read in copies of the tables; the
other letters and the two letters of IEC 60384 are from memory. Preferred values stand in the design.

Source
------
capacitor-codes, for what was read; the rest from memory.
"""

from __future__ import annotations

PERCENT: dict[str, tuple[float, float]] = {
    "E": (0.005, 0.005),
    "L": (0.01, 0.01),
    "P": (0.02, 0.02),
    "W": (0.05, 0.05),
    "B": (0.1, 0.1),
    "C": (0.25, 0.25),
    "D": (0.5, 0.5),
    "F": (1, 1),
    "G": (2, 2),
    "H": (3, 3),
    "J": (5, 5),
    "K": (10, 10),
    "M": (20, 20),
    "N": (30, 30),
    "Q": (10, 30),
    "T": (10, 50),
    "S": (20, 50),
    "Z": (20, 80),
}
"""Tolerance letters of IEC 60062: per cent down and up."""
PICOFARADS: dict[str, float] = {"B": 0.1, "C": 0.25, "D": 0.5, "F": 1.0, "G": 2.0}
"""Tolerance letters of capacitors below 10 pF, in pF either way."""
SMALL = 10e-12
"""Below it tolerance letters mean picofarads. [F]"""

FIGURE: dict[str, float] = {
    "C": 0.0, "B": 0.3, "L": 0.8, "A": 0.9, "M": 1.0, "P": 1.5, "R": 2.2, "S": 3.3, "T": 4.7, "V": 5.6,
    "U": 7.5,
}  # fmt: skip
"""First sign of a class 1 code: figure of the temperature coefficient. [ppm/K]"""
MULTIPLIER: dict[str, int] = {
    "0": -1, "1": -10, "2": -100, "3": -1000, "4": 1, "6": 10, "7": 100, "8": 1000,
}  # fmt: skip
"""Second sign: what the figure is multiplied by."""
ALLOWED: dict[str, int] = {"G": 30, "H": 60, "J": 120, "K": 250, "L": 500, "M": 1000, "N": 2500}
"""Third sign: how far the coefficient may be off, 25 to 85 degC. [ppm/K]"""

TRADE: dict[str, str] = {
    "P100": "M7G", "NP0": "C0G", "N030": "B2G", "N075": "U1G", "N150": "P2G", "N220": "R2G", "N330": "S2H",
    "N470": "T2H", "N750": "U2J", "N1500": "P3K", "N2200": "R3L",
}  # fmt: skip
"""Trade names of class 1 characteristics, by the code that means the same."""
IEC_FIRST: dict[str, int] = {
    "A": 100, "C": 0, "H": -33, "L": -75, "P": -150, "R": -220, "S": -330, "T": -470, "U": -750, "Q": -1000,
    "V": -1500, "K": -2200,
}  # fmt: skip
"""First letter of the two of IEC 60384: temperature coefficient. [ppm/K], from memory"""
COLD: dict[str, int] = {"X": -55, "Y": -30, "Z": 10}
WARM: dict[str, int] = {"4": 65, "5": 85, "6": 105, "7": 125, "8": 150}
VARIES: dict[str, tuple[float, float]] = {
    "A": (1.0, 1.0), "B": (1.5, 1.5), "C": (2.2, 2.2), "D": (3.3, 3.3), "E": (4.7, 4.7), "F": (7.5, 7.5),
    "P": (10, 10), "R": (15, 15), "S": (22, 22), "T": (33, 22), "U": (56, 22), "V": (82, 22),
}  # fmt: skip
"""Third sign of a class 2 code: change over its temperatures, per cent down and up."""
