"""Each caution on either side of its limit: small solves, their fields changed where a limit must be met.

The numbers expected here follow from the limits themselves and from closed forms named beside them.
"""

from __future__ import annotations

import math
from dataclasses import replace
from functools import cache

import numpy as np
import pytest

from axicfd.case.layout import layout
from axicfd.case.read import load
from axicfd.errors import RefusedModel
from axicfd.mesh.build import family
from axicfd.results import axial, cautions, summary
from axicfd.solver.solve import solve_on

# Constant properties of no real fluid: Pr = 10, Re = 4 m / (pi D mu) = 100 at 0.3142 g/s, rho = 1000.
TUBE = """
[stream.liquid]
fluid = "liquid"
inlet_temperature = "20 degC"
reynolds = 100
inlet_profile = "developed"

[fluid.liquid]
density = "1000 kg/m^3"
specific_heat = "4000 J/kg/K"
conductivity = "0.4 W/m/K"
viscosity = "1 mPa s"

[solid.metal]
conductivity = "20 W/m/K"

[[layer]]
stream = "liquid"
diameter = "4 mm"

[[layer]]
name = "tube"
solid = "metal"
thickness = "0.5 mm"

[[section]]
name = "lead-in"
length = "40 mm"
outside = { insulated = true }

[[section]]
name = "heater"
length = "60 mm"
outside = { heat = "10 W" }

[[section]]
name = "lead-out"
length = "60 mm"
outside = { insulated = true }

[mesh]
radial = 8
axial = 40
"""


def changed(*changes: tuple[str, str], text: str = TUBE) -> str:
    for old, new in changes:
        assert text.count(old) == 1, f"{old!r} stands {text.count(old)} times"
        text = text.replace(old, new)
    return text


@cache
def solved(text: str = TUBE):
    """(case, layout, summary, axial, solution) of a text, on its own coarse mesh."""
    case = load(text)
    tube = layout(case)
    solution = solve_on(case, family(case, tube).grid())
    views = axial.stream_views(case, solution)
    tree = {"converged": solution.converged} | summary.summary(case, tube, solution, views)
    return case, tube, tree, {name: view.curves for name, view in views.items()}, solution


def after(text: str = TUBE):
    return cautions.after(*solved(text))


def coded(found, code: str):
    return [caution for caution in found if caution["code"] == code]


def only(found, code: str):
    (caution,) = coded(found, code)
    return caution


def with_temperatures(solved_case, change):
    """The same, with a function of the cell temperatures applied (faces follow those of their inner cell)."""
    case, tube, tree, curves, solution = solved_case
    t = change(solution.heat.t.copy(), solution.grid)
    heat = replace(
        solution.heat,
        t=t,
        minus=np.column_stack([np.zeros(len(t)), t]),
        plus=np.column_stack([t, np.zeros(len(t))]),
    )
    return case, tube, tree, curves, replace(solution, heat=heat)


# ----- what every caution says


@pytest.mark.parametrize(
    "found",
    [
        lambda: after(),
        lambda: after(changed(('length = "40 mm"', 'length = "0.5 mm"'))),
        lambda: cautions.before(load(changed(("reynolds = 100", "reynolds = 2500")))),
    ],
)
def test_a_caution_is_whole(found):
    listed = found()
    assert listed
    for caution in listed:
        assert set(caution) == {"code", "found", "limit", "place", "source", "text", "checked", "weight", "accepted"}
        assert caution["place"] and caution["source"] and caution["text"].endswith(".")
        assert caution["found"] is None or math.isfinite(caution["found"])
        assert "nan" not in caution["text"] and "inf" not in caution["text"]
    weights = [caution["weight"] for caution in listed]
    assert weights == sorted(weights, reverse=True)


def test_a_good_tube_has_only_what_cannot_be_checked():
    assert all(not caution["checked"] for caution in after())
    assert all(not caution["checked"] for caution in cautions.before(load(TUBE)))
    case, tube, _, _, solution = solved()
    assert cautions.refusal(case, tube, solution) is None


def test_the_standing_notice_names_licensed_practice_and_stopped_flow():
    assert "licensed practice" in cautions.SAFETY and "flow stopped" in cautions.SAFETY


# ----- convergence and balance


