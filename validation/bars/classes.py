"""The cases of the five classes, three of each. All numbers are invented."""

from axicfd.case.model import Case
from validation.bars.tube import Liquid, Stretch, Wall, film, heat, held, rising, tube

WATER = Liquid()
OIL = Liquid(0.14, 1000.0, 0.0, 900.0, 2000.0)
THICK = Liquid(0.14, 1000.0, 0.05, 900.0, 2000.0)  # exp(0.05 x 60 K) = 20
SMOOTH, VISCOSITY, EDGE, PECLET, CONDUCTING = (
    "smooth", "variable viscosity", "heater edge", "low Peclet", "high wall conductivity",
)  # fmt: skip
CLASSES = SMOOTH, VISCOSITY, EDGE, PECLET, CONDUCTING


def cases() -> dict[str, tuple[str, Case]]:
    """name -> (class, case)"""

    def banded(lead: float, band: float, behind: float, outside: str) -> list[Stretch]:
        return [Stretch(lead), Stretch(band, outside), Stretch(behind)]

    slow = Liquid(20.0, 0.01, 0.0, 900.0, 140.0)  # a liquid metal
    listed = [
        (SMOOTH, tube("film that warms along a bare bore, Re 20", WATER, 20, 10,
                      [Stretch(200, rising(200, 20, 80, 200))], profile="developed")),
        (SMOOTH, tube("film that warms along a wall, Re 2, oil", OIL, 2, 10,
                      [Stretch(300, rising(200, 20, 80, 300))], [Wall(1.0, 2.0)], profile="developed")),
        (SMOOTH, tube("ramp of temperature on a liner, Re 300, then insulated", WATER, 300, 4,
                      [Stretch(200, rising(2000, 20, 70, 200)), Stretch(200, rising(2000, 70, 20, 200))],
                      [Wall(0.25, 0.5)], profile="developed")),
        (VISCOSITY, tube("heated through a film, Re 1", THICK, 1, 10, [Stretch(500, film(200, 80))])),
        (VISCOSITY, tube("cooled through a film on steel, Re 50", THICK, 50, 10,
                         [Stretch(100), Stretch(600, film(500, 20)), Stretch(100)], [Wall(16, 1.0)], inlet=80.0)),
        (VISCOSITY, tube("heater band on steel, Re 20", THICK, 20, 10, banded(100, 100, 100, heat(40)),
                         [Wall(16, 1.0)])),
        (EDGE, tube("heater on a bare bore, Re 50", WATER, 50, 6, banded(60, 60, 120, heat(10)))),
        (EDGE, tube("film on plastic, Re 200", WATER, 200, 6, banded(60, 100, 120, film(1000, 80)), [Wall(0.25, 1.0)])),
        (EDGE, tube("held temperature on steel behind an insulated length, Re 30", WATER, 30, 6,
                    [Stretch(60), Stretch(200, held(60)), Stretch(60)], [Wall(16, 0.5)])),
        (PECLET, tube("heater on steel, Pe 1", slow, 100, 10, banded(60, 60, 60, heat(20)), [Wall(16, 1.0)])),
        (PECLET, tube("film on a bare bore, Pe 10", WATER, 10 / 7, 10, banded(60, 100, 60, film(300, 80)),
                      profile="developed")),
        (PECLET, tube("rising film on a thick wall, Pe 0.3", slow, 30, 10,
                      [Stretch(50), Stretch(100, rising(500, 20, 80, 100)), Stretch(50)], [Wall(16, 3.0)],
                      profile="developed")),
        (CONDUCTING, tube("short source on copper, Re 300", WATER, 300, 4, banded(150, 20, 150, heat(30)),
                          [Wall(390, 1.0)])),
        (CONDUCTING, tube("film on thick copper, Re 50, oil", OIL, 50, 10, banded(100, 100, 100, film(2000, 80)),
                          [Wall(390, 5.0)])),
        (CONDUCTING, tube("heater on copper over plastic, Re 20", WATER, 20, 6, banded(100, 50, 100, heat(5)),
                          [Wall(0.25, 0.5), Wall(390, 1.0)])),
    ]  # fmt: skip
    return {case.title: (group, case) for group, case in listed}
