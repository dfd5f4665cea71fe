"""The page as data: what it concludes, and that its numbers are those of the crossing."""

import subprocess
import sys
from dataclasses import fields, is_dataclass, replace

import numpy as np
import pytest

from orolift.constants import table
from orolift.report.causes import PARTS, main_cause
from orolift.report.quantities import Amount
from orolift.report.story import cloudy_to_the_end, ends_of, source_words, starts_saturated
from orolift.report.trace import trace
from orolift.report.words import plain


def amounts_in(thing):
    """Every amount anywhere inside a dataclass or tuple."""
    if isinstance(thing, Amount):
        return [thing]
    if is_dataclass(thing):
        return [found for field in fields(thing) for found in amounts_in(getattr(thing, field.name))]
    if isinstance(thing, tuple):
        return [found for item in thing for found in amounts_in(item)]
    return []


def text_of(words, units="metric"):
    return plain(words, units).replace("\u00a0", " ")


def all_text(several, units="metric"):
    return " ".join(text_of(words, units) for words in several)


def warmed(crossing, **changes):
    """The crossing with other values at its first site."""
    return replace(crossing, lee=(replace(crossing.lee[0], **changes), *crossing.lee[1:]))


# Briefing


def test_briefing_leads_with_the_flow_the_rain_and_the_lee(page_for, crossing):
    page = page_for(crossing)
    heading = text_of(page.briefing.heading)
    assert heading.startswith("The air flows over and ")
    assert "Lower Tarn has " in heading
    assert heading.endswith("warmer than the incoming air")
    first, lee, wind = (text_of(words) for words in page.briefing.sentences)
    assert f"N h/U is {crossing.flow.nondimensional_height:.2f}, so the flow " in first
    assert "may also " in first
    assert "No layer is stopped" in first
    assert "% of it before the crest" in first
    assert lee.startswith("At Lower Tarn (")
    assert "mainly by heat of condensation" in lee
    assert "at 10 m, gusts" in wind


def test_blocked_air_is_said_with_its_range(page_for, named):
    crossing = named("blocked")
    page = page_for(crossing)
    flow = crossing.flow
    assert text_of(page.briefing.heading).startswith("Low air is blocked up to 1000 m (100 to 1400); Lower Tarn has ")
    words = page.briefing.sentences[0]
    values = [amount.value for amount in amounts_in(words)]
    assert {flow.blocked_top, flow.blocked_top_low, flow.blocked_top_high, flow.going_round_share} <= set(values)
    assert "is stopped" in text_of(words)
    assert "(assumed)" in text_of(words)


def test_briefing_numbers_are_those_of_the_crossing(page_for, any_crossing):
    briefing = page_for(any_crossing).briefing
    values = {amount.value for amount in amounts_in(briefing)}
    site = trace(any_crossing).site or any_crossing.lee[0]
    wanted = [any_crossing.features.crest, any_crossing.flow.crest_wind, any_crossing.flow.nondimensional_height]
    wanted += [site.temperature, site.dew_point, site.relative_humidity]
    if site.source_level is not None and not site.in_blocked_air:
        wanted += [site.source_level, site.source_level_low, site.source_level_high]
    if site.wind is not None:
        wanted += [site.wind.at_10m, site.wind.gust_high]
    assert set(wanted) <= values


def test_temperature_carries_the_range_of_its_ends(page_for, named):
    """No blocking and full blocking, with the answer between: the design's range, in the same line."""
    site = named("blocked").lee[0]
    page = page_for(named("blocked"))
    number = page.briefing.key_numbers[0]
    low, high = (amount.value for amount in amounts_in(number.span))
    values = [site.temperature, site.no_blocking.temperature, site.full_blocking.temperature]
    assert (low, high) == (min(values), max(values))
    assert text_of((number.amount, *number.span)).count("°C") == 1
    warmest = max(values) + 1.0  # an answer beyond its ends still lies in its range
    beyond = page_for(warmed(named("blocked"), temperature=warmest)).briefing.key_numbers[0].span
    assert [amount.value for amount in amounts_in(beyond)] == [min(values[1:]), warmest]
    assert ends_of(site) == (site.no_blocking, site.full_blocking)
    assert not page_for(named("no cloud")).briefing.key_numbers[0].span


