"""Works out the four stories and writes docs/stories.md and its figures.

One invented ridge, four invented columns: weak or strong wind, dry or moist air. Every number in the text and in the
figures is taken from the crossings; the words are in docs/stories/words.txt. Run it when results have moved, and read
whether the words still say what happens (tests/project/test_stories.py checks the main claims):

    python docs/make_stories.py
"""

from __future__ import annotations

import sys
import textwrap
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.column_build import air_from_levels
from orolift.air.humidity import mixing_ratio_from_relative_humidity
from orolift.air.hydrostatic import hydrostatic_pressure
from orolift.crossing.crossing import cross
from orolift.crossing.result import Site
from orolift.crossing.settings import Settings
from orolift.sources.files import write_all
from orolift.terrain.ridge import ridge_transect

if TYPE_CHECKING:
    from orolift.air.column import IncomingAir
    from orolift.crossing.result import Crossing, LeeAir

HERE = Path(__file__).resolve().parent
WORDS = HERE / "stories" / "words.txt"
RIDGE = ([0.0, 40e3, 52e3, 65e3, 86e3, 110e3], [40.0, 40.0, 260.0, 1850.0, 330.0, 210.0])
SITE = Site("Lower Tarn", 95e3)
GROUND, LAYER, CREST = 40.0, 640.0, 1850.0  # [m]
WEAK, STRONG = (6.0, 12.0), (18.0, 30.0)  # wind at the ground and from the crest up [m/s]
DRY, MOIST = 0.35, 0.82  # relative humidity up to 3 km
PARTS = ("descent", "latent", "going_round", "mixing", "pressure")


@dataclass(frozen=True)
class Story:
    """One column and its crossing."""

    key: str
    alt: str
    crossing: Crossing

    @property
    def site(self) -> LeeAir:
        """The one site."""
        return self.crossing.lee[0]


def column(wind: tuple[float, float], humidity: float) -> IncomingAir:
    """Invented column: 10 degrees at the ground, little colder 600 m up, 6.5 K per km above."""
    z = np.array([GROUND, 340.0, LAYER, 1500.0, CREST, 3000.0, 5000.0, 7000.0, 9000.0, 11000.0, 12000.0])
    temperature = np.interp(z, [GROUND, LAYER], [283.15, 281.65]) - 0.0065 * np.maximum(z - LAYER, 0.0)
    pressure = hydrostatic_pressure(z, temperature, 101000.0)
    share = humidity * np.interp(z, [3000.0, 7000.0], [1.0, 0.4])
    vapour = mixing_ratio_from_relative_humidity(pressure, temperature, share)
    eastward = np.interp(z, [GROUND, CREST], wind)
    return air_from_levels(z, pressure, temperature, vapour, eastward, np.zeros_like(z))


def stories() -> list[Story]:
    """The four, worked out."""
    ridge = ridge_transect(*RIDGE)
    text = WORDS.read_text(encoding="utf-8")
    return [
        Story(key, alternative(text, key), cross(ridge, column(wind, humidity), (SITE,), Settings(removed_share=0.7)))
        for key, wind, humidity in (
            ("weak_dry", WEAK, DRY),
            ("weak_moist", WEAK, MOIST),
            ("strong_dry", STRONG, DRY),
            ("strong_moist", STRONG, MOIST),
        )
    ]


def alternative(text: str, key: str) -> str:
    """Alternative text of a figure, from the words."""
    return text.partition(f"](stories/{key}.svg)")[0].rpartition("![")[2]


