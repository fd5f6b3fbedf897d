"""Signs that no heated tube may break, for whatever numbers: on coarse meshes, since they hold on any."""

from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from tests.laws import tubes

few = settings(max_examples=6, deadline=None, derandomize=True, suppress_health_check=list(HealthCheck))
LAYERS = """
[[layer]]
stream   = "water"
diameter = "4 mm"
[[layer]]
name      = "tube"
solid     = "metal"
thickness = "1 mm"
contact_resistance = "{contact} m^2 K/W"
"""


def tube(flow=1.0, film=300.0, ambient=60.0, heat=0.0, heated=40.0, contact=0.0, k=15.0) -> tubes.Run:
    """flow [g/s], film [W/m2K], ambient [degC], heat [W] over the heated length [mm], contact [m2 K/W], k
    [W/(m K)]."""
    sections = (
        '[[section]]\nname = "in"\nlength = "20 mm"\noutside = { insulated = true }\n'
        f'[[section]]\nname = "hot"\nlength = "{heated} mm"\n'
        f'outside = {{ heat = "{heat} W", film_coefficient = "{film} W/m^2/K", ambient = "{ambient} degC" }}\n'
    )
    case = tubes.text(
        f'mass_flow = "{flow} g/s"',
        layers=LAYERS.format(contact=contact),
        sections=sections,
        solids=f'[solid.metal]\nconductivity = "{k} W/m/K"\n',
    )
    return tubes.run(case, (8, 2), (8, 24), 1e-8, 2)


def outlet(run: tubes.Run) -> float:
    """Outlet temperature above the inlet [K]."""
    return run.summary["stream"]["water"]["outlet_temperature_K"] - 293.15


flows = st.floats(0.01, 3.0)
films = st.floats(5.0, 3000.0)
ambients = st.floats(25.0, 90.0)
factors = st.floats(1.1, 4.0)


@few
@given(flows, films, ambients)
def test_outlet_lies_between_inlet_and_surroundings(flow, film, ambient):
    run = tube(flow, film, ambient)
    assert 0.0 < outlet(run) < ambient - 20.0
    span = ambient - 20.0
    assert run.t.min() > -1e-4 * span and run.t.max() < span * (1 + 1e-4)


@few
@given(flows, films, ambients, factors)
def test_better_film_and_warmer_bath_heat_more(flow, film, ambient, factor):
    base = outlet(tube(flow, film, ambient))
    assert outlet(tube(flow, film * factor, ambient)) > base
    assert outlet(tube(flow, film, ambient + 5.0 * factor)) > base


@few
@given(flows, films, factors)
def test_more_flow_takes_more_heat_and_leaves_cooler(flow, film, factor):
    slow, fast = tube(flow, film), tube(flow * factor, film)
    assert outlet(fast) < outlet(slow)
    assert fast.heat.outside.sum() > slow.heat.outside.sum() * (1 - 1e-9)
    drops = [r.summary["stream"]["water"]["pressure_drop_Pa"] for r in (slow, fast)]
    assert drops[1] > drops[0] * factor * (1 - 1e-6)


@few
@given(flows, films, st.floats(1e-5, 1e-2), factors)
def test_contact_resistance_and_poor_walls_hold_heat_back(flow, film, contact, factor):
    clean = outlet(tube(flow, film))
    assert outlet(tube(flow, film, contact=contact)) < clean
    assert outlet(tube(flow, film, contact=contact * factor)) < outlet(tube(flow, film, contact=contact))


@few
@given(flows, films, factors)
def test_longer_heater_never_leaves_cooler(flow, film, factor):
    assert outlet(tube(flow, film, heated=40.0 * factor)) > outlet(tube(flow, film))


@few
@given(flows, st.floats(1.0, 50.0), st.floats(0.5, 20.0), factors)
def test_hotter_heater_hotter_everywhere(flow, film, heat, factor):
    """Every cell: the inverse of the heat balance has no negative entry, up to what a second-order scheme
    allows."""
    cool, hot = tube(flow, film, heat=heat, ambient=20.0), tube(flow, film, heat=heat * factor, ambient=20.0)
    assert (hot.t - cool.t).min() > -1e-4 * hot.span
    # a film to the room that heat escapes through: less of it stays in the stream
    assert outlet(tube(flow, film * factor, heat=heat, ambient=20.0)) < outlet(cool)