def test_not_converged():
    case, tube, tree, curves, solution = solved()
    stopped = replace(solution, stop_reason="iteration limit", residual=0.01)
    found = cautions.after(case, tube, tree | {"converged": False}, curves, stopped)
    assert found[0]["code"] == "not-converged" and found[0]["found"] == 0.01
    assert not coded(after(), "not-converged")


@pytest.mark.parametrize(
    "mass, energy, count", [(0.9e-10, 0.9e-8, 0), (1.1e-10, 0.9e-8, 1), (0.9e-10, 1.1e-8, 1), (None, 1e-3, 1)]
)
def test_balance(mass, energy, count):
    case, tube, tree, curves, solution = solved()
    tree = tree | {"balance": {"mass": mass, "energy": energy}}
    assert len(coded(cautions.after(case, tube, tree, curves, solution), "balance")) == count


def test_a_balance_that_is_no_number_was_not_checked():
    case, tube, tree, curves, solution = solved()
    found = cautions.after(case, tube, tree | {"balance": {"mass": math.nan, "energy": 0.0}}, curves, solution)
    assert not only(found, "balance")["checked"]


@pytest.mark.parametrize("reached, count", [(True, 0), (False, 1)])
def test_an_accuracy_that_is_not_reached(reached, count):
    case, tube, tree, curves, solution = solved()
    path = "stream.liquid.pressure_drop_Pa"
    asked = {"reached": reached, "text": "Not reached.", "worst": path}
    asked["quantity"] = {path: {"half_width": 3.0, "allowed": 1.5}}
    found = coded(cautions.after(case, tube, tree | {"accuracy": asked}, curves, solution), "mesh-error")
    assert len(found) == count
    assert all((c["found"], c["limit"], c["weight"]) == (3.0, 1.5, 2.0) for c in found)


# ----- Reynolds


@pytest.mark.parametrize("reynolds, count", [(1990, 0), (2010, 1), (3990, 1)])
def test_reynolds_at_the_inlet(reynolds, count):
    text = changed(("reynolds = 100", f"reynolds = {reynolds}"))
    assert len(coded(cautions.before(load(text)), "reynolds")) == count


def test_reynolds_above_4000_is_refused_before_a_solve():
    with pytest.raises(RefusedModel, match="4010"):
        cautions.before(load(changed(("reynolds = 100", "reynolds = 4010"))))


THINNING = '{ at = "20 degC", value = "1 mPa s", exponent = "0.1 1/K" }'


def test_reynolds_at_the_hot_end_is_foreseen():
    # 10 W / (m cp), m = Re pi D mu / 4 = 100 * 3.1416e-6 = 3.14e-4 kg/s: 7.96 K, a factor exp(0.796) = 2.22
    text = changed(('viscosity = "1 mPa s"', f"viscosity = {THINNING}"), ('heat = "10 W"', 'heat = "100 W"'))
    text = changed(("reynolds = 100", "reynolds = 1000"), text=text)
    found = only(cautions.before(load(text)), "reynolds")
    assert found["found"] == pytest.approx(1000 * math.exp(0.1 * 100 / (math.pi * 1e-3 * 4000)), rel=1e-9)


def test_reynolds_along_the_tube():
    case, tube, tree, curves, solution = solved()
    for largest, count in ((1990.0, 0), (2010.0, 1)):
        stream = tree["stream"]["liquid"] | {"largest_reynolds": largest}
        found = cautions.after(case, tube, tree | {"stream": {"liquid": stream}}, curves, solution)
        assert len(coded(found, "reynolds")) == count


def test_a_reynolds_number_above_4000_runs_where_it_is_accepted():
    """The caution stays, with the reason."""
    accepted = changed(("reynolds = 100", "reynolds = 5000")) + '[accept]\nreynolds = "a smooth entry"\n'
    found = only(cautions.before(load(accepted)), "reynolds")
    assert found["found"] == pytest.approx(5000) and found["accepted"] == "a smooth entry"
    thin = load(accepted).replace({"stream.liquid.reynolds": 100.0, "fluid.liquid.viscosity": "0.01 mPa s"})
    _, tube, _, _, solution = solved()
    assert cautions.refusal(thin, tube, solution) is None
    refused = cautions.refusal(thin.replace({"accept": None}), tube, solution)
    assert "Reynolds" in refused and "[accept]" in refused


