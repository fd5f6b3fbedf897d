"""Which assumptions matter: the case against cases that each leave one effect out."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass, field, replace
from typing import Any

from axicfd.case.model import AlongAcross, Case, FileProfile, Law, UsedFluid, expect_case
from axicfd.case.quantities import quantities
from axicfd.case.read import plain
from axicfd.errors import AxicfdError
from axicfd.materials.laws import Constant, Exponential
from axicfd.pipeline import solve
from axicfd.results.result import Result
from axicfd.variants import contrast
from axicfd.variants.care import Care, read_care
from axicfd.variants.contrast import Effect, OnVariant
from axicfd.variants.wall import WITHOUT_VARIANTS

IN_FULL = "in full"
PROPERTIES, FRICTION = "property variation", "viscous heating"
INLET, ALONG, BUOYANCY = "the undeveloped inlet", "axial conduction in the fluid", "buoyancy"


@dataclass(frozen=True, eq=False)
class Assumptions:
    """What each effect changes in a case.

    effects : those that were solved both ways, largest first (by the largest change as a multiple of what counts)
    left_out: name of an effect that was not solved -> why
    results : IN_FULL and the name of each effect -> Result, the latter without the effect
    """

    case: Case
    care: Care
    effects: tuple[Effect, ...]
    left_out: dict[str, str]
    results: dict[str, Result] = field(repr=False)

    @property
    def converged(self) -> bool:
        return all(result.converged for result in self.results.values())

    def judged(self, care: str | Sequence[str] | Care) -> Assumptions:
        """The same for another opinion of what matters; nothing is solved again."""
        cared = read_care(care)
        effects = sorted((effect.judged(cared) for effect in self.effects), key=lambda effect: -effect.weight)
        return replace(self, care=cared, effects=tuple(effects))

    def __repr__(self) -> str:
        return (
            f"<Assumptions of {self.case.title!r}: " + "; ".join(f"{e.name}: {e.verdict}" for e in self.effects) + ">"
        )

    def as_dict(self) -> dict[str, Any]:
        """Plain data in SI, as in matters.json."""
        return {
            "title": self.case.title,
            "converged": self.converged,
            "care": {"per_cent": self.care.per_cent, **self.care.amounts},
            "effect": {effect.name: contrast.as_plain(effect) for effect in self.effects},
            "left_out": dict(self.left_out),
        }


def what_matters(
    case: Case, care: str | Sequence[str] | Care | None = None, on_variant: OnVariant | None = None
) -> Assumptions:
    """Solve a case in full and once more without each effect that it has, and judge the differences.

    care : from where on a change matters, "1 K", "2 %" of each scale (the default), or several such amounts
    Raises `AxicfdError` where nothing flows, and what `solve` raises.
    """
    expect_case(case)
    cared = read_care(care)
    if all(stream.is_still for stream in case.stream.values()):
        raise AxicfdError("Nothing flows in this case: none of these effects acts in it. Give a flow.")

    def tell(name: str) -> Any:
        return None if on_variant is None else lambda event: on_variant(name, event)

    full = solve(case, tell(IN_FULL))
    results, left_out = {IN_FULL: full}, {}
    effects = []
    asked = list(quantities(case, headline_only=True))
    for name, found in _variants(case):
        if isinstance(found, str):
            left_out[name] = found
            continue
        try:
            results[name] = solve(found(), tell(f"without {name}"), like=full.meshes)
        except AxicfdError as refused:
            left_out[name] = f"the case without it is refused: {refused}"
            continue
        effects.append(contrast.effect(name, full, results[name], asked, cared, full))
    effects.sort(key=lambda effect: -effect.weight)
    return Assumptions(case, cared, tuple(effects), left_out, results)


def _variants(case: Case) -> Iterator[tuple[str, str | Callable[[], Case]]]:
    """(name of an effect, the case without it, or why the effect is not there to be taken out)."""
    yield PROPERTIES, "all properties are constants" if _is_constant(case) else lambda: constant_properties(case)
    yield FRICTION, _without(case, FRICTION, {"physics.viscous_heating": False}, _no_friction(case))
    profiles = [stream.inlet_profile for stream in case.stream.values()]
    given = any(isinstance(profile, FileProfile) for profile in profiles)
    why = "the inlet profile is given" if given else "the inlet is developed" if "flat" not in profiles else ""
    inlets = {f'stream."{name}".inlet_profile': "developed" for name in case.stream}
    yield INLET, _without(case, INLET, inlets, why)
    why = "" if case.physics.axial_conduction_in_streams else "it is switched off in the case"
    yield ALONG, _without(case, ALONG, {"physics.axial_conduction_in_streams": False}, why)
    yield BUOYANCY, "it is not in the model yet"


def _no_friction(case: Case) -> str:
    return "" if case.physics.viscous_heating else "it is switched off in the case"


def _without(case: Case, name: str, changes: dict[str, Any], why_not: str) -> str | Callable[[], Case]:
    changed = {**WITHOUT_VARIANTS, "title": f"{case.title}: without {name}", **changes}
    return why_not or (lambda: case.replace(changed))


def _laws(fluid: UsedFluid) -> tuple[Law, ...]:
    return fluid.viscosity, fluid.conductivity, fluid.specific_heat


def _solids(case: Case) -> list[str]:
    stacks = (case.layers_of(section) for section in case.section)
    return list(dict.fromkeys(layer.solid for stack in stacks for layer in stack if layer.solid))


def _is_constant(case: Case) -> bool:
    used = [law for stream in case.stream for law in _laws(case.fluid_of(stream))]
    for name in _solids(case):
        solid = case.solid_of(name)
        used += [solid.conductivity_r, solid.conductivity_z]
    return all(law.is_constant for law in used)


def constant_properties(case: Case) -> Case:
    """The case with every law held at the inlet temperature.

    The density keeps its expansion coefficient of the inlet state: it is the pressure work that depends on it.
    """
    changes: dict[str, Any] = dict(WITHOUT_VARIANTS)
    changes["title"] = f"{case.title}: without {PROPERTIES}"
    fluids: dict[str, Any] = {name: plain(fluid) for name, fluid in case.fluid.items()}
    for name, stream in case.stream.items():
        t_in, used = stream.inlet_temperature, case.fluid_of(name)
        held = _free(f"{name} at its inlet", fluids)
        density = float(used.density(t_in))
        expansion = -float(used.density.derivative(t_in)) / density
        fluids[held] = {
            "density": Exponential(t_in, density, expansion) if expansion else Constant(density),
            **{
                key: Constant(float(getattr(used, key)(t_in))) for key in ("specific_heat", "conductivity", "viscosity")
            },
        }
        changes[f'stream."{name}".fluid'] = held
    t_in = next(iter(case.stream.values())).inlet_temperature
    solids: dict[str, Any] = {name: plain(solid) for name, solid in case.solid.items()}
    held_solids: dict[str, str] = {}
    for name in _solids(case):
        used_solid = case.solid_of(name)
        held_solids[name] = _free(f"solid {len(held_solids) + 1} at the inlet temperature", solids)
        across, along = (Constant(float(law(t_in))) for law in (used_solid.conductivity_r, used_solid.conductivity_z))
        solids[held_solids[name]] = {"conductivity": AlongAcross(across, along)}

    def changed(layers: Any) -> list[dict[str, Any]]:
        return [
            {**plain(one), "name": one.name, **({"solid": held_solids[one.solid]} if one.solid else {})}
            for one in layers
        ]

    changes |= {"fluid": fluids, "solid": solids or None, "layer": changed(case.layer) or None}
    for section in case.section:
        if section.layer is not None:
            changes[f'section."{section.name}".layer'] = changed(section.layer)
    return case.replace(changes)


def _free(name: str, taken: dict[str, Any]) -> str:
    while name in taken:
        name += " too"
    return name
