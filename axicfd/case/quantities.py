"""The quantities of a solved case, by the names users give them: "stream.oil.outlet_temperature".

A name is the dotted path in summary.json without unit suffix. Limits, accuracy, sweeps, targets and tolerances all
find their quantities here.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass
from typing import Any

from axicfd import units
from axicfd.case import keys, paths
from axicfd.case.model import Case
from axicfd.errors import InputError, bad_input
from axicfd.glossary import Reported, quantity_name, summary_row

HEADLINE = (
    ("stream", ("outlet_temperature_K", "pressure_drop_Pa", "heat_gain_W", "hottest_wetted_wall_K")),
    ("layer", ("hottest_K",)),
    ("section", ("heat_in_W",)),
    ("sensor", ("temperature_K",)),
)
MORE = {
    "stream": (
        "mass_flow_kg_s",
        "mean_velocity_m_s",
        "reynolds",
        "prandtl",
        "peclet",
        "graetz",
        "heated_length_m",
        "largest_reynolds",
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

    path : as users write it, "stream.oil.outlet_temperature"
    keys : its place in the tree of summary.json, ("stream", "oil", "outlet_temperature_K")
    """

    path: str
    keys: tuple[str, ...]

    @property
    def key(self) -> str:
        """The key that carries the unit."""
        return self.keys[2] if self.keys[0] == "section" else self.keys[-1]

    @property
    def row(self) -> Reported:
        """Label, unit and meaning."""
        return summary_row(self.key)

    @property
    def label(self) -> str:
        """Words for tables and sentences: "hottest wetted wall", "hottest place of line", "sensor far"."""
        part, name = self.keys[:2]
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
        return _KIND_OF_UNIT[self.row.unit]

    @property
    def kind_of_difference(self) -> str:
        """The same for an amount by which two values differ."""
        return "temperature_difference" if self.kind == "temperature" else self.kind

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
        kind = self.kind_of_difference if difference else self.kind
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
    """All quantities of a case: of each stream, solid layer, section and sensor, those of the headline first."""
    names: dict[str, tuple[str, ...]] = {
        "stream": tuple(case.stream),
        "layer": _solid_layers(case),
        "section": tuple(section.name for section in case.section),
        "sensor": tuple(case.sensor),
    }
    for part, known in HEADLINE:
        yield from (_quantity(part, name, key) for name in names[part] for key in known)
    if headline_only:
        return
    for part, more in MORE.items():
        yield from (_quantity(part, name, key) for name in names[part] for key in more)
    yield from (
        _quantity("section", name, key, stream) for name in names["section"] for key in PER_STREAM
        for stream in names["stream"]
    )  # fmt: skip


def quantity(case: Case, path: str) -> ResultQuantity:
    """The quantity of a path; the unit suffix may be there. Raises `InputError` that names what is near."""
    by_path: dict[str, ResultQuantity] = {}
    for known in quantities(case):
        by_path[known.path] = known
        by_path.setdefault(_spelled(known.keys), known)
        if ALONE.get(known.keys[0]) == known.key:
            by_path[_spelled(known.keys[:2])] = known
    steps = _spelled(tuple(paths.steps_of(path)))
    if steps in by_path:
        return by_path[steps]
    raise _unknown(path, steps, by_path)


def _unknown(path: str, steps: str, by_path: dict[str, ResultQuantity]) -> InputError:
    near = keys.nearest(steps, by_path)
    last = steps.rpartition(".")[2]
    if near is None:
        near = next((known for known in by_path if known.rpartition(".")[2] == last), None)
    first = next(iter(by_path))
    instead = f"Write {near}." if near else f"Write a path such as {first}."
    return bad_input(path, None, "names no quantity of this case", instead)


def _quantity(part: str, name: str, key: str, *below: str) -> ResultQuantity:
    return ResultQuantity(_spelled((part, name, quantity_name(key), *below)), (part, name, key, *below))


def _spelled(steps: tuple[str, ...]) -> str:
    return ".".join(f'"{step}"' if "." in step else step for step in steps)


def _solid_layers(case: Case) -> tuple[str, ...]:
    stacks = (case.layers_of(section) for section in case.section)
    return tuple(dict.fromkeys(layer.name for stack in stacks for layer in stack if layer.kind == "solid"))
