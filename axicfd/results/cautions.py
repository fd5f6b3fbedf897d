"""Cautions: where the model, or the answer, stops being good, as a list of rules.

A rule is a generator of `Caution`s; adding one means writing a function and naming it in BEFORE or AFTER. A
rule that could not judge says so with `checked = False`. Nothing else in the package warns.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator, Sequence
from dataclasses import asdict, dataclass, field
from functools import cached_property
from typing import Any

import numpy as np

from axicfd import units
from axicfd.case.checks import GAS_DENSITY_CHANGE
from axicfd.case.keys import ZTable
from axicfd.case.layout import Layout, PlacedSection, layout
from axicfd.case.limits import CAUTIONS
from axicfd.case.model import Case, Law, UsedFluid
from axicfd.errors import RefusedModel
from axicfd.materials.library import ATMOSPHERE, SOLIDS
from axicfd.mesh.grid import Array, Piece
from axicfd.results.axial import StreamView, stream_view
from axicfd.results.summary import STANDARD_GRAVITY
from axicfd.solver import boundary
from axicfd.solver.state import Solution
from axicfd.theory import duct_heat, groups

SAFETY = (
    "Heat and pressure can hurt. These results support, and do not replace, design to the local codes by licensed "
    "practice. With flow stopped the wall can get far hotter than shown."
)

PRACTICE = "common practice, no source"
OWN_LIMIT = "this tool's own target"

REYNOLDS_CAUTION = 2000.0
REYNOLDS_REFUSED = 4000.0
REYNOLDS_SOURCE = "common practice, after Reynolds 1883 (from memory): tubes may turn turbulent from 2000 to 2300 on"
ACCEPT_REYNOLDS = 'Where the flow is known to stay laminar, accept it: reynolds = "reason" in [accept].'
RANGE_TOLERANCE = 1e-4  # share of the temperature span by which a law may be left
GAS_DENSITY_CAUTION = 0.01
WARM_END = 0.01  # share of the temperature span
HEAT_PAST_END = 0.01  # share of the case's heat
HEAT_ALONG_OUTLET = 0.01  # share of the case's heat
OUTLET_CHANGE = 0.01  # change of the peak velocity over the last diameter
SMALLEST_PECLET = 1.0
MASS_TARGET = 1e-10
ENERGY_TARGET = 1e-8
SMALLEST_RAYLEIGH = 1.0  # buoyant motion then spreads less heat across the bore than conduction (order of magnitude)
MATTERS = 1e-3  # K; smaller differences raise no caution, as in the scale of the heat balance
NOTICED = 1.0  # K between wall and inlet from which boiling, freezing or condensing is mentioned
FADED = 4.0  # reaches after which the warmth of a wall is down to 2 %
SHORT = 0.01  # share of the tube's length that no advice is given about before a solve


@dataclass(frozen=True)
class Caution:
    """One caution.

    code         : short name, the same for every case
    text         : one or two sentences: number, place, limit, which way the answer errs, what to do
    place        : where, in words
    found, limit : the number and its limit, SI; None without one
    source       : of the limit
    checked      : False where the case does not say enough to judge
    weight       : about how far the answer may be off, in per cent of its scale; a judgement, it only orders
    """

    code: str
    text: str
    place: str = ""
    found: float | None = None
    limit: float | None = None
    source: str = PRACTICE
    checked: bool = True
    weight: float = 1.0

    def __post_init__(self) -> None:
        if self.code not in CAUTIONS:
            raise ValueError(f"{self.code} is not in the list of cautions that [accept] knows")


def before(case: Case) -> list[dict[str, Any]]:
    """Cautions known before a solve, heaviest first. Raises `RefusedModel` for a flow that is not laminar."""
    ahead = Ahead(case, layout(case))
    return _sorted(case, (caution for rule in BEFORE for caution in rule(ahead)))


def after(
    case: Case,
    layout: Layout,
    summary: dict[str, Any],
    axial: dict[str, dict[str, Array]],
    solution: Solution,
) -> list[dict[str, Any]]:
    """Cautions of a solved case, the heaviest first.

    summary, axial : the tree of headline quantities and the curves of every stream
    """
    found = Found(case, layout, solution, summary, axial)
    return _sorted(case, (caution for rule in AFTER for caution in rule(found)))


def refusal(case: Case, layout: Layout, solution: Solution) -> str | None:
    """One sentence why a converged answer must not be used, or None."""
    if not solution.converged:
        return None
    found = Found(case, layout, solution)
    for left in _left_ranges(found):
        if left.policy == "refuse":
            return left.sentence(case) + (
                ' Give a wider table, or change the heating or the flow; outside_range = "hold" or "extend" '
                "in a "
                "material of the case lets the answer stand with a caution."
            )
    largest, z = _largest_reynolds(found)
    if largest > REYNOLDS_REFUSED and "reynolds" not in case.accept:
        return (
            f"The Reynolds number of {found.name} reaches {_g(largest)} at z = {_length(case, z)}, above "
            f"{_g(REYNOLDS_REFUSED)}: the flow is not laminar there. Lower the flow, widen the bore or heat "
            f"less. {ACCEPT_REYNOLDS}"
        )
    if found.fluid.is_gas and not found.fluid.density.is_constant and found.flows:
        change, z = _density_change(found)
        if change > GAS_DENSITY_CHANGE:
            return (
                f"The density of the gas {found.fluid.name} would change by {_percent(change)} at z = "
                f"{_length(case, z)}, and density is held at its inlet value so far: more than "
                f"{_percent(GAS_DENSITY_CHANGE)} is not available yet. Heat less, or raise the flow."
            )
    return None


def standing(cautions: list[dict[str, Any]]) -> list[dict[str, Any]]:
    """Those that the case does not accept; what could not be checked stands too."""
    return [caution for caution in cautions if not caution.get("accepted")]


def _sorted(case: Case, cautions: Iterator[Caution]) -> list[dict[str, Any]]:
    """As plain data, the heaviest first; `accepted` is the reason the case gives, or None."""
    by_weight = sorted(cautions, key=lambda caution: -caution.weight)
    return [{**asdict(caution), "accepted": case.accept.get(caution.code)} for caution in by_weight]


# ----- what rules look at


@dataclass(frozen=True)
class Ahead:
    """A case before its solve, with the bounds that hand numbers give."""

    case: Case
    layout: Layout

    @property
    def name(self) -> str:
        return self.layout.stream_names[0]

    @property
    def mirrored(self) -> bool:
        return self.case.stream[self.name].direction == "-z"

    @cached_property
    def fluid(self) -> UsedFluid:
        return self.case.fluid_of(self.name)

    @property
    def t_in(self) -> float:
        return self.case.stream[self.name].inlet_temperature

    @cached_property
    def mass_flow(self) -> float:
        return boundary.estimated_mass_flow(self.case, self.layout, self.name)

    @property
    def flows(self) -> bool:
        return self.mass_flow > 0.0

    @property
    def bore(self) -> float:
        return self.layout.bore_diameter

    @property
    def capacity_flow(self) -> float:
        """m cp at the inlet [W/K]."""
        return self.mass_flow * float(self.fluid.specific_heat(self.t_in))

    @property
    def peclet(self) -> float:
        """At the inlet state: 4 m cp / (pi D k)."""
        return 4.0 * self.capacity_flow / (math.pi * self.bore * float(self.fluid.conductivity(self.t_in)))

    def reynolds(self, T: Any) -> Any:
        """Re = 4 m / (pi D mu) where the bulk has the absolute temperature T."""
        return 4.0 * self.mass_flow / (math.pi * self.bore * self.fluid.viscosity(T))

    @cached_property
    def held(self) -> tuple[float, ...]:
        """All temperatures [K] that the outside holds or draws towards."""
        values = []
        for section in self.layout.sections:
            for value in (section.outside.temperature, section.outside.ambient):
                if value is not None:
                    values += list(value.value) if isinstance(value, ZTable) else [value]
        return tuple(values)

    @cached_property
    def bulk_reach(self) -> tuple[float, float]:
        """(lowest, highest) bulk temperature [K] that is possible.

        All prescribed heat goes into the stream, and held temperatures act on the bore itself.
        """
        if not self.flows:
            return self.t_in, self.t_in
        heats = [_heat(section) for section in self.layout.sections]
        acting = math.fsum(section.length for section in self.layout.sections if _holds(section))
        share = 0.0
        if acting:
            x = groups.x_star(acting, self.bore, self.peclet)
            share = 1.0 - math.exp(-4.0 * float(duct_heat.mean_nusselt_T(x)) * x)
        low = share * min(0.0, min(self.held, default=self.t_in) - self.t_in)
        high = share * max(0.0, max(self.held, default=self.t_in) - self.t_in)
        cooled = math.fsum(heat for heat in heats if heat < 0.0) / self.capacity_flow
        heated = math.fsum(heat for heat in heats if heat > 0.0) / self.capacity_flow
        return self.t_in + low + cooled, self.t_in + high + heated

    @property
    def heat_is_taken_out(self) -> bool:
        """Whether a given heat cools the stream, the further the less flows."""
        return any(_heat(section) < 0.0 for section in self.layout.sections)

    @property
    def is_heated(self) -> bool:
        """Whether anything warms or cools the tube."""
        return any(_acts(section, self.t_in) for section in self.layout.sections)

    def reach_upstream(self, section: PlacedSection) -> float:
        """Length [m] over which the wall's warmth fades towards the inlet by a factor e; inf if never.

        Wall W and fluid T from the inlet temperature, both ~ exp(g z), with a loss G to the outside:
        k A g^2 W = h P (W - T) + G W and m cp g T = h P (W - T), Nu = 48/11. Limits: k A / (m cp) where wall
        and fluid exchange heat well, the fin length sqrt(k A / (h P)) where they do not.
        """
        carried = _along(self.case, section, self.t_in)
        k = float(self.fluid.conductivity(self.t_in))
        carried += k * groups.tube_area(self.bore)
        exchange = duct_heat.NU_H * k * math.pi  # h P [W/(m K)]
        film = section.outside.film_coefficient or 0.0
        film = film.at(0.0) if isinstance(film, ZTable) else film
        lost = film * 2.0 * math.pi * section.layers[-1].r_outer
        rate = math.sqrt((exchange + lost) / carried)
        for _ in range(200):  # falls to the root from above, at least halving the distance in ln
            taken = self.capacity_flow * rate
            rate = math.sqrt((lost + exchange * taken / (taken + exchange)) / carried)
            if rate < 1e-12:
                return math.inf
        return 1.0 / rate

    def reach_downstream(self, section: PlacedSection) -> float:
        """Length [m] over which a wall comes to the bulk temperature behind a heated part: its fin length."""
        k = float(self.fluid.conductivity(self.t_in))
        return groups.spreading_length(1.0, _along(self.case, section, self.t_in), duct_heat.NU_H * k * math.pi, 1.0)


@dataclass(frozen=True)
class Found(Ahead):
    """A case after its solve. Temperatures of `view` and `solution` count from the inlet temperature."""

    solution: Solution
    summary: dict[str, Any] = field(default_factory=dict)
    axial: dict[str, dict[str, Array]] = field(default_factory=dict)

    @cached_property
    def mass_flow(self) -> float:
        return self.view.mass_flow

    @cached_property
    def view(self) -> StreamView:
        return stream_view(self.case, self.solution, self.name)

    @cached_property
    def span(self) -> float:
        """Largest |T - T_in| of the case [K]."""
        pieces = [p for p in self.solution.grid.pieces if p.layer.kind != "void"]
        return max(float(np.abs(_temperatures(self.solution, piece)).max()) for piece in pieces)

    @cached_property
    def heat(self) -> float:
        """Heat of the case [W]: the largest of what crosses its boundaries, is made, or is taken up."""
        h = self.solution.heat
        crossing = sum(float(np.abs(q).sum()) for q in (h.outside, h.first, h.last))
        made = [float(np.abs(q).sum()) for q in (h.generated, h.viscous)]
        return max(crossing, *made, abs(float(self.view.enthalpy[-1] - self.view.enthalpy[0])))

    @property
    def carries_heat(self) -> bool:
        """Whether the stream flows, and the heat is more than what changes it by a millikelvin."""
        return self.flows and self.heat > self.capacity_flow * MATTERS

    @cached_property
    def bulk(self) -> Array:
        """(nz + 1,) absolute bulk temperature [K] in flow direction; the inlet's where nothing flows."""
        bulk = self.view.bulk
        return np.where(np.isfinite(bulk), bulk, 0.0) + self.t_in

    def place(self, z: float) -> float:
        """Distance from the tube's start of a distance from the stream's inlet [m]."""
        return self.layout.length - z if self.mirrored else z

    def headline(self, key: str) -> float | None:
        """A number of the stream's summary, or None."""
        value = ((self.summary.get("stream") or {}).get(self.name) or {}).get(key)
        return None if value is None or not math.isfinite(value) else float(value)

    def curve(self, column: str) -> Array | None:
        """A column of the stream's curves in flow direction, or None where there is none."""
        values = (self.axial.get(self.name) or {}).get(column)
        if values is None:
            return None
        values = np.asarray(values, dtype=float)
        return values[::-1] if self.mirrored else values


