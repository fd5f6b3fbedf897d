"""Contradictions between keys, each with the sentence a user reads. The sentences were reviewed by eye."""

# ruff: noqa: E501
# The sentences stand as a user reads them.

import pytest

from axicfd.case.model import Case
from axicfd.case.read import load
from axicfd.errors import InputError
from tests.case.samples import BASE, changed, mistakes_in, without

AIR = """\
[stream.gas]
fluid = "air"
inlet_temperature = "20 degC"
reynolds = 500
[[layer]]
stream = "gas"
diameter = "4 mm"
[[section]]
length = "1 m"
outside = { insulated = true }
"""

HEATER = '{ heat_flux = "2 kW/m^2", film_coefficient = "10 W/m^2/K", ambient = "20 degC" }'
PLATE = '{ temperature = "60 degC", contact_resistance = "1e-4 m^2 K/W" }'


def heater(outside: str) -> str:
    return changed((HEATER, outside))


# name: text of the case, the key found, the line's beginning, the sentence after the place
CONTRADICTIONS = {
    "two flows": (
        changed(('"4 g/s"', '"4 g/s"\nreynolds = 500')),
        "`stream.oil.reynolds = 500` stands beside `mass_flow`: the flow is given by exactly one of "
        "mass_flow, "
        "volume_flow, mean_velocity, reynolds, pressure_drop. Keep the one that is known, take the other out.",
    ),
    "no flow": (
        without("mass_flow"),
        "`stream.oil` needs its flow: exactly one of mass_flow, volume_flow, mean_velocity, reynolds, "
        "pressure_drop. "
        'Write mass_flow = "4 g/s"; zero is allowed.',
    ),
    "flow against z": (
        changed(('"4 g/s"', '"-4 g/s"')),
        '`stream.oil.mass_flow = "-4 g/s"` must be at least 0 kg/s. Flow against z is direction = "-z".',
    ),
    "unknown fluid": (
        changed(('= "oil"\ninlet', '= "oyl"\ninlet')),
        '`stream.oil.fluid = "oyl"` is neither a [fluid] of the case nor built in. Write "oil".',
    ),
    "glycol without its share": (
        changed(('= "oil"\ninlet', '= "ethylene glycol"\ninlet')),
        '`stream.oil.fluid = "ethylene glycol"` is neither a [fluid] of the case nor built in. '
        'Write "ethylene glycol 30 % by mass" or "ethylene glycol 40 % by mass" or "ethylene glycol 50 '
        '% by mass".',
    ),
    "unknown solid": (
        changed(('"liner"\nouter', '"linre"\nouter')),
        '`layer.linre.solid = "linre"` is neither a [solid] of the case nor built in. Write "liner".',
    ),
    "unknown stream": (
        changed(('stream   = "oil"', 'stream   = "oli"')),
        '`layer.oli.stream = "oli"` is not a [stream] of the case. Write "oil".',
    ),
    "a layer of two things": (
        changed(('solid          = "liner"', 'solid = "liner"\nvoid = true')),
        "`layer.liner.void = true` stands beside `solid`: a layer is exactly one of stream, solid, void.",
    ),
    "a layer of nothing": (
        changed(('solid          = "liner"\n', 'name = "liner"\n')),
        '`layer.liner` is a layer of nothing. Write exactly one of stream = "NAME", solid = "NAME", '
        'void = true.',
    ),
    "radius for the bore": (
        changed(('diameter = "6 mm"', 'thickness = "6 mm"')),
        '`layer.oil.thickness = "6 mm"` is not for the layer on the axis, which is given by its diameter. '
        "Write `diameter`: twice this, if it was meant as a radius.",
    ),
    "no diameter": (
        changed(('diameter = "6 mm"\n', "\n")),
        '`layer.oil` has no diameter. The layer on the axis needs one: write diameter = "12 mm".',
    ),
    "diameter not above zero": (
        changed(('"6 mm"', '"0 mm"')),
        '`layer.oil.diameter = "0 mm"` must be greater than 0 m.',
    ),
    "no thickness": (
        without("thickness"),
        '`layer.tube` has no thickness. Write thickness = "1 mm", or outer_diameter.',
    ),
    "diameter of an outer layer": (
        changed(('thickness          = "1 mm"', 'diameter = "8 mm"')),
        '`layer.tube.diameter = "8 mm"` is only for the layer on the axis. Write `thickness` or '
        '`outer_diameter`.',
    ),
    "thickness and outer diameter": (
        changed(('outer_diameter = "12 mm"', 'outer_diameter = "12 mm"\nthickness = "2 mm"')),
        '`layer.liner.outer_diameter = "12 mm"` stands beside `thickness`. Keep one of the two.',
    ),
    "an outer layer inside an inner one": (
        changed(('"12 mm"', '"7 mm"')),
        '`layer.liner.outer_diameter = "7 mm"` must be larger than the outer diameter of the layer '
        'inside it, 8 mm.',
    ),
    "contact resistance on the axis": (
        changed(('"6 mm"', '"6 mm"\ncontact_resistance = "1e-4 m^2 K/W"')),
        '`layer.oil.contact_resistance = "1e-4 m^2 K/W"` sits at a layer\'s inner face, and the layer '
        'on the axis '
        "has none. Give it to the next layer outward.",
    ),
    "two layers of one name": (
        changed(('name               = "tube"', 'name = "liner"')),
        '`layer.liner` is called "liner" like a layer before it in the same stack. Give each its own '
        'name = "...".',
    ),
    "one name for two solids": (
        BASE.replace('outside = { insulated = true }\n\n', 'outside = { insulated = true }\n[[section.layer]]\nstream = "oil"\n'
        'diameter = "6 mm"\n[[section.layer]]\nname = "tube"\nsolid = "ptfe"\nthickness = "1 mm"\n\n', 1),
        '`section.lead-in.layer.tube` is called "tube", the name of a layer of copper in another section. '
        'Give it another name = "...".',
    ),
    "a step of the bore": (
        BASE.replace('length    = "0.5 m"', 'length    = "0.5 m"\n[[section.layer]]\nstream = "oil"\ndiameter = "5 mm"', 1)
        .replace(f"outside   = {HEATER}\n", "").replace('generated = { tube = "5 W" }\n', "")
        .replace('name      = "heater"', f'name = "heater"\noutside = {HEATER}'),
        '`section.heater.layer.oil.diameter = "5 mm"` differs from the bore of section \'lead-in\', 6 mm: '
        "steps of the bore are not available yet. Give every section the same bore.",
    ),
    "a rod": (
        changed(('stream   = "oil"', 'solid = "ptfe"')),
        "`layer.ptfe` begins a stack that has no stream on the axis: rods, annuli and tubes without a "
        "stream are "
        'not available yet. Begin the stack with stream = "oil".',
    ),
    "a second stream": (
        changed(("[fluid.oil]", '[stream.water]\nfluid = "water"\ninlet_temperature = "20 degC"\nreynolds = 5\n[fluid.oil]')),
        "`stream.water` is a second stream: several streams are not available yet. Keep one [stream.NAME].",
    ),
    "sections of one name": (
        changed(('name    = "plate"', 'name    = "heater"')),
        '`section.heater.name = "heater"` is the name of section 2 too. Give it another name.',
    ),
    "insulated and heated": (
        heater('{ insulated = true, heat = "4 W" }'),
        '`section.heater.outside.heat = "4 W"` stands beside `insulated = true`, which lets no heat through. '
        "Take one of the two out.",
    ),
    "two heats": (
        heater('{ heat = "4 W", heat_flux = "2 kW/m^2" }'),
        '`section.heater.outside.heat = "4 W"` stands beside `heat_flux`: the heat is given by one of '
        'heat_flux, heat, '
        "heat_per_length. Take one of the two out.",
    ),
    "temperature and film": (
        heater('{ temperature = "60 degC", film_coefficient = "10 W/m^2/K", ambient = "20 degC" }'),
        '`section.heater.outside.film_coefficient = "10 W/m^2/K"` stands beside a prescribed '
        '`temperature`, which settles '
        "the heat by itself. A film is film_coefficient with ambient; a resistance to a temperature is "
        "contact_resistance.",
    ),
    "film without ambient": (
        heater('{ film_coefficient = "10 W/m^2/K" }'),
        '`section.heater.outside.film_coefficient = "10 W/m^2/K"` stands without `ambient`. '
        'Write ambient = "20 degC" beside it.',
    ),
    "ambient without film": (
        heater('{ heat = "4 W", ambient = "20 degC" }'),
        '`section.heater.outside.ambient = "20 degC"` stands without `film_coefficient`. '
        'Write film_coefficient = "10 W/m^2/K" beside it, or `temperature` if the surface itself is '
        'held at it.',
    ),
    "contact resistance to nothing": (
        heater('{ contact_resistance = "1e-4 m^2 K/W", heat = "4 W" }'),
        '`section.heater.outside.contact_resistance = "1e-4 m^2 K/W"` stands without the `temperature` '
        'it leads to. '
        'Write temperature = "85 degC" beside it; for a resistance between two layers write it in the '
        '[[layer]].',
    ),
    "an empty outside": (
        heater("{}"),
        "`section.heater.outside = {}` says nothing. "
        "Write insulated = true, a temperature, or heat and film_coefficient with ambient.",
    ),
    "a table that is too short": (
        heater('{ heat_flux = { z = ["0 m", "0.4 m"], value = ["1 W/m^2", "2 W/m^2"] } }'),
        '`section.heater.outside.heat_flux.z = ["0 m", "0.4 m"]` must cover the section from its start '
        'to its end: '
        "it goes from 0 m to 0.4 m, the section from 0 m to 0.5 m. z counts from the section's start.",
    ),
    "a table that goes back": (
        heater('{ heat_flux = { z = ["0 m", "0.4 m", "0.3 m", "0.5 m"], value = ["1 W/m^2", "2 W/m^2", "2 W/m^2", "1 W/m^2"] } }'),
        '`section.heater.outside.heat_flux.z = "0.3 m"` must be larger than the z before it.',
    ),
    "a table that jumps": (
        changed(('z = ["0 m", "0.3 m"], value = ["70 degC", "80 degC"]',
                 'z = ["0 m", "0.1 m", "0.1 m", "0.3 m"], value = ["70 degC", "70 degC", "80 degC", "80 degC"]')),
        '`section.hotter.outside.temperature.z = "0.1 m"` stands twice: a table along z cannot jump. '
        "Make it two sections, which meet at the jump.",
    ),
    "lists of two lengths": (
        heater('{ heat_flux = { z = ["0 m", "0.5 m"], value = ["1 W/m^2"] } }'),
        '`section.heater.outside.heat_flux = { z = ["0 m", "0.5 m"], value = ["1 W/m^2"] }` must have '
        'equally many entries in '
        "each list: 2 in `z` and 1 in `value`.",
    ),
    "a step of temperature": (
        changed((PLATE, '{ temperature = "60 degC" }'), ('joint_length = "10 mm"\n', "\n")),
        '`section.hotter.outside.temperature = { z = ["0 m", "0.3 m"], value = ["70 degC", "80 degC"] '
        '}` differs from the '
        "60 degC outside section 'plate': the heat beside a step of prescribed temperature grows "
        "without limit as the mesh "
        "is refined. Give section 'hotter' a joint_length = \"2 mm\" (a ramp centred on the joint), or put a "
        "contact_resistance or a film_coefficient between.",
    ),
    "a joint without two temperatures": (
        changed((PLATE, '{ insulated = true }')),
        '`section.hotter.joint_length = "10 mm"` needs a prescribed `temperature` outside both '
        'sections that meet here. '
        "Take it out.",
    ),
    "a joint that is too long": (
        changed(('"10 mm"', '"700 mm"')),
        "`section.hotter.joint_length = \"700 mm\"` reaches beyond section 'plate': half of the ramp "
        "lies in each section. "
        "Make it shorter.",
    ),
    "a joint before the first section": (
        changed(('length  = "0.2 m"', 'length  = "0.2 m"\njoint_length = "2 mm"')),
        '`section.lead-in.joint_length = "2 mm"` has no section before it to join to. '
        "Give it to the later one of two sections.",
    ),
    "a step at the end": (
        changed(('last.liner = { film_coefficient = "5 W/m^2/K", ambient = "20 degC" }', 'last.liner = { temperature = "20 degC" }')),
        "`ends.last.liner.temperature = \"20 degC\"` differs from the 80 degC outside section "
        "'hotter': the heat beside a step "
        "of prescribed temperature grows without limit as the mesh is refined. Make them equal, or put "
        "a contact_resistance "
        "or a film_coefficient between.",
    ),
    "a step across the end": (
        changed(('first = { insulated = true }', 'first.tube = { temperature = "20 degC" }\nfirst.liner = { temperature = "30 degC" }')),
        '`ends.first.liner.temperature = "30 degC"` differs from the 20 degC of the layer inside it: '
        'the heat beside a step '
        "of prescribed temperature grows without limit as the mesh is refined. Make them equal, or put "
        "a contact_resistance "
        "or a film_coefficient between.",
    ),
    "an end of a stream": (
        changed(('last.tube', 'last.oil')),
        "`ends.last.oil` has no end face with a condition: only solids have. Solid layers there: tube, "
        "liner.",
    ),
    "an end of nothing": (
        changed(('last.tube', 'last.tub')),
        "`ends.last.tub` names no layer of this end. Write `tube`.",
    ),
    "heat in an unknown layer": (
        changed(('{ tube = "5 W" }', '{ tub = "5 W" }')),
        '`section.heater.generated.tub = "5 W"` names no layer of this section. Write `tube`.',
    ),
    "heat onto a void": (
        changed(('solid          = "liner"', 'name = "gap"\nvoid = true'), ("last.liner", "last.tube2"))
        .replace('last.tube2 = { film_coefficient = "5 W/m^2/K", ambient = "20 degC" }\n', ""),
        f"`section.heater.outside = {HEATER[:56]} ...` acts on a void, which no heat crosses. "
        "Write outside = { insulated = true }, or take the void out.",
    ),
    "a sensor beyond the tube": (
        changed(('"0.6 m"', '"6 m"')),
        '`sensor.case.z = "6 m"` lies beyond the tube, which is 1.3 m long. z counts from the tube\'s start.',
    ),
    "a sensor on no layer": (
        changed(('at = "outside"', 'at = "tube innner"')),
        '`sensor.case.at = "tube innner"` is not a place in the cross-section there. Write "tube inner".',
    ),
    "a station beyond the tube": (
        changed(('"0.7 m"]', '"70 m"]')),
        '`results.stations = "70 m"` lies beyond the tube, which is 1.3 m long. Stations count from '
        'the tube\'s start.',
    ),
    "an inlet outside of the table": (
        changed(('inlet_temperature = "20 degC"', 'inlet_temperature = "-20 degC"')),
        "`stream.oil.inlet_temperature = \"-20 degC\"` lies outside the properties of 'oil', which are "
        "known from "
        '0 degC to 150 degC. Give a wider table in [fluid.NAME], or outside_range = "hold" there.',
    ),
    "below absolute zero": (
        changed(('inlet_temperature = "20 degC"', 'inlet_temperature = "-300 degC"')),
        '`stream.oil.inlet_temperature = "-300 degC"` must be above absolute zero (0 K, -273.15 degC).',
    ),
    "nowhere for the heat to go": (
        AIR.replace("reynolds = 500", "reynolds = 0").replace("insulated = true", 'heat = "1 W"'),
        "`section.section 1` leaves the temperature of gas open: nothing flows through, and no "
        "temperature or film stands "
        "outside. Give a flow, or a temperature or a film_coefficient somewhere outside or at an end.",
    ),
    "a wall cut off by a void": (
        changed(('thickness          = "1 mm"\ncontact_resistance = "1e-5 m^2 K/W"\nheat_per_volume    = "1 kW/m^3"',
                 'thickness = "1 mm"\n[[layer]]\nvoid = true\nthickness = "1 mm"'),
                (PLATE, "{ insulated = true }"), (HEATER, '{ heat = "3 W" }'), ('joint_length = "10 mm"\n', "\n"),
                ('{ temperature = { z = ["0 m", "0.3 m"], value = ["70 degC", "80 degC"] } }', "{ insulated = true }"),
                ('{ film_coefficient = "5 W/m^2/K", ambient = "20 degC" }', "{ insulated = true }")),
        "`section.lead-in` leaves the temperature of liner open: nothing flows through, and no "
        "temperature or film stands "
        "outside. Give a flow, or a temperature or a film_coefficient somewhere outside or at an end.",
    ),
    "a gas heated far": (
        AIR.replace("insulated = true", 'temperature = "120 degC"'),
        "`section.section 1.outside.temperature = \"120 degC\"` changes the density of the gas 'air' "
        "by 25 %; more than 5 % is "
        "not available yet. Bring it closer to the inlet temperature.",
    ),
    "cells counted twice": (
        changed(('"6 mm"', '"6 mm"\ncells_across = 8'), ("axial            = 400", "radial = 20")),
        "`layer.oil.cells_across = 8` stands beside `mesh.radial`, which counts the same cells. Take "
        "one of the two out.",
    ),
    "more cells than allowed": (
        changed(("axial            = 400", "axial = 4000\nradial = 20")),
        "`mesh.at_most = 30000` is less than `radial` times `axial`, 80000. Write at_most = 160000, or "
        "smaller counts.",
    ),
    "fewer cells than sections": (
        changed(("axial            = 400", "axial = 3")),
        "`mesh.axial = 3` must be at least one cell for each of the 4 sections.",
    ),
    "half a cell": (
        changed(("axial            = 400", "axial = 400.5")),
        "`mesh.axial = 400.5` must be a whole number without a unit, at least 2 and at most 100000.",
    ),
    "no layers at all": (
        AIR.replace('[[layer]]\nstream = "gas"\ndiameter = "4 mm"\n', ""),
        "`section.section 1` has no layers. Write [[layer]] tables for all sections, or "
        "[[section.layer]] in this one.",
    ),
}  # fmt: skip


