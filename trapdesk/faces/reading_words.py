"""Words for readings of parts: why one cannot be used, what may have slipped, what to know."""

from __future__ import annotations

REFUSALS: dict[str, tuple[str, str]] = {
    "another_band": (
        "a resonance of {read_hz} is too far from the computed {computed_hz} to be this trap's",
        "another band, another trap or a slipped unit? If it is this one, set its parts as they are first",
    ),
    "another_part": (
        "it comes to {read}, where {computed} is computed",
        "a slipped unit, or another part? If it is this one, set it as it is first",
    ),
    "nothing_resonates": (
        "nothing that resonates shows clearly from {from_hz} to {to_hz}",
        "sweep across the trap's own resonance; a Touchstone file that says no unit is in GHz by the rules",
    ),
    "no_reflection": ("the file holds no reflection with its phase", "export S11, or R and X"),
    "no_transmission": ("the file holds no transmission with its phase", "export both ports, as .s2p"),
    "cable_is_both": (
        "a trap of cable is coil and capacitor in one: a meter at low frequency reads neither",
        "measure its resonance, with and without a known capacitor across",
    ),
    "probe_is_more_than_all": ("probe= is more than the {read_f} that was read", "a probe has 1 to 2 pF"),
    "meter_near_resonance": (
        "a coil joined to its capacitor cannot be read at {at_hz}",
        "well below the trap's resonance, such as at=100kHz",
    ),
    "half_power_alone": ("one half-power point says nothing by itself", "give trap.low and trap.high"),
    "half_power_crossed": ("{low_hz} is not below {high_hz}", "trap.low is the one below resonance"),
    "half_power_off_centre": (
        "the half-power points lie around {middle_hz}, not around the resonance of {resonance_hz}",
        "read all three in one go: something moved in between",
    ),
    "half_power_too_coarse": (
        "a width of {width_hz} cannot be told with a doubt of {doubt_hz} at each end",
        "read both on one dial, and say doubt= of the step between them",
    ),
    "ratio_without_resonance": ("a voltage ratio tells Q only with the resonance", "give trap.f0 too"),
    "ratio_at_resonance": ("it was read at resonance itself", "read it where the voltage is about half"),
    "load_explains_all": (
        "load={load_ohm} alone would make Q lower than {q}",
        "is it in kohm or Mohm, or was it not across the trap?",
    ),
}
"""What is said of a reading that is refused, and what would be right, by code."""

SUSPECTS = {
    "angles_in_radians": "it fits once the angles are taken for radians: export them in degrees",
    "real_and_imaginary_swapped": "it fits once the two columns are swapped: export real before imaginary",
    "sign_of_reactance": "it fits once the sign of the reactance is turned: export it with its sign",
    "how_is_loop": "it fits how=loop",
    "how_is_direct": "it fits how=direct",
    "how_is_through": "it fits how=through",
}
"""What would explain a sweep that fits no trap."""
NO_SUSPECT = "look for a loose clip, a wrong calibration, a second resonance, or a fixture that was not said"

MODELS = {
    "loop": "a small loop near a resonant circuit, as its reflection",
    "direct": "the trap across the port, as its reflection",
    "through": "the trap in series between two ports, as its transmission",
}

REMARKS = {
    "leads_of_the_meter": "of {size} a meter's leads may be a good part: zero them as they will lie",
    "low_frequency_reads_high": (
        "a meter at low frequency reads more than the coil has at radio frequency; {share} of doubt is"
        " allowed for it"
    ),
    "brought_to_radio_frequency": (
        "read at low frequency, taken to have {share} less at the trap's resonance, where current keeps to"
        " the wire's surface"
    ),
    "no_small_loop": (
        "coupled {plain} times as strongly as its reference: that is no small loop; is it how=direct?"
    ),
    "as_it_was_loaded": (
        "Q as it was with source and meter coupled; less coupling or load= tells the trap's own"
    ),
}
"""What is to be known of a reading, by code."""
