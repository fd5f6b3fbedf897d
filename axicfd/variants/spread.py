"""From the tolerances of inputs to the spread of outputs, and which input is to blame.

The quick answer takes each input one standard deviation up and down. For outputs that follow their inputs in straight
lines the variances then add up:

    u_input^2 = sum over inputs of effect^2,    effect = (output one std up - output one std down) / 2

This is the input uncertainty of ASME V&V 20-2009 (propagation by sensitivity coefficients), and each input's part of
the sum is its share. The numerical uncertainty is kept apart: the half-width of the mesh error is meant to hold in 95
of 100 cases, so u_num = half-width / 2, and together u = sqrt(u_input^2 + u_num^2).

The full answer solves a Latin hypercube of inputs. Shares then are first-order variances of an additive polynomial
chaos of second degree fitted to the answers (B. Sudret 2008, Reliability Engineering and System Safety 93, 964-979);
what the inputs do together, or beyond the second degree, is the rest. The 95 % range is that of many draws of the
polynomial, each with a rest picked among those of the samples.

Everything is solved on the meshes of the case itself, and what changes is formed on each nested mesh, so that small
effects are not noise of the mesh.
"""

import time
from collections.abc import Callable, Hashable, Iterable
from dataclasses import dataclass, field, replace
from math import hypot, sqrt
from typing import Any

import numpy as np

from axicfd.case.keys import NORMAL_REACH, InputTolerance
from axicfd.case.model import Case, expect_case
from axicfd.case.quantities import ResultQuantity, quantities, quantity
from axicfd.errors import InputError, Mistake, RefusedModel, bad_input
from axicfd.mesh.grid import Array
from axicfd.pipeline import solve
from axicfd.results.result import Result
from axicfd.variants import runner
from axicfd.variants.contrast import Change, change, sum_of_widths
from axicfd.variants.runner import SOLVED, Job, Outcome
from axicfd.variants.sample import latin_hypercube
from axicfd.variants.sweep import Progress

COUNT = 100  # solves of the full answer
MATTERS = 0.1  # of the quick answer: differences between quick and full, and bends, below this are not spoken of
COVERED = 0.95
DRAWS = 20_000  # of the straight lines or the polynomial, for their 95 % range: good to a per cent
RESAMPLES = 200  # for the sampling errors of the full answer

# What the numbers in spread.json are; the same sentences stand at the top of this file.
HOW = {
    "u_input": "standard uncertainty from the inputs: root of the sum of squared effects (ASME V&V 20-2009), or, with "
    "samples, their standard deviation",
    "u_num": "standard uncertainty from the mesh: half-width of the mesh error, taken as holding 95 %, over 2",
    "u_together": "root of u_input^2 + u_num^2; twice it is the expanded uncertainty",
    "range": "95 % of the answers lie within it, mesh errors not counted",
    "effect": "change of the output for one standard deviation more of the input, mean of both sides",
    "shares": "of the variance u_input^2; without samples those of straight lines, which add up to 1",
}

# Key of a variant -> what `runner.headline` keeps of its Result; differences need no more.
Answers = dict[Hashable, Any]
RunJobs = Callable[[Iterable[Job], Callable[[Outcome], Any]], Any]


@dataclass(frozen=True)
class Effect:
    """What one input does to one output, SI.

    path  : of the input
    by_std: change of the output for one standard deviation more of the input, the mean of both sides
    bend  : by how much the mean of both sides lies off the middle: half the second derivative times the variance
    share : of the output's variance, 0 to 1
    """

    path: str
    by_std: Change
    bend: Change
    share: float


@dataclass(frozen=True)
class Sampled:
    """What the full answer gives for one output, SI.

    low, median, high : 2.5, 50 and 97.5 % of answers lie below, by the polynomial and what it left over
    shares            : path of an input -> first-order share of the variance, largest first
    rest              : share of what inputs do together or beyond the second degree
    errors            : standard errors from sampling, of "mean", "std", "low", "high"
    values            : one per sample; nan where it has none
    """

    mean: float
    std: float
    low: float
    median: float
    high: float
    shares: dict[str, float]
    rest: float
    errors: dict[str, float]
    values: Array


@dataclass(frozen=True)
class Difference:
    """Where the full answer is another than the quick one. what : "mean", "std", "low" or "high" """

    what: str
    quick: float
    full: float


