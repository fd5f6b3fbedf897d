"""With constant properties T is linear in all sources and surrounding temperatures: it would not be if one of
them were scaled twice, or acted on another."""

import numpy as np
import pytest

from tests.laws import tubes

ROOM = "20 degC"
MESH = (8, 4, 4), (8, 16, 16)

HEATER = {"heat": '"5 W"', "heat_flux": '"2 kW/m^2"', "heat_per_length": '"40 W/m"'}


def sections(heater: str, ambient: str = ROOM, generated: str = "") -> str:
    return f"""
[[section]]
name    = "lead-in"
length  = "20 mm"
outside = {{ insulated = true }}
[[section]]
name    = "heater"
length  = "30 mm"
outside = {{ {heater}film_coefficient = "100 W/m^2/K", ambient = "{ROOM}" }}
{generated}
[[section]]
name    = "bath"
length  = "40 mm"
outside = {{ film_coefficient = "300 W/m^2/K", ambient = "{ambient}" }}
"""


def rise(sections_text: str, **rest) -> np.ndarray:
    return tubes.run(tubes.text(sections=sections_text, **rest), *MESH).t


END = """
[ends]
first = { temperature = "%s", contact_resistance = "1e-4 m^2 K/W" }
last.sleeve = { heat_flux = "%s" }
"""


@pytest.mark.parametrize("key", HEATER)
@pytest.mark.parametrize("viscous", [False, True])
def test_heat_bath_ends_and_generation_add_up(key, viscous):
    off_heat, on_heat = f'{key} = "0 {HEATER[key].split(" ")[1]}, ', f"{key} = {HEATER[key]}, "
    generated = 'generated = { sleeve = "3 W", "inner wall" = "1 W" }'

    def solve(heat, ambient, made, first, last):
        return rise(sections(heat, ambient, made), viscous=viscous, rest=END % (first, last))

    nothing = solve(off_heat, ROOM, "", ROOM, "0 W/m^2")
    parts = [
        solve(on_heat, ROOM, "", ROOM, "0 W/m^2"),
        solve(off_heat, "45 degC", "", ROOM, "0 W/m^2"),
        solve(off_heat, ROOM, generated, ROOM, "0 W/m^2"),
        solve(off_heat, ROOM, "", "70 degC", "0 W/m^2"),
        solve(off_heat, ROOM, "", ROOM, "5 kW/m^2"),
    ]
    together = solve(on_heat, "45 degC", generated, "70 degC", "5 kW/m^2")
    assert all(np.abs(part - nothing).max() > 0.1 for part in parts)
    assert tubes.relative(nothing + sum(part - nothing for part in parts), together) < 1e-9


def test_the_same_watts_heat_alike_whichever_key_says_them():
    """5 W over 30 mm of a surface of 10 mm diameter, said in three ways."""
    area = np.pi * 10e-3 * 30e-3
    ways = [
        'heat = "5 W", ',
        f'heat_flux = "{5.0 / area:.17g} W/m^2", ',
        f'heat_per_length = "{5.0 / 0.03:.17g} W/m", ',
    ]
    first, *others = (rise(sections(way)) for way in ways)
    for other in others:
        assert tubes.relative(other, first) < 1e-12


def test_generated_watts_and_heat_per_volume_are_the_same():
    volume = np.pi * (5e-3**2 - 3e-3**2) * 30e-3
    layers = tubes.THICK_WALL + f'heat_per_volume = "{3.0 / volume:.17g} W/m^3"\n'
    length = 'name    = "heater"\nlength  = "30 mm"'
    only = f'[[section]]\n{length}\noutside = {{ film_coefficient = "50 W/m^2/K", ambient = "{ROOM}" }}\n'
    by_volume = tubes.run(tubes.text(sections=only, layers=layers), (8, 4, 4), (16,))
    by_watts = tubes.run(tubes.text(sections=only + 'generated = { sleeve = "3 W" }\n'), (8, 4, 4), (16,))
    assert tubes.relative(by_volume.t, by_watts.t) < 1e-12
    assert by_watts.summary["ledger"]["generated"]["sleeve"] == pytest.approx(3.0, rel=1e-12)
