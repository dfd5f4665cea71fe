"""Makes the invented Varn range: a raster, a hand-entered ridge and two soundings.

Everything here is invented. The range lies in an empty part of the South
Pacific so that none of its coordinates belongs to a real place. The land is
raised along a divide and worn down by its rivers until valleys, spurs and
passes have formed; the soundings are built level by level to be hydrostatic.

Run: python demo_terrain/make_demo.py [FOLDER]   (about two minutes, always the same)
"""

from __future__ import annotations

import heapq
import sys
from datetime import UTC, datetime, timedelta
from pathlib import Path

import numpy as np
import rasterio
from rasterio.transform import from_origin

SEED = 47121
WEST, NORTH = 588_000.0, 4_853_000.0  # upper left corner, EPSG:32710
WIDTH, HEIGHT = 108_000.0, 102_000.0  # [m]
CELL = 150.0  # [m]
ACROSS = np.radians(50.0)  # bearing across the range, from the coast to the lee
BASIN_FLOOR = 265.0  # [m]
LEVELS = ((1200.0, 80), (600.0, 40), (300.0, 25), (150.0, 12))  # cell size [m], rounds of erosion
TIME_STEP = 0.06  # [Myr] of a round
UPLIFT = 1.0  # [mm per year] at the divide
CONCAVITY = 0.36  # exponent of the drained area in the stream power
ERODIBILITY = 3.15e-5  # [m^(1 - 2 x CONCAVITY) per year]
CREEP = 0.03  # [m2 per year] soil creep that rounds the ridges
SHOULDER = 1200.0  # [m] ground above it is lowered, as ice and frost lower summits
PASSES = ((-27e3, 3.2e3, 0.36), (4.5e3, 3.0e3, 0.48), (31e3, 2.6e3, 0.30))  # place along the range, width, depth
NEIGHBOURS = ((-1, -1), (-1, 0), (-1, 1), (0, -1), (0, 1), (1, -1), (1, 0), (1, 1))


def noise(shape: tuple[int, int], cell: float, longest: float, steepness: float, seed: int) -> np.ndarray:
    """Random field of unit standard deviation, wavelengths up to `longest`, the same at every resolution."""
    rng = np.random.default_rng(SEED + seed)
    ny, nx = shape
    x, y = np.meshgrid((np.arange(nx) + 0.5) * cell, (np.arange(ny) + 0.5) * cell)
    field = np.zeros(shape)
    wavelength, size = longest, 1.0
    while wavelength > 2.0 * CELL:
        for _ in range(6):
            bearing, phase = rng.uniform(0.0, 2.0 * np.pi, 2)
            stretch = wavelength * rng.uniform(0.7, 1.4)
            field += size * np.cos(2.0 * np.pi * (x * np.cos(bearing) + y * np.sin(bearing)) / stretch + phase)
        wavelength, size = wavelength / 1.9, size / 1.9**steepness
    return field / field.std()


def layout(cell: float) -> tuple[np.ndarray, np.ndarray, np.ndarray, np.ndarray]:
    """Distance across and along the range [m], land or sea, and fixed outlets on the edge."""
    ny, nx = round(HEIGHT / cell), round(WIDTH / cell)
    east = (np.arange(nx) + 0.5) * cell - WIDTH / 2.0
    north = HEIGHT / 2.0 - (np.arange(ny) + 0.5) * cell
    east, north = np.meshgrid(east, north)
    across = east * np.sin(ACROSS) + north * np.cos(ACROSS)
    along = -east * np.cos(ACROSS) + north * np.sin(ACROSS)
    bent = across + 3.0e3 * np.sin(along / 21e3 + 0.6) + 1.7e3 * noise((ny, nx), cell, 30e3, 1.0, 1)
    coast = across + 41e3 + 2.6e3 * noise((ny, nx), cell, 22e3, 0.85, 2) + 4e3 * np.sin(along / 17e3)
    edge = np.zeros((ny, nx), dtype=bool)
    edge[[0, -1], :] = edge[:, [0, -1]] = True
    return bent, along, coast > 0.0, edge & (bent > 24e3)


