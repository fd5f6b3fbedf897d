"""The headline tree of a solution: the content of summary.json apart from cautions and provenance.

Names carry their unit as a suffix; a quantity without a value is None, and `why` beside it says so. Heat is positive
into the tube.
"""

import math
from typing import Any

import numpy as np

from axicfd.case.keys import ZTable
from axicfd.case.layout import Layout, PlacedSection
from axicfd.case.model import Case
from axicfd.case.quantities import quantities, terms_of
from axicfd.mesh.grid import SOLID, Array, Piece
from axicfd.results import lines
from axicfd.results.axial import StreamView
from axicfd.solver import developed
from axicfd.solver.energy import ONE_MILLIKELVIN
from axicfd.solver.flow import stream_mesh
from axicfd.solver.state import Solution
from axicfd.theory import groups

ENTRY_VELOCITY = 0.01  # the peak velocity counts as developed within this share
ENTRY_NUSSELT = 0.05
TRICKLE_OF_HEAT = 0.01  # share of all heats below which what is brought in is no base for a thermal resistance
STILL = "nothing flows"  # why some quantities have no value
STANDARD_GRAVITY = 9.80665  # m/s2, CGPM 1901


def summary(case: Case, layout: Layout, solution: Solution, views: dict[str, StreamView]) -> dict[str, Any]:
    """The tree with `stream`, `layer`, `section`, `sensor`, `quantity`, `ledger` and `balance`.

    views : of all streams
    """
    ledger = _ledger(case, layout, solution)
    tree = {
        "stream": {name: _stream(case, layout, solution, view) for name, view in views.items()},
        "layer": _layers(case, solution),
        "section": {s.name: _section(k, s, solution, views) for k, s in enumerate(layout.sections)},
        "sensor": {name: _sensor(case, solution, views, sensor) for name, sensor in case.sensor.items()},
    }
    return tree | {
        "quantity": _combinations(case, tree),
        "ledger": ledger,
        "balance": _balance(ledger, views, solution),
    }


def curves_of_places(solution: Solution, views: dict[str, StreamView]) -> dict[str, tuple[Array, Array]]:
    """Dotted name of every place in the tree -> (z, values) [m, K] of the curve whose largest value lies there."""
    curves: dict[str, tuple[Array, Array]] = {}
    for name, view in views.items():
        z, wall = view.wall_z
        z = view.grid.layout.length - z if view.mirrored else z
        curves[f"stream.{name}.hottest_wetted_wall_z_m"] = z, wall
        curves[f"stream.{name}.coldest_wetted_wall_z_m"] = z, -wall
    for piece in solution.grid.pieces:
        if piece.layer.kind == "solid":
            z, body = _along(piece, solution)
            path, hottest = f"layer.{piece.layer.name}.hottest_z_m", body.max(axis=1)
            before_z, before = curves.get(path, (z[:0], hottest[:0]))
            curves[path] = np.concatenate([before_z, z]), np.concatenate([before, hottest])
    return curves


# ------------------------------------------------------------------------------------------------ streams