def _heat(section: PlacedSection) -> float:
    """Heat [W] that a section's outside brings in regardless of temperature, and that is generated in it."""
    outside = section.outside
    heat = math.fsum(section.heat_density(layer) * layer.area * section.length for layer in section.layers)
    heat += outside.heat or 0.0
    z = np.array([section.z0, section.z1])
    for value, per in (
        (outside.heat_flux, 2.0 * math.pi * section.layers[-1].r_outer * section.length),
        (outside.heat_per_length, section.length),
    ):
        if value is not None:
            heat += float(boundary.cell_means(value, section.z0, z)[0]) * per
    return heat


def _holds(section: PlacedSection) -> bool:
    """Whether the outside holds a temperature or draws towards one."""
    return section.outside.temperature is not None or bool(section.outside.film_coefficient)


def _acts(section: PlacedSection, t_in: float) -> bool:
    """Whether a section warms or cools a tube that is at its inlet temperature."""
    if _heat(section):
        return True
    value = section.outside.temperature if section.outside.temperature is not None else section.outside.ambient
    if not _holds(section) or value is None:
        return False
    return any(abs(T - t_in) > 1e-9 for T in (value.value if isinstance(value, ZTable) else (value,)))


def _solids(section: PlacedSection) -> list[Any]:
    """The solid layers that touch the stream or each other: those inside the first void."""
    layers = []
    for layer in section.layers:
        if layer.kind == "void":
            break
        if layer.kind == "solid":
            layers.append(layer)
    return layers


