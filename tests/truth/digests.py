"""Digests of all results of a few stacks, for a comparison between processors: `python digests.py` prints them."""

from __future__ import annotations

import hashlib

import numpy as np

import filmstack as fs
from filmstack.wave.route import forced

WAVELENGTH, ANGLE = np.linspace(400.0, 700.0, 61), [0.0, 20.0, 55.0, 80.0]
MEDIA = {
    "lossless": [(2.35, 0.0), (1.46, 0.0)],
    "absorbing": [(2.35, 1e-4), (1.46, 0.02)],
    "metal": [(2.1, 0.0), (0.06, 3.3), (1.5, 1e-3)],
    "evanescent": [(0.9, 0.0), (2.0, 0.0), (1.3, 1e-6)],
}


def _stack(kind):
    materials, rng = [fs.constant(*medium) for medium in MEDIA[kind]], np.random.default_rng(3)
    films = [fs.Layer(materials[j % len(materials)], float(rng.uniform(5.0, 200.0))) for j in range(30)]
    return fs.Stack(fs.constant(1.5), films, fs.constant(1.52))


def _digest(result, names):
    digest = hashlib.sha256()
    for name in names:
        digest.update(np.ascontiguousarray(getattr(result, name)).tobytes())
    return digest.hexdigest()


def coherent_digests(route):
    """Return the digests of amplitudes, powers and thickness gradients of coherent stacks by one route."""
    found = {}
    with forced(route):
        for kind in MEDIA:
            spectrum = fs.spectrum(_stack(kind), WAVELENGTH, ANGLE)
            gradient = fs.thickness_gradient(_stack(kind), WAVELENGTH, ANGLE)
            found[f"{kind}: R T r t"] = _digest(spectrum, [f"{name}_{q}" for name in "RTrt" for q in "sp"])
            found[f"{kind}: gradients"] = _digest(gradient, [f"d{name}_{q}" for name in "RTrt" for q in "sp"])
    return found


if __name__ == "__main__":
    for by in ("small", "compiled"):
        for name, digest in coherent_digests(by).items():
            print(f"{by} {name} {digest}")
