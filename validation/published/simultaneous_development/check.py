"""Velocity and temperature that develop together: how Nusselt numbers approach the boundary-layer limit as Re grows."""

from functools import lru_cache
from pathlib import Path

import numpy as np

from axicfd.case.read import load
from axicfd.pipeline import solve
from validation import plots
from validation.common import Row, table

HERE = Path(__file__).parent
DIAMETER = 2e-3  # m, as in tube.toml
DIFFUSIVITY, DENSITY = 1e-6, 1000.0  # m2/s, kg/m3: with Pr they give the viscosity
WALL, INLET, FLUX, KELVIN = 30.0, 20.0, 1000.0, 273.15  # degC, W/m2
PRANDTL = 0.7, 5.0
REYNOLDS = 125, 250, 500, 1000, 2000
STATIONS = 0.001, 0.005, 0.01, 0.02, 0.05, 0.2  # x*
ENTRANCE = 0.001, 0.005  # x* where the gap stands well above mesh errors at every Re
DEVELOPED = 0.2  # x* from which on the limit does not depend on Re
GAP, DEVELOPED_MARGIN = 1e-2, 1e-3
SOURCE = "simultaneous_developing.csv: independent computation, not published; limit of infinite Re"
VALUES = {"Nu_T": "Nu_x_T local [-]", "Nu_H": "Nu_x_H local [-]", "mean Nu_T": "Nu_m_T log-mean [-]"}
LIMITS = {  # allowed at infinite Re, per x*; None is shown
    "Nu_T": (None, 2e-3, 1e-3, 1e-3, 1e-3, 1e-3),
    "Nu_H": (None, 2e-3, 1e-3, 1e-3, 1e-3, 1e-3),
    "mean Nu_T": (None, None, 5e-3, 5e-3, 5e-3, 5e-3),
}


def limit(prandtl: float, name: str) -> tuple[np.ndarray, np.ndarray]:
    """(x*, value) of the table."""
    rows = [row for row in table("simultaneous_developing.csv") if float(row["Pr [-]"]) == prandtl]
    return np.array([[float(row["x*=x/(D Re Pr) [-]"]), float(row[VALUES[name]])] for row in rows]).T


@lru_cache
def curves(prandtl: float, reynolds: float, condition: str) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """x*, local Nusselt number and bulk temperature [degC] of a tube up to x* = 0.21."""
    changes = {
        "stream.liquid.reynolds": reynolds,
        "fluid.liquid.viscosity": prandtl * DIFFUSIVITY * DENSITY,
        "section.heated.length": 1.05 * STATIONS[-1] * reynolds * prandtl * DIAMETER,
    }
    if condition == "H":
        changes["section.heated.outside"] = {"heat_flux": FLUX}
    columns = solve(load(HERE / "tube.toml").replace(changes)).axial["liquid"]
    at = columns["z_m"] / (DIAMETER * reynolds * prandtl)
    return at, columns["nusselt"], columns["bulk_temperature_K"] - KELVIN


def computed(prandtl: float, reynolds: float, name: str, at: np.ndarray) -> np.ndarray:
    x, nusselt, bulk = curves(prandtl, reynolds, name[-1])
    if name != "mean Nu_T":
        return np.interp(at, x, nusselt)
    left = (WALL - np.interp(at, x, bulk)) / (WALL - INLET)
    return -np.log(left) / (4 * at)


def to_infinity(at_1000: np.ndarray, at_2000: np.ndarray) -> np.ndarray:
    """Without the part that falls as Re^-1/2."""
    root = np.sqrt(2.0)
    return (root * at_2000 - at_1000) / (root - 1.0)


def check() -> list[Row]:
    rows = []
    at = np.array(STATIONS)
    for prandtl in PRANDTL:
        for name, allowed in LIMITS.items():
            table_at, value = limit(prandtl, name)
            want = value[np.searchsorted(table_at, at)]
            got = {re: computed(prandtl, re, name, at) for re in REYNOLDS}
            endless = to_infinity(got[1000], got[2000])
            for k, x in enumerate(STATIONS):
                what = f"{name} at x* = {x}, Pr {prandtl:g}"
                margin, note = None, "finite Re: shows the approach"
                if name != "mean Nu_T" and x >= DEVELOPED:
                    margin, note = DEVELOPED_MARGIN, ""
                elif name != "mean Nu_T" and x >= 0.01:
                    margin, note = GAP, ""
                rows.append(Row(f"{what}, Re 2000", got[2000][k], want[k], margin, SOURCE, note=note))
                note = "from Re 1000 and 2000 in Re^-1/2"
                if allowed[k] is None:
                    note += "; the next term, as 1/Re, is not small"
                rows.append(Row(f"{what}, Re to infinity", endless[k], want[k], allowed[k], SOURCE, note=note))
                if x in ENTRANCE:
                    gaps = [abs(got[re][k] - want[k]) for re in REYNOLDS]
                    falling = sum(b < a for a, b in zip(gaps[:-1], gaps[1:], strict=True))
                    rows.append(
                        Row(f"doublings of Re that lessen the gap of {what}", falling, len(REYNOLDS) - 1, 0.0, SOURCE)
                    )
    return rows


def picture(folder: Path) -> None:
    panels = [(0.7, "Nu_T"), (0.7, "Nu_H"), (5.0, "Nu_T"), (5.0, "Nu_H")]
    titles = {"Nu_T": "uniform bore temperature", "Nu_H": "uniform flux"}
    with plots.picture(folder / "simultaneous.png", 4, 4.2) as axes:
        for panel, (prandtl, name) in zip(axes, panels, strict=True):
            at, value = limit(prandtl, name)
            use = at >= ENTRANCE[0]
            at, value = at[use], value[use]
            found = {re: computed(prandtl, re, name, at) for re in REYNOLDS}
            for k, re in enumerate(REYNOLDS):
                panel.plot(at, 100 * (found[re] / value - 1), color=plots.COLOURS[k], label=f"Re {re}")
            endless = to_infinity(found[1000], found[2000])
            panel.plot(at, 100 * (endless / value - 1), "k--", lw=1.5, label="Re to infinity")
            panel.axhline(0, color="0.8", lw=1, zorder=0)
            panel.set(xscale="log", title=f"Pr {prandtl:g}, {titles[name]}", xlabel="x* = x / (D Re Pr)")
            panel.set_yscale("symlog", linthresh=0.5, linscale=1.0)
            panel.set_ylim(-6, 30)
            panel.set_yticks([-5, -1, -0.5, 0, 0.5, 1, 5, 20], ["-5", "-1", "-0.5", "0", "0.5", "1", "5", "20"])
            panel.minorticks_off()
        axes[0].set_ylabel("Nu: computed minus limit [%]\n(linear within ±0.5 %)")
        axes[0].legend()