def test_what_is_accepted_does_not_stand():
    found = after(TUBE + '[accept]\nfree-convection = "seen"\ncopper-kind = "not there"\n')
    assert only(found, "free-convection")["accepted"] == "seen"
    assert {c["code"] for c in found} - {c["code"] for c in cautions.standing(found)} == {"free-convection"}


def test_reynolds_above_4000_at_the_hot_end_is_refused_after_it():
    case, tube, _, _, solution = solved()
    for exponent, refused in ((0.4, False), (0.5, True)):
        # bulk rise 7.96 K: 100 exp(7.96 exponent) = 2400 or 5350
        thin = case.replace({"fluid.liquid.viscosity": {"at": 293.15, "value": 1e-3, "exponent": exponent}})
        sentence = cautions.refusal(thin, tube, solution)
        assert (sentence is not None and "Reynolds" in sentence) == refused


# ----- property range


def limited(high: str, policy: str) -> str:
    table = f'{{ temperature = ["10 degC", "{high}"], value = ["0.4 W/m/K", "0.401 W/m/K"] }}'
    return changed(
        ('conductivity = "0.4 W/m/K"', f'conductivity = {table}\noutside_range = "{policy}"'),
    )


def hottest_fluid() -> float:
    """degC, the wetted wall of the plain case."""
    case, tube, _, _, solution = solved()
    piece = next(p for p in solution.grid.pieces if p.section == 1 and p.layer.kind == "stream")
    return 20.0 + float(solution.heat.minus[piece.i0 : piece.i1, piece.j1].max())


@pytest.mark.parametrize("policy", ["refuse", "hold", "extend"])
@pytest.mark.parametrize("below, count", [(-0.5, 1), (0.5, 0)])
def test_property_range(policy, below, count):
    high = f"{hottest_fluid() + below:.6f} degC"
    case, tube, tree, curves, solution = solved(limited(high, policy))
    found = coded(cautions.after(case, tube, tree, curves, solution), "property-range")
    assert len(found) == count
    sentence = cautions.refusal(case, tube, solution)
    assert (sentence is not None) == (policy == "refuse" and count == 1)
    if count:
        assert found[0]["found"] == pytest.approx(hottest_fluid() + 273.15, abs=0.1)
        assert found[0]["limit"] == pytest.approx(hottest_fluid() + below + 273.15, abs=1e-5)
    if sentence:
        for part in ("Conductivity of liquid", "10 degC", "mm"):
            assert part in sentence


def test_laws_that_are_left_stand_in_a_list():
    left = cautions.LeftRange("water", ("specific heat", "conductivity", "viscosity"), 389.0, 372.0, 273.0, 372.0,
                              "sample", 0.1, "refuse")  # fmt: skip
    assert left.sentence(load(changed())).startswith("Specific heat, conductivity and viscosity of water are known")


def test_a_range_left_by_less_than_the_tolerance_is_no_matter():
    # 1e-4 of the span, about 20 K: 2 mK
    assert not coded(after(limited(f"{hottest_fluid() - 0.0005:.6f} degC", "refuse")), "property-range")


def test_no_refusal_of_a_field_that_did_not_converge():
    case, tube, _, _, solution = solved(limited(f"{hottest_fluid() - 0.5:.6f} degC", "refuse"))
    assert cautions.refusal(case, tube, replace(solution, stop_reason="iteration limit")) is None


def test_a_solid_leaves_its_range_on_the_cold_side():
    table = '{ temperature = ["0 degC", "500 degC"], value = ["20 W/m/K", "21 W/m/K"] }'
    text = changed(('conductivity = "20 W/m/K"', f"conductivity = {table}"), ('heat = "10 W"', 'heat = "-40 W"'))
    case, tube, _, _, solution = solved(text)
    sentence = cautions.refusal(case, tube, solution)
    assert sentence is not None and "tube is colder" in sentence


def test_property_range_is_foreseen():
    film = 'outside = { film_coefficient = "500 W/m^2/K", ambient = "80 degC" }'
    text = changed(('outside = { heat = "10 W" }', film), text=limited("70 degC", "refuse"))
    assert only(cautions.before(load(text)), "property-range")["limit"] == pytest.approx(343.15)
    text = changed(('outside = { heat = "10 W" }', film), text=limited("90 degC", "refuse"))
    assert not coded(cautions.before(load(text)), "property-range")


