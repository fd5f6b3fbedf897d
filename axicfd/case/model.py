"""The case: frozen models whose attribute names are the keys of a case file. This is the only list of keys.

Inside a `Case` every quantity is an SI float and every temperature is absolute [K]. Each field declares
through `axicfd.case.keys` what it accepts and what it means. Keys that are known but not open stand in
`not_yet` of their table and are refused by name; `axicfd.case.checks` finds contradictions.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Annotated, Any, ClassVar

from pydantic import BaseModel, ConfigDict, PrivateAttr, ValidationError, model_validator

from axicfd.case import keys
from axicfd.case.keys import (
    Along,
    Choice,
    InputTolerance,
    Key,
    ListOf,
    Material,
    Number,
    PerName,
    Property,
    Quantity,
    Switch,
    Text,
    ZTable,
)
from axicfd.case.limits import Accepted, Limit, Limits
from axicfd.case.tolerance import Accuracy, Tolerance
from axicfd.errors import bad_input
from axicfd.materials import laws
from axicfd.materials.library import FLUIDS, SOLIDS

Law = laws.Constant | laws.Table | laws.Exponential | laws.IdealGasDensity

# kg/m3; an own fluid lighter than this at its inlet is taken as a gas: no liquid is, few gases reach it
GAS_BELOW_DENSITY = 50.0


class Part(BaseModel):
    """A table of a case file."""

    model_config = ConfigDict(frozen=True, extra="forbid", arbitrary_types_allowed=True, hide_input_in_errors=True)

    # Known keys that are not open yet, each with what it will do.
    not_yet: ClassVar[Mapping[str, str]] = {}
    # Setting a key removes these others, because they say the same thing differently.
    displaces: ClassVar[Mapping[str, tuple[str, ...]]] = {}


# ------------------------------------------------------------------------------------------------ streams


@dataclass(frozen=True)
class FileProfile:
    """An inlet profile read from a file; scaled to the stream's flow when it is used.

    r_m           : (n,) [m], increasing
    velocity      : (n,) [m/s], only its shape counts
    temperature_K : (n,) [K]
    """

    r_m: tuple[float, ...]
    velocity: tuple[float, ...]
    temperature_K: tuple[float, ...]


@dataclass(frozen=True)
class Profile(Key):
    """How a stream enters: a word, or the columns of a file (named, or given in place)."""

    words: tuple[str, ...] = ("flat", "developed")

    def read(self, value: Any, in_file: bool) -> str | FileProfile:
        if isinstance(value, FileProfile) or (isinstance(value, str) and value in self.words):
            return value
        if isinstance(value, dict) and "file" in value:
            return self._from_file(value)
        if isinstance(value, dict) and value:
            columns = {
                "r_m": Number("", at_least=0),
                "velocity": Number("", at_least=0),
                "temperature_K": Number("", above=0),
            }
            read = keys.read_columns(self, value, columns, in_file)
            return self._increasing(FileProfile(**read), value)
        near = keys.nearest(value, self.words) if isinstance(value, str) else None
        raise self.refuse(value, "", f'Write "{near}".' if near else "")

    def _from_file(self, value: dict) -> FileProfile:
        if set(value) != {"file"}:
            raise self.refuse(value, "names a file and says more beside it", 'Write { file = "inlet.csv" } alone.')
        name = value["file"]
        if not isinstance(name, str) or not name:
            raise self.refuse(name, "must be the name of a file", inner=("file",))
        wanted = "Give a file with the header row `r_m,velocity,temperature_K` and one row of numbers per radius."
        try:
            rows = [row.split(",") for row in Path(name).read_text(encoding="utf-8-sig").splitlines() if row.strip()]
        except (OSError, UnicodeDecodeError) as why:
            reason = getattr(why, "strerror", None) or "it is not UTF-8 text"
            raise self.refuse(name, f"cannot be read: {reason}", wanted, ("file",)) from None
        header = [cell.strip() for cell in rows[0]] if rows else []
        names = ("r_m", "velocity", "temperature_K")
        if sorted(header) != sorted(names):
            raise self.refuse(
                name,
                f"has the columns {', '.join(header) or 'none'} instead of {', '.join(names)}",
                wanted,
                ("file",),
            )
        columns: dict[str, list[float]] = {name: [] for name in header}
        for i, row in enumerate(rows[1:], start=2):
            try:
                numbers = [float(cell) for cell in row]
            except ValueError:
                numbers = []
            if len(numbers) != 3 or not all(abs(number) < 1e300 for number in numbers):
                raise self.refuse(name, f"has no three finite numbers in its line {i}", wanted, ("file",))
            for column, number in zip(header, numbers, strict=True):
                columns[column].append(number)
        if len(rows) < 3:
            raise self.refuse(name, "has fewer than two rows of numbers", wanted, ("file",))
        if min(columns["r_m"]) < 0 or min(columns["velocity"]) < 0 or min(columns["temperature_K"]) <= 0:
            raise self.refuse(
                name, "has a negative radius or velocity, or a temperature not above 0 K", wanted, ("file",)
            )
        return self._increasing(FileProfile(**{column: tuple(numbers) for column, numbers in columns.items()}), value)

    def _increasing(self, profile: FileProfile, value: dict) -> FileProfile:
        if any(b <= a for a, b in zip(profile.r_m, profile.r_m[1:], strict=False)):
            raise self.refuse(value, "must have r_m increasing from row to row")
        if not max(profile.velocity) > 0:
            raise self.refuse(value, "has no velocity above zero")
        return profile

    def write(self, value: str | FileProfile, raw: Any = None) -> str:
        if isinstance(value, str):
            return keys.toml_text(value)
        # the columns in place of the file's name, so that the written case stands alone
        lists = (
            "[" + ", ".join(repr(number) for number in column) + "]"
            for column in (value.r_m, value.velocity, value.temperature_K)
        )
        return (
            "{ "
            + ", ".join(
                f"{name} = {text}" for name, text in zip(("r_m", "velocity", "temperature_K"), lists, strict=True)
            )
            + " }"
        )

    allowed = 'must be "flat", "developed" or { file = "inlet.csv" }'
    example = '"flat"'


_AGAINST_Z = 'Flow against z is direction = "-z".'


class Stream(Part):
    """A moving fluid: what flows in, how much of it, how warm."""

    fluid: Annotated[str, Material("its fluid: a [fluid.NAME] of the case or a built-in one", sample="water")]
    inlet_temperature: Annotated[float, Quantity("temperature at which it comes in", "temperature")]
    mass_flow: Annotated[
        float | None, Quantity("flow as mass per time", "mass_flow", at_least=0, instead=_AGAINST_Z)
    ] = None
    volume_flow: Annotated[
        float | None,
        Quantity(
            "flow as volume per time, at inlet temperature and outlet pressure",
            "volume_flow",
            at_least=0,
            instead=_AGAINST_Z,
        ),
    ] = None
    mean_velocity: Annotated[
        float | None,
        Quantity("flow as mean velocity at the inlet", "velocity", at_least=0, instead=_AGAINST_Z),
    ] = None
    reynolds: Annotated[
        float | None, Number("flow as Reynolds number of the bore at inlet state", at_least=0, sample=500)
    ] = None
    pressure_drop: Annotated[
        float | None,
        Quantity(
            "flow as the pressure drop that drives it: of the pressure in motion, from the axis in the inlet plane to "
            "the outlet plane",
            "pressure_difference",
            above=0,
            instead='Nothing flows without one: write mass_flow = "0 g/s". ' + _AGAINST_Z,
        ),
    ] = None
    inlet_profile: Annotated[
        str | FileProfile,
        Profile(
            "shape of the velocity at the inlet: flat, developed, or from a file with r_m, velocity, temperature_K"
        ),
    ] = "flat"
    direction: Annotated[str, Choice("the way it flows along z", ("+z", "-z"))] = "+z"
    outlet_pressure: Annotated[
        float,
        Quantity("absolute pressure at the outlet, at which fluid properties are taken", "pressure", above=0),
    ] = 101325.0

    FLOWS: ClassVar[tuple[str, ...]] = ("mass_flow", "volume_flow", "mean_velocity", "reynolds", "pressure_drop")
    not_yet = {
        "standard_volume_flow": "a flow at a standard state",
        "standard_state": "the standard state of such a flow",
        "tubes": "several equal tubes in parallel",
        "mixed_before": "mixing between tube passes",
        "continues": "a stream that goes on in another layer",
    }

    @property
    def is_still(self) -> bool:
        """Whether nothing flows."""
        return not any(getattr(self, flow) for flow in self.FLOWS)

    @property
    def slips_at_inlet(self) -> bool:
        """Whether the inlet profile moves along the wall, so that the wall's corner at the inlet is singular."""
        profile = self.inlet_profile
        return profile.velocity[-1] != 0.0 if isinstance(profile, FileProfile) else profile == "flat"