def _stream(case: Case, layout: Layout, solution: Solution, view: StreamView) -> dict[str, Any]:
    fluid, t_in = view.fluid, view.t_in
    mu, cp, k = (float(law(t_in)) for law in (fluid.viscosity, fluid.specific_heat, fluid.conductivity))
    wall_z, wall = view.wall_z
    hottest, hottest_z = lines.extreme(wall_z, wall, 1.0)
    coldest, coldest_z = lines.extreme(wall_z, wall, -1.0)
    heated = sum(s.length for s in layout.sections if s.is_heated)
    tree: dict[str, Any] = {"mass_flow_kg_s": view.mass_flow, "inlet_temperature_K": t_in}
    walls = {
        "hottest_wetted_wall_K": hottest + t_in,
        "hottest_wetted_wall_z_m": _from_start(view, hottest_z),
        "coldest_wetted_wall_K": coldest + t_in,
        "coldest_wetted_wall_z_m": _from_start(view, coldest_z),
    }
    if view.mass_flow == 0.0:
        return {**tree, **walls, "why": {"outlet_temperature_K": STILL}}
    u, m = view.mean_velocity, view.mass_flow
    reynolds = groups.reynolds(view.density, u, view.diameter, mu)
    prandtl = groups.prandtl(mu, cp, k)
    why: dict[str, Any] = {}
    bulk_viscosity = fluid.viscosity(view.bulk + t_in)
    gain = float(view.enthalpy[-1] - view.enthalpy[0])
    brought = _heat_brought_in(layout, solution)
    body = solution.heat.t[solution.grid.kind == SOLID]
    peak = max(float(body.max()), _surface_peak(solution)) if body.size else hottest
    tree |= {
        "mean_velocity_m_s": u,
        "reynolds": reynolds,
        "prandtl": prandtl,
        "peclet": reynolds * prandtl,
        "graetz": reynolds * prandtl * view.diameter / heated if heated else None,
        "heated_length_m": heated,
        "largest_reynolds": float(np.max(reynolds * mu / bulk_viscosity)),
        "outlet_temperature_K": float(view.bulk[-1]) + t_in,
        "outlet_axis_temperature_K": _outlet_axis(view) + t_in,
        "outlet_wall_temperature_K": float(view.wall_before[-1]) + t_in,
        "pressure_drop_Pa": view.axis_pressure_at_inlet(),
        "hydrostatic_Pa": _hydrostatic(case, layout, view),
        "heat_gain_W": gain,
        **walls,
        "largest_wall_shear_stress_Pa": view.largest_shear(),
        "thermal_resistance_K_W": peak / brought if peak > 0.0 and brought else None,
        "mean_residence_s": view.density * view.area * layout.length / m,
        "hydrodynamic_entry_length_m": _hydrodynamic_entry(solution, view, why),
        "thermal_entry_length_m": None,
    }
    entries = {s.name: _thermal_entry(case, solution, view, s) for s in layout.sections if s.is_heated}
    order = list(entries)[::-1] if view.mirrored else list(entries)
    if order:
        tree["thermal_entry_length_m"], reason = entries[order[0]]
        if reason:
            why["thermal_entry_length_m"] = reason
    else:
        why["thermal_entry_length_m"] = "no uniform condition"
    tree["section_thermal_entry_length_m"] = {name: length for name, (length, _) in entries.items()}
    reasons = {name: reason for name, (_, reason) in entries.items() if reason}
    if reasons:
        why["section_thermal_entry_length_m"] = reasons
    if heated == 0.0:
        why["graetz"] = "nothing is heated"
    if tree["largest_wall_shear_stress_Pa"] is None:
        why["largest_wall_shear_stress_Pa"] = "too short"
    if tree["thermal_resistance_K_W"] is None:
        why["thermal_resistance_K_W"] = "no heat is brought in"
    tree["why"] = why
    return tree


def _heat_brought_in(layout: Layout, solution: Solution) -> float:
    """[W] heat that sections, generation and end faces bring in; 0 where it is a trickle beside what leaves."""
    grid, heat = solution.grid, solution.heat
    parts = [float(heat.outside[grid.section == k].sum()) for k in range(len(layout.sections))]
    parts += [float(heat.generated.sum()), float(heat.first.sum()), float(heat.last.sum())]
    brought = sum(part for part in parts if part > 0.0)
    return brought if brought > TRICKLE_OF_HEAT * sum(abs(part) for part in parts) else 0.0


def _from_start(view: StreamView, z: float) -> float:
    return view.grid.layout.length - z if view.mirrored else z


def _outlet_axis(view: StreamView) -> float:
    """Fluid temperature on the axis in the outlet plane, where nothing is conducted along z."""
    j0, j1 = view.grid.streams[view.name]
    plane = view.t[-1]
    if len(view.zc) > 1:
        last, before = view.zc[-1], view.zc[-2]
        plane = plane + (view.t[-1] - view.t[-2]) * (view.z[-1] - last) / (last - before)
    return float(lines.to_axis(plane[None, :], view.grid.rc[j0:j1])[0])


def _hydrostatic(case: Case, layout: Layout, view: StreamView) -> float:
    """Weight of the column at inlet density that adds to what a gauge reads between inlet and outlet."""
    rise = {"up": 1.0, "down": -1.0}.get(case.z_axis, 0.0) * (-1.0 if view.mirrored else 1.0)
    return view.density * STANDARD_GRAVITY * layout.length * rise


