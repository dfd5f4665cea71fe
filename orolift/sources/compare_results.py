"""A comparison as a results file and as a table: SI-suffixed names, unrounded numbers, null where nothing is known."""

from __future__ import annotations

import math
import platform
from datetime import UTC, datetime
from importlib import metadata
from typing import TYPE_CHECKING, NamedTuple

import numpy as np

from orolift import __version__
from orolift.sources.compare_blocks import (
    CompareResults,
    ContingencyBlock,
    EventBlock,
    ExplanationBlock,
    LayerBlock,
    OnsetBlock,
    ProfileBlock,
    QuantityBlock,
    ReferenceBlock,
    RuleBlock,
    ScoreBlock,
    SpellBlock,
    UpwindErrorBlock,
    ValleyBlock,
    ValueBlock,
    WayBlock,
)
from orolift.sources.results import LIBRARIES, Program, celsius
from orolift.sources.units import UNITS
from orolift.spread.comparison import averaged
from orolift.spread.estimates import QUANTITIES, REFERENCES

if TYPE_CHECKING:
    from collections.abc import Iterator, Sequence

    from orolift.crossing.explain import Way
    from orolift.crossing.onset import Spell
    from orolift.spread.compared import Compared
    from orolift.spread.comparison import Paired, Verdict
    from orolift.spread.estimates import Quantity
    from orolift.spread.explained import Explained
    from orolift.spread.onset_series import OnsetAtPlace
    from orolift.spread.verification import Contingency, Score

SCHEMA_VERSION = "1"
MOST_LISTED = 10_000
"""Pairs of a quantity beyond which observations near one estimate are listed as their mean."""


class Output(NamedTuple):
    """How a quantity is written: value in SI x factor + offset."""

    key: str
    factor: float
    offset: float


OUTPUTS: dict[Quantity, Output] = {
    "temperature": Output("temperature_c", 1.0, -UNITS["c"].offset),
    "dew_point": Output("dew_point_c", 1.0, -UNITS["c"].offset),
    "mixing_ratio": Output("mixing_ratio_g_kg", 1000.0, 0.0),
    "relative_humidity": Output("relative_humidity_percent", 100.0, 0.0),
    "wind": Output("wind_10m_ms", 1.0, 0.0),
    "gust": Output("gust_ms", 1.0, 0.0),
    "pressure": Output("pressure_hpa", 0.01, 0.0),
    "rain_rate": Output("rain_rate_mm_per_h", 3600.0, 0.0),
}


def compare_results(found: Compared) -> CompareResults:
    """Results of a comparison, unrounded.

    Parameters
    ----------
    found : Compared

    Returns
    -------
    CompareResults
    """
    rule = found.rule
    return CompareResults(
        schema_version=SCHEMA_VERSION,
        orolift=Program(
            version=__version__,
            python=platform.python_version(),
            libraries={name: metadata.version(name) for name in LIBRARIES},
        ),
        cases=[_moment(one.time) for one in found.estimates],
        within_min=found.within / 60.0,
        scores=[_quantity(one) for one in found.verdicts],
        events=[EventBlock(event=words, table=contingency_block(table)) for words, table in found.events],
        rule=RuleBlock(
            offset_k=rule.offset,
            sector_from_deg=None if rule.sector is None else math.degrees(rule.sector[0]) % 360.0,
            sector_to_deg=None if rule.sector is None else math.degrees(rule.sector[1]) % 360.0,
            least_wind_ms=rule.least_speed,
            bridge_min=rule.bridge / 60.0,
        ),
        onset=[_onset(one, found.names[one.place]) for one in found.onset],
        explanation=None if found.explained is None else _explanation(found.explained, found.names),
        profile=_profile(found),
        values=[
            ValueBlock.model_validate(dict(zip(ValueBlock.model_fields, row, strict=True))) for row in _rows(found)
        ],
        cautions=list(found.cautions),
        notes=list(found.notes),
    )


def value_rows(found: Compared) -> tuple[list[str], list[Sequence[object]]]:
    """Header and rows of the CSV table: one row for each estimate against an observation.

    Parameters
    ----------
    found : Compared

    Returns
    -------
    header : list of str
    rows : list of sequences
    """
    return list(ValueBlock.model_fields), list(_rows(found))


def contingency_block(table: Contingency) -> ContingencyBlock:
    """Counts and the usual scores of them."""
    return ContingencyBlock(
        hits=table.hits,
        false_alarms=table.false_alarms,
        misses=table.misses,
        correct_rejections=table.correct_rejections,
        probability_of_detection=table.detected,
        false_alarm_ratio=table.false_alarm_ratio,
        threat_score=table.threat_score,
        heidke_skill_score=table.heidke,
    )


def _moment(time: float | None) -> str | None:
    if time is None or math.isnan(time):
        return None
    return datetime.fromtimestamp(time, UTC).isoformat().replace("+00:00", "Z")


def _quantity(one: Verdict) -> QuantityBlock:
    factor = OUTPUTS[one.quantity].factor
    references = {
        name: None
        if name not in one.references
        else ReferenceBlock(score=_score(one.references[name], factor), skill=one.skill.get(name))
        for name in REFERENCES
    }
    return QuantityBlock(
        quantity=OUTPUTS[one.quantity].key,
        score=_score(one.score, factor),
        coverage=one.coverage,
        unchanged=references["unchanged"],
        popular_picture=references["popular_picture"],
        crest_air=references["crest_air"],
    )