def _along(case: Case, section: PlacedSection, T: float) -> float:
    """k A of the solids along z [W m/K] at temperature T."""
    return math.fsum(float(case.solid_of(s.material).conductivity_z(T)) * s.area for s in _solids(section))


def _temperatures(solution: Solution, piece: Piece) -> Array:
    """(rows, n + 2) temperatures of a piece from the inlet temperature: inner face, cells, outer face.

    On the axis the inner face is the first cell.
    """
    heat, rows = solution.heat, slice(piece.i0, piece.i1)
    cells = heat.t[piece.cells]
    inner = heat.plus[rows, piece.j0] if solution.grid.r[piece.j0] > 0.0 else cells[:, 0]
    return np.column_stack([inner, cells, heat.minus[rows, piece.j1]])


# ----- numbers in words


def _g(value: float) -> str:
    return f"{value:.3g}" if not 1e3 <= abs(value) < 1e6 else f"{value:.0f}"


def _about(value: float) -> str:
    """Two digits, with thousands apart."""
    return f"{float(f'{value:.2g}'):,.0f}".replace(",", " ") if value >= 10 else f"{value:.2g}"


def _percent(share: float) -> str:
    return f"{100.0 * share:.2g} %" if share < 1.0 else f"{100.0 * share:.0f} %"


def _temperature(case: Case, T: float) -> str:
    """An absolute temperature in the unit of the inlet temperature, otherwise degC."""
    name = next(iter(case.stream))
    unit = case.unit_of(f"stream.{name}.inlet_temperature") or "degC"
    return f"{units.convert(T, unit, 'temperature'):.4g} {unit}"


def _length(case: Case, z: float) -> str:
    """A length in the unit of the longest section, otherwise in m; small ones in mm."""
    longest = max(case.section, key=lambda section: section.length)
    unit = case.unit_of(f"section.{longest.name}.length") or "m"
    if unit == "m" and abs(z) < 0.1:
        unit = "mm"
    return f"{units.convert(z, unit, 'length'):.3g} {unit}"


# ----- rules: the numbers