# ----- gas

GAS_DENSITY = '{ temperature = ["250 K", "400 K"], value = ["1.4 kg/m^3", "0.875 kg/m^3"] }'
GAS = changed(
    ('density = "1000 kg/m^3"', f"density = {GAS_DENSITY}"),
    ('specific_heat = "4000 J/kg/K"', 'specific_heat = "1000 J/kg/K"'),
    ('conductivity = "0.4 W/m/K"', 'conductivity = "0.025 W/m/K"'),
    ('viscosity = "1 mPa s"', 'viscosity = "0.018 mPa s"'),
    ('heat = "10 W"', 'heat = "5 mW"'),
)


@pytest.mark.parametrize("rise, caution, refused", [(1.5, 0, False), (4.5, 1, False), (18.0, 1, True)])
def test_gas_density(rise, caution, refused):
    # the table is a straight line, 3.5e-3 kg/m3 per K; at 20 degC 1.249 kg/m3: 0.28 % per K
    case, tube, tree, curves, solution = with_temperatures(
        solved(GAS), lambda t, grid: t * rise / t[:, : grid.streams["liquid"][1]].max()
    )
    found = coded(cautions.after(case, tube, tree, curves, solution), "gas-density")
    assert len(found) == caution
    if found:
        assert found[0]["found"] == pytest.approx(0.0035 * rise / 1.249, rel=0.02)
    sentence = cautions.refusal(case, tube, solution)
    assert (sentence is not None and "density" in sentence) == refused


def test_a_gas_of_constant_density_is_cautioned_but_not_refused():
    text = changed((f"density = {GAS_DENSITY}", 'density = "1.2 kg/m^3"'), text=GAS)
    case, tube, tree, curves, solution = with_temperatures(
        solved(text), lambda t, grid: t * 30.0 / t[:, : grid.streams["liquid"][1]].max()
    )
    # an ideal gas at 293.15 K that is heated by 30 K: 293.15 / 323.15 - 1 = -9.3 %
    found = only(cautions.after(case, tube, tree, curves, solution), "gas-density")
    assert found["found"] == pytest.approx(0.0928, abs=5e-4)
    assert cautions.refusal(case, tube, solution) is None


def test_gas_density_is_foreseen():
    # m cp = 100 * pi * 0.004 * 1.8e-5 / 4 * 1000 = 5.65e-3 W/K: 5 mW give 0.88 K, 40 mW 7.07 K
    assert not coded(cautions.before(load(GAS)), "gas-density")
    text = changed(('heat = "5 mW"', 'heat = "40 mW"'), text=GAS)
    assert only(cautions.before(load(text)), "gas-density")["found"] == pytest.approx(0.0035 * 7.07 / 1.249, rel=0.02)


# ----- ends


def test_the_reach_of_a_wall_has_its_two_limits():
    case = load(TUBE)
    ahead = cautions.Ahead(case, layout(case))
    section = ahead.layout.sections[0]
    # k A of the tube 20 * pi/4 (5^2 - 4^2) mm2 and of the liquid 0.4 * pi/4 * 4^2 mm2; h P = 48/11 pi k
    carried = 20 * math.pi / 4 * 9e-6 + 0.4 * math.pi / 4 * 16e-6
    exchange = 48 / 11 * math.pi * 0.4
    fast = cautions.Ahead(case.replace({"stream.liquid.reynolds": 1e7}), layout(case))
    assert fast.reach_upstream(section) == pytest.approx(math.sqrt(carried / exchange), rel=1e-4)
    slow = cautions.Ahead(case.replace({"stream.liquid.reynolds": 1e-2}), layout(case))
    assert slow.reach_upstream(section) == pytest.approx(carried / slow.capacity_flow, rel=1e-2)
    # between them: the root of k A g^2 + (h P k A / C) g - h P = 0
    b, c = exchange * carried / ahead.capacity_flow, exchange
    root = (-b + math.sqrt(b * b + 4 * carried * c)) / (2 * carried)
    assert ahead.reach_upstream(section) == pytest.approx(1 / root, rel=1e-9)
    still = case.replace({"stream.liquid.reynolds": 0.0, "ends.first": {"temperature": 293.15}})
    assert math.isinf(cautions.Ahead(still, layout(still)).reach_upstream(section))


