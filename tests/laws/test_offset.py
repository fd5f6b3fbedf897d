"""With constant properties only temperature differences count: 100 K on everything changes none."""

import re

from tests.laws import tubes

SECTIONS = (
    tubes.SECTIONS
    + """
[[section]]
name    = "plate"
length  = "30 mm"
[section.outside]
contact_resistance = "2e-4 m^2 K/W"
temperature        = { z = ["0 mm", "30 mm"], value = ["60 degC", "30 degC"] }
"""
)
ENDS = '[ends]\nfirst = { temperature = "25 degC", contact_resistance = "1e-4 m^2 K/W" }\n'
MESH = (8, 4, 4), (8, 16, 16, 16)


def test_hundred_kelvin_warmer_everywhere():
    cold = tubes.text(sections=SECTIONS, rest=ENDS, viscous=True)
    warm = re.sub(r"(\d+) degC", lambda found: f"{int(found[1]) + 100} degC", cold)
    assert warm.count("degC") == cold.count("degC") and warm != cold
    a, b = tubes.run(cold, *MESH, stop_below=1e-12), tubes.run(warm, *MESH, stop_below=1e-12)
    assert tubes.relative(b.t, a.t) < 1e-10
    assert tubes.relative(b.flow.u, a.flow.u) < 1e-10
    assert tubes.relative(b.heat.outside, a.heat.outside) < 1e-10
    for key in "outlet_temperature_K", "hottest_wetted_wall_K":
        change = b.summary["stream"]["water"][key] - a.summary["stream"]["water"][key]
        assert abs(change - 100.0) < 1e-10 * a.span + 1e-11 * 400.0