def _not_converged(found: Found) -> Iterator[Caution]:
    if found.summary.get("converged", found.solution.converged):
        return
    reason = found.solution.stop_reason
    yield Caution(
        "not-converged",
        f"The solve ended with the residual {found.solution.residual:.1e} ({reason}) above "
        f"{found.case.solve.stop_below:.1e}: the numbers are where the iteration stopped and may be off "
        "either way. "
        "Use them only to see what goes wrong.",
        place="whole tube",
        found=found.solution.residual if math.isfinite(found.solution.residual) else None,
        limit=found.case.solve.stop_below,
        source="stop_below of the case",
        weight=1000.0,
    )


def _balance(found: Found) -> Iterator[Caution]:
    balance = found.summary.get("balance") or {}
    for what, target in (("mass", MASS_TARGET), ("energy", ENERGY_TARGET)):
        off = balance.get(what)
        if off is None:
            continue
        if not math.isfinite(off):
            yield Caution(
                "balance",
                f"The balance of {what} could not be formed.",
                "whole tube",
                checked=False,
                weight=300.0,
            )
        elif off > target:
            yield Caution(
                "balance",
                f"The balance of {what} misses by {off:.1e} of its largest part, above {target:.0e}: the "
                "fields are not "
                "solved far enough. Lower stop_below in [solve], and distrust differences smaller than this.",
                place="whole tube",
                found=float(off),
                limit=target,
                source=OWN_LIMIT,
                weight=max(0.1, min(300.0, 100.0 * off)),
            )


def _mesh_error(found: Found) -> Iterator[Caution]:
    """The accuracy asked for was not reached."""
    asked = found.summary.get("accuracy")
    if not asked or asked["reached"]:
        return
    worst = asked["quantity"].get(asked["worst"] or "", {})
    half, allowed = worst.get("half_width"), worst.get("allowed")
    off = half / allowed if half is not None and allowed else math.inf
    yield Caution(
        "mesh-error",
        "Mesh errors are larger than the accuracy asked for"
        + (f", by most in {asked['worst']}" if worst else "")
        + ": what stopped the refinement stands beside the answer. The values hold within the mesh errors printed.",
        place=str(asked["worst"] or "whole tube"),
        found=half,
        limit=allowed,
        source="accuracy of the case",
        weight=max(1.0, min(100.0, off)),
    )


# ----- rules: the flow


def _reynolds_caution(what: str, largest: float, place: str) -> Caution:
    return Caution(
        "reynolds",
        f"{what}, above {_g(REYNOLDS_CAUTION)}: the flow {'is as a rule' if largest > REYNOLDS_REFUSED else 'may be'} "
        "turbulent there, and heat transfer and pressure drop are then higher than shown. Lower the flow, or use a "
        "turbulent correlation beside this answer.",
        place=place,
        found=largest,
        limit=REYNOLDS_CAUTION,
        source=REYNOLDS_SOURCE,
        weight=100.0 * largest / REYNOLDS_CAUTION,
    )


def _reynolds_ahead(ahead: Ahead) -> Iterator[Caution]:
    at_inlet = float(ahead.reynolds(ahead.t_in))
    if ahead.case.stream[ahead.name].pressure_drop is not None:
        return  # the flow is a rough guess until it is solved
    if at_inlet > REYNOLDS_REFUSED and "reynolds" not in ahead.case.accept:
        raise RefusedModel(
            f"The Reynolds number of {ahead.name} is {_g(at_inlet)} at the inlet, above "
            f"{_g(REYNOLDS_REFUSED)}: the flow "
            "is not laminar, and laminar flow is all that is computed here. Lower the flow or widen the bore. "
            f"{ACCEPT_REYNOLDS}"
        )
    if at_inlet > REYNOLDS_CAUTION:
        yield _reynolds_caution(f"The Reynolds number is {_g(at_inlet)} at the inlet", at_inlet, "inlet")
        return
    possible = max(float(ahead.reynolds(T)) for T in ahead.bulk_reach)
    if possible > REYNOLDS_CAUTION:
        what = f"The Reynolds number, {_g(at_inlet)} at the inlet, could reach {_g(possible)} along the tube"
        yield _reynolds_caution(what, possible, "outlet")


def _largest_reynolds(found: Found) -> tuple[float, float]:
    """The largest Reynolds number along the tube and its z."""
    if not found.flows:
        return 0.0, 0.0
    reynolds = found.reynolds(found.bulk)
    i = int(np.argmax(reynolds))
    return float(reynolds[i]), found.place(float(found.view.z[i]))


def _reynolds(found: Found) -> Iterator[Caution]:
    largest, z = _largest_reynolds(found)
    largest = found.headline("largest_reynolds") or largest
    if largest > REYNOLDS_CAUTION:
        place = f"z = {_length(found.case, z)}"
        yield _reynolds_caution(f"The Reynolds number reaches {_g(largest)} at {place}", largest, place)


def _small_peclet(ahead: Ahead) -> Iterator[Caution]:
    if ahead.flows and ahead.peclet < SMALLEST_PECLET:
        yield Caution(
            "peclet",
            f"The Péclet number is {_g(ahead.peclet)}, below {_g(SMALLEST_PECLET)}: the stream conducts more "
            "heat than it "
            "carries, so bulk temperature, film coefficient and Nusselt number mean little. Read "
            "temperatures at sensors.",
            place="whole tube",
            found=ahead.peclet,
            limit=SMALLEST_PECLET,
            weight=20.0,
        )


def _gas_density_ahead(ahead: Ahead) -> Iterator[Caution]:
    if not ahead.fluid.is_gas or not ahead.flows:
        return
    law, t_in = _gas_density(ahead.fluid), ahead.t_in
    change = max(abs(float(law(T)) / float(law(t_in)) - 1.0) for T in (*ahead.bulk_reach, *ahead.held))
    if change > GAS_DENSITY_CAUTION:
        yield Caution(
            "gas-density",
            f"The density of the gas could change by {_percent(change)}, above "
            f"{_percent(GAS_DENSITY_CAUTION)}, and is "
            "held at its inlet value: a heated gas then moves faster and loses more pressure than shown. A "
            "solve that "
            f"finds more than {_percent(GAS_DENSITY_CHANGE)} is refused.",
            place="outlet",
            found=change,
            limit=GAS_DENSITY_CAUTION,
            weight=100.0 * min(change, 1.0),
        )


