"""Inputs that give wanted quantities, against closed forms."""

import json
import math

import numpy as np
import pytest
from scipy.optimize import brentq

import axicfd
from axicfd import pipeline
from axicfd.errors import InputError
from axicfd.output import finding
from axicfd.theory import duct_heat
from axicfd.variants.find import Found, find
from tests import shipped
from tests.solver.tubes import tube
from tests.test_given_drop import COOLED, drop_of_cooled_line

BORE, DENSITY, SPECIFIC_HEAT, CONDUCTIVITY, VISCOSITY = 0.01, 1000.0, 2000.0, 0.2, 0.01  # of `tube`
FLUX = {
    "outside": 'heat_flux = "2 kW/m^2"', "profile": "developed", "flow": 'mass_flow = "2 g/s"', "length": "0.3 m",
    "radial": 16, "axial": 64,
}  # fmt: skip
OUTLET = "stream.oil.outlet_temperature"


def only(found: Found) -> tuple[float, float]:
    """Value and half-width of the input of the one answer."""
    (answer,) = found.answers
    assert not found.why and answer.input_half_widths[0] is not None
    return answer.inputs[0], answer.input_half_widths[0]


def test_length_for_an_outlet_temperature_with_uniform_flux():
    """m cp (T - T_in) = q pi D L, the energy balance, exact."""
    found = find(tube(**FLUX), "section.all.length", f"{OUTLET} = 35 degC")
    length, _ = only(found)
    assert length == pytest.approx(2e-3 * SPECIFIC_HEAT * 15.0 / (2000.0 * math.pi * BORE), rel=1e-6)
    assert found.answers[0].quantities[0] == pytest.approx(308.15, abs=1e-4)
    assert found.solves <= 4


def test_length_for_an_outlet_temperature_at_a_given_wall_temperature():
    """The Graetz series (Graetz 1885; eigenvalues of Brown 1960), exact at a large Péclet number: here 6400."""
    case = tube(
        outside='temperature = "60 degC"', profile="developed", flow='mass_flow = "2 g/s"', radial=32, axial=128
    )
    found = find(case, "section.all.length", f"{OUTLET} = 40 degC", between=("50 mm", "20 m"))
    length, bar = only(found)
    peclet = 4.0 * 2e-3 * SPECIFIC_HEAT / (math.pi * BORE * CONDUCTIVITY)

    def bulk(length: float) -> float:
        x = length / (BORE * peclet)
        return 60.0 - 40.0 * math.exp(-4.0 * float(duct_heat.mean_nusselt_T(x)) * x)

    exact = brentq(lambda length: bulk(length) - 40.0, 0.05, 20.0)
    assert abs(length - exact) <= bar < 5e-3 * exact
    assert found.solves <= 5


def test_flow_for_a_pressure_drop_is_that_of_hagen_and_poiseuille():
    found = find(tube(**FLUX), "stream.oil.mass_flow", "stream.oil.pressure_drop = 10 Pa")
    flow, bar = only(found)
    exact = DENSITY * math.pi * BORE**4 * 10.0 / (128.0 * VISCOSITY * 0.3)
    assert abs(flow - exact) <= bar < 2e-3 * exact


@pytest.mark.parametrize(
    "change, until", [("stream.oil.mass_flow", "stream.oil.pressure_drop = 10 Pa"),
                      ("section.all.length", f"{OUTLET} = 35 degC")]
)  # fmt: skip
def test_a_search_costs_less_than_twelve_solves(change, until, monkeypatch):
    """Work is cells times iterations, looks on the coarse mesh included, on the mesh the tool chooses."""
    work = []
    solve_on = pipeline.solve_on

    def counted(*arguments):
        solution = solve_on(*arguments)
        work.append(solution.grid.cells * max(solution.iterations, 1))
        return solution

    case = tube(**{**FLUX, "radial": 32, "axial": 128})
    monkeypatch.setattr(pipeline, "solve_on", counted)
    axicfd.solve(case)
    one = sum(work)
    work.clear()
    assert find(case, change, until).answers
    assert sum(work) < 6.0 * one


