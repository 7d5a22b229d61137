"""Pictures of spectra: what is drawn, and whether a reader can tell the lines apart."""

import itertools

import matplotlib
import numpy as np
import pytest
from matplotlib.colors import to_rgb

import filmstack as fs
from filmstack.errors import FilmstackError
from filmstack.report.axes import percent_limits
from filmstack.report.spectrum_plot import Labelled, draw_spectrum, spectrum_figure
from filmstack.report.style import MOST_LINES, line_style, save_figure

WAVELENGTH = np.linspace(400.0, 800.0, 41)


def mirror(k=0.0):
    high, low = fs.constant(2.35, k), fs.constant(1.46)
    layers = [fs.Layer(high, 600 / 4 / 2.35), fs.Layer(low, 600 / 4 / 1.46)] * 3
    return fs.Stack(fs.constant(1.0), layers, fs.constant(1.52))


def labelled(angle=0.0, wavelength=WAVELENGTH, k=0.0, name="mirror"):
    return Labelled(name, fs.spectrum(mirror(k), wavelength, angle))


def panels(figure):
    return [axes for axes in figure.axes if axes.get_xlabel() or axes.get_ylabel()]


def data_lines(axes):
    return [line for line in axes.get_lines() if len(line.get_xdata()) == WAVELENGTH.size]


def texts(figure):
    return [text.get_text() for text in figure.findobj(matplotlib.text.Text) if text.get_text()]


def test_against_wavelength_in_percent():
    item = labelled()
    figure = spectrum_figure([item], conditions="T is into glass.", small_print=["Materials: one; two."])
    transmittance, reflectance = panels(figure)
    assert transmittance.get_ylabel() == "transmittance T (%)"
    assert reflectance.get_ylabel() == "reflectance R (%)"
    assert reflectance.get_xlabel() == "vacuum wavelength (nm)"
    (line,) = data_lines(reflectance)
    np.testing.assert_array_equal(line.get_xdata(), WAVELENGTH)
    np.testing.assert_array_equal(line.get_ydata(), 100.0 * item.spectrum.R[0])
    assert {"mirror", "T is into glass.", "Materials: one; two."} <= set(texts(figure))


def test_absorptance_has_a_panel_when_there_is_any():
    assert len(panels(spectrum_figure([labelled()]))) == 2
    assert [axes.get_ylabel() for axes in panels(spectrum_figure([labelled(k=0.01)]))][-1] == "absorptance A (%)"


def test_one_oblique_angle_shows_s_p_and_mean():
    figure = spectrum_figure([labelled(45.0)])
    assert {"s", "p", "mean of s and p"} <= set(texts(figure))
    assert [len(data_lines(axes)) for axes in panels(figure)] == [3, 3]


def test_several_angles_stand_in_a_panel_a_polarization():
    figure = spectrum_figure([labelled([0.0, 45.0, 60.0])])
    titles = [axes.get_title(loc="left") for axes in figure.axes]
    assert titles == [
        title for name in ("s polarization", "p polarization", "unpolarized (mean of s and p)") for title in [name] * 2
    ]
    assert texts(figure).count("60°") == 6


def test_optical_density_of_the_mean_comes_from_the_mean():
    item = labelled(60.0)
    figure = spectrum_figure([item], scale="od", polarization="mean")
    assert panels(figure)[0].get_ylabel() == "optical density of T"
    drawn = data_lines(panels(figure)[0])[0].get_ydata()
    np.testing.assert_allclose(drawn, -np.log10(0.5 * (item.spectrum.T_s[0] + item.spectrum.T_p[0])), rtol=1e-13)


def test_where_no_light_passes_the_density_has_a_gap():
    glass = fs.Stack(fs.constant(1.5), [], fs.constant(1.0))  # total reflection beyond 41.8 degrees
    item = Labelled("prism", fs.spectrum(glass, [550.0], [0.0, 30.0, 45.0, 60.0]))
    figure = spectrum_figure([item], view="angle", scale="od", polarization="s")
    drawn = panels(figure)[0].get_lines()[0].get_ydata()
    assert np.isnan(drawn).tolist() == [False, False, True, True]
    low, high = panels(figure)[0].get_ylim()
    assert low <= 0.0 < high < 1.0