def test_a_short_lead_in_is_foreseen_and_found():
    text = changed(('length = "40 mm"', 'length = "2 mm"'))
    foreseen = only(cautions.before(load(text)), "warm-end")
    assert foreseen["found"] == pytest.approx(0.002) and foreseen["limit"] > 0.002
    found = only(after(text), "warm-end")
    assert found["place"] == "first end" and found["found"] > 0.01
    assert "Lengthen this end by" in found["text"]
    assert not coded(after(), "warm-end") and not coded(cautions.before(load(TUBE)), "warm-end")


@pytest.mark.parametrize("warm, count", [(0.009, 0), (0.011, 1), (-0.011, 1)])
def test_the_wall_at_the_inlet_end_against_one_per_cent_of_the_span(warm, count):
    def warmed(t, grid):
        t[0, grid.streams["liquid"][1] :] = warm * np.abs(t).max()
        return t

    found = coded(cautions.after(*with_temperatures(solved(), warmed)), "warm-end")
    assert len(found) == count
    if count:
        assert ("colder" in found[0]["text"]) == (warm < 0)


def test_a_condition_at_the_end_says_where_the_heat_goes():
    ends = '[ends]\nfirst = { temperature = "20 degC", contact_resistance = "1e-4 m^2 K/W" }\n\n[mesh]'
    text = changed(('length = "40 mm"', 'length = "2 mm"'), ("[mesh]", ends))
    assert not coded(after(text), "warm-end") and not coded(cautions.before(load(text)), "warm-end")


def test_a_wall_that_conducts_nothing_along_has_no_warm_end():
    text = changed(
        ('conductivity = "20 W/m/K"', 'conductivity = { r = "20 W/m/K", z = "0 W/m/K" }'),
        ('length = "40 mm"', 'length = "2 mm"'),
    )
    assert not coded(after(text), "warm-end")


def test_the_inlet_of_a_stream_against_z_is_at_the_last_end():
    text = changed(
        ("reynolds = 100", 'reynolds = 100\ndirection = "-z"'),
        (
            '[[section]]\nname = "lead-out"\nlength = "60 mm"',
            '[[section]]\nname = "lead-out"\nlength = "2 mm"',
        ),
    )
    assert only(after(text), "warm-end")["place"] == "last end"
    assert only(cautions.before(load(text)), "warm-end")["found"] == pytest.approx(0.002)


LEAD_OUT = '[[section]]\nname = "lead-out"\nlength = "60 mm"\noutside = { insulated = true }\n'


def test_a_wall_heated_right_up_to_the_outlet():
    copper = ('conductivity = "20 W/m/K"', 'conductivity = "400 W/m/K"')
    ended = after(changed((LEAD_OUT, ""), copper, ('length = "40 mm"', 'length = "160 mm"')))
    found = only(ended, "warm-end")
    # heat per length times the fin length: sqrt(400 pi/4 9e-6 / (48/11 pi 0.4)) = 22.7 mm of 60 mm
    assert found["place"] == "last end" and found["found"] == pytest.approx(22.7 / 60, rel=0.05)
    whole = changed(copper, ('length = "40 mm"', 'length = "160 mm"'), (LEAD_OUT, LEAD_OUT.replace("60 mm", "160 mm")))
    assert not coded(after(whole), "warm-end")


# ----- outlet


@pytest.mark.parametrize("change, count", [(0.009, 0), (0.011, 1)])
def test_a_velocity_that_still_changes_at_the_outlet(change, count):
    case, tube, tree, curves, solution = solved()
    columns = dict(curves["liquid"])
    z = columns["z_m"]
    columns["peak_velocity_m_s"] = 1.0 + change * (z - z[-1]) / tube.bore_diameter
    found = coded(cautions.after(case, tube, tree, {"liquid": columns}, solution), "outlet-not-developed")
    assert len(found) == count
    if count:
        assert found[0]["found"] == pytest.approx(change, rel=1e-6)