@dataclass(frozen=True)
class OutputSpread:
    """How far an output spreads, SI.

    value, half_width : of the case itself, with its mesh error (None where unknown)
    effects           : of each input, largest share first
    std               : standard deviation by the quick answer; its own mesh error is `std_half_width`
    half_range        : 95 % of the straight-line answers lie within it
    sampled           : the full answer, or None
    """

    quantity: ResultQuantity
    value: float
    half_width: float | None
    effects: tuple[Effect, ...]
    std: float
    std_half_width: float | None
    half_range: float
    sampled: Sampled | None = None

    @property
    def u_input(self) -> float:
        """Standard uncertainty from the inputs: of the full answer, where there is one."""
        return self.sampled.std if self.sampled is not None else self.std

    @property
    def u_num(self) -> float | None:
        """Standard uncertainty from the mesh."""
        return None if self.half_width is None else self.half_width / 2.0

    @property
    def u_together(self) -> float | None:
        """Of inputs and mesh together."""
        return None if self.u_num is None else hypot(self.u_input, self.u_num)

    @property
    def range(self) -> tuple[float, float]:
        """95 % of the answers lie within it, by the full answer where there is one."""
        if self.sampled is not None:
            return self.sampled.low, self.sampled.high
        return self.value - self.half_range, self.value + self.half_range

    @property
    def shares(self) -> dict[str, float]:
        """Path of an input -> share of the variance, largest first; of the full answer where there is one."""
        if self.sampled is not None:
            return self.sampled.shares
        return {effect.path: effect.share for effect in self.effects}

    @property
    def shift(self) -> float:
        """By how much bent curves move the mean off the value, as far as the quick answer can see."""
        return sum(effect.bend.value for effect in self.effects)

    @property
    def is_bent(self) -> bool:
        """Whether already the quick answer shows that straight lines are not enough."""
        bends = [max(0.0, abs(e.bend.value) - (e.bend.half_width or 0.0)) for e in self.effects]
        return hypot(*bends) > MATTERS * self.std

    @property
    def differences(self) -> tuple[Difference, ...]:
        """Where quick and full answer differ by more than a tenth and by more than two standard errors of sampling.

        A tenth of the standard deviation for mean and standard deviation, of the half range for the ends of the range.
        """
        if self.sampled is None or self.std == 0.0:
            return ()
        s, found = self.sampled, []
        for what, quick, full, scale in (
            ("mean", self.value, s.mean, self.std),
            ("std", self.std, s.std, self.std),
            ("low", self.value - self.half_range, s.low, self.half_range),
            ("high", self.value + self.half_range, s.high, self.half_range),
        ):
            if abs(full - quick) > max(MATTERS * scale, 2.0 * s.errors[what] + (self.std_half_width or 0.0)):
                found.append(Difference(what, quick, full))
        return tuple(found)


@dataclass(frozen=True)
class Failure:
    """A variant without an answer. which : "layer.bore.diameter up", "sample 12" """

    which: str
    status: str
    message: str


@dataclass(frozen=True, eq=False)
class Spread:
    """The spread of a case's outputs.

    inputs  : path -> tolerance
    outputs : one per quantity, in the order of the headline
    samples : (count, inputs) values of the inputs in the full answer, SI, in the order of `inputs`; None without it
    limits  : what holds a limit -> verdict -> number of samples; empty without limits or samples
    failures: variants without an answer
    base    : the case itself, solved
    """

    case: Case
    inputs: dict[str, InputTolerance]
    outputs: tuple[OutputSpread, ...]
    samples: Array | None
    limits: dict[str, dict[str, int]]
    failures: tuple[Failure, ...]
    base: Result = field(repr=False)

    @property
    def solved(self) -> bool:
        """Whether the case itself and every variant of the quick answer have an answer."""
        return self.base.converged and all(failure.which.startswith("sample") for failure in self.failures)

    def __getitem__(self, path: str) -> OutputSpread:
        """The spread of a quantity by its path, "stream.oil.outlet_temperature"."""
        wanted = quantity(self.case, path).keys
        for output in self.outputs:
            if output.quantity.keys == wanted:
                return output
        raise KeyError(path)

    def as_dict(self) -> dict[str, Any]:
        """Plain data, as in spread.json; SI."""
        return {
            "title": self.case.title,
            "version": self.base.version,
            "solved": self.solved,
            "cells": self.base.summary["cells"],
            "inputs": {
                path: {"value": t.value, t.given: t.half_width, "standard_deviation": t.std, "kind": t.kind}
                for path, t in self.inputs.items()
            },
            "outputs": {".".join(o.quantity.keys): _output_as_dict(o) for o in self.outputs},
            "samples": None if self.samples is None else len(self.samples),
            "limits": self.limits,
            "failures": [{"variant": f.which, "status": f.status, "message": f.message} for f in self.failures],
            "how": HOW,
        }

    def __repr__(self) -> str:
        return f"<Spread of {self.case.title!r}: {len(self.inputs)} inputs, {len(self.outputs)} outputs>"