def _surface_peak(solution: Solution) -> float:
    """Largest temperature on the outer surface, where that is a solid's; -inf where it nowhere is."""
    grid, rows = solution.grid, np.arange(solution.grid.nz)
    solid = grid.kind[rows, grid.outer - 1] == SOLID
    return float(solution.heat.minus[rows, grid.outer].max(where=solid, initial=-np.inf))


def _hydrodynamic_entry(solution: Solution, view: StreamView, why: dict[str, Any]) -> float | None:
    key = "hydrodynamic_entry_length_m"
    if not view.fluid.viscosity.is_constant:
        why[key] = "properties vary"
        return None
    if view.case.stream[view.name].inlet_profile == "developed":
        why[key] = "already developed"
        return None
    mesh = stream_mesh(solution.grid, view.name, view.mirrored)
    u = developed.velocity(mesh, view.density, view.mass_flow)
    j0, j1 = solution.grid.streams[view.name]
    peak = float(lines.to_axis(u[None, :], solution.grid.rc[j0:j1])[0])
    length = lines.last_crossing(view.z, np.abs(view.peak_velocity() / peak - 1.0), ENTRY_VELOCITY)
    if length is None:
        why[key] = "too short"
    return length


def _thermal_entry(
    case: Case, solution: Solution, view: StreamView, section: PlacedSection
) -> tuple[float | None, str | None]:
    """Thermal entry length of a heated section, from its start in the direction of flow, or the reason for none."""
    laws = view.fluid.viscosity, view.fluid.conductivity, view.fluid.specific_heat
    if not all(law.is_constant for law in laws):
        return None, "properties vary"
    nusselt = developed_nusselt(case, solution, view, section)
    if nusselt is None:
        return None, "no uniform condition"
    nu, z = view.curves["nusselt"], view.curves["z_m"]
    inside = (z >= section.z0 - 1e-12) & (z <= section.z1 + 1e-12)
    nu, z = nu[inside], z[inside]
    if view.mirrored:
        nu, z = nu[::-1], section.z1 - z[::-1]
    else:
        z = z - section.z0
    # the value on the joint itself belongs to both sections
    nu = nu.copy()
    nu[0] = np.nan
    if len(nu) > 2:
        nu[-1] = nu[-2]
    length = lines.last_crossing(z, np.abs(nu / nusselt - 1.0), ENTRY_NUSSELT)
    if length is None:
        return None, "too short"
    return length, None


def developed_nusselt(case: Case, solution: Solution, view: StreamView, section: PlacedSection) -> float | None:
    """Nusselt number that a section would reach if it were long: of its outside condition with its radial resistance.

    None where the condition is not uniform (tables, heat and film together, heat generated behind a film).
    """
    outside = section.outside
    tables = [v for v in vars(outside).values() if isinstance(v, ZTable)]
    generates = any(section.heat_density(p) for p in section.layers)
    heats = any(getattr(outside, key) is not None for key in outside.HEATS)
    if tables or (heats and outside.film_coefficient is not None):
        return None
    mesh = stream_mesh(solution.grid, view.name, view.mirrored)
    u = developed.velocity(mesh, view.density, view.mass_flow)
    if outside.temperature is None and outside.film_coefficient is None:
        return developed.nusselt_uniform_flux(mesh, u)
    if generates:
        return None
    k = float(view.fluid.conductivity(view.t_in))
    cp = float(view.fluid.specific_heat(view.t_in))
    resistance = 0.0
    bore = view.diameter / 2
    for layer in section.layers:
        if layer.kind == "void":
            return developed.nusselt_uniform_flux(mesh, u)
        if layer.kind == "solid":
            wall = float(case.solid_of(layer.material).conductivity_r(view.t_in))
            resistance += math.log(layer.r_outer / layer.r_inner) / (2.0 * math.pi * wall)
            resistance += layer.contact_resistance / (2.0 * math.pi * layer.r_inner)
    outer = section.layers[-1].r_outer
    film, contact = outside.film_coefficient, outside.contact_resistance
    if isinstance(film, float) and film > 0.0:
        resistance += 1.0 / (2.0 * math.pi * outer * film)
    elif isinstance(contact, float):
        resistance += contact / (2.0 * math.pi * outer)
    biot = 2.0 * bore / (2.0 * math.pi * bore * resistance * k) if resistance > 0.0 else math.inf
    along = case.physics.axial_conduction_in_streams
    peclet = view.mean_velocity * view.density * cp * view.diameter / k if along else math.inf
    return developed.nusselt_third_kind(mesh, u, biot, peclet)


