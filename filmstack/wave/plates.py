"""Thick plates by intensity: films between plates are lit from both sides, every crossing of a plate drops the phase.

`filmstack.wave.finish` -> here -> `filmstack.analysis.solution`. F and B are the forward and the
backward |E_tan|^2 in a plate. They are carried over the incident admittance, so that the flux of a
lossless medium is Re(y) F. A plate is crossed with exp(-y), y = 2 |Im kappa| k0 d.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from typing import TYPE_CHECKING

import numpy as np

from filmstack.wave.finish import LOG10_E, Front
from filmstack.wave.media import Pair, normal_wavenumber, over

if TYPE_CHECKING:
    from filmstack.arraytypes import BoolArray, FloatArray


def _square(pair: Pair) -> FloatArray:
    return np.asarray(pair[0] * pair[0] + pair[1] * pair[1])


@dataclass(frozen=True)
class Crossing:
    """One coherent group between plates, one polarization, lit from either side."""

    front: Front
    back: Front
    lossless: BoolArray
    """Points at which every film is lossless."""

    @cached_property
    def reflectance(self) -> FloatArray:
        """|r|^2 from the front."""
        return _square(self.front.r)

    @cached_property
    def back_reflectance(self) -> FloatArray:
        """|r|^2 from behind."""
        return _square(self.back.r)

    @staticmethod
    def _transmitted(side: Front) -> FloatArray:
        a1, _ = side.ends.incident_pair(side.p)
        e, _ = side.ends.exit_fields(side.p)
        return side.part(4.0 * _square(a1) * _square(e))

    @cached_property
    def transmitted(self) -> FloatArray:
        """|E_tan behind|^2 over |E_tan of the wave from the front|^2."""
        return self._transmitted(self.front)

    @cached_property
    def back_transmitted(self) -> FloatArray:
        """|E_tan in front|^2 over |E_tan of the wave from behind|^2."""
        return self._transmitted(self.back)

    @cached_property
    def back_flux(self) -> FloatArray:
        """Fraction of the flux from behind that leaves to the front, both media lossless."""
        (ar, _), (cr, _) = self.back.ends.incident_pair(self.back.p)
        (er, ei), (hr, hi) = self.back.ends.exit_fields(self.back.p)
        return self.back.part(4.0 * ar * cr * (er * hr + ei * hi))


@dataclass(frozen=True)
class PlateChain:
    """Groups and plates in turn, one polarization.

    Parameters
    ----------
    groups : tuple of Crossing
        The groups, front first.
    plates : tuple of (Pair, float)
        Refractive index, shape (sample or 1, point), and thickness of each plate. [1], [nm]
    k0 : ndarray, shape (point,)
        Vacuum wavenumber. [1/nm]
    """

    groups: tuple[Crossing, ...]
    plates: tuple[tuple[Pair, float], ...]
    k0: FloatArray

    @property
    def p(self) -> bool:
        """Whether this is p."""
        return self.groups[0].front.p

    @property
    def grazing(self) -> BoolArray:
        """True where light meets the part at exactly 90 degrees."""
        return self.groups[0].front.grazing

    @cached_property
    def decays(self) -> list[FloatArray]:
        """Exponent y of each plate; infinite where its wave is evanescent without loss and carries no power."""
        direction = self.groups[0].front.ends.direction
        rows = []
        for n, thickness in self.plates:
            kappa = normal_wavenumber(n, direction)[0]
            powerless = (n[1] == 0.0) & (kappa[0] == 0.0)
            rows.append(np.where(powerless, np.inf, -2.0 * self.k0 * thickness * kappa[1]))
        return rows

    @cached_property
    def solved(self) -> tuple[list[FloatArray], list[FloatArray], list[FloatArray]]:
        """Return per group: B/F in front of it, B/F behind it, and the gap 1 - R_back B/F."""
        ratios: list[FloatArray] = []
        loads: list[FloatArray] = []
        gaps: list[FloatArray] = []
        last = self.groups[-1]
        load = np.zeros_like(last.reflectance)
        deficit = np.ones_like(load)
        for place in range(len(self.groups) - 1, -1, -1):
            group = self.groups[place]
            # 1 - R load loses digits between two good mirrors; there 1 - R is the flux that leaves.
            exact = group.lossless & (place < len(self.plates)) & self._clear(place)
            gap = np.where(
                exact, group.back_flux + group.back_reflectance * deficit, 1.0 - group.back_reflectance * load
            )
            # Light that no wave can reach may be caught for ever: it takes no part.
            gap = np.where(group.transmitted == 0.0, 1.0, gap)
            with np.errstate(divide="ignore", invalid="ignore"):
                ratio = group.reflectance + group.transmitted * group.back_transmitted * load / gap
                passed = np.where(exact, group.back_flux * deficit / gap, 1.0 - ratio)
            ratios.insert(0, ratio)
            loads.insert(0, load)
            gaps.insert(0, gap)
            if place:
                fade = self.decays[place - 1]
                passed = self._one_minus(place, passed, ratio)
                load = ratio * np.exp(-2.0 * fade)
                deficit = passed - ratio * np.expm1(-2.0 * fade)
        return ratios, loads, gaps

    def _one_minus(self, place: int, passed: FloatArray, ratio: FloatArray) -> FloatArray:
        """Return 1 - B/F in front of a group; for the last one, lossless, it is what leaves the part."""
        group = self.groups[place]
        if place < len(self.groups) - 1:
            return passed
        ends = group.front.ends
        (ar, ai), (cr, ci) = ends.incident_pair(self.p)
        flux_in = ar * cr + ai * ci
        (er, ei), (hr, hi) = ends.exit_fields(self.p)
        leaves = group.front.part(4.0 * flux_in * (er * hr + ei * hi))
        return np.where(group.lossless & self._clear(place - 1), leaves, 1.0 - ratio)

    def _clear(self, place: int) -> BoolArray:
        """Return where a plate is lossless and its wave propagates."""
        if place >= len(self.plates):
            return np.zeros(1, dtype=bool)
        n, _ = self.plates[place]
        kappa = normal_wavenumber(n, self.groups[0].front.ends.direction)[0]
        return np.asarray((n[1] == 0.0) & (kappa[1] == 0.0) & (kappa[0] > 0.0))

    @cached_property
    def reflectance(self) -> FloatArray:
        """R of the whole part; exactly 1 where no light leaves by law."""
        last = self.groups[-1].front.ends
        closed = (last.flux(self.p) == 0.0) & np.all([g.lossless for g in self.groups], axis=0)
        for n, _ in self.plates:
            closed = closed & (n[1] == 0.0)
        return np.where(self.grazing | closed, 1.0, self.solved[0][0])

    @cached_property
    def forward(self) -> list[tuple[FloatArray, FloatArray]]:
        """F in front of each group and behind it, over the incident admittance (the first in front is unused)."""
        first = self.groups[0]
        (ar, _), (cr, _) = first.front.ends.incident_pair(self.p)
        behind = first.front.part(4.0 * ar * cr * _square(first.front.ends.exit_fields(self.p)[0]))
        steps: list[tuple[FloatArray, FloatArray]] = []
        front = np.zeros_like(behind)
        for place, group in enumerate(self.groups):
            if place:
                front = steps[-1][1] * np.exp(-self.decays[place - 1])
                behind = front * group.transmitted
            with np.errstate(divide="ignore", invalid="ignore"):
                steps.append((front, np.where(self.grazing, 0.0, behind / self.solved[2][place])))
        return steps

    @cached_property
    def transmittance(self) -> FloatArray:
        """T of the whole part."""
        front, _ = self.forward[-1]
        return np.where(self.grazing, 0.0, front * self._leaving)

    @property
    def _leaving(self) -> FloatArray:
        """Flux behind the last group over F in front of it."""
        last = self.groups[-1].front
        return last.part(4.0 * _square(last.ends.incident_pair(self.p)[0]) * self._exit_flux)

    @property
    def _exit_flux(self) -> FloatArray:
        (er, ei), (hr, hi) = self.groups[-1].front.ends.exit_fields(self.p)
        return np.asarray(er * hr + ei * hi)

    @cached_property
    def log10_transmittance(self) -> FloatArray:
        """log10 T, finite where T is below the smallest double."""
        total = np.zeros_like(self.groups[0].reflectance)
        for place, group in enumerate(self.groups):
            a1, a2 = group.front.ends.incident_pair(self.p)
            out = self._exit_flux if place == len(self.groups) - 1 else _square(group.front.ends.exit_fields(self.p)[0])
            size = _square(a1) if place else a1[0] * a2[0]
            with np.errstate(divide="ignore", invalid="ignore"):
                total = total + np.log10(4.0 * size * out) - group.front.log10_size - np.log10(self.solved[2][place])
        for decay in self.decays:
            total = total - LOG10_E * decay
        return np.where(self.grazing, -np.inf, total)

    def light_on(self, place: int) -> tuple[FloatArray, FloatArray]:
        """Return the light on a group's films from the front and from behind, over the incident flux.

        Each multiplies what `absorption.absorbed` gives for that side, over |D|^2.
        """
        group = self.groups[place]
        a1, a2 = group.front.ends.incident_pair(self.p)
        front = 4.0 * (a1[0] * a2[0] if place == 0 else _square(a1) * self.forward[place][0])
        back = self.solved[1][place] * self.forward[place][1] * 4.0 * _square(group.back.ends.incident_pair(self.p)[0])
        return np.where(self.grazing, 0.0, front), np.where(self.grazing, 0.0, back)

    def plate_absorptance(self) -> FloatArray:
        """Return A of each plate, the standing-wave cross term included, shape (plate, sample, point)."""
        rows = []
        for place, (n, _) in enumerate(self.plates):
            with np.errstate(divide="ignore", invalid="ignore"):  # p at kappa = 0: lossless, set to 0 below
                y = over(*self.groups[place].back.ends.incident_pair(self.p))
            fade = self.decays[place]
            f0, fd = self.forward[place][1], self.forward[place + 1][0]
            bd = self.solved[0][place + 1] * fd
            b0 = bd * np.exp(-fade)
            r_front, r_back = self.groups[place].back.r, self.groups[place + 1].front.r
            power = y[0] * (-np.expm1(-fade)) * (f0 + bd) + 2.0 * y[1] * (-r_front[1] * b0 - r_back[1] * fd)
            rows.append(np.where(n[1] == 0.0, 0.0, power))
        return np.stack(rows)