def _score(one: Score, factor: float) -> ScoreBlock:
    return ScoreBlock(
        count=one.count,
        bias=factor * one.bias,
        mean_absolute_error=factor * one.mean_absolute_error,
        root_mean_square_error=factor * one.root_mean_square_error,
    )


def _onset(one: OnsetAtPlace, name: str) -> OnsetBlock:
    return OnsetBlock(
        place=name,
        estimated=[None if math.isnan(x) else x > 0.5 for x in one.estimated.tolist()],
        estimated_excess_k=[_known(x) for x in one.excess.tolist()],
        estimated_spells=[_spell(spell) for spell in one.estimated_spells],
        observed_times=one.times,
        observed_spells=[_spell(spell) for spell in one.observed_spells],
        table=None if one.table is None else contingency_block(one.table),
    )


def _spell(spell: Spell) -> SpellBlock:
    return SpellBlock(
        start=str(_moment(spell.start)),
        end=str(_moment(spell.end)),
        open_start=spell.open_start,
        open_end=spell.open_end,
    )


def _explanation(one: Explained, names: tuple[str, ...]) -> ExplanationBlock:
    seen, found = one.explanation.observed, one.explanation
    return ExplanationBlock(
        place=names[one.place],
        time=_moment(one.time),
        observations=one.rows,
        observed_temperature_c=celsius(seen.temperature),
        observed_mixing_ratio_g_kg=1000.0 * seen.mixing_ratio,
        temperature_tolerance_k=seen.temperature_tolerance,
        mixing_ratio_tolerance_g_kg=1000.0 * seen.mixing_ratio_tolerance,
        estimated_temperature_c=celsius(one.estimate.temperature),
        estimated_mixing_ratio_g_kg=1000.0 * one.estimate.mixing_ratio,
        own=None if one.own is None else _way(one.own),
        valleys=[
            ValleyBlock(
                best=_way(valley.best),
                source_level_range_m=valley.source_level,
                removed_share_range=valley.removed_share,
                mixing_depth_range_m=valley.mixing_depth,
            )
            for valley in found.valleys
        ],
        nearest=_way(found.nearest),
        source_level_bounds_m=found.bounds,
        upwind=[
            UpwindErrorBlock(
                what=error.what,
                factor=error.factor,
                temperature_c=celsius(error.temperature),
                mixing_ratio_g_kg=1000.0 * error.mixing_ratio,
                source_level_m=error.source_level,
                misfit=error.misfit,
                misfit_before=error.misfit_before,
                explains=error.explains,
                at_bound=error.at_bound,
            )
            for error in one.upwind
        ],
    )


def _way(one: Way) -> WayBlock:
    return WayBlock(
        source_level_m=one.source_level,
        removed_share=one.removed_share,
        mixing_depth_m=one.mixing_depth,
        temperature_c=celsius(one.temperature),
        mixing_ratio_g_kg=1000.0 * one.mixing_ratio,
        misfit=one.misfit,
        condenses=one.condenses,
    )


def _profile(found: Compared) -> ProfileBlock | None:
    one = found.profile
    if one is None:
        return None
    own = one.estimate.profile
    return ProfileBlock(
        place=one.place,
        height_above_ground_m=one.height.tolist(),
        estimated_temperature_c=[celsius(t) for t in own.temperature.tolist()],
        observed_temperature_c=[_known(celsius(t)) for t in one.temperature.tolist()],
        estimated_mixing_ratio_g_kg=(1000.0 * own.vapour).tolist(),
        observed_mixing_ratio_g_kg=[_known(1000.0 * w) for w in one.mixing_ratio.tolist()],
        layers=[
            LayerBlock(
                low_m=layer.low,
                high_m=layer.high,
                temperature_k=layer.temperature,
                mixing_ratio_g_kg=1000.0 * layer.mixing_ratio,
            )
            for layer in one.layers
        ],
    )


def _known(value: float) -> float | None:
    return None if math.isnan(value) else value


def _rows(found: Compared) -> Iterator[Sequence[object]]:
    """Rows in the order of the fields of `ValueBlock`."""
    for quantity in QUANTITIES:
        pairs = found.pairs.get(quantity)
        if pairs is None:
            continue
        count = np.ones(pairs.row.size, dtype=np.int_)
        time = found.seen.time[pairs.row]
        if pairs.row.size > MOST_LISTED:
            pairs, count = averaged(pairs)
            time = np.array([found.estimates[k].arrival[p] for k, p in zip(pairs.which, pairs.place, strict=True)])
        yield from _quantity_rows(found, quantity, pairs, time.tolist(), count.tolist())


def _quantity_rows(
    found: Compared, quantity: Quantity, pairs: Paired, time: list[float], count: list[int]
) -> Iterator[Sequence[object]]:
    out = OUTPUTS[quantity]

    def written(value: float) -> float | None:
        return _known(float(value) * out.factor + out.offset)

    inside = pairs.inside.tolist()
    lines = found.seen.line[pairs.row].tolist()
    for i, (when, rows) in enumerate(zip(time, count, strict=True)):
        yield (
            found.names[int(pairs.place[i])],
            "lee" if pairs.in_lee[i] else "not lee",
            _moment(when),
            out.key,
            written(pairs.estimated[i]),
            written(pairs.low[i]),
            written(pairs.high[i]),
            written(pairs.observed[i]),
            out.factor * float(pairs.estimated[i] - pairs.observed[i]),
            None if math.isnan(inside[i]) else inside[i] > 0.5,
            *(written(pairs.references[name][i]) for name in REFERENCES),
            rows,
            lines[i],
        )