# Python evaluates a comprehension in a class body without the names of the class, so this is said after it.
Stream.displaces = {flow: tuple(other for other in Stream.FLOWS if other != flow) for flow in Stream.FLOWS}

# ------------------------------------------------------------------------------------------------ materials

_OUTSIDE_RANGE = Choice(
    "what to do where a table is left: refuse the answer, hold the end value, or extend it in a straight line",
    ("refuse", "hold", "extend"),
)


class Fluid(Part):
    """A fluid of the user's own. Each property is a constant or a law of temperature."""

    density: Annotated[Law, Property("density", "density", above=0)]
    specific_heat: Annotated[Law, Property("specific heat at constant pressure", "specific_heat", above=0)]
    conductivity: Annotated[Law, Property("thermal conductivity", "conductivity", above=0)]
    viscosity: Annotated[
        Law,
        Property(
            "dynamic viscosity; tables are interpolated in its logarithm",
            "viscosity",
            above=0,
            logarithmic=True,
        ),
    ]
    outside_range: Annotated[str, _OUTSIDE_RANGE] = "refuse"

    not_yet = {
        "shear_law": "a viscosity that depends on the shear rate",
        "thermal_expansion": "a fact that cautions need",
        "boiling_point": "a fact that cautions need",
        "freezing_point": "a fact that cautions need",
        "dew_point": "a fact that cautions need",
        "highest_allowed": "a fact that cautions need",
        "molar_mass": "a fact that cautions need",
    }


