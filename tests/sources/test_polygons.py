"""Catchments and divides from GeoJSON."""

import json

import numpy as np
import pytest
import shapely
from rasterio.crs import CRS

from orolift.errors import DataFileError, MissingFileError
from orolift.sources.polygons import read_lines, read_polygons

UTM = CRS.from_epsg(32632)
SQUARE = [[9.0, 46.0], [9.1, 46.0], [9.1, 46.1], [9.0, 46.1], [9.0, 46.0]]


@pytest.fixture
def file_of(tmp_path):
    """Write features, or anything, as a file."""

    def write(*features, text=None, **members):
        file = tmp_path / "basins.geojson"
        document = {"type": "FeatureCollection", "features": list(features), **members}
        file.write_text(json.dumps(document) if text is None else text)
        return file

    return write


def feature(coordinates, kind="Polygon", **properties):
    """One feature."""
    return {"type": "Feature", "properties": properties, "geometry": {"type": kind, "coordinates": coordinates}}


def test_names_holes_and_area(file_of):
    """A square of a tenth of a degree at 46 degrees north with a hole: 7.742 km x 11.115 km less the hole.

    Lengths: WGS84 arcs, from geographiclib; UTM on its central meridian is 0.9996 of true, squared. rtol 2e-4.
    """
    from geographiclib.geodesic import Geodesic

    hole = [[9.04, 46.04], [9.06, 46.04], [9.06, 46.06], [9.04, 46.06], [9.04, 46.04]]
    (found,), notes = read_polygons(file_of(feature([SQUARE, hole], basin="Upper Tarn")), UTM, name_field="basin")
    assert (found.name, found.feature, found.notes, notes) == ("Upper Tarn", 1, (), ())
    assert len(found.polygon.interiors) == 1
    area = 0.0
    for ring, sign in ((SQUARE, 1), (hole, -1)):
        polygon = Geodesic.WGS84.Polygon()
        for longitude, latitude in ring[:-1]:
            polygon.AddPoint(latitude, longitude)
        area += sign * abs(polygon.Compute()[2])
    assert found.polygon.area == pytest.approx(area * 0.9996**2, rel=2e-4)


def test_the_crs_member_is_obeyed(file_of):
    """The same square in UTM coordinates that the file names."""
    import rasterio.warp

    x, y = rasterio.warp.transform("EPSG:4326", UTM, *np.array(SQUARE).T)
    member = {"type": "name", "properties": {"name": "urn:ogc:def:crs:EPSG::32632"}}
    (a,), _ = read_polygons(file_of(feature([list(zip(x, y, strict=True))]), crs=member), UTM)
    (b,), _ = read_polygons(file_of(feature([SQUARE])), UTM)
    assert a.name == "Catchment 1"
    # edges straight in one system bend in the other: 5 m in the middle of 7.7 km
    assert shapely.area(shapely.symmetric_difference(a.polygon, b.polygon)) < 3e-4 * a.polygon.area
    (c,), _ = read_polygons(
        file_of(feature([SQUARE]), crs={"type": "name", "properties": {"name": "urn:ogc:def:crs:OGC:1.3:CRS84"}}), UTM
    )
    assert c.polygon.equals_exact(b.polygon, 1e-6)


def test_other_features_are_left_out_and_said(file_of):
    """Points, empty geometries and nulls; areas in a collection count."""
    collection = {
        "type": "Feature",
        "properties": {},
        "geometry": {
            "type": "GeometryCollection",
            "geometries": [{"type": "Polygon", "coordinates": [SQUARE]}, {"type": "Point", "coordinates": [9, 46]}],
        },
    }
    null = {"type": "Feature", "properties": None, "geometry": None}
    found, notes = read_polygons(
        file_of(feature([9.0, 46.0], "Point"), null, collection, feature([[[*p, 300.0] for p in SQUARE]])), UTM
    )
    assert [polygon.feature for polygon in found] == [3, 4]
    assert not found[1].polygon.has_z
    assert "left out: 1, 2" in notes[0]


