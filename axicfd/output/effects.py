"""What effects change, in words and rows: the sentences and tables of `wall` and `matters`."""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from html import escape
from typing import Any

from axicfd.glossary import curve_row
from axicfd.output.headline import amount, number, with_bar
from axicfd.output.shown import Shown, shown_units
from axicfd.variants.care import Care
from axicfd.variants.contrast import NO, OPEN, YES, Difference, Effect
from axicfd.variants.matters import Assumptions
from axicfd.variants.wall import IN_FULL, NO_WALL, WallEffect

# Quantities whose being left alone is worth saying beside what is changed, the most telling first.
_WORTH_SAYING = "outlet_temperature_K", "hottest_wetted_wall_K", "heat_gain_W"
NOTHING = 1e-5  # share of a scale below which a change is shown as none
# Curves without a largest difference that tells anything: a Nusselt number has no limit where wall and bulk are equal.
_WITH_POLES = ("nusselt",)
ROUND_OFF = 1e-12  # share of a scale below which a value is 0
# Columns of the table of assumptions.
_ASSUMPTION_KEYS = "outlet_temperature_K", "pressure_drop_Pa", "heat_gain_W", "hottest_wetted_wall_K"


def change_text(d: Difference, shown: Shown, signed: bool = True) -> str:
    """A change with the half-width of its mesh error and its unit: "-6.1 ±0.2 K"."""
    value = float(shown.difference(d.of.kind, d.change.value))
    half = None if d.change.half_width is None else float(shown.difference(d.of.kind, d.change.half_width))
    scale = float(shown.difference(d.of.kind, max(d.scale, abs(d.change.value))))
    text = _with_bar(value if signed else abs(value), half, scale, signed)
    return f"{text} {_unit(d, shown)}".rstrip()


def _with_bar(value: float, half: float | None, scale: float, signed: bool = True) -> str:
    """A change and its half-width, to a hundred-thousandth of a scale, or two digits of the value where it is less.

    No more than four digits: the values beside it are written to as many.
    """
    nothing = NOTHING * scale
    if abs(value) <= nothing and (half or 0.0) <= nothing:
        return "0"
    text, bar = number(value), ""
    if half:
        finest = math.floor(math.log10(scale)) - 4 if scale > 0.0 else 0
        if abs(value) > nothing:
            decade = math.floor(math.log10(abs(value)))
            finest = max(min(finest, decade - 1), decade - 3)
        text, width = with_bar(value, half, finest)
        bar = f" ±{width}"
    if float(text) == 0.0:
        return text.lstrip("-") + bar
    return ("+" if signed and value > 0.0 else "") + text + bar


def _amount(d: Difference, si: float, shown: Shown) -> str:
    """A value of a quantity with its unit; 0 where it is nothing but round-off."""
    return amount(shown, d.of.kind, 0.0 if abs(si) <= ROUND_OFF * d.scale else si)


def _unit(d: Difference, shown: Shown) -> str:
    return shown.difference_unit(d.of.kind)


def _size(d: Difference, si: float, shown: Shown) -> str:
    """An amount by which a quantity may differ, with its unit."""
    return f"{number(float(shown.difference(d.of.kind, si)), 3)} {_unit(d, shown)}".rstrip()


def sentence(effect: Effect, shown: Shown) -> str:
    """The verdict on an effect as an engineer would put it."""
    name = effect.name[0].upper() + effect.name[1:]
    d = effect.decisive
    if effect.why_open:
        return f"{name}: cannot tell, since {effect.why_open}."
    if d is None or d.care is None:
        return f"{name}: cannot tell, since no compared quantity has a scale to judge it by."
    by = f"by {change_text(d, shown, signed=False)}"
    from_where = f"{_size(d, d.care, shown)} is where that begins to matter"
    if effect.verdict == YES:
        base, then = (_amount(d, value, shown) for value in (d.base, d.then))
        return f"{name} {_verb(d)} {_the(d)} from {base} to {then}, {by}: keep it.{_left_alone(effect, shown)}"
    moves = f"{_verb(d)} {_the(d)} {by}"
    if effect.verdict == NO:
        if abs(d.change.value) <= NOTHING * d.scale:
            return f"{name} may be left out: it changes nothing by more than {100 * NOTHING:g} % of its scale."
        return f"{name} may be left out: by most, it {moves}, and {from_where}."
    return f"Cannot tell whether {effect.name} matters: it {moves}, and {from_where}. {_what_would_decide(d)}"


