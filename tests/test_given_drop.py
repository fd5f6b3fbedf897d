"""A pressure drop in place of a flow: the flow that a solve finds for it."""

import math

import numpy as np
import pytest
from scipy.optimize import brentq

from axicfd import given_drop
from axicfd.cli.estimate import by_hand
from axicfd.errors import InputError, RefusedModel
from axicfd.pipeline import solve
from axicfd.results.result import Result
from axicfd.solver.solve import solve_on
from tests.solver.tubes import tube


def found(result: Result) -> tuple[float, float]:
    """The mass flow and its half-width [kg/s]."""
    bars = result.summary["numerical_uncertainty"]["stream"]["oil"]
    return result["stream.oil.mass_flow_kg_s"], bars["mass_flow_kg_s"]


@pytest.mark.parametrize("direction", ["+z", "-z"])
def test_developed_flow_is_that_of_hagen_and_poiseuille(direction):
    """m = rho pi D^4 drop / (128 mu L), exact for a developed inlet."""
    result = solve(tube(flow='pressure_drop = "50 Pa"', profile="developed", direction=direction, length="0.5 m"))
    flow, bar = found(result)
    exact = 1000.0 * math.pi * 0.01**4 * 50.0 / (128.0 * 0.01 * 0.5)
    assert result.converged
    assert abs(flow - exact) <= bar < 1e-3 * exact
    assert result["stream.oil.pressure_drop_Pa"] == pytest.approx(50.0, rel=1e-6)


def test_it_is_the_flow_that_has_this_drop():
    given = solve(tube(flow="reynolds = 200"))
    drop = given["stream.oil.pressure_drop_Pa"]
    bar_of_drop = given.summary["numerical_uncertainty"]["stream"]["oil"]["pressure_drop_Pa"]
    result = solve(given.case.replace({"stream.oil.pressure_drop": drop}))
    flow, bar = found(result)
    # the drop grows at least in proportion to the flow
    assert abs(flow / given["stream.oil.mass_flow_kg_s"] - 1.0) <= bar / flow + bar_of_drop / drop
    assert result["stream.oil.reynolds"] == pytest.approx(200.0, rel=1e-3)
    assert result.case.stream["oil"].mass_flow is None  # the case stays as it was given


def test_every_nested_mesh_has_the_drop_and_a_flow_of_its_own():
    result = solve(tube(flow='pressure_drop = "20 Pa"', outside='heat = "20 W"'))
    trees = [nested.tree["stream"]["oil"] for nested in result.nested]
    assert [tree["pressure_drop_Pa"] for tree in trees] == pytest.approx([20.0] * 4, rel=2e-7)
    steps = np.diff([tree["mass_flow_kg_s"] for tree in trees])
    assert (np.abs(steps[1:]) < np.abs(steps[:-1])).all() and steps.all()


def test_hot_walls_let_more_through():
    """Where the viscosity falls by exp(-2) to a wall the flow is between those of the cold and the hot oil, and more
    comes through than where nothing is heated."""
    thinning = '{ at = "20 degC", value = "50 mPa s", exponent = "0.05 1/K" }'
    cold, hot = (
        solve(tube(flow='pressure_drop = "100 Pa"', viscosity=thinning, outside=outside, length="1 m"))
        for outside in ("insulated = true", 'film_coefficient = "2000 W/m^2/K", ambient = "60 degC"')
    )
    assert hot.converged and cold.converged
    ratio = hot["stream.oil.mass_flow_kg_s"] / cold["stream.oil.mass_flow_kg_s"]
    assert 1.05 < ratio < math.exp(2.0)
    assert hot["stream.oil.pressure_drop_Pa"] == pytest.approx(100.0, rel=1e-5)


# A line so thinly cooled that the temperature is even across it
COOLED = {
    "viscosity": '{ at = "20 degC", value = "50 mPa s", exponent = "0.07 1/K" }',
    "conductivity": '"20 W/m/K"',
    "outside": 'film_coefficient = "20 W/m^2/K", ambient = "-40 degC"',
    "length": "10 m",
    "profile": "developed",
    "axial": 96,
    "mesh": "stretch_to_ends = 1",
}


def drop_of_cooled_line(flow: float) -> float:
    """Drop [Pa] of `COOLED` by the one-dimensional law of a temperature that is even across the tube.

    Independent computation, not published: T falls as exp(-h pi D z / (m cp)), each length has the drop of Hagen and
    Poiseuille at its viscosity.
    """
    z = (np.arange(2000) + 0.5) / 2000 * 10.0
    cooling = 1.0 - np.exp(-20.0 * math.pi * 0.01 * z / (flow * 2000.0))
    viscosity = 0.05 * np.exp(0.07 * 60.0 * cooling)
    return 128.0 * flow / (math.pi * 0.01**4 * 1000.0) * 10.0 * float(viscosity.mean())