def uplift(bent: np.ndarray, along: np.ndarray, cell: float) -> np.ndarray:
    """Rate at which the land rises [m per year]."""
    divide = np.where(bent < 0.0, np.exp(-((bent / 15e3) ** 2)), np.exp(-((bent / 10e3) ** 2)))
    foothills = 0.13 / (1.0 + np.exp(-(bent + 37e3) / 2.5e3)) * (bent < 0.0)
    saddle = np.ones(bent.shape)
    for place, width, depth in PASSES:
        saddle -= depth * np.exp(-(((along - place) / width) ** 2))
    saddle -= 0.3 / (1.0 + np.exp(-(np.abs(along) - 47e3) / 3e3))  # lower toward both ends
    patchy = 1.0 + 0.16 * noise(bent.shape, cell, 16e3, 0.8, 3)
    far_hills = 0.10 / (1.0 + np.exp(-(bent - 52e3) / 3e3))
    rate = divide * saddle * patchy + foothills * np.where(bent < 0.0, 1.0, 0.0) + far_hills
    return 1e-3 * UPLIFT * np.maximum(rate, 0.004)


def drainage(
    ground: np.ndarray, fixed: np.ndarray, cell: float
) -> tuple[np.ndarray, np.ndarray, list[int], np.ndarray]:
    """Ground with hollows filled, the cell each cell drains to, cells from the outlets up, and step lengths."""
    ny, nx = ground.shape
    wide = nx + 2
    level = np.full((ny + 2, wide), np.inf)
    level[1:-1, 1:-1] = ground
    flat = level.ravel().tolist()
    done = np.ones((ny + 2, wide), dtype=bool)
    done[1:-1, 1:-1] = fixed
    done = done.ravel().tolist()
    steps = [dy * wide + dx for dy, dx in NEIGHBOURS]
    heap = [(flat[i], i) for i in np.flatnonzero(np.pad(fixed, 1).ravel()).tolist()]
    heapq.heapify(heap)
    order = []
    while heap:
        height, i = heapq.heappop(heap)
        order.append(i)
        least = height + 1e-3
        for step in steps:
            j = i + step
            if not done[j]:
                done[j] = True
                flat[j] = max(flat[j], least)
                heapq.heappush(heap, (flat[j], j))
    filled = np.array(flat).reshape(ny + 2, wide)
    index = np.arange(filled.size).reshape(filled.shape)[1:-1, 1:-1]
    steepest, target, length = np.zeros((ny, nx)), index.copy(), np.full((ny, nx), cell)
    for dy, dx in NEIGHBOURS:
        reach = cell * np.hypot(dx, dy)
        slope = (filled[1:-1, 1:-1] - filled[1 + dy : ny + 1 + dy, 1 + dx : nx + 1 + dx]) / reach
        better = (slope > steepest) & ~fixed
        steepest[better], length[better] = slope[better], reach
        target[better] = (index + dy * wide + dx)[better]
    return filled[1:-1, 1:-1], np.pad(target, 1), order, np.pad(length, 1, constant_values=cell)


def eroded(ground: np.ndarray, rise: np.ndarray, fixed: np.ndarray, strength: np.ndarray, cell: float) -> np.ndarray:
    """Ground after one round of uplift, river erosion and creep."""
    years = TIME_STEP * 1e6
    filled, target, order, length = drainage(ground, fixed, cell)
    to = target.ravel().tolist()
    area = [cell * cell] * len(to)
    for i in reversed(order):
        if to[i] != i:
            area[to[i]] += area[i]
    power = np.pad(strength, 1) * np.array(area).reshape(target.shape) ** CONCAVITY * years / length
    factor = power.ravel().tolist()
    height = np.pad(np.where(fixed, ground, filled + rise * years), 1).ravel().tolist()
    for i in order:
        j = to[i]
        if j != i:
            lower = (height[i] + factor[i] * height[j]) / (1.0 + factor[i])
            height[i] = max(lower, height[j])
    new = np.array(height).reshape(target.shape)[1:-1, 1:-1]
    share = min(0.2, CREEP * years / cell**2)
    padded = np.pad(new, 1, mode="edge")
    curvature = padded[:-2, 1:-1] + padded[2:, 1:-1] + padded[1:-1, :-2] + padded[1:-1, 2:] - 4.0 * new
    return np.where(fixed, ground, new + share * curvature)


def resampled(ground: np.ndarray, shape: tuple[int, int]) -> np.ndarray:
    """Ground on a finer grid over the same area, straight lines between cell centres."""
    for axis in (0, 1):
        old, new = ground.shape[axis], shape[axis]
        place = (np.arange(new) + 0.5) * old / new - 0.5
        ground = np.apply_along_axis(lambda v, p=place: np.interp(p, np.arange(v.size), v), axis, ground)
    return ground


