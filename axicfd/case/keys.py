"""How a key of a case file is declared: what it means, what it accepts, its default, what to write instead.

One declaration feeds the check of a value, the sentence about a bad one, the listing of all keys, the written
case and the generated tests. A declaration is the metadata of an annotated field of the models:

    thickness: Annotated[float | None, Quantity("length", "thickness of the layer", above=0)] = None
"""

from __future__ import annotations

import difflib
import math
import tomllib
from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass, field
from typing import Any

from pydantic_core import CoreSchema, PydanticCustomError, core_schema

from axicfd import units
from axicfd.materials import laws

# The key of the validation context that says where values come from: in a file a bare number for a
# dimensional key is a mistake, in Python it is SI.
IN_FILE = "in_file"


@dataclass(frozen=True)
class Problem:
    """What is wrong with a value: `inner` leads from the key into a list or table, `value` stands there."""

    value: object
    allowed: str
    instead: str = ""
    inner: tuple[str | int, ...] = ()
    looks_like: tuple[str, ...] = ()  # kinds of quantity whose unit this is


@dataclass(frozen=True)
class WithKinds:
    """A table as written, with the kinds of the case's named quantities: they decide the units of its entries.

    kinds : None of a quantity that cannot be formed, which is found elsewhere
    """

    value: Any
    kinds: Mapping[str, str | None]

    @staticmethod
    def apart(value: Any) -> tuple[Any, Mapping[str, str | None]]:
        """(value as written, kinds) of a value that may come with kinds."""
        return (value.value, value.kinds) if isinstance(value, WithKinds) else (value, {})


class BadValue(Exception):
    """Raised by `Key.read`; carries every problem found in one value."""

    def __init__(self, *problems: Problem) -> None:
        self.problems = problems
        super().__init__("; ".join(problem.allowed for problem in problems))


@dataclass(frozen=True)
class Key:
    """A declared key. Subclasses say how a value is read and how it is written."""

    meaning: str
    instead: str = field(default="", kw_only=True)  # advice that goes with every bad value of this key

    def read(self, value: Any, in_file: bool) -> Any:
        """The value the models keep. Raises `BadValue`."""
        raise NotImplementedError

    def write(self, value: Any, raw: Any = None) -> str:
        """TOML text that reads back as `value`; `raw`, if given, is the value as the user gave it."""
        raise NotImplementedError

    @property
    def allowed(self) -> str:
        """What is accepted, as the end of a sentence that begins with the key: "must be ..."."""
        raise NotImplementedError

    @property
    def example(self) -> str:
        """TOML text of a value that is accepted."""
        raise NotImplementedError

    def refuse(self, value: Any, allowed: str = "", instead: str = "", inner: tuple[str | int, ...] = ()) -> BadValue:
        return BadValue(Problem(value, allowed or self.allowed, instead or self.instead, inner))

    def __get_pydantic_core_schema__(self, source: Any, handler: Any) -> CoreSchema:
        def validate(value: Any, info: Any) -> Any:
            try:
                return self.read(value, bool(info.context and info.context.get(IN_FILE)))
            except BadValue as bad:
                raise PydanticCustomError("bad_value", "{text}", {"text": str(bad), "bad": bad}) from None

        return core_schema.with_info_plain_validator_function(validate)


def toml_text(text: str) -> str:
    """A TOML basic string."""
    escaped = "".join(
        _ESCAPES.get(mark, mark if mark >= " " and mark != "\x7f" else f"\\u{ord(mark):04x}") for mark in text
    )
    return f'"{escaped}"'


def toml_value(text: str) -> Any:
    """What a word from outside a file means: TOML where it reads so, else the text itself ("4 g/s" without quotes)."""
    try:
        values = tomllib.loads(f"value = {text}")
    except tomllib.TOMLDecodeError:
        return text
    # A line break could smuggle in further keys; such text is no TOML value.
    return values["value"] if list(values) == ["value"] else text


_ESCAPES = {'"': '\\"', "\\": "\\\\", "\n": "\\n", "\t": "\\t", "\r": "\\r"}


def nearest(word: object, known: Iterable[str]) -> str | None:
    """The known name closest to a misspelt one, or None."""
    by_lower = {name.lower(): name for name in known}
    found = difflib.get_close_matches(str(word).lower().strip(), by_lower, 1, 0.6)
    return by_lower[found[0]] if found else None