def test_designs_are_compared_line_by_line():
    figure = spectrum_figure([labelled(name="first"), labelled(k=0.1, name="second")])
    assert {"2 designs compared", "first", "second"} <= set(texts(figure))
    figure = spectrum_figure([labelled(0.0, name="first"), labelled(45.0, name="second")], polarization="p")
    assert {"first, 0°", "second, 45°"} <= set(texts(figure))


def test_against_angle():
    item = labelled(np.arange(0.0, 91.0), [550.0, 650.0])
    figure = spectrum_figure([item], view="angle", polarization="s")
    axes = panels(figure)[-1]
    assert axes.get_xlabel() == "angle of incidence (deg)"
    np.testing.assert_array_equal(axes.get_lines()[1].get_ydata(), 100.0 * item.spectrum.R_s[:, 1])


def test_map_over_wavelength_and_angle():
    item = labelled(np.arange(0.0, 81.0, 10.0))
    figure = spectrum_figure([item], view="map", polarization="p")
    mesh = figure.axes[1].collections[0]
    np.testing.assert_array_equal(mesh.get_array().reshape(9, 41), 100.0 * item.spectrum.R_p)
    assert figure.axes[0].get_ylabel() == "angle of incidence (deg)"
    assert {"transmittance T (%)", "reflectance R (%)"} <= set(texts(figure))


def test_colour_map_grows_lighter_in_even_steps():
    # Relative luminance after ITU-R BT.709, cube root as in CIE 1976 L*: equal steps look equal.
    from filmstack.report.style import COLOUR_MAP

    colours = matplotlib.colormaps[COLOUR_MAP](np.linspace(0, 1, 33))[:, :3]
    linear = np.where(colours <= 0.04045, colours / 12.92, ((colours + 0.055) / 1.055) ** 2.4)
    lightness = 116.0 * np.cbrt(linear @ [0.2126, 0.7152, 0.0722]) - 16.0
    steps = np.diff(lightness)
    assert steps.min() > 0.0
    assert steps.max() < 2.0 * np.median(steps)


def test_infrared_is_read_in_micrometres():
    figure = spectrum_figure([labelled(wavelength=np.linspace(8000.0, 12000.0, 41))])
    assert panels(figure)[-1].get_xlabel() == "vacuum wavelength (µm)"
    assert data_lines(panels(figure)[-1])[0].get_xdata()[-1] == 12.0


def test_lines_differ_without_colour_and_are_dark_enough():
    dashes = [str(line_style(number)["linestyle"]) for number in range(MOST_LINES)]
    assert len(set(dashes)) == MOST_LINES
    for number in range(MOST_LINES):  # contrast of graphics of at least 3 to 1 on white: WCAG 2.1, 1.4.11
        colour = np.array(to_rgb(line_style(number)["color"]))
        linear = np.where(colours := colour <= 0.04045, colour / 12.92, ((colour + 0.055) / 1.055) ** 2.4)
        assert colours.shape == (3,)
        assert 1.05 / (linear @ [0.2126, 0.7152, 0.0722] + 0.05) >= 3.0


@pytest.mark.parametrize("angles", [[0, 1, 2, 3], [0, 30, 45, 60], [0, 5, 10, 15, 20, 25, 30, 35]])
def test_labels_never_touch(angles):
    figure = spectrum_figure([labelled(angles)], polarization="mean")
    figure.draw_without_rendering()
    for axes in panels(figure):
        boxes = [text.get_window_extent() for text in axes.texts]
        assert len(boxes) == len(angles)
        assert not any(one.overlaps(other) for one, other in itertools.combinations(boxes, 2))
        assert all(box.x1 <= figure.bbox.x1 for box in boxes)


