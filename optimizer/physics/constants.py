"""Constants of nature, exact since 2019.

Source: The International System of Units (SI), 9th edition, BIPM 2019, section 2.2, table 1.
"""

from __future__ import annotations

BOLTZMANN = 1.380649e-23
"""Boltzmann constant [J/K]."""

ELEMENTARY_CHARGE = 1.602176634e-19
"""Elementary charge [C]."""

PLANCK = 6.62607015e-34
"""Planck constant [J s]."""

LIGHT_SPEED = 299792458.0
"""Speed of light in vacuum [m/s]."""

ZERO_CELSIUS = 273.15
"""0 C [K]."""
