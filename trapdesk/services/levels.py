"""How serious a finding is."""

from enum import StrEnum


class Level(StrEnum):
    """How serious a finding is."""

    FINE = "fine"
    WATCH = "watch"
    STOP = "stop"
