"""The hottest wall and its place on the tool's own mesh against a mesh with two more halvings."""

import csv
from functools import lru_cache
from pathlib import Path

from axicfd.case.read import load
from axicfd.pipeline import solve
from validation import plots
from validation.common import Row
from validation.order.hottest_wall.fine import CASES, SHIPPED, hottest

HERE = Path(__file__).parent
SOURCE = "the same case with two more halvings (fine.csv)"


@lru_cache
def solved(name: str):
    return solve(load(SHIPPED / f"{name}.toml"))


def fine() -> dict[str, dict[str, float]]:
    with open(HERE / "fine.csv", encoding="utf-8") as file:
        return {r.pop("case"): {key: float(value) for key, value in r.items()} for r in csv.DictReader(file)}


def check() -> list[Row]:
    rows = []
    for name, want in fine().items():
        found = hottest(solved(name))
        for place, words in (("bore", "hottest wetted wall"), ("wall", "hottest wall")):
            value, z = f"{place}_K", f"{place}_z_m"
            rows.append(Row(f"{words} [K], {name}", found[value], want[value], 5e-3, SOURCE, scale=want["span_K"]))
            rows.append(Row(f"its place [m], {name}", found[z], want[z], 5e-3, SOURCE, scale=want["length_m"]))
    return rows


def picture(folder: Path) -> None:
    with plots.picture(folder / "hottest-wall.png", 2, 5.2) as (left, right):
        values = fine()
        for k, name in enumerate(CASES):
            want, found, result = values[name], hottest(solved(name)), solved(name)
            (stream,) = result.case.stream
            inlet = result.case.stream[stream].inlet_temperature
            columns = result.axial[stream]
            left.plot(
                columns["z_m"] / want["length_m"],
                (columns["wetted_wall_temperature_K"] - inlet) / want["span_K"],
                color=plots.COLOURS[k],
                label=name,
            )
            left.plot(want["bore_z_m"] / want["length_m"], (want["bore_K"] - inlet) / want["span_K"], "o",
                      color=plots.COLOURS[k], mfc="none", ms=9)  # fmt: skip
            moved = 100 * (found["bore_z_m"] - want["bore_z_m"]) / want["length_m"]
            right.plot(moved, 100 * (found["bore_K"] - want["bore_K"]) / want["span_K"], "o", color=plots.COLOURS[k])
        left.set(xlabel="z / length", ylabel="bore temperature rise / largest rise", xlim=(0, 1), ylim=(-0.03, 1.5))
        left.set_yticks([0, 0.25, 0.5, 0.75, 1])
        left.legend(title="rings: two more halvings", fontsize=9, ncols=2, loc="upper center")
        right.axhline(0, color="0.6", lw=1)
        right.axvline(0, color="0.6", lw=1)
        right.set(
            xlim=(-0.004, 0.004),
            ylim=(-0.02, 0.02),
            xlabel="shift of its place [% of length]",
            ylabel="deviation of its temperature [% of span]",
            title="Hottest wetted wall (allowed: ±0.5 % both ways)",
        )
        right.set_xticks([-0.004, -0.002, 0, 0.002, 0.004])
