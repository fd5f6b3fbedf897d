"""The spread of a case's outputs in words, in files and as a picture of which input is to blame."""

from __future__ import annotations

import math
from html import escape
from pathlib import Path
from typing import TYPE_CHECKING, Any

from axicfd import units
from axicfd.case import paths
from axicfd.output import csv, folder
from axicfd.output.headline import FINEST_TEMPERATURE, amount, number, with_bar
from axicfd.output.shown import Shown, shown_units

if TYPE_CHECKING:
    from matplotlib.figure import Figure

    from axicfd.variants.spread import Difference, OutputSpread, Spread

NAME = "spread.json"
SMALLEST = 0.01  # share that is still named
MOST_NAMED = 4
_WORDS = {"mean": "mean", "std": "standard deviation", "low": "low end of the 95 % range", "high": "high end"}


# ------------------------------------------------------------------------------------------------ words


def input_label(path: str) -> str:
    """ "section.band.outside.film_coefficient" -> "film coefficient (band)"."""
    steps = paths.steps_of(path)
    words = steps[-1].replace("_", " ")
    owners = [step for step in steps[1:-1] if step not in ("outside", "layer", "generated")]
    if "generated" in steps:
        words, owners = f"heat generated in {steps[-1]}", owners
    elif steps[0] == "ends":
        owners[:1] = [f"{owners[0]} end"]
    elif words in ("r", "z") and len(steps) > 2 and steps[0] == "solid":
        words, owners = f"conductivity along {words}", owners[:1]
    return f"{words} ({', '.join(owners)})" if owners else words


def input_rows(spread: Spread) -> list[list[str]]:
    """Label, value, tolerance and what it means, in the units they were written in."""
    rows = []
    for path, t in spread.inputs.items():
        unit = spread.case.unit_of(path) or units.KINDS[t.kind].si
        width = units.convert(t.half_width, unit, t.kind) - units.convert(0.0, unit, t.kind)
        value = number(float(units.convert(t.value, unit, t.kind)), 6)
        sign, meaning = ("±", "limits, uniform") if t.given == "plus_minus" else ("", "standard deviation, normal")
        of_width = "K" if unit == "degC" else unit
        rows.append([input_label(path), f"{value} {unit}", f"{sign}{number(float(width))} {of_width}", meaning])
    return rows


def blame(o: OutputSpread) -> str:
    """Inputs by share, "mass flow (sample) 61 %, heat (band) 38 %"."""
    if o.u_input == 0.0:
        return "none of these inputs acts on it"
    named = [(path, share) for path, share in o.shares.items() if share >= SMALLEST][:MOST_NAMED]
    text = ", ".join(f"{input_label(path)} {100.0 * share:.0f} %" for path, share in named)
    if o.sampled is not None and o.sampled.rest >= SMALLEST:
        text += f", together or beyond {100.0 * o.sampled.rest:.0f} %"
    return text


def output_rows(spread: Spread) -> list[list[str]]:
    """Quantity, value, what the inputs make of it (95 %), mesh error, blame."""
    shown = shown_units(spread.case)
    shows = [o for o in spread.outputs if o.value or o.u_input]  # not the heat through an insulated section
    return [[o.quantity.label, *_numbers(o, shown), blame(o)] for o in shows]


def _numbers(o: OutputSpread, shown: Shown) -> tuple[str, str, str]:
    row = o.quantity.row
    unit = shown.unit(row.kind) if row.kind else row.unit
    value = float(shown.value(row.kind, o.value))
    low, high = (float(shown.difference(row.kind, end - o.value)) for end in o.range)
    widest = max(abs(low), abs(high))
    mesh = ""
    if o.half_width is not None:
        finest = FINEST_TEMPERATURE if row.kind == "temperature" else None
        half = float(shown.difference(row.kind, o.half_width))
        mesh = f"±{with_bar(value, half, finest)[1] if half > 0.0 else 0}"
    if widest <= 1e-9 * abs(value):
        return amount(shown, row.kind, o.value, row.unit), "±0", mesh
    text, wide = with_bar(value, widest)
    if o.sampled is None:
        return f"{text} {unit}".rstrip(), f"±{wide}", mesh
    decimals = len(wide.partition(".")[2])
    return f"{text} {unit}".rstrip(), f"{low:+.{decimals}f} {high:+.{decimals}f}", mesh


