"""Closed forms: skin effect, lines, waveguide modes, dish illumination, noise, intermodulation, bending.

Depends on: units, errors, stock.
"""
