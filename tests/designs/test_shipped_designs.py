"""Shipped designs: all load, and do what their description says, by another route than the engine's.

The twin here is Rouard's recursion of interface coefficients (P. Rouard, Ann. Phys. (Paris) 7, 291 (1937);
O. S. Heavens, Optical Properties of Thin Solid Films, 4.2; from memory), with thick plates by the sum over intensities.
"""

import math
import re

import numpy as np
import pytest

import filmstack as fs
from filmstack.materials.shipped import shipped_folder
from filmstack.stack import Layer, Plate

NUMBER = re.compile(r"\d+(?:\.\d+)?")
NAMES = sorted(path.stem for path in shipped_folder("designs").glob("*.toml"))


def load(name):
    return fs.load_design(shipped_folder("designs") / f"{name}.toml")


def interface(polarization, n_left, n_right, sine):
    """Fresnel coefficients r and t of E, with n0 sin(theta0) = sine; r_p with the sign of the magnetic field's."""
    cos_left, cos_right = (np.sqrt(1 - (sine / n) ** 2 + 0j) for n in (n_left, n_right))
    if polarization == "s":
        below = n_left * cos_left + n_right * cos_right
        return (n_left * cos_left - n_right * cos_right) / below, 2 * n_left * cos_left / below
    below = n_right * cos_left + n_left * cos_right
    return (n_right * cos_left - n_left * cos_right) / below, 2 * n_left * cos_left / below


def flux(polarization, n, sine):
    cosine = np.sqrt(1 - (sine / n) ** 2 + 0j)
    return (n * cosine if polarization == "s" else np.conj(n) * cosine).real


def rouard(polarization, media, films, wavelength, sine):
    """R and T of films between two media, by interfaces added from the back."""
    indices = [media[0], *(film.material.index(wavelength) for film in films), media[1]]
    r, t = interface(polarization, indices[-2], indices[-1], sine)
    for number in range(len(films) - 1, -1, -1):
        n = indices[number + 1]
        phase = np.exp(-2j * np.pi * np.sqrt(n**2 - sine**2 + 0j) * films[number].thickness_nm / wavelength)
        r_front, t_front = interface(polarization, indices[number], n, sine)
        below = 1 + r_front * r * phase**2
        r, t = (r_front + r * phase**2) / below, t_front * t * phase / below
    ratio = flux(polarization, indices[-1], sine) / flux(polarization, indices[0], sine)
    return np.abs(r) ** 2, np.abs(t) ** 2 * ratio


def twin(stack, wavelength, angle):
    """Mean of s and p of R and T, shape (wavelength,), for films and at most one lossless plate."""
    wavelength = np.asarray(wavelength, dtype=float)
    incident, exit_index = stack.incident.index(wavelength), stack.exit.index(wavelength)
    sine = incident.real * math.sin(math.radians(angle))
    plates = [place for place, layer in enumerate(stack.layers) if isinstance(layer, Plate)]
    sums = []
    for polarization in "sp":
        if not plates:
            sums.append(rouard(polarization, (incident, exit_index), stack.films, wavelength, sine))
            continue
        front, back = stack.layers[: plates[0]], stack.layers[plates[0] + 1 :]
        glass = stack.plates[0].material.index(wavelength).real
        r1, t1 = rouard(polarization, (incident, glass), front, wavelength, sine)
        r1_inside, _ = rouard(polarization, (glass, incident), front[::-1], wavelength, sine)
        r2, t2 = rouard(polarization, (glass, exit_index), back, wavelength, sine)
        inside = 1 / (1 - r1_inside * r2)
        sums.append((r1 + t1**2 * r2 * inside, t1 * t2 * inside))
    return np.mean(sums, axis=0)


def reflectance(name, low, high, angle=0.0, step=1.0):
    return twin(load(name).stack, np.arange(low, high + step / 2, step), angle)[0]


def transmittance(name, low, high, angle=0.0, step=1.0):
    return twin(load(name).stack, np.arange(low, high + step / 2, step), angle)[1]


