"""Which unit each kind of quantity is shown in: the one the user wrote, otherwise degC, Pa, W, m."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from typing import Any

from axicfd import units

DEFAULTS = {
    "temperature": "degC",
    "pressure": "Pa",
    "heat": "W",
    "length": "m",
    "diameter": "mm",
    "mass_flow": "g/s",
    "velocity": "m/s",
    "heat_flux": "W/m^2",
}
# An outlet pressure may be the only pressure a case names; in atmospheres a pressure drop would read badly.
_UNFIT = {"pressure": {"atm"}}


@dataclass(frozen=True)
class Shown:
    """kind -> unit text. The kind "" stands for SI values that are shown as they are, as those of other kinds are."""

    units: dict[str, str]

    def unit(self, kind: str) -> str:
        """The unit's text as written for people, "" for the kind ""."""
        if kind == "temperature_difference":
            return self.difference_unit("temperature")
        return self._written(kind).replace("^2", "²").replace("^3", "³") if kind else ""

    def value(self, kind: str, si: Any) -> Any:
        """SI numbers (float or array; temperatures absolute) in the shown unit."""
        if kind == "temperature_difference":
            return self.difference("temperature", si)
        return units.convert(si, self._written(kind), _parsed_as(kind)) if kind else si

    def _written(self, kind: str) -> str:
        kind = "pressure" if kind == "pressure_difference" else kind
        return self.units.get(kind) or units.KINDS[kind].si

    def difference(self, kind: str, si: Any) -> Any:
        """The same for a difference or a half-width: no zero point."""
        return self.value(kind, si) - self.value(kind, 0.0 * si) if kind else si

    def difference_unit(self, kind: str) -> str:
        """Of a difference: degC and K are alike there."""
        unit = self.unit(kind)
        return {"degC": "K"}.get(unit, unit)


def shown_units(case: Any) -> Shown:
    """The units of a case: per kind the first unit the user wrote in a matching place."""
    chosen = dict(DEFAULTS)
    for kind in chosen:
        for path in _places(case, kind):
            unit = case.unit_of(path)
            if unit and unit not in _UNFIT.get(kind, ()) and _fits(unit, kind):
                chosen[kind] = unit
                break
    return Shown(chosen)


def _places(case: Any, kind: str) -> Iterator[str]:
    """Dotted paths where a user may have written a quantity of this kind, the most telling first."""
    streams = [f"stream.{name}" for name in case.stream]
    sections = [f"section.{section.name}" for section in case.section]
    outsides = [f"{section}.outside" for section in sections]
    layers = case.layer or tuple(layer for section in case.section for layer in section.layer or ())
    if kind == "temperature":
        yield from (f"{stream}.inlet_temperature" for stream in streams)
    elif kind == "pressure":
        yield from (f"{stream}.{key}" for key in ("pressure_drop", "outlet_pressure") for stream in streams)
    elif kind == "heat":
        yield from (f"{outside}.heat" for outside in outsides)
    elif kind == "heat_flux":
        yield from (f"{outside}.heat_flux" for outside in outsides)
    elif kind == "mass_flow":
        yield from (f"{stream}.mass_flow" for stream in streams)
    elif kind == "velocity":
        yield from (f"{stream}.mean_velocity" for stream in streams)
    elif kind == "length":
        # The ruler spans the tube: the longest section's unit suits it best.
        for section in sorted(case.section, key=lambda section: -section.length):
            yield f"section.{section.name}.length"
    elif kind == "diameter":
        for layer in layers:
            name = layer.name or layer.stream or layer.solid
            yield from (f"layer.{name}.{key}" for key in ("diameter", "outer_diameter", "thickness"))


def _fits(unit: str, kind: str) -> bool:
    try:
        units.convert(0.0, unit, _parsed_as(kind))
    except units.UnitError:
        return False
    return True


def _parsed_as(kind: str) -> str:
    return "length" if kind == "diameter" else kind