def numbers(story: Story) -> dict[str, str]:
    """What the words of a story quote, rounded."""
    flow, site, water, winds = story.crossing.flow, story.site, story.crossing.water, story.crossing.winds
    parts = {name: f"{getattr(site.parts, name):+.1f}".replace("-0.0", "0.0").replace("+0.0", "0.0") for name in PARTS}
    base = story.crossing.cloud.base
    return {
        "nhu": f"{flow.nondimensional_height:.1f}",
        "regime": flow.regime,
        "top": f"{round(flow.blocked_top, -1):.0f}",
        "top_low": f"{round(flow.blocked_top_low, -1):.0f}",
        "top_high": f"{round(flow.blocked_top_high, -1):.0f}",
        "source": f"{round(site.source_level or 0.0, -1):.0f}",
        "low": f"{round(site.source_level_low or 0.0, -1):.0f}",
        "high": f"{round(site.source_level_high or 0.0, -1):.0f}",
        "round": f"{100.0 * site.went_round:.0f}",
        "temperature": f"{site.temperature - 273.15:.1f}",
        "dew_point": f"{site.dew_point - 273.15:.1f}".replace("-", "−"),
        "humidity": f"{100.0 * site.relative_humidity:.0f}",
        "warming": f"{site.warming:+.1f}",
        "popular": f"{site.popular_picture - 273.15:.1f}",
        "no_blocking": f"{site.no_blocking.temperature - 273.15:.1f}",
        "full_blocking": f"{site.full_blocking.temperature - 273.15:.1f}",
        "cloud": "none" if base is None else f"{round(base, -1):.0f}",
        "rain": f"{100.0 * water.removed / water.vapour_in:.0f}",
        "rain_column": f"{100.0 * water.removed / water.column_vapour_flux:.0f}",
        "wind": f"{site.wind.wind if site.wind else 0.0:.0f}",
        "strongest": f"{winds.strongest:.0f}",
        "wind_low": f"{winds.low:.0f}",
        "wind_high": f"{winds.high:.0f}",
        **{name: value.replace("-", "−") for name, value in parts.items()},
    }


def table(told: list[Story]) -> str:
    """The four side by side."""
    rows = (
        ("N h/U", "{nhu}"),
        ("regime", "{regime}"),
        ("blocked up to [m]", "{top} ({top_low} to {top_high})"),
        ("cloud base [m]", "{cloud}"),
        ("vapour rained out [%]", "{rain}"),
        ("source level [m]", "{source} ({low} to {high})"),
        ("went round [%]", "{round}"),
        ("descent [K]", "{descent}"),
        ("latent [K]", "{latent}"),
        ("going round [K]", "{going_round}"),
        ("pressure [K]", "{pressure}"),
        ("warming [K]", "{warming}"),
        ("temperature, dew point [°C]", "{temperature}, {dew_point}"),
        ("popular picture [°C]", "{popular}"),
        ("wind at the site [m/s]", "{wind}"),
        ("strongest in the lee [m/s]", "{strongest} ({wind_low} to {wind_high})"),
    )
    found = [numbers(story) for story in told]
    head = ["", *(story.key.replace("_", " and ") for story in told)]
    lines = [head, ["---"] * len(head)] + [[name, *(cell.format(**one) for one in found)] for name, cell in rows]
    return "".join("| " + " | ".join(line) + " |\n" for line in lines)


def page(told: list[Story]) -> str:
    """Text of docs/stories.md."""
    found = {story.key: numbers(story) for story in told}
    winds = {"weak": WEAK, "strong": STRONG}
    speeds = {name: f"{low:.0f} m/s at the ground and {high:.0f} m/s" for name, (low, high) in winds.items()}
    humidity = {"dry": f"{100.0 * DRY:.0f}", "moist": f"{100.0 * MOIST:.0f}"}
    text = WORDS.read_text(encoding="utf-8").format(table=table(told).strip(), **speeds, **humidity, **found)
    return "\n\n".join(wrapped(part) for part in text.strip().split("\n\n")) + "\n"


def wrapped(text: str, width: int = 118) -> str:
    """A paragraph or a list in lines of a width; tables stay as they are."""
    if text.startswith("|"):
        return text
    items = [line if line.startswith("- ") else f" {line}" for line in text.splitlines()]
    joined = "".join(f"\n{item}" if item.startswith("- ") else item for item in items).strip()
    return "\n".join(
        textwrap.fill(
            item,
            width,
            subsequent_indent="  " if item.startswith("- ") else "",
            break_long_words=False,
            break_on_hyphens=False,
        )
        for item in joined.splitlines()
    )


