"""The Graetz problem with axial conduction in the fluid: a step of the bore's temperature in an infinite tube."""

from functools import lru_cache
from pathlib import Path

import numpy as np

from axicfd.case.read import load
from axicfd.pipeline import solve
from validation import plots
from validation.common import Row, table

HERE = Path(__file__).parent
DIAMETER, DIFFUSIVITY = 2e-3, 1e-6  # m, m2/s, as in tube.toml
INLET, WALL = 293.15, 303.15  # K
JUDGED = (10.0, 50.0)  # the other Peclet numbers are shown
SHOWN = (5.0, 20.0, 100.0)
SOURCE = "extended_graetz_T.csv (finite elements)"
COLUMNS = "Pe=um D/alpha [-]", "x*=(x/D)/Pe [-]", "theta_m=(Tw-Tm)/(Tw-Tin) [-]", "Nu_x local [-]"


def expected(peclet: float) -> np.ndarray:
    """x*, theta_m, Nu of the rows with an adiabatic wall before the step."""
    lines = [r for r in table("extended_graetz_T.csv") if r["upstream wall (x<0)"] == "adiabatic"]
    return np.array([[float(r[key]) for key in COLUMNS[1:]] for r in lines if float(r[COLUMNS[0]]) == peclet])


@lru_cache
def curves(peclet: float) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """x* from the step on, theta_m, Nu.

    The lead-in is 20/Pe + 2 diameters (upstream the fluid cools as exp(Pe x / D) or faster, so exp(-20) is left at the
    inlet), the heated part reaches to x* = 0.3 and three diameters more.
    """
    lead, heated = (2 + 20 / peclet) * DIAMETER, (0.3 * peclet + 3) * DIAMETER
    changes = {
        "stream.liquid.mean_velocity": peclet * DIFFUSIVITY / DIAMETER,
        "section.lead-in.length": lead,
        "section.heated.length": heated,
    }
    columns = solve(load(HERE / "tube.toml").replace(changes)).axial["liquid"]
    x = (columns["z_m"] - lead) / (DIAMETER * peclet)
    here = (x > -1e-12) & np.isfinite(columns["nusselt"])
    return x[here], ((WALL - columns["bulk_temperature_K"]) / (WALL - INLET))[here], columns["nusselt"][here]


def check() -> list[Row]:
    rows = []
    for peclet in sorted(JUDGED + SHOWN):
        margin = 5e-3 if peclet in JUDGED else None
        x, theta, nu = curves(peclet)
        for at, theta_exact, nu_exact in expected(peclet):
            place = f"Pe {peclet:g}, x* = {at:g}"
            rows.append(Row(f"theta_m, {place}", float(np.interp(at, x, theta)), theta_exact, margin, SOURCE))
            if np.isfinite(nu_exact):
                # near the step Nu is close to a power of x
                found = float(np.exp(np.interp(np.log(at), np.log(x[1:]), np.log(nu[1:]))))
                rows.append(Row(f"Nu, {place}", found, nu_exact, margin, SOURCE))
    return rows


def picture(folder: Path) -> None:
    with plots.picture(folder / "extended-graetz.png", 2) as (left, right):
        for k, peclet in enumerate((5.0, 10.0, 50.0)):
            x, theta, nu = curves(peclet)
            table_x, table_theta, table_nu = expected(peclet).T
            for axes, values, points in ((left, theta, table_theta), (right, nu, table_nu)):
                axes.plot(x[1:], values[1:], color=plots.COLOURS[k], label=f"Pe {peclet:g}")
                axes.plot(table_x, points, "o", color=plots.COLOURS[k], mfc="none")
        left.set(xlim=(0, 0.2), ylim=(0, 1), ylabel="(T_wall - T_bulk) / (T_wall - T_in)")
        right.set(xlim=(8e-4, 0.25), ylim=(3, 20), xscale="log", yscale="log", ylabel="local Nusselt number")
        right.set_yticks([3, 5, 10, 20], ["3", "5", "10", "20"])
        right.minorticks_off()
        left.legend(title="rings: table")
        for axes in (left, right):
            axes.set_xlabel("x* = x / (D Pe)")