def test_a_cooled_line_has_three_flows_of_one_drop():
    """See `drop_of_cooled_line`: an independent computation."""
    found = find(tube(flow="reynolds = 1", **COOLED), "stream.oil.mass_flow", "stream.oil.pressure_drop = 0.4 bar",
                 between=("0.1 g/s", "50 g/s"))  # fmt: skip
    flows = [answer.inputs[0] for answer in found.answers]
    assert len(flows) == 3 and flows == sorted(flows)
    assert [drop_of_cooled_line(flow) for flow in flows] == pytest.approx([4e4] * 3, rel=0.03)
    for answer in found.answers:
        assert answer.result["stream.oil.pressure_drop_Pa"] == pytest.approx(4e4, abs=answer.quantity_half_widths[0])
    assert finding.answer_names(found) == ["found-1", "found-2", "found-3"]


def test_the_shipped_cold_line_has_three_flows():
    case = shipped.case("cold-oil-line").replace(shipped.COARSE)
    assert len(find(case, "stream.oil.mass_flow", "stream.oil.pressure_drop = 1.2 bar").answers) == 3


def test_two_answers_between_two_looks_are_noticed():
    """Both flows are between neighbouring looks: the drop turns at about 0.57 bar (`drop_of_cooled_line`)."""
    flows = np.geomspace(4e-4, 3e-3, 200)
    highest = max(drop_of_cooled_line(flow) for flow in flows)
    found = find(tube(flow="reynolds = 1", radial=24, **COOLED), "stream.oil.mass_flow",
                 {"stream.oil.pressure_drop": 0.985 * highest}, between=(2e-4, 3e-3))  # fmt: skip
    assert len(found.answers) == 2


def test_two_inputs_for_two_quantities():
    """m cp (T - T_in) = q pi D L and drop = 128 mu m L / (pi rho D^4), both exact: L^2 and m follow."""
    found = find(
        tube(**FLUX),
        ["section.all.length", "stream.oil.mass_flow"],
        [f"{OUTLET} = 35 degC", "stream.oil.pressure_drop = 20 Pa"],
    )
    (answer,) = found.answers
    ratio = SPECIFIC_HEAT * 15.0 / (2000.0 * math.pi * BORE)  # L / m
    product = 20.0 * math.pi * DENSITY * BORE**4 / (128.0 * VISCOSITY)  # L m
    exact = math.sqrt(ratio * product), math.sqrt(product / ratio)
    for value, half, true in zip(answer.inputs, answer.input_half_widths, exact, strict=True):
        assert abs(value - true) <= half < 1e-3 * true
    assert found.between is None and found.solves <= 5


def test_two_inputs_that_do_the_same_are_said_to():
    found = find(
        tube(**FLUX),
        ["section.all.length", "section.all.outside.heat_flux"],
        [f"{OUTLET} = 35 degC", "stream.oil.heat_gain = 200 W"],
    )
    assert not found.answers
    assert "The closest that was found is section.all.length = " in found.why and "tell the inputs apart" in found.why


def test_hopeless_targets_say_what_is_reached():
    warm = tube(outside='film_coefficient = "200 W/m^2/K", ambient = "60 degC"', length="1 m")
    found = find(warm, "section.all.length", f"{OUTLET} = 61 degC", between=("0.1 m", "100 m"))
    assert not found.answers
    assert "Between 0.1 m and 100 m stream.oil.outlet_temperature goes no higher than 60" in found.why
    assert finding.sentences(found) == [f"No answer. {found.why}"]


def test_what_is_only_neared_is_not_reached():
    """The outlet comes to the surroundings' 60 degC with length, but not to it."""
    warm = tube(outside='film_coefficient = "200 W/m^2/K", ambient = "60 degC"', length="1 m", radial=16, axial=64)
    found = find(warm, "section.all.length", f"{OUTLET} = 60.5 degC", between=("0.1 m", "20 m"))
    assert not found.answers and "goes no higher than 59." in found.why and "at 20 m. A wider range" in found.why


def test_where_the_model_is_refused_is_said():
    found = find(tube(flow="reynolds = 200"), "stream.oil.reynolds", "stream.oil.pressure_drop = 10 kPa")
    assert not found.answers and "there is no answer: The Reynolds number" in found.why
    # the looks go on to where it is refused
    assert max(look.inputs[0] for look in found.looks if look.quantities) > 3500.0


