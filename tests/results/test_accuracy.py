"""Mesh errors held against what is allowed, on a made-up tree of headline quantities."""

from types import SimpleNamespace

import numpy as np
import pytest

from axicfd.case.read import load
from axicfd.results import accuracy
from axicfd.results.accuracy import judge
from tests.results.made_up import TEXT

SOLUTION = SimpleNamespace(
    heat=SimpleNamespace(t=np.array([[-5.0, 20.0, 1e9]])), grid=SimpleNamespace(kind=np.array([[1, 2, 0]]))
)
TREE = {
    "stream": {
        "water": {
            "outlet_temperature_K": 300.0,
            "pressure_drop_Pa": 400.0,
            "heat_gain_W": 8.0,
            "hottest_wetted_wall_K": 313.0,
        }
    },
    "layer": {"tube": {"hottest_K": 313.0}},
    "section": {"lead-in": {"heat_in_W": 2.0}, "heater": {"heat_in_W": 10.0}},
    "sensor": {"on": {"temperature_K": 310.0}, "dry": {"temperature_K": None}},
    "ledger": {
        "section": {"lead-in": -2.0, "heater": 10.0},
        "ends": {"first": 0.0, "last": -1.0},
        "generated": {"tube": 0.5},
    },
}


def tree(from_r=None, from_z=None, **widths):
    """The made-up summary; half-widths of the stream's quantities, the others have 0."""
    stream = {key: widths.get(key, 0.0) for key in TREE["stream"]["water"]}
    bars = {
        "stream": {"water": stream},
        "layer": {"tube": {"hottest_K": 0.0}},
        "section": {"lead-in": {"heat_in_W": 0.0}, "heater": {"heat_in_W": 0.0}},
        "sensor": {"on": {"temperature_K": 0.15}},
        "from_r": {"stream": {"water": from_r or {}}},
        "from_z": {"stream": {"water": from_z or {}}},
    }
    return {**TREE, "numerical_uncertainty": bars}


def case(value):
    return load(TEXT).replace({"solve.accuracy": value})


def test_scales_are_those_of_the_definition():
    """Largest distance from the inlet temperature outside voids; sum of absolute heats; the pressure drop."""
    assert accuracy.scales(TREE, SOLUTION) == {"temperature_K": 20.0, "heat_W": 13.5, "pressure_Pa": {"water": 400.0}}


def test_per_cent_ask_for_every_headline_quantity_and_no_sensor():
    found = judge(case("1 %"), tree(), SOLUTION)
    allowed = {path: judged.allowed for path, judged in found.quantity.items()}
    assert allowed == pytest.approx({
        "stream.water.outlet_temperature_K": 0.2,
        "stream.water.pressure_drop_Pa": 4.0,
        "stream.water.heat_gain_W": 0.135,
        "stream.water.hottest_wetted_wall_K": 0.2,
        "layer.tube.hottest_K": 0.2,
        "section.lead-in.heat_in_W": 0.135,
        "section.heater.heat_in_W": 0.135,
    })  # fmt: skip
    assert found.reached and found.excess_r == found.excess_z == {}


def test_a_path_counts_before_a_name_and_only_named_quantities_count():
    wanted = {"heat_in": "1 %", "section.heater.heat_in": "10 mW", "temperature": "0.1 K"}
    found = judge(case(wanted), tree(pressure_drop_Pa=100.0), SOLUTION)
    assert {path: judged.allowed for path, judged in found.quantity.items()} == pytest.approx(
        {"section.lead-in.heat_in_W": 0.135, "section.heater.heat_in_W": 0.01, "sensor.on.temperature_K": 0.1}
    )
    assert found.worst == "sensor.on.temperature_K" and found.ratio == pytest.approx(1.5) and not found.reached