def varn_ground() -> np.ndarray:
    """Elevation of the Varn range [m], rows north to south."""
    ground = None
    for cell, rounds in LEVELS:
        bent, along, land, outlet = layout(cell)
        rise = uplift(bent, along, cell)
        rough = noise(bent.shape, cell, 5e3, 0.6, 4)
        strength = ERODIBILITY * np.exp(0.25 * noise(bent.shape, cell, 12e3, 0.5, 5))
        fixed = ~land | outlet
        if ground is None:
            ground = 60.0 + 15.0 * rough + 900.0 * np.exp(-((bent / 9e3) ** 2)) + np.where(bent > 0.0, BASIN_FLOOR, 0.0)
        ground = resampled(ground, bent.shape) + 3.0 * rough * (cell / 1200.0)
        ground = np.where(land, np.where(outlet, BASIN_FLOOR, np.maximum(ground, 1.0)), 0.0)
        for _ in range(rounds):
            ground = eroded(ground, rise, fixed, strength, cell)
        print(f"{cell:.0f} m cells: highest {ground.max():.0f} m")
    summits = np.maximum(ground - SHOULDER, 0.0)
    return np.where(land, np.maximum(ground - 0.22 * summits, plain(bent, cell)), 0.0)


def plain(bent: np.ndarray, cell: float) -> np.ndarray:
    """Gravel that fills the basin in the lee and the lowest parts of its side valleys [m]."""
    fans = 70.0 * np.exp(-np.maximum(bent - 12e3, 0.0) / 5e3)
    floor = (
        BASIN_FLOOR + fans + 14.0 * noise(bent.shape, cell, 26e3, 1.0, 6) + 1.0 * noise(bent.shape, cell, 3e3, 0.7, 7)
    )
    return np.where(bent > 8e3, floor, 0.0)


def write_raster(file: Path, ground: np.ndarray) -> None:
    """Elevation as a GeoTIFF of whole metres."""
    with rasterio.open(
        file,
        "w",
        driver="GTiff",
        width=ground.shape[1],
        height=ground.shape[0],
        count=1,
        dtype="int16",
        crs="EPSG:32710",
        transform=from_origin(WEST, NORTH, CELL, CELL),
        nodata=-32768,
        tiled=True,
        blockxsize=256,
        blockysize=256,
        compress="deflate",
        predictor=2,
        zlevel=9,
    ) as out:
        out.write(np.rint(ground).astype(np.int16), 1)
        out.set_band_unit(1, "m")


RIDGE = """# The Varn range along 235 degrees, read off a map by hand. An invented range.
distance_km,elevation_m
0,0
34,0
40,60
52,210
60,620
66,1120
71,1540
75,1900
79,1430
85,820
92,430
100,290
120,270
145,280
"""

# Height [m], temperature [degC], dew point depression [K], wind from [deg], wind speed [kt]; straight lines between.
MOIST = (
    (25, 12.8, 2.0, 228, 19),
    (300, 10.9, 1.2, 230, 26),
    (600, 8.9, 0.6, 232, 30),
    (1000, 6.6, 0.4, 234, 33),
    (1500, 3.6, 0.4, 235, 36),
    (2000, 0.6, 0.5, 236, 38),
    (2500, -2.2, 0.8, 237, 41),
    (3000, -4.4, 1.4, 238, 45),
    (4000, -10.3, 2.2, 240, 52),
    (5500, -20.0, 3.5, 243, 63),
    (7000, -30.6, 5.0, 245, 74),
    (9000, -45.2, 7.0, 247, 88),
    (10500, -55.4, 9.0, 248, 94),
    (12000, -55.8, 16.0, 248, 76),
    (14000, -56.4, 22.0, 249, 56),
    (16200, -57.0, 26.0, 250, 44),
)
DRY = (
    (35, 6.4, 4.5, 215, 7),
    (250, 6.8, 6.0, 222, 11),
    (700, 5.4, 8.0, 228, 15),
    (1200, 3.6, 10.0, 232, 19),
    (1800, 1.2, 12.0, 235, 24),
    (2400, -0.8, 15.0, 237, 31),
    (3000, -4.2, 16.0, 239, 37),
    (4200, -11.8, 15.0, 242, 45),
    (5600, -21.2, 15.0, 245, 55),
    (7200, -32.8, 14.0, 247, 66),
    (9200, -47.8, 12.0, 249, 80),
    (10800, -57.6, 13.0, 250, 78),
    (12500, -57.2, 20.0, 250, 60),
    (14500, -57.8, 24.0, 251, 45),
    (16400, -58.4, 27.0, 252, 36),
)


def vapour_pressure(dew_point_c: np.ndarray) -> np.ndarray:
    """Vapour pressure over water [hPa]: Bolton (1980), Mon. Weather Rev. 108, 1046-1053, eq. 10."""
    return 6.112 * np.exp(17.67 * dew_point_c / (dew_point_c + 243.5))