def _gas_density(fluid: UsedFluid) -> Callable[[Any], Any]:
    """The gas's own density law, or that of an ideal gas (up to a factor) where a constant is given."""
    return (lambda T: 1.0 / np.asarray(T, dtype=float)) if fluid.density.is_constant else fluid.density


def _density_change(found: Found) -> tuple[float, float]:
    """Largest relative change of a gas's density from the inlet's, by temperature and pressure; its z."""
    law, view = _gas_density(found.fluid), found.view
    pressure = 1.0 + view.p / found.case.stream[found.name].outlet_pressure
    ratio = law(view.t + found.t_in) / law(found.t_in) * pressure
    change = np.abs(ratio - 1.0).max(axis=1)
    i = int(np.argmax(change))
    return float(change[i]), found.place(float(view.zc[i]))


def _gas_density_found(found: Found) -> Iterator[Caution]:
    if not found.fluid.is_gas or not found.flows:
        return
    change, z = _density_change(found)
    if change > GAS_DENSITY_CAUTION:
        yield Caution(
            "gas-density",
            f"The density of the gas would change by {_percent(change)} at z = {_length(found.case, z)}, "
            "above "
            f"{_percent(GAS_DENSITY_CAUTION)}, and is held at its inlet value: where the gas is warmer than "
            "at the inlet "
            "it moves faster and loses more pressure than shown, where it is colder or under more pressure "
            "less.",
            place=f"z = {_length(found.case, z)}",
            found=change,
            limit=GAS_DENSITY_CAUTION,
            weight=100.0 * min(change, 1.0),
        )


def _reverse_flow(found: Found) -> Iterator[Caution]:
    if not found.flows:
        return
    outlet = found.view.mz[-1]
    share = float(-outlet[outlet < 0.0].sum()) / found.mass_flow
    if share > 0.0:
        yield Caution(
            "reverse-flow",
            f"Fluid runs backwards through the outlet ({_percent(share)} of the flow), and what comes in "
            "there is not "
            "known: temperatures and pressure near the outlet are doubtful. Lengthen the tube behind the "
            "last change.",
            place="outlet",
            found=share,
            limit=0.0,
            source="the outlet condition itself: what lies beyond is not part of the model",
            weight=50.0,
        )


def _outlet_flow(found: Found) -> Iterator[Caution]:
    peak, z = found.curve("peak_velocity_m_s"), found.curve("z_m")
    if not found.flows or peak is None or z is None:
        return
    along = np.abs(z - z[0])
    start = max(along[-1] - found.bore, 0.5 * along[-1])
    change = abs(float(peak[-1]) - float(np.interp(start, along, peak))) / float(peak[-1])
    if change > OUTLET_CHANGE:
        yield Caution(
            "outlet-not-developed",
            f"The velocity profile still changes by {_percent(change)} over the last "
            f"{_length(found.case, along[-1] - start)} "
            f"before the outlet, above {_percent(OUTLET_CHANGE)}: the outlet condition (uniform pressure, no "
            "flow across) "
            "does not fit, and what the last diameter adds to the pressure drop is doubtful. Lengthen the "
            "last section.",
            place="outlet",
            found=change,
            limit=OUTLET_CHANGE,
            weight=100.0 * change * min(1.0, found.bore / found.layout.length),
        )


# ----- rules: the ends


def _insulated_solids(case: Case, section: PlacedSection, end: str) -> list[str]:
    """Names of the solid layers whose face at an end is insulated: for them the tube simply stops."""
    return [layer.name for layer in _solids(section) if case.ends.of(end, layer.name).insulated]


def _lead_in(ahead: Ahead) -> Iterator[Caution]:
    sections = ahead.layout.sections[::-1] if ahead.mirrored else ahead.layout.sections
    end = "last" if ahead.mirrored else "first"
    lead_in, acts = 0.0, False
    for section in sections:
        acts = _acts(section, ahead.t_in)
        if acts:
            break
        lead_in += section.length
    if not acts or not ahead.flows or (_solids(sections[0]) and not _insulated_solids(ahead.case, sections[0], end)):
        return
    reach = ahead.reach_upstream(sections[0])
    needed = FADED * reach
    if lead_in >= needed or needed < SHORT * ahead.layout.length:
        return
    text = _length(ahead.case, reach)
    start = f"has {_length(ahead.case, lead_in)} before it" if lead_in else "begins right at the inlet"
    yield Caution(
        "warm-end",
        f"Heat runs upstream over about {text} (a factor e), and the heated part {start}: what would run "
        "past "
        "the inlet "
        f"is cut off there. Give an insulated lead-in of {_length(ahead.case, needed)}, or say in [ends] "
        "what "
        "the wall "
        "meets.",
        place="inlet end",
        found=lead_in,
        limit=needed,
        source="a wall's warmth against the flow, closed form; four times its reach: " + PRACTICE,
        weight=100.0 * min(1.0, reach / ahead.layout.length),
    )