def _verb(d: Difference) -> str:
    return "raises" if d.change.value > 0.0 else "lowers" if d.change.value < 0.0 else "changes"


def _the(d: Difference) -> str:
    label = d.of.label.partition(" (")[0]
    return f"the temperature at {label}" if label.startswith("sensor ") else f"the {label}"


def _left_alone(effect: Effect, shown: Shown) -> str:
    for key in _WORTH_SAYING:
        for d in effect.differences:
            if d.of.key == key and d.verdict == NO:
                change, the = change_text(d, shown), _the(d)
                nothing = float(change.split(" ")[0]) == 0.0 or abs(d.change.value) <= (d.change.half_width or 0.0)
                return f" {the[0].upper()}{the[1:]} is {'not' if nothing else 'hardly'} affected: {change}."
    return ""


def _what_would_decide(d: Difference) -> str:
    if d.change.half_width is None:
        return "Its mesh error is not known, for fewer than three nested meshes have a value."
    if d.finer > 1e3:
        return "The two are so close that no mesh decides it; another --care would."
    return (
        f"Mesh errors {number(max(d.finer, 1.1), 2)} times smaller would decide it (`accuracy` in [solve]), "
        "or another --care."
    )


def care_text(care: Care, shown: Shown) -> str:
    """What counts as a change that matters."""
    parts = [f"{number(float(shown.value(kind, si)), 3)} {shown.unit(kind)}" for kind, si in care.amounts.items()]
    if care.per_cent is not None:
        parts.append(f"{care.per_cent:g} % of the scale{'' if care.amounts else ' of each quantity'}")
    only = "" if care.per_cent is not None else "; other quantities decide nothing"
    return f"* matters: a change from {', '.join(parts)} on{only}. ? cannot tell."


# ------------------------------------------------------------------------------------------------ wall


def wall_sentences(found: WallEffect) -> list[str]:
    """The verdicts, and what the axial conduction number alone would have said."""
    shown = shown_units(found.case)
    said = [sentence(effect, shown) for effect in found.effects]
    if found.number is not None:
        from axicfd.theory.groups import AXIAL_CONDUCTION_LIMIT

        than = "above" if found.predicted == YES else "below"
        computed = {OPEN: "not settled here", found.predicted: "as computed here"}
        said.append(
            f"By the axial conduction number alone, M = {number(found.number, 3)}, {than} {AXIAL_CONDUCTION_LIMIT:g} "
            f"(Maranzana, Perry and Maillet 2004), it {found.predicted}: "
            f"{computed.get(found.axial.verdict, 'against what is computed here')}."
        )
    return said + _refusals(found.results)


def _refusals(results: dict[str, Any]) -> list[str]:
    """Where a case left its model: its numbers, and differences from it, are no better than the laws held there."""
    left = {name: result.summary.get("refused") for name, result in results.items()}
    return [f"Mind, {name}: {why}" for name, why in left.items() if why]


def wall_rows(found: WallEffect) -> tuple[list[str], list[list[str]]]:
    """(header, rows): each quantity in the cases, and what the effects change in it."""
    shown = shown_units(found.case)
    header = ["quantity", *([NO_WALL] if found.radial else []), "radial only", IN_FULL]
    header += [*(["by radial resistance"] if found.radial else []), "by axial conduction"]
    radial = {d.of.path: d for d in found.radial.differences} if found.radial else {}
    rows = []
    for d in found.axial.differences:
        other = radial.get(d.of.path)
        if d.then == d.base == 0.0 and (other is None or other.base == 0.0):
            continue
        row = [d.of.label]
        if found.radial:
            row.append("" if other is None else _amount(other, other.base, shown))
        row += [_amount(d, d.base, shown), _amount(d, d.then, shown)]
        if found.radial:
            row.append("" if other is None else _judged(other, shown))
        rows.append([*row, _judged(d, shown)])
    return header, rows