def test_ends_say_nothing_of_sites_that_the_air_does_not_reach(named):
    floor, mill, bench = named("cold pool").lee
    assert floor.in_pool
    assert ends_of(floor) is None
    assert ends_of(mill) is None
    assert ends_of(bench) is not None


def test_both_answers_lead_when_break_through_is_open(page_for, named):
    crossing = named("open at night")
    assert crossing.flow.breaks_through is None
    assert crossing.flow.break_through_chance < 0.8
    page = page_for(crossing)
    heading = text_of(page.briefing.heading)
    assert "if the air breaks through" in heading
    assert "if a cold pool stays" in heading
    site = crossing.lee[0]
    assert {site.temperature, site.upwind_temperature} <= {a.value for a in amounts_in(page.briefing.heading)}
    first = page.briefing.sentences[0]
    assert crossing.flow.break_through_chance in {a.value for a in amounts_in(first)}
    assert "incoming air at its height" in text_of(first)


def test_one_answer_leads_when_the_lee_is_known_or_the_chance_is_good(page_for, named):
    for name in ("blocked", "pool displaced", "cloud and rain"):
        assert "if the air breaks through" not in text_of(page_for(named(name)).briefing.heading)


def test_cold_pool_leads_the_page(page_for, named):
    crossing = named("cold pool")
    page = page_for(crossing)
    assert text_of(page.briefing.heading).startswith("A cold pool up to 1500 m keeps Lower Tarn at ")
    assert text_of(page.section_heading).startswith("The crossing air rides over cold air")
    assert "cold air stays" in all_text(page.briefing.sentences)
    assert "lies in the cold pool" in text_of(page.briefing.sentences[-1])
    assert page.sites.rows[0].remark == "in the cold pool"
    assert page.sites.rows[0].source == ()
    assert page.causes.rows[0].descent is None
    assert "cold air that stays" in text_of(page.causes.heading)


def test_main_site_is_the_first_in_the_lee(page_for, crossing):
    page = page_for(replace(crossing, lee=crossing.lee[::-1]))
    assert text_of(page.briefing.sentences[1]).startswith("At Lower Tarn (")
    assert "20 km beyond the crest" in text_of(page.briefing.sentences[1])


def test_blocked_site_is_said_to_keep_its_air(page_for, named):
    page = page_for(named("blocked site only"))
    assert "stays as it came" in all_text(page.briefing.sentences)
    assert "unchanged" in text_of(page.causes.heading)


def test_dry_air_is_said_to_stay_clear(page_for, any_crossing):
    page = page_for(any_crossing)
    clear = any_crossing.cloud.base is None
    assert ("no cloud and no rain" in all_text(page.briefing.sentences)) == clear
    cloud = next(number for number in page.briefing.key_numbers if number.name == "Cloud base")
    assert (cloud.amount is None) == (clear or starts_saturated(any_crossing))


def test_cloud_from_end_to_end_is_said_so(page_for, named):
    fog = named("all in cloud")
    assert starts_saturated(fog)
    assert cloudy_to_the_end(fog)
    page = page_for(fog)
    assert text_of(page.section_heading) == "Cloud covers the whole windward slope and all of the lee"
    assert "arrives already saturated" in all_text(page.briefing.sentences)
    assert "saturated at the upwind end" in all_text(page.cautions.here)


def test_snow_is_called_snow(page_for, named):
    assert "falls as snow" in all_text(page_for(named("snow")).briefing.sentences)
    assert "falls as rain or snow" in all_text(page_for(named("rain that drifts")).briefing.sentences)


# Causes


def test_cause_is_named_in_the_heading(page_for, named):
    """The largest part in the direction of the total explains it: descent without rain, condensation with it."""
    dry = named("pool displaced")
    site = dry.lee[0]
    assert main_cause(site)[0] == "descent"
    assert text_of(page_for(dry).causes.heading) == "Descent from aloft explains the warmth; rain plays no part"
    level = text_of(source_words(site))
    assert " to " in level
    whole = page_for(warmed(dry, went_round=0.0))
    assert text_of(whole.causes.heading) == f"Descent from {level} explains the warmth; rain plays no part"
    wet = page_for(named("cloud and rain"))
    assert text_of(wet.causes.heading).startswith(
        "Heat of condensation, kept because water fell out, explains the warmth"
    )


