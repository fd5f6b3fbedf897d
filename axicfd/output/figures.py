"""Pictures: the temperature in the r-z plane, and curves along the tube under the tube itself.

Made with a bare Figure on the Agg canvas, never through a global plotting state, so that many can be drawn at
once from several threads.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from pathlib import Path
from typing import Any

import numpy as np
from matplotlib.axes import Axes
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.colors import ListedColormap
from matplotlib.figure import Figure
from matplotlib.patches import Rectangle
from matplotlib.ticker import FuncFormatter, MaxNLocator

from axicfd.glossary import Reported, curve_row
from axicfd.output.folder import file_name
from axicfd.output.shown import Shown, shown_units

WIDTH = 10.0  # inches, all pictures
LEFT, RULER = 0.1, 0.78  # left margin and length of the ruler, as shares of the width
DOTS_PER_INCH = 150
TUBE_SHARE = 0.24  # height of the tube over its length on paper; the radius is stretched to come near this
STRETCHES = (1, 2, 5, 10, 20, 50, 100, 200, 500, 1000, 2000, 5000)
GREYS = (
    "#b9b9b9",
    "#d8d8d8",
    "#a4a4a4",
    "#c8c8c8",
    "#e4e4e4",
)  # wall layers from inside out, neighbours apart
HEATED_TINT, COOLED_TINT = "#fbe9d9", "#e1ecf6"
INK = "#222222"
SOFT_INK = "#777777"
CURVE_INKS = ("#22436b", "#b4552d", "#6d6d6d")  # dark and light enough apart to read in grey, with line styles on top

# Panels of the axial picture: title and the columns shown in it.
PANELS = (
    ("temperature", ("bulk_temperature_K", "wetted_wall_temperature_K")),
    ("wall heat flux", ("wall_heat_flux_W_m2",)),
    ("Nusselt number", ("nusselt",)),
    ("pressure above the outlet", ("pressure_Pa",)),
)


def save(figure: Figure, path: Path) -> None:
    """Write a picture; the suffix decides: .png, .svg or .pdf. Equal pictures make equal bytes."""
    metadata = {".svg": {"Date": None}, ".pdf": {"CreationDate": None}}.get(path.suffix)
    import matplotlib

    with matplotlib.rc_context({"svg.hashsalt": "axicfd", "svg.fonttype": "none"}):
        figure.savefig(path, dpi=DOTS_PER_INCH, metadata=metadata)


def draw_all(result: Any, folder: Path, suffix: str = ".png") -> list[Path]:
    """Draw every picture of a result into the folder; returns what was written."""
    pictures = {"temperature": temperature_picture(result)}
    for stream in result.axial:
        pictures[f"axial-{file_name(stream)}"] = axial_picture(result, stream)
    paths = []
    for name, figure in pictures.items():
        path = folder / f"{name}{suffix}"
        save(figure, path)
        paths.append(path)
    return paths


def colour_map() -> ListedColormap:
    """Dark is cold, light is warm: lightness rises in equal steps, so that the map also reads in grey.

    A path through blue, violet, red and amber in the even colour space Oklab (B. Ottosson, "A perceptual
    color space for image processing", 2020; matrices from memory).
    """
    t = np.linspace(0.0, 1.0, 256)
    lightness = 0.28 + 0.66 * t
    hue = np.radians(np.interp(t, [0.0, 0.35, 0.65, 1.0], [262.0, 330.0, 395.0, 458.0]))
    chroma = np.interp(t, [0.0, 0.2, 0.55, 0.85, 1.0], [0.075, 0.115, 0.135, 0.115, 0.06])
    a, b = chroma * np.cos(hue), chroma * np.sin(hue)
    roots = np.array(
        [
            lightness + 0.3963377774 * a + 0.2158037573 * b,
            lightness - 0.1055613458 * a - 0.0638541728 * b,
            lightness - 0.0894841775 * a - 1.2914855480 * b,
        ]
    )
    to_rgb = np.array(
        [
            [4.0767416621, -3.3077115913, 0.2309699292],
            [-1.2684380046, 2.6097574011, -0.3413193965],
            [-0.0041960863, -0.7034186147, 1.7076147010],
        ]
    )
    linear = np.clip(to_rgb @ roots**3, 0.0, 1.0)
    rgb = np.where(linear <= 0.0031308, 12.92 * linear, 1.055 * linear ** (1 / 2.4) - 0.055)
    return ListedColormap(np.clip(rgb, 0.0, 1.0).T, name="axicfd")


def temperature_picture(result: Any) -> Figure:
    """Temperature of the stream in colour, wall layers in greys, isotherms through both."""
    shown, fields, tube = shown_units(result.case), result.fields, result.layout
    stretch = _stretch(tube)
    height = _tube_height(tube, stretch, ruler=RULER * WIDTH)
    figure = new_figure(height + 2.8)
    total = figure.get_figheight()
    axes = figure.add_axes((LEFT, 1.95 / total, RULER, height / total))
    _prepare_tube(axes, tube, shown)
    _draw_layers(axes, tube, shown)

    z, r = shown.value("length", fields["z_faces"]), np.asarray(fields["r_faces"])
    r_shown = shown.value("length", r)
    kelvin = fields["T"] + float(fields["inlet_temperature"])
    temperature = np.ma.masked_where(~_present(fields), shown.value("temperature", kelvin))
    fluid = np.ma.masked_where(~_in_stream(fields), temperature)
    low, high = _range(temperature)
    colours = colour_map()
    for side in (1, -1):
        mesh = axes.pcolormesh(
            z, side * r_shown, fluid.T, cmap=colours, vmin=low, vmax=high, rasterized=True, zorder=1.5
        )
    _isotherms(axes, z, r_shown, temperature, low, high)
    _layer_edges(axes, tube, shown)
    _centre_line(axes, tube, shown)
    _layer_labels(axes, tube, shown)
    _ruler(axes, tube, shown)
    _radius_ticks(axes, tube, shown)
    _stream_ends(axes, result, shown)

    bar_axes = figure.add_axes((0.25, 0.62 / total, 0.5, 0.14 / total))
    bar = figure.colorbar(mesh, cax=bar_axes, orientation="horizontal")
    bar.outline.set_visible(False)
    bar.ax.xaxis.set_major_formatter(plain_numbers())
    bar.ax.tick_params(labelsize=10, color=SOFT_INK)
    bar.set_label(f"temperature, {shown.unit('temperature')}", fontsize=11, color=INK)
    _heading(figure, result, f"radius × {stretch}")
    return figure


def axial_picture(result: Any, stream: str) -> Figure:
    """Temperatures, wall flux, Nusselt number and pressure of a stream along the tube, under the tube."""
    shown, columns = shown_units(result.case), result.axial[stream]
    panels = [(title, _present_columns(columns, names)) for title, names in PANELS]
    panels = [(title, names) for title, names in panels if names]
    z = shown.value("length", np.asarray(columns["z_m"], float))

    def drawn(title: str, names: list[str]) -> Callable[[Axes], None]:
        return lambda axes: _curves(axes, z, _labelled(columns, names), curve_row(names[0]), shown, title)

    return _under_the_tube(result, f"{stream}: along the tube", [drawn(*panel) for panel in panels])


def variants_picture(results: dict[str, Any], stream: str, columns: Sequence[str], note: str) -> Figure:
    """Columns of the curves of a stream in several variants of a case, one panel each, under the tube of the first.

    results : name of a variant -> Result on the same faces along z
    """
    first = next(iter(results.values()))
    shown = shown_units(first.case)
    z = shown.value("length", np.asarray(first.axial[stream]["z_m"], float))

    def drawn(column: str) -> Callable[[Axes], None]:
        row = curve_row(column)
        curves = {name: np.asarray(result.axial[stream][column], float) for name, result in results.items()}
        named = column == columns[0]
        return lambda axes: _curves(axes, z, curves, row, shown, row.label, named)

    return _under_the_tube(first, note, [drawn(column) for column in columns])


def _under_the_tube(result: Any, note: str, panels: Sequence[Callable[[Axes], None]]) -> Figure:
    """Panels of curves under the to-scale tube, sharing its ruler; heated and cooled parts shaded through both."""
    shown, tube = shown_units(result.case), result.layout
    stretch = _stretch(tube, share=TUBE_SHARE / 2)
    tube_height = _tube_height(tube, stretch, ruler=RULER * WIDTH)
    panel_height, gap, below, above = 1.5, 0.34, 1.0, 0.85
    total = below + len(panels) * (panel_height + gap) + tube_height + above
    figure = new_figure(total)

    bottom = below + len(panels) * (panel_height + gap)
    tube_axes = figure.add_axes((LEFT, bottom / total, RULER, tube_height / total))
    _prepare_tube(tube_axes, tube, shown)
    heat = _heat_taken(result)
    _shade(tube_axes, tube, shown, heat)
    _draw_layers(tube_axes, tube, shown)
    _layer_edges(tube_axes, tube, shown)
    _centre_line(tube_axes, tube, shown)
    _layer_labels(tube_axes, tube, shown)
    _radius_ticks(tube_axes, tube, shown)
    _stream_ends(tube_axes, result, shown)

    for number, draw in enumerate(panels):
        bottom -= panel_height + gap
        axes = figure.add_axes((LEFT, bottom / total, RULER, panel_height / total))
        _shade(axes, tube, shown, heat)
        draw(axes)
        axes.set_xlim(*tube_axes.get_xlim())
        if number == len(panels) - 1:
            _ruler(axes, tube, shown)
        else:
            axes.tick_params(bottom=False, labelbottom=False)
            axes.spines["bottom"].set_visible(False)
    words = (("heated parts shaded", 1), ("cooled parts shaded blue", -1))
    shaded = "".join(f", {word}" for word, sign in words if sign in heat.values())
    _heading(figure, result, f"{note}; tube above with radius × {stretch}{shaded}")
    return figure


# --- paper --------------------------------------------------------------------------------------------------


def new_figure(height: float) -> Figure:
    figure = Figure(figsize=(WIDTH, height), facecolor="white")
    FigureCanvasAgg(figure)
    return figure


def _heading(figure: Figure, result: Any, note: str) -> None:
    total = figure.get_figheight()
    title = result.case.title or "untitled case"
    figure.text(0.02, 1 - 0.1 / total, title, ha="left", va="top", fontsize=13, color=INK)
    figure.text(0.02, 1 - 0.36 / total, note, ha="left", va="top", fontsize=10, color=SOFT_INK)
    if not result.summary.get("converged", True):
        figure.text(
            0.98,
            1 - 0.1 / total,
            "NOT CONVERGED",
            ha="right",
            va="top",
            fontsize=13,
            color="#a01c1c",
            weight="bold",
        )


def _stretch(tube: Any, share: float = TUBE_SHARE) -> int:
    """The stretch of the radius that brings the tube's height nearest to `share` of its length."""
    wanted = share * tube.length / tube.outer_diameter
    return min(STRETCHES, key=lambda stretch: abs(np.log(stretch / max(wanted, 1.0))))


def _height_of_paper(axes: Axes) -> float:
    """Height of the whole picture [inch]."""
    return float(axes.get_figure(root=True).get_figheight())  # type: ignore[union-attr]


def plain_numbers() -> FuncFormatter:
    """Numbers on a scale without offset or exponent."""
    return FuncFormatter(lambda value, _: f"{value:.10g}")


def _tube_height(tube: Any, stretch: int, ruler: float) -> float:
    """Height of the tube on paper [inch] when its length takes `ruler` inches and the radius is stretched."""
    return float(min(ruler * stretch * tube.outer_diameter / tube.length, 6.0))


def _prepare_tube(axes: Axes, tube: Any, shown: Shown) -> None:
    radius = shown.value("length", tube.outer_diameter / 2)
    axes.set_xlim(0.0, shown.value("length", tube.length))
    axes.set_ylim(-radius, radius)
    axes.set_facecolor("none")
    for spine in axes.spines.values():
        spine.set_visible(False)
    axes.tick_params(bottom=False, labelbottom=False)


# --- the tube -----------------------------------------------------------------------------------------------


def _placed(tube: Any) -> Iterator[tuple[Any, Any]]:
    for section in tube.sections:
        for layer in section.layers:
            yield section, layer


def _solid_names(tube: Any) -> list[str]:
    names: list[str] = []
    for _, layer in _placed(tube):
        if layer.kind == "solid" and layer.name not in names:
            names.append(layer.name)
    return names


def _draw_layers(axes: Axes, tube: Any, shown: Shown) -> None:
    names = _solid_names(tube)
    for section, layer in _placed(tube):
        z0, z1 = shown.value("length", section.z0), shown.value("length", section.z1)
        inner, outer = shown.value("length", layer.r_inner), shown.value("length", layer.r_outer)
        if layer.kind == "solid":
            colour, hatch = GREYS[names.index(layer.name) % len(GREYS)], None
        elif layer.kind == "void":
            colour, hatch = "white", "...."
        else:
            continue
        for low in (inner, -outer):
            axes.add_patch(
                Rectangle(
                    (z0, low),
                    z1 - z0,
                    outer - inner,
                    facecolor=colour,
                    edgecolor="#cccccc" if hatch else "none",
                    hatch=hatch,
                    linewidth=0,
                    zorder=1,
                )
            )


def _layer_edges(axes: Axes, tube: Any, shown: Shown) -> None:
    for section, layer in _placed(tube):
        z = shown.value("length", np.array([section.z0, section.z1]))
        for radius in {layer.r_inner, layer.r_outer} - {0.0}:
            r = shown.value("length", radius)
            for side in (1, -1):
                axes.plot(z, [side * r, side * r], color=INK, linewidth=0.8, zorder=4, clip_on=False)
    for left, right in zip(tube.sections, tube.sections[1:], strict=False):
        radius = max(shown.value("length", section.layers[-1].r_outer) for section in (left, right))
        inner = max(
            (shown.value("length", layer.r_outer) for layer in left.layers if layer.kind == "stream"),
            default=0.0,
        )
        z = shown.value("length", right.z0)
        for side in (1, -1):
            axes.plot([z, z], [side * inner, side * radius], color=INK, linewidth=0.5, zorder=4)


def _centre_line(axes: Axes, tube: Any, shown: Shown) -> None:
    length = shown.value("length", tube.length)
    axes.plot(
        [-0.012 * length, 1.012 * length],
        [0, 0],
        color=INK,
        linewidth=0.6,
        linestyle=(0, (14, 3, 2, 3)),
        zorder=5,
        clip_on=False,
    )


def _layer_labels(axes: Axes, tube: Any, shown: Shown) -> None:
    """Names of the wall layers, right of the tube where the last section has them, else above."""
    last = tube.sections[-1]
    total = shown.value("length", tube.length)
    seen = set()
    outer = shown.value("length", tube.outer_diameter / 2)
    solids = [layer for layer in last.layers if layer.kind != "stream"]
    places = [shown.value("length", (layer.r_inner + layer.r_outer) / 2) for layer in solids]
    # Thin layers would print their names on top of each other: spread them upwards by a line of text each.
    line = 2 * outer * 0.17 / (axes.get_position().height * _height_of_paper(axes))
    at = -np.inf
    for layer, r in zip(solids, places, strict=True):
        seen.add(layer.name)
        at = max(r, at + line)
        axes.annotate(
            "no material" if layer.kind == "void" else layer.name,
            (total, r),
            (total * 1.02, at),
            **_leader("center", "left"),
        )
    for section, layer in _placed(tube):
        if layer.kind == "stream" or layer.name in seen:
            continue
        seen.add(layer.name)
        z = shown.value("length", (section.z0 + section.z1) / 2)
        r = shown.value("length", (layer.r_inner + layer.r_outer) / 2)
        axes.annotate(layer.name, (z, r), (z, outer * 1.12), **_leader("bottom", "center"))


def _leader(vertical: str, horizontal: str) -> dict[str, Any]:
    """How a name with a thin line to its layer is written."""
    return {
        "fontsize": 9,
        "color": INK,
        "va": vertical,
        "ha": horizontal,
        "annotation_clip": False,
        "arrowprops": {"arrowstyle": "-", "linewidth": 0.6, "color": SOFT_INK, "shrinkA": 0, "shrinkB": 0},
    }


def _radius_ticks(axes: Axes, tube: Any, shown: Shown) -> None:
    """Ticks where layers meet, in the unit of the diameters; neighbours too close to read are left out."""
    radii = sorted({layer.r_outer for _, layer in _placed(tube)} | {0.0})
    top = radii[-1]
    kept = [0.0]
    for radius in radii[1:-1]:
        if radius - kept[-1] > 0.22 * top and top - radius > 0.22 * top:
            kept.append(radius)
    kept.append(top)
    ticks = [(side * radius, radius) for radius in kept for side in ((1, -1) if radius else (1,))]
    axes.set_yticks(
        [shown.value("length", place) for place, _ in ticks],
        [f"{shown.value('diameter', radius):.4g}" for _, radius in ticks],
    )
    axes.tick_params(axis="y", labelsize=9, color=SOFT_INK, labelcolor=INK)
    axes.set_ylabel(f"radius, {shown.unit('diameter')}", fontsize=10, color=INK)


def _ruler(axes: Axes, tube: Any, shown: Shown) -> None:
    """The ruler below: marks and numbers in the user's unit, with the sections' names under them."""
    length = shown.value("length", tube.length)
    axes.spines["bottom"].set_visible(True)
    axes.spines["bottom"].set_position(("outward", 8))
    axes.spines["bottom"].set_color(SOFT_INK)
    axes.xaxis.set_major_locator(MaxNLocator(nbins=8, steps=[1, 2, 5, 10]))
    axes.tick_params(
        axis="x",
        bottom=True,
        labelbottom=True,
        direction="in",
        length=6,
        labelsize=10,
        color=SOFT_INK,
        labelcolor=INK,
    )
    across = axes.get_xaxis_transform()
    height = axes.get_position().height * _height_of_paper(axes)  # inches
    line, words = -0.40 / height, -0.44 / height
    axes.text(1.03, -0.23 / height, shown.unit("length"), transform=axes.transAxes, fontsize=10, va="center")
    character = 0.0095 * length  # about the width of one on the ruler
    for section in tube.sections:
        z0, z1 = shown.value("length", section.z0), shown.value("length", section.z1)
        axes.plot([z0, z1], [line, line], transform=across, color=INK, linewidth=1.0, marker="|", clip_on=False)
        # A name longer than its section goes one line lower, where its neighbours' names are not in the way.
        fits = len(section.name) * character <= z1 - z0
        axes.text(
            (z0 + z1) / 2,
            words if fits else words - 0.17 / height,
            section.name,
            transform=across,
            fontsize=9.5,
            color=INK,
            ha="center",
            va="top",
            clip_on=False,
        )


def _stream_ends(axes: Axes, result: Any, shown: Shown) -> None:
    """Where each stream enters and leaves, written at the tube's ends."""
    length = shown.value("length", result.layout.length)
    for layer in result.layout.sections[0].layers:
        if layer.kind != "stream":
            continue
        backwards = result.case.stream[layer.material].direction == "-z"
        r = shown.value("length", (layer.r_inner + layer.r_outer) / 2)
        for z, word in (
            (0.012 * length, "out" if backwards else "in"),
            (0.988 * length, "in" if backwards else "out"),
        ):
            axes.text(
                z,
                r,
                f"{layer.name} {word}" if word == "in" else word,
                fontsize=9,
                color=INK,
                ha="left" if z < length / 2 else "right",
                va="center",
                zorder=6,
                bbox={"boxstyle": "round,pad=0.2", "facecolor": "white", "edgecolor": "none", "alpha": 0.75},
            )


def _heat_taken(result: Any) -> dict[str, int]:
    """Section name -> 1 where the tube takes heat in or generates some, -1 where it loses heat, 0 where neither.

    Less than a thousandth of the largest is neither.
    """
    heat = {}
    for section in result.layout.sections:
        made = sum(
            layer.generated
            + layer.heat_per_volume * np.pi * (layer.r_outer**2 - layer.r_inner**2) * (section.z1 - section.z0)
            for layer in section.layers
        )
        heat[section.name] = made + (result.summary["section"][section.name]["heat_in_W"] or 0.0)
    least = 1e-3 * max(abs(watts) for watts in heat.values())
    return {name: int(np.sign(watts)) if abs(watts) > least else 0 for name, watts in heat.items()}


def _shade(axes: Axes, tube: Any, shown: Shown, heat: dict[str, int]) -> None:
    for section in tube.sections:
        if heat[section.name]:
            z = shown.value("length", np.array([section.z0, section.z1]))
            tint = HEATED_TINT if heat[section.name] > 0 else COOLED_TINT
            axes.axvspan(*z, facecolor=tint, edgecolor="none", zorder=0)


# --- fields and curves --------------------------------------------------------------------------------------


def _present(fields: dict[str, Any]) -> np.ndarray:
    return np.asarray(fields["material"]) >= 0


def _in_stream(fields: dict[str, Any]) -> np.ndarray:
    """(nz, nr) True in the cells of any stream."""
    streams = [i for i, name in enumerate(fields["material_names"]) if str(name).startswith("stream:")]
    return np.isin(fields["material"], streams)


def _range(temperature: np.ma.MaskedArray) -> tuple[float, float]:
    low, high = float(temperature.min()), float(temperature.max())
    if high - low < 1e-9 * max(abs(low), 1.0):  # one temperature everywhere still needs a bar
        return low - 0.5, high + 0.5
    return low, high


def _isotherms(
    axes: Axes, z: np.ndarray, r: np.ndarray, temperature: np.ma.MaskedArray, low: float, high: float
) -> None:
    """Isotherms through stream and walls, labelled on the line.

    Lines are drawn through cell centres; the first and last cell in each direction are repeated at the edges
    so that lines reach the wall, the ends and the axis.
    """
    ticks = MaxNLocator(nbins=9, steps=[1, 2, 2.5, 5, 10]).tick_values(low, high)
    span = high - low
    levels = [level for level in ticks if low + 0.01 * span < level < high - 0.01 * span]
    if not levels:
        return
    z_points = np.concatenate([z[:1], (z[1:] + z[:-1]) / 2, z[-1:]])
    r_points = np.concatenate([r[:1], (r[1:] + r[:-1]) / 2, r[-1:]])
    values = np.ma.concatenate([temperature[:1], temperature, temperature[-1:]])
    values = np.ma.concatenate([values[:, :1], values, values[:, -1:]], axis=1)
    contours = []
    for side in (1, -1):
        lines = axes.contour(
            z_points,
            side * r_points,
            values.T,
            levels=levels,
            colors=INK,
            linewidths=0.7,
            alpha=0.85,
            zorder=3,
        )
        contours.append(lines)
    _isotherm_labels(axes, contours)


def _isotherm_labels(axes: Axes, contours: list[Any]) -> None:
    """An upright number on each piece of an isotherm, where none stands yet; none where there is no free place.

    contours : those of the upper half and of its mirror image, which helps out where the upper half is full
    """
    to_dots = axes.transData
    dot = axes.get_figure(root=True).dpi / 72.0  # type: ignore[union-attr]
    frame = axes.get_window_extent()
    end = 60 * dot  # the words at the ends of the stream
    height = 13 * dot
    taken: list[tuple[float, float, float, float]] = []

    def write(text: str, piece: np.ndarray) -> bool:
        width = (6.5 * len(text) + 5) * dot
        for x, y in _from_the_middle(piece, 80):
            box = (x, y, width, height)
            inside = abs(y - (frame.y0 + frame.y1) / 2) < (frame.height - height) / 2
            if not inside or not frame.x0 + end < x < frame.x1 - end or any(_overlap(box, b) for b in taken):
                continue
            taken.append(box)
            z, r = to_dots.inverted().transform((x, y))
            axes.text(
                z,
                r,
                text,
                fontsize=9,
                color=INK,
                ha="center",
                va="center",
                zorder=5.5,
                bbox={"facecolor": "white", "edgecolor": "none", "alpha": 0.8, "pad": 0.6},
            )
            return True
        return False

    for number, level in enumerate(contours[0].levels):
        halves = [lines.get_paths()[number].to_polygons(closed_only=False) for lines in contours]
        for pieces in zip(*halves, strict=False):
            for piece in pieces:
                if write(f"{level:.10g}", to_dots.transform(piece)):
                    break


def _from_the_middle(path: np.ndarray, count: int) -> np.ndarray:
    """Up to `count` points of a path (n, 2), evenly spread along it, those near its middle first."""
    if len(path) < 2:
        return path
    along = np.concatenate([[0.0], np.cumsum(np.hypot(*np.diff(path, axis=0).T))])
    even = np.linspace(0.0, along[-1], count)
    points = np.column_stack([np.interp(even, along, path[:, 0]), np.interp(even, along, path[:, 1])])
    return points[np.argsort(np.abs(even - along[-1] / 2), kind="stable")]


def _overlap(one: tuple[float, float, float, float], other: tuple[float, float, float, float]) -> bool:
    """Whether two boxes (x, y of the centre, width, height) touch."""
    return abs(one[0] - other[0]) < (one[2] + other[2]) / 2 and abs(one[1] - other[1]) < (one[3] + other[3]) / 2


def _present_columns(columns: dict[str, Any], names: tuple[str, ...]) -> list[str]:
    """The columns to plot: the plain ones, or each twice with inner and outer wall in an annulus."""
    found = []
    for name in names:
        for key in columns:
            if key == name or curve_row(key).label in _sided_labels(name):
                found.append(key)
    return [key for key in found if np.isfinite(np.asarray(columns[key], float)).any()]


def _sided_labels(name: str) -> tuple[str, str]:
    label = curve_row(name).label
    return f"inner {label}", f"outer {label}"


def _labelled(columns: dict[str, Any], names: list[str]) -> dict[str, np.ndarray]:
    """Label -> curve in SI."""
    curves = {curve_row(name).label: np.asarray(columns[name], float) for name in names}
    if names == ["pressure_Pa"]:  # the small drop would drown in the absolute pressure
        curves = {label: curve - np.nanmin(curve[[0, -1]]) for label, curve in curves.items()}
    return curves


def _curves(
    axes: Axes,
    z: np.ndarray,
    curves: dict[str, np.ndarray],
    row: Reported,
    shown: Shown,
    title: str,
    named: bool = True,
) -> None:
    """Curves of one unit in a panel; curves: label -> values in SI; named: with a legend where there are several."""
    unit = shown.unit(row.kind) if row.kind else row.unit
    values = [shown.value(row.kind, curve) for curve in curves.values()]
    styles = ("-", (0, (5, 2)), (0, (1, 1.2)))
    cut = _set_reach(axes, z, values)
    for number, (label, value) in enumerate(zip(curves, values, strict=True)):
        axes.plot(
            z,
            _without_poles(value, *axes.get_ylim()),
            color=CURVE_INKS[number % len(CURVE_INKS)],
            linestyle=styles[number % len(styles)],
            linewidth=1.6,
            label=label,
            zorder=3,
        )
    axes.set_facecolor("none")
    for side in ("top", "right"):
        axes.spines[side].set_visible(False)
    axes.spines["left"].set_color(SOFT_INK)
    axes.tick_params(axis="y", labelsize=9, color=SOFT_INK, labelcolor=INK)
    axes.grid(axis="y", color="#dddddd", linewidth=0.6, zorder=0.5)
    axes.set_title(
        title + (f", {unit}" if unit else "") + (" (entry and joints cut off)" if cut else ""),
        loc="left",
        fontsize=10.5,
        color=INK,
        pad=3,
    )
    if named and len(curves) > 1:
        axes.legend(fontsize=9, frameon=False, loc="best")


def _without_poles(value: np.ndarray, bottom: float, top: float) -> np.ndarray:
    """The curve with a gap where it leaves the panel at one end and comes back at the other.

    A Nusselt number does where wall and bulk temperature cross; a line through the panel there would look like values.
    """
    side = np.where(value > top, 1, np.where(value < bottom, -1, 0))
    gap = value.astype(float)
    gap[1:][side[1:] * side[:-1] < 0] = np.nan
    return gap


def _set_reach(axes: Axes, z: np.ndarray, values: list[np.ndarray]) -> bool:
    """Choose the limits so that a spike at an inlet or joint does not flatten the curve; True if one is cut.

    Points are weighed by length: the mesh is finest just where the spikes are.
    """
    even = np.linspace(z[0], z[-1], 2001)
    samples = []
    for value in values:
        known = np.isfinite(value)
        samples.append(np.interp(even, z[known], value[known]))
    everything = np.concatenate([value[np.isfinite(value)] for value in values])
    low, high = np.percentile(np.concatenate(samples), [1.0, 99.0])
    least, most = float(everything.min()), float(everything.max())
    span = max(high - low, 1e-12 * max(abs(high), abs(low), 1e-300))
    # Cut only what would really flatten the rest.
    bottom = least if low - least < 3.0 * span else low - 0.6 * span
    top = most if most - high < 3.0 * span else high + 0.6 * span
    cut = bottom > least or top < most
    if top - bottom <= 1e-9 * max(abs(top), abs(bottom)):
        bottom, top = bottom - 0.5 * max(abs(bottom), 1.0), top + 0.5 * max(abs(top), 1.0)
    margin = 0.08 * (top - bottom)
    axes.set_ylim(bottom - margin, top + margin)
    return cut