def test_long_titles_and_small_print_stay_inside():
    item = labelled(name="a mirror with a name so long that nobody would write it on a drawing of the part itself")
    figure = spectrum_figure([item], small_print=["Materials: " + "; ".join(["TiO2, evaporated film"] * 12)])
    figure.draw_without_rendering()
    for text in figure.texts:
        assert text.get_window_extent().x1 <= figure.bbox.x1
        assert text.get_window_extent().y0 >= 0.0


def test_too_many_lines_are_refused():
    message = (
        "picture: expected at most 8 lines a panel, got 9. "
        "Choose fewer designs or angles, or draw a map over wavelength and angle"
    )
    with pytest.raises(FilmstackError) as caught:
        spectrum_figure([labelled(np.arange(9.0))])
    assert str(caught.value) == message


def test_a_map_needs_both_axes_and_one_design():
    with pytest.raises(FilmstackError) as caught:
        spectrum_figure([labelled()], view="map")
    assert str(caught.value) == (
        "--view map: expected at least two wavelengths and two angles, got 41 and 1. "
        "Give --angle 0:80:1 and --wavelength START:STOP:STEP"
    )
    with pytest.raises(FilmstackError) as caught:
        spectrum_figure([labelled(), labelled()], view="map")
    assert str(caught.value) == "--view map: expected one design, got 2. Draw one map a design"


@pytest.mark.parametrize(
    ("values", "limits"),
    [
        ([0.1, 1.3], (-0.028, 1.4)),
        ([98.2, 99.9], (97.92, 100.08)),
        ([0.0, 100.0], (-2.0, 102.0)),
        ([0.0, 0.0], (-0.02, 1.02)),
        ([4.2, 4.2], (-0.12, 6.12)),
    ],
)
def test_limits_begin_at_zero_unless_all_is_near_full(values, limits):
    low, high = percent_limits(np.array(values))
    assert low <= min(values) < max(values) + 1e-9 <= high
    assert (low < 0.0) == (limits[0] < 0.0)


def test_spectrum_draws_itself_on_given_axes():
    from matplotlib.figure import Figure

    axes = Figure().subplots()
    item = labelled(k=0.01).spectrum
    assert item.plot(axes) is axes
    assert len(data_lines(axes)) == 3
    assert axes.get_ylabel() == "R, T, A (%)"
    assert axes.get_title(loc="left").startswith("Unpolarized light. T is into ")


def test_two_spectra_share_axes():
    axes = labelled().spectrum.plot()
    labelled(45.0).spectrum.plot(axes)
    assert len(data_lines(axes)) == 4


def test_spectrum_draws_itself_on_a_new_figure_without_global_state():
    import sys

    axes = labelled([0.0, 45.0]).spectrum.plot()
    assert {"R 0°", "R 45°", "T 0°", "T 45°"} <= set(texts(axes.figure))
    assert any(text.startswith("Materials: constant index 1; constant index 2.35;") for text in texts(axes.figure))
    assert "matplotlib.pyplot" not in sys.modules or not sys.modules["matplotlib.pyplot"].get_fignums()


def test_drawing_leaves_the_settings_of_the_user_alone():
    before = dict(matplotlib.rcParams)
    draw_spectrum(labelled().spectrum)
    assert dict(matplotlib.rcParams) == before


@pytest.mark.parametrize(("ending", "begin"), [("png", b"\x89PNG"), ("svg", b"<?xml"), ("pdf", b"%PDF")])
def test_the_same_picture_has_the_same_bytes(ending, begin, tmp_path):
    files = [tmp_path / f"{number}.{ending}" for number in range(2)]
    for file in files:
        save_figure(spectrum_figure([labelled(45.0)]), file)
    assert files[0].read_bytes().startswith(begin)
    assert files[0].read_bytes() == files[1].read_bytes()


def test_every_shape_of_request_can_be_drawn():
    for angle, wavelength, view in itertools.product(
        (0.0, [45.0, 0.0]), ([550.0], [650.0, 550.0]), ("wavelength", "angle")
    ):
        assert spectrum_figure([labelled(angle, wavelength)], view=view).axes
    assert draw_spectrum(labelled([0.0, 45.0], [550.0]).spectrum).get_xlabel() == "angle of incidence (deg)"
