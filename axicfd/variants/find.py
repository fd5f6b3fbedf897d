"""find(case, change, until): the input of a case for which a quantity has a wanted value.

Where to search is seen on a coarse mesh, which costs a fifteenth of a solve: the range is looked through, so that
several answers or none are noticed, and each bracket is narrowed by Brent's method (Brent 1973, Algorithms for
Minimization without Derivatives, ch. 4). From there a few solves in full, all on one family of meshes, close in by
secants (of several inputs: Broyden 1965, Math. Comp. 19, 577) until the quantity is within its mesh error.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from scipy.optimize import brentq

from axicfd import units
from axicfd.case import keys, paths, read
from axicfd.case.layout import layout
from axicfd.case.model import Case, expect_case
from axicfd.case.quantities import ResultQuantity, quantity
from axicfd.errors import AxicfdError, bad_input
from axicfd.materials import laws
from axicfd.mesh.build import Family, family
from axicfd.mesh.grid import Array
from axicfd.pipeline import look, solve
from axicfd.results.result import Result

LOOKS = 9  # through a given range
LOOKS_AROUND = 13  # around the case's own value where no range is given
FARTHEST = 32.0  # largest ratio to the own value that is looked at then
FARTHEST_KELVIN = 150.0  # and the largest difference, of a temperature
NARROW = 2e-2  # share of the distance of two looks to which a bracket is narrowed on the coarse mesh
EDGE_LOOKS = 5  # towards a value from which on the model is refused
VERTEX_LOOKS = 3  # at a turning point between looks that may hide two answers
SOLVES = 10  # in full, for one answer
WITHIN = 0.2  # of its half-width that a quantity may be off
SMALLEST = 1e-7  # of the range of the looks: no quantity is asked to be closer
NEARLY = 0.05  # of that range by which the coarse mesh may miss a value that is reached after all
NEWTON_LOOKS = 40  # for several inputs at once
NEWTON_CLOSE = 3e-3  # share of their first distance to which the quantities are brought on the coarse mesh
LARGEST_STEP = math.log(3.0)  # of an input's logarithm
NOT_INPUTS = "title", "z_axis", "mesh", "physics", "solve", "results", "quantity", "limits", "accept"


# ------------------------------------------------------------------------------------------------ the question


@dataclass(frozen=True)
class Input:
    """An input that may be changed.

    path : of the case file        kind : key of `units.KINDS`, "" for a pure number        unit : it is shown in
    own  : its SI value in the case, None where it has none        declared : its limits
    """

    path: str
    kind: str
    unit: str
    own: float | None
    declared: keys.Quantity | keys.Number

    @property
    def is_positive(self) -> bool:
        """Whether its ratios count, not its differences."""
        return self.kind != "temperature" and (self.declared.above == 0 or self.declared.at_least == 0)

    def shown(self, value: float) -> float:
        """An SI value in the unit it is shown in."""
        return float(units.convert(value, self.unit, self.kind)) if self.kind else value

    def written(self, value: float) -> Any:
        """As a case file has it, to nine digits: text with unit, or a number."""
        text = f"{self.shown(value):.9g}"
        return f"{text} {self.unit}" if self.kind else float(text)


@dataclass(frozen=True)
class Target:
    """A quantity and the SI value it is to have, shown in a unit."""

    quantity: ResultQuantity
    value: float
    unit: str

    def shown(self, value: float) -> float:
        """An SI value in the unit it is shown in."""
        return float(units.convert(value, self.unit, self.quantity.kind)) if self.quantity.kind else value


# ------------------------------------------------------------------------------------------------ the answer


@dataclass(frozen=True)
class Answer:
    """One answer: SI values of the inputs and quantities, each with its half-width; None where there is none.

    The half-width of an input holds the mesh error of the quantity and what is left of its distance to the wanted
    value, over the slope of the quantity.
    """

    inputs: tuple[float, ...]
    input_half_widths: tuple[float | None, ...]
    quantities: tuple[float, ...]
    quantity_half_widths: tuple[float | None, ...]
    case: Case
    result: Result

    def is_like(self, other: Answer) -> bool:
        """Whether both are one answer, found twice."""
        both = zip(self.inputs, other.inputs, self.input_half_widths, other.input_half_widths, strict=True)
        return all(abs(a - b) <= 10.0 * ((h or 0.0) + (i or 0.0)) + 1e-6 * abs(a) for a, b, h, i in both)


@dataclass(frozen=True)
class Look:
    """What was found on the coarse mesh at some inputs; quantities None where the model is refused, then `why`."""

    inputs: tuple[float, ...]
    quantities: tuple[float, ...] | None
    why: str = ""


@dataclass(frozen=True, repr=False)
class Found:
    """What came of a search: every answer, smallest input first, or `why` there is none.

    between : SI limits of what was looked through; None for several inputs
    looks   : on the coarse mesh, by rising input        solves : in full
    """

    case: Case
    inputs: tuple[Input, ...]
    targets: tuple[Target, ...]
    between: tuple[float, float] | None
    answers: tuple[Answer, ...]
    why: str
    looks: tuple[Look, ...]
    solves: int

    def __repr__(self) -> str:
        found = "; ".join(
            ", ".join(f"{i.path} = {i.written(v)}" for i, v in zip(self.inputs, answer.inputs, strict=True))
            for answer in self.answers
        )
        return f"<Found: {found or self.why}>"

    def as_dict(self) -> dict[str, Any]:
        """Plain data, SI."""
        names, wanted = [i.path for i in self.inputs], [t.quantity.path for t in self.targets]

        def pairs(of: Sequence[str], values: Sequence[Any], half_widths: Sequence[Any]) -> dict[str, Any]:
            both = zip(of, values, half_widths, strict=True)
            return {name: {"value": value, "half_width": half} for name, value, half in both}

        return {
            "change": [{"path": i.path, "unit": units.KINDS[i.kind].si if i.kind else ""} for i in self.inputs],
            "until": [{"path": t.quantity.path, "value": t.value, "unit": t.quantity.row.unit} for t in self.targets],
            "between": list(self.between) if self.between else None,
            "answers": [
                {
                    "inputs": pairs(names, a.inputs, a.input_half_widths),
                    "quantities": pairs(wanted, a.quantities, a.quantity_half_widths),
                }
                for a in self.answers
            ],
            "why": self.why,
            "solves": self.solves,
            "looks": [
                {
                    "inputs": list(entry.inputs),
                    "quantities": list(entry.quantities) if entry.quantities else None,
                    "why": entry.why,
                }
                for entry in self.looks
            ],
        }


@dataclass(frozen=True)
class Step:
    """A look or a solve that was finished. quantities : SI values reached, None where there is no answer"""

    is_look: bool
    number: int
    inputs: tuple[float, ...]
    quantities: tuple[float, ...] | None


OnStep = Callable[[Step, "tuple[Input, ...]", "tuple[Target, ...]"], Any]


def find(
    case: Case,
    change: str | Sequence[str],
    until: str | Mapping[str, Any] | Sequence[str],
    between: Sequence[Any] | None = None,
    on_step: OnStep | None = None,
) -> Found:
    """The inputs for which quantities have wanted values.

    change  : path of a key, "section.heater.length"; or as many of them as there are quantities
    until   : "stream.oil.outlet_temperature = 60 degC", or {path: value}; several as a list
    between : limits of one input, text with units or SI; by default a thirtieth to thirty times its own value, of a
              temperature 150 K either way, of a heat with its own sign
    on_step : called after each look and solve
    Raises `InputError` for unusable paths and values. No answer is a `Found` without answers that says why.
    """
    expect_case(case)
    names = (change,) if isinstance(change, str) else tuple(change)
    inputs = tuple(_input(case, name) for name in names)
    targets = tuple(_target(case, path, value) for path, value in _pairs(until))
    if len(inputs) != len(targets):
        raise bad_input("change", None, f"has {len(inputs)} where `until` has {len(targets)}", "Give as many.")
    if len(set(names)) != len(names):
        raise bad_input("change", None, "names an input twice")
    if len(inputs) > 1 and between is not None:
        raise bad_input("between", None, "is for one input alone", "Leave it out.")
    search = _Search(case, inputs, targets, on_step)
    return _along(search, between) if len(inputs) == 1 else _together(search)


def _pairs(until: Any) -> list[tuple[str, Any]]:
    if isinstance(until, Mapping):
        return list(until.items())
    found = []
    for text in (until,) if isinstance(until, str) else until:
        path, sign, value = text.partition("=")
        if not sign or not path.strip() or not value.strip():
            raise bad_input(
                "until", text, "is not QUANTITY = VALUE", 'Write "stream.oil.outlet_temperature = 60 degC".'
            )
        found.append((path.strip(), value.strip()))
    return found


def _target(case: Case, path: str, value: Any) -> Target:
    named = quantity(case, path)
    si = units.KINDS[named.kind].si if named.kind else ""
    if named.kind and isinstance(value, int | float) and not isinstance(value, bool):
        return Target(named, float(value), si)
    try:
        return Target(named, named.read(value), units.split(value)[1] if named.kind else "")
    except units.UnitError as bad:
        raise bad_input(path, value, bad.allowed, bad.instead) from None


def _input(case: Case, path: str) -> Input:
    steps = paths.steps_of(path)
    place = paths.place_of(case._tree, path)
    key = read.key_at(place) if place else None
    if place is None or key is None:
        case.replace({path: 1.0})  # says what is wrong with the path
        raise bad_input(path, None, "is not one value", "Name a key with one value, such as section.NAME.length.")
    if steps[0] in NOT_INPUTS or not isinstance(key, keys.Quantity | keys.Number) or getattr(key, "whole", False):
        instead = "Name a length, a flow, a heat, a property or the like."
        raise bad_input(path, None, "is no input of the tube that can have any value", instead)
    kind = key.kind if isinstance(key, keys.Quantity) else ""
    raw = paths.find(case._tree, path)
    own: Any = None
    if raw is not None:
        own = key.read(raw, False)
        own = own.value if isinstance(own, laws.Constant) else own
        if not isinstance(own, int | float):
            raise bad_input(path, raw, "is a table or law", "Name a key that has one value.")
    example = units.split(units.KINDS[kind].example)[1] if kind else ""
    return Input(path, kind, case.unit_of(path) or example, own, key)


# ------------------------------------------------------------------------------------------------ looks and solves


class _Search:
    """What has been looked at and solved; inputs are searched in coordinates: logarithms where ratios count."""

    def __init__(self, case: Case, inputs: tuple[Input, ...], targets: tuple[Target, ...], on_step: OnStep | None):
        self.case, self.inputs, self.targets, self.on_step = case, inputs, targets, on_step
        self.logarithmic = [i.is_positive for i in inputs]
        self.wanted = np.array([t.value for t in targets])
        self.meshes: Family | None = None
        self.looks: dict[tuple[float, ...], Look] = {}
        self.solves = 0

    def to_place(self, values: Sequence[float]) -> Array:
        """Coordinates of SI values."""
        return np.array([math.log(v) if log else v for v, log in zip(values, self.logarithmic, strict=True)])

    def values(self, place: Array) -> tuple[float, ...]:
        """SI values at coordinates."""
        return tuple(float(math.exp(p) if log else p) for p, log in zip(place, self.logarithmic, strict=True))

    def at(self, place: Array) -> Case:
        """The case with the inputs of a place. Raises `InputError`."""
        return self.case.replace({i.path: v for i, v in zip(self.inputs, self.values(place), strict=True)})

    def look(self, place: Array) -> Array | None:
        """How far the quantities are above what is wanted, on the coarse mesh; None where the model is refused."""
        key = tuple(float(p) for p in place)
        if key not in self.looks:
            try:
                if self.meshes is None:
                    self.meshes = family(self.case, layout(self.case))
                tree = look(self.at(place), self.meshes)
                reached = [t.quantity.of(tree) for t in self.targets]
                known = tuple(value for value in reached if value is not None)
                why = "" if len(known) == len(reached) else "A quantity has no value there."
                self.looks[key] = Look(self.values(place), None if why else known, why)
            except AxicfdError as refused:
                self.looks[key] = Look(self.values(place), None, str(refused))
            self._tell(True, len(self.looks), self.looks[key].inputs, self.looks[key].quantities)
        found = self.looks[key].quantities
        return None if found is None else np.array(found) - self.wanted

    @property
    def spread(self) -> Array:
        """By how much each quantity differed in the looks."""
        known = np.array([entry.quantities for entry in self.looks.values() if entry.quantities is not None])
        return np.ptp(known, axis=0) if len(known) else np.zeros(len(self.targets))

    def close_in(self, place: Array, slopes: Array, low: Array, high: Array) -> Answer | str:
        """Solve in full until the quantities are within their mesh errors; or why that did not succeed.

        slopes : (n, n) of the quantities along the coordinates        low, high : limits of the coordinates
        """
        meshes: Family | None = None
        before: tuple[Array, Array] | None = None
        for _ in range(SOLVES):
            try:
                case = self._as_written(place)
                result = solve(case, like=meshes)
            except AxicfdError as refused:
                return str(refused)
            self.solves += 1
            reached = [t.quantity.of(result.summary) for t in self.targets]
            usable = result.converged and not result.summary.get("refused") and None not in reached
            known = tuple(value for value in reached if value is not None) if usable else None
            self._tell(False, self.solves, self.values(place), known)
            if known is None:
                return str(result.summary.get("refused") or "The solve did not converge.")
            meshes = meshes or result.meshes
            bars = [t.quantity.of(result.summary.get("numerical_uncertainty")) for t in self.targets]
            over = np.array(known) - self.wanted
            if before is not None:
                moved = place - before[0]
                slopes = slopes + np.outer(over - before[1] - slopes @ moved, moved) / (moved @ moved)
            if np.linalg.cond(slopes) > 1e12:
                return "The quantities do not tell the inputs apart."
            inverse = np.linalg.inv(slopes)
            allowed = np.maximum(WITHIN * np.array([bar or 0.0 for bar in bars]), SMALLEST * self.spread)
            if (np.abs(over) <= allowed).all():
                return self._answer(case, result, place, known, bars, np.abs(inverse), np.abs(over))
            before = place, over
            further = place - inverse @ over
            # halfway to a limit that would be passed
            further = np.where(
                further < low, 0.5 * (place + low), np.where(further > high, 0.5 * (place + high), further)
            )
            if np.allclose(further, place, rtol=1e-12, atol=0.0):
                return "The quantities do not come close enough within the limits."
            place = further
        return f"{SOLVES} solves did not come close enough."

    def _as_written(self, place: Array) -> Case:
        """The case of a place as its file will have it."""
        values = self.values(place)
        return self.case.replace({i.path: i.written(v) for i, v in zip(self.inputs, values, strict=True)})

    def _answer(
        self,
        case: Case,
        result: Result,
        place: Array,
        reached: tuple[float, ...],
        bars: list[float | None],
        per_quantity: Array,
        over: Array,
    ) -> Answer:
        values = self.values(place)
        halves: tuple[float | None, ...] = (None,) * len(values)
        if None not in bars:
            reach = per_quantity @ (np.array(bars, dtype=float) + over)
            pairs = zip(values, reach, self.logarithmic, strict=True)
            halves = tuple(float(r * v if log else r) for v, r, log in pairs)
        return Answer(values, halves, reached, tuple(bars), case, result)

    def _tell(
        self, is_look: bool, number: int, inputs: tuple[float, ...], quantities: tuple[float, ...] | None
    ) -> None:
        if self.on_step is not None:
            self.on_step(Step(is_look, number, inputs, quantities), self.inputs, self.targets)

    def found(self, between: tuple[float, float] | None, answers: list[Answer], why: str) -> Found:
        answers = sorted(answers, key=lambda answer: answer.inputs)
        looks = tuple(self.looks[key] for key in sorted(self.looks))
        return Found(self.case, self.inputs, self.targets, between, tuple(answers), why, looks, self.solves)


# ------------------------------------------------------------------------------------------------ one input


def _along(search: _Search, between: Sequence[Any] | None) -> Found:
    """One input: look through its range, then close in on every answer in it."""
    values = _range(search, between)
    limits = values[0], values[-1]
    places = [float(search.to_place([v])[0]) for v in values]
    apart = (places[-1] - places[0]) / len(places)

    def over(place: float) -> float | None:
        found = search.look(np.array([place]))
        return None if found is None else float(found[0])

    for place in places:
        over(place)
    known = [p for p in places if over(p) is not None]
    if not known:
        return search.found(limits, [], search.looks[(places[0],)].why)
    if float(search.spread[0]) <= SMALLEST * max(abs(x) for x in (search.wanted[0], *_reached(search))):
        why = f"{search.targets[0].quantity.path} does not change with {search.inputs[0].path}."
        return search.found(limits, [], why)
    _look_at_edges(places, over)
    _look_at_turns(places, over)
    brackets = [(a, b) for a, b in zip(places, places[1:], strict=False) if _crosses(over(a), over(b))]
    starts = [_narrowed(search, a, b, NARROW * apart) for a, b in brackets]
    if not brackets:
        nearest = min(known, key=lambda p: abs(over(p) or 0.0))
        starts = [nearest] if abs(over(nearest) or 0.0) <= NEARLY * float(search.spread[0]) else []
    answers: list[Answer] = []
    whys = []
    for start in starts:
        low, high = max(places[0], start - 2.0 * apart), min(places[-1], start + 2.0 * apart)
        outcome = search.close_in(np.array([start]), _slope(search, start), np.array([low]), np.array([high]))
        if isinstance(outcome, str):
            whys.append(f"Near {_short(search.inputs[0], search.values(np.array([start]))[0])}: {outcome}")
        elif not any(outcome.is_like(other) for other in answers):
            answers.append(outcome)
    if not brackets and not answers:
        whys = [_out_of_reach(search, limits)]
    return search.found(limits, answers, " ".join(whys))


def _out_of_reach(search: _Search, limits: tuple[float, float]) -> str:
    """What is reached instead, and where the model is refused."""
    (one,), (target,) = search.inputs, search.targets
    known = [(entry.quantities[0], entry.inputs[0]) for entry in search.looks.values() if entry.quantities is not None]
    most = min(known)[0] < target.value
    value, place = max(known) if most else min(known)
    unit = f" {target.unit}".rstrip()
    text = (
        f"Between {_short(one, limits[0])} and {_short(one, limits[1])} {target.quantity.path} "
        f"goes no {'higher' if most else 'lower'} than {target.shown(value):.4g}{unit}, at {_short(one, place)}."
    )
    if any(math.isclose(place, limit) for limit in limits):
        text += " A wider range may hold it."
    refused = sorted((entry.inputs[0], entry.why) for entry in search.looks.values() if entry.quantities is None)
    above, below = [r for r in refused if r[0] > place], [r for r in refused if r[0] < place]
    for nearest, word in ((above[:1], "above"), (below[-1:], "below")):
        text += "".join(f" At {_short(one, at)} and {word} there is no answer: {why}" for at, why in nearest)
    return text


def _reached(search: _Search) -> list[float]:
    return [entry.quantities[0] for entry in search.looks.values() if entry.quantities is not None]


def _range(search: _Search, between: Sequence[Any] | None) -> list[float]:
    """The SI values to look at, rising."""
    (one,) = search.inputs
    if between is not None:
        if isinstance(between, str) or len(between) != 2:
            raise bad_input("between", between, "must be two values", 'Write ["0.5 m", "5 m"].')
        low, high = sorted(_limit(one, value) for value in between)
        if low == high:
            raise bad_input("between", None, "names the same value twice", "Give the lowest and the highest.")
        search.logarithmic = [low > 0.0 and one.kind != "temperature" and high > 3.0 * low]
        first, last = (float(search.to_place([value])[0]) for value in (low, high))
        # the exact limits, not what a logarithm leaves of them
        return [low, *(search.values(np.array([p]))[0] for p in np.linspace(first, last, LOOKS)[1:-1]), high]
    if not one.own:
        allowed = "has no value in the case to begin from" if one.own is None else "is zero, which has no surroundings"
        raise bad_input(one.path, None, allowed, "Give the lowest and the highest value to look at with `between`.")
    steps = np.linspace(-1.0, 1.0, LOOKS_AROUND)
    if one.kind == "temperature":
        values = [one.own + FARTHEST_KELVIN * float(step) for step in steps]
    else:
        values = sorted(one.own * FARTHEST ** float(step) for step in steps)
    return [value for value in values if _is_allowed(one, value)]


def _limit(one: Input, value: Any) -> float:
    try:
        if isinstance(value, str) and isinstance(one.declared, keys.Number):
            value = float(value)
        found = one.declared.read(value, False)
    except ValueError:
        raise bad_input("between", value, one.declared.allowed) from None
    except keys.BadValue as bad:
        problem = bad.problems[0]
        raise bad_input("between", value, problem.allowed, problem.instead) from None
    return float(found.value if isinstance(found, laws.Constant) else found)


def _is_allowed(one: Input, value: float) -> bool:
    try:
        one.declared.read(value, False)
    except keys.BadValue:
        return False
    return True


def _crosses(a: float | None, b: float | None) -> bool:
    return a is not None and b is not None and (a <= 0.0) != (b <= 0.0)


def _look_at_edges(places: list[float], over: Callable[[float], float | None]) -> None:
    """Add looks towards a place from which on the model is refused, as long as they come closer to what is wanted."""
    found_at = [over(place) for place in places]
    triples = [(i - step, i, i + step) for i in range(1, len(places) - 1) for step in (1, -1)]
    for inner, edge, outer in triples:
        before, here = found_at[inner], found_at[edge]
        if before is None or here is None or found_at[outer] is not None:
            continue
        if _crosses(before, here) or abs(here) >= abs(before):
            continue
        good, bad = places[edge], places[outer]
        for _ in range(EDGE_LOOKS):
            middle = 0.5 * (good + bad)
            found = over(middle)
            places.append(middle)  # behind all that are counted
            good, bad = (good, middle) if found is None else (middle, bad)
            if _crosses(found, here):
                break
    places.sort()


def _look_at_turns(places: list[float], over: Callable[[float], float | None]) -> None:
    """Add looks where the quantity turns back on its way to what is wanted: it may cross it twice in between."""
    for triple in [places[k - 1 : k + 2] for k in range(1, len(places) - 1)]:
        for _ in range(VERTEX_LOOKS):
            heights = [over(p) for p in triple]
            if None in heights:
                break
            f = [abs(h) for h in heights if h is not None]
            same_side = len({(h or 0.0) <= 0.0 for h in heights}) == 1
            if not same_side or not f[1] < min(f[0], f[2]):
                break
            curve = np.polyfit(triple, f, 2)
            vertex = -curve[1] / (2.0 * curve[0])
            if np.polyval(curve, vertex) > 0.5 * f[1] or vertex in triple:
                break
            over(vertex)
            places.append(float(vertex))
            triple = sorted([*triple, float(vertex)])
            middle = min(range(1, 3), key=lambda i: abs(over(triple[i]) or 0.0))
            triple = triple[middle - 1 : middle + 2]
    places.sort()


def _narrowed(search: _Search, a: float, b: float, closely: float) -> float:
    """The root between two places on the coarse mesh, roughly."""

    def over(place: float) -> float:
        found = search.look(np.array([place]))
        return 0.0 if found is None else float(found[0])

    return float(brentq(over, a, b, xtol=closely, rtol=1e-12))


def _slope(search: _Search, place: float) -> Array:
    """(1, 1) slope of the quantity from the two looks that are nearest to a place, and not the same."""
    known = sorted((abs(k[0] - place), k[0]) for k, entry in search.looks.items() if entry.quantities is not None)
    first, second = known[0][1], known[1][1]
    rise = search.looks[(first,)].quantities[0] - search.looks[(second,)].quantities[0]  # type: ignore[index]
    return np.array([[rise / (first - second)]])


# ------------------------------------------------------------------------------------------------ several inputs


def _together(search: _Search) -> Found:
    """Several inputs from their own values: Newton's method with Broyden's updates, first on the coarse mesh."""
    for one in search.inputs:
        if not one.own:
            raise bad_input(one.path, None, "has no value in the case to begin from", "Write one into the case.")
    place = search.to_place([one.own or 0.0 for one in search.inputs])
    over = search.look(place)
    if over is None:
        return search.found(None, [], next(iter(search.looks.values())).why)
    sizes = np.array(
        [0.05 if log else (2.0 if i.kind == "temperature" else 0.05 * abs(i.own or 0.0))
         for i, log in zip(search.inputs, search.logarithmic, strict=True)]
    )  # fmt: skip
    longest = sizes / 0.05 * LARGEST_STEP
    slopes = _slopes(search, place, over, sizes)
    if slopes is None:
        return search.found(None, [], "Beside the case's own values the model is refused.")
    scale = np.maximum(np.abs(over), np.abs(slopes) @ sizes)
    fresh = True
    while len(search.looks) < NEWTON_LOOKS and (np.abs(over) > NEWTON_CLOSE * scale).any():
        if np.linalg.cond(slopes / scale[:, None] * sizes) > 1e8:
            return search.found(None, [], _no_way(search, "The quantities do not tell the inputs apart there."))
        newton = np.linalg.solve(slopes, -over)
        step = newton / np.float64(max(1.0, float(np.max(np.abs(newton) / longest))))
        better = _shorter_until_better(search, place, over, step, scale)
        if better is None and fresh:
            return search.found(None, [], _no_way(search, "No step from there comes closer."))
        if better is None:
            again = _slopes(search, place, over, 0.2 * sizes)
            if again is None:
                break
            slopes, fresh = again, True
            continue
        moved, there = better[0] - place, better[1]
        slopes = slopes + np.outer(there - over - slopes @ moved, moved) / (moved @ moved)
        place, over, fresh = better[0], there, False
    if (np.abs(over) > NEWTON_CLOSE * scale).any():
        return search.found(None, [], _no_way(search, f"{len(search.looks)} looks did not come close enough."))
    none = np.full(len(place), np.inf)
    outcome = search.close_in(place, slopes, -none, none)
    return search.found(None, [outcome], "") if isinstance(outcome, Answer) else search.found(None, [], outcome)


def _slopes(search: _Search, place: Array, over: Array, sizes: Array) -> Array | None:
    """(n, n) slopes of the quantities by one-sided differences, to the other side where the model is refused."""
    columns = []
    for k, size in enumerate(sizes):
        for step in (size, -size):
            there = search.look(place + step * np.eye(len(place))[k])
            if there is not None:
                columns.append((there - over) / step)
                break
        else:
            return None
    return np.array(columns).T


def _shorter_until_better(
    search: _Search, place: Array, over: Array, step: Array, scale: Array
) -> tuple[Array, Array] | None:
    """The first of the whole step, a half, a quarter ... that comes closer; None where none does."""
    for share in (1.0, 0.5, 0.25, 0.125):
        there = search.look(place + share * step)
        if there is not None and np.linalg.norm(there / scale) < np.linalg.norm(over / scale):
            return place + share * step, there
    return None


def _no_way(search: _Search, why: str) -> str:
    """Why, with the closest that was reached."""
    known = [entry for entry in search.looks.values() if entry.quantities is not None]
    spread = np.where(search.spread > 0.0, search.spread, 1.0)
    best = min(known, key=lambda entry: np.linalg.norm((np.array(entry.quantities) - search.wanted) / spread))
    inputs = " and ".join(f"{i.path} = {_short(i, v)}" for i, v in zip(search.inputs, best.inputs, strict=True))
    reached = " and ".join(
        f"{t.quantity.path} = {t.shown(v):.4g} {t.unit}".rstrip()
        for t, v in zip(search.targets, best.quantities or (), strict=True)
    )
    return f"The closest that was found is {inputs}, which gives {reached}. {why}"


def _short(one: Input, value: float) -> str:
    return f"{one.shown(value):.4g} {one.unit}".rstrip()
