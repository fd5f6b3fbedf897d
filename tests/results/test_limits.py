"""Limits held against made-up values and half-widths: pass, fail, too close to call."""

import pytest

from axicfd.case.read import load
from axicfd.results import limits
from tests.results.made_up import TEXT

WALL = "stream.water.hottest_wetted_wall"


def case(**bounds):
    return load(TEXT).replace({"limits": {WALL: bounds}})


def summary(value=300.0, half=0.4, **more):
    tree = {"converged": True, "stream": {"water": {"hottest_wetted_wall_K": value}}}
    bars = {} if half is None else {"numerical_uncertainty": {"stream": {"water": {"hottest_wetted_wall_K": half}}}}
    return tree | bars | more


@pytest.mark.parametrize(
    "bounds, half, verdict, margin",
    [
        ({"below": 301.0}, 0.4, limits.PASS, 1.0),
        ({"below": 299.0}, 0.4, limits.FAIL, -1.0),
        ({"below": 300.3}, 0.4, limits.TOO_CLOSE, 0.3),
        ({"below": 299.7}, 0.4, limits.TOO_CLOSE, -0.3),
        ({"below": 300.25}, 0.25, limits.TOO_CLOSE, 0.25),
        ({"above": 299.0}, 0.4, limits.PASS, 1.0),
        ({"above": 301.0}, 0.4, limits.FAIL, -1.0),
        ({"above": 290.0, "below": 300.3}, 0.4, limits.TOO_CLOSE, 0.3),
        ({"above": 290.0, "below": 320.0}, 0.4, limits.PASS, 10.0),
        ({"below": 300.3}, None, limits.PASS, 0.3),  # no mesh error known: the value alone is judged
        ({"below": 299.7}, None, limits.FAIL, -0.3),
        ({"below": 300.0}, None, limits.FAIL, 0.0),  # not below
        ({"below": 300.3}, 0.0, limits.PASS, 0.3),  # nothing depends on the mesh
    ],
)
def test_verdicts(bounds, half, verdict, margin):
    found = limits.judge(case(**bounds), summary(half=half))[WALL]
    assert found["verdict"] == verdict and found["margin_K"] == pytest.approx(margin)
    assert found["value_K"] == 300.0 and found["half_width_K"] == half
    assert {name: found.get(f"{name}_K") for name in ("below", "above")} == {
        name: bounds.get(name) for name in ("below", "above")
    }


@pytest.mark.parametrize(
    "tree, why",
    [
        (summary(converged=False), "no answer"),
        (summary(refused="too fast"), "no answer"),
        (summary(value=None), "no value"),
    ],
)
def test_nothing_is_judged_without_an_answer(tree, why):
    found = limits.judge(case(below=301.0), tree)[WALL]
    assert found["verdict"] == limits.NOT_JUDGED and why in found["why"]


def test_names_carry_units():
    wanted = load(TEXT).replace({"limits": {"stream.water.reynolds": {"below": 2000.0}}})
    tree = {"converged": True, "stream": {"water": {"reynolds": 100.0}}}
    assert limits.judge(wanted, tree) == {
        "stream.water.reynolds": {
            "value": 100.0, "below": 2000.0, "margin": 1900.0, "half_width": None, "verdict": "pass",
        }
    }  # fmt: skip