def _judged(d: Difference, shown: Shown) -> str:
    mark = {YES: " *", OPEN: " ?"}.get(d.verdict or "", "")
    return change_text(d, shown) + mark


def along_rows(effects: Iterable[Effect], shown: Shown) -> list[list[str]]:
    """Rows: effect, curve, the largest difference along the tube with its bar, and where that is."""
    rows = []
    for effect in effects:
        for curve in effect.curves:
            if curve.column in _WITH_POLES or curve.at is None or curve.difference[curve.at] == 0.0:
                continue
            row = curve_row(curve.column)
            value, half = (float(shown.difference(row.kind, x[curve.at])) for x in (curve.difference, curve.half_width))
            text = _with_bar(value, half if half > 0.0 else None, 10.0 * abs(value))
            unit = shown.difference_unit(row.kind) if row.kind else row.unit
            place = f"at {amount(shown, 'length', float(curve.z[curve.at]))}"
            rows.append([effect.name, row.label, f"{text} {unit}".rstrip(), place])
    return rows


# ------------------------------------------------------------------------------------------------ assumptions


def assumption_sentences(found: Assumptions) -> list[str]:
    """The verdicts, largest effect first, then what was not solved and why."""
    shown = shown_units(found.case)
    said = [sentence(effect, shown) for effect in found.effects]
    said += [f"{name[0].upper()}{name[1:]}: {why}." for name, why in found.left_out.items()]
    without = {name if name == IN_FULL else f"without {name}": result for name, result in found.results.items()}
    return said + _refusals(without)


def assumption_rows(found: Assumptions) -> tuple[list[str], list[list[str]]]:
    """(header, rows): what each effect changes in the quantities of the headline."""
    shown = shown_units(found.case)
    labels: dict[str, str] = {}
    rows = []
    for effect in found.effects:
        of_key = {d.of.key: d for d in effect.differences if d.of.path.startswith("stream.")}
        labels |= {key: of_key[key].of.label for key in _ASSUMPTION_KEYS if key in of_key}
        cells = [_judged(of_key[key], shown) if key in of_key else "" for key in _ASSUMPTION_KEYS]
        rows.append([effect.name, effect.verdict, *cells])
    return ["effect", "", *(labels.get(key, "") for key in _ASSUMPTION_KEYS)], rows


# ------------------------------------------------------------------------------------------------ notebooks, files


def wall_html(found: WallEffect) -> str:
    """How it shows itself in a notebook."""
    return _html(found.case.title, wall_sentences(found), *wall_rows(found))


def assumption_html(found: Assumptions) -> str:
    return _html(found.case.title, assumption_sentences(found), *assumption_rows(found))


def _html(title: str, sentences: Sequence[str], header: Sequence[str], rows: Sequence[Sequence[str]]) -> str:
    def line(cells: Sequence[str], tag: str) -> str:
        return "<tr>" + "".join(f'<{tag} style="text-align:left">{escape(c)}</{tag}>' for c in cells) + "</tr>"

    table = line(header, "th") + "".join(line(row, "td") for row in rows)
    said = "".join(f"<li>{escape(text)}</li>" for text in sentences)
    return f"<p><b>{escape(title or 'untitled')}</b></p><ul>{said}</ul><table>{table}</table>"


def as_tree(found: WallEffect | Assumptions) -> dict[str, Any]:
    """Plain data with the sentences, as written to JSON."""
    said = wall_sentences(found) if isinstance(found, WallEffect) else assumption_sentences(found)
    return {**found.as_dict(), "text": said}
