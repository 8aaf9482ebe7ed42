"""Trapdesk: design, build and tune a two-band trap dipole from one terminal."""

__version__ = "0.1.0"