@dataclass(frozen=True)
class _Bounded(Key):
    """Limits shared by quantities and numbers, in SI."""

    above: float | None = field(default=None, kw_only=True)
    at_least: float | None = field(default=None, kw_only=True)
    at_most: float | None = field(default=None, kw_only=True)

    def _limits(self, show: Callable[[float], str]) -> str:
        parts = []
        if self.above is not None:
            parts.append(f"greater than {show(self.above)}")
        if self.at_least is not None:
            parts.append(f"at least {show(self.at_least)}")
        if self.at_most is not None:
            parts.append(f"at most {show(self.at_most)}")
        return " and ".join(parts)

    def _outside(self, number: float) -> bool:
        return (
            (self.above is not None and not number > self.above)
            or (self.at_least is not None and not number >= self.at_least)
            or (self.at_most is not None and not number <= self.at_most)
        )


@dataclass(frozen=True)
class Quantity(_Bounded):
    """A number with a unit. `kind` is a key of `units.KINDS`; the model keeps the SI value."""

    kind: str = ""
    later_words: tuple[str, ...] = field(default=(), kw_only=True)  # words that are known but not open yet

    def read(self, value: Any, in_file: bool) -> float:
        """The value; that of a value with tolerance too, after its tolerance was read."""
        return self.read_tolerance(value, in_file).value if has_tolerance(value) else self._read_alone(value, in_file)

    def read_tolerance(self, value: Mapping[str, Any], in_file: bool) -> InputTolerance:
        """A value with its tolerance. Raises `BadValue`."""
        for name in value:
            if name not in ("value", *TOLERANCES):
                law = name in ("z", "temperature", "at", "exponent")
                allowed = "has a tolerance beside a table or law" if law else "is not a known key"
                instead = f"Only one value takes a tolerance: write {self._tolerance_example}."
                raise self.refuse(value if law else value[name], allowed, instead, () if law else (name,))
        given = [name for name in TOLERANCES if name in value]
        if len(given) > 1:
            raise self.refuse(value, "has both `plus_minus` (limits) and `std` (standard deviation)", "Keep one.")
        if "value" not in value:
            raise self.refuse(value, "needs `value`", f"Write {self._tolerance_example}.")
        found = None
        problems: list[Problem] = []
        try:
            found = self._read_alone(value["value"], in_file)
        except BadValue as bad:
            problems += [Problem(p.value, p.allowed, p.instead, ("value",), p.looks_like) for p in bad.problems]
        amount = value[given[0]]
        try:
            half = self._read_amount(amount, found, in_file)
        except BadValue as bad:
            problems += [Problem(p.value, p.allowed, p.instead, (given[0],), p.looks_like) for p in bad.problems]
        if problems or found is None:
            raise BadValue(*problems)
        tolerance = InputTolerance(found, half, given[0], self.kind)
        for end in tolerance.reach:
            if self._outside(end) or (self.kind == "temperature" and end <= 0):
                unit = units.split(value["value"])[1] if isinstance(value["value"], str) else units.KINDS[self.kind].si
                reached = f"{units.from_si(end, unit, self.kind):.4g} {unit}"
                least = self._limits(lambda limit: units.written(limit, self.kind)) or "above absolute zero"
                far = f" (so far lie {NORMAL_REACH:g} standard deviations)" if given[0] == "std" else ""
                allowed = f"reaches {reached}{far}; the value must be {least}"
                raise self.refuse(amount, allowed, "Give a smaller tolerance.", (given[0],))
        return tolerance

    def _read_amount(self, amount: Any, value: float | None, in_file: bool) -> float:
        """A half-width or standard deviation, SI; per cent are of the value."""
        kind = "temperature_difference" if self.kind == "temperature" else self.kind
        if isinstance(amount, str) and amount.strip().endswith("%"):
            if kind != self.kind:
                raise self.refuse(amount, "is per cent of a temperature, which depends on its zero", 'Write "2 K".')
            if value == 0.0:
                raise self.refuse(amount, "is per cent of a value of zero", "Write an amount with a unit.")
            try:
                per_cent = float(amount.strip()[:-1])
            except ValueError:
                raise BadValue(Problem(amount, 'must be an amount with a unit, or per cent such as "5 %"')) from None
            half = abs(value or math.inf) * per_cent / 100.0
        else:
            half = Quantity("", kind)._read_alone(amount, in_file)
        if not half > 0.0 or math.isnan(half):
            raise self.refuse(amount, "must be greater than 0", "Without a tolerance write the value alone.")
        return half

    def _read_alone(self, value: Any, in_file: bool) -> float:
        if isinstance(value, str) and value in self.later_words:
            raise self.refuse(value, "is not available yet", f"Write {self.example}.")
        if isinstance(value, str):
            try:
                number = units.parse(value, self.kind)
            except units.UnitError as bad:
                raise BadValue(Problem(value, bad.allowed, bad.instead or self.instead, (), bad.looks_like)) from None
        elif isinstance(value, bool) or not isinstance(value, int | float):
            raise self.refuse(value, f"must be {self._words}, written as text with a unit")
        elif in_file:
            if not math.isfinite(value):
                raise self.refuse(value, "must be a finite number with a unit")
            bare = repr(value)
            unit = units.split(units.KINDS[self.kind].example)[1]
            raise self.refuse(
                value,
                f"is not {units.KINDS[self.kind].words}: the unit is missing",
                f'Write "{bare} {unit}" if that is meant.',
            )
        else:
            number = float(value)
            if not math.isfinite(number):
                raise self.refuse(value, "must be finite")
        if self.kind == "temperature" and number <= 0:
            raise self.refuse(value, "must be above absolute zero (0 K, -273.15 degC)")
        if self._outside(number):
            raise self.refuse(value, f"must be {self._limits(lambda limit: units.written(limit, self.kind))}")
        return number

    def write(self, value: float, raw: Any = None) -> str:
        if has_tolerance(raw):
            return self._write_tolerance(self.read_tolerance(raw, False), raw)
        return toml_text(raw if isinstance(raw, str) else units.written(value, self.kind))

    def _write_tolerance(self, tolerance: InputTolerance, raw: Mapping[str, Any]) -> str:
        kind = "temperature_difference" if self.kind == "temperature" else self.kind
        amount = raw[tolerance.given]
        amount = amount if isinstance(amount, str) else units.written(tolerance.half_width, kind)
        value = Quantity("", self.kind).write(tolerance.value, raw["value"])
        return f"{{ value = {value}, {tolerance.given} = {toml_text(amount)} }}"

    @property
    def _tolerance_example(self) -> str:
        amount = "2 K" if self.kind == "temperature" else "5 %"
        return f"{{ value = {Quantity('', self.kind).example}, plus_minus = {toml_text(amount)} }}"

    @property
    def _words(self) -> str:
        kind = units.KINDS[self.kind]
        return f'{kind.words} such as "{kind.example}"'

    @property
    def allowed(self) -> str:
        limits = self._limits(lambda limit: units.written(limit, self.kind))
        return f"must be {self._words}" + (f", {limits}" if limits else "")

    @property
    def example(self) -> str:
        return toml_text(units.KINDS[self.kind].example)


