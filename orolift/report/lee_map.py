"""The lee as a map: what it comes to, in words."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.fire.words import named
from orolift.report.quantities import Amount
from orolift.report.spans import ranged
from orolift.report.words import counted
from orolift.spread.ranges import range_of

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.report.figures.drawing import Figure
    from orolift.report.figures.lee_map import LeeMapDrawing
    from orolift.report.quantities import Kind
    from orolift.report.words import Words
    from orolift.sources.strips import MappedLee
    from orolift.spread.lee_spread import LeeSpread
    from orolift.spread.lee_thresholds import LeeThresholds

    Array = NDArray[np.float64]

ALIKE = (
    " apart, each with its own crest and range and the same incoming air, and joined across the wind by a Gaussian of "
)
JOINED = (
    " standard deviation: what is narrower than about twice that, a single pass or summit, is not resolved. Each cell "
    "has the air of its own height. A site has a line and crest of its own, so its value may differ from that of the "
    "map."
)


@dataclass(frozen=True)
class LeeOnMap:
    """A conclusion, the maps, and how they were made."""

    heading: Words
    figures: tuple[Figure[LeeMapDrawing], ...]
    remarks: tuple[Words, ...]


def lee_on_map(mapped: MappedLee, figures: tuple[Figure[LeeMapDrawing], ...]) -> LeeOnMap:
    """The lee as a map.

    Parameters
    ----------
    mapped : MappedLee
    figures : tuple of Figure

    Returns
    -------
    LeeOnMap
    """
    found, spread = mapped.map, mapped.spread
    behind = found.behind_crest > 0.0
    humidity = found.relative_humidity[behind & np.isfinite(found.relative_humidity)]
    warming = found.warming[behind & np.isfinite(found.warming)]
    if humidity.size:
        of_members = None if spread is None else spread.humidity
        heading: Words = (
            "Behind the crest half of the ground has a humidity of ",
            *_percentile(humidity, of_members, 50.0, "share", 0),
            " or less, and a twentieth ",
            *_percentile(humidity, of_members, 5.0, "share", 0),
            " or less",
        )
    else:
        heading = ("The map does not reach behind the crest",)
    remarks: list[Words] = []
    if warming.size:
        of_members = None if spread is None else spread.warming
        remarks.append(
            (
                "Against the incoming air at its height, the middle half of the ground there is between ",
                *_percentile(warming, of_members, 25.0, "temperature_change", 1),
                " and ",
                *_percentile(warming, of_members, 75.0, "temperature_change", 1),
                ".",
            )
        )
    remarks += _thresholds(mapped.thresholds, behind, spread)
    remarks += _how_sure(spread)
    apart = float(mapped.plan.frame.across[1] - mapped.plan.frame.across[0])
    remarks.append(
        (
            f"{counted(found.strips, 'strip', 'strips').capitalize()} along the wind were worked out, ",
            Amount(apart, "distance", 1),
            ALIKE,
            Amount(mapped.plan.frame.smoothing, "distance", 1),
            JOINED,
        )
    )
    for reason, count in found.failed[:3]:
        remarks.append((f"{counted(count, 'strip', 'strips').capitalize()} could not be: {reason}",))
    return LeeOnMap(heading, figures, tuple(remarks))


def _percentile(values: Array, of_members: Array | None, share: float, kind: Kind, digits: int) -> Words:
    """A percentile of the ground, with 10 to 90 % of what it is in the members."""
    ends = None
    if of_members is not None and of_members.size:
        ends = range_of(np.array([_of_member(one, share) for one in of_members]))
    return ranged(Amount(float(np.percentile(values, share)), kind, digits), ends)


def _of_member(values: Array, share: float) -> float:
    known = values[np.isfinite(values)]
    return float(np.percentile(known, share)) if known.size else np.nan


def _how_sure(spread: LeeSpread | None) -> list[Words]:
    """What the ranges hold."""
    if spread is None:
        return [
            ("The map has no ranges: the case has no members, or no strip that would have them could be worked out.",)
        ]
    strips = counted(spread.strips, "strip", "strips")
    text = (
        f"Ranges are 10 to 90 % of {spread.members} members, with the error of the method. A member is one map: the "
        f"same draws everywhere. Members were worked out on {strips}; what they differ by was joined across the wind, "
        "place by place behind the crest. What a single pass or summit does to its lee is in no range."
    )
    return [(text,)]


def _thresholds(found: LeeThresholds | None, behind: NDArray[np.bool_], spread: LeeSpread | None = None) -> list[Words]:
    """The share of the lee in which each rule is met, and which rules a map cannot judge."""
    if found is None:
        return []
    parts: list[str | Amount] = []
    long = False
    for i, one in enumerate(found.judged):
        known = one.met[behind & np.isfinite(one.met)]
        if known.size:
            ends = None if spread is None else range_of(spread.share_met[i])
            share = ranged(Amount(float(known.mean()), "share"), ends)
            parts += ["; " if parts else "", f"“{one.rule.name}” on ", *share]
            long = long or one.rule.hours > 1
    out: list[Words] = []
    if parts:
        lasting = " Whether they are met for the hours they ask for is not judged." if long else ""
        out.append(
            (
                "Threshold met in the estimate, as a share of the ground behind the crest where it can be judged: ",
                *parts,
                f". Set by {found.authority}; not a warning.{lasting}",
            )
        )
    for rule, missing in found.unknown:
        lacks = ", ".join(named(one).words for one in missing)
        out.append((f"The threshold “{rule.name}” cannot be judged on the map, which does not have: {lacks}.",))
    return out
