"""Built-in fluids and solids: laws of temperature in SI units, each with its source.

FLUIDS and SOLIDS map a name to its data. The tables stop where their source stops; nothing is continued
beyond it here. "From memory" means that the source is known and was not opened when the number was typed.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from types import MappingProxyType

from axicfd.materials.laws import Constant, IdealGasDensity, Law, Table

ATMOSPHERE = 101325.0  # Pa, exact by definition (standard atmosphere)
ZERO_CELSIUS = 273.15  # K, exact by definition


@dataclass(frozen=True)
class FluidData:
    """One fluid. Laws take absolute temperature [K] and give kg/m3, J/(kg K), W/(m K), Pa s.

    A gas is given at the standard atmosphere; `at_pressure` gives it at another one.
    """

    name: str
    density: Law
    specific_heat: Law
    conductivity: Law
    viscosity: Law
    source: str
    is_gas: bool = False
    note: str = ""

    @property
    def span(self) -> tuple[float, float]:
        """Temperatures [K] at which all four properties are covered."""
        spans = [law.span for law in (self.density, self.specific_heat, self.conductivity, self.viscosity)]
        return max(low for low, _ in spans), min(high for _, high in spans)

    def at_pressure(self, pressure: float) -> FluidData:
        """The same fluid at an absolute pressure [Pa]: a gas changes its density, a liquid nothing.

        Viscosity, conductivity and specific heat of a gas hardly depend on pressure up to several bar.
        """
        if not isinstance(self.density, IdealGasDensity):
            return self
        return replace(self, density=replace(self.density, pressure=pressure))


@dataclass(frozen=True)
class SolidData:
    """One solid. Laws take absolute temperature [K] and give W/(m K), kg/m3, J/(kg K)."""

    name: str
    conductivity: Law
    density: Law
    specific_heat: Law
    source: str
    note: str = ""

    @property
    def span(self) -> tuple[float, float]:
        """Temperatures [K] at which conductivity and specific heat are covered; infinite where constant."""
        spans = [law.span for law in (self.conductivity, self.specific_heat)]
        return max(low for low, _ in spans), min(high for _, high in spans)


# ----- fluids


def _columns(rows: Sequence[tuple[float, ...]], offset: float = 0.0) -> list[tuple[float, ...]]:
    """Rows (temperature, value, ...) turned into columns; the first gets the offset to kelvin."""
    temperature, *values = (tuple(column) for column in zip(*rows, strict=True))
    return [tuple(t + offset for t in temperature), *values]


def _water() -> FluidData:
    T, density, specific_heat = _columns(
        [  # degC, kg/m3, J/(kg K)
            (0.01, 999.844, 4219.41),
            (5.0, 999.967, 4205.04),
            (10.0, 999.702, 4195.16),
            (15.0, 999.103, 4188.46),
            (20.0, 998.207, 4184.05),
            (25.0, 997.048, 4181.31),
            (30.0, 995.649, 4179.82),
            (40.0, 992.216, 4179.41),
            (50.0, 988.035, 4181.34),
            (60.0, 983.196, 4184.95),
            (70.0, 977.765, 4190.07),
            (80.0, 971.790, 4196.75),
            (90.0, 965.310, 4205.21),
            (95.0, 961.888, 4210.17),
            (99.0, 959.066, 4214.53),
        ],
        ZERO_CELSIUS,
    )
    # Short equations of IAPWS SR6-08 (2011) for liquid water at 0.1 MPa, 273.15 to 383.15 K, coefficients
    # from memory; they agree with the full formulations R12-08 and R15-11 to 3e-5. Taken every 2.5 K or
    # less, the curve through the points adds 1e-5 (2e-5 at the cold end).
    dense = (T[0], *(ZERO_CELSIUS + 2.5 * i for i in range(1, 40)), T[-1])
    t = [x / 300.0 for x in dense]
    viscosity = [1e-6 * (280.68 * x**-1.9 + 511.45 * x**-7.7 + 61.131 * x**-19.6 + 0.45903 * x**-40) for x in t]
    conductivity = [1.6630 * x**-1.15 - 1.7781 * x**-3.4 + 1.1567 * x**-6.0 - 0.432115 * x**-7.6 for x in t]
    return FluidData(
        name="water",
        density=Table(T, density),
        specific_heat=Table(T, specific_heat),
        conductivity=Table(dense, tuple(conductivity)),
        viscosity=Table(dense, tuple(viscosity), logarithmic=True),
        source="density and specific heat: IAPWS-95 (Wagner & Pruss 2002) at 101325 Pa; viscosity and "
        "conductivity: IAPWS SR6-08 (2011), coefficients from memory, checked to 3e-5 against R12-08, R15-11",
        note="liquid, 0.01 to 99 degC, at the standard atmosphere; 10 bar more add less than 0.1 % density",
    )


def _air() -> FluidData:
    T, specific_heat, viscosity, conductivity = _columns(
        [  # K, J/(kg K), Pa s, W/(m K)
            (250.0, 1005.542, 1.60381e-05, 2.25644e-02),
            (273.15, 1005.684, 1.72184e-05, 2.43605e-02),
            (293.15, 1006.144, 1.82057e-05, 2.58738e-02),
            (298.15, 1006.308, 1.84481e-05, 2.62469e-02),
            (300.0, 1006.374, 1.85373e-05, 2.63845e-02),
            (313.15, 1006.921, 1.91652e-05, 2.73543e-02),
            (333.15, 1008.023, 2.00991e-05, 2.88041e-02),
            (350.0, 1009.211, 2.08671e-05, 3.00033e-02),
            (373.15, 1011.233, 2.18965e-05, 3.16199e-02),
            (400.0, 1014.144, 2.30554e-05, 3.34532e-02),
            (450.0, 1021.113, 2.51240e-05, 3.67601e-02),
            (500.0, 1029.869, 2.70901e-05, 3.99446e-02),
            (600.0, 1051.203, 3.07687e-05, 4.60113e-02),
        ]
    )
    return FluidData(
        name="air",
        density=IdealGasDensity(ATMOSPHERE, 287.047),
        specific_heat=Table(T, specific_heat),
        conductivity=Table(T, conductivity),
        viscosity=Table(T, viscosity, logarithmic=True),
        source="specific heat: Lemmon et al. 2000; viscosity and conductivity: Lemmon & Jacobsen 2004, at "
        "101325 Pa; density: ideal gas, 8.314463 J/(mol K) over 28.9655 g/mol (from memory)",
        is_gas=True,
        note="dry, 250 to 600 K; the ideal gas is within 0.1 % of the equation of state at 101325 Pa",
    )


def _ethylene_glycol(percent: int, rows: Sequence[tuple[float, ...]]) -> FluidData:
    T, density, specific_heat, viscosity, conductivity = _columns(rows, ZERO_CELSIUS)
    return FluidData(
        name=f"ethylene glycol {percent} % by mass",
        density=Table(T, density),
        specific_heat=Table(T, specific_heat),
        conductivity=Table(T, conductivity),
        viscosity=Table(T, viscosity, logarithmic=True),
        source="Melinder 2010 (International Institute of Refrigeration), polynomials for aqueous solutions",
        note=f"{percent} % glycol in water by mass, {rows[0][0]:g} to {rows[-1][0]:g} degC; accuracy, our "
        "estimate: 1 % in density, 3 % in specific heat and conductivity, 10 % in viscosity",
    )


# degC, kg/m3, J/(kg K), Pa s, W/(m K)
_GLYCOL = {
    30: [
        (-10.0, 1047.49, 3627.1, 6.50771e-03, 0.4362),
        (0.0, 1044.97, 3658.1, 4.29759e-03, 0.4459),
        (10.0, 1041.81, 3688.5, 2.98300e-03, 0.4555),
        (20.0, 1038.05, 3718.3, 2.16645e-03, 0.4649),
        (40.0, 1028.80, 3775.4, 1.28555e-03, 0.4830),
        (60.0, 1017.46, 3828.7, 8.66045e-04, 0.5002),
        (80.0, 1004.26, 3877.7, 6.38840e-04, 0.5162),
        (100.0, 989.41, 3921.5, 4.97664e-04, 0.5311),
    ],
    40: [
        (-20.0, 1066.67, 3344.3, 1.50007e-02, 0.3945),
        (-10.0, 1063.83, 3389.8, 9.05069e-03, 0.4022),
        (0.0, 1060.39, 3434.2, 5.81066e-03, 0.4099),
        (10.0, 1056.39, 3477.3, 3.94651e-03, 0.4176),
        (20.0, 1051.86, 3519.0, 2.81913e-03, 0.4253),
        (40.0, 1041.35, 3597.8, 1.63510e-03, 0.4405),
        (60.0, 1029.11, 3669.7, 1.08212e-03, 0.4553),
        (80.0, 1015.39, 3733.8, 7.79968e-04, 0.4697),
        (100.0, 1000.45, 3789.3, 5.84398e-04, 0.4833),
    ],
    50: [
        (-30.0, 1085.08, 3027.0, 4.17736e-02, 0.3589),
        (-20.0, 1082.20, 3087.0, 2.21784e-02, 0.3647),
        (-10.0, 1078.70, 3145.7, 1.27799e-02, 0.3707),
        (0.0, 1074.62, 3202.9, 7.92977e-03, 0.3768),
        (10.0, 1070.02, 3258.4, 5.25651e-03, 0.3830),
        (20.0, 1064.93, 3312.0, 3.69321e-03, 0.3891),
        (40.0, 1053.44, 3412.7, 2.10328e-03, 0.4015),
        (60.0, 1040.49, 3503.1, 1.37492e-03, 0.4138),
        (80.0, 1026.41, 3581.6, 9.68457e-04, 0.4257),
        (100.0, 1011.52, 3646.3, 6.89992e-04, 0.4371),
    ],
}


# ----- solids

_HANDBOOK = "Incropera, DeWitt, Bergman & Lavine, Tables A.1 to A.3, from memory"
_DATA_SHEET = "data sheets, from memory, doubtful"


def _solid(
    name: str,
    conductivity: float | Mapping[float, float],
    density: float,
    specific_heat: float | Mapping[float, float],
    source: str,
    note: str = "",
) -> SolidData:
    def law(data: float | Mapping[float, float]) -> Law:
        return Table(tuple(data), tuple(data.values())) if isinstance(data, Mapping) else Constant(data)

    return SolidData(name, law(conductivity), Constant(density), law(specific_heat), source, note)


_SOLID_LIST = [
    _solid(
        "copper", {100: 482, 200: 413, 300: 401, 400: 393, 600: 379}, 8933, 385, _HANDBOOK,
        'pure copper; tube of deoxidised copper conducts less: use "deoxidised copper"',
    ),
    _solid(
        "deoxidised copper", 340, 8940, 385, _DATA_SHEET,
        "phosphorus-deoxidised tube; data sheets give 290 to 365 W/(m K) depending on phosphorus",
    ),
    _solid("aluminium", {200: 237, 300: 237, 400: 240, 600: 231}, 2702, 903, _HANDBOOK, "pure aluminium"),
    _solid(
        "aluminium 2024", 177, 2770, 875, _HANDBOOK,
        "temper T6, at 300 K; EN 12524 gives 160 W/(m K) as the design value of aluminium alloys",
    ),
    _solid(
        "stainless steel 304", {200: 12.6, 300: 14.9, 400: 16.6, 600: 19.8, 800: 22.6}, 7900,
        {200: 402, 300: 477, 400: 515, 600: 557, 800: 582}, _HANDBOOK,
        "EN 12524 gives 17 W/(m K) as the design value of stainless steel",
    ),
    _solid(
        "stainless steel 316", {300: 13.4, 400: 15.2, 600: 18.3, 800: 21.3}, 8238,
        {300: 468, 400: 504, 600: 550, 800: 576}, _HANDBOOK,
        "density in other handbooks 8000 kg/m3; EN 12524 gives 17 W/(m K) as the design value",
    ),
    _solid(
        "brass", {200: 95, 300: 110, 400: 137, 600: 149}, 8530, 380, _HANDBOOK,
        "cartridge brass, 70 % copper; other handbooks give 116 to 120 W/(m K) at room temperature",
    ),
    _solid(
        "titanium", {200: 24.5, 300: 21.9, 400: 20.4, 600: 19.4}, 4500, 522, _HANDBOOK,
        "pure; the alloy with 6 % aluminium and 4 % vanadium conducts about 7 W/(m K) (from memory)",
    ),
    _solid(
        "borosilicate glass", 1.2, 2230, 830, _DATA_SHEET,
        "expansion 3.3e-6 1/K, at 90 degC; handbooks give up to 1.4 W/(m K)",
    ),
    _solid(
        "fused silica", {300: 1.38, 400: 1.51, 600: 1.75, 800: 2.17}, 2220, 745, _HANDBOOK,
        "specific heat at 300 K",
    ),
    _solid(
        "alumina", {300: 36.0, 400: 26.4, 600: 15.8, 800: 10.4, 1000: 7.85}, 3970, 765, _HANDBOOK,
        "polycrystalline, dense; grades of 96 % conduct 20 to 26 W/(m K) at room temperature",
    ),
    _solid(
        "ptfe", 0.25, 2200, 1000, "EN 12524 (design values)",
        "published values spread from 0.25 to 0.35 W/(m K)",
    ),
    _solid("peek", 0.25, 1300, 1340, _DATA_SHEET, "unfilled; published values: 0.25 to 0.32 W/(m K)"),
    _solid(
        "polyimide", 0.12, 1420, 1090, "manufacturer's data sheet of a film, from memory, doubtful",
        "film across its thickness at 23 degC; along the film it conducts better",
    ),
    _solid("mineral wool", 0.04, 32, 840, "ASHRAE Handbook, Fundamentals", "dry, at room temperature"),
    _solid("glass fibre board", 0.036, 160, 840, "ASHRAE Handbook, Fundamentals", "dry, at room temperature"),
]  # fmt: skip

FLUIDS: Mapping[str, FluidData] = MappingProxyType(
    {fluid.name: fluid for fluid in (_water(), _air(), *(_ethylene_glycol(p, rows) for p, rows in _GLYCOL.items()))}
)
SOLIDS: Mapping[str, SolidData] = MappingProxyType({solid.name: solid for solid in _SOLID_LIST})
