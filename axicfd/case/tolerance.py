"""How large the mesh errors of reported quantities may be: the key `accuracy`."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any

from axicfd import units
from axicfd.case import keys, quantities
from axicfd.case.keys import BadValue, Key, Problem, WithKinds, toml_key, toml_text
from axicfd.glossary import quantity_name

EXAMPLE = "0.5 %"
FOLLOWS = "it follows from the inputs alone"


@dataclass(frozen=True)
class Tolerance:
    """A largest mesh error: per cent of the quantity's scale, or an SI amount. kind : of that amount."""

    per_cent: float | None = None
    amount: float | None = None
    kind: str = field(default="", compare=False)


def kind_asked(name: str, named: Mapping[str, str | None]) -> str | None:
    """The kind of what `accuracy` asks for: a name such as "outlet_temperature", or a path to one quantity.

    named : kinds of the case's named combinations
    None where it is no quantity whose mesh error can be asked for; "" of a pure number.
    """
    if "." in name:
        kind = None if from_inputs(name) else quantities.kind_of(name, named)
        return None if kind is None else quantities.difference_of(kind)
    found = quantities.key_named(name)
    if found is None or found[1] in quantities.FROM_INPUTS:
        return None
    return quantities.difference_of(quantities.kind_of_key(found[1]))


def from_inputs(name: str) -> bool:
    """Whether a name or path is that of a quantity on which no mesh acts."""
    found = quantities.key_named(name.rpartition(".")[2])
    return not name.startswith(f"{quantities.NAMED}.") and found is not None and found[1] in quantities.FROM_INPUTS


@dataclass(frozen=True)
class Accuracy(Key):
    """Per cent for all headline quantities, or a table of some of them with per cent or an amount for each."""

    def read(self, value: Any, in_file: bool) -> Tolerance | dict[str, Tolerance]:
        value, named = WithKinds.apart(value)
        if isinstance(value, Tolerance):
            return value
        if not isinstance(value, Mapping):
            return self._read_one(value, None, in_file)
        if not value:
            raise self.refuse(value)
        problems: list[Problem] = []
        read: dict[str, Tolerance] = {}
        for name, entry in value.items():
            kind = kind_asked(name, named)
            if kind is None and quantities.combination_in(name) in named:
                read[name] = Tolerance()  # what is wrong with the combination is said where it stands
                continue
            if kind is None:
                allowed = "names no quantity whose mesh error can be asked for"
                if from_inputs(name):
                    allowed += f": {FOLLOWS}"
                problems.append(Problem(entry, allowed, _advice(name, named), (name,)))
                continue
            try:
                read[name] = self._read_one(entry, kind, in_file)
            except BadValue as bad:
                problems += [Problem(p.value, p.allowed, p.instead, (name,), p.looks_like) for p in bad.problems]
        if problems:
            raise BadValue(*problems)
        return read

    def _read_one(self, value: Any, kind: str | None, in_file: bool) -> Tolerance:
        """kind : of the amounts that may stand instead of per cent; None or "" where only per cent may"""
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
            return Tolerance(amount=self._positive(value, amount), kind=kind)
        if in_file:
            bare = repr(value)
            raise self.refuse(value, wanted, f'Write "{bare} %" if that is meant.' if math.isfinite(value) else "")
        if not math.isfinite(value):
            raise self.refuse(value, wanted)
        if kind:  # plain floats are SI
            return Tolerance(amount=self._positive(value, float(value)), kind=kind)
        return Tolerance(per_cent=self._positive(value, 100.0 * value, at_most=100.0))

    def _positive(self, value: Any, number: float, at_most: float = math.inf) -> float:
        if not 0.0 < number <= at_most:
            raise self.refuse(value, "must be greater than 0" + (" % and at most 100 %" if at_most < math.inf else ""))
        return number

    def write(self, value: Any, raw: Any = None) -> str:
        if isinstance(value, Tolerance):
            return _written(value, raw)
        raw = raw if isinstance(raw, Mapping) else {}
        entries = [f"{toml_key(name)} = {_written(tolerance, raw.get(name))}" for name, tolerance in value.items()]
        return "{ " + ", ".join(entries) + " }"

    @property
    def allowed(self) -> str:
        return (
            f'must be per cent of each quantity\'s scale such as "{EXAMPLE}", or a table such as '
            f'{{ outlet_temperature = "0.1 K", pressure_drop = "1 %" }} of {", ".join(_OFTEN)} '
            "or another result, or of paths to one of them"
        )

    @property
    def example(self) -> str:
        return toml_text(EXAMPLE)


_OFTEN = [quantity_name(key) for part in quantities.HEADLINE.values() for key in part]


def _advice(name: str, named: Mapping[str, str | None]) -> str:
    """What to write instead of a name or path that cannot be asked for."""
    known = [name for spelled in quantities.SPELLINGS.values() for name, key in spelled.items() if name != key]
    known = [name for name in known if not from_inputs(name)]
    if name.startswith(f"{quantities.NAMED}."):
        return quantities.advice(name, named)
    near = keys.nearest(name.rpartition(".")[2], known)
    return f'Write {near}, or "{_path(near)}" for one.' if near else f"There are: {', '.join(known)}."


def _path(name: str) -> str:
    found = quantities.key_named(name)
    assert found is not None
    return f"{found[0]}.NAME.{name}" + (".STREAM" if found[1] in quantities.PER_STREAM else "")


def _sample(kind: str) -> str:
    return {"heat": "0.1 W"}.get(kind) or units.KINDS[kind].example


def _written(tolerance: Tolerance, raw: Any) -> str:
    if isinstance(raw, str):
        return toml_text(raw)
    if tolerance.per_cent is not None:
        return toml_text(f"{tolerance.per_cent!r} %")
    assert tolerance.amount is not None
    return toml_text(units.written(tolerance.amount, tolerance.kind))
