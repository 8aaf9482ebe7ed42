"""The words of faults, refusals and beliefs for the next move."""

from __future__ import annotations

FAULTS: dict[str, tuple[str, str]] = {
    "trap_shorted_one": (
        "a shorted trap on one side",
        "look for a bridged coil or a capacitor burnt through",
    ),
    "trap_shorted_both": ("both traps shorted", "look for jumpers left in, or capacitors burnt through"),
    "trap_open_one": ("an open trap on one side", "look for a broken coil wire or joint at one trap"),
    "trap_open_both": ("both traps open", "look for broken coil wires or joints at both traps"),
    "trap_open_and_shorted": ("one trap open and the other shorted", "look at both traps"),
    "end_wire_missing": ("an end wire that is off", "look whether one end wire still holds at its trap"),
    "end_wire_broken": ("an end wire that is broken", "look along both end wires, and compare their lengths"),
    "wires_swapped_both": ("inner and end wires swapped on both sides", "measure both wires of a side"),
    "wires_swapped_one": ("inner and end wire swapped on one side", "measure both wires of each side"),
    "water_one": ("water in one trap", "open and dry both traps, then read again"),
    "water_both": ("water in both traps", "open and dry both traps, then read again"),
    "unequal_traps": ("traps that are not alike", "measure both traps by themselves and bring them together"),
    "traps_off": ("both traps far off their frequency", "measure both traps by themselves and mend them"),
    "slipped_inner": ("inner wires a whole metre or foot off", "measure the inner wires again"),
    "slipped_end": ("end wires a whole metre or foot off", "measure the end wires again"),
    "angles_in_radians": (
        "a sweep with its angles in radians, read as degrees",
        "save it with degrees, or as real and imaginary part",
    ),
    "real_and_imaginary_swapped": (
        "a sweep with real and imaginary part in each other's column",
        "look at the order of its columns",
    ),
    "sign_of_reactance": ("a sweep with the sign of X turned over", "look how it was saved"),
}
"""What fits the readings, in builder's words, and where to look."""

REFUSALS: dict[str, tuple[str, str]] = {
    "no_line": (
        "there is no line in the design",
        "put [station.line] with its type and length into the design",
    ),
    "no_such_band": ("the design has no such band", "name a band the design has"),
    "wrong_band_upper": ("this is a frequency of the upper band", "is it upper. that was meant?"),
    "wrong_band_lower": ("this is a frequency of the lower band", "is it lower. that was meant?"),
    "far_from_the_band": (
        "this is too far from the band to be of this antenna",
        "a frequency from {low} to {high}; MHz or kHz?",
    ),
    "sweep_of_another_band": (
        "the sweep runs from {from} to {to}, which is hardly of this band",
        "a sweep that covers {low} to {high}",
    ),
    "contradict": (
        "two readings of the same thing contradict each other",
        "measure it again, keep the one you trust, or give them more doubt=",
    ),
}

LEARNED: dict[str, str] = {
    "traps": "traps, mean",
    "traps_apart": "traps, apart",
    "inner": "inner wire",
    "end": "end wire",
    "height": "height, sag in it",
    "soil": "soil, dry -1, wet 1",
    "site": "trees, slope, mast",
    "line_length": "line, longer by",
    "line_loss": "line, more loss",
    "line_z0": "line, impedance",
}
AT_THE_HALYARD = (
    "Before anyone goes to the halyard: lock the transmitter out, and look up for power lines.",
    "Traps and wire ends burn whoever touches them while transmitting, however harmless they look.",
)
