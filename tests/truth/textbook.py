"""The characteristic matrix as the textbooks write it: one point at a time, slow and obvious.

Born and Wolf, Principles of Optics, section 1.6; Macleod, Thin-Film Optical Filters, chapter 2. exp(+i omega t),
N = n - ik, r_p = r_s at normal incidence. Nothing guards against overflow: for films of a few wavelengths only.
"""

from dataclasses import dataclass

import numpy as np


@dataclass(frozen=True)
class Result:
    r: complex
    t: complex
    R: float
    T: float


def cosine_inside(index, b):
    """Return the cosine of the complex angle in a medium by Snell's law, the wave that fades forwards."""
    cosine = np.sqrt(1.0 - (b / index) ** 2 + 0j)
    return -cosine if (index * cosine).imag > 0.0 else cosine


def admittance(index, cosine, p):
    """Return the ratio of the tangential H to the tangential E of a forward wave."""
    return index / cosine if p else index * cosine


def characteristic_matrix(index, cosine, p, thickness_nm, wavelength_nm):
    """Return the matrix that carries (E, H) from the back of a film to its front."""
    delta = 2.0 * np.pi / wavelength_nm * index * cosine * thickness_nm
    y = admittance(index, cosine, p)
    return np.array([[np.cos(delta), 1j * np.sin(delta) / y], [1j * y * np.sin(delta), np.cos(delta)]])


def spectrum_point(incident, films, exit_, wavelength_nm, angle_deg, p):
    """Return r, t, R and T; `films` are (N, thickness in nm), front first, the incident index real."""
    b = incident * np.sin(np.radians(angle_deg))
    cosine_0, cosine_exit = np.cos(np.radians(angle_deg)), cosine_inside(exit_, b)
    y_0, y_exit = admittance(incident, cosine_0, p), admittance(exit_, cosine_exit, p)
    matrix = np.eye(2, dtype=complex)
    for index, thickness_nm in films:
        matrix = matrix @ characteristic_matrix(index, cosine_inside(index, b), p, thickness_nm, wavelength_nm)
    e, h = matrix @ np.array([1.0, y_exit])
    r = (y_0 * e - h) / (y_0 * e + h)
    t_tangential = 2.0 * y_0 / (y_0 * e + h)
    # From the tangential to the full electric field: cos at either end for p.
    t = t_tangential * (cosine_0 / cosine_exit if p else 1.0)
    return Result(r, t, abs(r) ** 2, y_exit.real / y_0 * abs(t_tangential) ** 2)
