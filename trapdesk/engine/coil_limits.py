"""How much of a coil the ring solution is asked for."""

MOST_TURNS = 80
"""Beyond it the system of equations outgrows a small board."""
