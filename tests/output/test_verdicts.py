"""Limits in sentences, from made-up verdicts."""

from dataclasses import replace

import pytest

from axicfd.case.read import load
from axicfd.output.shown import shown_units
from axicfd.output.verdicts import sentences
from axicfd.results import limits
from tests.output.made_up import TEXT, made_up

OUTLET = "stream.syrup.outlet_temperature"  # 56.20 degC in the made-up result
LIMITED = f"""
[quantity.warming]
plus  = ["{OUTLET}"]
minus = ["stream.syrup.inlet_temperature"]
[limits]
"""


def said(line: str, half: float | None, text: str = TEXT, **values: float) -> str:
    case = load(text + LIMITED + line + "\n")
    result = made_up()
    tree = {**result.summary, "quantity": {"warming": {"value_K": 36.2, "kind": "temperature_difference"}}}
    tree["numerical_uncertainty"] = {} if half is None else {
        "stream": {"syrup": {"outlet_temperature_K": half, "pressure_drop_Pa": half}},
        "sensor": {"far": {"temperature_K": half}},
        "quantity": {"warming": {"value_K": half}},
    }  # fmt: skip
    tree["limits"] = limits.judge(case, tree)
    ((_, sentence),) = sentences(replace(result, case=case, summary=tree), shown_units(case))
    return sentence


@pytest.mark.parametrize(
    "line, half, words",
    [
        (
            f'"{OUTLET}" = {{ below = "60 degC" }}',
            0.041,
            "outlet temperature (bulk) below 60 degC: pass, margin 3.8 K (mesh ±0.041 K)",
        ),
        (f'"{OUTLET}" = {{ above = "60 degC" }}', 0.041, "(bulk) above 60 degC: fail, by 3.8 K (mesh ±0.041 K)"),
        (
            f'"{OUTLET}" = {{ below = "56.5 degC", above = "1 degC" }}',
            0.4,
            "(bulk) below 56.5 degC and above 1 degC: too close to call, 0.3 K within, mesh error ±0.4 K; "
            f'ask for accuracy = {{ "{OUTLET}" = "0.1 K" }} in [solve]',
        ),
        (f'"{OUTLET}" = {{ below = "55.9 degC" }}', 0.4, "too close to call, 0.3 K beyond, mesh error ±0.4 K; ask"),
        (f'"{OUTLET}" = {{ below = "60 degC" }}', None, "pass, margin 3.8 K (no mesh error known)"),
        ('"stream.syrup.reynolds" = { below = 2000 }', 0.1, "Reynolds number below 2000: pass, margin 2000 ("),
        ('"sensor.far" = { above = "5 degC" }', 0.1, "sensor far above 5 degC: pass, margin 61.9 K"),
        ('"quantity.warming" = { below = "30 K" }', 0.1, "warming below 30 K: fail, by 6.2 K (mesh ±0.1 K)"),
        ('"stream.syrup.pressure_drop" = { below = "3900 Pa" }', 250.0, "too close to call, 100 Pa beyond, mesh error"),
    ],
)  # fmt: skip
def test_sentences(line, half, words):
    assert words in said(line, half), said(line, half)


def test_differences_are_shown_in_the_users_scale():
    text = TEXT.replace('"20 degC"', '"68 degF"').replace('"1.2 m"', '"1.2 m"')
    sentence = said('"quantity.warming" = { above = "5 K" }', 0.1, text)
    assert "warming above 9 degF: pass, margin 56.2 degF (mesh ±0.18 degF)" in sentence


def test_a_limit_exactly_met_gets_no_amount():
    assert "a finer mesh will hardly settle it" in said(f'"{OUTLET}" = {{ below = "56.20 degC" }}', 0.4)