def test_a_quantity_that_does_not_change():
    found = find(tube(**FLUX), "section.all.length", "stream.oil.reynolds = 500")
    assert not found.answers and found.why == "stream.oil.reynolds does not change with section.all.length."


def test_temperatures_are_searched_either_way():
    """By uniform flux the outlet is as much warmer as the inlet; the flux may be wanted too, of either sign."""
    found = find(tube(**FLUX), "stream.oil.inlet_temperature", f"{OUTLET} = 30 degC")
    rise = 2000.0 * math.pi * BORE * 0.3 / (2e-3 * SPECIFIC_HEAT)
    assert only(found)[0] == pytest.approx(303.15 - rise, abs=1e-3)
    found = find(tube(**FLUX), "section.all.outside.heat_flux", f"{OUTLET} = 15 degC", (-5000.0, 5000.0))
    assert only(found)[0] == pytest.approx(-5.0 * 2e-3 * SPECIFIC_HEAT / (math.pi * BORE * 0.3), rel=1e-5)


def test_the_written_case_is_the_solved_one():
    found = find(tube(**FLUX), "section.all.length", f"{OUTLET} = 35 degC")
    (answer,) = found.answers
    (setting,) = finding.settings(found, answer)
    path, _, value = setting.partition("=")
    assert found.case.replace({path: value}) == answer.case
    assert answer.result.case == answer.case


def test_what_is_found_shows_itself_and_converts():
    found = find(tube(**FLUX), "section.all.length", f"{OUTLET} = 35 degC")
    assert "section.all.length = " in repr(found)
    (text,) = finding.sentences(found)
    assert text.startswith("section.all.length = 0.95") and f"gives {OUTLET} = 35" in text
    assert "<script" not in finding.html(found) and OUTLET in finding.html(found)
    tree = json.loads(finding.json_text(found))
    assert tree["answers"][0]["inputs"]["section.all.length"]["value"] == found.answers[0].inputs[0]
    assert len(tree["looks"]) == len(found.looks)


def test_steps_are_told():
    steps = []
    found = find(tube(**FLUX), "section.all.length", f"{OUTLET} = 35 degC", on_step=lambda step, *_: steps.append(step))
    assert [s.number for s in steps if not s.is_look] == list(range(1, found.solves + 1))
    assert len([s for s in steps if s.is_look]) == len(found.looks)


@pytest.mark.parametrize(
    "change, until, between, words",
    [
        ("section.all.lenth", f"{OUTLET} = 35 degC", None, "Write `length`"),
        ("section.al.length", f"{OUTLET} = 35 degC", None, "Write all"),
        ("section.all.length", "outlet = 35 degC", None, "names no quantity"),
        ("section.all.length", f"{OUTLET} = 35", None, 'Write "35 degC"'),
        ("section.all.length", OUTLET, None, "is not QUANTITY = VALUE"),
        ("section.all.length", f"{OUTLET} = 35 degC", ("0 m", "1 m"), "greater than 0"),
        ("section.all.length", f"{OUTLET} = 35 degC", ("1 m", "1 m"), "twice"),
        ("section.all.length", f"{OUTLET} = 35 degC", ("1 K", "1 m"), "must be a length"),
        ("section.all.length", f"{OUTLET} = 35 degC", ("1 m",), "must be two values"),
        ("stream.oil.reynolds", f"{OUTLET} = 35 degC", None, "has no value in the case"),
        ("stream.oil.inlet_profile", f"{OUTLET} = 35 degC", None, "no input"),
        ("mesh.radial", f"{OUTLET} = 35 degC", None, "no input"),
        ("section.all", f"{OUTLET} = 35 degC", None, "whole section"),
        (["section.all.length", "stream.oil.mass_flow"], f"{OUTLET} = 35 degC", None, "has 2 where `until` has 1"),
    ],
)
def test_bad_questions_are_refused_before_anything_is_solved(change, until, between, words):
    with pytest.raises(InputError) as caught:
        find(tube(**FLUX), change, until, between)
    assert words in str(caught.value)
