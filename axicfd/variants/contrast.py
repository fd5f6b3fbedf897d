"""What changes between two results that were solved on one family of meshes, with the mesh error of the difference.

The difference of a quantity is formed on each of the nested meshes and then extrapolated like any quantity. Errors
that both results share cancel, so its half-width is far smaller than the sum of the two.
"""

from dataclasses import dataclass
from typing import Any

import numpy as np

from axicfd.case.quantities import ResultQuantity
from axicfd.mesh.grid import Array
from axicfd.results import uncertainty
from axicfd.results.result import Nested, Result


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


def change(of: ResultQuantity, then: Result, base: Result) -> Change | None:
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
        return Change(values[-1], _sum(*(of.of(r.summary.get("numerical_uncertainty")) for r in (then, base))))
    found = uncertainty.estimate(known)
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
    return z[-1], differences[-1], uncertainty.curve_half_widths(z, differences)


def _pairs(then: Result, base: Result) -> list[tuple[Nested, Nested]]:
    """The nested meshes of both, the finest last; only as many as both have."""
    n = min(len(then.nested), len(base.nested))
    return list(zip(then.nested[-n:], base.nested[-n:], strict=True))


def _minus(a: float | None, b: float | None) -> float | None:
    return None if a is None or b is None else a - b


def _sum(a: float | None, b: float | None) -> float | None:
    return None if a is None or b is None else a + b


def as_plain(found: Change | None) -> dict[str, Any] | None:
    """For JSON."""
    return None if found is None else {"difference": found.value, "half_width": found.half_width}
