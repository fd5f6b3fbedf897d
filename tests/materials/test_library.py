"""The built-in fluids and solids against the points of their sources."""

import csv
from pathlib import Path

import numpy as np
import pytest

from axicfd.materials.library import FLUIDS, SOLIDS

REFERENCE = Path(__file__).parents[2] / "validation" / "reference"


def rows(name):
    """Data rows of a reference table as lists of text, header left out."""
    with (REFERENCE / name).open(encoding="utf-8") as file:
        lines = [line for line in file if not line.startswith("#")]
    return list(csv.reader(lines))[1:]


def test_water_meets_its_formulations():
    # IAPWS-95, R12-08 and R15-11; the short equations for viscosity and conductivity agree to 3e-5
    water = FLUIDS["water"]
    for T, density, specific_heat, viscosity, conductivity, *_ in rows("water_101325Pa.csv"):
        T = float(T) + 273.15
        assert water.density(T) == pytest.approx(float(density), rel=1e-12)
        assert water.specific_heat(T) == pytest.approx(float(specific_heat), rel=1e-12)
        assert water.viscosity(T) == pytest.approx(float(viscosity), rel=3.5e-5)
        assert water.conductivity(T) == pytest.approx(float(conductivity), rel=5e-5)
    # IAPWS R12-08 check point, from memory: 889.735 uPa s at 298.15 K and 998 kg/m3 (0.1 % denser than here)
    assert water.viscosity(298.15) == pytest.approx(8.897e-4, rel=1e-3)
    assert water.span == pytest.approx((273.16, 372.15))


def test_water_between_its_points():
    # the short equations of IAPWS SR6-08 themselves
    T = np.linspace(273.2, 372.1, 400)
    t = T / 300
    mu = 1e-6 * (280.68 * t**-1.9 + 511.45 * t**-7.7 + 61.131 * t**-19.6 + 0.45903 * t**-40)
    k = 1.6630 * t**-1.15 - 1.7781 * t**-3.4 + 1.1567 * t**-6.0 - 0.432115 * t**-7.6
    np.testing.assert_allclose(FLUIDS["water"].viscosity(T), mu, rtol=3e-5)
    np.testing.assert_allclose(FLUIDS["water"].conductivity(T), k, rtol=3e-5)


def test_air_meets_its_source():
    air = FLUIDS["air"]
    assert air.is_gas
    for T, density, specific_heat, viscosity, conductivity, *_ in rows("air_101325Pa.csv"):
        T = float(T)
        if T > air.span[1]:
            continue
        assert air.density(T) == pytest.approx(float(density), rel=1e-3)  # ideal gas against Lemmon et al. 2000
        assert air.specific_heat(T) == pytest.approx(float(specific_heat), rel=1e-9)
        assert air.viscosity(T) == pytest.approx(float(viscosity), rel=1e-9)
        assert air.conductivity(T) == pytest.approx(float(conductivity), rel=1e-9)


def test_only_a_gas_changes_with_pressure():
    air, water = FLUIDS["air"], FLUIDS["water"]
    assert air.at_pressure(3e5).density(300.0) == pytest.approx(air.density(300.0) * 3e5 / 101325.0)
    assert water.at_pressure(3e5) is water


@pytest.mark.parametrize("percent", [30, 40, 50])
def test_glycol_meets_its_source(percent):
    glycol = FLUIDS[f"ethylene glycol {percent} % by mass"]
    found = 0
    for share, T, density, specific_heat, viscosity, conductivity, *_ in rows("ethylene_glycol_water.csv"):
        if round(100 * float(share)) != percent:
            continue
        found += 1
        T = float(T) + 273.15
        assert glycol.density(T) == pytest.approx(float(density), rel=1e-9)
        assert glycol.specific_heat(T) == pytest.approx(float(specific_heat), rel=1e-9)
        assert glycol.viscosity(T) == pytest.approx(float(viscosity), rel=1e-9)
        assert glycol.conductivity(T) == pytest.approx(float(conductivity), rel=1e-9)
    assert found >= 8


@pytest.mark.parametrize(
    ("name", "row"),
    [
        ("copper", "copper, pure"),
        ("aluminium", "aluminium, pure"),
        ("aluminium 2024", "aluminium alloy 2024-T6"),
        ("stainless steel 304", "stainless steel AISI 304"),
        ("stainless steel 316", "stainless steel AISI 316"),
        ("brass", "cartridge brass (70Cu-30Zn)"),
        ("titanium", "titanium, pure"),
        ("fused silica", "fused silica (polycrystalline SiO2 entry)"),
        ("alumina", "alumina, polycrystalline"),
        ("peek", "PEEK"),
        ("polyimide", "polyimide film"),
        ("mineral wool", "mineral wool, 32 kg/m3"),
        ("glass fibre board", "glass fibre board 160 kg/m3"),
    ],
)
def test_solids_meet_their_source_at_300_kelvin(name, row):
    (values,) = [r for r in rows("solids_300K.csv") if r[0] == row]
    solid = SOLIDS[name]
    assert solid.conductivity(300.0) == pytest.approx(float(values[1]))
    assert solid.density(300.0) == pytest.approx(float(values[2]))
    assert solid.specific_heat(300.0) == pytest.approx(float(values[3]))


def test_the_two_coppers_are_told_apart():
    assert SOLIDS["copper"].conductivity(300.0) == pytest.approx(401.0)
    assert SOLIDS["deoxidised copper"].conductivity(300.0) == pytest.approx(340.0)
    assert "deoxidised" in SOLIDS["copper"].note


@pytest.mark.parametrize("data", [*FLUIDS.values(), *SOLIDS.values()], ids=lambda d: d.name)
def test_everything_has_a_source_and_is_positive(data):
    assert data.source
    low, high = data.span
    T = np.linspace(max(low, 250.0), min(high, 600.0), 50)
    laws = [data.conductivity, data.density, data.specific_heat]
    laws += [data.viscosity] if hasattr(data, "viscosity") else []
    assert all(np.all(law(T) > 0) for law in laws)