@dataclass(frozen=True)
class AlongAcross:
    """Conductivity of a wall that conducts differently across (r) and along (z)."""

    r: Law
    z: Law


@dataclass(frozen=True)
class Conductivity(Property):
    """A conductivity of a solid: one law, or { r = ..., z = ... }."""

    def read(self, value: Any, in_file: bool) -> Any:
        if isinstance(value, AlongAcross):
            return value
        if not isinstance(value, dict) or not ("r" in value or "z" in value):
            return super().read(value, in_file)
        problems = []
        read = {}
        # nothing along is a wall that only resists across; nothing across would cut the bore off
        for name, key in (
            ("r", Property(self.meaning, self.kind, above=0)),
            ("z", Property(self.meaning, self.kind, at_least=0)),
        ):
            if name not in value:
                problems.append(keys.Problem(value, f"needs `{name}`", 'Write { r = "0.3 W/m/K", z = "2 W/m/K" }.'))
                continue
            try:
                read[name] = key.read(value[name], in_file)
            except keys.BadValue as bad:
                problems += [
                    keys.Problem(p.value, p.allowed, p.instead, (name, *p.inner), p.looks_like) for p in bad.problems
                ]
        problems += [
            keys.Problem(value[name], "is not a known key", "", (name,)) for name in value if name not in ("r", "z")
        ]
        if problems:
            raise keys.BadValue(*problems)
        return AlongAcross(**read)

    def write(self, value: Any, raw: Any = None) -> str:
        if not isinstance(value, AlongAcross):
            return super().write(value, raw)
        raw = raw if isinstance(raw, dict) else {}
        return f"{{ r = {super().write(value.r, raw.get('r'))}, z = {super().write(value.z, raw.get('z'))} }}"