@pytest.mark.parametrize(
    ("parts", "heading"),
    [
        (
            {"descent": 3.0, "latent": 2.0},
            "Descent from 1260 m and heat of condensation, kept because water fell out explain",
        ),
        ({"surface_heating": 3.0}, "The sun on the ground explains the warmth; rain plays a small part"),
        ({"surface_heating": -3.0}, "The night explains the cold; rain plays a small part"),
        ({"going_round": -3.0}, "Low air that went round the range explains the cold"),
        ({"descent": 0.2, "latent": -0.1}, "Lower Tarn is about as warm as the air that came"),
        ({}, "Nothing makes Lower Tarn warmer or colder"),
    ],
)
def test_cause_heading_follows_the_parts(page_for, crossing, parts, heading):
    site = crossing.lee[0]
    none = dict.fromkeys(PARTS, 0.0)
    changed = replace(site.parts, **(none | parts))
    level = dict.fromkeys(("source_level", "source_level_low", "source_level_high"), 1260.0)
    crossing = warmed(crossing, parts=changed, temperature=site.upwind_temperature + sum(parts.values()), **level)
    assert text_of(page_for(crossing).causes.heading).startswith(heading)


def test_parts_add_up_to_the_total_shown(page_for, any_crossing):
    """The budget closes to 1e-6 K; the row holds the raw parts."""
    for row in page_for(any_crossing).causes.rows:
        site = any_crossing.lee[row.number - 1]
        assert row.total.value == site.warming
        if site.parts is None:
            assert row.latent is None
            continue
        assert sum(getattr(row, key).value for key in PARTS) == pytest.approx(row.total.value, abs=1e-6)


# Answers


def test_answers_hold_the_values_of_their_sites(page_for, any_crossing):
    for row in page_for(any_crossing).answers.rows:
        site = any_crossing.lee[row.number - 1]
        assert row.own.value == site.temperature
        assert (row.popular_picture is None) == (site.side == "windward")
        if row.popular_picture is not None:
            assert row.popular_picture.value == site.popular_picture
        if row.descent_only is not None:
            assert row.descent_only.value == site.descent_only
        if ends_of(site) is None:
            assert row.no_blocking is None
            assert row.full_blocking_dew_point is None
        else:
            assert row.no_blocking.value == site.no_blocking.temperature
            assert row.full_blocking.value == site.full_blocking.temperature
            assert row.no_blocking_dew_point.value == site.no_blocking.dew_point
            assert row.full_blocking_dew_point.value == site.full_blocking.dew_point


@pytest.mark.parametrize(
    ("changes", "reason"),
    [
        ({"popular_picture": -4.0}, "which does not get over here"),
        ({"popular_picture": 3.0}, "it lets every drop fall out"),
        ({"descent_only": 2.5}, "it leaves out low air that went round the range (−2.5 °C)"),
        ({}, "lie within 2 °C of this page"),
    ],
)
def test_differences_beyond_two_degrees_are_explained(page_for, named, changes, reason):
    site = named("blocked").lee[0]
    own = {"popular_picture": 0.0, "descent_only": 0.0} | changes
    values = {name: site.temperature + gap for name, gap in own.items()}
    parts = replace(site.parts, going_round=-2.5 if changes.get("descent_only") else -0.1)
    crossing = warmed(named("blocked"), parts=parts, **values)
    remarks = all_text(page_for(crossing).answers.remarks)
    assert reason in remarks


def test_popular_picture_is_said_to_be_more_or_less(page_for, named):
    site = named("blocked").lee[0]
    for gap, words in (
        (1.5, "1.5 °C more than this page"),
        (-1.5, "1.5 °C less than this page"),
        (0.0, "same temperature"),
    ):
        crossing = warmed(named("blocked"), popular_picture=site.temperature + gap)
        assert words in text_of(page_for(crossing).answers.heading)


