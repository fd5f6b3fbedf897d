"""Mesh errors of sequences whose limit is known, and of trees and curves made of them."""

import csv
import math
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest

from axicfd.results import uncertainty
from axicfd.results.uncertainty import (
    Floor,
    LeastWidths,
    curve_half_widths,
    estimate,
    estimate_tree,
    estimates,
    grid_convergence_index,
    split,
)

EXAMPLES = Path(__file__).parents[2] / "validation" / "reference" / "gci_worked_examples.csv"


def examples() -> list[dict[str, float]]:
    lines = EXAMPLES.read_text(encoding="utf-8").splitlines()
    rows = csv.DictReader(line for line in lines if not line.startswith("#"))
    return [{key: float(value) for key, value in row.items()} for row in rows]


@pytest.mark.parametrize("row", examples(), ids=lambda row: f"{row['phi1']:g}")
def test_worked_examples_with_unequal_refinement(row):
    """Celik et al. 2008, J. Fluids Eng. 130, 078001; h = N^(-1/2) of N cells."""
    ratios = math.sqrt(row["cells1"] / row["cells2"]), math.sqrt(row["cells2"] / row["cells3"])
    assert ratios == pytest.approx((row["r21"], row["r32"]), abs=5e-5)
    found = grid_convergence_index((row["phi1"], row["phi2"], row["phi3"]), ratios)
    assert found["order"] == pytest.approx(row["p"], abs=5e-5)
    assert found["extrapolated"] == pytest.approx(row["phi_ext21"], abs=5e-5)
    assert found["relative_error"] == pytest.approx(row["e_a21"], abs=5e-5)
    assert found["extrapolated_error"] == pytest.approx(row["e_ext21"], abs=5e-5)
    assert found["index"] == pytest.approx(row["GCI_fine21"], abs=5e-5)


def test_equal_halving_needs_no_iteration():
    found = grid_convergence_index((1.01, 1.04, 1.16), (2.0, 2.0))
    assert found["order"] == pytest.approx(2.0)
    assert found["extrapolated"] == pytest.approx(1.0)


# --------------------------------------------------------------- how often the limit lies inside

SAMPLES = 4000
LIMIT = 1.0
Errors = Callable[[np.ndarray, Callable[..., float], np.random.Generator], np.ndarray]


def opposite(h, u, _):
    """Errors of both directions nearly cancel: neither the order nor the sign of the sum says anything."""
    along_r, along_z = u(0.5, 1.0) * (1.0 + u(-1, 1) * h**2), u(0.5, 1.0) * (1.0 + u(-1, 1) * h**2)
    return h**2 * (along_r - along_z)


# name -> error at cell sizes h
SEQUENCES: dict[str, Errors] = {
    "h2 + h4": lambda h, u, _: h**2 * (1.0 + u(-1, 1) * h**2),
    "h2 + h3 + h4": lambda h, u, _: h**2 * (1.0 + u(-1, 1) * h + u(-1, 1) * h**2),
    "h2 + a little h": lambda h, u, _: h**2 + u(-0.1, 0.1) * h,
    "corner": lambda h, u, _: u(0.2, 1.0) * h + u(-1, 1) * h**2,
    "r and z of opposite sign": opposite,
    "2 % noise": lambda h, u, random: h**2 * (1.0 + u(-1, 1) * h**2) * (1.0 + 0.02 * random.standard_normal(len(h))),
}


def sampled(name: str, meshes: int) -> np.ndarray:
    """(SAMPLES, 3) half-width, error of the reported value, error of the finest mesh; coarse meshes included."""
    errors = SEQUENCES[name]
    random = np.random.default_rng(20)
    rows = []
    for _ in range(SAMPLES):
        h = random.uniform(0.5, 1.0) * 0.5 ** np.arange(meshes)
        values = LIMIT + errors(h, random.uniform, random)
        found = estimate([float(v) for v in values])
        rows.append((found.half_width, abs(found.value - LIMIT), abs(values[-1] - LIMIT)))
    return np.array(rows)