def _warm_inlet(found: Found) -> Iterator[Caution]:
    """Wall or fluid at the inlet end that is not at the inlet temperature: heat would go on upstream.

    Where nothing flows, either end is looked at.
    """
    ends = [("first", 0), ("last", -1)]
    if found.flows:
        ends = ends[1:] if found.mirrored else ends[:1]
    for end, row in ends:
        section = found.layout.sections[row]
        warm, what = _wall_at_end(found, section, end, row), "The wall"
        carried = _along(found.case, section, found.t_in)
        if found.flows:
            # flow-weighted in the plane: from what is conducted just behind it, as nothing is in the plane
            fluid = -float(found.view.conducted[1]) / found.capacity_flow
            if abs(fluid) > abs(warm):
                warm, what = fluid, "The fluid"
                carried = float(found.fluid.conductivity(found.t_in)) * groups.tube_area(found.bore)
        if abs(warm) > max(WARM_END * found.span, MATTERS):
            yield _warm_end(found, section, end, what, warm, carried)


def _warm_end(found: Found, section: PlacedSection, end: str, what: str, warm: float, carried: float) -> Caution:
    """The caution for an end that is `warm` [K] off the inlet temperature; carried: its k A [W m/K]."""
    share = abs(warm) / found.span
    reach = found.reach_upstream(section)
    if math.isfinite(reach):
        leaving = min(1.0, carried * abs(warm) / reach / found.heat) if found.heat else 0.0
        advice = (
            f"A real tube would carry about {_percent(leaving)} of the heat on. Lengthen this end by "
            f"{_length(found.case, reach * math.log(share / WARM_END))} (the warmth fades by a factor e in "
            f"{_length(found.case, reach)}), or say in [ends] what the wall meets."
        )
    else:
        leaving = 1.0
        advice = "With neither flow nor loss no length is enough: say in [ends] what the wall meets."
    return Caution(
        "warm-end",
        f"{what} is {_g(abs(warm))} K {'warmer' if warm > 0 else 'colder'} than the inlet temperature at the "
        f"{end} end ({_percent(share)} of the span, limit {_percent(WARM_END)}), and is shown too "
        f"{'hot' if warm > 0 else 'cold'} near it. {advice}",
        place=f"{end} end",
        found=share,
        limit=WARM_END,
        weight=100.0 * leaving,
    )


def _wall_at_end(found: Found, section: PlacedSection, end: str, row: int) -> float:
    """[K] largest difference from the inlet temperature of solids that conduct along z and stop there."""
    stopping = _insulated_solids(found.case, section, end)
    warm = 0.0
    for piece in _end_pieces(found, row):
        if piece.layer.name not in stopping:
            continue
        if float(found.case.solid_of(piece.layer.material).conductivity_z(found.t_in)) == 0.0:
            continue
        t = found.solution.heat.t[row, piece.j0 : piece.j1]
        hottest = float(t[np.argmax(np.abs(t))])
        warm = hottest if abs(hottest) > abs(warm) else warm
    return warm


def _end_pieces(found: Found, row: int) -> Iterator[Piece]:
    i = row % found.solution.grid.nz
    return (piece for piece in found.solution.grid.pieces if piece.i0 <= i < piece.i1)


def _wall_to_outlet(found: Found) -> Iterator[Caution]:
    """Heat that a real wall would carry on past the outlet end."""
    if not found.carries_heat:
        return
    end, row = ("first", 0) if found.mirrored else ("last", -1)
    section = found.layout.sections[row]
    stopping = _insulated_solids(found.case, section, end)
    walls = [piece for piece in _end_pieces(found, row) if piece.layer.name in stopping]
    if not walls or _along(found.case, section, found.t_in) == 0.0:
        return
    grid, heat = found.solution.grid, found.solution.heat
    reach = found.reach_downstream(section)
    entering = float(heat.outside[row]) + sum(float(heat.generated[row, p.j0 : p.j1].sum()) for p in walls)
    # what runs along the wall one reach before the end, as faded at the end
    back = min(reach, 0.5 * section.length)
    i = int(np.argmin(np.abs(grid.z - (back if found.mirrored else found.layout.length - back))))
    running = sum(float(heat.qz[i, p.j0 : p.j1].sum()) for p in walls) * (-1.0 if found.mirrored else 1.0)
    on = max(entering / float(grid.dz[row]) * reach, running * math.exp(-back / reach), key=abs)
    share = abs(on) / found.heat
    if share > HEAT_PAST_END:
        yield Caution(
            "warm-end",
            f"A real wall would carry about {_percent(share)} of the heat on past the end of the tube (limit "
            f"{_percent(HEAT_PAST_END)}), and the wall near this end is shown too "
            f"{'hot' if on > 0 else 'cold'}. "
            f"Add an insulated lead-out of {_length(found.case, FADED * reach)}, or say in [ends] what the "
            "wall "
            "meets.",
            place=f"{end} end",
            found=share,
            limit=HEAT_PAST_END,
            weight=100.0 * min(1.0, share),
        )


def _outlet_heat(found: Found) -> Iterator[Caution]:
    """Heat conducted along the stream near the outlet, where the outlet condition lets none through."""
    conducted, z = found.curve("axial_conduction_W"), found.curve("z_m")
    if not found.carries_heat or conducted is None or z is None:
        return
    along = np.abs(z - z[0])
    # the cut itself flattens the temperature as far upstream as heat can run
    section = found.layout.sections[0 if found.mirrored else -1]
    seen = min(max(found.bore, found.reach_upstream(section)), 0.5 * along[-1])
    near = along >= along[-1] - seen
    share = float(np.nanmax(np.abs(conducted[near]))) / found.heat
    if share > HEAT_ALONG_OUTLET:
        yield Caution(
            "outlet-not-developed",
            f"Within {_length(found.case, seen)} of the outlet the stream conducts {_percent(share)} of "
            "the heat along itself "
            "(limit "
            f"{_percent(HEAT_ALONG_OUTLET)}, Péclet number {_g(found.peclet)}), which the outlet condition "
            "cuts off: "
            "temperatures near the outlet are off by about that share. Add an insulated lead-out of a few "
            "diameters.",
            place="outlet",
            found=share,
            limit=HEAT_ALONG_OUTLET,
            weight=100.0 * min(1.0, share),
        )


