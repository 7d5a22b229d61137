"""Measure the speed of the engine: `python tests/benchmarks/run.py`.

Ratios are medians of paired runs in one process, the public call and the preparation of indices
included. The twin is the textbook method on NumPy arrays, vectorised over wavelength and sample.
Not part of the tests: a shared machine is too noisy for a bound.
"""

from __future__ import annotations

import os
import platform
import statistics
import subprocess
import sys
import time
from collections.abc import Callable

import numpy as np

import filmstack as fs
from filmstack.wave.route import forced

LAYERS, WAVELENGTHS, SAMPLES, ANGLE = 30, np.linspace(400.0, 700.0, 201), 2000, 30.0


def seconds(call: Callable[[], object]) -> float:
    """Time one call."""
    start = time.perf_counter()
    call()
    return time.perf_counter() - start


def paired(a: Callable[[], object], b: Callable[[], object], pairs: int = 7) -> tuple[float, float, float]:
    """Return the median time of both and the median ratio b / a of runs in turn, after a warm-up."""
    a(), b()
    times = [(seconds(a), seconds(b)) for _ in range(pairs)]
    return (
        statistics.median(x for x, _ in times),
        statistics.median(y for _, y in times),
        statistics.median(y / x for x, y in times),
    )


def ten(call: Callable[[], object]) -> Callable[[], object]:
    """Return ten calls in a row."""

    def repeated() -> None:
        for _ in range(10):
            call()

    return repeated


def stack(k: float = 0.0, layers: int = LAYERS) -> fs.Stack:
    """Return alternating films of two materials."""
    high, low = fs.constant(2.35, k), fs.constant(1.46, k)
    films = [fs.Layer(low if j % 2 else high, 60.0 + j) for j in range(layers)]
    return fs.Stack(fs.constant(1.0), films, fs.constant(1.52))


def twin(n: np.ndarray, d: np.ndarray, wavelength: np.ndarray) -> tuple[np.ndarray, ...]:
    """Compute R and T of s and p by the characteristic matrix; n (layer,) complex, d (sample, layer)."""
    b = np.sin(np.radians(ANGLE))
    kappa, k_exit, cosine = np.sqrt(n**2 - b**2), np.sqrt(1.52**2 - b**2), np.sqrt(1.0 - b**2)
    out = []
    for y, y_exit, y0 in ((kappa, k_exit, cosine), (n**2 / kappa, 1.52**2 / k_exit, 1.0 / cosine)):
        e = np.ones((len(d), wavelength.size), dtype=complex)
        h = y_exit * e
        for j in range(len(n) - 1, -1, -1):
            delta = 2.0 * np.pi * kappa[j] * d[:, j, None] / wavelength
            c, s = np.cos(delta), np.sin(delta)
            e, h = c * e + 1j * s / y[j] * h, 1j * s * y[j] * e + c * h
        wave = y0 * e + h
        out += [np.abs((y0 * e - h) / wave) ** 2, 4.0 * y0 * np.real(y_exit) / np.abs(wave) ** 2]
    return tuple(out)


def batch(k: float) -> None:
    """Compare a batch with the twin."""
    nominal = stack(k)
    rng = np.random.default_rng(1)
    d = nominal.thickness_nm * (1.0 + 0.02 * rng.standard_normal((SAMPLES, LAYERS)))
    n = np.array([complex(film.material.index(550.0)) for film in nominal.films])
    n = n if k else n.real

    def ours(threads: str, rows: np.ndarray) -> Callable[[], object]:
        def call() -> object:
            os.environ["FILMSTACK_THREADS"] = threads
            return fs.batch_spectrum(nominal, WAVELENGTHS, ANGLE, thickness_nm=rows)

        return call

    result, reference = ours("1", d)(), twin(n, d, WAVELENGTHS)
    for name, values in zip(("R_s", "T_s", "R_p", "T_p"), reference, strict=True):
        np.testing.assert_allclose(getattr(result, name)[:, 0], values, atol=1e-11)
    one, other, ratio = paired(ours("1", d), lambda: twin(n, d, WAVELENGTHS), 5)
    per_one, per_twin = (x / SAMPLES / LAYERS / WAVELENGTHS.size for x in (one, other))
    # Ten calls in a row: a processor that slept takes a while to wake.
    _, _, speedup = paired(ten(ours("2", d)), ten(ours("1", d)), 7)
    kind = "absorbing" if k else "lossless"
    print(
        f"batch, {kind}: {per_one * 1e9:.2f} ns per layer x wavelength x sample (s and p, one thread), "
        f"twin {per_twin * 1e9:.0f} ns, ratio {ratio:.0f}; two threads {speedup:.2f} times one"
    )