@pytest.mark.parametrize("meshes", [3, 4])
@pytest.mark.parametrize("name", SEQUENCES)
def test_limits_lie_inside(name, meshes):
    half_width, error, _ = sampled(name, meshes).T
    assert np.mean(error <= half_width) >= 0.95


def test_extrapolation_pays_and_bars_are_not_fat():
    """On four meshes of a smooth sequence the printed value is far nearer to the limit than that of the finest mesh,
    and the bar stays below the error of the finest mesh (here a twentieth of the bar of one mesh less)."""
    half_width, error, finest = sampled("h2 + h4", 4).T
    assert np.median(error / finest) < 0.05
    assert np.median(half_width / finest) < 0.75


# --------------------------------------------------------------------------------- single sequences


def test_second_order_is_extrapolated_with_fixed_weights():
    found = estimate([LIMIT + 0.17, LIMIT + 0.04, LIMIT + 0.01])
    assert found.rule == uncertainty.EXTRAPOLATED
    assert found.value == pytest.approx((4.0 * 1.01 - 1.04) / 3.0, rel=1e-14)
    assert found.order == pytest.approx(math.log2(0.13 / 0.03))


def test_exactly_second_order_keeps_a_tenth_of_its_correction():
    found = estimate([1.16, 1.04, 1.01])
    assert found.value == pytest.approx(1.0, abs=1e-14)
    assert found.half_width == pytest.approx(1.25 * 0.1 * 0.01)


def test_a_lucky_change_does_not_make_a_bar_vanish():
    """What one mesh less would have said still counts a twentieth."""
    lucky = [1.5, 1.08, 1.02, 1.005]  # exactly second order at last, not before
    less = estimate(lucky[:-1]).half_width
    assert estimate(lucky).half_width == pytest.approx(0.05 * less)
    assert estimate(lucky[1:]).half_width == pytest.approx(1.25 * 0.1 * 0.005)
    assert 0.05 * less > 1.25 * 0.1 * 0.005


def test_four_meshes_of_second_order_tell_what_is_left():
    """Errors h^2 + h^4 / 8: the extrapolated value moves by a sixteenth each time; a ratio of 4 at most is trusted."""
    values = [LIMIT + h**2 + h**4 / 8 for h in (1.0, 0.5, 0.25, 0.125)]
    value, before = (4.0 * values[3] - values[2]) / 3.0, (4.0 * values[2] - values[1]) / 3.0
    left = 1.25 * abs(value - before) / 3.0
    correction = 1.25 * 0.04 * abs(value - values[3])
    assert estimate(values).half_width == pytest.approx(max(left, correction))
    assert abs(value - LIMIT) < estimate(values).half_width < 0.5 * estimate(values[1:]).half_width


def test_four_meshes_that_agree_less_keep_the_bar_of_three():
    """A ratio of 3 on the coarser meshes may be a first order that has not shown yet."""
    values = [1.0064, 1.070, 1.0912, 1.0975]
    assert estimate(values).half_width >= estimate(values[1:]).half_width


def test_a_value_that_still_moves_keeps_its_last_move():
    """Second order in all changes, but the extrapolated value moves as far as before."""
    values = [1.0 + 0.16, 1.0 + 0.04, 1.0 + 0.01, 1.0 + 0.0028]
    moved = [(4.0 * b - a) / 3.0 for a, b in zip(values[:-1], values[1:], strict=True)]
    found = estimate(values)
    assert abs(moved[1] - moved[0]) < abs(moved[2] - moved[1])
    assert found.half_width == pytest.approx(1.25 * abs(moved[2] - moved[1]))


@pytest.mark.parametrize(
    "order, factor",
    [(1.6, 3.0 / (2.0**1.6 - 1.0)), (3.0, 3.0 / 3.0), (0.5, 3.0)],
)
def test_other_orders_get_the_index_of_the_finest_value(order, factor):
    """Roache's index with the order clipped to 1 .. 2, or what a mixture of first and second order would be off."""
    h = 0.5 ** np.arange(3)
    coarse, medium, fine = (float(v) for v in LIMIT + h**order)
    found = estimate([coarse, medium, fine])
    assert (found.rule, found.value) == (uncertainty.FINEST, fine)
    assert found.order == pytest.approx(order)
    mixed = 1.25 * abs(-5.0 * fine + 6.0 * medium - coarse) / 3.0
    assert found.half_width == pytest.approx(max(factor * abs(fine - medium), mixed))