TOLERANCES = "plus_minus", "std"
# A normal tolerance is taken as reaching so many standard deviations: 1 of 16 000 lies further away.
NORMAL_REACH = 4.0


@dataclass(frozen=True)
class InputTolerance:
    """How well an input is known, SI.

    half_width : with `plus_minus` the value lies within it, each place equally likely; with `std` the standard
                 deviation of a normal distribution
    given      : "plus_minus" or "std"
    kind       : of the value, a key of `units.KINDS`
    """

    value: float
    half_width: float
    given: str
    kind: str

    @property
    def std(self) -> float:
        """Standard deviation; that of a uniform distribution is its half-width over the root of 3."""
        return self.half_width if self.given == "std" else self.half_width / math.sqrt(3.0)

    @property
    def kind_of_width(self) -> str:
        """Of the half-width."""
        return "temperature_difference" if self.kind == "temperature" else self.kind

    @property
    def reach(self) -> tuple[float, float]:
        """The lowest and the highest value it is taken to have."""
        far = self.half_width * (NORMAL_REACH if self.given == "std" else 1.0)
        return self.value - far, self.value + far


def has_tolerance(value: Any) -> bool:
    """Whether a value is given with its tolerance, { value = ..., plus_minus = ... } or std."""
    return isinstance(value, Mapping) and any(name in value for name in TOLERANCES)


def _read_entry(entry: Key, value: Any, in_file: bool) -> Any:
    """A value inside a list or a law; only inputs that stand alone take a tolerance."""
    if has_tolerance(value):
        raise entry.refuse(value, "has a tolerance inside a list or law", "Only an input that stands alone takes one.")
    return entry.read(value, in_file)