# ------------------------------------------------------------------------------------------------ solids, sections


def _layers(case: Case, solution: Solution) -> dict[str, Any]:
    """Hottest and coldest of every solid layer, over cells and both faces, joints from each side."""
    t_in = next(iter(case.stream.values())).inlet_temperature
    tree: dict[str, Any] = {}
    for piece in solution.grid.pieces:
        if piece.layer.kind != "solid":
            continue
        z, body = _along(piece, solution)
        hottest, place = lines.extreme(z, body.max(axis=1), 1.0)
        entry = {"hottest_K": hottest + t_in, "hottest_z_m": place, "coldest_K": float(body.min()) + t_in}
        old = tree.setdefault(piece.layer.name, entry)
        if entry["hottest_K"] > old["hottest_K"]:
            old |= {"hottest_K": entry["hottest_K"], "hottest_z_m": entry["hottest_z_m"]}
        old["coldest_K"] = min(old["coldest_K"], entry["coldest_K"])
    return tree


def _along(piece: Piece, solution: Solution) -> tuple[Array, Array]:
    """(z, temperatures) of a layer's piece at its stations and faces: (n,), (n, cells across and both surfaces)."""
    grid, heat = solution.grid, solution.heat
    rows = slice(piece.i0, piece.i1)
    here = np.concatenate(
        [heat.plus[rows, piece.j0][:, None], heat.t[piece.cells], heat.minus[rows, piece.j1][:, None]], axis=1
    )
    z, zc = grid.z[piece.i0 : piece.i1 + 1], grid.zc[rows]
    faces, _ = lines.to_faces(here, zc, z, ())
    all_z = np.concatenate([zc, z])
    order = np.argsort(all_z, kind="stable")
    return all_z[order], np.concatenate([here, faces])[order]


def _section(k: int, section: PlacedSection, solution: Solution, views: dict[str, StreamView]) -> dict[str, Any]:
    grid, heat = solution.grid, solution.heat
    i0, i1 = (int(i) for i in np.searchsorted(grid.section, [k, k + 1]))
    tree: dict[str, Any] = {"heat_in_W": float(heat.outside[i0:i1].sum())}
    bulk: dict[str, float | None] = {}
    pressure: dict[str, float | None] = {}
    taken: dict[str, float] = {}
    for name, view in views.items():
        j1 = grid.streams[name][1]
        bare = grid.outer[i0] == j1
        taken[name] = float(heat.outside[i0:i1].sum() if bare else -heat.qr[i0:i1, j1].sum())
        if view.mass_flow == 0.0:
            bulk[name] = pressure[name] = None
            continue
        end = i0 if view.mirrored else i1
        bulk[name] = float(view.curves["bulk_temperature_K"][end])
        pressure[name] = float(view.curves["pressure_Pa"][end])
    tree |= {"end_bulk_temperature_K": bulk, "end_pressure_Pa": pressure, "heat_to_stream_W": taken}
    if None in bulk.values():
        tree["why"] = {"end_bulk_temperature_K": STILL, "end_pressure_Pa": STILL}
    return tree


def _sensor(case: Case, solution: Solution, views: dict[str, StreamView], sensor: Any) -> dict[str, Any]:
    """Temperature at a sensor, by cubics along z that stop at joints; that of the bulk linearly between faces."""
    grid, heat = solution.grid, solution.heat
    (name,) = views
    view = views[name]
    z = float(np.clip(sensor.z, 0.0, grid.layout.length))
    if sensor.at == "bulk":
        if view.mass_flow == 0.0:
            return {"temperature_K": None, "why": {"temperature_K": STILL}}
        return {"temperature_K": float(np.interp(z, view.curves["z_m"], view.curves["bulk_temperature_K"]))}
    j0, j1 = grid.streams[name]
    if sensor.at == "axis":
        stations = lines.to_axis(heat.t[:, j0:j1], grid.rc[j0:j1])
    elif sensor.at == "outside":
        stations = heat.minus[np.arange(grid.nz), grid.outer]
    else:
        layer, _, side = sensor.at.rpartition(" ")
        stations = np.full(grid.nz, np.nan)
        for piece in grid.pieces:
            if piece.layer.name == layer:
                rows = slice(piece.i0, piece.i1)
                stations[rows] = heat.plus[rows, piece.j0] if side == "inner" else heat.minus[rows, piece.j1]
    value = lines.at_place(stations, grid.zc, grid.z, grid.joints, z)
    if not np.isfinite(value):
        return {"temperature_K": None, "why": {"temperature_K": "no material there"}}
    return {"temperature_K": value + view.t_in}