def _output_as_dict(o: OutputSpread) -> dict[str, Any]:
    s = o.sampled
    full = None
    if s is not None:
        full = {
            "mean": s.mean,
            "standard_deviation": s.std,
            "percentile_2.5": s.low,
            "median": s.median,
            "percentile_97.5": s.high,
            "sampling_errors": s.errors,
            "shares": s.shares,
            "rest": s.rest,
        }
    return {
        "value": o.value,
        "half_width": o.half_width,
        "u_input": o.u_input,
        "u_num": o.u_num,
        "u_together": o.u_together,
        "range": list(o.range),
        "shares": o.shares,
        "quick": {
            "standard_deviation": o.std,
            "half_width": o.std_half_width,
            "half_range": o.half_range,
            "shift_of_mean": o.shift,
            "is_bent": o.is_bent,
            "effects": {
                e.path: {
                    "effect": e.by_std.value,
                    "half_width": e.by_std.half_width,
                    "bend": e.bend.value,
                    "share": e.share,
                }
                for e in o.effects
            },
        },
        "full": full,
        "differences": [{"what": d.what, "quick": d.quick, "full": d.full} for d in o.differences],
    }


def spread(
    case: Case,
    *,
    full: bool = False,
    count: int = COUNT,
    seed: int = 1,
    of: Iterable[str] = (),
    workers: int | None = None,
    on_progress: Callable[[Progress], Any] | None = None,
    on_solve: Callable[..., Any] | None = None,
    run: RunJobs | None = None,
) -> Spread:
    """How far the outputs of a case spread when its inputs lie anywhere within their tolerances.

    full        : also solve a Latin hypercube of `count` cases; the same seed gives the same cases
    of          : paths of further quantities, beside those of the headline
    workers     : processes, by default one per core
    on_progress : called with how many variants are done        on_solve : progress of the case itself
    run         : solves jobs another way than on processes of this machine, such as on a cluster
    Raises `InputError` where no input has a tolerance, or a tolerance reaches a case that cannot be, before anything
    is solved; `RefusedModel` where the model does not cover the case itself.
    """
    expect_case(case)
    inputs = case.tolerances
    if not inputs:
        raise bad_input(
            "",
            None,
            "no value of the case has a tolerance",
            'Write one as { value = "2 mm", plus_minus = "0.05 mm" } (limits) or { value = "2 mm", std = "0.02 mm" }.',
        )
    if full and count < (least := 4 * len(inputs) + 10):
        raise bad_input("count", count, f"is too few samples for {len(inputs)} inputs", f"Ask for {least} or more.")
    wanted = _wanted(case, of)
    jobs: dict[Hashable, Case] = {key: _changed(case, changes) for key, changes in _beside(inputs).items()}
    points = samples = None
    if full:
        uniform = latin_hypercube(len(inputs), count, seed)
        points = np.column_stack([_standard(t, uniform[:, i]) for i, t in enumerate(inputs.values())])
        samples = np.array([t.value for t in inputs.values()]) + points * [t.std for t in inputs.values()]
        for n, row in enumerate(samples):
            jobs[n] = _changed(case, dict(zip(inputs, map(float, row), strict=True)))
    base = solve(case, on_progress=on_solve)
    if base.summary.get("refused"):
        raise RefusedModel(str(base.summary["refused"]))
    if not base.converged:
        return Spread(case, inputs, (), samples, {}, (), base)
    answers, failures = _solved(jobs, base, workers, on_progress, run)
    outputs = []
    for q in wanted:
        quick = _quick(q, inputs, answers, base)
        if quick is not None and points is not None:
            quick = _with_samples(quick, inputs, points, answers, base, seed)
        if quick is not None:
            outputs.append(quick)
    held = _held([answers[n] for n in range(count) if n in answers]) if full else {}
    return Spread(case, inputs, tuple(outputs), samples, held, failures, base)


def _wanted(case: Case, of: Iterable[str]) -> list[ResultQuantity]:
    found = {q.keys: q for q in quantities(case, headline_only=True)}
    for path in of:
        q = quantity(case, path)
        found.setdefault(q.keys, q)
    return list(found.values())


# ------------------------------------------------------------------------------------------------ the cases