def test_invalid_polygons_are_repaired_and_said(file_of):
    """A bow tie becomes its two triangles."""
    bow = [[9.0, 46.0], [9.1, 46.1], [9.1, 46.0], [9.0, 46.1], [9.0, 46.0]]
    (found,), _ = read_polygons(file_of(feature([bow], n="Bow")), UTM, name_field="n")
    assert found.polygon.is_valid
    assert "'Bow' was not a valid polygon (Self-intersection" in found.notes[0]
    (square,), _ = read_polygons(file_of(feature([SQUARE])), UTM)
    assert found.polygon.area == pytest.approx(0.5 * square.polygon.area, rel=1e-3)


def test_one_name_twice(file_of):
    """Names stay unique."""
    found, _ = read_polygons(
        file_of(feature([SQUARE], n="A"), feature([SQUARE], n="A"), feature([SQUARE], n=7)), UTM, name_field="n"
    )
    assert [polygon.name for polygon in found] == ["A", "A (2)", "7"]


def test_a_bare_geometry_and_a_bare_feature(file_of):
    """Not every program writes a collection."""
    assert len(read_polygons(file_of(text=json.dumps({"type": "Polygon", "coordinates": [SQUARE]})), UTM)[0]) == 1
    assert len(read_polygons(file_of(text=json.dumps(feature([SQUARE]))), UTM)[0]) == 1


def damaged():
    """Texts or features, and what is said of them."""
    far = [[1e6, 5e6], [2e6, 5e6], [2e6, 6e6], [1e6, 5e6]]
    return [
        ({"text": "{"}, r"line 1: not JSON"),
        ({"text": "[1, 2]"}, "no GeoJSON"),
        ({"text": '{"type": "FeatureCollection", "features": 3}'}, "no list of objects"),
        ({"text": "[" * 100_000}, "nested too deeply|not JSON"),
        ({"features": [feature([[[9.0, 46.0], [9.1, 46.0]]])]}, "feature 1: its geometry is damaged"),
        (
            {"features": [feature([SQUARE], n=""), feature([SQUARE])]},
            r"feature 1: has no name in 'n'. Its properties: n",
        ),
        ({"features": [feature([[0, 0], [1, 1]], "LineString")]}, "holds no polygon"),
        ({"features": []}, "holds no polygon"),
        ({"features": [feature([far], n="far")]}, r"feature 1: coordinates up to 6000000 are no degrees"),
        (
            {"features": [feature([SQUARE], n="x")], "crs": {"type": "name", "properties": {"name": "EPSG:999999"}}},
            "is not known",
        ),
        ({"features": [feature([SQUARE], n="x")], "crs": 5}, "is not known"),
        ({"features": [feature([[[9, 46], [9, 46], [9, 46], [9, 46]]], n="dot")]}, "'dot' has no area"),
        (
            {"text": '{"type": "Polygon", "coordinates": [[[9, 46], [NaN, 46], [9, 47], [9, 46]]]}'},
            "line 1: NaN is no number of JSON",
        ),
    ]


@pytest.mark.parametrize(("content", "message"), damaged())
def test_damaged_files(file_of, content, message):
    """File and feature are named."""
    features = content.pop("features", [])
    file = file_of(*features, **content)
    with pytest.raises(DataFileError, match=message) as caught:
        read_polygons(file, UTM, name_field="n" if "text" not in content else None)
    assert "basins.geojson" in str(caught.value)


def test_missing_file(tmp_path):
    """Named with its key."""
    with pytest.raises(MissingFileError, match=r"catchments file: .* cannot be found"):
        read_polygons(tmp_path / "no.geojson", UTM)


def test_lines_of_a_divide(file_of):
    """Parts and lines each for itself, in metres; a file of areas is refused."""
    lines = read_lines(
        file_of(
            feature([[9.0, 45.9], [9.0, 46.0]], "LineString"),
            feature([[[9, 46], [9, 46.1]], [[9.1, 46.2], [9.1, 46.3]]], "MultiLineString"),
        ),
        UTM,
    )
    assert len(lines) == 3
    np.testing.assert_allclose(lines[0][:, 0], 500e3, atol=1e-3)
    assert lines[0][-1, 1] - lines[0][0, 1] == pytest.approx(0.9996 * 11114.0, rel=1e-3)
    with pytest.raises(DataFileError, match="holds no line"):
        read_lines(file_of(feature([SQUARE])), UTM)
