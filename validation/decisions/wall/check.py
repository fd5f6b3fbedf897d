"""Does the wall matter? Eight tubes, from thick copper in slow water to thin steel in fast oil."""

import math
from dataclasses import dataclass
from functools import lru_cache
from pathlib import Path

from axicfd.case.layout import layout
from axicfd.case.read import load
from axicfd.output.effects import change_text, wall_sentences
from axicfd.output.headline import number
from axicfd.output.shown import shown_units
from axicfd.variants.care import DEFAULT_PER_CENT, Care
from axicfd.variants.contrast import NO, YES, Difference, Effect
from axicfd.variants.wall import WallEffect, wall_effect
from validation.common import Row
from validation.decisions.wall import lumped

HERE = Path(__file__).parent
CASES = HERE.parents[2] / "cases"
ASKED = "what the four extreme tubes are known for: common practice, no source"
LUMPED = "one-dimensional model of wall and stream (lumped.py): independent computation, not published"
CLEAR = 2.0  # factor from the care within which the estimate decides nothing
SHELL = "hollow cylinder, q' ln(r_o / r_i) / (2 pi k) at the wall's mean temperature: closed form"


@dataclass(frozen=True)
class Tube:
    """A case, the verdicts known beforehand (None where only the estimate tells), and whether its heat is given."""

    path: Path
    radial: bool | None = None
    axial: bool | None = None
    heated: str | None = None

    @property
    def name(self) -> str:
        return self.path.stem


TUBES = (
    Tube(HERE / "thick-copper.toml", False, True, "heater"),
    Tube(HERE / "steel-capillary.toml", False, True),
    Tube(CASES / "fluid-warmer.toml", True, False),
    Tube(HERE / "thin-steel.toml", False, False, "heater"),
    Tube(HERE / "glass-tube.toml", heated="heater"),
    Tube(HERE / "steel-short-heater.toml", heated="heater"),
    Tube(HERE / "lined-brass.toml"),
    Tube(CASES / "syrup-jacket.toml"),
)


@lru_cache
def found(tube: Tube) -> WallEffect:
    return wall_effect(load(tube.path))


@lru_cache
def estimated(tube: Tube) -> tuple[float, float]:
    """Largest change by radial resistance and by axial conduction, as multiples of the default care."""
    case = load(tube.path)
    full, across, bare = (lumped.solve(case, *how) for how in ((True, True), (True, False), (False, False)))
    care = DEFAULT_PER_CENT / 100
    heat = sum(abs(q) for q in full.heat_in.values())

    def weight(a: lumped.Lumped, b: lumped.Lumped) -> float:
        kelvin = max(abs(a.hottest - b.hottest), abs(a.outlet - b.outlet)) / full.span
        watts = max(abs(a.heat_in[s] - b.heat_in[s]) for s in a.heat_in)
        return max(kelvin, max(watts, abs(a.upstream - b.upstream)) / heat) / care

    # where the heat is given the outer surface takes the whole drop across the wall, the lumped wall half of it
    return weight(across, bare) * (2.0 if tube.heated else 1.0), weight(full, across)


def shell_rise(tube: Tube) -> float:
    """[K] across the wall of the heated section, whose heat goes straight through when nothing moves along it."""
    case = load(tube.path)
    (section,) = [s for s in layout(case).sections if s.name == tube.heated]
    (wall,) = [p for p in section.layers if p.kind == "solid"]
    per_length = lumped._heat(section)
    result = found(tube).results["radial resistance only"].summary
    hot = result["layer"][wall.name]["hottest_K"], result["stream"][next(iter(case.stream))]["hottest_wetted_wall_K"]
    k = float(case.solid_of(wall.material).conductivity_r(sum(hot) / 2))
    return per_length * math.log(wall.r_outer / wall.r_inner) / (2 * math.pi * k)


def check() -> list[Row]:
    rows = []
    for tube in TUBES:
        answer, title = found(tube), tube.name
        for effect, known, weight in zip(answer.effects, (tube.radial, tube.axial), estimated(tube), strict=True):
            computed = {YES: 1.0, NO: 0.0}.get(effect.verdict, math.nan)
            what = f"{effect.name} matters (1) or not (0); {title}"
            if known is not None:
                rows.append(Row(what, computed, float(known), 0.0, ASKED, 1.0))
            clear = not 1 / CLEAR < weight < CLEAR
            note = f"there {weight:.2g} times the care" + ("" if clear else ", too close for so crude a model")
            rows.append(Row(what, computed, float(weight > 1.0), 0.0 if clear else None, LUMPED, 1.0, note))
            quantity, crude = f"change over care, {effect.name}; {title}", "a size is only shown: the model is crude"
            rows.append(Row(quantity, effect.weight, weight, None, LUMPED, None, crude))
            rows += flips(effect, title)
        if tube.heated:
            d = next(d for d in answer.effects[0].differences if d.of.path.startswith("layer."))
            quantity = f"rise of the hottest solid by radial resistance, K; {title}"
            rows.append(Row(quantity, d.change.value, shell_rise(tube), 1e-3, SHELL))
    return rows


def flips(effect: Effect, title: str) -> list[Row]:
    """The verdict on either side of the computed difference: it has to turn there."""
    d = effect.differences[0]
    rows = []
    for share, want in ((0.9, 1.0), (1.1, 0.0)):
        care = Care(per_cent=share * effect.weight * DEFAULT_PER_CENT)
        got = {YES: 1.0, NO: 0.0}.get(effect.judged(care).verdict, math.nan)
        what = f"{effect.name}, care at {share:g} of the change of the {d.of.label}; {title}"
        rows.append(Row(what, got, want, 0.0, "by what the words mean", 1.0))
    return rows


def picture(folder: Path) -> None:
    """TABLE.md: the verdicts with their figures."""
    lines = [
        "# Verdicts on the wall",
        "",
        "Written by `python -m validation.run_all decisions/wall`. What matters: 2 % of the scale. ± is the mesh error "
        "of the difference; M the axial conduction number.",
        "",
        "| tube | M | radial resistance | by most | axial conduction | by most |",
        "|---|---|---|---|---|---|",
    ]
    said = []
    for tube in TUBES:
        answer = found(tube)
        cells = [f"`{tube.path.name}`", f"{answer.number:.2g}"]
        for effect in answer.effects:
            cells += [effect.verdict, _most(effect.differences[0], answer)]
        lines.append("| " + " | ".join(cells) + " |")
        said += ["", f"**{answer.case.title}**", "", *(f"- {text}" for text in wall_sentences(answer))]
    (folder / "TABLE.md").write_text("\n".join(lines + said) + "\n", encoding="utf-8")


def _most(d: Difference, answer: WallEffect) -> str:
    return f"{d.of.label} {change_text(d, shown_units(answer.case))}, {number(d.weight, 2)} of care"
