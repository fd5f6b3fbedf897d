"""Deliberate faults: for each, where it would stand in the package and a test that fails when it does.

Each was tried with `python -m tests.laws.try_faults`, which makes the fault in a copy of the package and runs
its test. They are the mistakes that leave a plausible answer: balances that close, curves that are smooth.
"""

from dataclasses import dataclass


@dataclass(frozen=True)
class Fault:
    """A slip that a copy of the package can be given.

    what : in words
    file : within the package
    old, new : text that stands once in the file, and what the slip makes of it
    test : the test that catches it (there may be more)
    """

    what: str
    file: str
    old: str
    new: str
    test: str


PROPERTIES, BOUNDARY, ENERGY, SOLVE = (f"solver/{name}.py" for name in ("properties", "boundary", "energy", "solve"))
MOMENTUM, KERNEL_ENERGY = "kernels/momentum.py", "kernels/energy.py"
AXIAL, SUMMARY = "results/axial.py", "results/summary.py"
VARIANT_WALL, VARIANT_TESTS = "variants/wall.py", "tests/variants/test_wall.py"
LUMPED, EXACT = "tests/laws/test_lumped.py", "tests/laws/test_wall_exact.py"
MECHANICAL = "tests/laws/test_mechanical_energy.py"
CORNER = "tests/laws/test_inlet_corner.py"
FILES = "tests/laws/test_files_against_fields.py"
SPLITTING, SUPERPOSITION = "tests/laws/test_splitting.py", "tests/laws/test_superposition.py"
WALL = f"{EXACT}::test_multilayer_wall_with_generation_and_contacts"