class Solid(Part):
    """A solid of the user's own."""

    conductivity: Annotated[
        Law | AlongAcross,
        Conductivity("thermal conductivity, or { r = across, z = along }", "conductivity", above=0),
    ]
    density: Annotated[Law | None, Property("density; only a solve in time needs it", "density", above=0)] = None
    specific_heat: Annotated[
        Law | None, Property("specific heat; only a solve in time needs it", "specific_heat", above=0)
    ] = None
    outside_range: Annotated[str, _OUTSIDE_RANGE] = "refuse"

    not_yet = {"highest_allowed": "a fact that cautions need"}


@dataclass(frozen=True)
class UsedFluid:
    """The fluid of a stream as a solve takes it. Laws take absolute temperature [K] and give SI."""

    name: str
    density: Law
    specific_heat: Law
    conductivity: Law
    viscosity: Law
    outside_range: str
    is_gas: bool
    source: str

    @property
    def span(self) -> tuple[float, float]:
        """Temperatures [K] that all four laws cover."""
        return _common_span(self.density, self.specific_heat, self.conductivity, self.viscosity)


@dataclass(frozen=True)
class UsedSolid:
    """A solid as a solve takes it. Laws take absolute temperature [K] and give SI; None where not given."""

    name: str
    conductivity_r: Law
    conductivity_z: Law
    density: Law | None
    specific_heat: Law | None
    outside_range: str
    source: str

    @property
    def span(self) -> tuple[float, float]:
        """Temperatures [K] that both conductivities cover."""
        return _common_span(self.conductivity_r, self.conductivity_z)


def _continued_down(law: Law) -> Law:
    """A built-in solid's table that begins at 300 K, as handbook tables do, continued straight to 240 K.

    Otherwise a tube at 20 degC would leave it. Near 300 K such conductivities are straight lines to a few
    per cent (common practice, no source).
    """
    low, begins = 240.0, 300.0
    if not isinstance(law, laws.Table) or law.temperature[0] != begins:
        return law
    (T0, T1), (k0, k1) = law.temperature[:2], law.value[:2]
    return laws.Table((low, *law.temperature), (k0 + (k1 - k0) * (low - T0) / (T1 - T0), *law.value), law.logarithmic)


def _common_span(*of: Law) -> tuple[float, float]:
    spans = [law.span for law in of]
    return max(span[0] for span in spans), min(span[1] for span in spans)


# ------------------------------------------------------------------------------------------------ geometry


class Layer(Part):
    """One layer of a stack: exactly one of stream, solid, void."""

    name: Annotated[str, Text("its name; left out, that of its stream or solid", name=True)] = ""
    stream: Annotated[str | None, Text("the stream that flows in it", name=True, sample="water")] = None
    solid: Annotated[
        str | None, Material("its solid: a [solid.NAME] of the case or a built-in one", sample="copper")
    ] = None
    void: Annotated[bool, Switch("a perfect insulator: no heat crosses it")] = False
    diameter: Annotated[
        float | None, Quantity("outer diameter of the layer on the axis (the bore)", "length", above=0)
    ] = None
    thickness: Annotated[
        float | None,
        Quantity(
            "thickness of a layer that is not on the axis",
            "length",
            above=0,
            instead="Give the thickness of this layer alone, or its `outer_diameter`.",
        ),
    ] = None
    outer_diameter: Annotated[float | None, Quantity("outer diameter, instead of the thickness", "length", above=0)] = (
        None
    )
    contact_resistance: Annotated[
        float | None,
        Quantity(
            "thermal resistance at its inner face, fouling on a wetted face too",
            "contact_resistance",
            at_least=0,
        ),
    ] = None
    heat_per_volume: Annotated[float | None, Quantity("heat generated in it, per volume", "heat_per_volume")] = None
    cells_across: Annotated[
        int | None, Number("number of cells across it", whole=True, at_least=1, at_most=2000, sample=12)
    ] = None

    displaces = {
        "thickness": ("outer_diameter",),
        "outer_diameter": ("thickness",),
        "stream": ("solid", "void"),
        "solid": ("stream", "void"),
        "void": ("stream", "solid"),
    }
    not_yet = {
        "gas_gap": "a gap filled with gas",
        "emissivity": "radiation across a gap",
        "bend_radius": "a curved tube",
    }

    @model_validator(mode="before")
    @classmethod
    def _named_after_its_content(cls, data: Any) -> Any:
        if isinstance(data, dict) and "name" not in data:
            return data | {"name": layer_name(data)}
        return data

    @property
    def kind(self) -> str:
        """ "stream", "solid" or "void"."""
        return "stream" if self.stream is not None else "solid" if self.solid is not None else "void"