def notes(spread: Spread) -> list[str]:
    """What has to be said about the answer: bends, differences of quick and full answer, limits, failures."""
    shown, said = shown_units(spread.case), []
    for o in spread.outputs:
        name = o.quantity.label
        if spread.samples is not None and o.sampled is None:
            said.append(f"{_begun(name)}: too few samples have a value; the quick answer alone is given.")
        elif o.sampled is None and o.is_bent:
            said.append(
                f"{_begun(name)}: not in a straight line with its inputs; its mean moves by about "
                f"{_size(o, o.shift, shown, True)} and its range is not even. --full gives the range."
            )
        elif o.differences:
            parts = ", ".join(_difference(o, d, shown) for d in o.differences)
            said.append(f"{_begun(name)}: the quick answer does not hold here: {parts}.")
    if any(o.sampled is not None for o in spread.outputs) and not any(o.differences for o in spread.outputs):
        said.append("Quick and full answer agree, within a tenth or within what so few samples can tell.")
    for name, verdicts in spread.limits.items():
        total = sum(verdicts.values())
        counts = ", ".join(f"{count} {verdict}" for verdict, count in sorted(verdicts.items()))
        said.append(f"Limit of {name}: {counts}, of {total} samples.")
    if spread.failures:
        first = spread.failures[0]
        said.append(
            f"{len(spread.failures)} variants have no answer and are left out, the first {first.which}: "
            f"{first.status}, {first.message}"
        )
    return said


def _begun(name: str) -> str:
    return name[0].upper() + name[1:]


def _difference(o: OutputSpread, d: Difference, shown: Shown) -> str:
    def say(si: float) -> str:
        if d.what == "std":
            return _size(o, si, shown)
        return amount(shown, o.quantity.row.kind, si, o.quantity.row.unit)

    return f"{_WORDS[d.what]} {say(d.full)}, not {say(d.quick)}"


def _size(o: OutputSpread, si: float, shown: Shown, signed: bool = False) -> str:
    row = o.quantity.row
    unit = shown.difference_unit(row.kind) if row.kind else row.unit
    value = float(shown.difference(row.kind, si))
    return f"{'+' if signed and value > 0 else ''}{number(value, 3)} {unit}".rstrip()


APART = (
    "Inputs: 95 % of the answers, for the tolerances above alone; inputs without one count as exact. Mesh: half-width "
    "of the numerical error. Kept apart as in ASME V&V 20-2009."
)


def html(spread: Spread) -> str:
    """An HTML fragment for notebooks; users' words are escaped."""
    header = ("quantity", "value", "inputs (95 %)", "mesh", "to blame")
    cells = [f"<tr>{''.join(f'<th>{escape(word)}</th>' for word in header)}</tr>"]
    for row in output_rows(spread):
        cells.append("<tr>" + "".join(f'<td style="text-align:left">{escape(cell)}</td>' for cell in row) + "</tr>")
    said = "".join(f"<li>{escape(note)}</li>" for note in notes(spread))
    title = f"<p><b>{escape(spread.case.title)}</b>: spread from {len(spread.inputs)} inputs</p>"
    return f"{title}<table>{''.join(cells)}</table>" + (f"<ul>{said}</ul>" if said else "")


# ------------------------------------------------------------------------------------------------ files


def text(spread: Spread) -> str:
    """spread.json."""
    return folder.summary_text(spread.as_dict())


def write(spread: Spread, path: Path, replace: bool = False) -> None:
    """spread.json, spread.csv (effect of each input on each output), spread.png, samples.csv of the full answer."""
    from axicfd.case.write import to_toml
    from axicfd.output.figures import save

    folder.refuse_unusable(path, replace, NAME)
    with folder.whole_or_not(path) as unfinished:
        (unfinished / NAME).write_text(text(spread), encoding="utf-8")
        (unfinished / folder.CASE).write_text(to_toml(spread.case), encoding="utf-8")
        csv.write_columns(unfinished / "spread.csv", effect_columns(spread))
        if spread.samples is not None:
            csv.write_columns(unfinished / "samples.csv", sample_columns(spread))
        if any(o.u_input > 0.0 for o in spread.outputs):
            save(picture(spread), unfinished / "spread.png")


def effect_columns(spread: Spread) -> dict[str, list[Any]]:
    """A row per output and input, SI."""
    rows = [(o, e) for o in spread.outputs for e in o.effects]
    columns: dict[str, list[Any]] = {
        "output": [".".join(o.quantity.keys) for o, _ in rows],
        "input": [e.path for _, e in rows],
        "share": [e.share for _, e in rows],
        "effect": [e.by_std.value for _, e in rows],
        "effect_half_width": [e.by_std.half_width for _, e in rows],
        "bend": [e.bend.value for _, e in rows],
    }
    if spread.samples is not None:
        columns["share_full"] = [o.sampled.shares[e.path] if o.sampled is not None else None for o, e in rows]
    return columns


