import math

import pytest

from axicfd.case.layout import layout
from axicfd.case.read import load
from axicfd.cli import estimate
from axicfd.output.shown import shown_units
from tests.output.made_up import TEXT


def changed(*pairs):
    text = TEXT
    for old, new in pairs:
        assert old in text
        text = text.replace(old, new)
    return load(text)


def test_given_flux_warms_by_the_heat_balance():
    # Expected: bulk rise = heat / (m cp), exact; cp = 2500 J/kg/K, m = 6 g/s.
    case = changed(('{ film_coefficient = "900 W/m^2/K", ambient = "85 degC" }', '{ heat = "300 W" }'))
    found = estimate.by_hand(case)
    assert found["stream.syrup.outlet_temperature"] == pytest.approx(293.15 + 300 / (0.006 * 2500))
    assert found["section.jacket.heat_in"] == pytest.approx(300.0)
    assert found["section.lead-in.heat_in"] == 0.0


def test_drop_of_a_developed_inlet():
    # Expected: 128 mu Q L / (pi D^4), the developed laminar pipe flow.
    found = estimate.by_hand(load(TEXT))
    flow = 0.006 / 1330
    assert found["stream.syrup.pressure_drop"] == pytest.approx(128 * 0.5 * flow * 1.4 / (math.pi * 0.012**4))


@pytest.mark.parametrize(
    "flow",
    [
        'volume_flow = "4.511278195488722e-6 m^3/s"',
        "reynolds = 1.2732395447351628",
        'mean_velocity = "0.0398886 m/s"',
    ],
)
def test_every_way_to_give_the_flow_counts(flow):
    case = changed(('mass_flow = "6 g/s"', flow))
    assert estimate.inlet_state(case, layout(case)).mass_flow == pytest.approx(0.006, rel=1e-5)


def test_generated_heat_is_not_heat_through_the_outside():
    case = changed(
        (
            'outside = { film_coefficient = "900 W/m^2/K", ambient = "85 degC" }',
            'outside = { insulated = true }\ngenerated = { tube = "200 W" }',
        ),
    )
    found = estimate.by_hand(case)
    assert found["stream.syrup.heat_gain"] == pytest.approx(200.0)
    assert found["section.jacket.heat_in"] == pytest.approx(0.0, abs=1e-9)


def test_the_direction_turns_the_sections_round():
    forwards = estimate.by_hand(load(TEXT))
    backwards = estimate.by_hand(
        changed(('inlet_profile = "developed"', 'inlet_profile = "developed"\ndirection = "-z"'))
    )
    assert backwards["section.jacket.heat_in"] == pytest.approx(forwards["section.jacket.heat_in"])


def test_a_void_keeps_the_outside_away():
    void = '[[layer]]\nvoid = true\nthickness = "1 mm"\n\n[[layer]]\nname = "tube"'
    case = changed(('[[layer]]\nname = "tube"', void))
    assert estimate.by_hand(case)["stream.syrup.heat_gain"] == 0.0


def test_nothing_flowing_has_no_estimate():
    case = changed(('mass_flow = "6 g/s"', 'mass_flow = "0 g/s"'))
    assert estimate.by_hand(case) is None
    assert "nothing flows" in estimate.two_lines(case, shown_units(case))[0]


def test_groups_are_those_of_the_inlet():
    # Expected: Re = 4 m / (pi D mu), Pr = mu cp / k, by definition.
    case = load(TEXT)
    rows = {row[0]: row[1] for row in estimate.group_rows(case, shown_units(case))}
    assert float(rows["Reynolds"]) == pytest.approx(4 * 0.006 / (math.pi * 0.012 * 0.5), rel=1e-3)
    assert float(rows["Prandtl"]) == pytest.approx(0.5 * 2500 / 0.33, rel=1e-3)