def layer_name(data: Mapping) -> str:
    """The name of a layer given as a table: its own, or its stream's or solid's in signs a path can hold."""
    given = data.get("name")
    if isinstance(given, str):
        return given
    content = next(
        (data[what] for what in ("stream", "solid") if isinstance(data.get(what), str)),
        "void" if data.get("void") else "layer",
    )
    plain = "".join(mark if mark.isascii() and (mark.isalnum() or mark in " -_") else " " for mark in content)
    return " ".join(plain.split()) or "layer"


class Outside(Part):
    """A thermal condition: insulated, a prescribed temperature, or a sum of heat brought in and a film.

    Heat is positive into the tube. `z` of a table counts from the section's start.
    """

    insulated: Annotated[bool, Switch("no heat crosses")] = False
    temperature: Annotated[
        float | ZTable | None,
        Along("prescribed temperature: a plate, a clamp, condensing steam", "temperature"),
    ] = None
    contact_resistance: Annotated[
        float | ZTable | None,
        Along("thermal resistance between that temperature and the surface", "contact_resistance", at_least=0),
    ] = None
    heat_flux: Annotated[float | ZTable | None, Along("heat brought in per area", "heat_flux")] = None
    heat: Annotated[float | None, Quantity("heat brought in, total over the section", "heat")] = None
    heat_per_length: Annotated[float | ZTable | None, Along("heat brought in per length", "heat_per_length")] = None
    film_coefficient: Annotated[
        float | ZTable | None,
        Along(
            "heat transfer coefficient to the surroundings at `ambient`",
            "film_coefficient",
            at_least=0,
            later_words=("still air",),
        ),
    ] = None
    ambient: Annotated[
        float | ZTable | None,
        Along("temperature of the surroundings, with `film_coefficient`", "temperature"),
    ] = None

    HEATS: ClassVar[tuple[str, ...]] = ("heat_flux", "heat", "heat_per_length")
    displaces = {
        "insulated": (
            "temperature",
            "contact_resistance",
            "heat_flux",
            "heat",
            "heat_per_length",
            "film_coefficient",
            "ambient",
        ),
        "temperature": ("insulated", "heat_flux", "heat", "heat_per_length", "film_coefficient", "ambient"),
        "contact_resistance": ("insulated",),
        "heat_flux": ("insulated", "temperature", "contact_resistance", "heat", "heat_per_length"),
        "heat": ("insulated", "temperature", "contact_resistance", "heat_flux", "heat_per_length"),
        "heat_per_length": ("insulated", "temperature", "contact_resistance", "heat_flux", "heat"),
        "film_coefficient": ("insulated", "temperature", "contact_resistance"),
        "ambient": ("insulated", "temperature", "contact_resistance"),
    }
    not_yet = {
        "emissivity": "radiation to the surroundings",
        "surroundings": "radiation to the surroundings",
        "steam": "condensing steam",
        "service": "a service stream outside",
        "around": "a condition that differs around the tube",
        "heat_limit": "a heater with limited power",
    }


