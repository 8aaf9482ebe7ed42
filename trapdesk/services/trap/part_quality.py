"""The Q of a trap from whatever readings tell it, by itself and as it was loaded."""

from __future__ import annotations

import math
from collections.abc import Sequence

from ...design.reading_kinds import Reading
from ...engine.measured import Estimate, half_power_centre, half_power_q, unloaded_q, voltage_ratio_q
from .part_values import ReadingRefused, ReadingsDisagree, Remark, Strain, SweepFit, unlikely

CENTRE_SLACK = 0.25
"""How far resonance may lie from the middle of the half-power points, in widths. [1]"""


def half_power(readings: Sequence[Reading]) -> tuple[Reading, Reading] | None:
    """Return the two half-power points; one without the other says nothing."""
    found = {r.what: r for r in readings if r.subject == "trap" and r.what in ("low", "high")}
    if not found:
        return None
    if len(found) == 1:
        raise ReadingRefused("half_power_alone", next(iter(found.values())).name)
    low, high = found["low"], found["high"]
    if not low.value < high.value:
        raise ReadingRefused(
            "half_power_crossed", "trap.low", {"low_hz": float(low.value), "high_hz": float(high.value)}
        )
    return low, high


def quality(
    readings: Sequence[Reading],
    pair: tuple[Reading, Reading] | None,
    fitted: Sequence[SweepFit],
    resonance: float | None,
    reactance: float,
    remarks: list[Remark],
) -> tuple[Estimate | None, dict[str, Estimate], tuple[str, ...]]:
    """Return the Q by itself, as it was loaded in each reading, and the readings that tell it."""
    own: list[tuple[str, Estimate]] = []
    loaded: dict[str, Estimate] = {}

    def add(reading: Reading, estimate: Estimate) -> None:
        if load := reading.option("load"):
            loaded[reading.name] = estimate
            try:
                alone = unloaded_q(estimate.value, load, reactance)
            except ValueError:
                numbers = {"q": estimate.value, "load_ohm": load}
                raise ReadingRefused("load_explains_all", reading.name, numbers) from None
            estimate = Estimate(value=alone, sigma=estimate.sigma * (alone / estimate.value) ** 2)
        own.append((reading.name, estimate))

    for reading in readings:
        if reading.name == "trap.q":
            add(reading, Estimate(value=reading.value, sigma=reading.doubt.of(reading.value)))
        elif reading.name == "trap.ratio":
            if resonance is None:
                raise ReadingRefused("ratio_without_resonance", reading.name)
            if abs(reading.frequency / resonance - 1) < 1e-5:
                raise ReadingRefused("ratio_at_resonance", reading.name)
            # Both frequencies are read on the same dial: what counts is how finely.
            step = 1e-4 * resonance
            sigma = reading.doubt.of(reading.value)
            add(reading, voltage_ratio_q(resonance, reading.frequency, reading.value, step, sigma))
    if pair is not None:
        low, high = pair
        centre = half_power_centre(low.value, high.value)
        width = high.value - low.value
        if resonance is not None:
            told = [r for r in readings if r.name == "trap.f0"]
            slack = CENTRE_SLACK * width + 3 * max((r.doubt.of(resonance) for r in told), default=0.0)
            if abs(centre - resonance) > slack:
                numbers = {"middle_hz": centre, "resonance_hz": resonance}
                raise ReadingRefused("half_power_off_centre", "trap.low", numbers)
        sigma = math.hypot(low.doubt.of(low.value), high.doubt.of(high.value)) / math.sqrt(2)
        if sigma > width / 2:
            raise ReadingRefused("half_power_too_coarse", "trap.low", {"width_hz": width, "doubt_hz": sigma})
        by_load = high if high.option("load") else low
        add(by_load, half_power_q(centre, low.value, high.value, sigma))
        if not by_load.option("load"):
            remarks.append(Remark(code="as_it_was_loaded", where="trap.low"))
    for one in fitted:
        if one.used:
            own.append((one.reading.name, one.estimates["q"]))
            if "loaded_q" in one.estimates:
                loaded[one.reading.name] = one.estimates["loaded_q"]
    return _mean_q(own), loaded, tuple(name for name, _ in own)


def _mean_q(own: Sequence[tuple[str, Estimate]]) -> Estimate | None:
    """Return the weighted mean of several Qs; ReadingsDisagree where they are too far apart."""
    if not own:
        return None
    weights = [1 / one.sigma**2 for _, one in own]
    mean = sum(w * one.value for w, (_, one) in zip(weights, own, strict=True)) / sum(weights)
    cost = sum(w * (one.value - mean) ** 2 for w, (_, one) in zip(weights, own, strict=True))
    if len(own) > 1 and cost > unlikely(len(own) - 1):
        strains = []
        for i, (name, one) in enumerate(own):
            rest = [w for j, w in enumerate(weights) if j != i]
            others = [other for j, (_, other) in enumerate(own) if j != i]
            wanted = sum(w * o.value for w, o in zip(rest, others, strict=True)) / sum(rest)
            left = sum(w * (o.value - wanted) ** 2 for w, o in zip(rest, others, strict=True))
            alone = len(others) == 1 or left <= unlikely(len(others) - 1)
            strains.append(Strain(name=name, dimension="ratio", given=one.value, wanted=wanted, alone=alone))
        raise ReadingsDisagree(sorted(strains, key=lambda s: not s.alone))
    return Estimate(value=mean, sigma=1 / math.sqrt(sum(weights)))