def test_ends_are_named_in_words(page_for, named):
    remarks = all_text(page_for(named("blocked")).answers.remarks)
    assert "with no blocking" in remarks
    assert "with full blocking" in remarks
    assert "No layer is stopped" in all_text(page_for(named("no cloud")).answers.remarks)


# Wind


def test_wind_methods_are_named_with_their_sources(page_for, any_crossing):
    wind = page_for(any_crossing).lee_wind
    assert wind.methods[0].wind.value == any_crossing.winds.strongest
    for row, one in zip(wind.methods[1:], any_crossing.winds.estimates, strict=True):
        assert (row.method, row.wind.value, row.source) == (one.method, one.wind, one.source)
    assert any(a.value == any_crossing.settings.roughness for words in wind.remarks for a in amounts_in(words))


def test_every_condition_is_listed_and_counted(page_for, any_crossing):
    wind = page_for(any_crossing).lee_wind
    found = any_crossing.winds.conditions
    assert [(row.statement, row.source) for row in wind.conditions] == [(one.statement, one.source) for one in found]
    assert [row.holds for row in wind.conditions] == [
        {True: "yes", False: "no", None: "not known"}[c.met] for c in found
    ]
    names = ["no", "one", "two", "three", "four", "five", "six", "seven", "eight", "nine", "ten"]
    met = sum(one.met is True for one in found)
    assert f"; {names[met]} of {names[len(found)]} conditions for a windstorm" in text_of(wind.heading)


def test_conditions_may_be_unknown(page_for, crossing):
    unknown = tuple(replace(one, met=None) for one in crossing.winds.conditions)
    page = page_for(replace(crossing, winds=replace(crossing.winds, conditions=unknown)))
    assert {row.holds for row in page.lee_wind.conditions} == {"not known"}
    assert "no of ten conditions" in text_of(page.lee_wind.heading)


def test_the_lee_wind_has_the_ranges_and_chances_of_its_members(page_for, with_members):
    """Heading, methods, conditions and sites: shares counted by hand; the page without members has none of it."""
    crossing, spread = with_members
    wind = page_for(crossing, spread=spread).lee_wind
    low, high = np.quantile(spread.full_values["lee_wind"], (0.1, 0.9))
    shown = [amount.value for amount in amounts_in(wind.heading)]
    assert shown[1:3] == pytest.approx([min(low, crossing.winds.strongest), max(high, crossing.winds.strongest)])
    for row, one in zip(wind.methods[1:], crossing.winds.estimates, strict=True):
        given = spread.values[f"lee_wind_{one.key}"]
        assert row.applies.value == np.isfinite(given).mean()
        ends = [amount.value for amount in amounts_in(row.spans["wind"])]
        known = given[np.isfinite(given)]
        if ends and known.size >= 5:
            low, high = np.quantile(known, (0.1, 0.9))
            assert ends == pytest.approx([min(low, one.wind), max(high, one.wind)])
    for row, one in zip(wind.conditions, crossing.winds.conditions, strict=True):
        assert row.chance.value == pytest.approx(np.nanmean(spread.values[f"windstorm_{one.key}"]))
    assert all(row.spans["gusts"] for row in wind.sites if row.wind is not None)
    bare = page_for(crossing).lee_wind
    assert not bare.has_members
    assert all(row.chance is None for row in bare.conditions)
    assert all(row.applies is None for row in bare.methods)


def test_site_winds_are_those_of_the_sites(page_for, any_crossing):
    for row in page_for(any_crossing).lee_wind.sites:
        site = any_crossing.lee[row.number - 1]
        if site.wind is None:
            assert row.at_10m is None
            assert row.remark
        else:
            assert (row.wind.value, row.at_10m.value) == (site.wind.wind, site.wind.at_10m)
            for words, low, high in (
                (row.methods, site.wind.low, site.wind.high),
                (row.gusts, site.wind.gust_low, site.wind.gust_high),
            ):
                found = [amount.value for amount in amounts_in(words)]
                assert found == ([low] if round(low) == round(high) else [low, high])