class EndFace(Outside):
    """The condition of a solid's end face: the choices of `outside`, each one value for the whole face."""

    temperature: Annotated[float | None, Quantity("prescribed temperature", "temperature")] = None
    contact_resistance: Annotated[
        float | None,
        Quantity("thermal resistance between that temperature and the face", "contact_resistance", at_least=0),
    ] = None
    heat_flux: Annotated[float | None, Quantity("heat brought in per area", "heat_flux")] = None
    heat: Annotated[float | None, Quantity("heat brought in, total over the face", "heat")] = None
    heat_per_length: Annotated[None, Quantity("not for an end face", "heat_per_length")] = None
    film_coefficient: Annotated[
        float | None,
        Quantity("heat transfer coefficient to the surroundings at `ambient`", "film_coefficient", at_least=0),
    ] = None
    ambient: Annotated[
        float | None, Quantity("temperature of the surroundings, with `film_coefficient`", "temperature")
    ] = None


class Section(Part):
    """A length of the tube with one stack of layers and one condition outside."""

    name: Annotated[str, Text("its name", name=True, sample="heater")]
    length: Annotated[float, Quantity("its length along z", "length", above=0)]
    outside: Outside
    generated: Annotated[
        dict[str, float],
        PerName("heat generated in the named layer within this section", Quantity("heat", "heat"), name="LAYER"),
    ] = {}
    joint_length: Annotated[
        float | None,
        Quantity(
            "length of the linear ramp between two prescribed temperatures, centred on the joint at "
            "this section's start",
            "length",
            above=0,
        ),
    ] = None
    layer: tuple[Layer, ...] | None = None

    not_yet = {"bend_radius": "a curved section", "repeat": "a section that repeats"}


class Ends(Part):
    """Conditions of the solids' end faces, under "all" for all of them or under the layer's name."""

    first: dict[str, EndFace] = {"all": EndFace(insulated=True)}
    last: dict[str, EndFace] = {"all": EndFace(insulated=True)}

    @model_validator(mode="before")
    @classmethod
    def _one_for_all(cls, data: Any) -> Any:
        """`first = { insulated = true }` is one condition for all layers."""
        if not isinstance(data, dict):
            return data
        return {end: {"all": value} if is_one_condition(value) else value for end, value in data.items()}

    def of(self, end: str, layer: str) -> EndFace:
        """The condition of a solid layer at the "first" or "last" end."""
        faces = getattr(self, end)
        return faces.get(layer) or faces.get("all") or EndFace(insulated=True)


def is_one_condition(value: Any) -> bool:
    """Whether an end is given as one condition, not as a table of layers."""
    if isinstance(value, EndFace):
        return True
    return isinstance(value, dict) and not any(
        isinstance(entry, dict | EndFace) and not keys.has_tolerance(entry) for entry in value.values()
    )


# ------------------------------------------------------------------------------------------------ the rest


class Sensor(Part):
    """A place to read."""

    z: Annotated[float, Quantity("distance from the tube's start", "length", at_least=0)]
    at: Annotated[
        str,
        Text(
            'where in the cross-section: "outside", "axis", "bulk", "LAYER inner" or "LAYER outer"',
            sample="outside",
        ),
    ]

    not_yet = {"plus_minus": "the error of a sensor"}


@dataclass(frozen=True)
class Terms(ListOf):
    """A list of paths of quantities, one at least."""

    def read(self, value: Any, in_file: bool) -> tuple:
        read = super().read(value, in_file)
        if not read:
            raise self.refuse(value, "is empty", f"Write {self.example}, or take it out.")
        return read


class Combination(Part):
    """A quantity of the user's own: quantities of the results added and taken away."""

    plus: Annotated[
        tuple[str, ...],
        Terms("quantities that are added, by their paths", Text("path", sample="sensor.behind")),
    ]
    minus: Annotated[
        tuple[str, ...],
        Terms("quantities that are taken away, by their paths", Text("path", sample="sensor.before")),
    ] = ()


