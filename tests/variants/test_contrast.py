"""Differences of results on nested meshes, from made-up values whose limits are known."""

from dataclasses import dataclass

import numpy as np
import pytest

from axicfd.case.quantities import ResultQuantity
from axicfd.results.result import Nested
from axicfd.results.uncertainty import UNDONE, Floor
from axicfd.variants.contrast import Change, change, curve_change

OUTLET = ResultQuantity("stream.water.outlet_temperature", ("stream", "water", "outlet_temperature_K"))


@dataclass
class Made:
    nested: tuple
    summary: dict
    floor: Floor = Floor({"K": 40.0, "W": 5.0, "Pa": 7.0}, 1e-8)


def made(limit: float, shared: float, own: float, levels: int = 4) -> Made:
    """Outlet temperature = limit + (shared + own) h^2 on meshes h = 8, 4, 2, 1; the curve is constant along z."""
    nested = []
    for h in [8.0, 4.0, 2.0, 1.0][-levels:]:
        value = limit + (shared + own) * h**2
        z = np.linspace(0.0, 1.0, int(8 / h) + 1)
        tree = {"stream": {"water": {"outlet_temperature_K": value}}}
        nested.append(Nested(tree, {"water": {"z_m": z, "bulk_temperature_K": np.full(len(z), value)}}))
    return Made(tuple(nested), {})


def test_errors_that_both_share_cancel():
    found = change(OUTLET, made(301.0, 0.5, 0.001), made(300.0, 0.5, 0.0))
    assert found.value == pytest.approx(1.0, abs=1e-9)
    assert found.half_width < 0.01  # each result alone is off by 0.5 on its finest mesh


def test_no_bar_is_sharper_than_what_both_iterations_leave_undone():
    """Each temperature may be off by UNDONE times the residual 1e-8 of the 40 K it is a share of."""
    then, base = made(301.0, 0.5, 1e-9), made(300.0, 0.5, 0.0)
    assert change(OUTLET, then, base).half_width == pytest.approx(2 * UNDONE * 1e-8 * 40.0)
    _, _, half_width = curve_change(then, base, "water", "bulk_temperature_K")
    assert half_width == pytest.approx(np.full(9, 2 * UNDONE * 1e-8 * 40.0), rel=0.01)


def test_what_no_mesh_acts_on_has_no_floor():
    found = change(OUTLET, made(301.0, 0.0, 0.0), made(300.0, 0.0, 0.0))
    assert found == Change(1.0, 0.0)


def test_without_three_meshes_the_difference_has_no_half_width():
    found = change(OUTLET, made(301.0, 0.5, 0.0, 2), made(300.0, 0.5, 0.0))
    assert found == Change(pytest.approx(1.0), None)


def test_a_quantity_that_one_of_them_lacks_has_no_difference():
    lacking = made(300.0, 0.0, 0.0)
    for nested in lacking.nested:
        nested.tree["stream"]["water"]["outlet_temperature_K"] = None
    assert change(OUTLET, made(301.0, 0.0, 0.0), lacking) is None


def test_curves_differ_on_the_finest_faces():
    z, difference, half_width = curve_change(
        made(301.0, 0.5, 0.001), made(300.0, 0.5, 0.0), "water", "bulk_temperature_K"
    )
    assert len(z) == 9 and difference == pytest.approx(np.full(9, 1.001))
    assert np.all(np.abs(difference - 1.0) <= half_width) and half_width.max() < 0.01


def test_a_change_within_its_half_width_of_an_amount_decides_nothing():
    assert Change(-2.0, 0.1).is_beyond(1.0) is True
    assert Change(0.5, 0.1).is_beyond(1.0) is False
    assert Change(0.95, 0.1).is_beyond(1.0) is None and Change(0.95, None).is_beyond(1.0) is None