# The figure: a section 0 to 110 km and 0 to 4.5 km on the left, the budget on the right.
LEFT, TOP, WIDE, HIGH = 66.0, 14.0, 500.0, 190.0
BUDGET_LEFT, BUDGET_WIDE, LARGEST = 720.0, 120.0, 5.0
HIGHEST, FARTHEST = 4500.0, 110e3


def points(x: np.ndarray, z: np.ndarray) -> str:
    """Places and heights in the units of the drawing."""
    across = LEFT + WIDE * np.asarray(x) / FARTHEST
    up = TOP + HIGH * (1.0 - np.clip(np.asarray(z), 0.0, HIGHEST) / HIGHEST)
    return " ".join(f"{a:.1f},{b:.1f}" for a, b in zip(across, up, strict=True))


def drawing(story: Story) -> str:
    """Section and budget as SVG."""
    out = [
        f'<svg xmlns="http://www.w3.org/2000/svg" viewBox="0 0 830 240" role="img" aria-label="{story.alt}">',
        '<defs><pattern id="blocked" width="7" height="7" patternUnits="userSpaceOnUse" patternTransform="rotate(45)">',
        '<line x1="0" y1="0" x2="0" y2="7" stroke="#8a6d3b" stroke-width="2"/></pattern>',
        f'<clipPath id="frame"><rect x="{LEFT}" y="{TOP}" width="{WIDE}" height="{HIGH}"/></clipPath></defs>',
        '<rect width="830" height="240" fill="#fff"/>',
        '<g clip-path="url(#frame)">',
        *clouds(story.crossing),
        *lines(story.crossing),
        *ground(story.crossing),
        "</g>",
        '<g font-family="sans-serif" font-size="12" fill="#222">',
        *axes(),
        *source(story),
        *budget(story),
        "</g>",
        "</svg>",
    ]
    return "\n".join(out) + "\n"


def clouds(crossing: Crossing) -> list[str]:
    """A grey body between neighbouring streamlines wherever the lower one has cloud."""
    wet = (crossing.air.cloud + crossing.air.condensed) > 0.0
    out = []
    for k in range(wet.shape[1] - 1):
        edges = np.flatnonzero(np.diff(np.concatenate([[0], wet[:, k].astype(int), [0]])))
        for first, last in zip(edges[::2], edges[1::2], strict=True):
            way = np.unique(np.append(np.arange(first, last, 4), last - 1))
            if crossing.height[way, k].min() > HIGHEST or way.size < 2:
                continue
            x = crossing.distance[way]
            outline = f"{points(x, crossing.height[way, k])} {points(x[::-1], crossing.height[way[::-1], k + 1])}"
            out.append(f'<polygon points="{outline}" fill="#c3c9cf" stroke="#c3c9cf"/>')
    return out


def lines(crossing: Crossing) -> list[str]:
    """Streamlines about 300 m apart upwind."""
    wanted = np.arange(crossing.start_height[0], HIGHEST + 500.0, 300.0)
    chosen = np.unique([int(np.argmin(np.abs(crossing.start_height - z))) for z in wanted])
    way = slice(None, None, 4)
    return [
        f'<polyline points="{points(crossing.distance[way], crossing.height[way, k])}" fill="none" stroke="#2f6690" '
        'stroke-width="1.2"/>'
        for k in chosen
    ]


def ground(crossing: Crossing) -> list[str]:
    """Blocked air before the crest, and the ground."""
    x, z = crossing.transect.distance, crossing.transect.elevation
    out = []
    top = crossing.flow.blocked_top
    before = (x <= crossing.features.crest_distance) & (z < top)
    if top > crossing.features.base + 1.0 and before.any():
        to = x[before]
        outline = f"{points(to, z[before])} {points(to[[-1, 0]], np.array([top, top]))}"
        out.append(f'<polygon points="{outline}" fill="url(#blocked)"/>')
    way = slice(None, None, 4)
    outline = f"{points(x[way], z[way])} {points(x[[-1, 0]], np.zeros(2))}"
    return [*out, f'<polygon points="{outline}" fill="#4d4a45"/>']


