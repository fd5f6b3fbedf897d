"""The tables [limits] and [accept]: what must hold of an answer, and which cautions may stand."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any

from axicfd.case import keys, quantities
from axicfd.case.keys import BadValue, Key, Number, PerName, Problem, Quantity, Text, WithKinds, toml_key, toml_text

BOUNDS = ("below", "above")

# Code of every caution -> what it is about. The rules are in results/cautions.py.
CAUTIONS = {
    "not-converged": "the iteration stopped above the residual asked for",
    "balance": "mass or heat that is missing from the balance",
    "mesh-error": "an accuracy asked for that was not reached",
    "reynolds": "flow that may not be laminar",
    "peclet": "a stream that conducts more heat than it carries",
    "gas-density": "a gas whose density changes",
    "reverse-flow": "fluid that comes in through the outlet",
    "outlet-not-developed": "flow or heat that the outlet condition cuts off",
    "warm-end": "heat that would run on past an end of the tube",
    "property-range": "property data that are left",
    "copper-kind": "a name that means two metals",
    "free-convection": "buoyancy, which is left out",
    "phase-change": "boiling, freezing or condensing, which is not checked",
}
NEVER_ACCEPTED = ("not-converged",)  # an exit status of its own; no reason makes such numbers an answer
ACCEPTABLE = tuple(code for code in CAUTIONS if code not in NEVER_ACCEPTED)


@dataclass(frozen=True)
class Limit:
    """Bounds of one quantity, SI (temperatures absolute); None where there is none. kind : of the quantity."""

    below: float | None = None
    above: float | None = None
    kind: str = ""


@dataclass(frozen=True)
class Limits(Key):
    """A table of paths of quantities, each with an upper or a lower bound, or both."""

    def read(self, value: Any, in_file: bool) -> dict[str, Limit]:
        table, kinds = WithKinds.apart(value)
        if not isinstance(table, Mapping):
            raise self.refuse(table, "", f"Write [limits] and under it {_EXAMPLE}.")
        problems: list[Problem] = []
        read: dict[str, Limit] = {}
        for path, entry in table.items():
            kind = quantities.kind_of(path, kinds)
            if kind is None and quantities.combination_in(path) in kinds:
                read[path] = Limit()  # what is wrong with the combination is said where it stands
                continue
            if kind is None:
                problems.append(
                    Problem(entry, "names no quantity that can be limited", quantities.advice(path, kinds), (path,))
                )
                continue
            try:
                read[path] = _read_one(entry, kind, in_file)
            except BadValue as bad:
                problems += [
                    Problem(p.value, p.allowed, p.instead, (path, *p.inner), p.looks_like) for p in bad.problems
                ]
        if problems:
            raise BadValue(*problems)
        return read

    def pairs(self, value: Mapping[str, Limit], raw: Any = None) -> list[str]:
        """`key = value` of every entry; in SI units where `raw` does not hold the text the user gave."""
        raw = raw if isinstance(raw, Mapping) else {}
        return [f"{toml_key(path)} = {_written(limit, raw.get(path))}" for path, limit in value.items()]

    def write(self, value: Mapping[str, Limit], raw: Any = None) -> str:
        return "{ " + ", ".join(self.pairs(value, raw)) + " }"

    @property
    def allowed(self) -> str:
        return f"must be a table of paths of quantities, each with `below`, `above` or both, such as {_EXAMPLE}"

    @property
    def example(self) -> str:
        return f"{{ {_EXAMPLE} }}"


_EXAMPLE = '"stream.oil.hottest_wetted_wall" = { below = "90 degC" }'


def _key(kind: str) -> Key:
    return Quantity("", kind) if kind else Number("")


def _read_one(entry: Any, kind: str, in_file: bool) -> Limit:
    if isinstance(entry, Limit):
        return entry
    key = _key(kind)
    if not isinstance(entry, Mapping):
        is_bound = isinstance(entry, str | int | float) and not isinstance(entry, bool)
        instead = toml_text(entry) if isinstance(entry, str) else str(entry)
        raise BadValue(
            Problem(
                entry,
                "must say on which side the limit is",
                f"Write {{ below = {instead if is_bound else key.example} }}, or `above`.",
            )
        )
    problems: list[Problem] = []
    read: dict[str, float] = {}
    for name in entry:
        if name not in BOUNDS:
            near = keys.nearest(name, BOUNDS)
            instead = f"Write `{near}`." if near else "Write `below` or `above`."
            problems.append(Problem(entry[name], "is not a known key", instead, (name,)))
            continue
        if keys.has_tolerance(entry[name]):
            problems.append(Problem(entry[name], "takes no tolerance", f"Write {name} = {key.example}.", (name,)))
            continue
        try:
            read[name] = key.read(entry[name], in_file)
        except BadValue as bad:
            problems += [Problem(p.value, p.allowed, p.instead, (name, *p.inner), p.looks_like) for p in bad.problems]
    if not entry:
        problems.append(Problem(entry, "needs `below` or `above`", f"Write {{ below = {key.example} }}."))
    if len(read) == 2 and read["below"] <= read["above"]:
        problems.append(Problem(entry, "lets nothing pass: `below` must be larger than `above`"))
    if problems:
        raise BadValue(*problems)
    return Limit(**read, kind=kind)


def _written(limit: Limit, raw: Any) -> str:
    raw = raw if isinstance(raw, Mapping) else {}
    parts = []
    for name in BOUNDS:
        value = getattr(limit, name)
        if value is not None:
            given = raw.get(name)
            parts.append(f"{name} = {_key(limit.kind).write(value, given if isinstance(given, str) else None)}")
    return "{ " + ", ".join(parts) + " }"


@dataclass(frozen=True)
class Accepted(PerName):
    """A table of codes of cautions, each with the reason why it may stand."""

    entry: Key = field(default_factory=lambda: Text("the reason", sample="checked on the rig"))
    name: str = field(default="CODE", kw_only=True)

    def read(self, value: Any, in_file: bool) -> dict[str, str]:
        read = super().read(value, in_file)
        problems: list[Problem] = []
        for code, reason in read.items():
            if code in NEVER_ACCEPTED:
                problems.append(Problem(reason, "cannot be accepted: such numbers are no answer", "", (code,)))
            elif code not in CAUTIONS:
                near = keys.nearest(code, ACCEPTABLE)
                listed = f"There are: {', '.join(ACCEPTABLE)}."
                instead = f"Write {toml_key(near)}. {listed}" if near else listed
                problems.append(Problem(reason, "is the code of no caution", instead, (code,)))
            elif not reason.strip():
                problems.append(
                    Problem(reason, "needs the reason why the caution may stand", "Write it in a few words.", (code,))
                )
        if problems:
            raise BadValue(*problems)
        return read

    def pairs(self, value: Mapping[str, str], raw: Any = None) -> list[str]:
        """`code = reason` of every entry."""
        return [f"{toml_key(code)} = {toml_text(reason)}" for code, reason in value.items()]

    @property
    def allowed(self) -> str:
        return f"must be a table of CODE = reason, of the codes {', '.join(ACCEPTABLE)}"

    @property
    def example(self) -> str:
        return '{ free-convection = "checked on the rig" }'
