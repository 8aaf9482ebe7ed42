"""How serious a finding is."""

from enum import StrEnum


class Level(StrEnum):
    """How serious a finding is, the mildest first."""

    FINE = "fine"
    WATCH = "watch"
    STOP = "stop"


LEVELS = tuple(Level)
