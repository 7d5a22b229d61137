"""Number of resonances of a stack: poles of t in the complex photon energy, by the argument principle.

`Stack` -> here -> `peaks`. t = const / D, and D has no poles: the turns of arg D along a contour count its zeros. With
fields exp(+i omega t) a resonance that decays stands above the real axis, at a height of half its full width.
"""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

import numpy as np

from filmstack.analysis.extrema import phase_thickness
from filmstack.constants import PLANCK_EV_NM
from filmstack.wave.angles import cosine_degrees, sine_degrees

if TYPE_CHECKING:
    from filmstack.arraytypes import ComplexArray, FloatArray
    from filmstack.materials.material import Material
    from filmstack.stack import Stack

LARGEST_STEP = 0.7
"""Change of arg D between neighbouring points of the contour up to which no turn can hide. [rad]"""
MOST_HALVINGS = 60
MOST_POINTS = 200_000


def resonances(stack: Stack, low_ev: float, high_ev: float, angle_deg: float, p: bool) -> int | None:
    """Return the number of poles of t with Re E in a band and full width below that of the band.

    Parameters
    ----------
    stack : Stack
        Films between two media.
    low_ev, high_ev : float
        Ends of the band. [eV]
    angle_deg : float
        Angle of incidence. [deg]
    p : bool
        p, else s.

    Returns
    -------
    int or None
        None where the contour passes too close to a pole, or light does not leave the stack.

    Notes
    -----
    The index of a dispersive medium is continued from the real axis by its derivatives.
    """
    height = 0.5 * (high_ev - low_ev)
    corners = [complex(low_ev, -height), complex(high_ev, -height), complex(high_ev, height), complex(low_ev, height)]
    ends = np.array([low_ev, high_ev])
    change = float(np.abs(np.diff(phase_thickness(stack, _inside(stack, ends)), axis=1)).sum())
    count = 32 + math.ceil(4.0 * change)
    places = np.linspace(0.0, 1.0, count, endpoint=False)
    z = np.concatenate([a + (b - a) * places for a, b in zip(corners, corners[1:] + corners[:1], strict=True)])
    z = np.append(z, z[0])
    value = _front(stack, z, angle_deg, p)
    for _ in range(MOST_HALVINGS):
        if not np.all(np.isfinite(value)) or np.any(value == 0.0):
            return None
        turn = np.angle(value[1:] / value[:-1])
        wide = np.flatnonzero(np.abs(turn) > LARGEST_STEP)
        if not wide.size:
            return round(float(turn.sum()) / (2.0 * np.pi))
        if z.size > MOST_POINTS:
            return None
        middle = 0.5 * (z[wide] + z[wide + 1])
        z, value = np.insert(z, wide + 1, middle), np.insert(value, wide + 1, _front(stack, middle, angle_deg, p))
    return None


def _inside(stack: Stack, energy: FloatArray) -> FloatArray:
    """Return photon energies moved by roundings into the data of every material."""
    longest = min(material.range_nm[1] for material in stack.materials)
    shortest = max(material.range_nm[0] for material in stack.materials)
    return np.asarray(PLANCK_EV_NM / np.clip(PLANCK_EV_NM / energy, shortest, longest))


def _continued(material: Material, z: ComplexArray, stack: Stack) -> ComplexArray:
    """Return N at complex photon energies by its Taylor series from the real axis."""
    order = min(2, material.derivative_order)
    rows = material.index_derivatives(PLANCK_EV_NM / _inside(stack, z.real), order)
    rows[2:].imag = 0.0  # k of a table has one continuous derivative
    if material is stack.incident:
        rows = rows.real.astype(complex)
    return np.asarray(sum(row * (1j * z.imag) ** j / math.factorial(j) for j, row in enumerate(rows)), dtype=complex)


def _front(stack: Stack, z: ComplexArray, angle_deg: float, p: bool) -> ComplexArray:
    """Return D over its size at complex photon energies."""
    sine, cosine = sine_degrees(angle_deg), cosine_degrees(angle_deg)
    n = {material: _continued(material, z, stack) for material in stack.materials}
    b = n[stack.incident] * sine
    # Principal root: Re kappa > 0, continuous with the wave that leaves on the real axis.
    kappa = {material: np.sqrt(x * x - b * b) if sine else x for material, x in n.items()}
    y = {material: n[material] ** 2 / kappa[material] if p else kappa[material] for material in n}
    k0 = 2.0 * np.pi * z / PLANCK_EV_NM
    # Amplitudes of the waves forward and back: next to no reflection at all, sums of fields would cancel.
    forward, back, behind = np.ones_like(z), np.zeros_like(z), y[stack.exit]
    turns: dict[tuple[Material, float], tuple[ComplexArray, ComplexArray, ComplexArray]] = {}
    with np.errstate(all="ignore"):
        for film in reversed(stack.films):
            here = y[film.material]
            forward, back = _crossed(forward, back, here, behind)
            key = (film.material, film.thickness_nm)
            if key not in turns:
                turns[key] = _turns(kappa[film.material] * (k0 * film.thickness_nm))
            there, there_alone, back_again = turns[key]
            forward = forward * np.where(back == 0.0, there_alone, there)
            back = back * back_again
            behind = here
        first = n[stack.incident] / cosine if p else n[stack.incident] * cosine
        d, _ = _crossed(forward, back, first, behind)
        return np.asarray(d / np.abs(d))


def _crossed(
    forward: ComplexArray, back: ComplexArray, here: ComplexArray, behind: ComplexArray
) -> tuple[ComplexArray, ComplexArray]:
    """Return the waves in front of an interface, over their size; `here` and `behind` are admittances."""
    a = ((here + behind) * forward + (here - behind) * back) / here
    b = ((here - behind) * forward + (here + behind) * back) / here
    size = np.maximum(np.abs(a), np.abs(b))
    return a / size, b / size


def _turns(delta: ComplexArray) -> tuple[ComplexArray, ComplexArray, ComplexArray]:
    """Return what a layer does to the waves, over exp|Im delta|: forward, forward alone (of size 1), back.

    Scales are real and positive, so that the turns of D stay.
    """
    there = np.exp(1j * delta.real)
    grow = np.abs(delta.imag)
    return there * np.exp(-delta.imag - grow), there, np.conj(there) * np.exp(delta.imag - grow)