# Sites, places, inputs


def test_air_that_is_cooler_than_it_came_is_said_to_be_cooler(page_for, crossing):
    site = crossing.lee[0]
    page = page_for(warmed(crossing, temperature=site.upwind_temperature - 2.0))
    assert (
        text_of(page.sites.heading) == "Lower Tarn is 2.0 °C (−2.0 to 2.0) cooler than the incoming air at its height"
    )
    assert "2.0 °C (−2.0 to 2.0) cooler than" in text_of(page.briefing.sentences[1])


def test_several_sites_share_one_heading(page_for, crossing):
    def heading(*changes):
        site = crossing.lee[0]
        lee = tuple(replace(site, name=f"S{n}", temperature=site.upwind_temperature + c) for n, c in enumerate(changes))
        return text_of(page_for(replace(crossing, lee=lee)).sites.heading)

    assert heading(1.0, 3.1) == "Two lee sites are 1.0 to 3.1 °C warmer than the incoming air at their height"
    assert heading(1.0, 3.1, -1.0) == (
        "Three lee sites are between 1.0 °C cooler and 3.1 °C warmer than the incoming air at their height"
    )


def test_rows_hold_the_values_of_their_sites(page_for, any_crossing):
    for row, air in zip(page_for(any_crossing).sites.rows, any_crossing.lee, strict=True):
        assert row.name == air.name
        assert row.temperature.value == air.temperature
        assert row.dew_point.value == air.dew_point
        assert row.relative_humidity.value == air.relative_humidity
        assert row.mixing_ratio.value == air.mixing_ratio
        assert row.upwind_temperature.value == air.upwind_temperature
        assert row.upwind_dew_point.value == air.upwind_dew_point
        assert row.warming.value == air.warming
        assert row.went_round.value == air.went_round
        if air.source_level is not None:
            assert row.source[0].value == air.source_level


def test_distances_are_in_the_users_own_numbers(page_for, crossing):
    shifted = replace(crossing, transect=replace(crossing.transect, origin=-25e3))
    page = page_for(shifted)
    assert page.sites.rows[0].distance.value == pytest.approx(20e3)
    assert page.journey.places[-1].distance.value == pytest.approx(20e3)
    assert page.section.drawing.distance_ticks[0].text == "−20"


