"""A range whose shape is known, as a raster with a case over it."""

import numpy as np
import pytest

NORTHING = 5_100_000.0
CASE = """
sites_file = "sites.csv"
[terrain]
elevation_file = "ridge.tif"
[transect]
through = {{ easting_m = 500000, northing_m = {middle} }}
upwind_km = 50
downwind_km = 50
[incoming]
wind_from_deg = 270
station = {{ elevation_m = 10, temperature_c = 10, relative_humidity_percent = 60, pressure_hpa = 1010, wind_ms = 12 }}
[flow]
range_normal_deg = 270
"""


def _ridge_case(folder, sites, notch=0.5):
    """A case over a bell ridge along grid north, 2000 m high, with a pass in the middle."""
    import rasterio
    from rasterio.transform import from_origin

    x = (np.arange(220) + 0.5) * 500.0 - 55_000.0
    y = ((np.arange(240) + 0.5) * 500.0 - 60_000.0)[:, np.newaxis]
    ground = 2000.0 / (1.0 + (x / 10_000.0) ** 2) * (1.0 - notch * np.exp(-((y / 8000.0) ** 2)))
    with rasterio.open(
        folder / "ridge.tif",
        "w",
        driver="GTiff",
        height=240,
        width=220,
        count=1,
        dtype="float32",
        crs="EPSG:32632",
        transform=from_origin(445_000.0, NORTHING + 60_000.0, 500.0, 500.0),
    ) as out:
        out.write(ground.astype(np.float32), 1)
    rows = [f"{name},{x},{NORTHING + y}" for name, (x, y) in sites.items()]
    (folder / "sites.csv").write_text("name,easting_m,northing_m\n" + "\n".join(rows) + "\n")
    (folder / "case.toml").write_text(CASE.format(middle=NORTHING))
    return folder / "case.toml"


@pytest.fixture(scope="session")
def ridge_case():
    """Writes a case, a raster and sites into a folder, and gives the path of the case."""
    return _ridge_case