def bare(name):
    stack = load(name).stack
    return fs.Stack(stack.incident, stack.plates, stack.exit)


def width(name, around, step):
    """Full width at half maximum around a wavelength. [nm]"""
    wavelength = np.arange(around - 40, around + 40, step)
    t = twin(load(name).stack, wavelength, 0.0)[1]
    above = wavelength[t > t.max() / 2]
    return above[-1] - above[0]


def above_99(name):
    wavelength = np.arange(900, 1249, 0.5)
    above = wavelength[twin(load(name).stack, wavelength, 0.0)[0] > 0.99]
    return f"{above[0]:.1f} to {above[-1]:.1f}"


def percent(value, digits=2):
    return f"{100 * value:.{digits}f} %"


def claims(name):
    """Say in words what the twin finds; the description has to hold every piece of it."""
    if name == "window-antireflection":
        normal = reflectance(name, 420, 680)
        return [
            f"mean reflectance {percent(normal.mean())} at 0 degrees (at most {percent(normal.max())})",
            f"and {percent(reflectance(name, 420, 680, 30).mean())} at 30 degrees",
            f"the bare window reflects {percent(twin(bare(name), np.arange(420, 681), 0.0)[0].mean())}",
        ]
    if name == "three-layer-antireflection":
        normal = reflectance(name, 420, 680)
        return [
            f"mean reflectance {percent(normal.mean())}, at most {percent(normal.max())}, at 0 degrees",
            f"the bare face reflects {percent(twin(bare(name), np.arange(420, 681), 0.0)[0].mean())}",
        ]
    if name == "laser-v-coat-1064":
        assert reflectance(name, 1064, 1064)[0] < 1e-6
        assert reflectance(name, 1054, 1074).max() < 1e-4
        return [
            "reflectance below 0.0001 % at 1064 nm and 0 degrees",
            "below 0.01 % from 1054 to 1074 nm",
            f"{percent(reflectance(name, 1064, 1064, 10)[0], 3)} at 1064 nm and 10 degrees",
            f"The bare face reflects {percent(twin(bare(name), [1064], 0.0)[0][0])}",
        ]
    if name == "quarter-wave-mirror-1064":
        at_centre = percent(reflectance(name, 1064, 1064)[0], 4)
        return [f"reflectance {at_centre} at 1064 nm, above 99 % from {above_99(name)} nm, at 0 degrees"]
    if name == "line-filter-633":
        assert transmittance(name, 564, 620).max() < 0.01
        assert transmittance(name, 646, 717).max() < 0.01
        return [
            f"transmittance into fused silica {percent(transmittance(name, 632.8, 632.8)[0], 1)} at 632.8 nm",
            f"full width at half maximum {width(name, 632.8, 0.01):.2f} nm",
            "below 1 % from 564 to 620 nm and from 646 to 717 nm",
        ]
    if name == "induced-transmission-550":
        silver = [film for film in load(name).stack.films if film.locked]
        stack = bare(name)
        alone = twin(fs.Stack(stack.incident, silver, stack.exit), [550], 0.0)[1][0]
        return [
            f"transmittance {percent(transmittance(name, 550, 550)[0], 1)} at 550 nm",
            f"full width at half maximum {width(name, 550, 0.5):.1f} nm",
            f"mean {percent(transmittance(name, 400, 500).mean())} from 400 to 500 nm",
            f"and {percent(transmittance(name, 610, 1000).mean())} from 610 to 1000 nm",
            f"passes {percent(alone, 1)} at 550 nm",
        ]
    if name == "colour-splitter-45":
        blue, red = reflectance(name, 430, 485, 45), transmittance(name, 535, 680, 45)
        return [
            f"reflectance {percent(blue.mean(), 1)} (at least {percent(blue.min(), 1)}) in the blue",
            f"transmittance {percent(red.mean(), 1)} (at least {percent(red.min(), 1)}) in the green and red",
        ]
    if name == "germanium-antireflection":
        normal = transmittance(name, 8000, 12000, step=20)
        return [
            f"mean transmittance {percent(normal.mean(), 1)} at 0 degrees",
            f"(at least {percent(normal[-1], 1)}, at 12 um",
            f"and {percent(transmittance(name, 8000, 12000, 30, step=20).mean(), 1)} at 30 degrees",
            f"mean reflectance {percent(reflectance(name, 8000, 12000, step=20).mean())}",
            f"the bare window passes {percent(twin(bare(name), np.arange(8000, 12001, 20), 0.0)[1].mean(), 1)}",
        ]
    if name == "infrared-edge-7300":
        assert transmittance(name, 4910, 6750, step=10).max() < 0.001
        beyond = transmittance(name, 7800, 11500, step=10)
        absorbed = 1 - beyond - reflectance(name, 7800, 11500, step=10)
        half = transmittance(name, 7270, 7290)
        assert half[0] < 0.5 < half[-1]
        return [
            "transmittance 50 % at 7.28 um, below 0.1 % from 4.91 to 6.75 um",
            f"mean {percent(beyond.mean(), 1)} (at least {percent(beyond.min(), 1)}) from 7.8 to 11.5 um",
            f"the germanium films absorb {percent(absorbed.mean(), 1)}",
        ]
    if name == "graded-antireflection":
        normal, oblique, steep = (reflectance(name, 400, 1100, angle, step=5) for angle in (0, 45, 60))
        return [
            f"mean reflectance {percent(normal.mean(), 3)} at 0, {percent(oblique.mean(), 3)} at 45 "
            f"and {percent(steep.mean())} at 60 degrees",
            f"the bare face reflects {percent(twin(bare(name), np.arange(400, 1101, 5), 0.0)[0].mean())} at 0 degrees",
        ]
    raise AssertionError(f"no claims are checked for the design {name}")


