"""Physical constants, CODATA 2022, written once (NIST SP 961, 2024)."""

from __future__ import annotations

from typing import Final

SPEED_OF_LIGHT_NM_PER_FS: Final = 299.792458
"""Speed of light in vacuum, exact. [nm/fs]"""

PLANCK_EV_NM: Final = 1239.8419843320025
"""Photon energy times vacuum wavelength, h c / e, exact to the double. [eV nm]"""

HBAR_EV_FS: Final = 0.6582119569509066
"""Reduced Planck constant, exact to the double. [eV fs]"""

HBAR2_OVER_2ME_EV_NM2: Final = 0.038099821109686
"""hbar^2 / (2 m_e). [eV nm^2]"""

FREE_SPACE_IMPEDANCE_OHM: Final = 376.730313412
"""Impedance of free space. [ohm]"""
