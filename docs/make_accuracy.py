"""Works out every real pair of soundings and writes docs/accuracy.md: `python docs/make_accuracy.py`, some minutes."""

from __future__ import annotations

import csv
import math
import sys
from concurrent.futures import ProcessPoolExecutor
from datetime import datetime
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.column_build import air_from_levels, air_from_station
from orolift.air.humidity import mixing_ratio_from_dew_point_checked, mixing_ratio_from_relative_humidity
from orolift.crossing.crossing import cross
from orolift.crossing.model_error import model_error
from orolift.crossing.result import Site, When
from orolift.sources.sounding_csv import read_sounding
from orolift.terrain.ridge import ridge_transect

if TYPE_CHECKING:
    from orolift.crossing.result import Crossing

ROOT = Path(__file__).parents[1]
DATA = ROOT / "tests" / "data" / "real_crossings"
PAGE = ROOT / "docs" / "accuracy.md"
INDEX = {row["pair"]: row for row in csv.DictReader((DATA / "index.csv").read_text().splitlines())}
LAYERS = {"50 to 500 m": ("layer_50_500m", 50.0, 500.0), "0 to 1500 m": ("layer_0_1500m", 0.0, 1500.0)}
LOW, DEEP = LAYERS
SIMPLE = {
    "i": "unchanged air",
    "ii": "surface air lifted, all rain out",
    "iii": "crest air brought down dry",
    "iv": "air of the dividing height lifted",
}
GROUPS = {
    "all": bool,
    "without cold pools": lambda row: row["cold_pool"] == "0",
    "flow through the lee": lambda row: row["through_flow"] == "1",
    "day, 9 to 18 h": lambda row: 9.0 <= float(row["local_solar_hour_lee"]) < 18.0,
    "evening and night": lambda row: not 9.0 <= float(row["local_solar_hour_lee"]) < 18.0,
}
BOOTSTRAPS, SEED, TENTH = 2000, 1, 1.2816


def bearing(start: tuple[float, float], end: tuple[float, float]) -> float:
    """Initial bearing of the great circle between two (latitude, longitude) [rad]."""
    (la1, lo1), (la2, lo2) = (tuple(map(math.radians, point)) for point in (start, end))
    east = math.sin(lo2 - lo1) * math.cos(la2)
    return math.atan2(east, math.cos(la1) * math.sin(la2) - math.sin(la1) * math.cos(la2) * math.cos(lo2 - lo1))


def worked(pair: str, streamlines: int = 60) -> Crossing:
    """Crossing of a pair: from the upwind station to 60 km beyond the lee one, at its time, one setting for all."""
    sounding, row = read_sounding(DATA / pair / "upwind.csv"), INDEX[pair]
    vapour, _ = mixing_ratio_from_dew_point_checked(sounding.pressure, sounding.temperature, sounding.dew_point)
    winds = sounding.eastward_wind, sounding.northward_wind
    air = air_from_levels(sounding.height, sounding.pressure, sounding.temperature, vapour, *winds)
    rows = list(csv.DictReader((DATA / pair / "transect.csv").read_text().splitlines()))
    x, z, latitude, longitude = (
        np.array([float(point[key]) for point in rows])
        for key in ("distance_km", "elevation_m", "latitude_deg", "longitude_deg")
    )
    length = float(row["distance_km"])
    first, last, end = (int(np.argmin(np.abs(x - place))) for place in (0.0, length, length + 60.0))
    toward = bearing((latitude[first], longitude[first]), (latitude[last], longitude[last]))
    line = ridge_transect(x[first : end + 1] * 1e3, z[first : end + 1], bearing=toward % (2 * math.pi))
    site = Site("lee", length * 1e3 - line.origin, float(row["lee_elevation_m"]))
    time = datetime.fromisoformat(row["time_utc"]).timestamp()
    when = When(time, float(longitude[last]), float(latitude[last]))
    return cross(line, air, (site,), when=when, streamlines=streamlines)


def layer_means(pair: str) -> dict[str, tuple[float, float, float]]:
    """Mean lee temperature [degC], mixing ratio [g/kg] and warming by the ground [K] of a pair, by layer."""
    profile = worked(pair).lee[0].profile
    out = {}
    for name, (_, low, high) in LAYERS.items():
        grid = np.arange(low, high + 1.0, 25.0)
        warming = np.zeros_like(profile.temperature) if profile.warming is None else profile.warming
        t, v, change = (
            float(np.mean(np.interp(grid, profile.height_above_ground, values)))
            for values in (profile.temperature - 273.15, profile.vapour * 1e3, warming)
        )
        out[name] = (t, v, change)
    return out


