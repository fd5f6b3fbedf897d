"""The limits of a case, held against the answer and its mesh errors."""

import math
from typing import Any

from axicfd.case.limits import Limit
from axicfd.case.model import Case
from axicfd.case.quantities import quantity

PASS, FAIL, TOO_CLOSE, NOT_JUDGED = "pass", "fail", "too close to call", "not judged"


def judge(case: Case, summary: dict[str, Any]) -> dict[str, dict[str, Any]]:
    """The entry `limits` of the summary: path -> value, limits, margin and half-width [SI], verdict.

    The margin is the distance to the nearer limit, negative beyond it. Where it is no larger than the half-width of
    the mesh error the limit is too close to call; without a half-width the value alone is judged. Nothing is
    judged where there is no value, or no answer.
    """
    found = {}
    usable = summary["converged"] and not summary.get("refused")
    for path, limit in case.limits.items():
        limited = quantity(case, path)
        value, half = limited.of(summary), limited.of(summary.get("numerical_uncertainty"))
        margin = None if value is None else _margin(value, limit)
        verdict = NOT_JUDGED if margin is None or not usable else _verdict(margin, half)
        numbers = {"value": value, "below": limit.below, "above": limit.above, "margin": margin, "half_width": half}
        entry: dict[str, Any] = {
            f"{name}{limited.suffix}": number
            for name, number in numbers.items()
            if number is not None or name not in ("below", "above")
        }
        entry["verdict"] = verdict
        if verdict == NOT_JUDGED:
            entry["why"] = "there is no answer" if not usable else "the quantity has no value"
        found[limited.path] = entry
    return found


def _margin(value: float, limit: Limit) -> float:
    below = math.inf if limit.below is None else limit.below
    above = -math.inf if limit.above is None else limit.above
    return min(below - value, value - above)


def _verdict(margin: float, half_width: float | None) -> str:
    if half_width and abs(margin) <= half_width:
        return TOO_CLOSE
    return PASS if margin > 0.0 else FAIL