def test_a_cooled_line_may_have_several_flows():
    with pytest.raises(RefusedModel, match=r"Several flows of oil have a pressure drop of 0\.4 bar") as caught:
        solve(tube(flow='pressure_drop = "0.4 bar"', **COOLED))
    scan = np.geomspace(1e-4, 0.1, 60)
    excess = [drop_of_cooled_line(flow) - 4e4 for flow in scan]
    roots = [
        brentq(lambda flow: drop_of_cooled_line(flow) - 4e4, a, b)
        for a, b, fa, fb in zip(scan, scan[1:], excess, excess[1:], strict=False) if fa * fb < 0
    ]  # fmt: skip
    assert len(roots) == 3
    said = str(caught.value).split("about ")[1].split(". The slower")[0]
    flows = [float(word.split()[0]) / 1000.0 for word in said.replace(" and ", ", ").split(", ")]
    assert flows == pytest.approx(roots, rel=0.05)
    assert "axicfd find" in str(caught.value)


def test_and_outside_that_range_it_has_one():
    result = solve(tube(flow='pressure_drop = "0.15 bar"', **COOLED))
    assert result.converged
    assert drop_of_cooled_line(result["stream.oil.mass_flow_kg_s"]) == pytest.approx(1.5e4, rel=0.05)


def test_a_drop_beyond_laminar_flow_is_refused():
    with pytest.raises(RefusedModel, match="at Reynolds 4000, up to which is computed here, it is about"):
        solve(tube(flow='pressure_drop = "1 bar"'))


def test_flows_without_a_drop_in_between_are_no_answer(monkeypatch):
    known = given_drop.GivenDrop._miss

    def gap(self, solution):
        miss = known(self, solution)
        return miss if abs(miss) > 0.02 else math.nan

    monkeypatch.setattr(given_drop.GivenDrop, "_miss", gap)
    with pytest.raises(RefusedModel, match="No flow of oil was found"):
        solve(tube(flow='pressure_drop = "0.15 bar"', **COOLED))


def test_it_costs_few_solves(monkeypatch):
    """Work is cells times iterations; a flow that is given costs one solve on each mesh."""
    work = []

    def counted(*arguments):
        solution = solve_on(*arguments)
        work.append(solution.grid.cells * solution.iterations)
        return solution

    given = solve(tube(flow="reynolds = 200"))
    plain = sum(cells * iterations for _, cells, iterations, _ in given.history)
    monkeypatch.setattr(given_drop, "solve_on", counted)
    result = solve(given.case.replace({"stream.oil.pressure_drop": given["stream.oil.pressure_drop_Pa"]}))
    assert result.converged
    assert sum(work) < 4.0 * plain


def test_the_hand_estimate_has_a_flow_too():
    hand = by_hand(tube(flow='pressure_drop = "50 Pa"', profile="developed", length="0.5 m"))
    assert hand["stream.oil.pressure_drop"] == pytest.approx(50.0)
    flat = by_hand(tube(flow='pressure_drop = "50 Pa"', length="0.5 m"))
    assert flat["stream.oil.pressure_drop"] == pytest.approx(50.0)


@pytest.mark.parametrize(
    "flow, words",
    [
        ('pressure_drop = "0 Pa"', 'write mass_flow = "0 g/s"'),
        ('pressure_drop = "-5 Pa"', "greater than 0 Pa"),
        ("pressure_drop = 5", 'Write "5 Pa"'),
        ('pressure_drop = "5 Pa"\nreynolds = 5', "stands beside"),
    ],
)
def test_bad_drops_are_refused(flow, words):
    with pytest.raises(InputError, match=words):
        tube(flow=flow)


def test_a_stream_that_a_given_heat_cools_may_have_two_flows():
    """A fixed heat cools it the further the slower it flows, without a limit: the drop falls with the flow, then rises.

    Energy balance: 120 W from 2 g/s of 2000 J/(kg K) are 30 K, over which the viscosity grows by exp(2.1).
    """
    cooled = {"viscosity": COOLED["viscosity"], "outside": 'heat = "-120 W"', "profile": "developed", "length": "2 m"}
    drop = solve(tube(flow='mass_flow = "2 g/s"', **cooled))["stream.oil.pressure_drop_Pa"]
    with pytest.raises(RefusedModel, match=r"Several flows of oil .* about 2(\.\d+)? g/s and \d"):
        solve(tube(flow=f'pressure_drop = "{drop} Pa"', **cooled))


def test_coarsest_meshes_do_not_decide_what_is_out_of_reach():
    """On a mesh of one cell across a drop comes out six times too small; here that is the coarsest one."""
    given = solve(tube(flow="reynolds = 1000", length="0.05 m"))
    result = solve(given.case.replace({"stream.oil.pressure_drop": given["stream.oil.pressure_drop_Pa"]}))
    assert result["stream.oil.reynolds"] == pytest.approx(1000.0, rel=0.01)