def test_oscillation_is_said():
    found = estimate([1.0, 1.2, 1.1])
    assert (found.rule, found.value, found.order) == (uncertainty.OSCILLATES, 1.1, None)
    assert found.half_width == pytest.approx(3.0 * 0.1)


@pytest.mark.parametrize("values", [[2.0, 2.0, 2.0], [0.0, 0.0, 0.0]])
def test_what_never_changes_has_no_mesh_error(values):
    found = estimate(values)
    assert (found.rule, found.half_width, found.value) == (uncertainty.EXACT, 0.0, values[-1])


def test_changes_of_round_off_are_known_to_round_off():
    """A pressure drop of 1e-6 Pa on top of an atmosphere converges below the round-off of the sum."""
    limit = 101325.0 + 1e-6
    values = [limit + 6e-8, limit + 1.5e-8, limit + 0.4e-8]
    found = estimate(values)
    assert (found.rule, found.value) == (uncertainty.EXACT, values[-1])
    assert abs(found.value - limit) < found.half_width < 2e-6


@pytest.mark.parametrize("place", [0, 1, 2])
def test_without_three_values_there_is_no_bar(place):
    values = [1.4, 1.2, 1.1]
    values[place] = math.nan
    found = estimate(values)
    assert found.half_width is None and found.order is None
    assert found.value == 1.1 or place == 2


def test_many_quantities_at_once_are_those_one_by_one():
    random = np.random.default_rng(4)
    h = 0.5 ** np.arange(4)[:, None]
    values = LIMIT + random.normal(size=200) * h**2 + 0.1 * random.normal(size=200) * h
    values[:, 0], values[2, 1], values[0, 2] = 1.0, math.nan, math.nan
    values[:, 3] = 1.0, 1.2, 1.1, 1.15
    many = estimates(values)
    assert set(many.rule) == {"exact", "finest", "oscillates", "extrapolated"}
    for k in range(200):
        one = estimate([float(v) for v in values[:, k]])
        for name in ("value", "half_width", "order"):
            expected = getattr(one, name)
            assert getattr(many, name)[k] == pytest.approx(math.nan if expected is None else expected, nan_ok=True)
        assert many.rule[k] == one.rule


def test_a_missing_coarsest_value_of_four_costs_only_the_memory():
    assert estimate([math.nan, 1.16, 1.04, 1.01]).value == pytest.approx(1.0)


# ------------------------------------------------------------------------------------- trees


def leaves(temperature: float, place: float, entry: float | None) -> dict:
    return {
        "stream": {
            "oil": {
                "outlet_temperature_K": temperature,
                "hottest_wetted_wall_z_m": place,
                "thermal_entry_length_m": entry,
                "is_long": True,
                "why": {"thermal_entry_length_m": "too short"},
            }
        },
        "sensor": {},
    }


def least_at(faces, curves=None, residual=0.0) -> LeastWidths:
    return LeastWidths(np.array(faces), curves or {}, Floor({"K": 40.0, "W": 5.0, "Pa": 7.0}, residual))


FACES = [0.0, 0.3, 0.3225, 0.32575, 1.0]  # the place of `walked` lies in a cell of 3.25 mm


@pytest.fixture
def walked():
    trees = [leaves(300.16, 0.30, None), leaves(300.04, 0.32, 0.5), leaves(300.01, 0.325, None)]
    return estimate_tree(trees, least_at(FACES))


def test_numbers_of_a_tree_are_extrapolated_in_place(walked):
    values, widths, how = walked
    oil = values["stream"]["oil"]
    assert oil["outlet_temperature_K"] == pytest.approx(300.0)
    assert widths["stream"]["oil"]["outlet_temperature_K"] == pytest.approx(1.25 * 0.1 * 0.01)
    assert how["stream"]["oil"]["outlet_temperature_K"] == {
        "observed_order": pytest.approx(2.0),
        "rule": uncertainty.EXTRAPOLATED,
    }
    assert list(oil) == list(leaves(0.0, 0.0, None)["stream"]["oil"])


