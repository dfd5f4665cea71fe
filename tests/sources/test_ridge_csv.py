"""Ridges read from CSV."""

import numpy as np
import pytest

from orolift.errors import DataFileError, MissingFileError
from orolift.sources.ridge_csv import read_ridge


@pytest.fixture
def ridge_from(tmp_path):
    """Read a ridge from the given text."""

    def reader(text, encoding="utf-8"):
        file = tmp_path / "ridge.csv"
        file.write_bytes(text.encode(encoding))
        return read_ridge(file)

    return reader


GOOD = "distance_km,elevation_m\n0,40\n25,1850\n60,210\n"


def test_kilometres_and_metres(ridge_from):
    distance, elevation = ridge_from(GOOD)
    np.testing.assert_array_equal(distance, [0.0, 25e3, 60e3])
    np.testing.assert_array_equal(elevation, [40.0, 1850.0, 210.0])


def test_miles_and_feet_by_the_header(ridge_from):
    """The international mile is 1609.344 m and the foot 0.3048 m, exactly (NIST SP 811)."""
    distance, elevation = ridge_from("elevation_ft,distance_mi\n100,-5\n6000,10\n700,40\n")
    np.testing.assert_allclose(distance, [-8046.72, 16093.44, 64373.76], rtol=1e-12)
    np.testing.assert_allclose(elevation, [30.48, 1828.8, 213.36], rtol=1e-12)


@pytest.mark.parametrize(
    "text",
    [
        pytest.param("\ufeff" + GOOD, id="byte-order mark"),
        pytest.param("# drawn by hand\n\n" + GOOD.replace("25,", "  # the crest\n\n25 ,"), id="comments"),
        pytest.param(GOOD.replace("\n", "\r\n"), id="windows line ends"),
        pytest.param(GOOD.replace(",", ";"), id="semicolons"),
    ],
)
def test_the_ways_editors_save_it(ridge_from, text):
    np.testing.assert_array_equal(ridge_from(text)[1], [40.0, 1850.0, 210.0])


@pytest.mark.parametrize(
    ("text", "message"),
    [
        pytest.param(GOOD.replace("1850", "high"), r"ridge\.csv: line 3: elevation 'high' is not a number", id="word"),
        pytest.param(GOOD.replace("1850", ""), r"ridge\.csv: line 3: the elevation is missing", id="missing"),
        pytest.param(GOOD.replace("25,", "nan,"), r"ridge\.csv: line 3: the distance is missing", id="nan"),
        pytest.param("# two\n" + GOOD.replace("60", "25"), r"line 5: distance 25 km does not lie beyond", id="twice"),
        pytest.param(GOOD.replace("1850", "18500"), r"line 3: elevation_m 18500 .* -430 to 9000", id="range"),
        pytest.param(GOOD.replace("1850", "inf"), r"line 3: elevation_m inf is outside", id="infinite"),
        pytest.param(GOOD.replace("25,1850", "25,1850,x"), r"line 3: 3 cells, but the header has 2", id="cells"),
        pytest.param("distance_km,elevation_m\n0,1\n9,900\n", r"holds 2 points; .* at least 3", id="two points"),
        pytest.param("elevation_m\n1\n2\n3\n", r"has no column distance_km, only elev", id="no distance"),
        pytest.param(GOOD.replace("elevation_m", "elevatoin_m"), r"line 1.*Did you mean elevation_m\?", id="misspelt"),
        pytest.param("", r"ridge\.csv is empty", id="empty"),
    ],
)
def test_refused_with_file_and_line(ridge_from, text, message):
    with pytest.raises(DataFileError, match=message):
        ridge_from(text)


def test_missing_file_and_address_are_refused(tmp_path):
    with pytest.raises(MissingFileError, match=r"ridge_file: .*nothing\.csv cannot be found"):
        read_ridge("nothing.csv", "ridge_file", tmp_path)
    with pytest.raises(DataFileError, match="is an address"):
        read_ridge("/vsicurl/ridge.csv")
