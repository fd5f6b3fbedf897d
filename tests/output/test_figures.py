import matplotlib.image
import numpy as np
import pytest

from axicfd.output import figures
from tests.output.made_up import TEXT, made_up

TWO_WALLS = TEXT.replace(
    '[[section]]\nname = "lead-in"',
    '[[layer]]\nname = "jacket tube"\nsolid = "copper"\nthickness = "0.5 mm"\n\n[[section]]\nname = "lead-in"',
)


def texts(figure):
    """Every word in a picture."""
    return {text.get_text() for axes in figure.axes for text in axes.texts} | {text.get_text() for text in figure.texts}


@pytest.fixture(scope="module")
def result():
    return made_up()


def test_lightness_of_the_colours_rises_in_equal_steps():
    # Relative luminance of sRGB, IEC 61966-2-1, and CIE lightness; weights from memory.
    rgb = figures.colour_map().colors
    linear = np.where(rgb <= 0.04045, rgb / 12.92, ((rgb + 0.055) / 1.055) ** 2.4)
    lightness = 116 * np.cbrt(linear @ [0.2126, 0.7152, 0.0722]) - 16
    steps = np.diff(lightness)
    assert (steps > 0).all()
    assert steps.max() < 1.6 * steps.mean()
    assert steps.min() > 0.4 * steps.mean()


def test_the_temperature_picture_says_what_it_shows(result):
    words = texts(figures.temperature_picture(result))
    assert {"lead-in", "jacket", "tube", "syrup in", "out", "m", "radius × 20"} <= words
    assert "NOT CONVERGED" not in words


def test_an_unconverged_result_is_marked():
    assert "NOT CONVERGED" in texts(figures.temperature_picture(made_up(converged=False)))
    assert "NOT CONVERGED" in texts(figures.axial_picture(made_up(converged=False), "syrup"))


def test_a_backwards_stream_enters_on_the_right():
    text = TEXT.replace('inlet_profile = "developed"', 'direction = "-z"')
    figure = figures.temperature_picture(made_up(text))
    places = {t.get_text(): t.get_position()[0] for axes in figure.axes for t in axes.texts}
    assert places["out"] < places["syrup in"]


def test_every_wall_layer_is_named(result):
    assert {"tube", "jacket tube"} <= texts(figures.temperature_picture(made_up(TWO_WALLS)))


def test_curves_stand_under_the_tube_on_its_ruler(result):
    figure = figures.axial_picture(result, "syrup")
    tube, *panels = figure.axes
    assert len(panels) == 4
    for panel in panels:
        assert panel.get_xlim() == tube.get_xlim() == (0.0, pytest.approx(1.4))
        assert panel.get_position().x0 == pytest.approx(tube.get_position().x0)
        shades = [patch for patch in panel.patches if patch.get_facecolor()[:3] != (1.0, 1.0, 1.0)]
        assert len(shades) == 1  # the jacket, not the insulated lead-in


def test_a_spike_does_not_flatten_the_curve():
    spiked = made_up(nz=600)
    spiked.axial["syrup"]["wall_heat_flux_W_m2"][86] = 1e7  # one face at the heater's edge
    figure = figures.axial_picture(spiked, "syrup")
    panel = next(axes for axes in figure.axes if "wall heat flux" in axes.get_title(loc="left"))
    assert panel.get_ylim()[1] < 1e5
    assert "cut off" in panel.get_title(loc="left")


def test_empty_columns_have_no_panel():
    bare = made_up()
    bare.axial["syrup"]["nusselt"] = np.full(61, np.nan)
    assert len(figures.axial_picture(bare, "syrup").axes) == 1 + 3


def test_one_temperature_everywhere_can_be_drawn():
    flat = made_up()
    flat.fields["T"] = np.zeros_like(flat.fields["T"])
    figures.temperature_picture(flat)


@pytest.mark.parametrize("length", ["0.02 m", "30 m"])
def test_short_and_long_tubes_fit_on_paper(length):
    text = TEXT.replace('"1.2 m"', f'"{length}"').replace('"0.2 m"', '"5 mm"').replace('"0.9 m"', '"3 mm"')
    figure = figures.temperature_picture(made_up(text))
    assert 2.5 < figure.get_figheight() < 9


@pytest.mark.parametrize("suffix", [".png", ".svg", ".pdf"])
def test_pictures_are_written_by_suffix(result, tmp_path, suffix):
    paths = figures.draw_all(result, tmp_path, suffix)
    assert [path.name for path in paths] == [f"temperature{suffix}", f"axial-syrup{suffix}"]
    assert all(path.stat().st_size > 5000 for path in paths)
    if suffix == ".png":
        picture = matplotlib.image.imread(paths[0])
        assert np.allclose(picture[0, 0, :3], 1.0)  # white ground


def test_equal_pictures_make_equal_bytes(result, tmp_path):
    written = []
    for name in ("a", "b"):
        (tmp_path / name).mkdir()
        written.append(figures.draw_all(result, tmp_path / name, ".svg")[0].read_bytes())
    assert written[0] == written[1]


def test_isotherm_numbers_stand_apart(result):
    figure = figures.temperature_picture(result)
    figure.draw_without_rendering()
    numbers = [text for text in figure.axes[0].texts if text.get_text().isdigit()]
    assert len(numbers) > 3
    boxes = [text.get_window_extent() for text in numbers]
    assert not any(one.overlaps(other) for i, one in enumerate(boxes) for other in boxes[:i])


def test_cooled_parts_are_not_shown_as_heated():
    result = made_up()
    result.summary["section"]["jacket"]["heat_in_W"] = -100.0
    figure = figures.axial_picture(result, "syrup")
    assert any("cooled parts shaded blue" in word and "heated" not in word for word in texts(figure))


def test_pressure_is_drawn_from_the_outlet(result):
    pressure = figures.axial_picture(result, "syrup").axes[-1].lines[0].get_ydata()
    assert pressure[-1] == pytest.approx(0.0, abs=1e-6)
    assert pressure[0] == pytest.approx(4000.0)


def test_a_pole_leaves_a_gap_and_no_line_through_the_panel():
    value = np.array([4.0, 6.0, 90.0, -80.0, -2.0, 4.0])
    drawn = figures._without_poles(value, -5.0, 10.0)
    assert np.isnan(drawn).tolist() == [False, False, False, True, False, False]
    assert np.array_equal(figures._without_poles(value, -100.0, 100.0), value)