@dataclass(frozen=True)
class Number(_Bounded):
    """A number without a unit; `whole` for counts."""

    whole: bool = field(default=False, kw_only=True)
    sample: float = field(default=1.0, kw_only=True)

    def read(self, value: Any, in_file: bool) -> float | int:
        if isinstance(value, bool) or not isinstance(value, int | float):
            raise self.refuse(
                value, "", "Write it without quotes and without a unit." if isinstance(value, str) else ""
            )
        if not math.isfinite(value) or self._outside(value) or (self.whole and value != int(value)):
            raise self.refuse(value)
        return int(value) if self.whole else float(value)

    def write(self, value: float, raw: Any = None) -> str:
        return str(value) if self.whole else repr(float(value))

    @property
    def allowed(self) -> str:
        limits = self._limits(lambda limit: f"{limit:g}")
        return f"must be a {'whole ' if self.whole else ''}number without a unit" + (f", {limits}" if limits else "")

    @property
    def example(self) -> str:
        return self.write(int(self.sample) if self.whole else self.sample)


@dataclass(frozen=True)
class Choice(Key):
    """One of a few words."""

    words: tuple[str, ...] = ()

    def read(self, value: Any, in_file: bool) -> str:
        if value in self.words and isinstance(value, str):
            return value
        near = nearest(value, self.words) if isinstance(value, str) else None
        raise self.refuse(value, "", f'Write "{near}".' if near else "")

    def write(self, value: str, raw: Any = None) -> str:
        return toml_text(value)

    @property
    def allowed(self) -> str:
        return "must be " + " or ".join(f'"{word}"' for word in self.words)

    @property
    def example(self) -> str:
        return toml_text(self.words[0])


@dataclass(frozen=True)
class Switch(Key):
    """true or false."""

    def read(self, value: Any, in_file: bool) -> bool:
        if isinstance(value, bool):
            return value
        raise self.refuse(value, "", "Write it without quotes." if isinstance(value, str) else "")

    def write(self, value: bool, raw: Any = None) -> str:
        return "true" if value else "false"

    allowed = "must be true or false"
    example = "true"


@dataclass(frozen=True)
class Text(Key):
    """Free text on one line, or, with `name`, a name: letters, digits, space, - and _."""

    name: bool = field(default=False, kw_only=True)
    sample: str = field(default="tube", kw_only=True)

    def read(self, value: Any, in_file: bool) -> str:
        if not isinstance(value, str):
            raise self.refuse(value)
        if self.name and not is_name(value):
            raise self.refuse(value)
        if not self.name and ("\n" in value or "\r" in value):
            raise self.refuse(value)
        return value

    def write(self, value: str, raw: Any = None) -> str:
        return toml_text(value)

    @property
    def allowed(self) -> str:
        return "must be a name of letters, digits, spaces, - and _" if self.name else "must be text on one line"

    @property
    def example(self) -> str:
        return toml_text(self.sample)


def is_name(text: str) -> bool:
    """Whether a user may call something so: it becomes part of paths and file names."""
    return (
        bool(text)
        and text == text.strip()
        and all(mark.isascii() and (mark.isalnum() or mark in " -_") for mark in text)
    )


@dataclass(frozen=True)
class Material(Text):
    """The name of a fluid or solid, the user's own or built-in (such as "ethylene glycol 50 % by mass")."""

    def read(self, value: Any, in_file: bool) -> str:
        if not isinstance(value, str) or not value.strip():
            raise self.refuse(value)
        return value

    allowed = "must be the name of a material"


@dataclass(frozen=True)
class ZTable:
    """A value along a section, straight between points; SI, z from the section's start."""

    z: tuple[float, ...]
    value: tuple[float, ...]

    def at(self, z: float) -> float:
        """The value at z, held beyond both ends."""
        if z <= self.z[0]:
            return self.value[0]
        for z0, z1, v0, v1 in zip(self.z, self.z[1:], self.value, self.value[1:], strict=False):
            if z <= z1:
                return v0 + (v1 - v0) * (z - z0) / (z1 - z0)
        return self.value[-1]


