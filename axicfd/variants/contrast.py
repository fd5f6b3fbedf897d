"""What changes between two results that were solved on one family of meshes, with the mesh error of the difference.

The difference of a quantity is formed on each of the nested meshes and then extrapolated like any quantity. Errors
that both results share cancel, so its half-width is far smaller than the sum of the two. What their iterations leave
undone does not cancel: no half-width is less than the sum of both floors.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable
from dataclasses import dataclass, replace
from typing import Any, Protocol

import numpy as np

from axicfd.case.quantities import difference_of
from axicfd.mesh.grid import Array
from axicfd.pipeline import Progress
from axicfd.results import accuracy, uncertainty
from axicfd.results.result import Nested, Result
from axicfd.variants.care import Care
from axicfd.variants.runner import Answer

YES, NO, OPEN = "matters", "does not matter", "cannot tell"

OnVariant = Callable[[str, Progress], Any]
"""Called with the name of the variant that is being solved and how far it is."""


class Quantity(Protocol):
    """What a difference is formed of, such as a `ResultQuantity`."""

    @property
    def path(self) -> str: ...

    @property
    def key(self) -> str: ...

    @property
    def label(self) -> str: ...

    @property
    def kind(self) -> str: ...

    @property
    def kind_of_difference(self) -> str: ...

    def of(self, tree: Any) -> float | None: ...


@dataclass(frozen=True)
class Change:
    """By how much a quantity is higher in one result than in the other, SI; half_width None where it has none."""

    value: float
    half_width: float | None

    def is_beyond(self, amount: float) -> bool | None:
        """Whether the change is larger than an amount, either way; None where its half-width leaves that open."""
        if self.half_width is None or abs(abs(self.value) - amount) <= self.half_width:
            return None
        return abs(self.value) > amount


def change(of: Quantity, then: Result | Answer, base: Result | Answer) -> Change | None:
    """The quantity in `then` minus that in `base`; None where one of them has no value.

    Without three nested meshes in both, which no mesh error can be told from, the difference of the finest.
    """
    pairs = _pairs(then, base)
    values = [_minus(of.of(a.tree), of.of(b.tree)) for a, b in pairs]
    if values[-1] is None:
        return None
    known = [value for value in values if value is not None]
    if len(known) < 3 or None in values[-3:]:
        return Change(values[-1], None)
    if of.key.endswith("_z_m"):
        return Change(values[-1], sum_of_widths(*(of.of(r.summary.get("numerical_uncertainty")) for r in (then, base))))
    floor = sum(r.floor.of((of.key,), of.of(mesh.tree) or 0.0) for r, mesh in zip((then, base), pairs[-1], strict=True))
    found = uncertainty.estimate(known, floor)
    return Change(found.value, found.half_width)


def curve_change(then: Result, base: Result, stream: str, column: str) -> tuple[Array, Array, Array]:
    """(z, difference, half-width) along a stream on the finest faces; nan where there is no value.

    Both results must have the same faces along z.
    """
    pairs = _pairs(then, base)
    z = [a.curves[stream]["z_m"] for a, _ in pairs]
    differences = [a.curves[stream][column] - b.curves[stream][column] for a, b in pairs]
    if len(pairs) < 3:
        return z[-1], differences[-1], np.full(len(z[-1]), np.nan)
    finest = zip((then, base), pairs[-1], strict=True)
    floor = sum(result.floor.of_curve(column, mesh.curves[stream][column]) for result, mesh in finest)
    return z[-1], differences[-1], uncertainty.curve_half_widths(z, differences, floor)


@dataclass(frozen=True)
class Difference:
    """One quantity in two results.

    then, base : its values, SI            change : by how much `then` is higher
    scale      : what per cent are of, SI  care   : from where on a change counts, SI; None where it decides nothing
    """

    of: Quantity
    then: float
    base: float
    change: Change
    scale: float
    care: float | None

    @property
    def verdict(self) -> str | None:
        """YES, NO or OPEN; None where the quantity decides nothing."""
        if self.care is None:
            return None
        return {True: YES, False: NO, None: OPEN}[self.change.is_beyond(self.care)]

    @property
    def weight(self) -> float:
        """The change as a multiple of what counts; 0 where the quantity decides nothing."""
        return abs(self.change.value) / self.care if self.care else 0.0

    @property
    def finer(self) -> float:
        """By what factor the half-width has to shrink before the verdict is settled; inf where nothing would do."""
        if self.care is None or self.change.half_width is None:
            return np.inf
        gap = abs(abs(self.change.value) - self.care)
        return self.change.half_width / gap if gap > 0.0 else np.inf


@dataclass(frozen=True)
class CurveDifference:
    """A column of the curves along a stream in two results.

    stream, column : which curve
    z, difference, half_width : as `curve_change` gives them
    largest : largest absolute value of the column itself in both
    """

    stream: str
    column: str
    z: Array
    difference: Array
    half_width: Array
    largest: float

    @property
    def at(self) -> int | None:
        """Index of the largest difference."""
        return int(np.nanargmax(np.abs(self.difference))) if np.isfinite(self.difference).any() else None


@dataclass(frozen=True)
class Effect:
    """What one assumption changes: a result that has the effect against one that lacks it.

    name        : of the effect, "axial conduction in the wall"
    differences : with minus without, those that weigh most first
    curves      : differences along the stream; they decide nothing, for at the edge of a heater they are always large
    why_open    : why nothing can be said, where one of the two did not converge
    """

    name: str
    differences: tuple[Difference, ...]
    curves: tuple[CurveDifference, ...] = ()
    why_open: str = ""

    @property
    def verdict(self) -> str:
        """YES where any quantity changes enough, NO where none does, OPEN where that is not settled."""
        found = [d.verdict for d in self.differences]
        if self.why_open or not any(found):
            return OPEN
        return YES if YES in found else OPEN if OPEN in found else NO

    @property
    def decisive(self) -> Difference | None:
        """The quantity the verdict rests on: the one that weighs most among those of the same verdict."""
        return next((d for d in self.differences if d.verdict == self.verdict), None)

    def judged(self, care: Care) -> Effect:
        """The same effect for another opinion of what matters."""
        again = [replace(d, care=care.of(d.of.kind_of_difference, d.scale)) for d in self.differences]
        return replace(self, differences=tuple(sorted(again, key=lambda d: -d.weight)))

    @property
    def weight(self) -> float:
        """Largest change as a multiple of what counts."""
        return max((d.weight for d in self.differences), default=0.0)


def effect(
    name: str,
    then: Result,
    base: Result,
    quantities: Iterable[Quantity],
    care: Care,
    full: Result,
    columns: Iterable[str] = (),
) -> Effect:
    """The effect that `then` has and `base` lacks, judged with the scales of the full case.

    quantities : to compare; those without a value in either are left out
    columns    : of the curves along the streams
    """
    why = "; ".join(f"the solve of {r.case.title!r} did not converge" for r in (then, base) if not r.converged)
    scales = accuracy.scales(full.summary, full.solution)
    found = []
    for of in quantities:
        moved, one, other = change(of, then, base), of.of(then.summary), of.of(base.summary)
        if moved is None or one is None or other is None:
            continue
        scale = _scale(of, scales, full)
        found.append(Difference(of, one, other, moved, scale, care.of(of.kind_of_difference, scale)))
    found.sort(key=lambda d: -d.weight)
    curves = [
        CurveDifference(stream, column, *curve_change(then, base, stream, column), _largest(then, base, stream, column))
        for stream in full.axial
        for column in columns
    ]
    return Effect(name, tuple(found), tuple(curves), why)


def _scale(of: Quantity, scales: dict[str, Any], full: Result) -> float:
    """What per cent of a quantity are of, SI; 0 where that is nothing."""
    kind = of.kind_of_difference
    if kind == "temperature_difference":
        return scales["temperature_K"] if scales["temperature_K"] > accuracy.SMALLEST_TEMPERATURE else 0.0
    if kind == "heat":
        return scales["heat_W"]
    if difference_of(kind) == "pressure_difference":
        return max(scales["pressure_Pa"].values(), default=0.0)
    if kind == "length":  # a place: it moves by much for nothing
        return 0.0
    return abs(of.of(full.summary) or 0.0)


def _largest(then: Result, base: Result, stream: str, column: str) -> float:
    both = np.concatenate([r.axial[stream][column] for r in (then, base)])
    return float(np.nanmax(np.abs(both))) if np.isfinite(both).any() else 0.0


def _pairs(then: Result | Answer, base: Result | Answer) -> list[tuple[Nested, Nested]]:
    """The nested meshes of both, the finest last; only as many as both have."""
    n = min(len(then.nested), len(base.nested))
    return list(zip(then.nested[-n:], base.nested[-n:], strict=True))


def _minus(a: float | None, b: float | None) -> float | None:
    return None if a is None or b is None else a - b


def sum_of_widths(a: float | None, b: float | None) -> float | None:
    """The sum of two half-widths; None where one is unknown."""
    return None if a is None or b is None else a + b


def as_plain(found: Effect) -> dict[str, Any]:
    """An effect for JSON, in SI."""
    differences = {
        d.of.path: {
            "with": d.then,
            "without": d.base,
            "difference": d.change.value,
            "half_width": d.change.half_width,
            "scale": d.scale,
            "care": d.care,
            "verdict": d.verdict,
        }
        for d in found.differences
    }
    return {
        "verdict": found.verdict,
        **({"why": found.why_open} if found.why_open else {}),
        "difference": differences,
        "largest_along_stream": {
            c.column: {
                "difference": float(c.difference[c.at]),
                "half_width": _number(c.half_width[c.at]),
                "z_m": float(c.z[c.at]),
                "largest": c.largest,
            }
            for c in found.curves
            if c.at is not None
        },
    }


def _number(value: float) -> float | None:
    return float(value) if np.isfinite(value) else None
