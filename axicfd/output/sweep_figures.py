"""Pictures of a sweep: curves over one key, maps over two, points over more; and its table as text.

One picture holds a panel for each headline quantity that the rows change.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from pathlib import Path
from textwrap import fill
from typing import Any

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.patches import Rectangle
from matplotlib.ticker import LogLocator, MaxNLocator, NullLocator

from axicfd.output import csv
from axicfd.output.figures import CURVE_INKS, INK, SOFT_INK, WIDTH, colour_map, new_figure, plain_numbers, save
from axicfd.output.headline import number
from axicfd.output.sweep import BAR, SOLVED, Sweep
from axicfd.output.sweep_lines import (
    LIMIT,
    Axis,
    as_text,
    header_and_lines,
    limited,
    quantity_axes,
    sorted_rows,
    varied_axes,
    verdict,
)
from axicfd.results.limits import FAIL, PASS

MOST_PANELS = 8
MOST_OVER_EACH = 5  # quantities where each is drawn over every key
FIRST = ("quantity", "stream", "sensor", "layer", "section")  # after the limited ones
ACROSS = 2  # panels beside each other
PANEL, GAP_ACROSS, GAP_DOWN, ABOVE, BELOW = 2.5, 1.05, 0.95, 0.9, 0.65  # inches
NOTE_WIDTH = 125  # letters of a line of the note, of which two fit above the panels
NUMBERED = 60  # blocks of a map up to which the value stands in each
MARKED = 9  # values up to which each has its own mark on an axis
CHANGES = 1e-9  # of its size by which a quantity must change to get a panel
REFUSED_GREY = "#e6e6e6"
FAILS_INK = "#a01c1c"


def draw_all(table: Sweep, folder: Path, suffix: str = ".png") -> list[Path]:
    """Write the picture of a sweep and its table, sorted by limits; rows within all limits get a file of their own."""
    written = []
    figure = picture(table)
    if figure is not None:
        written.append(folder / f"sweep{suffix}")
        save(figure, written[-1])
    written.append(folder / "table.txt")
    written[-1].write_text(as_text(*header_and_lines(table)), encoding="utf-8")
    limits = limited(table)
    if limits:
        passing = [row for row in sorted_rows(table) if verdict(row, limits) == PASS]
        written.append(folder / "passing.csv")
        csv.write_columns(written[-1], {name: [row[name] for row in passing] for name in table.columns})
    return written


def picture(table: Sweep) -> Figure | None:
    """The panels of a sweep; None where nothing that varies is a number or nothing was solved."""
    varied = [axis for axis in varied_axes(table) if _is_numeric(table[axis.name])]
    panels = sorted((axis for axis in quantity_axes(table) if _changes(table[axis.name])), key=_rank(table))
    if not varied or not panels:
        return None
    if len(varied) == 1 or _step_together(table, varied):
        return _curves(table, varied, panels[:MOST_PANELS])
    if len(varied) == 2:
        return _maps(table, varied[0], varied[1], panels[:MOST_PANELS])
    return _points(table, varied, panels[:MOST_OVER_EACH])


# --- curves ---------------------------------------------------------------------------------------------------


def _curves(table: Sweep, varied: Sequence[Axis], panels: Sequence[Axis]) -> Figure:
    """Over the first key; the others step with it, and are named."""
    over, *others = varied
    step = f", {' and '.join(axis.label for axis in others)} changing with it" if others else ""
    figure, axes = _paper(table, len(panels), f"over {over.title}{step}; bars: mesh errors{_red(table)}")
    for place, axis in zip(axes, panels, strict=True):
        _bars(table, place, over, axis)
        place.set_xlabel(over.title, fontsize=10, color=INK)
    return figure


def _red(table: Sweep) -> str:
    return "; open and red: fails its limit" if limited(table) else ""


def _bars(table: Sweep, axes: Axes, over: Axis, axis: Axis, line: bool = True) -> None:
    """Values with their mesh errors over a key; rows that fail a limit on the quantity open, in another ink."""
    rows = [row for row in table.rows if row[axis.name] is not None and row[over.name] is not None]
    rows.sort(key=lambda row: row[over.name])
    x = np.array([over.value(row[over.name]) for row in rows])
    y = np.array([axis.value(row[axis.name]) for row in rows])
    half = np.array([axis.difference(row[BAR + axis.name] or 0.0) for row in rows])
    if line:
        axes.plot(x, y, color=CURVE_INKS[0], linewidth=1.4, zorder=2)
    fails = np.array([_fails(row, axis) for row in rows], bool)
    for chosen, ink, face, size in ((~fails, CURVE_INKS[0], CURVE_INKS[0], 4), (fails, FAILS_INK, "white", 6)):
        axes.errorbar(
            x[chosen], y[chosen], half[chosen],
            fmt="o", markersize=size, markerfacecolor=face, color=ink, elinewidth=1.2, capsize=3, zorder=3,
        )  # fmt: skip
    _dress(axes, axis.title)
    _along(axes.xaxis, over, x, axes.set_xscale)
    axes.yaxis.set_major_formatter(plain_numbers())
    axes.yaxis.set_major_locator(MaxNLocator(nbins=5, steps=[1, 2, 2.5, 5, 10]))
    axes.grid(axis="y", color="#dddddd", linewidth=0.6, zorder=0.5)


# --- maps -----------------------------------------------------------------------------------------------------


def _maps(table: Sweep, across: Axis, up: Axis, panels: Sequence[Axis]) -> Figure:
    figure, axes = _paper(
        table, len(panels), f"{across.label} to the right, {up.label} upwards{_legend(table, across, up)}"
    )
    for place, axis in zip(axes, panels, strict=True):
        _map(figure, place, table, across, up, axis)
        place.set_xlabel(across.title, fontsize=10, color=INK)
        place.set_ylabel(up.title, fontsize=10, color=INK)
    return figure


def _map(figure: Figure, axes: Axes, table: Sweep, across: Axis, up: Axis, axis: Axis) -> None:
    """A block for each pair of values of a grid, or a dot for each row of a sample, in the colour of the quantity."""
    rows = list(table.rows)
    x = np.array([across.value(row[across.name]) for row in rows], float)
    y = np.array([up.value(row[up.name]) for row in rows], float)
    value = np.array([math.nan if row[axis.name] is None else axis.value(row[axis.name]) for row in rows], float)
    known = np.isfinite(value)
    low, high = float(value[known].min()), float(value[known].max())
    colours = colour_map()
    grid_x, grid_y = np.unique(x), np.unique(y)
    if _is_grid(table, across, up):
        edges = _edges(grid_x), _edges(grid_y)
        block = np.full((len(grid_y), len(grid_x)), math.nan)
        where = np.searchsorted(grid_y, y), np.searchsorted(grid_x, x)
        block[where] = value
        mesh: Any = axes.pcolormesh(*edges, np.ma.masked_invalid(block), cmap=colours, vmin=low, vmax=high)
        for row, i, j in zip(rows, *where, strict=True):
            _write_block(axes, row, axis, edges[0][j : j + 2], edges[1][i : i + 2], (low, high), block.size <= NUMBERED)
        axes.set_xlim(edges[0][0], edges[0][-1])
        axes.set_ylim(edges[1][0], edges[1][-1])
    else:
        mesh = axes.scatter(
            x[known], y[known], c=value[known], cmap=colours, vmin=low, vmax=high,
            s=40, edgecolors=SOFT_INK, linewidths=0.6, zorder=3,
        )  # fmt: skip
        fails = np.array([_fails(row, axis) for row in rows], bool)
        axes.scatter(x[fails], y[fails], s=150, facecolors="none", edgecolors=FAILS_INK, linewidths=1.4, zorder=2.9)
        axes.plot(x[~known], y[~known], "x", color=SOFT_INK, markersize=5, zorder=3)
    _dress(axes, axis.title)
    _along(axes.xaxis, across, grid_x, axes.set_xscale)
    _along(axes.yaxis, up, grid_y, axes.set_yscale)
    bar = figure.colorbar(mesh, ax=axes, fraction=0.05, pad=0.03)
    bar.outline.set_visible(False)
    bar.ax.tick_params(labelsize=8, color=SOFT_INK)
    bar.ax.yaxis.set_major_formatter(plain_numbers())


def _write_block(
    axes: Axes, row: dict[str, Any], axis: Axis, x: np.ndarray, y: np.ndarray, span: tuple[float, float], numbered: bool
) -> None:
    """The value in a block, dark on light and light on dark; grey where not solved, hatched where it fails."""
    corner, size = (x[0], y[0]), (x[1] - x[0], y[1] - y[0])
    value = row[axis.name]
    if value is None:
        axes.add_patch(Rectangle(corner, *size, facecolor=REFUSED_GREY, edgecolor="none", zorder=1.5))
    elif _fails(row, axis):
        axes.add_patch(Rectangle(corner, *size, fill=False, hatch="//", edgecolor="white", linewidth=0.0, zorder=1.6))
    if not numbered:
        return
    shown = axis.value(value) if value is not None else 0.0
    share = (shown - span[0]) / (span[1] - span[0])
    ground = colour_map()(share) if value is not None else REFUSED_GREY
    axes.text(
        _middle(x),
        _middle(y),
        number(float(shown)) if value is not None else str(row["status"] or "not yet"),
        fontsize=8,
        color="white" if value is not None and share < 0.5 else INK,  # there both stand out alike
        bbox={"facecolor": ground, "edgecolor": "none", "pad": 1.5},  # keeps the hatching off the number
        ha="center",
        va="center",
        zorder=3,
    )


def _is_grid(table: Sweep, across: Axis, up: Axis) -> bool:
    """Whether every value of one key comes with every value of the other."""
    pairs = {(row[across.name], row[up.name]) for row in table.rows}
    return len({x for x, _ in pairs}) * len({y for _, y in pairs}) == len(pairs)


def _legend(table: Sweep, across: Axis, up: Axis) -> str:
    unsolved, fails = ("grey", "hatched") if _is_grid(table, across, up) else ("cross", "ringed")
    words = f"; {unsolved}: not solved" if any(status != SOLVED for status in table["status"]) else ""
    return words + (f"; {fails}: fails its limit" if limited(table) else "")


# --- points ---------------------------------------------------------------------------------------------------


def _points(table: Sweep, varied: Sequence[Axis], panels: Sequence[Axis]) -> Figure:
    """A row of panels per quantity, one over each key: which input it follows shows as a narrow band."""
    places = [(axis, over) for axis in panels for over in varied]
    figure, axes = _paper(
        table, len(places), f"each quantity over each key; bars: mesh errors{_red(table)}", len(varied)
    )
    for place, (axis, over) in zip(axes, places, strict=True):
        _bars(table, place, over, axis, line=False)
        place.set_xlabel(over.title, fontsize=10, color=INK)
    return figure


# --- paper ----------------------------------------------------------------------------------------------------


def _paper(table: Sweep, panels: int, note: str, across: int = ACROSS) -> tuple[Figure, list[Axes]]:
    """An empty picture with its heading, and so many panels, from the left and from above."""
    across = min(across, panels)
    down = math.ceil(panels / across)
    width = (WIDTH - GAP_ACROSS * across - 0.4) / across
    height = ABOVE + down * (PANEL + GAP_DOWN) + BELOW - GAP_DOWN
    figure = new_figure(height)
    axes = []
    for n in range(panels):
        row, column = divmod(n, across)
        left = GAP_ACROSS * 0.9 + column * (width + GAP_ACROSS)
        bottom = height - ABOVE - row * (PANEL + GAP_DOWN) - PANEL
        axes.append(figure.add_axes((left / WIDTH, bottom / height, width / WIDTH, PANEL / height)))
    title = table.base.title or "untitled case"
    ended = f"{table.counts.get(SOLVED, 0)} of {len(table)} rows solved"
    figure.text(0.02, 1 - 0.1 / height, title, ha="left", va="top", fontsize=13, color=INK)
    note = fill(f"{ended}; {note}", NOTE_WIDTH)
    figure.text(0.02, 1 - 0.36 / height, note, ha="left", va="top", fontsize=10, color=SOFT_INK)
    return figure, axes


def _dress(axes: Axes, title: str) -> None:
    for side in ("top", "right"):
        axes.spines[side].set_visible(False)
    for side in ("left", "bottom"):
        axes.spines[side].set_color(SOFT_INK)
    axes.tick_params(labelsize=9, color=SOFT_INK, labelcolor=INK)
    axes.set_title(title, loc="left", fontsize=10.5, color=INK, pad=4)


def _along(mpl_axis: Any, axis: Axis, values: np.ndarray, set_scale: Callable[[str], Any]) -> None:
    """Marks at the values themselves where they are few; logarithmic where the values step by a factor."""
    values = np.unique(values)
    if _steps_by_factor(values):
        set_scale("log")
    if len(values) <= MARKED:
        mpl_axis.set_ticks(values, [number(float(value)) for value in values])
        mpl_axis.set_minor_locator(NullLocator())
        return
    if _steps_by_factor(values):
        mpl_axis.set_major_locator(LogLocator(subs=(1.0, 2.0, 5.0)))
        mpl_axis.set_minor_locator(NullLocator())
    mpl_axis.set_major_formatter(plain_numbers())


def _steps_by_factor(values: np.ndarray) -> bool:
    """Whether values rise by about the same factor, and not by about the same step."""
    if len(values) < 3 or values[0] <= 0.0:
        return False
    steps, factors = np.diff(values), np.diff(np.log(values))
    return bool(np.std(factors) / np.mean(factors) < np.std(steps) / np.mean(steps))


def _edges(values: np.ndarray) -> np.ndarray:
    """Borders of blocks around values: halfway between them, in the logarithm where they step by a factor."""
    if len(values) == 1:
        return values[0] + np.array([-0.5, 0.5]) * (abs(values[0]) or 1.0)
    if _steps_by_factor(values):
        return np.exp(_edges_even(np.log(values)))
    return _edges_even(values)


def _edges_even(values: np.ndarray) -> np.ndarray:
    middles = (values[1:] + values[:-1]) / 2
    return np.concatenate([[2 * values[0] - middles[0]], middles, [2 * values[-1] - middles[-1]]])


def _middle(ends: np.ndarray) -> float:
    return float(np.sqrt(ends[0] * ends[1])) if ends[0] > 0 and ends[1] / ends[0] > 1.2 else float(np.mean(ends))


# --- what there is to draw ------------------------------------------------------------------------------------


def _is_numeric(values: Sequence[Any]) -> bool:
    return all(isinstance(value, int | float) for value in values) and len(set(values)) > 1


def _rank(table: Sweep) -> Callable[[Axis], int]:
    """What a reader asks for first: what has a limit, then what got a name of its own."""
    limits = limited(table)
    return lambda axis: -1 if f"{LIMIT}{axis.path}" in limits else FIRST.index(axis.path.partition(".")[0])


def _changes(values: Sequence[Any]) -> bool:
    known = [value for value in values if value is not None]
    return bool(known) and max(known) - min(known) > CHANGES * max(abs(value) for value in known)


def _step_together(table: Sweep, varied: Sequence[Axis]) -> bool:
    """Whether each value of the first key comes with one value of every other."""
    rows = {tuple(row[axis.name] for axis in varied) for row in table.rows}
    return len(rows) == len({row[0] for row in rows}) and not _is_sample(table, varied)


def _is_sample(table: Sweep, varied: Sequence[Axis]) -> bool:
    """Whether the keys go their own ways: ranked by the first, another neither only rises nor only falls."""
    rows = sorted(tuple(row[axis.name] for axis in varied) for row in table.rows)
    for k in range(1, len(varied)):
        steps = np.diff([row[k] for row in rows])
        if not (np.all(steps >= 0) or np.all(steps <= 0)):
            return True
    return False


def _fails(row: dict[str, Any], axis: Axis) -> bool:
    return row.get(f"{LIMIT}{axis.path}") == FAIL