def sample_columns(spread: Spread) -> dict[str, Any]:
    """A row per sample of the full answer: the inputs, then the outputs, SI with the unit in the name."""
    assert spread.samples is not None
    columns: dict[str, Any] = {"sample": list(range(1, len(spread.samples) + 1))}
    for i, (path, t) in enumerate(spread.inputs.items()):
        columns[f"{path}_{units.in_name(t.kind)}"] = spread.samples[:, i]
    for o in spread.outputs:
        if o.sampled is not None:
            columns[".".join(o.quantity.keys)] = o.sampled.values
    return columns


# ------------------------------------------------------------------------------------------------ the picture


def picture(spread: Spread) -> Figure:
    """One bar per output, as long as its variance is whole, cut into the shares of the inputs."""
    from matplotlib.figure import Figure
    from matplotlib.patches import Rectangle

    from axicfd.output.figures import INK, SOFT_INK, WIDTH, colour_map

    outputs = [o for o in spread.outputs if o.u_input > 0.0]
    shown = shown_units(spread.case)
    bar, above, below = 0.62, 0.75, 1.15
    total = above + bar * len(outputs) + below
    figure = Figure(figsize=(WIDTH, total), facecolor="white")
    axes = figure.add_axes((0.34, below / total, 0.63, bar * len(outputs) / total))
    most = [max(o.shares.get(path, 0.0) for o in outputs) for path in spread.inputs]
    named = [path for path, share in zip(spread.inputs, most, strict=True) if share >= SMALLEST]
    colours = {path: colour_map()(0.12 + 0.76 * i / max(len(named) - 1, 1)) for i, path in enumerate(named)}
    for place, o in enumerate(outputs):
        left = 0.0
        axes.barh(place, 100.0, height=0.56, color="#e9e9e9")
        for path, share in o.shares.items():
            if path not in colours:
                continue
            width = 100.0 * share
            axes.barh(place, width, left=left, height=0.56, color=colours[path], edgecolor="white", linewidth=1.0)
            _write_in(axes, left, width, place, input_label(path), colours[path], INK)
            left += width
        numbers = _numbers(o, shown)
        axes.text(-1.5, place - 0.14, o.quantity.label, ha="right", va="center", fontsize=10, color=INK)
        axes.text(
            -1.5, place + 0.17, f"{numbers[0]}, {numbers[1]}", ha="right", va="center", fontsize=9, color=SOFT_INK
        )
    axes.set_xlim(0.0, 100.0)
    axes.set_ylim(len(outputs) - 0.5, -0.5)
    axes.set_yticks([])
    for side in ("top", "right", "left"):
        axes.spines[side].set_visible(False)
    axes.spines["bottom"].set_color(SOFT_INK)
    axes.tick_params(labelsize=10, color=SOFT_INK)
    axes.set_xlabel("share of the variance, %", fontsize=11, color=INK)
    pieces = [Rectangle((0, 0), 1, 1, color=colour) for colour in colours.values()]
    names = [input_label(path) for path in colours]
    columns = min(4, len(names))
    figure.legend(pieces, names, loc="lower center", ncols=columns, frameon=False, fontsize=10, labelcolor=INK)
    kind = f"{len(spread.samples)} samples" if spread.samples is not None else "quick answer"
    note = f"which input is to blame ({kind}); values with what the inputs make of them, 95 %; pale: all else"
    figure.text(0.02, 1 - 0.1 / total, spread.case.title, ha="left", va="top", fontsize=13, color=INK)
    figure.text(0.02, 1 - 0.36 / total, note, ha="left", va="top", fontsize=10, color=SOFT_INK)
    return figure


def _write_in(axes: Any, left: float, width: float, place: int, label: str, colour: Any, ink: str) -> None:
    """The input's name in its piece of a bar, if it has the room: about 1.15 % of the ruler per letter, and margins."""
    light = 0.2126 * colour[0] + 0.7152 * colour[1] + 0.0722 * colour[2]
    text = f"{label} {width:.0f} %"
    if 1.15 * len(text) + 1.0 > width:
        text = f"{width:.0f} %"
    if 1.15 * len(text) + 1.0 > width or math.isnan(width):
        return
    inside = ink if light > 0.45 else "white"
    axes.text(left + width / 2, place, text, ha="center", va="center", fontsize=9, color=inside)