@pytest.mark.parametrize("name", CONTRADICTIONS)
def test_contradictions(name):
    text, sentence = CONTRADICTIONS[name]
    found = mistakes_in(text)
    sentences = [mistake.text.partition(": ")[2] for mistake in found]
    assert sentence in sentences, "\n".join(sentences)
    (mistake,) = [mistake for mistake in found if mistake.text.endswith(sentence)]
    assert mistake.line is not None and 1 <= mistake.line <= len(text.splitlines())


# One cause that is felt in several places may be named in each.
SEVERAL = {"unknown solid", "two layers of one name", "heat onto a void", "a layer of nothing"}


@pytest.mark.parametrize("name", sorted(set(CONTRADICTIONS) - SEVERAL))
def test_one_contradiction_is_one_mistake(name):
    text, _ = CONTRADICTIONS[name]
    assert len(mistakes_in(text)) == 1


def test_there_are_many_contradictions():
    assert len(CONTRADICTIONS) >= 30


@pytest.mark.parametrize(
    "old, new",
    [
        (PLATE, '{ temperature = { z = ["0 m", "0.3 m"], value = ["60 degC", "70 degC"] } }'),  # meets its neighbour
        (HEATER, '{ heat = "-3 W" }'),  # cooling
        (HEATER, '{ heat_per_length = { z = ["0 m", "0.5 m"], value = ["1 W/m", "0 W/m"] } }'),
        (HEATER, '{ insulated = false, heat = "3 W" }'),
        ('"4 g/s"', '"0 g/s"'),  # still, but a plate settles the temperature
        ('fluid             = "oil"\n', 'fluid = "water"\n'),
        ('inlet_temperature = "20 degC"', 'inlet_temperature = "0 degC"'),  # the very end of the table
        ('last.liner = { film_coefficient = "5 W/m^2/K", ambient = "20 degC" }', 'last.liner = { temperature = "80 degC" }'),
        ('at = "outside"', 'at = "oil outer"'),
        ('"0.6 m"', '"1.3 m"'),
    ],
)  # fmt: skip
def test_what_is_allowed(old, new):
    load(changed((old, new)))