def sounding(levels: tuple[tuple[float, ...], ...], ground_pressure: float, title: str) -> str:
    """Sounding as CSV, its pressures hydrostatic for its temperature and moisture."""
    corner = np.array(levels, dtype=float)
    fine = np.arange(corner[0, 0], corner[-1, 0] + 1.0, 5.0)
    temperature, depression = (np.interp(fine, corner[:, 0], corner[:, k]) for k in (1, 2))
    vapour = vapour_pressure(temperature - depression)
    log_pressure = np.full(fine.shape, np.log(ground_pressure))
    for _ in range(4):  # the share of vapour depends on the pressure, weakly
        mixing_ratio = 0.62198 * vapour / (np.exp(log_pressure) - vapour)
        virtual = (temperature + 273.15) * (1.0 + mixing_ratio / 0.62198) / (1.0 + mixing_ratio)
        fall = 9.80665 / 287.05 / virtual
        steps = 0.5 * (fall[1:] + fall[:-1]) * np.diff(fine)
        log_pressure[1:] = np.log(ground_pressure) - np.cumsum(steps)
    heights = np.unique(
        np.concatenate([corner[:, 0], np.arange(400.0, 5001.0, 200.0), np.arange(5500.0, 16001.0, 500.0)])
    )
    rows = [f"# {title} Invented.", "pressure_hpa,height_m,temperature_c,dew_point_c,wind_from_deg,wind_kt"]
    for z in heights[heights <= corner[-1, 0]]:
        t, spread, bearing, speed = (np.interp(z, corner[:, 0], corner[:, k]) for k in (1, 2, 3, 4))
        pressure = np.exp(np.interp(z, fine, log_pressure))
        rows.append(f"{pressure:.1f},{z:.0f},{t:.1f},{t - spread:.1f},{bearing:.0f},{speed:.0f}")
    return "\n".join(rows) + "\n"


def hours() -> str:
    """36 hours at an invented coastal station: south-westerly rises behind a high, a front, then north-westerly.

    Cold air lies in the lee until the wind is strong enough to take its place; two hours failed to report.
    """
    rows = [
        "# Invented: a dry south-westerly over the Varn range, then a front. Two hours did not report.",
        "time,temperature_c,dew_point_c,pressure_hpa,wind_from_deg,wind_kt,crest_wind_kt,crest_wind_from_deg,lee_temperature_c",
    ]
    start = datetime(2027, 2, 14, 6, tzinfo=UTC)
    for hour in range(36):
        rise = 1.0 / (1.0 + np.exp(-(hour - 9.0) / 2.0))
        front = 1.0 / (1.0 + np.exp(-(hour - 27.0) / 0.8))
        wet = np.exp(-(((hour - 27.0) / 2.5) ** 2))
        sun = np.cos(2.0 * np.pi * (hour - 19.0) / 24.0)  # warmest at 01 UTC, early afternoon there
        temperature = 13.0 + 2.0 * sun - 4.0 * front
        dew_point = temperature - 3.0 - 6.0 * rise * (1.0 - front) * (1.0 - 0.9 * wet) - 2.5 * front * (1.0 - wet)
        pressure = 1019.0 - 9.0 * rise + 6.0 * front
        wind = 7.0 + 9.0 * rise * (1.0 - 0.6 * front)
        veer = 85.0 * front
        lee = 6.0 + 1.5 * sun + 14.0 * rise - 3.0 * front
        if hour in {15, 16}:
            continue
        rows.append(
            f"{(start + timedelta(hours=hour)).isoformat().replace('+00:00', 'Z')},{temperature:.1f},{dew_point:.1f},"
            f"{pressure:.1f},{235.0 + veer:.0f},{wind:.0f},{1.2 * wind:.0f},{240.0 + veer:.0f},{lee:.1f}"
        )
    return "\n".join(rows) + "\n"


if __name__ == "__main__":
    folder = Path(sys.argv[1]) if len(sys.argv) > 1 else Path(__file__).parent
    (folder / "ridge.csv").write_text(RIDGE, encoding="utf-8")
    moist = sounding(MOIST, 1003.6, "Moist, nearly neutral south-westerly off the sea before a front.")
    dry = sounding(DRY, 1019.2, "Dry, stable south-westerly behind a high.")
    (folder / "sounding.csv").write_text(moist, encoding="utf-8")
    (folder / "sounding_dry.csv").write_text(dry, encoding="utf-8")
    (folder / "varn_hours.csv").write_text(hours(), encoding="utf-8")
    write_raster(folder / "varn.tif", varn_ground())
