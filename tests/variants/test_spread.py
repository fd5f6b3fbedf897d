"""Spread of outputs against closed forms: heat balance, Hagen-Poiseuille, moments of known functions."""

import math
from dataclasses import replace
from functools import lru_cache

import numpy as np
import pytest

from axicfd.case.keys import InputTolerance
from axicfd.case.read import load
from axicfd.errors import InputError
from axicfd.variants import runner
from axicfd.variants.runner import NOT_CONVERGED, Job, Outcome
from axicfd.variants.spread import Spread, _half_range, _sampled, _standard, spread

T_IN = '{ value = "20 degC", plus_minus = "1 K" }'
FLOW = '{ value = "2 g/s", plus_minus = "3 %" }'
CAPACITY = '{ value = "2000 J/kg/K", std = "1 %" }'
HEAT = '{ value = "80 W", std = "2 %" }'
BORE = '{ value = "8 mm", plus_minus = "10 %" }'

OUTLET, DROP = "stream.oil.outlet_temperature", "stream.oil.pressure_drop"


def case(t_in='"20 degC"', flow='"2 g/s"', capacity='"2000 J/kg/K"', heat='"80 W"', bore='"8 mm"'):
    """Oil of constant properties in a uniformly heated bore, developed at its inlet, on a small mesh."""
    return load(
        f"""
[stream.oil]
fluid = "oil"
inlet_temperature = {t_in}
mass_flow = {flow}
inlet_profile = "developed"
[fluid.oil]
density = "900 kg/m^3"
specific_heat = {capacity}
conductivity = "0.14 W/m/K"
viscosity = "50 mPa s"
[[layer]]
stream = "oil"
diameter = {bore}
[[section]]
name = "heater"
length = "0.5 m"
outside = {{ heat = {heat} }}
[mesh]
radial = 16
axial = 32
[physics]
viscous_heating = false
"""
    )


def run(jobs, on_done):
    """All jobs in this process."""
    for job in jobs:
        on_done(runner.solved(job, runner.headline))


@lru_cache
def heat_balance() -> Spread:
    return spread(case(T_IN, FLOW, CAPACITY, HEAT), run=run)


@lru_cache
def bore() -> Spread:
    return spread(case(heat=HEAT, bore=BORE), full=True, count=50, run=run)


def test_shares_of_a_heat_balance():
    """T_out = T_in + Q / (m c), 20 K of rise: effects of one standard deviation are 1 / sqrt(3) K of the inlet,
    20 K x 0.03 / sqrt(3) of the flow, 0.2 K of the specific heat, 0.4 K of the heat. First law of thermodynamics;
    the squares add up (propagation of uncertainty, JCGM 100:2008, 5.1.2)."""
    variances = {
        "stream.oil.inlet_temperature": 1.0 / 3.0,
        "stream.oil.mass_flow": (20.0 * 0.03) ** 2 / 3.0,
        "fluid.oil.specific_heat": 0.2**2,
        "section.heater.outside.heat": 0.4**2,
    }
    found = heat_balance()[OUTLET]
    total = sum(variances.values())
    assert found.std == pytest.approx(math.sqrt(total), rel=2e-3)
    for path, variance in variances.items():
        assert found.shares[path] == pytest.approx(variance / total, abs=2e-3)
    assert list(found.shares) == sorted(variances, key=lambda path: -variances[path])
    assert sum(found.shares.values()) == pytest.approx(1.0)
    assert not found.is_bent and abs(found.shift) < 0.02 * found.std


def test_what_does_not_act_has_no_share():
    found = heat_balance()["stream.oil.heat_gain"]
    assert found.shares["section.heater.outside.heat"] == pytest.approx(1.0, abs=1e-6)
    assert heat_balance()[DROP].shares["stream.oil.mass_flow"] == pytest.approx(1.0, abs=1e-6)