FAULTS = (
    # ------------------------------------------------------------------ conduction
    Fault(
        "the fluid conducts nothing along z",
        PROPERTIES,
        "self._linked_z = conducts[1:] & conducts[:-1]",
        "self._linked_z = (grid.kind[1:] == SOLID) & (grid.kind[:-1] == SOLID)",
        f"{LUMPED}::test_stream_at_rest_carries_heat_along_itself",
    ),
    Fault(
        "the node's radius in place of the face's in the resistance of a wall's ring",
        PROPERTIES,
        "log_in, log_out = np.log(rc / r[:-1]), np.log(r[1:] / rc)",
        "log_in, log_out = (rc - r[:-1]) / rc, (r[1:] - rc) / rc",
        WALL,
    ),
    Fault(
        "the node's radius in place of the face's in the resistance of a stream's ring",
        PROPERTIES,
        "(rc - r[:-1]) / r[:-1], (r[1:] - rc) / r[1:]",
        "(rc - r[:-1]) / rc, (r[1:] - rc) / rc",
        "tests/solver/test_energy.py::test_a_solved_case_meets_the_slow_balance",
    ),
    Fault(
        "the uniform source's own term is left out of the radial resistance",
        PROPERTIES,
        "return np.where(solid, rise_in, 0.0), np.where(solid, rise_out, 0.0)",
        "return np.where(solid, 0.0, 0.0), np.where(solid, 0.0, 0.0)",
        WALL,
    ),
    Fault(
        "conductivity across and along a layer exchanged",
        PROPERTIES,
        "laws = solid.conductivity_r, solid.conductivity_z",
        "laws = solid.conductivity_z, solid.conductivity_r",
        f"{LUMPED}::test_rod_at_rest_between_its_ends",
    ),
    Fault(
        "conductivity of the node alone, not of the mean temperature between two",
        PROPERTIES,
        "np.where(self._same_r, mean, at_out[:, :-1])",
        "t[:, :-1]",
        f"{EXACT}::test_conductivity_linear_in_temperature",
    ),
    # ------------------------------------------------------------------ boundaries
    Fault(
        "2 pi missing in the outer surface",
        BOUNDARY,
        "2.0 * np.pi * surface.r_outer * grid.dz[here]",
        "surface.r_outer * grid.dz[here]",
        f"{SUPERPOSITION}::test_the_same_watts_heat_alike_whichever_key_says_them",
    ),
    Fault(
        "the contact resistance on the outer radius of its layer",
        BOUNDARY,
        "grid.area_r[rows, piece.j0]",
        "grid.area_r[rows, piece.j1]",
        WALL,
    ),
    Fault(
        "the film on the inner radius of the outermost layer",
        BOUNDARY,
        "np.divide(1.0, h * area,",
        "np.divide(1.0, h * area * surface.r_inner / surface.r_outer,",
        WALL,
    ),
    Fault(
        "the plate's contact resistance on the inner radius of the outermost layer",
        BOUNDARY,
        "placed.z0, z) / area",
        "placed.z0, z) / area * surface.r_outer / surface.r_inner",
        WALL,
    ),
    Fault(
        "end faces of twice their area",
        BOUNDARY,
        "area = grid.area_z[here]",
        "area = 2.0 * grid.area_z[here]",
        f"{LUMPED}::test_rod_at_rest_between_its_ends",
    ),
    Fault(
        "tables along a section read from the tube's start",
        BOUNDARY,
        "np.asarray(value.z) + z0",
        "np.asarray(value.z)",
        f"{SPLITTING}::test_table_along_a_later_section",
    ),
    Fault(
        "generated watts spread over the section's whole cross-section",
        "case/layout.py",
        "layer.generated / (layer.area * self.length)",
        "layer.generated / (self.layers[-1].area * self.length)",
        WALL,
    ),
    # ------------------------------------------------------------------ convection of heat
    Fault(
        "upwind of first order in the energy equation",
        KERNEL_ENERGY,
        "s += c[i, j, k] * t[cell, j]",
        "s += (1.0 if mz[i, j] != 0.0 else c[i, j, k]) * (k == (1 if mz[i, j] >= 0.0 else 2)) * t[cell, j]",
        f"{LUMPED}::test_second_order_along_z",
    ),
    Fault(
        "Fromm's scheme beside joints as well",
        ENERGY,
        "self._upwind[max(i - UPWIND_REACH, 0) : i + UPWIND_REACH + 1] = True",
        "self._upwind[i] = False",
        "tests/solver/test_energy.py::test_a_hot_wall_downstream_does_not_cool_the_stream_before_it",
    ),
    Fault(
        "the specific heat of the inlet all along",
        SOLVE,
        "lambda t: cp.integral(t_in, t + t_in)",
        "lambda t: float(cp(t_in)) * t",
        f"{LUMPED}::test_specific_heat_that_changes_twofold",
    ),
    Fault(
        "the first cell's temperature carried in through the inlet",
        KERNEL_ENERGY,
        "tz[0, j] = inflow_first[j]",
        "tz[0, j] = t[0, j]",
        f"{LUMPED}::test_slow_stream_with_film_and_heat",
    ),
    Fault(
        "the radial flow carries no heat",
        SOLVE,
        "mr[:, self.j0 : self.j1 + 1] = self._turned(f.mr)",
        "mr[:, self.j0 : self.j1 + 1] = 0.0",
        "tests/laws/test_bounds.py::test_warm_fluid_in_an_insulated_tube_stays_as_it_is",
    ),
    Fault(
        "the mirrored stream keeps the sign of its mass flow",
        SOLVE,
        "mz[:, here] = self._turned(f.mz, sign=True)",
        "mz[:, here] = self._turned(f.mz)",
        f"{SPLITTING}::test_tube_written_upside_down",
    ),
    # ------------------------------------------------------------------ viscous heat and pressure work
    Fault(
        "the sign of the pressure work",
        SOLVE,
        "return -self.fluid.density.derivative(t)",
        "return self.fluid.density.derivative(t)",
        f"{MECHANICAL}::test_adiabatic_gas_keeps_its_temperature",
    ),
    Fault(
        "half of the shear in the viscous heat",
        MOMENTUM,
        "phi[a, b] += heat * m.open_p[a, b] / around",
        "phi[a, b] += 0.5 * heat * m.open_p[a, b] / around",
        f"{MECHANICAL}::test_exact_for_a_developed_flow",
    ),
    Fault(
        "all friction at the corner of a flat inlet counts",
        SOLVE,
        "self.viscous[:, here] = self._turned(counted * phi)",
        "self.viscous[:, here] = self._turned(phi)",
        f"{CORNER}::test_quantities_behind_a_flat_inlet_have_a_limit_of_second_order",
    ),
    # ------------------------------------------------------------------ momentum
    Fault(
        "viscosity of the cell in place of the face between two",
        PROPERTIES,
        "radial[:, 1:nr] = t[:, :-1] + gr[1:nr] * (t[:, 1:] - t[:, :-1])",
        "radial[:, 1:nr] = t[:, :-1]",
        "tests/solver/test_properties.py::test_viscosity_is_taken_where_stresses_live",
    ),
    Fault(
        "viscosity of the last cell at the wall",
        PROPERTIES,
        "wall = t[:, -1] if t_wall is None else t_wall",
        "wall = t[:, -1]",
        "tests/solver/test_properties.py::test_viscosity_is_taken_where_stresses_live",
    ),
    Fault(
        "the transpose part of the stress dropped from the momentum along z",
        MOMENTUM,
        "flux -= m.ring[j + 1] * mu.corner[i, j + 1] * (v[i, j + 1] - v[i - 1, j + 1])",
        "flux -= 0.0",
        f"{MECHANICAL}::test_where_viscosity_falls_along_the_wall",
    ),
    Fault(
        "the transpose part of the stress dropped from the momentum along r",
        MOMENTUM,
        "extra = -m.area_v[j] / m.drc[j] * mu.corner[i, j] * (u[i, j] - u[i, j - 1])",
        "extra = 0.0",
        f"{MECHANICAL}::test_where_viscosity_falls_along_the_wall",
    ),
    Fault(
        "the hoop stress 2 mu v / r^2 dropped",
        MOMENTUM,
        "hoop = 2.0 * mu.radial_face[i, j] * m.hoop[i, j]",
        "hoop = 0.0",
        f"{MECHANICAL}::test_where_viscosity_falls_along_the_wall",
    ),
    Fault(
        "the axial normal stress 2 mu du/dz at half its size",
        MOMENTUM,
        "a_w = 2.0 * mu.cell[i - 1, j] * m.gu_z[i - 1, j] + max(west_flow, 0.0)",
        "a_w = mu.cell[i - 1, j] * m.gu_z[i - 1, j] + max(west_flow, 0.0)",
        "tests/kernels/test_momentum.py::test_residuals_are_the_equations",
    ),
    Fault(
        "upwind of first order in the momentum equations",
        MOMENTUM,
        "extra = 0.5 * flow * (central_up * (b - a) + up * (a - u[cu, j]))",
        "extra = 0.0",
        f"{MECHANICAL}::test_where_a_peaked_profile_flattens",
    ),
    # ------------------------------------------------------------------ what is reported
    Fault(
        "the bulk temperature as an area mean",
        AXIAL,
        "enthalpy = turn * own(heat.hz[:, j0:j1]).sum(axis=1)",
        "enthalpy = (own(heat.tz[:, j0:j1]) * grid.area_z[j0:j1]).sum(axis=1) / grid.area_z[j0:j1].sum()"
        " * float(fluid.specific_heat(stream.inlet_temperature)) * (turn * mz).sum(axis=1) * turn",
        f"{FILES}::test_bulk_temperature_is_enthalpy_over_mass_flow",
    ),
    Fault(
        "a quarter of the friction factor (Fanning's)",
        AXIAL,
        "friction = 8.0 * shear * density / g**2",
        "friction = 2.0 * shear * density / g**2",
        f"{FILES}::test_nusselt_and_friction_follow_from_the_other_columns",
    ),
    Fault(
        "the Nusselt number with the radius",
        AXIAL,
        "nusselt = coefficient * view.diameter / conductivity",
        "nusselt = coefficient * view.diameter / 2 / conductivity",
        f"{FILES}::test_nusselt_and_friction_follow_from_the_other_columns",
    ),
    Fault(
        "the weight of a rising stream counted the other way",
        SUMMARY,
        '{"up": 1.0, "down": -1.0}',
        '{"up": -1.0, "down": 1.0}',
        "tests/results/test_summary.py::test_weight_of_the_column",
    ),
    # ------------------------------------------------------------------ variants
    Fault(
        "variants: a tube without its wall keeps the film per area of the outside",
        VARIANT_WALL,
        '_times(outside.film_coefficient, ratio), "ambient"',
        'outside.film_coefficient, "ambient"',
        f"{VARIANT_TESTS}::test_the_bore_gets_the_watts_and_resistances_per_length_of_the_outside",
    ),
    Fault(
        "variants: heat made in the wall is lost with it",
        VARIANT_WALL,
        "heat = _plus(_heat_per_length(outside, placed), made)",
        "heat = _heat_per_length(outside, placed)",
        f"{VARIANT_TESTS}::test_heat_made_in_the_wall_comes_to_the_bore",
    ),
    Fault(
        "variants: the case with radial resistance only resists nothing across",
        VARIANT_WALL,
        "AlongAcross(used.conductivity_r, Constant(0.0))",
        "AlongAcross(Constant(1e3), Constant(0.0))",
        f"{VARIANT_TESTS}::test_across_the_wall_the_difference_is_that_of_a_hollow_cylinder",
    ),
    Fault(
        "variants: the stream conducts along z although it is switched off",
        PROPERTIES,
        "conducts &= grid.kind != STREAM",
        "conducts &= grid.kind != NOTHING",
        "tests/solver/test_properties.py::"
        "test_without_axial_conduction_in_streams_low_peclet_numbers_give_the_graetz_series",
    ),
)