def read_columns(key: Key, value: dict, columns: Mapping[str, Key], in_file: bool) -> dict[str, tuple]:
    """Read a table of equally long lists, one declared entry key per column; collects every problem."""
    problems: list[Problem] = []
    read: dict[str, tuple] = {}
    for name in value:
        if name not in columns:
            near = nearest(name, columns)
            problems.append(Problem(value[name], "is not a known key", f"Write `{near}`." if near else "", (name,)))
    for name, entry in columns.items():
        column = value.get(name)
        if column is None:
            problems.append(Problem(value, f"needs `{name}`", f"Write {name} = [{entry.example}, ...]."))
            continue
        if not isinstance(column, list | tuple):
            problems.append(Problem(column, "must be a list", f"Write {name} = [{entry.example}, ...].", (name,)))
            continue
        entries = []
        for i, item in enumerate(column):
            try:
                entries.append(_read_entry(entry, item, in_file))
            except BadValue as bad:
                problems += [
                    Problem(p.value, p.allowed, p.instead, (name, i, *p.inner), p.looks_like) for p in bad.problems
                ]
        read[name] = tuple(entries)
    if problems:
        raise BadValue(*problems)
    lengths = {name: len(column) for name, column in read.items()}
    if len(set(lengths.values())) > 1:
        counts = " and ".join(f"{count} in `{name}`" for name, count in lengths.items())
        raise key.refuse(value, f"must have equally many entries in each list: {counts}")
    if min(lengths.values()) < 2:
        raise key.refuse(
            value,
            "must have at least two entries in each list",
            "For one value write it alone, without a table.",
        )
    return read


def _first_step_back(column: tuple[float, ...]) -> int | None:
    """Index of the first entry that is not above the one before it."""
    return next((i for i in range(1, len(column)) if column[i] <= column[i - 1]), None)


def _write_list(key: Key, values: tuple, raw: Any) -> str:
    raws = raw if isinstance(raw, list | tuple) and len(raw) == len(values) else [None] * len(values)
    return "[" + ", ".join(key.write(value, entry) for value, entry in zip(values, raws, strict=True)) + "]"


@dataclass(frozen=True)
class Along(Quantity):
    """A quantity that may also be a table along the section, { z = [...], value = [...] }."""

    def read(self, value: Any, in_file: bool) -> Any:
        if isinstance(value, ZTable):
            return value
        if not isinstance(value, dict) or has_tolerance(value):
            return super().read(value, in_file)
        one = Quantity(self.meaning, self.kind, above=self.above, at_least=self.at_least, at_most=self.at_most)
        z = Quantity("distance from the section's start", "length", at_least=0)
        read = read_columns(self, value, {"z": z, "value": one}, in_file)
        back = _first_step_back(read["z"])
        if back is not None:
            again = value["z"][back]
            if read["z"][back] == read["z"][back - 1]:
                raise self.refuse(
                    again,
                    "stands twice: a table along z cannot jump",
                    "Make it two sections, which meet at the jump.",
                    ("z", back),
                )
            raise self.refuse(again, "must be larger than the z before it", inner=("z", back))
        return ZTable(read["z"], read["value"])

    def write(self, value: Any, raw: Any = None) -> str:
        if not isinstance(value, ZTable):
            return super().write(value, raw)
        raw = raw if isinstance(raw, dict) else {}
        z = _write_list(Quantity("", "length"), value.z, raw.get("z"))
        return f"{{ z = {z}, value = {_write_list(Quantity('', self.kind), value.value, raw.get('value'))} }}"


