"""Many sites from a file: what is read, and what is refused in one sentence."""

import json

import pytest

from orolift.errors import CaseError, DataFileError
from orolift.sources.case import case_from_text
from orolift.sources.sites_file import MOST_SITES, all_sites

RASTER = """
sites_file = "{file}"
[terrain]
elevation_file = "varn.tif"
[incoming]
sounding_file = "s.csv"
"""
RIDGE = RASTER.replace('elevation_file = "varn.tif"', "ridge_km_m = [[0, 0], [20, 1500], [50, 100]]")
TOWN = '\n[[site]]\nname = "Lower Tarn"\n'


@pytest.fixture
def read(tmp_path):
    """Sites of a case whose file has the given text."""

    def built(text, *, case=RASTER, name="sites.csv", more=""):
        (tmp_path / name).write_text(text if isinstance(text, str) else json.dumps(text))
        return all_sites(case_from_text(case.format(file=name) + more, "case.toml"), tmp_path)

    return built


def points(*coordinates, crs=None, **properties):
    """A collection of points, named by their number."""
    features = [
        {
            "type": "Feature",
            "properties": {"name": f"Post {number}", **properties},
            "geometry": {"type": "Point", "coordinates": list(at)},
        }
        for number, at in enumerate(coordinates, start=1)
    ]
    out = {"type": "FeatureCollection", "features": features}
    return out if crs is None else {**out, "crs": {"type": "name", "properties": {"name": crs}}}


def test_rows_of_a_table_are_sites(read):
    """Heights in feet are converted (1 ft = 0.3048 m, exact by definition); an empty one is the terrain's."""
    one, other = read('name,longitude,latitude,elevation_ft\n"Mill, old",-121.5,-46.9,1000\nWeir,-121.4,-46.8,\n')
    assert (one.name, one.longitude, one.latitude) == ("Mill, old", -121.5, -46.9)
    assert one.elevation_m == pytest.approx(304.8)
    assert other.elevation_m is None


def test_eastings_and_distances_along_a_ridge(read):
    """The kind of place follows the terrain."""
    (site,) = read("name,easting_m,northing_m\nWeir,612000,4800000\n")
    assert (site.easting_m, site.northing_m) == (612000.0, 4800000.0)
    (site,) = read("name,distance_mi\nWeir,10\n", case=RIDGE)
    assert site.distance_km == pytest.approx(16.09344)  # the international mile, exact by definition


def test_points_are_sites(read):
    """Longitude and latitude, or any system that the file names."""
    (site,) = read(points((-121.5, -46.9), elevation_m=250), name="s.geojson")
    assert (site.name, site.longitude, site.latitude, site.elevation_m) == ("Post 1", -121.5, -46.9, 250.0)
    # the equator on the central meridian of zone 32, by the definition of UTM: 500 km east at 9 degrees
    (site,) = read(points((500_000.0, 0.0), crs="EPSG:32632"), name="s.geojson")
    assert (site.longitude, site.latitude) == pytest.approx((9.0, 0.0), abs=1e-9)


def test_sites_of_case_and_file_stand_together(read):
    """Those of the case come first."""
    found = read("name,longitude,latitude\nWeir,-121.4,-46.8\n", more=TOWN + "longitude = -121.0\nlatitude = -46.8\n")
    assert [site.name for site in found] == ["Lower Tarn", "Weir"]


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("name,longitude,latitude\nA,1,2\nB,1,2\nA,3,4\n", r"two sites are called 'A': .*line 2 and .*line 4"),
        ("name,longitude\nA,1\n", "needs its place: the columns longitude and latitude"),
        ("name,longitude,latitude,easting_m,northing_m\nA,1,2,3,4\n", "needs its place"),
        ("name,distance_km\nA,1\n", "on a raster a site needs its place"),
        ("longitude,latitude\n1,2\n", "has no column name"),
        ("name,longitude,latitude\nA,1,\n", r"line 2: latitude is missing"),
        ("name,longitude,latitude\nA,1,95\n", r"line 2: latitude 95 is outside the plausible range"),
        ("name,longitude,latitude,elevation_m\nA,1,2,high\n", r"line 2: elevation 'high' is not a number"),
        ("name,longitude,latitude\n,1,2\n", r"line 2: name is missing"),
        ("name,longitudee,latitude\nA,1,2\n", "Did you mean longitude"),
        ("name,longitude,latitude\n", "has a header and no rows"),
    ],
)
def test_refuses_a_table(read, text, message):
    """One sentence that names the line."""
    with pytest.raises((CaseError, DataFileError), match=message):
        read(text)


@pytest.mark.parametrize(
    ("document", "message"),
    [
        (points((500_000.0, 5_000_000.0)), r"feature 1: coordinates 500000, 5e\+06 are no degrees"),
        (points((1.0, 2.0), crs="EPSG:999999"), "coordinate system .* is not known"),
        (points((1.0, "2")), "feature 1: its coordinates are no two numbers"),
        (points((1.0, float("nan"))), "line 1: NaN is no number of JSON"),
        ({"type": "FeatureCollection", "features": []}, "holds no feature"),
        ({"type": "LineString", "coordinates": [[0, 0], [1, 1]]}, "feature 1: its geometry is LineString"),
        ({"type": "Feature", "properties": {"id": 7}, "geometry": None}, "feature 1: its geometry is missing"),
        (
            {"type": "Feature", "properties": {"id": 7}, "geometry": {"type": "Point", "coordinates": [1, 2]}},
            "Its prop",
        ),
        (points((1.0, 2.0), elevation_m="high"), "elevation_m is 'high', and a number is needed"),
        (points((1.0, 2.0), elevation_m=1, elevation_ft=3), "say the same thing"),
        (points((1.0, 2.0), elevation_m=99_999), "feature 1: elevation_m"),
        ("{", "not JSON .* Export the sites as GeoJSON"),
    ],
)
def test_refuses_points(read, document, message):
    """One sentence that names the feature."""
    with pytest.raises(DataFileError, match=message):
        read(document, name="sites.geojson")


def test_a_ridge_takes_no_points_and_no_degrees(read):
    """A hand-entered ridge has no map."""
    with pytest.raises(CaseError, match="points of a map have no place on a hand-entered ridge"):
        read(points((1.0, 2.0)), case=RIDGE, name="s.geojson")
    with pytest.raises(DataFileError, match="need the column distance_km"):
        read("name,longitude,latitude\nA,1,2\n", case=RIDGE)


def test_at_most_ten_thousand(read):
    """The last one allowed is read; one more is refused with the number."""
    rows = [f"S{n},{n / 1000:.3f},2\n" for n in range(MOST_SITES + 1)]
    assert len(read("name,longitude,latitude\n" + "".join(rows[:-1]))) == MOST_SITES
    with pytest.raises(CaseError, match="10001 sites are given, at most 10000"):
        read("name,longitude,latitude\n" + "".join(rows))
