"""Every number of the page carries its range, or is listed here with the reason why it has none."""

from dataclasses import fields, is_dataclass

import numpy as np
import pytest

from orolift.crossing.rainfall import BANDS
from orolift.crossing.result import When
from orolift.fire.chances import with_members as fire_of_members
from orolift.fire.sites import FireSettings, fire_at_sites
from orolift.report.quantities import Amount, bare
from orolift.report.rain import band_step
from orolift.spread.at_sites import members_at

OTHER = {"reading"}
"""Parts of the page in the small print: the section in numbers."""
ANSWER_ITSELF = {
    "journey.places": "one path of the answer, said in its caption",
    "inputs.levels": "the incoming air as it was given",
    "method.constants": "constants",
    "how_sure.chances": "chances",
    "how_sure.inputs": "standard deviations themselves",
    "lee_wind.doubt": "a chance",
    "lee_wind.methods.applies": "chances",
    "lee_wind.conditions.chance": "chances",
    "fire.thresholds": "limits, what is missing to them, and chances; values have ranges of their own",
    "fire.nights.mid_slope_height": "height of the ground",
    "fire.nights.ridge_height": "height of the ground",
    "fire.night_remark": "length of the night",
    "rain.rows.lower": "height of the ground",
    "rain.rows.upper": "height of the ground",
    "sites.rows.distance": "where a site lies",
    "sites.rows.elevation": "where a site lies",
    "answers.rows.no_blocking": "an end of a range",
    "answers.rows.full_blocking": "an end of a range",
    "answers.rows.no_blocking_dew_point": "an end of a range",
    "answers.rows.full_blocking_dew_point": "an end of a range",
}
"""Parts of the page whose numbers have no range, and why."""


def places_of(thing, path=""):
    """Words and single amounts anywhere in a page, each with its path and the row it stands in."""
    for field in fields(thing):
        here = f"{path}.{field.name}".lstrip(".")
        if here in OTHER or any(here.startswith(one) for one in ANSWER_ITSELF) or field.name == "spans":
            continue
        yield from _inside(getattr(thing, field.name), here, thing)


def _inside(value, path, row):
    if isinstance(value, Amount):
        yield path, (value,), row
    elif is_dataclass(value):
        yield from places_of(value, path)
    elif isinstance(value, tuple):
        if any(isinstance(part, Amount) for part in value):
            yield path, value, row
        else:
            for part in value:
                yield from _inside(part, path, row)


def bare_in(words, row, name):
    """Amounts of some words without a range: none behind them, nor in a line below, nor themselves an end of one."""
    if getattr(row, "spans", {}).get(name) or (name == "amount" and getattr(row, "span", ())):
        return []
    out = []
    for i, part in enumerate(words):
        if not isinstance(part, Amount):
            continue
        after = words[i + 1 : i + 4]
        before = words[max(i - 2, 0) : i]
        ranged = len(after) == 3 and isinstance(after[1], Amount) and after[0] in (" (", ", ") and after[2] == " to "
        end = after[:1] == (" to ",) or before[-1:] == (" to ",)
        beside = part.kind == "knots" or (after[:1] and str(after[0]).startswith(" (eight tenths of it from "))
        if not (ranged or end or beside):
            out.append(part)
    return out


def ground_and_case(crossing):
    """Values of terrain, sites and settings: they have no range."""
    shape, line, settings = crossing.features, crossing.transect, crossing.settings
    lengths = [shape.base, shape.crest, shape.lee_foot, shape.half_width]
    lengths += [shape.base_distance, shape.crest_distance, shape.lee_foot_distance, float(line.distance[-1])]
    lengths += [float(crossing.incoming.height[0]), 500.0, *BANDS, band_step("metric")]
    lengths += [site.elevation for site in crossing.lee]
    lengths += [abs(site.distance - shape.crest_distance) for site in crossing.lee]
    set_to = [settings.critical_value, settings.cloud_time, settings.fall_time, settings.mixing_depth]
    set_to += [settings.inflow_depth, settings.roughness, 273.15, 253.15]
    return {float(value) for value in (*lengths, *set_to)}


def beyond_members(crossing):
    """A chance is no number with a range; trapped waves are looked for in the column of the answer alone, as it says."""
    return {crossing.flow.break_through_chance, crossing.flow.trapped_wavelength}


def fire_with_members(crossing, spread):
    """Fire weather of the sites, with all that may be given."""
    settings = FireSettings(previous_code=85.0, drought_index=300.0)
    roughness = float(np.asarray(crossing.settings.roughness))
    return tuple(
        fire_of_members(site, members_at(spread, crossing, air), settings, roughness)
        for site, air in zip(fire_at_sites(crossing, When(), settings), crossing.lee, strict=True)
    )


def test_every_number_carries_its_range(with_members, page_for):
    """In sentences, headings, key numbers, panels and tables; zeroes and dew may have a range that reads alike."""
    crossing, spread = with_members
    page = page_for(crossing, spread=spread, fire=fire_with_members(crossing, spread), fresh=True)
    known = ground_and_case(crossing) | beyond_members(crossing)
    found = []
    for path, words, row in places_of(page):
        for amount in bare_in(words, row, path.rpartition(".")[2]):
            direction = amount.kind == "bearing"
            nothing = not set(bare(amount, "metric")) - set("0. ()")
            dew = amount.kind == "share" and amount.value == 1.0
            if not (direction or nothing or dew or amount.value in known):
                found.append((path, amount.kind, amount.value))
    assert found == []


@pytest.mark.parametrize("words", [("a ", Amount(1.0, "height"), " high"), (Amount(1.0, "height"), " (of ", "it)")])
def test_a_bare_number_is_seen(words):
    """The check above finds what it looks for."""
    assert bare_in(words, None, "heading") == [Amount(1.0, "height")]