# ----- rules: materials


@dataclass(frozen=True)
class LeftRange:
    """Laws of one material that are left on one side: by which temperature [K], which bound, where."""

    material: str
    laws: tuple[str, ...]
    T: float
    bound: float
    low: float
    high: float
    layer: str
    z: float
    policy: str

    def sentence(self, case: Case) -> str:
        ends = [
            "any temperature" if math.isinf(bound) else _temperature(case, bound) for bound in (self.low, self.high)
        ]
        side = "colder" if self.bound == self.low else "hotter"
        known = f"from {ends[0]} to {ends[1]}" if not any(map(math.isinf, (self.low, self.high))) else (
            f"up to {ends[1]}" if math.isinf(self.low) else f"from {ends[0]} on"
        )  # fmt: skip
        verb = "is" if len(self.laws) == 1 else "are"
        return (
            f"{_listed(self.laws).capitalize()} of {self.material} {verb} known {known}, and "
            f"{self.layer} is {side}: "
            f"{_temperature(case, self.T)} at z = {_length(case, self.z)}."
        )


def _listed(words: Sequence[str]) -> str:
    """ "density", "density and viscosity", "density, conductivity and viscosity"."""
    return " and ".join(filter(None, (", ".join(words[:-1]), words[-1])))


def _left_ranges(found: Found) -> list[LeftRange]:
    """Every material whose laws the found field leaves by more than the tolerance, with its farthest place.

    The density of a stream does not count: it is held at its inlet value.
    """
    worst: dict[tuple[str, float], LeftRange] = {}
    tolerance = RANGE_TOLERANCE * found.span
    grid = found.solution.grid
    for piece in grid.pieces:
        if piece.layer.kind == "void":
            continue
        used: Any
        if piece.layer.kind == "stream":
            used = found.case.fluid_of(piece.layer.material)
            laws: dict[str, Law] = {
                "specific heat": used.specific_heat,
                "conductivity": used.conductivity,
                "viscosity": used.viscosity,
            }
            if not found.flows:
                laws = {"conductivity": used.conductivity}
        else:
            used = found.case.solid_of(piece.layer.material)
            laws = {"conductivity": used.conductivity_r}
            if used.conductivity_z != used.conductivity_r:
                laws = {"conductivity across": used.conductivity_r, "conductivity along": used.conductivity_z}
        t = _temperatures(found.solution, piece)
        for value, i, hot in (
            (float(t.max()), int(np.argmax(t.max(axis=1))), True),
            (float(t.min()), int(np.argmin(t.min(axis=1))), False),
        ):
            T = value + found.t_in
            for name, law in laws.items():
                low, high = law.span
                bound = high if hot else low
                if (T - bound if hot else bound - T) <= tolerance:
                    continue
                key = used.name, bound
                old = worst.get(key)
                names = tuple(dict.fromkeys((*(old.laws if old else ()), name)))
                if old is None or abs(T - bound) >= abs(old.T - bound):
                    z = float(grid.zc[piece.i0 + i])
                    old = LeftRange(used.name, names, T, bound, low, high, piece.layer.name, z, used.outside_range)
                worst[key] = LeftRange(**(asdict(old) | {"laws": names}))
    return sorted(worst.values(), key=lambda left: -abs(left.T - left.bound))


DOES = {"refuse": "refuse the answer", "hold": "hold the end value", "extend": "go on in a straight line"}


def _property_range(found: Found) -> Iterator[Caution]:
    for left in _left_ranges(found):
        what = (
            "The answer is not to be used. Give a wider table, or change the heating or the flow."
            if left.policy == "refuse"
            else f"Beyond that the case says to {DOES[left.policy]}, so the answer may err either way. "
            "Give a "
            "wider table."
        )
        excess = abs(left.T - left.bound)
        yield Caution(
            "property-range",
            f"{left.sentence(found.case)} {what}",
            place=f"{left.layer}, z = {_length(found.case, left.z)}",
            found=left.T,
            limit=left.bound,
            source="the range of the property data",
            weight=500.0 if left.policy == "refuse" else 100.0 * excess / max(found.span, excess),
        )


def _property_range_ahead(ahead: Ahead) -> Iterator[Caution]:
    fluid = ahead.fluid
    low, high = fluid.span
    reached = (*ahead.bulk_reach, *ahead.held)
    for T, bound, beyond in (
        (max(reached), high, max(reached) > high),
        (min(reached), low, min(reached) < low),
    ):
        if not beyond:
            continue
        then = "A solve that finds it so is refused." if fluid.outside_range == "refuse" else "The answer may err then."
        yield Caution(
            "property-range",
            f"The stream could come to {_temperature(ahead.case, T)}, and the properties of {fluid.name} are "
            "known "
            f"{'up to' if bound == high else 'from'} "
            f"{_temperature(ahead.case, bound)}{'' if bound == high else ' on'}. "
            f"{then}",
            place="wetted wall",
            found=T,
            limit=bound,
            source="the range of the property data",
            weight=30.0,
        )


def _copper(ahead: Ahead) -> Iterator[Caution]:
    """The kind of copper: names that mean two metals."""
    layers = {layer.name for section in ahead.layout.sections for layer in section.layers if layer.material == "copper"}
    if not layers or "copper" in ahead.case.solid:
        return
    pure, tube = (float(SOLIDS[name].conductivity(300.0)) for name in ("copper", "deoxidised copper"))
    yield Caution(
        "copper-kind",
        f'"copper" is pure copper ({_g(pure)} W/m/K at 300 K); drawn tube is mostly deoxidised copper with '
        "about "
        f'{_g(tube)} W/m/K, which spreads heat less than shown. Write solid = "deoxidised copper" if that is '
        "meant.",
        place=", ".join(sorted(layers)),
        found=pure,
        limit=tube,
        source=f"{SOLIDS['copper'].source}; {SOLIDS['deoxidised copper'].source}",
        weight=1.0,
    )


