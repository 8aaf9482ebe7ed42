"""Constants of nature, for every file that needs one; no numpy."""

C0 = 299_792_458.0
"""Speed of light, by definition of the metre. [m/s]"""
MU0 = 1.25663706212e-6
"""Permeability of free space, CODATA 2018. [H/m]"""
EPS0 = 8.8541878128e-12
"""Permittivity of free space, CODATA 2018. [F/m]"""
ETA0 = MU0 * C0
"""Wave impedance of free space. [ohm]"""