@pytest.mark.parametrize(
    "r, z, excess",
    [
        (1.0, 0.0, (6.0, None)),  # all of three allowed ones from r, which may have half of one
        (0.0, -1.0, (None, 6.0)),
        (0.1, 0.9, (None, 5.4)),  # r's share of the bar, 0.3 allowed ones, is below half: left alone
        (0.25, 0.75, (1.5, 4.5)),
        (None, None, (3.0, 3.0)),  # unknown: both alike
    ],
)
def test_each_direction_may_have_half_of_what_is_allowed(r, z, excess):
    key = "pressure_drop_Pa"
    found = judge(case("1 %"), tree({key: r}, {key: z}, pressure_drop_Pa=12.0), SOLUTION)
    assert found.worst == "stream.water.pressure_drop_Pa"
    assert (found.excess_r.get(found.worst), found.excess_z.get(found.worst)) == pytest.approx(excess)


def test_segments_are_refined_so_that_the_excess_goes_with_the_fewest_cells():
    """Against a search over all pairs of factors, errors like the square of the cell size."""
    cells, shares = [40, 8], [2.5, 0.5]
    found = accuracy.factors({"a": 3.0}, cells, [{"a": 5.0}, {"a": -1.0}])
    assert sum(share / f**2 for share, f in zip(shares, found, strict=True)) == pytest.approx(1.0)
    first = np.linspace(1.0, 2.0, 2001)
    left = 1.0 - shares[0] / first**2
    other = np.maximum(1.0, np.sqrt(shares[1] / np.where(left > 0.0, left, np.nan)))
    best = np.nanmin(cells[0] * first + cells[1] * other)
    assert cells[0] * found[0] + cells[1] * found[1] == pytest.approx(best, rel=1e-4)


def test_a_segment_without_a_share_keeps_up_by_half():
    assert accuracy.factors({"a": 2.0}, [8, 8], [{"a": 0.3}, {"a": 0.0}]) == pytest.approx([2.0**0.5, 2.0**0.25])


def test_what_is_not_known_is_shared_alike_by_all_cells():
    assert accuracy.factors({"a": 3.0}, [40, 8], [{"a": 1.0}, None]) == pytest.approx([3.0**0.5] * 2)
    assert accuracy.factors({"a": 3.0}, [40, 8], [{"a": 0.0}, {"a": 0.0}]) == pytest.approx([3.0**0.5] * 2)
    assert accuracy.factors({"a": 100.0}, [40], [None]) == [accuracy.FINEST]
    assert accuracy.factors({}, [40, 8], [None, None]) == [1.0, 1.0]


def test_changes_are_of_what_both_have():
    other = {part: dict(entries) for part, entries in TREE.items()} | {"layer": {"tube": {"hottest_K": 310.0}}}
    other["stream"] = {"water": {"pressure_drop_Pa": None, "heat_gain_W": 9.0}}
    found = accuracy.changes(case("1 %"), TREE, other)
    assert found["layer.tube.hottest_K"] == 3.0 and found["stream.water.heat_gain_W"] == -1.0
    assert "stream.water.pressure_drop_Pa" not in found and "stream.water.outlet_temperature_K" not in found


def test_nothing_is_refined_for_a_share_of_nothing():
    cold = SimpleNamespace(heat=SimpleNamespace(t=np.array([[1e-9, 0.0, 0.0]])), grid=SOLUTION.grid)
    found = judge(case("1 %"), tree(outlet_temperature_K=1e-7, heat_gain_W=1e-3), cold)
    assert list(found.quantity) == ["stream.water.pressure_drop_Pa"]


def test_a_quantity_without_a_half_width_is_not_reached():
    summary = tree()
    summary["numerical_uncertainty"]["stream"]["water"]["pressure_drop_Pa"] = None
    assert not judge(case("1 %"), summary, SOLUTION).reached


def test_what_stopped_it_is_said():
    found = judge(case("1 %"), tree(pressure_drop_Pa=12.0), SOLUTION)
    said = accuracy.as_summary(found, "cells", "a finer mesh would have more than 100 cells.", 3)
    assert said["reached"] is False and said["stopped_by"] == "cells" and said["solves"] == 3
    assert "`stream.water.pressure_drop_Pa`, 3 times what is allowed: a finer mesh" in said["text"]
    assert said["quantity"]["stream.water.pressure_drop_Pa"] == {"half_width": 12.0, "allowed": 4.0}
    assert accuracy.as_summary(judge(case("3 %"), tree(), SOLUTION), None, "", 1)["reached"] is True