def _combinations(case: Case, tree: dict[str, Any]) -> dict[str, Any]:
    """The case's own quantities: what they add less what they take away, from the values of this tree."""
    found: dict[str, Any] = {}
    for of in quantities(case, headline_only=True):
        if of.combined is None:
            continue
        values = {term: term.of(tree) for term in terms_of(case, of)}
        missing = [term.path for term, value in values.items() if value is None]
        total = math.fsum(times * (values[term] or 0.0) for term, times in terms_of(case, of).items())
        entry = {of.key: None if missing else total, "kind": of.kind}
        found[of.keys[1]] = entry | ({"why": {of.key: f"{missing[0]} has no value"}} if missing else {})
    return found


# ------------------------------------------------------------------------------------------------ ledger


def _ledger(case: Case, layout: Layout, solution: Solution) -> dict[str, Any]:
    """Every heat term of the model [W], positive into it, and the mass through inlet and outlet [kg/s].

    Each term is summed from its own faces or cells; none is the remainder of others.
    """
    grid, heat = solution.grid, solution.heat
    sections = {
        s.name: float(heat.outside[np.searchsorted(grid.section, k) : np.searchsorted(grid.section, k + 1)].sum())
        for k, s in enumerate(layout.sections)
    }
    generated: dict[str, float] = {}
    for piece in grid.pieces:
        if piece.layer.kind != "void":
            name = piece.layer.name
            generated[name] = generated.get(name, 0.0) + float(heat.generated[piece.cells].sum())
    streams, outlets, mass = {}, {}, {}
    for name, (j0, j1) in grid.streams.items():
        first, last = float(heat.hz[0, j0:j1].sum()), float(heat.hz[-1, j0:j1].sum())
        streams[name] = first - last
        mirrored = case.stream[name].direction == "-z"
        outlets[name] = float(heat.qz[0, j0:j1].sum() if mirrored else -heat.qz[-1, j0:j1].sum())
        fields = solution.streams.get(name)
        ends = [abs(float(fields.mz[i].sum())) if fields else 0.0 for i in ((-1, 0) if mirrored else (0, -1))]
        mass[name] = {"inlet_kg_s": ends[0], "outlet_kg_s": ends[1]}
    return {
        "section": sections,
        "ends": {"first": float(heat.first.sum()), "last": float(heat.last.sum())},
        "generated": generated,
        "viscous": float(heat.viscous.sum()),
        "pressure_work": float(heat.pressure_work.sum()),
        "stream": streams,
        "outlet_conduction": outlets,
        "mass": mass,
    }


def _balance(ledger: dict[str, Any], views: dict[str, StreamView], solution: Solution) -> dict[str, float | None]:
    """Sums of the ledger, relative to the largest of its parts (see the results folder's description)."""
    heat = solution.heat
    terms = [
        *ledger["section"].values(),
        *ledger["ends"].values(),
        *ledger["generated"].values(),
        ledger["viscous"],
        ledger["pressure_work"],
        *ledger["stream"].values(),
        *ledger["outlet_conduction"].values(),
    ]
    boundaries = sum(float(np.abs(q).sum()) for q in (heat.outside, heat.first, heat.last))
    trickle = sum(v.mass_flow * float(v.fluid.specific_heat(v.t_in)) * ONE_MILLIKELVIN for v in views.values())
    scale = max(
        boundaries,
        float(np.abs(heat.generated).sum()),
        abs(ledger["viscous"]),
        max(abs(e) for e in ledger["stream"].values()),
        trickle,
        heat.resolvable,
    )
    inflow = sum(m["inlet_kg_s"] for m in ledger["mass"].values())
    outflow = sum(m["outlet_kg_s"] for m in ledger["mass"].values())
    return {
        "mass": abs(inflow - outflow) / inflow if inflow else None,
        "energy": abs(math.fsum(terms)) / scale if scale else None,
    }