def gradients() -> None:
    """Compare all thickness gradients with one spectrum."""
    nominal, angles = stack(layers=40), [0.0, 30.0, 45.0]

    def plain() -> object:
        s = fs.spectrum(nominal, WAVELENGTHS, angles)
        return s.R_s, s.R_p, s.T_s, s.T_p

    def gradient() -> object:
        g = fs.thickness_gradient(nominal, WAVELENGTHS, angles)
        return g.dR_s, g.dR_p, g.dT_s, g.dT_p

    for route in ("compiled", "small"):
        with forced(route):
            _, b, ratio = paired(plain, gradient, 15)
        print(f"gradients of 40 layers x 201 wavelengths x 3 angles, {route}: {b * 1e3:.2f} ms, {ratio:.2f} spectra")


def growth() -> None:
    """Show that the cost is proportional to each size."""
    print("growth (compiled, one thread): time over the time of half the size")
    os.environ["FILMSTACK_THREADS"] = "1"
    rng = np.random.default_rng(1)
    base = {"layers": 40, "wavelengths": 500, "angles": 4, "samples": 100}

    def call(sizes: dict[str, int]) -> Callable[[], object]:
        nominal = stack(layers=sizes["layers"])
        d = nominal.thickness_nm * (1.0 + 0.01 * rng.standard_normal((sizes["samples"], sizes["layers"])))
        wavelength, angle = np.linspace(400, 700, sizes["wavelengths"]), np.linspace(10, 50, sizes["angles"])
        return lambda: fs.batch_spectrum(nominal, wavelength, angle, thickness_nm=d)

    for name in base:
        _, _, ratio = paired(call(base), call(base | {name: 2 * base[name]}), 5)
        print(f"  {name:12s} {ratio:.2f}")


def commands() -> None:
    """Time whole commands from a cold process, median of 5."""
    design = str(next(iter(sorted(_designs()))))
    for words in (
        ["--version"],
        ["--help"],
        ["spectrum", design, "--output", os.devnull + ".csv"],
        ["spectrum", design, "--plot", "PLOT"],
    ):
        import tempfile

        with tempfile.TemporaryDirectory() as folder:
            full = [w.replace("PLOT", f"{folder}/p.png").replace(os.devnull + ".csv", f"{folder}/t.csv") for w in words]
            run = lambda full=full: subprocess.run(  # noqa: E731
                [sys.executable, "-m", "filmstack", *full], check=True, capture_output=True
            )
            run()
            taken = statistics.median(seconds(run) for _ in range(5))
        shown = " ".join(w.rsplit("/", 1)[-1] for w in words if not w.startswith(os.devnull))
        print(f"filmstack {shown}: {taken:.2f} s")


def _designs() -> list[object]:
    from filmstack.materials.shipped import shipped_folder

    return list(shipped_folder("designs").glob("*.toml"))


if __name__ == "__main__":
    print(f"{platform.machine()}, {os.cpu_count()} processors, load {os.getloadavg()[0]:.2f}, numpy {np.__version__}")
    batch(0.0)
    batch(1e-3)
    gradients()
    growth()
    commands()