def test_what_has_no_value_gets_no_bar(walked):
    values, widths, how = walked
    assert values["stream"]["oil"]["thermal_entry_length_m"] is None
    assert values["stream"]["oil"]["is_long"] is True
    assert values["stream"]["oil"]["why"] == {"thermal_entry_length_m": "too short"}
    assert set(widths["stream"]["oil"]) == {"outlet_temperature_K", "hottest_wetted_wall_z_m"}
    assert set(how["stream"]["oil"]) == set(widths["stream"]["oil"])
    assert values["sensor"] == {} and "sensor" not in widths


def test_places_are_known_to_a_cell_or_to_their_last_move(walked):
    values, widths, how = walked
    assert values["stream"]["oil"]["hottest_wetted_wall_z_m"] == 0.325
    assert widths["stream"]["oil"]["hottest_wetted_wall_z_m"] == pytest.approx(0.005)
    assert how["stream"]["oil"]["hottest_wetted_wall_z_m"] == {"observed_order": None, "rule": uncertainty.SPACING}
    still = [leaves(300.0, 0.325, None)] * 3
    _, widths, _ = estimate_tree(still, least_at(FACES))
    assert widths["stream"]["oil"]["hottest_wetted_wall_z_m"] == pytest.approx(0.00325)


def flat(extreme: float, place: float) -> dict:
    return {"layer": {"wall": {"hottest_K": extreme, "hottest_z_m": place}}}


def known_to(trees: list[dict], curve: np.ndarray, z: np.ndarray, residual: float = 0.0) -> float:
    _, widths, _ = estimate_tree(trees, least_at(z, {"layer.wall.hottest_z_m": (z, curve)}, residual))
    return widths["layer"]["wall"]["hottest_z_m"]


def test_a_place_on_a_flat_curve_is_known_to_the_stretch_where_it_is_flat():
    """A parabola of 1 K/m2 with its top at 0.5 m, found at 0.48 m: where the top is known to m kelvin, the place
    reaches from 0.5 - sqrt(m) to 0.5 + sqrt(m). Independent computation, not published."""
    z = np.linspace(0.0, 1.0, 2001)
    curve = 20.0 - (z - 0.5) ** 2
    trees = [flat(top + 293.15, 0.48) for top in (19.84, 19.96, 19.99)]
    margin = 1.25 * 0.1 * 0.01 + 0.01  # the half-width, and what the extrapolated top lies above the finest one
    assert known_to(trees, curve, z) == pytest.approx(0.02 + math.sqrt(margin), abs=1e-3)


def test_a_curve_flat_to_what_the_iteration_leaves_undone():
    """Held at one temperature over 0.2 to 0.8 m: the noise of the iteration, here 1e-8 K, says where the top is."""
    z = np.linspace(0.0, 1.0, 101)
    curve = np.where((z > 0.195) & (z < 0.805), 40.0, 20.0)
    curve[30] += 1e-8
    assert known_to([flat(333.15, 0.3)] * 3, curve, z) == pytest.approx(0.01)
    assert known_to([flat(333.15, 0.3)] * 3, curve, z, residual=1e-8) == pytest.approx(0.5)


def test_two_tops_alike_are_both_in_the_bar():
    z = np.linspace(0.0, 1.0, 101)
    curve = np.maximum(0.0, 1.0 - 100 * np.abs(z - 0.2)) + np.maximum(0.0, 0.999 - 100 * np.abs(z - 0.9))
    trees = [flat(top, 0.2) for top in (300.16, 300.04, 300.01)]
    assert known_to(trees, curve, z) == pytest.approx(0.7)


