"""Every reported quantity, once: its key in the files, label, symbol, unit and meaning.

Every table, picture and file takes its words from here. A key carries its unit as a suffix, as in the results
folder (`outlet_temperature_K`); `quantity_name` is the key without it, as users name quantities.
"""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True)
class Reported:
    """One reported quantity.

    key     : name in summary.json or in the header of a CSV file, with its unit suffix
    label   : words for tables and pictures, without unit
    symbol  : short form for formulas and axes, or ""
    unit    : SI unit as written for people, "" for a pure number
    meaning : one sentence
    kind    : which of the user's units it is shown in: "temperature", "pressure", "heat", "length",
              "mass_flow", "velocity", "heat_flux", or "" (always SI)
    """

    key: str
    label: str
    symbol: str
    unit: str
    meaning: str
    kind: str = ""


SUMMARY = (
    Reported("mass_flow_kg_s", "mass flow", "m", "kg/s", "mass per time through the stream", "mass_flow"),
    Reported("mean_velocity_m_s", "mean velocity", "u_m", "m/s", "mean axial velocity at the inlet", "velocity"),
    Reported("reynolds", "Reynolds number", "Re", "", "density x mean velocity x D_h / viscosity, inlet state"),
    Reported("prandtl", "Prandtl number", "Pr", "", "viscosity x specific heat / conductivity, inlet state"),
    Reported("peclet", "Péclet number", "Pe", "", "Re Pr, inlet state"),
    Reported("graetz", "Graetz number", "Gz", "", "Re Pr D_h / heated length, inlet state"),
    Reported("heated_length_m", "heated length", "L_h", "m", "length of all sections that exchange heat", "length"),
    Reported("largest_reynolds", "largest Reynolds number", "Re_max", "", "largest along the tube, bulk viscosity"),
    Reported(
        "inlet_temperature_K",
        "inlet temperature",
        "T_in",
        "K",
        "temperature of the entering fluid",
        "temperature",
    ),
    Reported(
        "outlet_temperature_K",
        "outlet temperature (bulk)",
        "T_out",
        "K",
        "temperature of the mixed fluid at the outlet",
        "temperature",
    ),
    Reported(
        "outlet_axis_temperature_K",
        "outlet temperature on the axis",
        "T_out,axis",
        "K",
        "fluid temperature on the axis (mid-gap in an annulus) at the outlet",
        "temperature",
    ),
    Reported(
        "outlet_wall_temperature_K",
        "outlet temperature at the wall",
        "T_out,wall",
        "K",
        "temperature of the wetted wall at the outlet",
        "temperature",
    ),
    Reported(
        "pressure_drop_Pa",
        "pressure drop",
        "Δp",
        "Pa",
        "pressure in motion at the inlet plane on the axis minus the outlet plane",
        "pressure",
    ),
    Reported(
        "hydrostatic_Pa",
        "hydrostatic part",
        "Δp_h",
        "Pa",
        "weight of the column, to be added for a gauge",
        "pressure",
    ),
    Reported("heat_gain_W", "heat taken up", "Q", "W", "mass flow x (outlet - inlet enthalpy)", "heat"),
    Reported(
        "hottest_wetted_wall_K",
        "hottest wetted wall",
        "T_w,max",
        "K",
        "highest temperature the fluid touches",
        "temperature",
    ),
    Reported(
        "hottest_wetted_wall_z_m",
        "place of the hottest wetted wall",
        "z",
        "m",
        "from the tube's start",
        "length",
    ),
    Reported(
        "coldest_wetted_wall_K",
        "coldest wetted wall",
        "T_w,min",
        "K",
        "lowest temperature the fluid touches",
        "temperature",
    ),
    Reported(
        "coldest_wetted_wall_z_m",
        "place of the coldest wetted wall",
        "z",
        "m",
        "from the tube's start",
        "length",
    ),
    Reported(
        "largest_wall_shear_stress_Pa",
        "largest wall shear stress",
        "τ_w,max",
        "Pa",
        "largest along the wall, from half a diameter behind a flat inlet on",
    ),
    Reported(
        "thermal_resistance_K_W",
        "thermal resistance",
        "R",
        "K/W",
        "(hottest solid - inlet temperature) / heat brought in",
    ),
    Reported("mean_residence_s", "mean residence time", "t", "s", "fluid volume / volume flow"),
    Reported(
        "hydrodynamic_entry_length_m",
        "hydrodynamic entry length",
        "L_u",
        "m",
        "from the inlet to the last place whose peak velocity is more than 1 % from the developed one",
        "length",
    ),
    Reported(
        "thermal_entry_length_m",
        "thermal entry length",
        "L_T",
        "m",
        "from the first heated section to the last place whose Nusselt is more than 5 % from developed",
        "length",
    ),
    Reported("hottest_K", "hottest", "T_max", "K", "highest temperature in the layer", "temperature"),
    Reported("hottest_z_m", "place of the hottest", "z", "m", "from the tube's start", "length"),
    Reported("coldest_K", "coldest", "T_min", "K", "lowest temperature in the layer", "temperature"),
    Reported("heat_in_W", "heat in through the outside", "Q", "W", "positive into the tube", "heat"),
    Reported(
        "heat_to_stream_W",
        "heat into the stream",
        "Q_s",
        "W",
        "through the wetted wall of the section",
        "heat",
    ),
    Reported(
        "end_bulk_temperature_K",
        "bulk temperature at the section's end",
        "T_b",
        "K",
        "temperature of the mixed fluid where the section ends",
        "temperature",
    ),
    Reported(
        "end_pressure_Pa",
        "pressure at the section's end",
        "p",
        "Pa",
        "area mean of the pressure in motion plus the outlet pressure",
        "pressure",
    ),
    Reported("temperature_K", "temperature", "T", "K", "temperature at the place", "temperature"),
    Reported("generated_W", "generated heat", "Q_g", "W", "in the layer, over all sections", "heat"),
    Reported("cells", "cells", "", "", "cells of the finest mesh, all layers"),
    Reported("iterations", "iterations", "", "", "outer iterations on the finest mesh"),
    Reported("residual", "residual", "", "", "largest normalised residual left"),
    Reported("seconds", "wall time", "", "s", "wall time of the solve without compilation"),
)