def test_input_and_numerical_uncertainty_stay_apart():
    """ASME V&V 20-2009: standard uncertainties, together the root of the sum of squares."""
    found = heat_balance()[DROP]
    assert found.half_width is not None and found.half_width > 0.0
    assert found.u_num == found.half_width / 2.0
    assert found.u_together == pytest.approx(math.sqrt(found.std**2 + found.u_num**2))
    # all variants are on the same mesh: the effect is known far better than the value
    assert found.std_half_width < 0.05 * found.half_width


def drop_moments() -> tuple[float, float, float, float]:
    """(mean, standard deviation, 2.5 %, 97.5 %) of (1 + x)^-4, x uniform within +-0.1: integrals by hand."""
    mean = (0.9**-3 - 1.1**-3) / (3 * 0.2)
    square = (0.9**-7 - 1.1**-7) / (7 * 0.2)
    return mean, math.sqrt(square - mean**2), 1.095**-4, 0.905**-4


def test_a_bore_of_wide_tolerance_bends_the_pressure_drop():
    """Hagen-Poiseuille: the drop goes with d^-4. Quick and full answer differ, and both say so."""
    found = bore()[DROP]
    mean, std, low, high = (m * found.value for m in drop_moments())
    assert found.is_bent
    assert found.shift == pytest.approx(mean - found.value, rel=0.05)
    s = found.sampled
    # twice the standard errors of 50 samples, and a hundredth of the standard deviation for the second degree
    assert abs(s.mean - mean) < 2.0 * s.errors["mean"] + 0.01 * std
    assert abs(s.std - std) < 2.0 * s.errors["std"]
    assert abs(s.low - low) < 2.0 * s.errors["low"] + 0.02 * std
    assert abs(s.high - high) < 2.0 * s.errors["high"] + 0.02 * std
    assert {d.what for d in found.differences} >= {"mean", "high"}
    assert s.shares["layer.oil.diameter"] > 0.995 and s.rest < 0.005


def test_quick_and_full_agree_where_all_is_straight():
    for path in (OUTLET, "stream.oil.heat_gain"):
        found = bore()[path]
        assert not found.is_bent and found.differences == ()
        assert found.range[1] - found.value == pytest.approx(found.half_range, rel=0.05)


def test_the_same_seed_gives_the_same_samples():
    limits = case(heat=HEAT, bore=BORE).tolerances["layer.oil.diameter"].reach
    diameters = bore().samples[:, list(bore().inputs).index("layer.oil.diameter")]
    assert diameters.min() > limits[0] and diameters.max() < limits[1]
    strips = np.floor((diameters - limits[0]) / (limits[1] - limits[0]) * 50)
    assert sorted(strips) == list(range(50))  # a Latin hypercube


UNIFORM, NORMAL = InputTolerance(1.0, 0.1, "plus_minus", "length"), InputTolerance(1.0, 0.1, "std", "length")


@pytest.mark.parametrize(
    "effects, half_range",
    [
        ([(UNIFORM, 1.0)], 0.95 * math.sqrt(3.0)),
        ([(NORMAL, 1.0)], 1.95996),
        ([(NORMAL, 0.6), (NORMAL, -0.8)], 1.95996),
        # triangular over +-2 a, a = sqrt(3): P(|x| < t) = 1 - (1 - t / 2a)^2
        ([(UNIFORM, 1.0), (UNIFORM, 1.0)], 2.0 * math.sqrt(3.0) * (1.0 - math.sqrt(0.05))),
    ],
)
def test_the_range_of_straight_lines(effects, half_range):
    assert _half_range(effects) == pytest.approx(half_range, rel=0.01)


def made(function, count=200):
    inputs = [("a", UNIFORM), ("b", NORMAL)]
    from axicfd.variants.sample import latin_hypercube

    points = latin_hypercube(2, count, 3)
    x = np.column_stack([_standard(t, points[:, i]) for i, (_, t) in enumerate(inputs)])
    return _sampled(function(x[:, 0], x[:, 1]), x, inputs, 1)