def test_no_bar_is_below_what_the_iteration_leaves_undone():
    """The floor is a share of the scale by the unit, or of the value; what no mesh changes keeps its zero."""
    trees = [
        {"stream": {"oil": {"heat_gain_W": w, "largest_reynolds": 50 * w, "reynolds": 1.0}}}
        for w in (2.0 + 1.6e-7, 2.0 + 4e-8, 2.0 + 1e-8)
    ]
    _, widths, _ = estimate_tree(trees, least_at([0.0, 1.0], residual=1e-8))
    assert widths["stream"]["oil"] == {
        "heat_gain_W": pytest.approx(5e-8 * 5.0),
        "largest_reynolds": pytest.approx(3e-6 * 100.0),
        "reynolds": 0.0,
    }
    z = nested()
    columns = [1.0 + 1e-9 * 0.25**k + np.zeros_like(x) for k, x in enumerate(z)]
    assert curve_half_widths(z, columns, 1e-6) == pytest.approx(1e-6, rel=1e-3)


@pytest.mark.parametrize(
    "path, value, expected",
    [
        (("sensor", "axis", "temperature_K"), 300.0, 60.0),
        (("section", "a", "end_bulk_temperature_K", "liquid"), 300.0, 60.0),
        (("section", "a", "heat_to_stream_W", "liquid"), 1.0, 5.0),
        (("section", "a", "end_pressure_Pa", "liquid"), 1.0, 7.0),
        (("stream", "liquid", "largest_wall_shear_stress_Pa"), 0.3, 0.3),
        (("stream", "liquid", "thermal_resistance_K_W"), -0.2, 0.2),
        (("wall_heat_flux_W_m2",), 900.0, 900.0),
    ],
)
def test_scales_follow_the_unit(path, value, expected):
    assert uncertainty.scale(path, value, {"K": 60.0, "W": 5.0, "Pa": 7.0}) == expected


# ------------------------------------------------------------------------------------ curves


def halved(faces: np.ndarray) -> np.ndarray:
    return np.sort(np.concatenate([faces, 0.5 * (faces[1:] + faces[:-1])]))


def nested(meshes: int = 3) -> list[np.ndarray]:
    z = [np.array([0.0, 0.1, 0.3, 0.6, 1.0])]
    while len(z) < meshes:
        z.append(halved(z[-1]))
    return z


def test_bars_of_a_curve_hold_its_limit():
    z = nested()
    exact = [np.sin(3.0 * x) for x in z]
    columns = [e + 0.25**k * (0.1 + x**2) for k, (x, e) in enumerate(zip(z, exact, strict=True))]
    widths = curve_half_widths(z, columns)
    assert widths.shape == z[-1].shape
    error = np.abs(columns[-1] - exact[-1])
    shared = np.isin(z[-1], z[0])
    assert np.all(error[shared] <= widths[shared])
    assert np.all(error <= 1.2 * widths)  # in between the half-width is interpolated
    assert np.all(widths[shared] < 1.2 * error[shared])


def test_a_curve_without_value_has_no_bar():
    z = nested()
    columns = [1.0 + 0.25**k + np.zeros_like(x) for k, x in enumerate(z)]
    columns[0][0] = columns[1][0] = columns[2][0] = np.nan
    widths = curve_half_widths(z, columns)
    assert np.isnan(widths[0]) and np.isfinite(widths[1:]).all()
    assert np.isnan(curve_half_widths(z, [np.full_like(x, np.nan) for x in z])).all()


def test_errors_of_r_and_z_from_a_mesh_coarsened_in_one_direction():
    """value = exact + a hr^2 + b hz^2 with a = 3, b = -2 and h = 1 on the finest mesh, 2 on the medium one."""
    found = split(3.0 * 4 - 2.0 * 4, 3.0 * 16 - 2.0 * 4, 3.0 * 4 - 2.0 * 16)
    assert (found.r, found.z) == (3.0, -2.0)
    assert found.opposed == 3.0


@pytest.mark.parametrize("r, z, opposed", [(3.0, 2.0, 0.0), (-3.0, -2.0, 0.0), (1.0, -4.0, 4.0), (1.0, -4.1, 0.0)])
def test_errors_cancel_where_they_are_opposed_and_alike(r, z, opposed):
    assert uncertainty.Split(r, z).opposed == opposed


def test_what_has_no_value_is_not_split():
    assert split(1.0, None, 2.0) is None and split(1.0, 2.0, float("nan")) is None