class MeshChoice(Part):
    """The mesh, where the tool's own choice is not wanted."""

    at_most: Annotated[
        int | None,
        Number(
            "cells in all; 40 000 where it is not given, and up to 400 000 where `accuracy` asks for more",
            whole=True,
            at_least=100,
            at_most=5_000_000,
            sample=40000,
        ),
    ] = None
    radial: Annotated[
        int | None,
        Number(
            "cells from the axis to the bore's wall, other layers in proportion",
            whole=True,
            at_least=2,
            at_most=2000,
            sample=48,
        ),
    ] = None
    axial: Annotated[
        int | None, Number("cells along the tube", whole=True, at_least=2, at_most=100_000, sample=600)
    ] = None
    stretch_to_walls: Annotated[
        float | None, Number("largest over smallest cell across a layer", at_least=1, at_most=1000, sample=4)
    ] = None
    stretch_to_ends: Annotated[
        float | None,
        Number(
            "largest over smallest cell along a section, towards inlets, joints and heater edges",
            at_least=1,
            at_most=10_000,
            sample=20,
        ),
    ] = None


class Physics(Part):
    """Switches for single effects."""

    viscous_heating: Annotated[bool, Switch("heat from friction, always together with the work of pressure")] = True
    axial_conduction_in_streams: Annotated[
        bool, Switch("heat conducted along z in the fluids; without it they carry heat along z by their flow alone")
    ] = True

    not_yet = {
        "buoyancy": "free convection in a vertical tube",
        "slip": "slip at the wall",
        "steady": "a solve in time",
    }


class SolveChoice(Part):
    """When the solve is good enough."""

    stop_below: Annotated[
        float,
        Number("normalised residual at which the solve ends", at_least=1e-13, at_most=1e-2, sample=1e-8),
    ] = 1e-8

    accuracy: Annotated[
        Tolerance | dict[str, Tolerance] | None,
        Accuracy("largest mesh error of all headline quantities, or of named ones, for which the mesh is refined"),
    ] = None


class ResultsChoice(Part):
    """What to write beside the standing results."""

    stations: Annotated[
        tuple[float, ...],
        ListOf("places of radial profiles, from the tube's start", Quantity("distance", "length", at_least=0)),
    ] = ()