def _beside(inputs: dict[str, InputTolerance]) -> dict[Hashable, dict[str, float]]:
    """(path, side) -> the change that takes an input one standard deviation down or up."""
    return {(path, side): {path: t.value + side * t.std} for path, t in inputs.items() for side in (-1, 1)}


def _changed(case: Case, changes: dict[str, float]) -> Case:
    try:
        return case.replace(changes)
    except InputError as why:
        inside = "; ".join(mistake.text for mistake in why.mistakes)
        what = ", ".join(changes)
        allowed = f"has a tolerance that reaches a case which cannot be: {inside}"
        raise InputError([Mistake(None, None, what, None, allowed, "Give smaller tolerances.")]) from None


def _standard(tolerance: InputTolerance, uniform: Array) -> Array:
    """Points in (0, 1) as deviations of an input in its standard deviations."""
    if tolerance.given == "std":
        from scipy.special import ndtri

        return np.clip(ndtri(uniform), -NORMAL_REACH, NORMAL_REACH)
    return sqrt(3.0) * (2.0 * uniform - 1.0)


def _solved(
    cases: dict[Hashable, Case],
    base: Result,
    workers: int | None,
    on_progress: Callable[[Progress], Any] | None,
    run: RunJobs | None,
) -> tuple[Answers, tuple[Failure, ...]]:
    outcomes: dict[Hashable, Outcome] = {}
    begun = time.monotonic()

    def done(outcome: Outcome) -> None:
        outcomes[outcome.key] = outcome
        if on_progress is not None:
            ended, failed = len(outcomes), sum(o.status != SOLVED for o in outcomes.values())
            seconds = time.monotonic() - begun
            on_progress(Progress(ended, failed, len(cases), seconds, seconds / ended * (len(cases) - ended)))

    jobs = [Job(key, case, base.meshes) for key, case in cases.items()]
    if run is not None:
        run(jobs, done)
    else:
        runner.run(jobs, done, workers=workers)
    failures = tuple(
        Failure(_words(key), outcomes[key].status, outcomes[key].message)
        for key in cases
        if outcomes[key].status != SOLVED
    )
    return {key: o.answer for key, o in outcomes.items() if o.status == SOLVED}, failures


def _words(key: Any) -> str:
    return f"sample {key + 1}" if isinstance(key, int) else f"{key[0]} {'up' if key[1] > 0 else 'down'}"


# ---------------------------------------------------------------------------------------------- the answers


def _quick(q: ResultQuantity, inputs: dict[str, InputTolerance], answers: Answers, base: Result) -> OutputSpread | None:
    """The quick answer for one quantity; None where it has no value or no effect of some input is known."""
    value = q.of(base.summary)
    if value is None:
        return None
    found: list[tuple[str, Change, Change]] = []
    for path in inputs:
        down, up = answers.get((path, -1)), answers.get((path, 1))
        if down is None or up is None:
            return None
        slope, above, below = change(q, up, down), change(q, up, base), change(q, down, base)
        if slope is None or above is None or below is None:
            return None
        bend = Change((above.value + below.value) / 2.0, _half(sum_of_widths(above.half_width, below.half_width)))
        found.append((path, Change(slope.value / 2.0, _half(slope.half_width)), bend))
    std = hypot(*(by_std.value for _, by_std, _ in found))
    of_std = None  # mesh error of the standard deviation
    if std > 0.0 and all(by_std.half_width is not None for _, by_std, _ in found):
        of_std = sum(abs(by_std.value) * (by_std.half_width or 0.0) for _, by_std, _ in found) / std
    effects = [Effect(p, slope, bend, (slope.value / std) ** 2 if std > 0.0 else 0.0) for p, slope, bend in found]
    half_range = _half_range([(inputs[e.path], e.by_std.value) for e in effects])
    half_width = q.of(base.summary.get("numerical_uncertainty"))
    effects.sort(key=lambda effect: -effect.share)
    return OutputSpread(q, value, half_width, tuple(effects), std, of_std, half_range)


def _half(width: float | None) -> float | None:
    return None if width is None else width / 2.0


def _half_range(effects: list[tuple[InputTolerance, float]]) -> float:
    """Half-width of the range that holds 95 % of a sum of independent effects, each uniform or normal."""
    uniform = latin_hypercube(len(effects), DRAWS, seed=0)
    total = sum(by_std * _standard(t, uniform[:, i]) for i, (t, by_std) in enumerate(effects))
    return float(np.quantile(np.abs(total), COVERED))


