"""When a solve stops, and why."""

import pytest

from axicfd.solver.convergence import LIMIT, PATIENCE, Watch


def test_both_residuals_must_fall_below():
    watch = Watch(1e-8)
    assert watch.verdict(1, 1e-9, 1e-3) is None
    assert watch.verdict(2, 1e-3, 1e-9) is None
    assert watch.verdict(3, 1e-9, 2e-9) == "converged"
    assert watch.residual == 2e-9
    assert watch.history == [(1, 1e-9, 1e-3), (2, 1e-3, 1e-9), (3, 1e-9, 2e-9)]


@pytest.mark.parametrize("bad", [float("nan"), float("inf")])
@pytest.mark.parametrize("where", [0, 1])
def test_what_is_not_finite_has_diverged(bad, where):
    """max(1, nan) is 1: a residual that is not a number used to be able to hide behind the other one."""
    residuals = [1e-3, 1e-3]
    residuals[where] = bad
    assert Watch(1e-8).verdict(1, *residuals) == "diverged"


def test_round_off_is_noticed():
    watch = Watch(1e-15)
    verdicts = [watch.verdict(n, 1e-12, 0.0) for n in range(PATIENCE + 2)]
    assert verdicts[-1] == "no further progress"
    assert set(verdicts[:-1]) == {None}


def test_slow_progress_is_progress():
    watch, residual = Watch(1e-15), 1.0
    for n in range(5 * PATIENCE):
        residual *= 0.97
        assert watch.verdict(n, residual, 0.0) is None


def test_there_is_a_limit():
    assert Watch(1e-8).verdict(LIMIT, 1e-3, 0.0) == "iteration limit"
