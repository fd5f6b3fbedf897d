"""Developed flow in a round tube against Hagen and Poiseuille."""

from functools import lru_cache
from pathlib import Path

import matplotlib.pyplot as plt
import numpy as np

from axicfd.case.read import load
from axicfd.pipeline import solve
from validation.common import Row

HERE = Path(__file__).parent
POISEUILLE = "closed form (Hagen 1839, Poiseuille 1840)"
DIAMETER, VISCOSITY = 0.010, 9e-3  # m, Pa s, as in tube.toml
# inlet profile, Reynolds number, length [m]: 20 D is more than three entry lengths at Re 100, 200 D at Re 1000
CASES = (("flat", 1, 0.2), ("flat", 100, 0.2), ("flat", 1000, 2.0), ("developed", 100, 0.2))


@lru_cache
def solved(inlet: str, reynolds: float, length: float):
    case = load(HERE / "tube.toml")
    changes = {"stream.oil.inlet_profile": inlet, "stream.oil.reynolds": reynolds, "section.tube.length": length}
    return solve(case.replace(changes))


def profile(result) -> tuple[np.ndarray, np.ndarray]:
    """(r/R, u/u_mean) at the tube's end, in the cells' middles."""
    mean = result.summary["stream"]["oil"]["mean_velocity_m_s"]
    radial = result.radial
    return np.array(radial["r_m"]) / (DIAMETER / 2), np.array(radial["axial_velocity_m_s"]) / mean


def check() -> list[Row]:
    rows = []
    for inlet, reynolds, length in CASES:
        result = solved(inlet, reynolds, length)
        where = f"{inlet} inlet, Re {reynolds}, L/D {length / DIAMETER:.0f}"
        curves, stream = result.axial["oil"], result.summary["stream"]["oil"]
        r, u = profile(result)
        exact = 2.0 * (1.0 - r**2)
        worst = int(np.argmax(np.abs(u - exact)))
        rows.append(
            Row(
                f"u/u_m at the end where it deviates most, r/R = {r[worst]:.3f}; {where}",
                u[worst], exact[worst], 1e-3, f"2 (1 - r^2/R^2), {POISEUILLE}", scale=2.0,
            )
        )  # fmt: skip
        rows.append(
            Row(
                f"Darcy f Re at the end; {where}",
                curves["friction_factor_darcy"][-1] * reynolds,
                64.0,
                1e-3,
                POISEUILLE,
            )
        )
        z, p = curves["z_m"], curves["pressure_Pa"]
        a, b = np.searchsorted(z, [0.75 * length, 0.95 * length])
        gradient = 32.0 * VISCOSITY * stream["mean_velocity_m_s"] / DIAMETER**2
        rows.append(
            Row(
                f"pressure gradient [Pa/m] over the last quarter; {where}",
                (p[a] - p[b]) / (z[b] - z[a]), gradient, 1e-3, f"32 mu u_m / D^2, {POISEUILLE}",
            )
        )  # fmt: skip
        if inlet == "developed":
            rows.append(
                Row(f"pressure drop [Pa]; {where}", stream["pressure_drop_Pa"], gradient * length, 1e-3,
                    f"32 mu u_m L / D^2, {POISEUILLE}")
            )  # fmt: skip
    return rows


def picture(folder: Path) -> None:
    figure, (left, right) = plt.subplots(1, 2, figsize=(9, 4), layout="constrained")
    r = np.linspace(0, 1, 200)
    left.plot(r, 2 * (1 - r**2), color="0.6", lw=5, label="2 (1 - r²/R²)")
    styles = {"flat": "-", "developed": "--"}
    for inlet, reynolds, length in CASES:
        r, u = profile(solved(inlet, reynolds, length))
        label = f"{inlet} inlet, Re {reynolds}"
        left.plot(r, u, styles[inlet], lw=1.2, label=label)
        right.plot(r, 100 * (u / 2 - (1 - r**2)), styles[inlet], lw=1.5, label=label)
    left.set(xlabel="radius r/R", ylabel="axial velocity u / mean velocity", title="Profile at the tube's end")
    right.set(xlabel="radius r/R", ylabel="deviation [% of the axis velocity]", title="Deviation (allowed: ±0.1 %)")
    left.legend()
    right.axhline(0, color="0.6", lw=1)
    figure.savefig(folder / "profile.png", dpi=120)
    plt.close(figure)
