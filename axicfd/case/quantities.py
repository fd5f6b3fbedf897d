"""The quantities of a solved case, by the names users give them: "stream.oil.outlet_temperature".

A name is the dotted path in summary.json without unit suffix. Limits, accuracy, sweeps, targets and tolerances all
find their quantities here; `[quantity.NAME]` adds sums of them.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from axicfd import units
from axicfd.case import keys
from axicfd.case.dotted import dotted, steps_of
from axicfd.errors import InputError, UnknownQuantity, bad_input
from axicfd.glossary import Reported, named_row, quantity_name, summary_row

if TYPE_CHECKING:
    from axicfd.case.model import Case

NAMED = "quantity"  # the part of the tree that holds the case's own combinations
HEADLINE: dict[str, tuple[str, ...]] = {
    "stream": ("outlet_temperature_K", "pressure_drop_Pa", "heat_gain_W", "hottest_wetted_wall_K"),
    "layer": ("hottest_K",),
    "section": ("heat_in_W",),
    "sensor": ("temperature_K",),
}
MORE: dict[str, tuple[str, ...]] = {
    "stream": (
        "mass_flow_kg_s",
        "mean_velocity_m_s",
        "reynolds",
        "prandtl",
        "peclet",
        "graetz",
        "heated_length_m",
        "largest_reynolds",
        "inlet_temperature_K",
        "outlet_axis_temperature_K",
        "outlet_wall_temperature_K",
        "hydrostatic_Pa",
        "hottest_wetted_wall_z_m",
        "coldest_wetted_wall_K",
        "coldest_wetted_wall_z_m",
        "largest_wall_shear_stress_Pa",
        "thermal_resistance_K_W",
        "mean_residence_s",
        "hydrodynamic_entry_length_m",
        "thermal_entry_length_m",
    ),
    "layer": ("hottest_z_m", "coldest_K"),
}
PER_STREAM = ("end_bulk_temperature_K", "end_pressure_Pa", "heat_to_stream_W")  # of a section, then a stream's name
ALONE = {"sensor": "temperature_K"}  # "sensor.far" alone means its temperature
FROM_INPUTS = frozenset(
    {"prandtl", "heated_length_m", "inlet_temperature_K", "hydrostatic_Pa"}
)  # no mesh acts on these
OF_FLOW = frozenset(  # nor on these, where the case gives the flow itself and not a pressure drop
    {"mass_flow_kg_s", "mean_velocity_m_s", "reynolds", "peclet", "graetz", "mean_residence_s"}
)
# Of pressures those that are not absolute. A limit on a drop is no absolute pressure.
_PRESSURE_DIFFERENCES = frozenset({"pressure_drop_Pa", "hydrostatic_Pa", "largest_wall_shear_stress_Pa"})
_ABSOLUTE = {"temperature": "temperature_difference", "pressure": "pressure_difference"}

_KIND_OF_UNIT = {
    "K": "temperature",
    "Pa": "pressure",
    "W": "heat",
    "m": "length",
    "s": "time",
    "kg/s": "mass_flow",
    "m/s": "velocity",
    "K/W": "thermal_resistance",
    "": "",
}


@dataclass(frozen=True)
class ResultQuantity:
    """A quantity of a solved case.

    path     : as users write it, "stream.oil.outlet_temperature"
    keys     : its place in the tree of summary.json, ("stream", "oil", "outlet_temperature_K")
    combined : of a named combination its kind, else None: the key tells
    """

    path: str
    keys: tuple[str, ...]
    combined: str | None = None

    @property
    def key(self) -> str:
        """The key that carries the unit."""
        return self.keys[2] if self.keys[0] == "section" else self.keys[-1]

    @property
    def suffix(self) -> str:
        """The unit suffix of the key, "_K"; "" for a pure number."""
        return self.key.removeprefix(quantity_name(self.key))

    @property
    def row(self) -> Reported:
        """Label, unit and meaning."""
        return summary_row(self.key) if self.combined is None else named_row(self.key, self.combined)

    @property
    def label(self) -> str:
        """Words for tables and sentences: "hottest wetted wall", "hottest place of line", "sensor far"."""
        part, name = self.keys[:2]
        if self.combined is not None:
            return name
        if part == "sensor":
            return f"sensor {name}"
        if self.key == "heat_in_W":
            return f"heat into section {name}"
        words = self.row.label
        if part == "layer":
            return f"{words} place of {name}" if self.kind == "temperature" else f"{words} of {name}"
        return f"{words} of section {name}" if part == "section" else words

    @property
    def kind(self) -> str:
        """Key of `units.KINDS`; "" for a pure number."""
        return _KIND_OF_UNIT[self.row.unit] if self.combined is None else self.combined

    @property
    def kind_of_difference(self) -> str:
        """The same for an amount by which two values differ."""
        return "temperature_difference" if self.kind == "temperature" else self.kind

    @property
    def kind_written(self) -> str:
        """The kind as which its values are written: a pressure drop is no absolute pressure."""
        return kind_of_key(self.key) if self.combined is None else self.combined

    def of(self, tree: Any) -> float | None:
        """Its value in a tree such as summary.json or its `numerical_uncertainty`; None where there is none."""
        for key in self.keys:
            if not isinstance(tree, dict) or key not in tree:
                return None
            tree = tree[key]
        is_number = isinstance(tree, int | float) and not isinstance(tree, bool) and math.isfinite(tree)
        return float(tree) if is_number else None

    def read(self, text: Any, *, difference: bool = False) -> float:
        """SI value of "41 degC"; of a pure number for a quantity without unit. Raises `units.UnitError`."""
        kind = difference_of(self.kind_written) if difference else self.kind_written
        if kind and isinstance(text, str):
            return units.parse(text, kind)
        if kind:
            raise units.UnitError(
                f"has no unit; it must be {units.KINDS[kind].words} such as {units.KINDS[kind].example}"
            )
        try:
            value = float(text)
        except (TypeError, ValueError):
            raise units.UnitError("must be a plain number, without a unit") from None
        if not math.isfinite(value):
            raise units.UnitError("must be a finite number")
        return value


def quantities(case: Case, *, headline_only: bool = False) -> Iterator[ResultQuantity]:
    """All quantities of a case: of each stream, solid layer, section and sensor, those of the headline first.

    The headline ends with the case's named combinations.
    """
    names = _names(case)
    for part, known in HEADLINE.items():
        yield from (_quantity(part, name, key) for name in names[part] for key in known)
    for name, kind in _named_kinds(case.quantity).items():
        yield ResultQuantity(dotted((NAMED, name)), (NAMED, name, value_key(kind)), kind)
    if headline_only:
        return
    for part, more in MORE.items():
        yield from (_quantity(part, name, key) for name in names[part] for key in more)
    yield from (
        _quantity("section", name, key, stream) for name in names["section"] for key in PER_STREAM
        for stream in names["stream"]
    )  # fmt: skip


def quantity(case: Case, path: str) -> ResultQuantity:
    """The quantity of a path; the unit suffix may be there. Raises `UnknownQuantity` that names what is near."""
    by_path: dict[str, ResultQuantity] = {}
    for known in quantities(case):
        by_path[known.path] = known
        by_path.setdefault(dotted(known.keys), known)
        if ALONE.get(known.keys[0]) == known.key:
            by_path[dotted(known.keys[:2])] = known
        elif known.keys[0] == NAMED:
            by_path[dotted((*known.keys[:2], quantity_name(known.key)))] = known
    try:
        steps = dotted(steps_of(path))
    except InputError as no_path:
        raise UnknownQuantity(no_path.mistakes) from None
    if steps in by_path:
        return by_path[steps]
    raise _unknown(path, steps, by_path)


def _unknown(path: str, steps: str, by_path: dict[str, ResultQuantity]) -> InputError:
    # of a name cut short, such as `outlet`, all that begin with it
    begun = list(dict.fromkeys(of.path for known, of in by_path.items() if known.startswith(f"{steps}_")))
    near = " or ".join(begun[:3]) or keys.nearest(steps, by_path)
    last = steps.rpartition(".")[2]
    if near is None:
        near = next((known for known in by_path if known.rpartition(".")[2] == last), None)
    first = next(iter(by_path))
    instead = f"Write {near}." if near else f"Write a path such as {first}."
    return UnknownQuantity(bad_input(path, None, "names no quantity of this case", instead).mistakes)


# ------------------------------------------------------------------------------------------------ kinds by name alone


def difference_of(kind: str) -> str:
    """The kind of the amount by which two values of a kind differ."""
    return _ABSOLUTE.get(kind, kind)


def depends_on_mesh(case: Case, of: ResultQuantity) -> bool:
    """Whether a mesh acts on a quantity at all, or the inputs alone settle it."""
    if of.key in OF_FLOW:
        return case.stream[of.keys[1]].pressure_drop is not None
    return of.key not in FROM_INPUTS


def value_key(kind: str) -> str:
    """Key of the value of a named combination: "value_K"; "value" of a pure number."""
    return "value_" + units.KINDS[kind].si.replace("/", "_") if kind else "value"


def _by_spelling() -> dict[str, dict[str, str]]:
    """part -> name or key -> key"""
    known: dict[str, dict[str, str]] = {}
    for part, part_keys in (*HEADLINE.items(), *MORE.items(), ("section", PER_STREAM)):
        for key in part_keys:
            known.setdefault(part, {}).update({quantity_name(key): key, key: key})
    return known


SPELLINGS = _by_spelling()


def key_named(name: str) -> tuple[str, str] | None:
    """(part, key) of a quantity by its name alone, "outlet_temperature"; None where there is none."""
    return next(((part, known[name]) for part, known in SPELLINGS.items() if name in known), None)


def kind_of_key(key: str) -> str:
    """The kind as which values of a key of the tree are written, a key of `units.KINDS` or ""."""
    return "pressure_difference" if key in _PRESSURE_DIFFERENCES else _KIND_OF_UNIT[summary_row(key).unit]


def combination_in(path: str) -> str | None:
    """The name of the combination that a path leads to; None for every other path."""
    part, *rest = _steps(path)
    is_value = len(rest) == 1 or (len(rest) == 2 and quantity_name(rest[1]) == "value")
    return rest[0] if part == NAMED and is_value else None


def kind_of(path: str, named: Mapping[str, str | None]) -> str | None:
    """The kind of the quantity of a path, as far as its words tell, not knowing the names of streams, layers ...

    named : kinds of the case's named combinations, None of those that cannot be formed
    None where there is no such quantity.
    """
    part, *rest = _steps(path)
    if part == NAMED:
        return named.get(combination_in(path) or "")
    if part in ALONE and len(rest) == 1:
        return kind_of_key(ALONE[part])
    key = SPELLINGS.get(part, {}).get(rest[1]) if len(rest) > 1 else None
    if key is None or len(rest) != (3 if key in PER_STREAM else 2):
        return None
    return kind_of_key(key)


def _steps(path: str) -> list[str]:
    """The names in a path, or one empty name where it is none."""
    try:
        return steps_of(path)
    except InputError:
        return [""]


def advice(path: str, named: Mapping[str, str | None]) -> str:
    """What to write instead of a path whose words name no quantity."""
    part, _, rest = path.partition(".")
    if part == NAMED:
        near = keys.nearest(rest.partition(".")[0], named)
        listed = f"There are: {', '.join(named)}." if named else "The case has no [quantity.NAME]."
        return f'Write "{dotted((NAMED, near))}".' if near else listed
    name = path.rpartition(".")[2]
    near = keys.nearest(name, SPELLINGS.get(part) or [name for known in SPELLINGS.values() for name in known])
    found = key_named(near) if near else None
    if near is None or found is None:
        return 'Write a path such as "stream.NAME.outlet_temperature", or "quantity.NAME" for a combination.'
    owner = rest.partition(".")[0] if part in SPELLINGS and "." in rest else "NAME"
    stream = ".STREAM" if found[1] in PER_STREAM else ""
    return f'Write "{found[0]}.{owner}.{near}{stream}".'


# ------------------------------------------------------------------------------------------------ combinations


def kind_of_sum(plus: Sequence[str], minus: Sequence[str]) -> str:
    """The kind of a sum of quantities less others, from their kinds. Raises ValueError saying why there is none.

    As many temperatures added as taken away make a difference, one more added makes a temperature: any other sum
    would depend on the zero point of the scale. So it is with absolute pressures.
    """
    by_difference = {difference_of(kind): kind for kind in (*plus, *minus)}
    if len(by_difference) > 1:
        first, second = (
            units.KINDS[kind].words if kind else "a pure number" for kind in list(by_difference.values())[:2]
        )
        raise ValueError(f"adds {first} to {second}: all of `plus` and `minus` must be of one unit")
    (difference,) = by_difference
    absolute = next((kind for kind, of_two in _ABSOLUTE.items() if of_two == difference), None)
    if absolute is None:
        return difference
    added, taken = plus.count(absolute), minus.count(absolute)
    if added - taken not in (0, 1):
        raise ValueError(f"adds {added} {absolute}s and takes {taken} away, which would depend on the zero point")
    return absolute if added > taken else difference


def terms_of(case: Case, of: ResultQuantity) -> dict[ResultQuantity, int]:
    """What a combination comes to: quantity -> how often it is added, negative where it is taken away."""
    if of.combined is None:
        return {of: 1}
    terms: dict[ResultQuantity, int] = {}
    combined = case.quantity[of.keys[1]]
    for sign, paths in ((1, combined.plus), (-1, combined.minus)):
        for path in paths:
            for term, times in terms_of(case, quantity(case, path)).items():
                terms[term] = terms.get(term, 0) + sign * times
    return terms


def kinds_in(tree: Any) -> dict[str, str | None]:
    """Name -> kind of the combinations in the tables of a case; None of those that cannot be formed."""
    tables = tree.get(NAMED) if isinstance(tree, dict) else None
    named = {}
    for name, table in tables.items() if isinstance(tables, dict) else ():
        if isinstance(table, dict):
            sides = [table.get(side) or () for side in ("plus", "minus")]
            named[name] = _Terms(*(tuple(s) if isinstance(s, list | tuple) else () for s in sides))
    return dict.fromkeys(named) | _named_kinds(named)


@dataclass(frozen=True)
class _Terms:
    plus: tuple[Any, ...]
    minus: tuple[Any, ...]


def _named_kinds(named: Mapping[str, Any]) -> dict[str, str]:
    """Name -> kind of combinations that have `plus` and `minus`."""
    kinds: dict[str, str] = {}
    for _ in named:  # each round settles those that build on settled ones; a circle is never settled
        for name, terms in named.items():
            every = [[kind_of(str(path), kinds) for path in side] for side in (terms.plus, terms.minus)]
            plus, minus = ([kind for kind in side if kind is not None] for side in every)
            if name in kinds or not plus or len(plus) + len(minus) < len(terms.plus) + len(terms.minus):
                continue
            try:
                kinds[name] = kind_of_sum(plus, minus)
            except ValueError:
                continue
    return {name: kinds[name] for name in named if name in kinds}


def _names(case: Case) -> dict[str, tuple[str, ...]]:
    stacks = (case.layers_of(section) for section in case.section)
    return {
        "stream": tuple(case.stream),
        "layer": tuple(dict.fromkeys(layer.name for stack in stacks for layer in stack if layer.kind == "solid")),
        "section": tuple(section.name for section in case.section),
        "sensor": tuple(case.sensor),
    }


def _quantity(part: str, name: str, key: str, *below: str) -> ResultQuantity:
    return ResultQuantity(dotted((part, name, quantity_name(key), *below)), (part, name, key, *below))
