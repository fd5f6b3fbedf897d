"""Orders found where the exact field is not smooth: which quantities keep second order, which do not, and why."""

from dataclasses import dataclass
from functools import lru_cache, partial
from pathlib import Path

import matplotlib.pyplot as plt
import numpy as np

from axicfd.case.read import load
from axicfd.results.result import Result
from validation.common import Row
from validation.order.climb import Sequence, at_station, climb, headline, sequence

HERE = Path(__file__).parent
ALONG_TUBE = HERE.parent / "smooth" / "tube.toml"
JOINT = 0.1  # m, where the conditions change
SECOND, ALLOWED = 2.0, 0.1  # order, and the share of it by which kept orders may differ
STEP = "a prescribed temperature beside insulation: flux ~ s^-1/2, temperature ~ s^1/2 at distance s from the joint"
KINK = "the curve at the joint itself is the mean of two sides that differ"
CORNER = "flat inlet: pressure and shear are singular in the wall corner"
LAYER = "heated up to the outlet plane, where nothing is conducted along: a layer that only finer cells resolve"


@dataclass(frozen=True)
class Quantity:
    """What is read: a column of the curves at a place [m], or a headline quantity where there is no place."""

    name: str
    key: str
    place: float | None = None

    def of(self, results: list[Result]) -> Sequence:
        read = headline(self.key) if self.place is None else at_station(results, self.key, self.place)
        at = "" if self.place is None else f" at {1000 * self.place:.0f} mm"
        return sequence(self.name + at, results, read)


bulk = partial(Quantity, "bulk temperature", "bulk_temperature_K")
wall = partial(Quantity, "wall temperature", "wetted_wall_temperature_K")
flux = partial(Quantity, "wall heat flux", "wall_heat_flux_W_m2")
velocity = partial(Quantity, "axis velocity", "axis_velocity_m_s")
shear = partial(Quantity, "wall shear stress", "wall_shear_stress_Pa")
DROP = Quantity("pressure drop", "pressure_drop_Pa")
ENTRY = Quantity("entry length", "hydrodynamic_entry_length_m")
LARGEST = Quantity("largest wall shear stress", "largest_wall_shear_stress_Pa")
OUTLET = Quantity("outlet temperature", "outlet_temperature_K")
OUTLET_WALL = Quantity("wall temperature in the outlet plane", "outlet_wall_temperature_K")

# file -> (quantity, order that theory gives or None, reason why it is not two)
CASES: dict[str, list[tuple[Quantity, float | None, str]]] = {
    "held-bore.toml": [
        (bulk(0.15), SECOND, ""),
        (flux(0.15), SECOND, ""),
        (wall(JOINT), 0.5, STEP),
        (flux(JOINT), -0.5, f"{STEP}; no limit"),
        (bulk(JOINT), None, f"{STEP}; errors of both signs"),
    ],
    "held-wall.toml": [
        (bulk(0.15), SECOND, ""),
        (wall(0.15), SECOND, ""),
        (wall(JOINT), SECOND, ""),
        (OUTLET, SECOND, ""),
    ],
    "film.toml": [
        (bulk(0.15), SECOND, ""),
        (wall(0.15), SECOND, ""),
        (wall(JOINT), None, "a jump of flux: temperature ~ s ln s"),
        (flux(JOINT), None, KINK),
    ],
    "flat-inlet.toml": [
        (DROP, SECOND, ""),
        (ENTRY, SECOND, ""),
        (velocity(0.05), SECOND, ""),
        (velocity(0.005), None, f"{CORNER}; errors of both signs"),
        (shear(0.01), None, CORNER),
        (LARGEST, None, CORNER),
    ],
    "tube.toml": [(OUTLET, None, LAYER), (OUTLET_WALL, None, LAYER)],
}


@lru_cache
def sequences(file: str) -> list[Sequence]:
    results = climb(load(ALONG_TUBE if file == "tube.toml" else HERE / file), 3, -1)
    return [quantity.of(results) for quantity, _, _ in CASES[file]]


def check() -> list[Row]:
    rows = []
    for file, wanted in CASES.items():
        for s, (_, order, why) in zip(sequences(file), wanted, strict=True):
            found = " ".join(f"{p:.2f}" for p in s.orders)
            judged = order == SECOND
            rows.append(
                Row(
                    f"order of {s.name}; {file}", float(s.orders[-1]), SECOND if order is None else order,
                    ALLOWED if judged else None,
                    "second order kept" if judged else why, note=f"orders of successive triples of meshes {found}",
                )
            )  # fmt: skip
    return rows


def picture(folder: Path) -> None:
    figure, axes = plt.subplots(1, len(CASES), figsize=(15, 6), sharey=True, layout="constrained")
    for panel, file in zip(axes, CASES, strict=True):
        for s in sequences(file):
            change = np.abs(np.diff(s.values))
            panel.loglog(s.cells[1:], change / change[0], "o-", ms=4, label=s.name)
        panel.loglog(s.cells[1:], s.cells[1] / s.cells[1:], color="0.6", lw=1, ls="--", label="second order")
        panel.set(title=file.removesuffix(".toml").replace("-", " "), xlabel="cells", ylim=(1e-4, 4))
        panel.legend(fontsize=9, loc="upper center", bbox_to_anchor=(0.5, -0.17))
    axes[-1].set_title("heated to the outlet")
    axes[0].set_ylabel("change from the next coarser mesh, first = 1")
    figure.savefig(folder / "changes.png", dpi=110)
    plt.close(figure)