def holds(claim, description):
    """Tell whether the words of a claim stand there, with decimals that agree within one unit of their last digit."""
    numbers = NUMBER.findall(claim)
    words = f"({NUMBER.pattern})".join(map(re.escape, NUMBER.split(claim)))
    return any(all(map(agree, match.groups(), numbers)) for match in re.finditer(words, description))


def agree(promised, found):
    decimals = len(promised.partition(".")[2])
    return abs(float(promised) - float(found)) < (1.01 * 10.0**-decimals if decimals else 1e-9)


@pytest.mark.parametrize("name", NAMES)
def test_a_shipped_design_does_what_its_description_says(name):
    description = " ".join(load(name).description.split())
    assert [claim for claim in claims(name) if not holds(claim, description)] == []


@pytest.mark.parametrize("name", NAMES)
def test_the_engine_agrees_with_the_twin(name):
    design = load(name)
    middle = design.reference_wavelength_nm
    wavelength = np.linspace(0.85, 1.15, 7) * middle
    for angle in (0.0, *design.incident_angle_deg):
        spectrum = fs.spectrum(design.stack, wavelength, angle)
        r, t = twin(design.stack, wavelength, angle)
        np.testing.assert_allclose(spectrum.R[0], r, rtol=1e-9, atol=1e-12)
        np.testing.assert_allclose(spectrum.T[0], t, rtol=1e-9, atol=1e-12)


def test_there_are_the_usual_kinds_of_coating():
    assert len(NAMES) >= 8


@pytest.mark.parametrize("name", NAMES)
def test_a_shipped_file_begins_with_the_version_and_tells_its_purpose(name):
    text = (shipped_folder("designs") / f"{name}.toml").read_text(encoding="utf-8")
    assert text.startswith("filmstack = 1\n")
    assert re.match(r"Purpose: .*\nComputed", load(name).description, flags=re.DOTALL)


def index_at(material, wavelength):
    return float(material.index(wavelength).real)