def errors(found: dict) -> dict[tuple[str, str], np.ndarray]:
    """Errors (pairs, 2) of temperature [K] and mixing ratio [g/kg], by layer and estimator."""
    rows = {
        (row["pair"], row["layer"]): row
        for row in csv.DictReader((DATA / "baseline_predictions.csv").read_text().splitlines())
    }
    out = {}
    for name, (key, _, _) in LAYERS.items():
        seen, simple = [], {kind: [] for kind in SIMPLE}
        for pair in INDEX:
            row = rows[pair, key]
            seen.append((float(row["observed_temperature_c"]), float(row["observed_mixing_ratio_g_kg"])))
            for kind, values in simple.items():
                values.append((float(row[f"{kind}_temperature_c"]), float(row[f"{kind}_mixing_ratio_g_kg"])))
        observed = np.array(seen)
        ours = np.array([found[pair][name] for pair in INDEX])
        out[name, "orolift"] = ours[:, :2] - observed
        for kind, values in simple.items():
            out[name, kind] = np.array(values) - observed
            out[name, kind + "+"] = out[name, kind] + np.stack([ours[:, 2], np.zeros(len(INDEX))], axis=-1)
    return out


def chosen(group: str) -> np.ndarray:
    """Which pairs belong to a group."""
    return np.array([GROUPS[group](row) for row in INDEX.values()])


def letters() -> np.ndarray:
    """Letter of the range of each pair."""
    return np.array([row["range"].split()[-1] for row in INDEX.values()])


def number(value: float, digits: int) -> str:
    """A number with a real minus sign."""
    return f"{value:+.{digits}f}".replace("-", "−")


def scores(error: np.ndarray) -> str:
    """Bias, mean absolute and root mean square error of both quantities as cells of a table."""
    cells = []
    for column, digits in ((0, 2), (1, 2)):
        e = error[:, column]
        cells += [number(e.mean(), digits), f"{np.abs(e).mean():.{digits}f}", f"{np.sqrt(np.mean(e**2)):.{digits}f}"]
    return " | ".join(cells)


def score_table(error: dict, layer: str) -> list[str]:
    """One table of scores for a layer."""
    out = [
        "| pairs | n | estimate | T bias | T mean abs. | T rms | w bias | w mean abs. | w rms |",
        "|---|---|---|---|---|---|---|---|---|",
    ]
    names = {"orolift": "**orolift**"}
    for kind, name in SIMPLE.items():
        names |= {kind: name, kind + "+": name + ", with the warming by the ground"}
    for group in GROUPS:
        part = chosen(group)
        out += [
            f"| {group} | {part.sum()} | {name} | {scores(error[layer, kind][part])} |" for kind, name in names.items()
        ]
    return out


def range_table(error: dict) -> list[str]:
    """Mean absolute errors by range beside the best and the worst simple estimate."""
    out = [
        "| range | n | orolift T, w | simple ones, T | simple ones, w |",
        "|---|---|---|---|---|",
    ]
    letter = letters()
    for one in sorted(set(letter)):
        part = letter == one
        ours = np.abs(error[LOW, "orolift"][part]).mean(axis=0)
        others = np.array([np.abs(error[LOW, kind][part]).mean(axis=0) for kind in SIMPLE])
        low, high = others.min(axis=0), others.max(axis=0)
        out.append(
            f"| {one} | {part.sum()} | {ours[0]:.1f} K, {ours[1]:.2f} g/kg | {low[0]:.1f} to {high[0]:.1f} K "
            f"| {low[1]:.2f} to {high[1]:.2f} g/kg |"
        )
    return out


def pair_table(error: dict) -> list[str]:
    """Errors of every pair."""
    out = [
        "| pair | range | km | hour | T, 50 to 500 m | w | T, 0 to 1500 m | w |",
        "|---|---|---|---|---|---|---|---|",
    ]
    both = np.concatenate([error[LOW, "orolift"], error[DEEP, "orolift"]], axis=-1)
    for row, values in zip(INDEX.values(), both, strict=True):
        t, w, deep_t, deep_w = (number(value, 2) for value in values)
        name, letter = row["pair"].split("_")[1], row["range"].split()[-1]
        out.append(
            f"| {name} | {letter} | {row['distance_km']} | {row['local_solar_hour_lee']} | {t} | {w} "
            f"| {deep_t} | {deep_w} |"
        )
    return out


def bootstrap(error: dict, group: str) -> list[str]:
    """Mean absolute error with its 5 to 95 % interval, ranges drawn anew, and the same of the difference to others."""
    generator, letter, part = np.random.default_rng(SEED), letters(), chosen(group)
    kinds = ("orolift", "ii", "ii+", "iv+", "i")
    absolute = {kind: np.abs(error[LOW, kind]) for kind in kinds}
    names = np.unique(letter[part])
    rows = {name: np.flatnonzero(part & (letter == name)) for name in names}
    draws = [np.concatenate([rows[n] for n in generator.choice(names, names.size)]) for _ in range(BOOTSTRAPS)]
    ours = np.array([absolute["orolift"][draw].mean(axis=0) for draw in draws])
    out = []
    for kind in kinds:
        other = np.array([absolute[kind][draw].mean(axis=0) for draw in draws])
        values = ours if kind == "orolift" else ours - other
        low, high = np.quantile(values, (0.05, 0.95), axis=0)
        label = "orolift" if kind == "orolift" else f"orolift minus {SIMPLE[kind.rstrip('+')]}"
        label += ", both with the ground" if kind.endswith("+") else ""
        ranges = [f"{number(a, 2)} to {number(b, 2)}" for a, b in zip(low, high, strict=True)]
        out.append(f"| {group} | {label} | {ranges[0]} K | {ranges[1]} g/kg |")
    return out