# ----- rules: not checked


def _free_convection_caution(ahead: Ahead, rayleigh: float | None, place: str) -> Caution:
    size = (
        f"the Rayleigh number of the bore is about {_about(rayleigh)}"
        if rayleigh is not None
        else "the case gives no density that changes with temperature, so its strength is not known"
    )
    if ahead.case.z_axis == "horizontal":
        effect = "it makes heat transfer higher than shown and the top hotter than the bottom"
    else:
        rises = (ahead.case.z_axis == "up") != ahead.mirrored
        effect = (
            f"it {'speeds up' if rises else 'slows down'} the flow along a hot wall"
            f"{'' if rises else ', down to reverse flow,'} and {'cools' if rises else 'heats'} that wall "
            "more "
            "than shown"
        )
    return Caution(
        "free-convection",
        f"Free convection is left out and no limit of it is checked yet: {size}; where it acts, {effect}.",
        place=place,
        found=rayleigh,
        source="no criterion applied",
        checked=False,
        weight=1.0 if rayleigh is None else min(30.0, rayleigh / 1000.0),
    )


def _rayleigh(ahead: Ahead, T: Any, difference: Any) -> Any:
    """Ra = g |beta| dT D^3 rho^2 cp / (mu k) at absolute temperatures T; None without a law of density."""
    fluid = ahead.fluid
    if fluid.density.is_constant:
        return None
    rho = fluid.density(T)
    beta = np.abs(fluid.density.derivative(T)) / rho
    return (
        STANDARD_GRAVITY * beta * difference * ahead.bore**3 * rho**2 * fluid.specific_heat(T)
        / (fluid.viscosity(T) * fluid.conductivity(T))
    )  # fmt: skip


def _free_convection_ahead(ahead: Ahead) -> Iterator[Caution]:
    if not ahead.is_heated:
        return
    # between wall and bulk: what the held temperatures allow, and what the heat needs in developed flow
    per_length = max(abs(_heat(section)) / section.length for section in ahead.layout.sections)
    from_heat = per_length / (math.pi * float(ahead.fluid.conductivity(ahead.t_in)) * duct_heat.NU_H)
    difference = max([from_heat, *(abs(T - ahead.t_in) for T in ahead.held)])
    rayleigh = _rayleigh(ahead, ahead.t_in, difference)
    if rayleigh is None or rayleigh > SMALLEST_RAYLEIGH:
        yield _free_convection_caution(ahead, rayleigh, "heated part")


def _free_convection(found: Found) -> Iterator[Caution]:
    fluid = np.column_stack([found.view.t, found.view.wall])
    difference = fluid.max(axis=1) - fluid.min(axis=1)
    if difference.max() < MATTERS:
        return
    middle = 0.5 * (fluid.max(axis=1) + fluid.min(axis=1)) + found.t_in
    rayleigh = _rayleigh(found, middle, difference)
    if rayleigh is None:
        yield _free_convection_caution(found, None, "heated part")
        return
    i = int(np.argmax(rayleigh))
    if rayleigh[i] > SMALLEST_RAYLEIGH:
        place = f"z = {_length(found.case, found.place(float(found.view.zc[i])))}"
        yield _free_convection_caution(found, float(rayleigh[i]), place)


def _phase_change(found: Found) -> Iterator[Caution]:
    """Boiling, freezing, condensing: the facts they need cannot be given yet."""
    fluid, wall = found.fluid, found.view.wall
    own = found.fluid.name in found.case.fluid
    warmer, colder = float(wall.max()) > NOTICED, float(wall.min()) < -NOTICED
    pressure = found.case.stream[found.name].outlet_pressure
    if fluid.is_gas:
        what, i = ("condensing on the wall", int(np.argmin(wall))) if own and colder else ("", 0)
    elif own:
        what, i = ("boiling", int(np.argmax(wall))) if warmer else ("freezing", int(np.argmin(wall)))
        what = what if warmer or colder else ""
    else:
        # built-in liquids are refused beyond their range, which at less than an atmosphere goes past boiling
        what, i = ("boiling", int(np.argmax(wall))) if warmer and pressure < 0.999 * ATMOSPHERE else ("", 0)
    if not what:
        return
    z = found.place(float(found.view.zc[i]))
    T = float(wall[i]) + found.t_in
    yield Caution(
        "phase-change",
        f"Whether there is {what} was not checked (the key for it is not available yet): the wetted wall "
        "comes to "
        f"{_temperature(found.case, T)} at z = {_length(found.case, z)}. Compare it by hand"
        f"{'' if what == 'freezing' else ' at the lowest pressure there'}.",
        place=f"z = {_length(found.case, z)}",
        found=T,
        source="no criterion applied",
        checked=False,
        weight=0.5,
    )


BEFORE: tuple[Callable[[Ahead], Iterator[Caution]], ...] = (
    _reynolds_ahead,
    _small_peclet,
    _gas_density_ahead,
    _property_range_ahead,
    _lead_in,
    _free_convection_ahead,
    _copper,
)
AFTER: tuple[Callable[[Found], Iterator[Caution]], ...] = (
    _not_converged,
    _balance,
    _mesh_error,
    _reynolds,
    _small_peclet,
    _gas_density_found,
    _reverse_flow,
    _outlet_flow,
    _outlet_heat,
    _warm_inlet,
    _wall_to_outlet,
    _property_range,
    _free_convection,
    _phase_change,
    _copper,
)