def test_first_order_shares_of_known_functions():
    """Variances by hand: a has variance 1, b^2 has 2 (normal), a^2 has 0.8 (uniform), a b has 1 and is of neither."""
    found = made(lambda a, b: 300.0 + a + 0.5 * b**2)
    assert found.shares["a"] == pytest.approx(1.0 / 1.5, abs=0.02) and found.rest < 1e-9
    found = made(lambda a, b: a**2 + b)
    assert found.shares["a"] == pytest.approx(0.8 / 1.8, abs=0.02)
    found = made(lambda a, b: a * b)
    assert found.rest > 0.9


def test_errors_of_sampling_are_honest():
    """Of 40 sets of samples, about two may have their true mean or range end beyond two standard errors."""
    beyond = 0
    for seed in range(40):
        from axicfd.variants.sample import latin_hypercube

        points = _standard(UNIFORM, latin_hypercube(1, 40, seed)[:, 0])[:, None]
        found = _sampled((1.0 + 0.1 * points[:, 0] / math.sqrt(3.0)) ** -4, points, [("a", UNIFORM)], seed)
        mean, std, low, high = drop_moments()
        slack = 0.01 * std  # of the second degree and of the draws
        for what, true in (("mean", mean), ("low", low), ("high", high), ("std", std)):
            beyond += abs(getattr(found, what) - true) > 2.0 * found.errors[what] + slack
    assert beyond <= 0.1 * 160


def test_without_a_tolerance_there_is_nothing_to_spread():
    with pytest.raises(InputError, match="plus_minus"):
        spread(case(), run=run)


def test_too_few_samples_are_refused_before_anything_is_solved():
    with pytest.raises(InputError, match="18 or more"):
        spread(case(heat=HEAT, bore=BORE), full=True, count=10, run=run)


def test_a_tolerance_that_reaches_an_impossible_case_is_refused_by_name():
    tube = case().replace(
        {
            "layer": [
                {"stream": "oil", "diameter": 8e-3},
                {"name": "tube", "solid": "copper", "outer_diameter": {"value": 8.2e-3, "plus_minus": 1e-3}},
            ]
        }
    )
    with pytest.raises(InputError, match="layer.tube.outer_diameter.*cannot be"):
        spread(tube, run=run)


def test_a_variant_without_an_answer_is_told_and_leaves_no_false_numbers():
    def fails_once(jobs, on_done):
        for job in jobs:
            if job.key == ("section.heater.outside.heat", 1):
                on_done(Outcome(job.key, NOT_CONVERGED, "residual 1e-3", None, 0.0))
            else:
                on_done(runner.solved(job, runner.headline))

    found = spread(case(heat=HEAT), run=fails_once)
    assert not found.solved and found.outputs == ()
    assert found.failures[0].which == "section.heater.outside.heat up" and found.failures[0].message == "residual 1e-3"


def test_samples_are_counted_by_the_verdict_of_each_limit():
    def limited(jobs, on_done):
        for job in jobs:
            done = runner.solved(job, runner.headline)
            rises = job.case.section[0].outside.heat > 80.0
            summary = done.answer.summary | {"limits": {"a": "fail" if rises else "pass"}}
            answer = replace(done.answer, summary=summary)
            on_done(Outcome(done.key, done.status, done.message, answer, done.seconds))

    found = spread(case(heat=HEAT), full=True, count=20, run=limited)
    assert found.limits == {"a": {"fail": 10, "pass": 10}}


@pytest.mark.slow
def test_processes_give_the_same_answer():
    found = spread(case(T_IN, FLOW, CAPACITY, HEAT), workers=2)
    assert found[OUTLET].shares == pytest.approx(heat_balance()[OUTLET].shares, abs=1e-6)


def test_variants_share_the_mesh_of_the_case():
    seen: list[Job] = []

    def noted(jobs, on_done):
        seen.extend(jobs)
        run(seen, on_done)

    found = spread(case(heat=HEAT), run=noted)
    assert all(job.like is found.base.meshes for job in seen)
