"""Every real sounding reads; heights, column vapour and findings against what was reported.

Origin, licence and weaknesses of the soundings: tests/data/real_crossings/README.md.
"""

from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from orolift.air.column import column_vapour
from orolift.air.column_build import air_from_levels
from orolift.air.humidity import mixing_ratio_from_dew_point_checked
from orolift.sources.sounding_csv import levels_from_text, read_sounding

REAL = Path(__file__).parents[1] / "data" / "real_crossings"


def different_soundings():
    """Each sounding once: pairs share some."""
    found = {}
    for file in sorted([*REAL.glob("pair_*/upwind.csv"), *REAL.glob("pair_*/lee.csv")]):
        found.setdefault(file.read_bytes(), file)
    return list(found.values())


FILES = different_soundings()


def column(file):
    sounding = read_sounding(file)
    vapour, _ = mixing_ratio_from_dew_point_checked(sounding.pressure, sounding.temperature, sounding.dew_point)
    wind = sounding.eastward_wind, sounding.northward_wind
    return air_from_levels(
        sounding.height, sounding.pressure, sounding.temperature, vapour, *wind, elevation=sounding.ground
    )


def test_all_are_there():
    """72 different soundings in 66 pairs."""
    assert len(list(REAL.glob("pair_*/upwind.csv"))) == 66
    assert len(FILES) == 72


@pytest.mark.parametrize("file", FILES, ids=lambda file: f"{file.parent.name}-{file.stem}")
def test_reads_without_losing_a_level(file):
    """All levels stay, with their values; no value is called wrong."""
    given = levels_from_text(file.read_text(), file.name)
    sounding = read_sounding(file)
    np.testing.assert_allclose(sounding.pressure, np.sort(given.pressure)[::-1])
    order = np.argsort(-given.pressure)
    np.testing.assert_allclose(sounding.temperature, given.temperature[order])
    np.testing.assert_allclose(sounding.dew_point, given.dew_point[order])
    assert not [finding for finding in sounding.findings if finding.severity == "wrong"]
    assert sounding.ground == given.height[0]


def test_hydrostatic_heights_against_reported_ones():
    """Within 20 m to 500 hPa for 95 % of the soundings, at every level of them."""
    worst = []
    for file in FILES:
        given = levels_from_text(file.read_text(), file.name)
        low = given.pressure >= 500e2
        air = column(file)
        at = np.searchsorted(-air.pressure, -given.pressure[low])
        np.testing.assert_allclose(air.pressure[at], given.pressure[low])
        worst.append(np.abs(air.height[at] - given.height[low]).max())
    assert np.mean(np.array(worst) <= 20.0) >= 0.95
    assert np.median(worst) < 6.0


@pytest.mark.parametrize("file", FILES, ids=lambda file: f"{file.parent.name}-{file.stem}")
def test_column_vapour_by_the_formula_of_the_guide(file):
    """Specific humidity by the saturation formula of WMO-No. 8 (2018), annex 4.B, summed over pressure level by level.

    e = 6.112 hPa exp(17.62 t / (243.12 + t)), q = 0.622 e / (p - 0.378 e). What is above saturation over ice counts as
    cloud with us; here it is added again, and what we add above the data is left out. 0.4 %: that formula and ours
    differ by at most 0.25 % above -40 degrees.
    """
    given = levels_from_text(file.read_text(), file.name)
    order = np.argsort(-given.pressure)
    p, t = given.pressure[order], given.dew_point[order] - 273.15
    e = 611.2 * np.exp(17.62 * t / (243.12 + t))
    q = 0.622 * e / (p - 0.378 * e)
    theirs = float(np.sum(0.5 * (q[1:] + q[:-1]) * -np.diff(p)) / 9.80665)
    air, n = column(file), p.size
    water = replace(
        air, pressure=air.pressure[:n], vapour=(air.vapour + air.cloud)[:n], cloud=np.zeros(n), height=air.height[:n]
    )
    assert float(column_vapour(water)) == pytest.approx(theirs, rel=0.004)


@pytest.mark.parametrize("file", FILES[::6], ids=lambda file: f"{file.parent.name}-{file.stem}")
@pytest.mark.parametrize("kind", ["spike", "feet", "knots gap"])
def test_spoilt_real_soundings_are_caught(file, kind, tmp_path):
    """One value of a real sounding spoilt in the middle of the troposphere: it is said, or refused."""
    lines = file.read_text().splitlines()
    rows = [line.split(",") for line in lines[1:]]
    middle = next(i for i, row in enumerate(rows) if float(row[0]) < 800.0)
    if kind == "spike":
        rows[middle][2] = f"{float(rows[middle][2]) + 25:.1f}"
    elif kind == "feet":
        rows[middle][1] = f"{float(rows[middle][1]) / 0.3048:.0f}"
    else:
        for row in rows:
            row[4] = row[5] = ""
        rows[-1][4:] = ["270", "30"]
    spoilt = tmp_path / "spoilt.csv"
    spoilt.write_text("\n".join([lines[0], *(",".join(row) for row in rows)]))
    sounding = read_sounding(spoilt)
    said_of = " ".join(finding.what for finding in sounding.findings if finding.severity != "remark")
    assert {"spike": "temperature spike", "feet": "height contradicts", "knots gap": "lowest wind"}[kind] in said_of
