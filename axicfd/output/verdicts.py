"""The limits of a case in sentences: passed, failed, too close to call."""

from __future__ import annotations

import math
from collections.abc import Iterator
from typing import Any

from axicfd.case.limits import BOUNDS
from axicfd.case.quantities import ResultQuantity, quantity
from axicfd.output.headline import number, with_bar
from axicfd.output.shown import Shown
from axicfd.results.limits import NOT_JUDGED, PASS, TOO_CLOSE

ASK_FOR = 0.5  # of the margin: the mesh error that would settle a limit if the value stayed
HOPELESS = 0.01  # of the mesh error: that much closer takes some hundred times the cells
EVERY_DIGIT = -99  # decade of the last digit that may be shown


def sentences(result: Any, shown: Shown) -> Iterator[tuple[str, str]]:
    """(verdict, sentence) of every limit of a solved case: "hottest wetted wall below 90 degC: pass, margin 0.3 K"."""
    for path, entry in (result.summary.get("limits") or {}).items():
        limited = quantity(result.case, path)
        yield entry["verdict"], f"{limited.label} {_bounds(limited, entry, shown)}: {_verdict(limited, entry, shown)}"


def _bounds(limited: ResultQuantity, entry: dict[str, Any], shown: Shown) -> str:
    words = []
    for word in BOUNDS:
        bound = entry.get(f"{word}{limited.suffix}")
        if bound is not None:
            row = limited.row
            words.append(
                f"{word} {_short(float(shown.value(row.kind, bound)))} {shown.unit(row.kind) or row.unit}".rstrip()
            )
    return " and ".join(words)


def _verdict(limited: ResultQuantity, entry: dict[str, Any], shown: Shown) -> str:
    verdict = entry["verdict"]
    if verdict == NOT_JUDGED:
        return f"{verdict}, {entry['why']}"
    margin, half = (entry[f"{name}{limited.suffix}"] for name in ("margin", "half_width"))
    kind, unit = limited.row.kind, _difference_unit(limited, shown)
    size = float(shown.difference(kind, abs(margin)))
    if not half:
        bar = "no mesh error known" if half is None else "no mesh error"
        return f"{verdict}, {'margin' if verdict == PASS else 'by'} {number(size, 3)} {unit}".rstrip() + f" ({bar})"
    width = float(shown.difference(kind, half))
    size_text, width_text = with_bar(size, width)
    if verdict == TOO_CLOSE:
        side = "within" if margin >= 0.0 else "beyond"
        text = f"{verdict}, {size_text} {unit} {side}, mesh error ±{width_text} {unit}"
        return f"{text}; {_ask(limited, size, width, shown)}"
    width_text = with_bar(size or width, width, EVERY_DIGIT)[1]  # to its own digits, the margin needs none of them
    word = "margin" if verdict == PASS else "by"
    return f"{verdict}, {word} {number(size, 3)} {unit} (mesh ±{width_text} {unit})"


def _ask(limited: ResultQuantity, margin: float, half_width: float, shown: Shown) -> str:
    """What to write in the case to settle it."""
    if margin < HOPELESS * half_width:
        return "a finer mesh will hardly settle it"
    half = _floor(ASK_FOR * margin)
    unit = _plain(_difference_unit(limited, shown))
    if not unit:
        return "a finer mesh may settle it"
    return f'ask for accuracy = {{ "{limited.path}" = "{half:g} {unit}" }} in [solve]'


def _floor(value: float) -> float:
    """Rounded down to one digit; value > 0."""
    decade = 10.0 ** math.floor(math.log10(value))
    return math.floor(value / decade) * decade


def _difference_unit(limited: ResultQuantity, shown: Shown) -> str:
    return shown.difference_unit(limited.row.kind) or limited.row.unit


def _plain(unit: str) -> str:
    return unit.replace("²", "^2").replace("³", "^3")


def _short(value: float) -> str:
    """A limit as short as it was given."""
    return f"{value:.10g}"
