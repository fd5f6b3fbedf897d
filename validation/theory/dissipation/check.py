"""Viscous heating and pressure work in developed flow."""

from functools import lru_cache
from pathlib import Path

import numpy as np

from axicfd.case.read import load
from axicfd.pipeline import solve
from axicfd.theory import duct_heat
from validation import plots
from validation.common import Row

HERE = Path(__file__).parent
CLOSED = "closed form"
# oil.toml
DIAMETER, LENGTH, VELOCITY, DENSITY, HEAT, CONDUCTIVITY, VISCOSITY = 2e-3, 0.4, 0.1, 1000.0, 1000.0, 1.0, 10.0
PECLET = VELOCITY * DIAMETER * DENSITY * HEAT / CONDUCTIVITY
# gas.toml
GAS_RISE = 32 * 18.5e-6 * 10.0 * 0.1 / (1.177 * 1006.0 * 1e-3**2)  # K, without pressure work
BRINKMAN = 0.1, 1.0, -0.1  # mu U^2 / (q D); negative: cooled


@lru_cache
def solved(name: str, outside: str = "insulated", value: float = 0.0):
    case = load(HERE / f"{name}.toml")
    if outside != "insulated":
        case = case.replace({"section.tube.outside": {outside: value}})
    return solve(case)


def oil(outside: str = "insulated", value: float = 0.0) -> tuple[np.ndarray, dict[str, np.ndarray]]:
    columns = solved("oil", outside, value).axial["oil"]
    return columns["z_m"] / (DIAMETER * PECLET), columns


def flux(brinkman: float) -> float:
    return VISCOSITY * VELOCITY**2 / (brinkman * DIAMETER)


def check() -> list[Row]:
    rows = []
    rise = 32 * VISCOSITY * VELOCITY * LENGTH / (DENSITY * HEAT * DIAMETER**2)
    stream = solved("oil").summary["stream"]["oil"]
    found = stream["outlet_temperature_K"] - 293.15
    rows.append(
        Row("rise of the bulk temperature [K], insulated", found, rise, 1e-3, f"32 mu u_m L / (rho cp D^2), {CLOSED}")
    )
    power = stream["pressure_drop_Pa"] * stream["mass_flow_kg_s"] / DENSITY
    rows.append(
        Row("heat taken up / pumping power, insulated", stream["heat_gain_W"] / power, 1.0, 1e-3, "first law")
    )  # fmt: skip
    x, columns = oil("temperature", 293.15)
    rows.append(
        Row("Nu at x* = 0.9, uniform bore temperature", float(np.interp(0.9, x, columns["nusselt"])),
            duct_heat.NU_T_DISSIPATION, 1e-3, f"9.6, {CLOSED}")
    )  # fmt: skip
    for brinkman in BRINKMAN:
        x, columns = oil("heat_flux", flux(brinkman))
        rows.append(
            Row(f"Nu at x* = 0.9, uniform flux, Br = {brinkman:g}", float(np.interp(0.9, x, columns["nusselt"])),
                duct_heat.nusselt_H_with_dissipation(brinkman), 1e-3, f"48 / (11 + 48 Br), {CLOSED}")
        )  # fmt: skip
    change = solved("gas").summary["stream"]["gas"]["outlet_temperature_K"] - 300.0
    rows.append(
        Row("bulk temperature change [K], insulated ideal gas", change, 0.0, 5e-3, "first law, constant enthalpy",
            scale=GAS_RISE, note="share of the rise that viscous heat alone would give")
    )  # fmt: skip
    return rows


def picture(folder: Path) -> None:
    with plots.picture(folder / "dissipation.png", 2, 5.2) as (left, right):
        series = [("uniform bore temperature", oil("temperature", 293.15), duct_heat.NU_T_DISSIPATION)]
        for brinkman in BRINKMAN:
            exact = duct_heat.nusselt_H_with_dissipation(brinkman)
            series.append((f"uniform flux, Br {brinkman:g}", oil("heat_flux", flux(brinkman)), exact))
        for k, (name, (x, columns), exact) in enumerate(series):
            left.axhline(exact, **plots.EXPECTED)
            left.plot(x[1:], columns["nusselt"][1:], color=plots.COLOURS[k], label=name)
        left.set(xlim=(0, 0.4), ylim=(0, 20), xlabel="x* = x / (D Re Pr)", ylabel="Nusselt number")
        left.legend(title="grey: closed form", fontsize=9)
        gas = solved("gas").axial["gas"]
        z = gas["z_m"]
        right.plot(1e3 * z, GAS_RISE * z / z[-1], "--", color="0.5", label="viscous heat without pressure work")
        right.plot(1e3 * z, gas["bulk_temperature_K"] - 300, color=plots.COLOURS[0], label="bulk")
        right.plot(1e3 * z, gas["wetted_wall_temperature_K"] - 300, color=plots.COLOURS[1], label="bore")
        right.set(
            xlabel="z [mm]", ylabel="temperature - inlet temperature [K]", title="Insulated ideal gas", xlim=(0, 100)
        )
        right.legend()