def growth(error: np.ndarray, distance: np.ndarray, near: float) -> float:
    """Growth per metre of a standard deviation, from `near`, with which 80 % of the errors are within 1.28 of it."""
    need = np.sqrt(np.maximum((np.abs(error) / TENTH) ** 2 - near**2, 0.0)) / distance
    return float(np.quantile(need, 0.8))


def coverage(error: np.ndarray) -> dict[str, tuple[float, float, float, float]]:
    """Refined growth, its range over left-out ranges, and coverage of ranges left out; temperature and vapour."""
    distance = np.array([1e3 * float(row["distance_km"]) for row in INDEX.values()])
    letter, out = letters(), {}
    for column, name, near in ((0, "temperature", 1.5), (1, "vapour", 0.6)):
        inside, rates = np.zeros(letter.size, bool), []
        for one in np.unique(letter):
            left = letter == one
            rate = growth(error[~left, column], distance[~left], near)
            rates.append(rate * 1e5)
            inside[left] = np.abs(error[left, column]) <= TENTH * np.hypot(near, rate * distance[left])
        sigma = model_error(distance)[column] * (1.0 if column == 0 else 1e3)
        whole = float(np.mean(np.abs(error[:, column]) <= TENTH * sigma))
        out[name] = (
            growth(error[:, column], distance, near) * 1e5,
            float(np.mean(inside)),
            whole,
            float(np.ptp(rates)),
        )
    return out


def over(height: float, width: float, wind: float, celsius: float, humidity: float = 0.95) -> Crossing:
    """Crossing of a Gaussian ridge by air of 6.5 K per km with one humidity and one wind."""
    x = np.linspace(0.0, 12.0 * width, 600)
    line = ridge_transect(x, height * np.exp(-(((x - 6.0 * width) / width) ** 2)), bearing=math.pi / 2)
    vapour = float(mixing_ratio_from_relative_humidity(1.0e5, celsius + 273.15, humidity))
    return cross(line, air_from_station(10.0, 1.0e5, celsius + 273.15, vapour, wind, 1.5 * math.pi))


def rain_figures() -> dict[str, str]:
    """What plain ridges give, for the table of rain."""

    def ratio(done: Crossing) -> float:
        return done.water.removed / done.water.column_vapour_flux

    sierra = [ratio(over(2300.0, 60e3, 20.0, 10.0, humidity)) for humidity in (0.85, 0.95, 1.0)]
    warm = {celsius: over(1800.0, 20e3, 18.0, celsius) for celsius in (0.0, 20.0)}
    slope = math.log(ratio(warm[20.0]) / ratio(warm[0.0])) / 20.0
    lee = [1.0 - over(1800.0, 30e3, 18.0, celsius).rain.windward_share for celsius in (0.0, 5.0, 10.0, 15.0)]
    return {
        "sierra": f"{min(sierra):.2f} to {max(sierra):.2f}",
        "island": f"{ratio(over(900.0, 8e3, 8.0, 25.0)):.3f}",
        "slope": number(100.0 * slope, 0),
        "lee": f"{min(lee):.2f} to {max(lee):.2f}",
    }


def page(error: dict, rain: dict[str, str]) -> str:
    """The page."""
    template = (ROOT / "docs" / "accuracy_template.md").read_text(encoding="utf-8")
    spread = coverage(error[LOW, "orolift"])
    all_, through = chosen("all"), chosen("flow through the lee")
    low, deep = error[LOW, "orolift"], error[DEEP, "orolift"]
    values = {
        f"{name}_{key}": f"{np.abs(e[part]).mean(axis=0)[column]:.2f}"
        for name, e, part in (("all", low, all_), ("through", low, through), ("deep", deep, through))
        for key, column in (("t", 0), ("w", 1))
    }
    for name, (rate, out_of_range, whole, varies) in spread.items():
        values |= {
            f"{name}_rate": f"{rate:.2f}",
            f"{name}_out": f"{100.0 * out_of_range:.0f}",
            f"{name}_in": f"{100.0 * whole:.0f}",
            f"{name}_varies": f"{varies:.2f}",
        }
    values |= {
        "low_table": "\n".join(score_table(error, LOW)),
        "deep_table": "\n".join(score_table(error, DEEP)),
        "pair_table": "\n".join(pair_table(error)),
        "range_table": "\n".join(range_table(error)),
        "bootstrap_table": "\n".join(bootstrap(error, "all") + bootstrap(error, "flow through the lee")),
    }
    for key, text in (values | rain).items():
        template = template.replace("{" + key + "}", text)
    return template


def main() -> int:
    """Work out all pairs on two cores and write the page."""
    with ProcessPoolExecutor(2) as pool:
        found = dict(zip(INDEX, pool.map(layer_means, INDEX), strict=True))
    PAGE.write_text(page(errors(found), rain_figures()), encoding="utf-8")
    return 0


if __name__ == "__main__":
    sys.exit(main())