CURVES = (
    Reported("z_m", "z", "z", "m", "from the tube's start", "length"),
    Reported("bulk_temperature_K", "bulk temperature", "T_b", "K", "temperature of the mixed fluid", "temperature"),
    Reported("wetted_wall_temperature_K", "wetted wall", "T_w", "K", "fluid's side of the wall", "temperature"),
    Reported("wall_heat_flux_W_m2", "wall heat flux", "q", "W/m²", "positive into the stream", "heat_flux"),
    Reported(
        "heat_transfer_coefficient_W_m2K",
        "heat transfer coefficient",
        "h",
        "W/(m² K)",
        "wall heat flux / (wall - bulk temperature)",
    ),
    Reported("nusselt", "Nusselt number", "Nu", "", "h D_h / conductivity at bulk temperature"),
    Reported(
        "pressure_Pa",
        "pressure",
        "p",
        "Pa",
        "area mean of the pressure in motion plus outlet pressure",
        "pressure",
    ),
    Reported(
        "friction_factor_darcy",
        "Darcy friction factor",
        "f",
        "",
        "8 x wall shear x bulk density / mass velocity²",
    ),
    Reported("wall_shear_stress_Pa", "wall shear stress", "τ_w", "Pa", "negative where the flow runs backwards"),
    Reported("axis_velocity_m_s", "velocity on the axis", "u_0", "m/s", "axial velocity at r = 0", "velocity"),
    Reported("peak_velocity_m_s", "peak velocity", "u_max", "m/s", "largest axial velocity at this z", "velocity"),
    Reported(
        "apparent_friction_factor",
        "apparent friction factor",
        "f_app",
        "",
        "Darcy, from the drop since the inlet",
    ),
    Reported(
        "axial_conduction_W",
        "heat conducted along the stream",
        "Q_z",
        "W",
        "positive towards larger z",
        "heat",
    ),
    Reported("reverse", "reverse flow", "", "", "1 where any fluid runs backwards"),
)

OUTSIDE = (
    Reported("z_m", "z", "z", "m", "from the tube's start", "length"),
    Reported("temperature_K", "outside surface", "T_o", "K", "temperature of the outer surface", "temperature"),
    Reported(
        "heat_flux_W_m2",
        "heat flux",
        "q_o",
        "W/m²",
        "through the outside, positive into the tube",
        "heat_flux",
    ),
)

RADIAL = (
    Reported("station_m", "station", "z", "m", "place of the profile along the tube", "length"),
    Reported("layer", "layer", "", "", "layer the point lies in"),
    Reported("r_m", "radius", "r", "m", "distance from the axis", "length"),
    Reported("axial_velocity_m_s", "axial velocity", "u", "m/s", "positive towards larger z", "velocity"),
    Reported("radial_velocity_m_s", "radial velocity", "v", "m/s", "positive outwards", "velocity"),
    Reported("temperature_K", "temperature", "T", "K", "temperature", "temperature"),
)

# Longest first, so that "_W_m2K" is not taken for "_K" or "_W".
_SUFFIXES = ("_W_m2K", "_W_m2", "_kg_s", "_K_W", "_m_s", "_z_m", "_Pa", "_K", "_W", "_m", "_s")


def quantity_name(key: str) -> str:
    """The key without its unit suffix: "outlet_temperature_K" -> "outlet_temperature"."""
    for suffix in _SUFFIXES:
        if key.endswith(suffix):
            return key.removesuffix("_m") if suffix == "_z_m" else key.removesuffix(suffix)
    return key


def summary_row(key: str) -> Reported:
    """The row of a key of summary.json; a key without a row of its own speaks for itself."""
    return _BY_KEY.get(key) or Reported(key, quantity_name(key).replace("_", " "), "", "", "")


def named_row(key: str, kind: str) -> Reported:
    """The row of the value of a combination that the case names.

    key  : "value" with the suffix of its unit        kind : key of `units.KINDS`, "" for a pure number
    """
    unit = key.removeprefix(quantity_name(key))[1:].replace("_", "/")
    label = kind.replace("_", " ") or "number"
    return Reported(key, label, "", unit, "as put together in the case", kind)


def curve_row(key: str) -> Reported:
    """The row of a column of axial-STREAM.csv.

    The wall columns of an annulus come twice, with `inner` or `outer` in the name; they share one row here.
    """
    for side in ("inner", "outer"):
        plain = key.replace(f"wetted_{side}_", "wetted_").removeprefix(f"{side}_")
        if plain != key:
            row = curve_row(plain)
            return Reported(key, f"{side} {row.label}", row.symbol, row.unit, row.meaning, row.kind)
    return _CURVES_BY_KEY.get(key) or Reported(key, quantity_name(key).replace("_", " "), "", "", "")


_BY_KEY = {row.key: row for row in SUMMARY}
_CURVES_BY_KEY = {row.key: row for row in CURVES}