def test_a_film_around_a_wall_settles_a_still_tube():
    text = AIR.replace("reynolds = 500", "reynolds = 0")
    text = text.replace("insulated = true", 'heat = "1 W", film_coefficient = "10 W/m^2/K", ambient = "20 degC"')
    load(text.replace("[[section]]", '[[layer]]\nsolid = "copper"\nthickness = "1 mm"\n[[section]]'))


def test_a_gas_that_is_warmed_a_little_is_allowed():
    load(AIR.replace("insulated = true", 'temperature = "30 degC"'))


def test_an_own_fluid_as_light_as_a_gas_is_a_gas():
    text = AIR.replace('"air"', '"own"') + (
        '[fluid.own]\ndensity = { temperature = ["0 degC", "200 degC"], value = ["1.3 kg/m^3", "0.75 '
        'kg/m^3"] }\n'
        'specific_heat = "1006 J/kg/K"\nconductivity = "0.026 W/m/K"\nviscosity = "18e-6 Pa s"\n'
    )
    assert load(text).fluid_of("gas").is_gas
    mistakes_in(text.replace("insulated = true", 'temperature = "120 degC"'))


def test_mistakes_in_python_name_the_key_without_a_line():
    with pytest.raises(InputError) as caught:
        Case(
            stream={"w": {"fluid": "water", "inlet_temperature": 293.15, "reynolds": 5, "mass_flow": 1.0}},
            section=[],
        )
    assert all(mistake.line is None and mistake.file is None for mistake in caught.value.mistakes)
    assert "`stream.w.reynolds = 5`" in str(caught.value)


def test_a_forgotten_flow_is_one_mistake():
    with pytest.raises(InputError) as raised:
        load(AIR.replace("reynolds = 500\n", ""))
    assert "needs its flow" in str(raised.value)
    assert len(raised.value.mistakes) == 1
