"""How large the mesh errors of the headline quantities may be: the key `accuracy`."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from axicfd import units
from axicfd.case import keys
from axicfd.case.keys import BadValue, Key, Problem, toml_key, toml_text

EXAMPLE = "0.5 %"


@dataclass(frozen=True)
class Measured:
    """A quantity whose mesh error can be asked for.

    part, name : as users write it, "stream" and "outlet_temperature"
    key        : in the tree of headline quantities        kind : of an amount of its error, a key of `units.KINDS`
    """

    part: str
    name: str
    key: str
    kind: str


HEADLINE = (
    Measured("stream", "outlet_temperature", "outlet_temperature_K", "temperature_difference"),
    Measured("stream", "pressure_drop", "pressure_drop_Pa", "pressure"),
    Measured("stream", "heat_gain", "heat_gain_W", "heat"),
    Measured("stream", "hottest_wetted_wall", "hottest_wetted_wall_K", "temperature_difference"),
    Measured("layer", "hottest", "hottest_K", "temperature_difference"),
    Measured("section", "heat_in", "heat_in_W", "heat"),
)
SENSOR = Measured("sensor", "temperature", "temperature_K", "temperature_difference")
MEASURED = (*HEADLINE, SENSOR)


@dataclass(frozen=True)
class Tolerance:
    """A largest mesh error: per cent of the quantity's scale, or an SI amount."""

    per_cent: float | None = None
    amount: float | None = None


def parts_of(name: str) -> tuple[str | None, Measured] | None:
    """(name of the stream, layer ... or None for all of them, what is measured), or None where it is neither.

    name : "outlet_temperature", or a path such as "stream.oil.outlet_temperature"
    """
    steps = name.split(".")
    found = next((m for m in MEASURED if m.name == steps[-1]), None)
    if found is None or (len(steps) > 1 and (len(steps) != 3 or steps[0] != found.part)):
        return None
    return (steps[1] if len(steps) == 3 else None), found


@dataclass(frozen=True)
class Accuracy(Key):
    """Per cent for all headline quantities, or a table of some of them with per cent or an amount for each."""

    def read(self, value: Any, in_file: bool) -> Tolerance | dict[str, Tolerance]:
        if isinstance(value, Tolerance):
            return value
        if not isinstance(value, Mapping):
            return self._read_one(value, "", in_file)
        if not value:
            raise self.refuse(value)
        problems: list[Problem] = []
        read: dict[str, Tolerance] = {}
        for name, entry in value.items():
            parts = parts_of(name)
            if parts is None:
                known = [m.name for m in MEASURED]
                near = keys.nearest(name.split(".")[-1], known)
                path = next((f"{m.part}.NAME.{m.name}" for m in MEASURED if m.name == near), "")
                instead = f'Write {near}, or "{path}" for one.' if near else f"There are: {', '.join(known)}."
                problems.append(Problem(entry, "names no quantity whose mesh error can be asked for", instead, (name,)))
                continue
            try:
                read[name] = self._read_one(entry, parts[1].kind, in_file)
            except BadValue as bad:
                problems += [Problem(p.value, p.allowed, p.instead, (name,), p.looks_like) for p in bad.problems]
        if problems:
            raise BadValue(*problems)
        return read

    def _read_one(self, value: Any, kind: str, in_file: bool) -> Tolerance:
        """kind : of the amounts that may stand instead of per cent; "" where only per cent may"""
        if isinstance(value, Tolerance):
            return value
        if not kind:
            wanted = f'must be per cent of each quantity\'s scale such as "{EXAMPLE}", or a table of quantities'
        else:
            sample = _sample(kind)
            wanted = f'must be per cent of the quantity\'s scale such as "{EXAMPLE}", or an amount such as "{sample}"'
        if isinstance(value, bool) or not isinstance(value, str | int | float):
            raise self.refuse(value, wanted)
        if isinstance(value, str):
            try:
                number, unit = units.split(value)
            except units.UnitError as bad:
                raise self.refuse(value, wanted, bad.instead) from None
            if not unit:
                raise self.refuse(value, "has no unit", f'Write "{value.strip()} %" if that is meant.')
            if unit == "%":
                return Tolerance(per_cent=self._positive(value, number, at_most=100.0))
            if not kind:
                raise self.refuse(value, wanted)
            try:
                amount = units.parse(value, kind)
            except units.UnitError as bad:
                raise BadValue(Problem(value, wanted, bad.instead, (), bad.looks_like)) from None
            return Tolerance(amount=self._positive(value, amount))
        if in_file:
            bare = repr(value)
            raise self.refuse(value, wanted, f'Write "{bare} %" if that is meant.' if math.isfinite(value) else "")
        if not math.isfinite(value):
            raise self.refuse(value, wanted)
        if kind:  # plain floats are SI
            return Tolerance(amount=self._positive(value, float(value)))
        return Tolerance(per_cent=self._positive(value, 100.0 * value, at_most=100.0))

    def _positive(self, value: Any, number: float, at_most: float = math.inf) -> float:
        if not 0.0 < number <= at_most:
            raise self.refuse(value, "must be greater than 0" + (" % and at most 100 %" if at_most < math.inf else ""))
        return number

    def write(self, value: Any, raw: Any = None) -> str:
        if isinstance(value, Tolerance):
            return _written(value, "", raw)
        raw = raw if isinstance(raw, Mapping) else {}
        entries = []
        for name, tolerance in value.items():
            parts = parts_of(name)
            assert parts is not None
            entries.append(f"{toml_key(name)} = {_written(tolerance, parts[1].kind, raw.get(name))}")
        return "{ " + ", ".join(entries) + " }"

    @property
    def allowed(self) -> str:
        names = ", ".join(m.name for m in MEASURED)
        return (
            f'must be per cent of each quantity\'s scale such as "{EXAMPLE}", or a table such as '
            f'{{ outlet_temperature = "0.1 K", pressure_drop = "1 %" }} of {names}, or of paths to one of them'
        )

    @property
    def example(self) -> str:
        return toml_text(EXAMPLE)


def _sample(kind: str) -> str:
    return {"pressure": "10 Pa", "heat": "0.1 W"}.get(kind) or units.KINDS[kind].example


def _written(tolerance: Tolerance, kind: str, raw: Any) -> str:
    if isinstance(raw, str):
        return toml_text(raw)
    if tolerance.per_cent is not None:
        return toml_text(f"{tolerance.per_cent!r} %")
    assert tolerance.amount is not None
    return toml_text(units.written(tolerance.amount, kind))
