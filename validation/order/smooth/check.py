"""Errors of smooth cases over three halvings of the mesh: second order means that each divides them by four."""

from functools import lru_cache
from pathlib import Path

import matplotlib.pyplot as plt
import numpy as np

from axicfd.case.read import load
from validation.common import Row
from validation.order.climb import Sequence, at_station, climb, headline, sequence

HERE = Path(__file__).parent
CASES = {
    "constant properties, film on the bore": "tube.toml",
    "conducting wall with a film": "wall.toml",
    "viscosity falling with temperature": "viscosity.toml",
}
PLACE = 0.12  # m; the curves are read at the coarsest mesh's face next to it
EXPECTED, ALLOWED = 4.0, 0.4
SOURCE = "second order: a halved cell has a quarter of the error; 3.6 to 4.4 allowed"


@lru_cache
def sequences(file: str) -> list[Sequence]:
    """Bulk temperature, wall temperature and pressure drop on four meshes and a fifth that tells their limit."""
    results = climb(load(HERE / file), 3, -1)
    return [
        sequence("bulk temperature [K]", results, at_station(results, "bulk_temperature_K", PLACE)),
        sequence("wall temperature [K]", results, at_station(results, "wetted_wall_temperature_K", PLACE)),
        sequence("pressure drop [Pa]", results, headline("pressure_drop_Pa")),
    ]


def check() -> list[Row]:
    rows = []
    for case, file in CASES.items():
        for s in sequences(file):
            for k, fall in enumerate(s.falls):
                what = f"{s.name}, error at {s.cells[k]} cells over that at {s.cells[k + 1]}; {case}"
                rows.append(Row(what, fall, EXPECTED, ALLOWED / EXPECTED, SOURCE))
    return rows


def picture(folder: Path) -> None:
    figure, axes = plt.subplots(1, 3, figsize=(11, 4.2), sharex=True, sharey=True, layout="constrained")
    for panel, (case, file) in zip(axes, CASES.items(), strict=True):
        for s, mark in zip(sequences(file), "os^", strict=True):
            scale = 60.0 if "[K]" in s.name else s.exact
            name = s.name.split(" [")[0]
            cells = s.cells[: len(s.errors)]
            panel.loglog(cells, 100 * s.errors / scale, mark + "-", label=name)
        ends = np.array([cells[0], cells[-1]])
        panel.loglog(ends, 3.0 * cells[0] / ends, color="0.6", lw=1, ls="--", label="second order")
        panel.set(title=case, xlabel="cells")
        panel.title.set_fontsize(10)
    axes[0].set_ylabel("error [% of 60 K, of the pressure drop]")
    axes[0].legend()
    figure.savefig(folder / "errors.png", dpi=120)
    plt.close(figure)