def _with_samples(
    quick: OutputSpread,
    inputs: dict[str, InputTolerance],
    points: Array,
    answers: Answers,
    base: Result,
    seed: int,
) -> OutputSpread:
    """The quick answer with the full one beside it, where enough samples have a value."""
    values = np.full(len(points), np.nan)
    for n in range(len(points)):
        if n in answers and (found := change(quick.quantity, answers[n], base)) is not None:
            values[n] = quick.value + found.value
    known = np.isfinite(values)
    if np.count_nonzero(known) < 4 * len(inputs) + 5:
        return quick
    return replace(quick, sampled=_sampled(values, points[known], list(inputs.items()), seed))


def _sampled(values: Array, points: Array, inputs: list[tuple[str, InputTolerance]], seed: int) -> Sampled:
    """values : one per sample, nan where it has none        points : deviations of those that have one"""
    y = values[np.isfinite(values)]
    tolerances = [t for _, t in inputs]
    n = len(inputs)
    basis = _basis(points, tolerances)
    weights, left = _fitted(basis, y)
    rest = float(left @ left) / (len(y) - basis.shape[1])
    parts = weights[1 : n + 1] ** 2 + weights[n + 1 :] ** 2
    total = float(parts.sum()) + rest
    shares = {path: float(part / total) if total > 0.0 else 0.0 for (path, _), part in zip(inputs, parts, strict=True)}
    uniform = latin_hypercube(n, DRAWS, seed=0)
    drawn = _basis(np.column_stack([_standard(t, uniform[:, i]) for i, t in enumerate(tolerances)]), tolerances)
    chance = np.random.default_rng(seed)
    low, median, high = _percentiles(drawn, weights, left, chance)
    again = []  # the same from samples drawn anew out of the samples: B. Efron 1979, Annals of Statistics 7, 1-26
    for _ in range(RESAMPLES):
        picked = chance.integers(0, len(y), len(y))
        refitted = _fitted(basis[picked], y[picked])
        again.append((y[picked].std(ddof=1), *_percentiles(drawn[:: DRAWS // 2000], *refitted, chance)))
    of_std, of_low, _, of_high = np.std(again, axis=0)
    # The mean of a Latin hypercube varies only with what is no sum of functions of single inputs:
    # M. Stein 1987, Technometrics 29, 143-151.
    errors = {"mean": sqrt(rest / len(y)), "std": float(of_std), "low": float(of_low), "high": float(of_high)}
    ordered = dict(sorted(shares.items(), key=lambda item: -item[1]))
    remainder = rest / total if total > 0.0 else 0.0
    std = float(y.std(ddof=1))
    return Sampled(float(y.mean()), std, low, median, high, ordered, remainder, errors, values)


def _basis(points: Array, tolerances: list[InputTolerance]) -> Array:
    """(rows, 1 + 2 inputs): a constant and, of each input, the polynomials of first and of second degree.

    points : deviations in standard deviations. All have variance 1 and are orthogonal: Legendre for a uniform input,
    Hermite for a normal one.
    """
    over = [sqrt(2.0) if t.given == "std" else sqrt(0.8) for t in tolerances]
    return np.column_stack([np.ones(len(points)), points, (points**2 - 1.0) / over])


def _fitted(basis: Array, y: Array) -> tuple[Array, Array]:
    """Least squares: (weights, what is left of y)."""
    middle = y.mean()  # taken off for the sake of digits: 300 K that vary by millikelvins
    weights = np.linalg.lstsq(basis, y - middle, rcond=None)[0]
    left = y - middle - basis @ weights
    weights[0] += middle
    return weights, left


def _percentiles(drawn: Array, weights: Array, left: Array, chance: np.random.Generator) -> tuple[float, ...]:
    """2.5, 50 and 97.5 % of many answers of the polynomial, each with what it left over somewhere among the samples.

    The samples alone are too few for their own tails: of 100, two or three lie beyond.
    """
    answers = drawn @ weights + chance.choice(left, len(drawn))
    low, median, high = np.percentile(answers, (2.5, 50.0, 97.5))
    return float(low), float(median), float(high)


def _held(answers: list[Any]) -> dict[str, dict[str, int]]:
    """Limit -> verdict -> number of samples."""
    counts: dict[str, dict[str, int]] = {}
    for answer in answers:
        for name, verdict in (answer.summary.get("limits") or {}).items():
            said = str(verdict.get("verdict") if isinstance(verdict, dict) else verdict)
            counts.setdefault(name, {})
            counts[name][said] = counts[name].get(said, 0) + 1
    return counts
