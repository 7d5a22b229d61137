"""The electric field inside a stack: `Stack` -> here -> tables and plots.

Depth 0 is the first interface, negative depth lies in the incident medium; a point on an interface belongs
to the layer behind it. z points into the stack, x lies in the plane of incidence along the surface, y is normal
to both. Fields are relative to the electric field of the incident wave, exp(+i omega t).
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from itertools import pairwise
from typing import TYPE_CHECKING, Literal

import numpy as np

from filmstack.analysis.points import Request, request
from filmstack.constants import FREE_SPACE_IMPEDANCE_OHM
from filmstack.errors import ArgumentError, CoherenceError
from filmstack.wave import arithmetic, kernels
from filmstack.wave.derivatives import faded_cosine_sine
from filmstack.wave.finish import Front, as_complex, fields, halvings
from filmstack.wave.media import normal_wavenumber
from filmstack.wave.route import Group, blocking_films, dark, states

if TYPE_CHECKING:
    import pandas as pd
    from matplotlib.axes import Axes
    from numpy.typing import ArrayLike

    from filmstack.arraytypes import ComplexArray, FloatArray, IntArray
    from filmstack.stack import Stack

DEPTHS_A_LAYER = 64
"""Depths in each film, both faces included, where none are asked for."""
CAUTION = (
    "the field inside a coating is a design proxy for laser damage, not a threshold: thresholds are measured "
    "(ISO 21254); work with lasers follows IEC 60825-1 and local rules"
)


@dataclass(frozen=True, eq=False)
class Field:
    """Field of one polarization, shape (depth, angle, wavelength).

    Parameters
    ----------
    wavelength_nm, angle_deg : ndarray, shapes (wavelength,) and (angle,)
        Axes. [nm], [deg]
    polarization : str
        s or p.
    depth_nm : ndarray, shape (depth,)
        Depth below the first interface. [nm]
    layer : ndarray of int, shape (depth,)
        Film of each depth, from 0; -1 is the incident medium, the number of films the exit medium.
    boundaries_nm : ndarray, shape (film + 1,)
        Depth of every interface. [nm]
    E_x, E_y, E_z : ndarray of complex
        Components over the incident amplitude. [1]
    absorption_per_nm : ndarray
        Absorbed part of the incident flux per depth; 0 in the end media. [1/nm]
    net_flux : ndarray
        Flux into the stack over the incident one; constant where nothing absorbs. [1]
    notes : tuple of str
        Assumptions made on the way, and a caution.
    """

    wavelength_nm: FloatArray
    angle_deg: FloatArray
    polarization: str
    depth_nm: FloatArray
    layer: IntArray
    boundaries_nm: FloatArray
    E_x: ComplexArray
    E_y: ComplexArray
    E_z: ComplexArray
    absorption_per_nm: FloatArray
    net_flux: FloatArray
    notes: tuple[str, ...]
    _solved: Solved

    @cached_property
    def intensity(self) -> FloatArray:
        """|E|^2 over that of the incident wave. [1]"""
        return np.asarray(sum(part.real**2 + part.imag**2 for part in (self.E_x, self.E_y, self.E_z)))

    @cached_property
    def largest_in_layers(self) -> tuple[FloatArray, FloatArray]:
        """Largest |E|^2 in each film and its depth, both of shape (layer, angle, wavelength). [1], [nm]"""
        return self._solved.largest_in_layers()

    @cached_property
    def at_interfaces(self) -> FloatArray:
        """Larger |E|^2 of the two sides of each interface, shape (film + 1, angle, wavelength). [1]"""
        return self._solved.at_interfaces()

    def volt_per_metre(self, irradiance_w_per_cm2: float) -> FloatArray:
        """Return |E| at a given irradiance of the incident beam (across the beam, not along the surface). [V/m]"""
        if not 0.0 <= irradiance_w_per_cm2 < float("inf"):
            told = f"expected a finite number >= 0 W/cm^2, got {irradiance_w_per_cm2:g}"
            raise ArgumentError(f"irradiance_w_per_cm2: {told}")
        # I = n |E|^2 / (2 Z0)
        square = 2.0 * FREE_SPACE_IMPEDANCE_OHM * irradiance_w_per_cm2 * 1e4 / self._solved.incident_index
        return np.asarray(np.sqrt(square * self.intensity))

    def to_frame(self) -> pd.DataFrame:
        """Return a tidy table: a row a depth, angle and wavelength."""
        import pandas as pd

        number, angle, wavelength = np.meshgrid(
            np.arange(self.depth_nm.size), self.angle_deg, self.wavelength_nm, indexing="ij"
        )
        rows = number.ravel()
        return pd.DataFrame(
            {
                "depth_nm": self.depth_nm[rows],
                "layer": self.layer[rows] + 1,
                "angle_deg": angle.ravel(),
                "wavelength_nm": wavelength.ravel(),
                "intensity": self.intensity.ravel(),
                "absorption_per_nm": self.absorption_per_nm.ravel(),
            }
        )

    def plot(self, ax: Axes | None = None) -> Axes:
        """Draw |E|^2 against depth on `ax`, or on a new figure, and return the axes."""
        from filmstack.report.field_plot import draw_field

        return draw_field(self, ax)


def field(
    stack: Stack,
    wavelength_nm: ArrayLike,
    angle_deg: ArrayLike = 0.0,
    *,
    polarization: Literal["s", "p"] = "s",
    depth_nm: ArrayLike | None = None,
) -> Field:
    """Compute the electric field against depth.

    Parameters
    ----------
    stack : Stack
        Films between two media; no thick plates.
    wavelength_nm, angle_deg : array_like of float
        As in `spectrum`. [nm], [deg]
    polarization : str
        s or p.
    depth_nm : array_like of float, optional
        Depths below the first interface, negative in the incident medium; by default 64 a film and half a
        wavelength into either end medium. [nm]

    Returns
    -------
    Field

    Raises
    ------
    CoherenceError
        If the stack holds a thick plate.
    ArgumentError
        If an argument is out of range, or a film of N = 0 blocks p.

    Notes
    -----
    J. H. Apfel, Appl. Opt. 16, 1880 (1977).

    Examples
    --------
    A bare surface of index 1.5: |t|^2 = (2 / 2.5)^2 behind it.

    >>> import filmstack as fs
    >>> bare = fs.Stack(fs.constant(1.0), [], fs.constant(1.5))
    >>> fs.field(bare, 550.0, depth_nm=[0.0, 100.0]).intensity.round(6).ravel()
    array([0.64, 0.64])
    """
    if polarization not in ("s", "p"):
        raise ArgumentError(f"polarization: expected 's' or 'p', got {polarization!r}")
    asked = request(stack, wavelength_nm, angle_deg)
    if stack.plates:
        raise CoherenceError("field: a stack with a thick plate has no standing wave. Take stack.front()")
    (group,) = asked.groups()
    if polarization == "p" and bool(np.any(blocking_films(group))):
        raise ArgumentError("field: a film of N = 0 blocks p at oblique incidence, where its field is not defined")
    solved = Solved(asked, group, polarization == "p")
    depths = _depths(asked, depth_nm)
    layers = np.searchsorted(solved.boundaries, depths, side="right") - 1
    e, h = solved.at(layers, depths)
    e_x, e_y, e_z, density, flux = solved.components(layers, e, h)
    shape = (depths.size, *asked.shape)
    return Field(
        asked.wavelength_nm,
        asked.angle_deg[0],
        polarization,
        depths,
        layers,
        solved.boundaries,
        e_x.reshape(shape),
        e_y.reshape(shape),
        e_z.reshape(shape),
        density.reshape(shape),
        flux.reshape(shape),
        (*asked.notes, CAUTION),
        solved,
    )


def _depths(asked: Request, depth_nm: ArrayLike | None) -> FloatArray:
    thickness = asked.stack.thickness_nm
    if depth_nm is None:
        beyond = 0.5 * float(asked.wavelength_nm.max())
        edges = np.concatenate([[-beyond, 0.0], np.cumsum(thickness), [thickness.sum() + beyond]])
        # A field may jump at an interface: the last depth of each piece stands just in front of it.
        pieces = [
            np.linspace(a, np.nextafter(b, -np.inf), DEPTHS_A_LAYER) for a, b in pairwise(edges.tolist()) if b > a
        ]
        return np.concatenate([*pieces, [edges[-1]]])
    depths = np.array(depth_nm, dtype=float, ndmin=1)
    if depths.ndim != 1 or not np.all(np.isfinite(depths)):
        raise ArgumentError("depth_nm: expected finite depths in nm, in one row")
    return depths


class Solved:
    """Tangential fields at every interface of a group of one sample, over the incident amplitude."""

    def __init__(self, asked: Request, group: Group, p: bool) -> None:
        self.asked, self.group, self.p = asked, group, p
        self.boundaries = np.concatenate([[0.0], np.cumsum(asked.stack.thickness_nm)])
        trace = states(group, every_layer=True)
        front = Front(group.ends, trace[0], p, dark(group))
        (a1, _), (a2, _) = group.ends.incident_pair(p)
        with np.errstate(divide="ignore", invalid="ignore"):
            unit = as_complex(front.waves[0])[0]
            over_d = np.where(front.grazing[0], 0.0, 2.0 * a1[0] * a2[0] / unit)
        self.count = (halvings(trace[0], p) - np.stack([halvings(level, p) for level in trace]))[:, 0]
        self.decay = np.maximum(trace[0][:, kernels.DECAY] - trace[:, :, kernels.DECAY], 0.0)[:, 0]
        turns = (trace[0][:, kernels.TURNS] - trace[:, :, kernels.TURNS])[:, 0]
        factor = (1.0 - 2.0 * np.mod(turns, 2.0)) * over_d
        pairs = [fields(level, p) for level in trace]
        # Stored fields; the true ones are 2^(-200 count) exp(-decay / 2) times these.
        self.stored_e = factor * np.stack([as_complex(e)[0] for e, _ in pairs])
        self.stored_h = factor * np.stack([as_complex(h)[0] for _, h in pairs])
        scale = self._scale(slice(None), 0.0)
        self.e, self.h = scale * self.stored_e, scale * self.stored_h
        media = group.media
        self.kappa, self.n_square = as_complex(media.kappa)[0], as_complex(media.v_p)[0]
        self.v = as_complex(media.v_p if p else media.v_s)[0]
        self.u = as_complex(media.u_p)[0] if p else np.ones_like(self.v)
        # Flux of the incident wave of unit amplitude along the surface normal.
        self.incident_flux = (a1 * a2)[0] * np.ones_like(over_d.real)

    @property
    def incident_index(self) -> FloatArray:
        """Index of the incident medium, shape (wavelength,)."""
        return self.asked.index[self.asked.stack.incident][0].real

    def at(self, layers: IntArray, depths: FloatArray) -> tuple[ComplexArray, ComplexArray]:
        """Return tangential E and H at depths, shape (depth, point)."""
        points, films = self.e.shape[1], len(self.group.order)
        e, h = np.empty((depths.size, points), complex), np.empty((depths.size, points), complex)
        for layer in np.unique(layers):
            rows = layers == layer
            if 0 <= layer < films:
                back = (self.boundaries[layer + 1] - depths[rows])[:, np.newaxis]
                e[rows], h[rows] = self._inside(int(layer), back)
            elif layer < 0:
                e[rows], h[rows] = self._before(depths[rows][:, np.newaxis])
            else:
                e[rows], h[rows] = self._behind((depths[rows] - self.boundaries[-1])[:, np.newaxis])
        return e, h

    def _inside(self, layer: int, back: FloatArray) -> tuple[ComplexArray, ComplexArray]:
        """Carry the fields from the back face of a film, a distance `back` towards the light."""
        row = int(self.group.order[layer])
        kappa, k0 = self.kappa[row], self.group.media.k0
        cosine, sine, _ = faded_cosine_sine(kappa, k0, back)
        with np.errstate(divide="ignore", invalid="ignore"):
            s = np.where(kappa == 0.0, k0 * back, sine / np.where(kappa == 0.0, 1.0, kappa))
        scale = self._scale(layer + 1, -2.0 * kappa.imag * k0 * back)
        e, h = scale * self.stored_e[layer + 1], scale * self.stored_h[layer + 1]
        return cosine * e + 1j * self.u[row] * s * h, cosine * h + 1j * self.v[row] * s * e

    def _scale(self, level: int | slice, regained: FloatArray | float) -> FloatArray:
        """Return what makes stored fields true, after `regained` of the decay was gone back."""
        decay = np.maximum(self.decay[level] - regained, 0.0)
        return np.asarray(arithmetic.halved(np.ones_like(decay), 0.5 * decay, 200.0 * self.count[level] + 0.0 * decay))

    def _before(self, depth: FloatArray) -> tuple[ComplexArray, ComplexArray]:
        """Carry the fields into the lossless incident medium (depth < 0)."""
        ends = self.group.ends
        (a1, _), (a2, _) = ends.incident_pair(self.p)
        direction = self.group.media.direction
        delta = -(direction.n0[0] * direction.cosine[0]) * self.group.media.k0 * depth
        # In terms of a1, a2: y = a1 / a2, so i sin E/H terms need no division for s; p has a2 = cos > 0.
        with np.errstate(divide="ignore", invalid="ignore"):
            y = np.where(a2[0] == 0.0, np.inf, a1[0] / a2[0])
            e = np.cos(delta) * self.e[0] + 1j * np.sin(delta) * np.where(y == 0.0, 0.0, self.h[0] / y)
        return e, np.cos(delta) * self.h[0] + 1j * np.sin(delta) * np.where(np.isinf(y), 0.0, y) * self.e[0]

    def _behind(self, depth: FloatArray) -> tuple[ComplexArray, ComplexArray]:
        """Carry the outgoing wave into the exit medium."""
        ends = self.group.ends
        kappa = as_complex(normal_wavenumber(ends.exit, ends.direction)[0])[0]
        phase = np.exp(-1j * kappa * self.group.media.k0 * depth)
        return phase * self.e[-1], phase * self.h[-1]

    def _media_of(self, layer: int) -> tuple[ComplexArray, ComplexArray, ComplexArray]:
        """Return N^2, u and v of a film or an end medium, shape (point,)."""
        if 0 <= layer < len(self.group.order):
            row = int(self.group.order[layer])
            return self.n_square[row], self.u[row], self.v[row]
        ends = self.group.ends
        n = as_complex(ends.incident if layer < 0 else ends.exit)[0]
        square, b = n * n, self.group.media.direction.b[0]
        return (square, 1.0 - b * b / square, square) if self.p else (square, np.ones_like(square), square - b * b)

    def components(
        self, layers: IntArray, e: ComplexArray, h: ComplexArray
    ) -> tuple[ComplexArray, ComplexArray, ComplexArray, FloatArray, FloatArray]:
        """Return E_x, E_y, E_z, the absorbed density and the net flux, shape (depth, point)."""
        nothing = np.zeros_like(e)
        e_z, density = nothing.copy(), np.zeros(e.shape)
        b, k0 = self.group.media.direction.b[0], self.group.media.k0
        for layer in np.unique(layers):
            rows = layers == layer
            square, u, v = self._media_of(int(layer))
            if self.p:
                e_z[rows] = -b * h[rows] / square
            if 0 <= layer < len(self.group.order):
                absorbed = -v.imag * np.abs(e[rows]) ** 2 - u.imag * np.abs(h[rows]) ** 2
                with np.errstate(divide="ignore", invalid="ignore"):
                    density[rows] = np.where(self.incident_flux > 0.0, k0 * absorbed / self.incident_flux, 0.0)
        with np.errstate(divide="ignore", invalid="ignore"):
            flux = np.where(self.incident_flux > 0.0, (e * np.conj(h)).real / self.incident_flux, 0.0)
        return (e, nothing, e_z, density, flux) if self.p else (nothing, e, nothing, density, flux)

    def _intensity(self, layer: int, e: ComplexArray, h: ComplexArray) -> FloatArray:
        total = np.abs(e) ** 2
        if self.p:
            total = total + np.abs(self.group.media.direction.b[0] * h / self._media_of(layer)[0]) ** 2
        return np.asarray(total)

    def at_interfaces(self) -> FloatArray:
        """Return the larger |E|^2 of the two sides of each interface."""
        rows = [
            np.maximum(self._intensity(j - 1, self.e[j], self.h[j]), self._intensity(j, self.e[j], self.h[j]))
            for j in range(len(self.e))
        ]
        return np.stack(rows).reshape(-1, *self.asked.shape)

    def largest_in_layers(self) -> tuple[FloatArray, FloatArray]:
        """Return the largest |E|^2 of each film and where, by three rounds of closing in on the best depth."""
        values, places = [], []
        for layer, thickness in enumerate(self.asked.stack.thickness_nm.tolist()):
            points = self.e.shape[1]
            low, high = np.zeros(points), np.full(points, thickness)
            for _ in range(4):
                back = low + (high - low) * np.linspace(0.0, 1.0, 65)[:, np.newaxis]
                found = self._intensity(layer, *self._inside(layer, back))
                best = np.argmax(found, axis=0)
                span = (high - low) / 64.0
                centre = back[best, np.arange(points)]
                low, high = np.maximum(centre - span, 0.0), np.minimum(centre + span, thickness)
            values.append(found[best, np.arange(points)])
            places.append(self.boundaries[layer + 1] - centre)
        shape = (-1, *self.asked.shape)
        return np.reshape(values, shape), np.reshape(places, shape)