def test_followed_air_ends_over_the_site(named, any_crossing):
    """Its last point is on the streamline in the middle of the mixed layer; its values are those of the streamlines."""
    followed = trace(any_crossing)
    site = followed.site
    place, ground = (any_crossing.features.lee_foot_distance, any_crossing.features.lee_foot)
    if site is not None:
        place, ground = site.distance, site.elevation
    assert followed.distance[-1] == pytest.approx(min(place, any_crossing.distance[-1]))
    lowest = np.interp(followed.distance[-1], any_crossing.distance, any_crossing.height[:, 0])
    assert followed.height[-1] == pytest.approx(max(ground + 50.0, lowest), abs=1.0)
    for k in (0, followed.height.size // 2):
        column = any_crossing.height[k]
        for name in ("temperature", "vapour", "pressure"):
            wanted = np.interp(followed.height[k], column, getattr(any_crossing.air, name)[k])
            assert getattr(followed, name)[k] == pytest.approx(wanted, rel=1e-6)


def test_places_follow_the_path(page_for, crossing):
    places = page_for(crossing).journey.places
    assert [place.name for place in places] == [
        "Start",
        "Cloud base",
        "Highest point",
        "End of cloud",
        "Over Lower Tarn",
    ]
    distances = [place.distance.value for place in places]
    assert distances == sorted(distances)
    fallen = [place.fallen.value for place in places]
    assert fallen[0] == 0.0
    assert fallen == sorted(fallen)
    assert fallen[-1] > 0.0


def test_places_hold_the_air_of_the_path_there(page_for, crossing):
    followed = trace(crossing)
    top = next(place for place in page_for(crossing).journey.places if place.name == "Highest point")
    assert top.height.value == followed.height[followed.top]
    assert top.temperature.value == followed.temperature[followed.top]
    assert top.dew_point.value == followed.dew_point[followed.top]
    assert top.pressure.value == followed.pressure[followed.top]
    assert top.vapour.value == followed.vapour[followed.top]
    assert top.cloud.value == followed.cloud[followed.top]
    assert top.entropy.value == followed.entropy[followed.top]


def test_water_balance_is_that_of_the_crossing(page_for, crossing):
    values = {amount.value for amount in amounts_in(page_for(crossing).journey.balance)}
    assert {crossing.water.vapour_in, crossing.water.condensed, crossing.water.removed} <= values


def test_flow_is_listed_with_its_numbers(page_for, named):
    crossing = named("blocked")
    groups = {group.name: group for group in page_for(crossing).inputs.groups}
    values = {amount.value for amount in amounts_in(groups["Flow"])}
    flow = crossing.flow
    assert {flow.stability, flow.nondimensional_height, flow.dividing_height, flow.blocked_top} <= values
    assert {flow.going_round_share, flow.rossby_number, flow.deformation_radius} <= values


# Cautions and method


def test_cautions_are_always_there(page_for, any_crossing):
    words = all_text(page_for(any_crossing).cautions.always)
    for wanted in (
        "not a warning",
        "warning services",
        "fire agencies",
        "local codes",
        "licensed practice",
        "no blocking to full blocking",
        "Not worked out",
    ):
        assert wanted in words
    assert "follow the terrain" not in words


def test_limits_of_this_case_are_named(page_for, crossing, named):
    def limits(changed, **more):
        return all_text(page_for(changed, **more).cautions.here)

    assert "weak" in limits(replace(crossing, flow=replace(crossing.flow, crest_wind=3.0)))
    assert "weak" not in limits(crossing)
    assert "no valid time" in limits(crossing, valid_time=None)
    assert "70 %" in limits(crossing)
    assert "70 %" not in limits(named("rain that drifts"))
    assert "oblique" in limits(replace(crossing, cautions=("The wind is oblique to the range.",)))
    assert "is assumed; the lowest pass" in limits(named("blocked"))
    assert "is assumed; the lowest pass" not in limits(crossing)
    assert "reaches the ground is open" in limits(named("open at night"))
    assert "reaches the ground is likely" in limits(named("blocked"))
    assert "reaches the ground" not in limits(named("cold pool"))


def test_every_constant_is_listed_with_its_source(page_for, crossing):
    rows = page_for(crossing).method.constants
    assert [(row.name, row.value, row.source) for row in rows] == [(n, float(v), v.source) for n, v in table()]
    assert all(float(row.digits) == pytest.approx(row.value, rel=1e-8) for row in rows)


def test_title_is_made_when_none_is_given(page_for, crossing):
    title = page_for(crossing, title=None).title.replace("\u00a0", " ")
    assert title.startswith("Air from the west over a crest at 18")


def test_page_data_needs_neither_jinja2_nor_contourpy():
    """Importing the page needs no template engine and no contours; a drawing alone does."""
    code = "import sys, orolift.report.page as p; print(sorted({'jinja2', 'contourpy'} & set(sys.modules)))"
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "[]"


def test_bar_of_a_panel_is_as_wide_as_the_parts_it_names(page_for, any_crossing):
    """Widths are in the ratio of the parts of the warming, those that cool on the left, and nothing overlaps."""
    by_number = {air.number: air for air in any_crossing.lee}
    for panel in page_for(any_crossing).sites.panels:
        air = by_number[panel.number]
        if air.parts is None or air.in_blocked_air:
            assert not panel.bar
            continue
        values = [value for value in vars(air.parts).values() if abs(value) >= 0.05]
        assert sum(part.kind == "cools" for part in panel.bar) == sum(value < 0.0 for value in values)
        if values:
            longest = max(abs(value) for value in values)
            widest = max(part.width for part in panel.bar)
            assert widest == pytest.approx(200.0 * longest / sum(map(abs, values)) - 1.0, abs=0.2)
        ends = [part.x + part.width for part in panel.bar]
        assert all(end <= part.x + 0.3 for end, part in zip(ends, panel.bar[1:], strict=False))