@dataclass(frozen=True)
class Property(Quantity):
    """A property of a material: a constant, a table of temperature, or an exponential law of temperature."""

    logarithmic: bool = field(default=False, kw_only=True)  # interpolate ln(value) in a table

    def read(self, value: Any, in_file: bool) -> Any:
        if isinstance(value, laws.Constant | laws.Table | laws.Exponential):
            return value
        if not isinstance(value, dict) or has_tolerance(value):
            return laws.Constant(super().read(value, in_file))
        one = Quantity(self.meaning, self.kind, above=self.above, at_least=self.at_least)
        temperature = Quantity("temperature", "temperature")
        if "at" in value or "exponent" in value:
            return self._read_exponential(value, one, temperature, in_file)
        if "temperature" not in value and "value" not in value:
            raise self.refuse(
                value,
                "must be a constant or a law of temperature",
                f"Write {self.example}, or {self._table_example}.",
            )
        read = read_columns(self, value, {"temperature": temperature, "value": one}, in_file)
        back = _first_step_back(read["temperature"])
        if back is not None:
            raise self.refuse(
                value["temperature"][back],
                "must be higher than the temperature before it",
                inner=("temperature", back),
            )
        return laws.Table(read["temperature"], read["value"], logarithmic=self.logarithmic)

    def _read_exponential(self, value: dict, one: Quantity, temperature: Quantity, in_file: bool) -> Any:
        entries = {"at": temperature, "value": one, "exponent": Quantity("exponent", "per_kelvin")}
        problems: list[Problem] = []
        read: dict[str, float] = {}
        for name in value:
            if name not in entries:
                near = nearest(name, entries)
                problems.append(Problem(value[name], "is not a known key", f"Write `{near}`." if near else "", (name,)))
        for name, entry in entries.items():
            if name not in value:
                problems.append(Problem(value, f"needs `{name}`", f"Write {name} = {entry.example}."))
                continue
            try:
                read[name] = _read_entry(entry, value[name], in_file)
            except BadValue as bad:
                problems += [
                    Problem(p.value, p.allowed, p.instead, (name, *p.inner), p.looks_like) for p in bad.problems
                ]
        if problems:
            raise BadValue(*problems)
        return laws.Exponential(read["at"], read["value"], read["exponent"])

    @property
    def _table_example(self) -> str:
        return f'{{ temperature = ["20 degC", "50 degC"], value = [{self.example}, {self.example}] }}'

    def write(self, value: Any, raw: Any = None) -> str:
        one = Quantity("", self.kind)
        if isinstance(value, laws.Constant):
            return one.write(value.value, raw)
        raw = raw if isinstance(raw, dict) else {}
        if isinstance(value, laws.Exponential):
            at = Quantity("", "temperature").write(value.at, raw.get("at"))
            exponent = Quantity("", "per_kelvin").write(value.exponent, raw.get("exponent"))
            return f"{{ at = {at}, value = {one.write(value.value, raw.get('value'))}, exponent = {exponent} }}"
        temperature = _write_list(Quantity("", "temperature"), value.temperature, raw.get("temperature"))
        return f"{{ temperature = {temperature}, value = {_write_list(one, value.value, raw.get('value'))} }}"


@dataclass(frozen=True)
class ListOf(Key):
    """A list whose entries are all declared by one key."""

    entry: Key = field(default_factory=lambda: Key(""))

    def read(self, value: Any, in_file: bool) -> tuple:
        if not isinstance(value, list | tuple):
            raise self.refuse(value, "", f"Write [{self.entry.example}].")
        problems: list[Problem] = []
        entries = []
        for i, item in enumerate(value):
            try:
                entries.append(_read_entry(self.entry, item, in_file))
            except BadValue as bad:
                problems += [Problem(p.value, p.allowed, p.instead, (i, *p.inner), p.looks_like) for p in bad.problems]
        if problems:
            raise BadValue(*problems)
        return tuple(entries)

    def write(self, value: tuple, raw: Any = None) -> str:
        return _write_list(self.entry, value, raw)

    @property
    def allowed(self) -> str:
        return "must be a list of values, each of which " + self.entry.allowed

    @property
    def example(self) -> str:
        return f"[{self.entry.example}]"


@dataclass(frozen=True)
class PerName(Key):
    """A small table NAME -> value, such as heat per layer."""

    entry: Key = field(default_factory=lambda: Key(""))
    name: str = field(default="NAME", kw_only=True)

    def read(self, value: Any, in_file: bool) -> dict[str, Any]:
        if not isinstance(value, dict):
            raise self.refuse(value, "", f"Write {self.example}.")
        problems: list[Problem] = []
        entries = {}
        for name, item in value.items():
            try:
                entries[name] = self.entry.read(item, in_file)
            except BadValue as bad:
                problems += [
                    Problem(p.value, p.allowed, p.instead, (name, *p.inner), p.looks_like) for p in bad.problems
                ]
        if problems:
            raise BadValue(*problems)
        return entries

    def write(self, value: dict[str, Any], raw: Any = None) -> str:
        raw = raw if isinstance(raw, dict) else {}
        return (
            "{ "
            + ", ".join(f"{toml_key(name)} = {self.entry.write(item, raw.get(name))}" for name, item in value.items())
            + " }"
        )

    @property
    def allowed(self) -> str:
        return f"must be a table of {self.name} = value, where each value " + self.entry.allowed

    @property
    def example(self) -> str:
        return f"{{ {self.name} = {self.entry.example} }}"


def toml_key(name: str) -> str:
    """A name as a TOML key, quoted where it needs to be."""
    return (
        name if name and all(mark.isascii() and (mark.isalnum() or mark in "-_") for mark in name) else toml_text(name)
    )