def axes() -> list[str]:
    """Heights, distances, and the site."""
    out = [f'<rect x="{LEFT}" y="{TOP}" width="{WIDE}" height="{HIGH}" fill="none" stroke="#888"/>']
    for z in range(0, 5000, 1000):
        y = TOP + HIGH * (1.0 - z / HIGHEST)
        out.append(f'<text x="{LEFT - 20}" y="{y + 4:.1f}" text-anchor="end">{z} m</text>')
    for km in range(0, 111, 20):
        x = LEFT + WIDE * km * 1e3 / FARTHEST
        out.append(f'<text x="{x:.1f}" y="{TOP + HIGH + 16}" text-anchor="middle">{km} km</text>')
    at = LEFT + WIDE * SITE.distance / FARTHEST
    y = TOP + HIGH * (1.0 - 330.0 / HIGHEST)
    out.append(f'<path d="M{at:.1f} {y:.1f} l-5 -12 h10 z" fill="#111"/>')
    out.append(f'<text x="{at:.1f}" y="{y - 16:.1f}" text-anchor="middle">{SITE.name}</text>')
    return out


def source(story: Story) -> list[str]:
    """Bar of the source level at the upwind edge."""
    site = story.site
    low, middle, high = (
        TOP + HIGH * (1.0 - float(z or 0.0) / HIGHEST)
        for z in (site.source_level_low, site.source_level, site.source_level_high)
    )
    x = LEFT - 8.0
    return [
        f'<line x1="{x}" y1="{low:.1f}" x2="{x}" y2="{high:.1f}" stroke="#111" stroke-width="3"/>',
        f'<circle cx="{x}" cy="{middle:.1f}" r="4.5" fill="#111"/>',
    ]


def budget(story: Story) -> list[str]:
    """Bars of the warming budget."""
    found = numbers(story)
    rows = [(name.replace("_", " "), getattr(story.site.parts, name), found[name]) for name in PARTS]
    rows.append(("in all", story.site.warming, found["warming"]))
    out = [f'<text x="{BUDGET_LEFT}" y="{TOP + 10}" text-anchor="middle">warming [K]</text>']
    for i, (name, value, text) in enumerate(rows):
        y = TOP + 22.0 + 28.0 * i
        wide = BUDGET_WIDE / 2.0 * float(np.clip(value / LARGEST, -1.0, 1.0))
        left, colour = min(BUDGET_LEFT, BUDGET_LEFT + wide), "#111" if name == "in all" else "#6b7f94"
        end, anchor = (BUDGET_LEFT + wide - 6.0, "end") if value < -0.05 else (BUDGET_LEFT + wide + 6.0, "start")
        out += [
            f'<text x="{BUDGET_LEFT - 54}" y="{y + 14:.1f}" text-anchor="end">{name}</text>',
            f'<rect x="{left:.1f}" y="{y:.1f}" width="{abs(wide):.1f}" height="18" fill="{colour}"/>',
            f'<text x="{end:.1f}" y="{y + 14:.1f}" text-anchor="{anchor}">{text}</text>',
        ]
    out.append(
        f'<line x1="{BUDGET_LEFT}" y1="{TOP + 18}" x2="{BUDGET_LEFT}" y2="{TOP + 190}" stroke="#888" stroke-width="1"/>'
    )
    return out


def main() -> None:
    """Write the page and its figures."""
    told = stories()
    files = {HERE / "stories.md": page(told).encode()}
    files |= {HERE / "stories" / f"{story.key}.svg": drawing(story).encode() for story in told}
    write_all(files)
    sys.stdout.write(f"Written: {', '.join(str(file.relative_to(HERE.parent)) for file in files)}\n")


if __name__ == "__main__":
    main()
