"""A case's own quantities: sums and differences of results, with mesh errors of their own."""

import pytest

import axicfd
from axicfd.case.quantities import quantity, terms_of
from axicfd.results import axial, summary
from tests import shipped
from tests.results.made_up import made_up

OUTLET, INLET = "stream.water.outlet_temperature", "stream.water.inlet_temperature"
NAMED = f"""
[quantity.warming]
plus = ["{OUTLET}"]
minus = ["{INLET}"]
[quantity.mean]
plus = ["quantity.half", "{INLET}"]
[quantity.half]
plus = ["quantity.warming", "quantity.warming"]
minus = ["quantity.warming"]
[quantity.heats]
plus = ["section.lead-in.heat_in", "section.heater.heat_in"]
[quantity.numbers]
plus = ["stream.water.reynolds"]
minus = ["stream.water.prandtl"]
[mesh]
"""


def tree_of(*changes):
    found = made_up(("[mesh]\n", NAMED), *changes)
    views = axial.stream_views(found.case, found.solution)
    return found.case, summary.summary(found.case, found.layout, found.solution, views)


def test_they_are_formed_from_the_values_of_the_same_tree():
    case, tree = tree_of()
    stream = tree["stream"]["water"]
    warming = stream["outlet_temperature_K"] - stream["inlet_temperature_K"]
    own = tree["quantity"]
    assert own["warming"] == {"value_K": pytest.approx(warming), "kind": "temperature_difference"}
    assert own["mean"] == {"value_K": pytest.approx(stream["outlet_temperature_K"]), "kind": "temperature"}
    assert own["heats"]["value_W"] == pytest.approx(sum(s["heat_in_W"] for s in tree["section"].values()))
    assert own["numbers"]["value"] == pytest.approx(stream["reynolds"] - stream["prandtl"])
    assert quantity(case, "quantity.warming").of(tree) == own["warming"]["value_K"]


def test_without_a_term_there_is_none():
    """The made-up inlet is developed, so there is no entry length."""
    length = "stream.water.hydrodynamic_entry_length"
    _, tree = tree_of(("[mesh]\n", f'[quantity.entry]\nplus = ["{length}"]\n[mesh]\n'))
    assert tree["quantity"]["entry"] == {
        "value_m": None, "kind": "length", "why": {"value_m": f"{length} has no value"},
    }  # fmt: skip


def test_terms_are_counted():
    case, _ = tree_of()
    assert {q.path: n for q, n in terms_of(case, quantity(case, "quantity.half")).items()} == {OUTLET: 1, INLET: -1}


@pytest.fixture(scope="module")
def sensor():
    """The flow sensor with the heat through its outside as a second quantity, on a mesh of a sixth of its own cells."""
    heats = [f"section.{name}.heat_in" for name in ("upstream", "heater", "downstream")]
    mesh = {"mesh.radial": 32, "mesh.axial": 256}
    own = {"signal": {"plus": ["sensor.behind"], "minus": ["sensor.before"]}, "heats": {"plus": heats}}
    limits = {"quantity.signal": {"above": 3.0}}
    return axicfd.solve(shipped.case("flow-sensor").replace(mesh | {"quantity": own, "limits": limits}))


def test_each_nested_mesh_forms_its_own(sensor):
    for nested in sensor.nested:
        before, behind = (nested.tree["sensor"][name]["temperature_K"] for name in ("before", "behind"))
        assert nested.tree["quantity"]["signal"]["value_K"] == pytest.approx(behind - before, abs=1e-9)
    assert sensor.summary["finest_mesh"]["quantity"] == sensor.nested[-1].tree["quantity"]


def test_a_combination_is_known_no_worse_than_its_terms_tell(sensor):
    bars, rules = (sensor.summary["numerical_uncertainty"][k] for k in ("quantity", "rule"))
    each = [sensor.summary["numerical_uncertainty"]["sensor"][name]["temperature_K"] for name in ("before", "behind")]
    assert 0.0 < bars["signal"]["value_K"] <= sum(each)
    # here its own sequence says less: its changes do not quite have the ratio of second order, those of its terms do
    assert rules["quantity"]["signal"]["value_K"] == "sum of terms"


def test_extrapolation_keeps_sums(sensor):
    """Values are extrapolated with the same weights, so that a sum of extrapolated values is that of the sum."""
    rules = sensor.summary["numerical_uncertainty"]["rule"]
    parts = [rules["sensor"][name]["temperature_K"] for name in ("before", "behind")]
    assert {rule.partition(",")[0] for rule in parts} == {"extrapolated"}
    assert sensor["quantity.signal"] == pytest.approx(sensor["sensor.behind"] - sensor["sensor.before"], abs=1e-9)


def test_its_limit_is_held_against_its_own_bar(sensor):
    entry = sensor.summary["limits"]["quantity.signal"]
    assert entry["verdict"] == "pass" and entry["margin_K"] == pytest.approx(sensor["quantity.signal"] - 3.0)
    assert entry["half_width_K"] == sensor.summary["numerical_uncertainty"]["quantity"]["signal"]["value_K"]


def test_accuracy_can_be_asked_for_it(sensor):
    """The mesh is refined for the difference alone."""
    case = sensor.case.replace(
        {"mesh.radial": None, "mesh.axial": None, "mesh.at_most": 20000, "solve.accuracy": {"quantity.signal": 2e-3}}
    )
    found = axicfd.solve(case).summary["accuracy"]
    assert found["reached"] and list(found["quantity"]) == ["quantity.signal.value_K"]
    assert found["quantity"]["quantity.signal.value_K"]["allowed"] == 2e-3