@pytest.mark.parametrize("share, count", [(0.009, 0), (0.011, 1)])
def test_heat_conducted_along_the_stream_at_the_outlet(share, count):
    case, tube, tree, curves, solution = solved()
    columns = dict(curves["liquid"])
    columns["axial_conduction_W"] = np.full(len(columns["z_m"]), -share * 10.0)  # of the heater's 10 W
    found = coded(cautions.after(case, tube, tree, {"liquid": columns}, solution), "outlet-not-developed")
    assert len(found) == count


def test_a_slow_stream_heated_to_the_outlet_conducts_through_it():
    slow = changed(("reynolds = 100", "reynolds = 0.2"), (LEAD_OUT, ""), ('heat = "10 W"', 'heat = "0.05 W"'))
    assert coded(after(slow), "outlet-not-developed")


def test_reverse_flow_at_the_outlet():
    case, tube, tree, curves, solution = solved()
    assert not coded(after(), "reverse-flow")
    fields = solution.streams["liquid"]
    mz = fields.mz.copy()
    mz[-1, -1] = -0.02 * mz[-1].sum()
    turned = replace(solution, streams={"liquid": replace(fields, mz=mz)})
    assert only(cautions.after(case, tube, tree, curves, turned), "reverse-flow")["found"] == pytest.approx(0.02)


# ----- small Péclet, free convection, phase change, copper


@pytest.mark.parametrize("reynolds, count", [(0.11, 0), (0.09, 1)])
def test_small_peclet(reynolds, count):
    # Pr = 1e-3 * 4000 / 0.4 = 10
    text = changed(("reynolds = 100", f"reynolds = {reynolds}"))
    assert len(coded(cautions.before(load(text)), "peclet")) == count


def test_no_peclet_number_where_nothing_flows():
    cooled = 'outside = { film_coefficient = "10 W/m^2/K", ambient = "20 degC" }'
    text = changed(
        ("reynolds = 100", "reynolds = 0"),
        ('heat = "10 W"', 'heat = "0.01 W"'),
        (LEAD_OUT, LEAD_OUT.replace("outside = { insulated = true }", cooled)),
    )
    assert not coded(after(text), "peclet")
    assert {caution["place"] for caution in coded(after(text), "warm-end")} == {"first end", "last end"}


EXPANDING = (
    'density = "1000 kg/m^3"',
    'density = { temperature = ["0 degC", "100 degC"], value = ["1010 kg/m^3", "970 kg/m^3"] }',
)


def test_free_convection_is_named_as_not_checked():
    for found in (after(), cautions.before(load(TUBE))):
        caution = only(found, "free-convection")
        assert not caution["checked"] and caution["found"] is None
    caution = only(after(changed(EXPANDING)), "free-convection")
    assert not caution["checked"] and caution["found"] > 1e4
    idle = changed(('outside = { heat = "10 W" }', "outside = { insulated = true }"))
    assert not coded(after(idle), "free-convection") and not coded(cautions.before(load(idle)), "free-convection")


def test_free_convection_in_a_bore_too_small_for_it():
    text = changed(EXPANDING, ('diameter = "4 mm"', 'diameter = "0.1 mm"'), ('heat = "10 W"', 'heat = "0.1 W"'))
    assert not coded(cautions.before(load(text)), "free-convection")


@pytest.mark.parametrize(
    "axis, direction, words",
    [("up", "+z", "speeds up"), ("up", "-z", "slows down"), ("down", "+z", "slows down")],
)
def test_free_convection_in_a_vertical_tube(axis, direction, words):
    text = f'z_axis = "{axis}"\n' + changed(("reynolds = 100", f'reynolds = 100\ndirection = "{direction}"'))
    assert words in only(cautions.before(load(text)), "free-convection")["text"]


def test_boiling_and_freezing_are_named_as_not_checked():
    assert "boiling" in only(after(), "phase-change")["text"]
    freezing = only(after(changed(('heat = "10 W"', 'heat = "-10 W"'))), "phase-change")["text"]
    assert "freezing" in freezing and "pressure" not in freezing
    assert not coded(after(changed(('heat = "10 W"', 'heat = "0.01 W"'))), "phase-change")


def test_which_copper():
    for material, count in (("copper", 1), ("deoxidised copper", 0)):
        found = cautions.before(load(changed(('solid = "metal"', f'solid = "{material}"'))))
        assert len(coded(found, "copper-kind")) == count
