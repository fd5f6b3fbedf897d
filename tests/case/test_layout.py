"""Geometry in SI: radii, places along z, and the ramps between prescribed temperatures."""

import math

import pytest

from axicfd.case.layout import layout
from axicfd.case.read import load
from tests.case.samples import BASE, changed


def test_radii_and_places():
    tube = layout(load(BASE))
    assert [section.name for section in tube.sections] == ["lead-in", "heater", "plate", "hotter"]
    assert [section.z1 for section in tube.sections] == pytest.approx([0.2, 0.7, 1.0, 1.3], rel=1e-15)
    assert all(a.z1 == b.z0 for a, b in zip(tube.sections, tube.sections[1:], strict=False))
    assert tube.length == tube.sections[-1].z1 and tube.sections[0].z0 == 0.0
    assert [layer.r_outer for layer in tube.sections[0].layers] == pytest.approx([0.003, 0.004, 0.006], rel=1e-15)
    assert [layer.kind for layer in tube.sections[0].layers] == ["stream", "solid", "solid"]
    assert [layer.material for layer in tube.sections[0].layers] == ["oil", "copper", "liner"]
    assert tube.bore_diameter == 0.006 and tube.outer_diameter == pytest.approx(0.012, rel=1e-15)
    assert tube.stream_names == ("oil",)


def test_what_a_layer_carries():
    lead_in, heater, *_ = layout(load(BASE)).sections
    tube = heater.layers[1]
    assert (tube.contact_resistance, tube.heat_per_volume, tube.generated, tube.cells_across) == (
        1e-5,
        1000.0,
        5.0,
        8,
    )
    assert lead_in.layers[1].generated == 0.0
    assert tube.area == pytest.approx(math.pi * (0.004**2 - 0.003**2), rel=1e-12)  # area of a ring
    assert heater.heat_density(tube) == pytest.approx(1000.0 + 5.0 / (tube.area * 0.5), rel=1e-12)


def test_a_joint_becomes_a_ramp_centred_on_it():
    *_, plate, hotter = layout(load(BASE)).sections
    left, right = plate.outside.temperature, hotter.outside.temperature
    # 60 degC on the left; 70 degC rising by 10 K over 0.3 m on the right; ramp over 5 mm on each side
    high = 343.15 + 10 * 0.005 / 0.3
    assert left.z == pytest.approx((0.0, 0.295, 0.3)) and right.z == pytest.approx((0.0, 0.005, 0.3))
    assert left.value == pytest.approx((333.15, 333.15, (333.15 + high) / 2))
    assert right.value == pytest.approx(((333.15 + high) / 2, high, 353.15))


def test_without_a_joint_the_outside_stays_as_given():
    text = changed(('joint_length = "10 mm"\n', "\n"))
    case = load(text)
    assert [section.outside for section in layout(case).sections] == [section.outside for section in case.section]


def test_two_ramps_in_one_section_meet_its_middle():
    sections = "".join(
        f'[[section]]\nname = "{i}"\nlength = "0.1 m"\noutside = {{ temperature = "{20 + 10 * i} degC" }}\n'
        + ('joint_length = "100 mm"\n' if i else "")
        for i in range(3)
    )
    text = (
        '[stream.w]\nfluid = "water"\ninlet_temperature = "20 degC"\nreynolds = 5\n'
        '[[layer]]\nstream = "w"\ndiameter = "4 mm"\n' + sections
    )
    first, middle, last = layout(load(text)).sections
    z = [0.0, 0.025, 0.05, 0.075, 0.1]
    assert [first.outside.temperature.at(x) for x in z] == pytest.approx([293.15, 293.15, 293.15, 295.65, 298.15])
    assert [middle.outside.temperature.at(x) for x in z] == pytest.approx([298.15, 300.65, 303.15, 305.65, 308.15])
    assert [last.outside.temperature.at(x) for x in z] == pytest.approx([308.15, 310.65, 313.15, 313.15, 313.15])


def test_stacks_of_their_own():
    text = BASE.replace(
        'outside = { insulated = true }\n\n',
        'outside = { insulated = true }\n[[section.layer]]\nstream = "oil"\ndiameter = "6 mm"\n'
        '[[section.layer]]\nvoid = true\nthickness = "5 mm"\n\n',
        1,
    ).replace("first = { insulated = true }\n", "")  # fmt: skip
    tube = layout(load(text))
    assert [layer.kind for layer in tube.sections[0].layers] == ["stream", "void"]
    assert tube.outer_diameter == pytest.approx(0.016) and len(tube.sections[1].layers) == 3
