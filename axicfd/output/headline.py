"""The headline of a result: which quantities are shown, in which order, and how their numbers look."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import Any

from axicfd.glossary import Reported, named_row, quantity_name, summary_row
from axicfd.output.shown import Shown
from axicfd.results.uncertainty import EXACT

STREAM_ROWS = (
    "outlet_temperature_K",
    "outlet_axis_temperature_K",
    "outlet_wall_temperature_K",
    "pressure_drop_Pa",
    "heat_gain_W",
    "hottest_wetted_wall_K",
)
MORE_STREAM_ROWS = (  # when everything is asked for
    "coldest_wetted_wall_K",
    "hydrostatic_Pa",
    "largest_wall_shear_stress_Pa",
    "thermal_resistance_K_W",
    "mean_residence_s",
    "hydrodynamic_entry_length_m",
    "thermal_entry_length_m",
    "mass_flow_kg_s",
    "mean_velocity_m_s",
    "reynolds",
    "largest_reynolds",
    "prandtl",
    "peclet",
    "graetz",
    "heated_length_m",
)
FLOW = "mass_flow_kg_s"  # shown in the short table where it is found, from a pressure drop, and so has a mesh error
MOST_DIGITS = 6  # of a value with a mesh error
FINEST_TEMPERATURE = -4  # decade of the last digit of a temperature with a mesh error

LAYER_ROWS = ("hottest_K",)
SECTION_ROWS = ("heat_in_W",)
SENSOR_ROWS = ("temperature_K",)


@dataclass(frozen=True)
class Line:
    """One shown quantity.

    owner    : "syrup", "section jacket", "sensor far"
    path     : keys in the summary's tree
    row      : its row of the glossary
    value    : SI value, or None
    text     : the value with its unit, or why there is none
    bar      : "±0.05 (mesh)", or "" where no mesh error is known
    place    : "at 1.4 m" for an extreme value, or ""
    """

    owner: str
    path: tuple[str, ...]
    row: Reported
    value: Any
    text: str
    bar: str
    place: str

    @property
    def name(self) -> str:
        """Dotted path without unit suffix, as users name quantities."""
        if self.path[0] == "quantity":
            return ".".join(self.path[:2])
        return ".".join((*self.path[:-1], quantity_name(self.path[-1])))


def headline(summary: dict[str, Any], shown: Shown, everything: bool = False) -> Iterator[Line]:
    """The lines of the headline table.

    Only when everything is asked for: quantities without a value, and sections that exchange no heat.
    """
    yield from _of_parts(summary, shown, everything, "stream", STREAM_ROWS + (MORE_STREAM_ROWS if everything else ()))
    yield from _of_parts(summary, shown, everything, "layer", LAYER_ROWS)
    for name, heat in ((summary.get("ledger") or {}).get("generated") or {}).items():
        if _has_value(heat) and heat != 0.0:
            yield _line(summary, shown, name, ("ledger", "generated", name), heat, summary_row("generated_W"))
    yield from _of_parts(summary, shown, everything, "section", SECTION_ROWS)
    yield from _of_parts(summary, shown, everything, "sensor", SENSOR_ROWS)
    for name, entry in (summary.get("quantity") or {}).items():
        key = next(key for key in entry if quantity_name(key) == "value")
        if everything or _has_value(entry[key]):
            row = named_row(key, entry["kind"])
            yield _line(summary, shown, f"quantity {name}", ("quantity", name, key), entry[key], row)


def _of_parts(
    summary: dict[str, Any], shown: Shown, everything: bool, kind: str, keys: tuple[str, ...]
) -> Iterator[Line]:
    for name, entries in (summary.get(kind) or {}).items():
        owner = f"{kind} {name}" if kind in ("section", "sensor") else name
        how = _entry(summary, ("numerical_uncertainty", "rule", kind, name, FLOW))
        is_found = how is not None and how != EXACT
        for key in (FLOW, *keys) if is_found and not everything else keys:
            idle = kind == "section" and entries.get(key) == 0.0
            if key in entries and (everything or (_has_value(entries[key]) and not idle)):
                yield _line(summary, shown, owner, (kind, name, key), entries[key], summary_row(key))


def number(value: float, digits: int = 4) -> str:
    """A number with so many significant digits, without an exponent where that is readable."""
    if value == 0:
        return "0"
    if not 1e-3 <= abs(value) < 1e6:
        return f"{value:.{digits - 1}e}"
    rounded = float(f"{value:.{digits}g}")
    return f"{rounded:.0f}" if abs(rounded) >= 10 ** (digits - 1) else f"{rounded:.{digits}g}"


def amount(shown: Shown, kind: str, value: float, unit: str = "") -> str:
    """A quantity as printed, with its unit: a temperature to a hundredth, the rest to four digits."""
    in_unit = float(shown.value(kind, value))
    text = f"{in_unit:.2f}" if kind == "temperature" else number(in_unit)
    return f"{text} {shown.unit(kind) if kind else unit}".rstrip()


def with_bar(value: float, half_width: float, finest: int | None = None) -> tuple[str, str]:
    """A value and the half-width of its mesh error, both to the second digit of the half-width.

    finest : decade of the last digit that may be shown; by default that of the value's sixth digit
    Half-widths are rounded up, so that what is printed still holds the limit.
    """
    if finest is None:
        finest = (_decade(value) if value else _decade(half_width)) - MOST_DIGITS + 1
    last = max(_decade(half_width) - 1, finest)
    bar = math.ceil(half_width / 10.0**last - 1e-9) * 10.0**last
    if not 1e-3 <= max(abs(value), bar) < 1e6:
        return f"{value:.{max(_decade(value) - last, 0)}e}" if value else "0", number(bar, 2)
    bar_text = f"{bar:.{max(-last, 0)}f}"
    if "." in bar_text:
        bar_text = bar_text.rstrip("0").rstrip(".")
    decimals = len(bar_text.partition(".")[2])
    return f"{round(value, -last if last > 0 else decimals):.{decimals}f}", bar_text


def number_with_bar(value: float, half_width: float | None, finest: int | None = None, digits: int = 4) -> str:
    """`41.30 ±0.05` as `with_bar` writes them; a number of so many digits where there is no half-width."""
    return " ±".join(with_bar(value, half_width, finest)) if half_width else number(value, digits)


def amount_with_bar(shown: Shown, kind: str, value: float, half_width: float | None, unit: str = "") -> str:
    """`41.30 ±0.05 degC`; as `amount` where there is no half-width."""
    if not half_width:
        return amount(shown, kind, value, unit)
    finest = FINEST_TEMPERATURE if kind == "temperature" else None
    text = number_with_bar(float(shown.value(kind, value)), float(shown.difference(kind, half_width)), finest)
    return f"{text} {shown.unit(kind) if kind else unit}".rstrip()


def _decade(value: float) -> int:
    return math.floor(math.log10(abs(value)))


def _line(summary: dict[str, Any], shown: Shown, owner: str, path: tuple[str, ...], value: Any, row: Reported) -> Line:
    half = _entry(summary.get("numerical_uncertainty"), path)
    bar = ""
    if _has_value(value) and _has_value(half) and half > 0.0:
        finest = FINEST_TEMPERATURE if row.kind == "temperature" else None
        width = float(shown.difference(row.kind, half))
        text, bar = with_bar(float(shown.value(row.kind, value)), width, finest)
        text = f"{text} {shown.unit(row.kind) if row.kind else row.unit}".rstrip()
        bar = f"±{bar} (mesh)"
    elif _has_value(value):
        text = amount(shown, row.kind, value, row.unit)
        bar = "±0 (mesh)" if half == 0.0 else ""
    else:
        why = _entry(summary, (*path[:-1], "why", path[-1])) or _entry(
            summary, (*path[:-1], "why", quantity_name(path[-1]))
        )
        text = f"none ({why})" if why else "none"
    z = _entry(summary, (*path[:-1], f"{quantity_name(path[-1])}_z_m"))
    place = f"at {amount(shown, 'length', z)}" if _has_value(z) else ""
    return Line(owner, path, row, value, text, bar, place)


def _has_value(value: Any) -> bool:
    """Whether there is a number; nan stands for none inside a Result and becomes null in its file."""
    return value is not None and value == value


def _entry(tree: Any, path: Sequence[str]) -> Any:
    for key in path:
        if not isinstance(tree, dict) or key not in tree:
            return None
        tree = tree[key]
    return tree