class Case(Part):
    """A whole case: immutable, checked, in SI.

    Made by `axicfd.load`, by `Case(**tables)` with plain SI floats or text with units, or by `replace`.
    Raises `InputError` with every mistake found.
    """

    title: Annotated[str, Text("what the case is about", sample="Heated water tube")] = "untitled"
    z_axis: Annotated[
        str, Choice("where z points; gravity acts along z only when vertical", ("horizontal", "up", "down"))
    ] = "horizontal"
    stream: dict[str, Stream]
    fluid: dict[str, Fluid] = {}
    solid: dict[str, Solid] = {}
    layer: tuple[Layer, ...] = ()
    section: tuple[Section, ...]
    ends: Ends = Ends()
    sensor: dict[str, Sensor] = {}
    quantity: dict[str, Combination] = {}
    limits: Annotated[
        dict[str, Limit],
        Limits("bounds of quantities by their paths: the answer passes, fails, or is too close to call"),
    ] = {}
    accept: Annotated[dict[str, str], Accepted("cautions that may stand, by their codes, each with the reason")] = {}
    mesh: MeshChoice = MeshChoice()
    physics: Physics = Physics()
    solve: SolveChoice = SolveChoice()
    results: ResultsChoice = ResultsChoice()

    not_yet = {
        "time": "a solve in time",
        "also_without_flow": "a second solve with the flow stopped",
    }

    _tree: dict = PrivateAttr(default_factory=dict)
    _tolerances: dict[str, InputTolerance] = PrivateAttr(default_factory=dict)

    @model_validator(mode="wrap")
    @classmethod
    def _read_and_checked(cls, data: Any, handler: Any, info: Any) -> Any:
        """Everything wrong with the case at once, in our own words."""
        from axicfd.case import checks, presence, read

        source = (info.context or {}).get("source") or read.Source()
        if not isinstance(data, dict):
            return handler(data)
        tree = read.with_names(read.plain(data))
        structure = presence.in_structure(tree, source)
        mistakes = structure + presence.in_conditions(tree, source)
        try:
            case = handler(read.with_kinds(tree))
        except ValidationError as found:
            raise read.as_input_error(found, tree, source, mistakes) from None
        case._tree = tree
        case._tolerances = read.tolerances_in(case)
        if not structure:
            mistakes += checks.contradictions(case, source)
        if mistakes:
            raise read.InputError(mistakes)
        return case

    def __eq__(self, other: object) -> bool:
        """Equal when every value and tolerance is: how they were written does not count."""
        return (
            isinstance(other, Case)
            and all(getattr(self, name) == getattr(other, name) for name in type(self).model_fields)
            and self._tolerances == other._tolerances
        )

    __hash__ = None  # type: ignore[assignment]

    def __repr__(self) -> str:
        return f"<Case {self.title!r}: {', '.join(section.name for section in self.section)}>"

    __str__ = __repr__

    def replace(self, changes: Mapping[str, Any]) -> Case:
        """A new case with other values: {"stream.oil.mass_flow": 0.004, "layer.tube.thickness": "2 mm"}.

        Keys are dotted paths of the case file; floats are SI; None takes a key out. Setting one of several
        alternatives (such as mass_flow and volume_flow) removes the others. Raises `InputError`.
        """
        from axicfd.case import paths, read

        tree = paths.replaced(self._tree, changes)
        return read.build(tree, in_file=False)

    @property
    def tolerances(self) -> dict[str, InputTolerance]:
        """Path -> tolerance of every value that was given with one, in the order of the case."""
        return dict(self._tolerances)

    def unit_of(self, path: str) -> str | None:
        """The unit in which the user wrote the value at a path, or None where there was none."""
        from axicfd import units
        from axicfd.case import paths

        value = paths.find(self._tree, path)
        if isinstance(value, dict):
            value = value.get("value")
        if isinstance(value, list | tuple) and value:
            value = value[0]
        if not isinstance(value, str):
            return None
        try:
            return units.split(value)[1] or None
        except units.UnitError:
            return None

    def fluid_of(self, stream: str) -> UsedFluid:
        """The fluid of a stream, own or built-in."""
        used = self.stream[stream]
        name = used.fluid
        own = self.fluid.get(name)
        if own is None:
            built_in = FLUIDS[name].at_pressure(used.outlet_pressure)
            return UsedFluid(
                name,
                built_in.density,
                built_in.specific_heat,
                built_in.conductivity,
                built_in.viscosity,
                "refuse",
                built_in.is_gas,
                built_in.source,
            )
        four = (own.density, own.specific_heat, own.conductivity, own.viscosity)
        is_gas = float(own.density(used.inlet_temperature)) < GAS_BELOW_DENSITY
        if own.outside_range == "extend":
            four = tuple(law.extended() for law in four)  # type: ignore[assignment]
        return UsedFluid(name, *four, own.outside_range, is_gas, "given in the case")

    def solid_of(self, name: str) -> UsedSolid:
        """A solid by its name, own or built-in."""
        own = self.solid.get(name)
        if own is None:
            built_in = SOLIDS[name]
            conductivity = _continued_down(built_in.conductivity)
            return UsedSolid(
                name,
                conductivity,
                conductivity,
                built_in.density,
                built_in.specific_heat,
                "refuse",
                built_in.source,
            )
        across, along = (
            (own.conductivity.r, own.conductivity.z)
            if isinstance(own.conductivity, AlongAcross)
            else (own.conductivity,) * 2
        )
        if own.outside_range == "extend":
            across, along = across.extended(), along.extended()
        return UsedSolid(name, across, along, own.density, own.specific_heat, own.outside_range, "given in the case")

    def layers_of(self, section: Section) -> tuple[Layer, ...]:
        """The stack of a section: its own, or the case's."""
        return self.layer if section.layer is None else section.layer


def expect_case(given: object) -> None:
    """Raise `InputError` where something else was given for a case, most often the name of its file."""
    if not isinstance(given, Case):
        known = f'"{given}"' if isinstance(given, str | Path) else '"heater.toml"'
        raise bad_input("case", None, f"is {type(given).__name__}, not a Case", f"Write axicfd.load({known}).")
