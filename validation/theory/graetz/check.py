"""The Graetz problem: local Nusselt number, outlet temperature and thermal entry lengths."""

from functools import lru_cache
from pathlib import Path

import numpy as np

from axicfd.case.read import load
from axicfd.pipeline import solve
from axicfd.theory import duct_heat
from validation import plots
from validation.common import Row, table

HERE = Path(__file__).parent
DIAMETER, PECLET = 2e-3, 5000.0  # m, as in tube.toml
WALL, INLET, FLUX = 30.0, 20.0, 1000.0  # degC, W/m2
KELVIN = 273.15
STATIONS = (0.001, 0.0015, 0.002, 0.003, 0.005, 0.01, 0.02, 0.05, 0.1, 0.2)  # x*
SERIES = "graetz_nu_vs_xstar.csv, 90-term series"
NUSSELT = {"T": "Nu_x_T local [-]", "H": "Nu_x_H local [-]"}


@lru_cache
def solved(condition: str):
    case = load(HERE / "tube.toml")
    if condition == "H":
        case = case.replace({"section.heated.outside": {"heat_flux": FLUX}})
    return solve(case)


def curve(condition: str, column: str) -> tuple[np.ndarray, np.ndarray]:
    columns = solved(condition).axial["liquid"]
    return columns["z_m"] / (DIAMETER * PECLET), columns[column]


def check() -> list[Row]:
    rows = []
    expected = {float(line["x*=x/(D Re Pr) [-]"]): line for line in table("graetz_nu_vs_xstar.csv")}
    for condition, key in NUSSELT.items():
        x, nu = curve(condition, "nusselt")
        for station in STATIONS:
            exact = float(expected[station][key])
            rows.append(Row(f"Nu_{condition} at x* = {station}", float(np.interp(station, x, nu)), exact, 3e-3, SERIES))
    x, bulk = curve("T", "bulk_temperature_K")
    mean = float(expected[0.2]["Nu_m_T log-mean from 0 to x [-]"])
    left = (WALL + KELVIN - float(np.interp(0.2, x, bulk))) / (WALL - INLET)
    rows.append(
        Row("bulk temperature at x* = 0.2 [degC], T", WALL - left * (WALL - INLET),
            WALL - np.exp(-4 * mean * 0.2) * (WALL - INLET), 3e-3,
            f"exponential with the mean Nusselt number, {SERIES}", scale=WALL - INLET)
    )  # fmt: skip
    rows.append(
        Row("(T_wall - T_bulk) / (T_wall - T_in) at x* = 0.2, T", left, np.exp(-4 * mean * 0.2), 3e-3,
            f"exponential with the mean Nusselt number, {SERIES}")
    )  # fmt: skip
    outlet = solved("H").summary["stream"]["liquid"]["outlet_temperature_K"] - KELVIN
    rise = 4.0 * 2.1 / (DIAMETER * PECLET) * FLUX * DIAMETER
    rows.append(Row("outlet temperature [degC], H", outlet, INLET + rise, 1e-8, "heat balance, exact", scale=rise))
    for condition, exact in (("T", duct_heat.ENTRY_LENGTH_T), ("H", duct_heat.ENTRY_LENGTH_H)):
        length = solved(condition).summary["stream"]["liquid"]["thermal_entry_length_m"] / (DIAMETER * PECLET)
        rows.append(
            Row(f"thermal entry length / (D Re Pr), {condition}", length, exact, 5e-3,
                "Shah & London 1978 (from memory); the series gives the same digits")
        )  # fmt: skip
        rows.append(
            Row(f"thermal entry length / (D Re Pr), {condition}", length, duct_heat.ENTRY_LENGTH_RULE, None,
                "common practice, no source", note="a rule of thumb, not a value")
        )  # fmt: skip
    return rows


def picture(folder: Path) -> None:
    lines = [line for line in table("graetz_nu_vs_xstar.csv") if float(line["x*=x/(D Re Pr) [-]"]) < 0.21]
    at = np.array([float(line["x*=x/(D Re Pr) [-]"]) for line in lines])
    with plots.picture(folder / "graetz.png", 2) as (left, right):
        for k, (condition, name) in enumerate((("T", "uniform bore temperature"), ("H", "uniform flux"))):
            exact = np.array([float(line[NUSSELT[condition]]) for line in lines])
            x, nu = curve(condition, "nusselt")
            left.plot(at, exact, **plots.EXPECTED)
            left.plot(x[1:], nu[1:], color=plots.COLOURS[k], label=name)
            right.plot(at, 100 * (np.interp(at, x, nu) / exact - 1), "o-", color=plots.COLOURS[k], ms=3)
        left.set(xscale="log", yscale="log", xlim=(1e-4, 0.21), ylim=(3.3, 30), ylabel="local Nusselt number")
        left.set_yticks([4, 6, 10, 20], ["4", "6", "10", "20"])
        left.minorticks_off()
        left.legend(title="grey: series")
        right.axhline(0, color="0.6", lw=1)
        right.axvspan(1e-4, 1e-3, color="0.93")
        right.text(1.15e-4, 0.32, "not judged", color="0.4")
        for y in (-0.3, 0.3):
            right.axhline(y, color="0.6", lw=1, ls="--")
        right.set(xscale="log", xlim=(1e-4, 0.21), ylim=(-0.4, 0.4), ylabel="deviation [%]   (allowed: ±0.3 %)")
        for axes in (left, right):
            axes.set_xlabel("x* = x / (D Re Pr)")
