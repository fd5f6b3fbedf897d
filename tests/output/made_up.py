"""A result made up from closed forms, so that output is tested without a solve.

A developed parabolic profile, a pressure that falls on a straight line, and a temperature that is plausible
but nobody's solution: only its shape matters here.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Any

import numpy as np

from axicfd.case.layout import Layout, layout
from axicfd.case.model import Case
from axicfd.case.read import load

TEXT = """
title = "Syrup line in a hot-water jacket"

[stream.syrup]
fluid = "syrup"
inlet_temperature = "20 degC"
mass_flow = "6 g/s"
inlet_profile = "developed"

[fluid.syrup]
density = "1330 kg/m^3"
specific_heat = "2500 J/kg/K"
conductivity = "0.33 W/m/K"
viscosity = "0.5 Pa s"

[[layer]]
stream = "syrup"
diameter = "12 mm"

[[layer]]
name = "tube"
solid = "stainless steel 316"
thickness = "1 mm"

[[section]]
name = "lead-in"
length = "0.2 m"
outside = { insulated = true }

[[section]]
name = "jacket"
length = "1.2 m"
outside = { film_coefficient = "900 W/m^2/K", ambient = "85 degC" }

[sensor.far]
z = "0.9 m"
at = "outside"
"""


@dataclass(frozen=True)
class MadeUp:
    """The attributes of a Result that output reads."""

    case: Case
    layout: Layout
    version: str
    summary: dict[str, Any]
    axial: dict[str, dict[str, Any]]
    axial_half_width: dict[str, dict[str, Any]]
    outside: dict[str, Any]
    radial: dict[str, Any]
    fields: dict[str, Any]
    history: list[tuple[int, int, int, float]] = field(default_factory=list)


def made_up(text: str = TEXT, nz: int = 60, converged: bool = True) -> MadeUp:
    """A made-up result of a one-stream tube, 12 cells across the stream and 4 across the wall.

    Mesh errors are those of nested meshes that all converged; there are none without convergence.
    """
    case = load(text)
    tube = layout(case)
    stream = next(iter(case.stream))
    bore, outer = tube.bore_diameter / 2, tube.outer_diameter / 2
    inlet = case.stream[stream].inlet_temperature
    z_faces = np.linspace(0.0, tube.length, nz + 1)
    r_faces = np.concatenate([np.linspace(0, bore, 13), np.linspace(bore, outer, 5)[1:]])
    z, r = (z_faces[1:] + z_faces[:-1]) / 2, (r_faces[1:] + r_faces[:-1]) / 2

    mean, drop = 0.04, 4.0e3
    parabola = 2 * mean * (1 - (r[:12] / bore) ** 2)
    bulk = _rise(z_faces)
    wall = _wall(z_faces)
    warm = bulk + (wall - bulk) * 0.9
    temperature = _rise(z)[:, None] + (_wall(z) - _rise(z))[:, None] * np.minimum(r / bore, 1.0) ** 2
    fields = {
        "z_faces": z_faces,
        "r_faces": r_faces,
        "T": temperature,
        "T_z_faces": np.vstack([temperature[:1], (temperature[1:] + temperature[:-1]) / 2, temperature[-1:]]),
        "inlet_temperature": inlet,
        "material": np.where(np.arange(16) < 12, 0, 1) * np.ones((nz, 1), int),
        "material_names": [f"stream:{stream}", "tube"],
        "layer_names": [stream, "tube"],
        f"u.{stream}": np.tile(parabola, (nz + 1, 1)),
        f"v.{stream}": np.zeros((nz, 13)),
        f"p.{stream}": np.repeat((drop * (1 - z / tube.length))[:, None], 12, axis=1),
        f"j0.{stream}": 0,
    }
    flux = 900.0 * (65.0 - wall) * (z_faces > 0.2)
    with np.errstate(divide="ignore", invalid="ignore"):
        nusselt = flux * 2 * bore / 0.33 / (wall - bulk)
    nusselt[0] = np.nan
    axial = {
        stream: {
            "z_m": z_faces,
            "bulk_temperature_K": inlet + bulk,
            "wetted_wall_temperature_K": inlet + warm,
            "wall_heat_flux_W_m2": flux,
            "heat_transfer_coefficient_W_m2K": nusselt * 0.33 / 2 / bore,
            "nusselt": nusselt,
            "pressure_Pa": 101325.0 + drop * (1 - z_faces / tube.length),
            "friction_factor_darcy": np.full(nz + 1, 0.5),
            "wall_shear_stress_Pa": np.full(nz + 1, 12.0),
            "axis_velocity_m_s": np.full(nz + 1, 2 * mean),
            "peak_velocity_m_s": np.full(nz + 1, 2 * mean),
            "apparent_friction_factor": np.full(nz + 1, 0.5),
            "axial_conduction_W": np.zeros(nz + 1),
            "reverse": np.zeros(nz + 1, int),
        }
    }
    outside = {"z_m": z_faces, "temperature_K": inlet + wall, "heat_flux_W_m2": flux}
    radial = {
        "station_m": np.full(16, tube.length),
        "layer": [stream] * 12 + ["tube"] * 4,
        "r_m": r,
        "axial_velocity_m_s": np.concatenate([parabola, np.full(4, np.nan)]),
        "radial_velocity_m_s": np.concatenate([np.zeros(12), np.full(4, np.nan)]),
        "temperature_K": inlet + temperature[-1],
    }
    summary, half_widths = _summary(case, stream, converged), {}
    if converged:
        summary |= _mesh_errors(summary, stream)
        half_widths = {stream: _half_widths(axial[stream])}
    return MadeUp(case, tube, "0.0.0", summary, axial, half_widths, outside, radial, fields)


def _half_widths(curves: dict[str, Any]) -> dict[str, Any]:
    """A thousandth of every value; a flag has none."""
    widths = {name: 1e-3 * np.abs(column) for name, column in curves.items()}
    none = np.full(len(curves["z_m"]), np.nan)
    return widths | {"z_m": curves["z_m"], "reverse": none}


def _mesh_errors(summary: dict[str, Any], stream: str) -> dict[str, Any]:
    """Half-widths of some quantities, and the tree of the finest mesh."""
    widths = {"outlet_temperature_K": 0.05, "pressure_drop_Pa": 12.0, "hydrostatic_Pa": 0.0}
    order = {"outlet_temperature_K": 1.9, "pressure_drop_Pa": 2.0, "hydrostatic_Pa": None}
    rule = {"outlet_temperature_K": "extrapolated", "pressure_drop_Pa": "extrapolated", "hydrostatic_Pa": "exact"}
    return {
        "finest_mesh": {"stream": {stream: summary["stream"][stream] | {"outlet_temperature_K": 329.41}}},
        "numerical_uncertainty": {
            "stream": {stream: widths},
            "observed_order": {"stream": {stream: order}},
            "rule": {"stream": {stream: rule}},
        },
    }


def _rise(z: np.ndarray) -> np.ndarray:
    return 40.0 * (1 - np.exp(-2.0 * np.maximum(z - 0.2, 0)))


def _wall(z: np.ndarray) -> np.ndarray:
    return np.where(z > 0.2, 55.0, 55.0 * np.exp(-np.maximum(0.2 - z, 0) / 0.02))


def _summary(case: Case, stream: str, converged: bool) -> dict[str, Any]:
    return {
        "title": case.title,
        "converged": converged,
        "iterations": 12,
        "residual": 3e-9 if converged else 1e-2,
        "seconds": 1.2,
        "cells": 960,
        "version": "0.0.0",
        "cautions": [
            {
                "code": "outlet-not-developed",
                "found": 0.3,
                "limit": 0.05,
                "place": "outlet",
                "source": "common practice, no source",
                "text": "the flow still changes at the outlet",
                "checked": True,
            },
            {
                "code": "reynolds",
                "found": 5.0,
                "limit": 2000.0,
                "place": None,
                "source": "common practice, no source",
                "text": "could not be checked",
                "checked": False,
            },
        ],
        "stream": {
            stream: {
                "mass_flow_kg_s": 0.006,
                "reynolds": np.float64(1.3),
                "inlet_temperature_K": 293.15,
                "outlet_temperature_K": 329.35,
                "outlet_axis_temperature_K": 325.0,
                "outlet_wall_temperature_K": 347.0,
                "pressure_drop_Pa": 4000.0,
                "hydrostatic_Pa": 0.0,
                "heat_gain_W": 543.0,
                "hottest_wetted_wall_K": 347.65,
                "hottest_wetted_wall_z_m": 1.4,
                "thermal_entry_length_m": None,
                "why": {"thermal_entry_length_m": "no uniform condition"},
            }
        },
        "layer": {"tube": {"hottest_K": 348.15, "hottest_z_m": 1.4, "coldest_K": 293.2}},
        "section": {
            "lead-in": {"heat_in_W": 0.0},
            "jacket": {"heat_in_W": 543.0},
        },
        "sensor": {"far": {"temperature_K": 340.0}},
        "ledger": {"section": {"jacket": 543.0}, "stream": {stream: -543.0}},
        "balance": {"mass": 1e-16, "energy": float("nan")},
    }