def test_the_mirror_has_the_reflectance_of_a_quarter_wave_stack():
    # (HL)^m H on a substrate: Y = (nH/nL)^(2m) nH^2/ns, R = ((1 - Y)/(1 + Y))^2 (H. A. Macleod, Thin-Film Optical
    # Filters, chapter on reflecting coatings; from memory).
    stack = load("quarter-wave-mirror-1064").stack
    high, low, substrate = (index_at(medium, 1064.0) for medium in (*stack.materials[1:3], stack.exit))
    y = (high / low) ** 28 * high**2 / substrate
    assert len(stack.films) == 29
    assert fs.spectrum(stack, 1064.0).R[0, 0] == pytest.approx(((1 - y) / (1 + y)) ** 2, rel=1e-12)


def test_the_cavity_of_the_line_filter_and_all_around_it_are_absent_at_the_line():
    # Half waves are absent (Macleod, chapter on theory; from memory): the cavity of two quarter waves is, then the
    # two layers H beside it are a half wave, and so on: T is that of the bare substrate, 4 n / (1 + n)^2.
    stack = load("line-filter-633").stack
    assert [film.locked for film in stack.films] == [number == 11 for number in range(23)]
    n = index_at(stack.exit, 632.8)
    absorbed = fs.spectrum(stack, 632.8).A[0, 0]
    assert fs.spectrum(stack, 632.8).T[0, 0] == pytest.approx(4 * n / (1 + n) ** 2, abs=1e-9 + absorbed)


def test_the_half_wave_of_the_three_layers_is_absent_at_the_reference():
    # Two quarter waves, n1 outer: R = ((n0 n2^2 - ns n1^2)/(n0 n2^2 + ns n1^2))^2 (Macleod, chapter on
    # antireflection coatings; from memory).
    stack = load("three-layer-antireflection").stack
    outer, _, inner = (index_at(film.material, 515.0) for film in stack.films)
    ns = index_at(stack.exit, 515.0)
    expected = ((inner**2 - ns * outer**2) / (inner**2 + ns * outer**2)) ** 2
    absorbed = fs.spectrum(stack, 515.0).A[0, 0]
    assert absorbed < 2e-8
    assert fs.spectrum(stack, 515.0).R[0, 0] == pytest.approx(expected, abs=absorbed)


def test_the_v_coat_has_the_phases_of_the_closed_form():
    # tan^2 of the phase thickness of the outer (1) and inner (2) layer for R = 0 (Macleod, chapter on antireflection
    # coatings; from memory).
    stack = load("laser-v-coat-1064").stack
    n1, n2 = (index_at(film.material, 1064.0) for film in stack.films)
    ns = index_at(stack.exit, 1064.0)
    tan1 = (ns - 1) * (n2**2 - ns) * n1**2 / ((n1**2 * ns - n2**2) * (ns - n1**2))
    tan2 = (ns - 1) * (ns - n1**2) * n2**2 / ((n1**2 * ns - n2**2) * (n2**2 - ns))
    phase1, phase2 = math.pi - math.atan(math.sqrt(tan1)), math.atan(math.sqrt(tan2))
    exact = [phase1 * 1064 / (2 * math.pi * n1), phase2 * 1064 / (2 * math.pi * n2)]
    assert stack.thickness_nm.tolist() == pytest.approx(exact, abs=0.05)


def test_the_layers_of_the_group_in_the_edge_filter_are_quarter_waves():
    waves = load("infrared-edge-7300").quarter_waves[4:20]
    assert len(waves) == 16
    np.testing.assert_allclose(waves, 1.0, atol=2e-3)


@pytest.mark.parametrize("name", ["window-antireflection", "germanium-antireflection"])
def test_both_faces_of_a_window_are_alike(name):
    films = [layer for layer in load(name).stack.layers if isinstance(layer, Layer)]
    assert [(film.material.key, film.thickness_nm) for film in films] == [
        (film.material.key, film.thickness_nm) for film in films[::-1]
    ]
