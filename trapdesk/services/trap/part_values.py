"""What readings of a trap and its parts come to, and why they cannot be used: data, no words."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from ...design.reading_kinds import Reading
from ...engine.fits import Fitted
from ...engine.measured import Estimate
from ...engine.sampling import squares_at
from ...errors import TrapdeskError


class ReadingRefused(TrapdeskError):
    """Readings that cannot be used: why (`code`), of which, and the numbers behind it, SI by name.

    `suspects` are codes of slips that would explain it.
    """

    exit_code = 2

    def __init__(
        self,
        code: str,
        where: str,
        numbers: Mapping[str, float] | None = None,
        suspects: Sequence[str] = (),
    ) -> None:
        self.code, self.where, self.numbers = code, where, dict(numbers or {})
        self.suspects = tuple(suspects)
        super().__init__(code, where, self.numbers, self.suspects)


@dataclass(frozen=True, kw_only=True)
class Strain:
    """A reading against what the others make of it, in SI; `alone` tells whether it alone can be at fault."""

    name: str
    dimension: str
    given: float
    wanted: float
    alone: bool


class ReadingsDisagree(TrapdeskError):
    """Readings that no trap fits, each with what the others want."""

    exit_code = 2

    def __init__(self, strains: Sequence[Strain]) -> None:
        self.strains = tuple(strains)
        super().__init__(self.strains)


@dataclass(frozen=True, kw_only=True)
class SweepFit:
    """A sweep with the model over it; `suspects` are codes of what would explain why it does not hold."""

    reading: Reading
    fitted: Fitted
    estimates: dict[str, Estimate]
    suspects: tuple[str, ...]

    @property
    def used(self) -> bool:
        """Whether its values went into the answer."""
        return self.fitted.holds


@dataclass(frozen=True, kw_only=True)
class Remark:
    """Something to know about a reading: a code, which reading, and the number behind it."""

    code: str
    where: str
    value: float = 0.0


@dataclass(frozen=True, kw_only=True)
class PartsFound:
    """What the readings say of the trap; None for what they do not tell. `computed` is by the same names.

    `told_by` are the readings behind each value. `loaded_q` is by the reading that it was loaded in.
    """

    resonance: Estimate | None
    inductance: Estimate | None
    capacitance: Estimate | None
    q: Estimate | None
    computed: dict[str, float]
    told_by: dict[str, tuple[str, ...]]
    loaded_q: dict[str, Estimate]
    fits: tuple[SweepFit, ...]
    remarks: tuple[Remark, ...]

    @property
    def tells_anything(self) -> bool:
        """Whether any value came out."""
        return any((self.resonance, self.inductance, self.capacitance, self.q))


def unlikely(freedom: int) -> float:
    """Return the sum of squares that chance passes once in a thousand times."""
    return float(squares_at(freedom, 3.09))
