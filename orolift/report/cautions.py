"""What the reader must bear in mind: always, in this form of the computation, and in this case."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from orolift.constants import MELTING_POINT
from orolift.report.briefing import crest_index, prescribed_share, starts_saturated
from orolift.report.quantities import Amount

if TYPE_CHECKING:
    from datetime import datetime

    from orolift.crossing.result import Crossing
    from orolift.report.words import Words

WEAK_WIND = 5.0
"""Wind across the crest below this [m s-1] gets a caution; a judgement."""
DEEP_RISE = 1000.0
"""A climb of more than this [m] gets the caution that low air seldom makes it; a judgement."""

_NO_WARNING = (
    "This is an estimate for trained people, not a warning. Official warning services, fire agencies, local codes and "
    "licensed practice decide."
)
_MAY_BE_BLOCKED = (
    "How much of the low air is blocked, and how much of it goes round, is an estimate with a wide range: the two "
    "ends, no blocking and full blocking, are shown beside the answer."
)
_NOT_WORKED_OUT = (
    "Not worked out here: how far rain drifts with the wind, a map, and the range that uncertain input gives the "
    "numbers."
)
ALWAYS: tuple[Words, ...] = ((_NO_WARNING,), (_MAY_BE_BLOCKED,), (_NOT_WORKED_OUT,))
"""Cautions of every report in this form of the computation."""


@dataclass(frozen=True)
class Cautions:
    """What to bear in mind.

    Attributes
    ----------
    heading : Words
    always : tuple of Words
    here : tuple of Words
        Limits that apply to this case.
    notes : tuple of str
        Assumptions made on the way, as the computation says them.
    """

    heading: Words
    always: tuple[Words, ...]
    here: tuple[Words, ...]
    notes: tuple[str, ...]


def cautions(crossing: Crossing, freezing_level: float, valid_time: datetime | None) -> Cautions:
    """Cautions and notes of a crossing.

    Parameters
    ----------
    crossing : Crossing
    freezing_level : float [m]
        Of the incoming air.
    valid_time : datetime or None

    Returns
    -------
    Cautions
    """
    here = (*((text,) for text in crossing.cautions), *_wind_and_rise(crossing), *_water(crossing, freezing_level))
    if valid_time is None:
        here = (*here, ("The case names no valid time.",))
    return Cautions(
        heading=("An estimate, to be judged by a trained reader",),
        always=ALWAYS,
        here=here,
        notes=tuple(dict.fromkeys(crossing.notes)),
    )


def _wind_and_rise(crossing: Crossing) -> tuple[Words, ...]:
    out: list[Words] = []
    if crossing.flow.crest_wind < WEAK_WIND:
        out.append(
            (
                "The wind across the crest is weak (",
                Amount(crossing.flow.crest_wind, "wind", 1),
                "): low air is then likely to be blocked.",
            )
        )
    climb = crossing.features.crest - float(crossing.height[0, 0])
    if climb > DEEP_RISE:
        out.append(
            (
                "The air would have to climb ",
                Amount(climb, "height", -1),
                ". Air from near the ground comes over such a range only when it is nearly neutral or the wind strong.",
            )
        )
    if "measured" not in crossing.incoming.origin:
        out.append(
            ("Only the ground of the incoming air was measured; all above it is assumed (see the notes below).",)
        )
    return tuple(out)


def _water(crossing: Crossing, freezing_level: float) -> tuple[Words, ...]:
    if crossing.cloud.base is None:
        return ()
    out: list[Words] = [
        (
            "What share of the condensed water leaves (",
            prescribed_share(crossing),
            ") is prescribed, not worked out; it decides how warm and dry the lee is.",
        )
    ]
    if starts_saturated(crossing):
        out.append(("The air is saturated at the upwind end: how much fog or cloud it brings is not known.",))
    cold = crossing.air.temperature[crest_index(crossing), 0] < MELTING_POINT
    if cold:
        out.append(
            (
                "The air at the crest is below freezing (0 °C in the incoming air at ",
                Amount(freezing_level, "height", -1),
                "): part of what falls is snow, and how much is not worked out.",
            )
        )
    wet = [air.name for air in crossing.lee if air.side == "lee" and air.relative_humidity > 0.995]
    if wet:
        out.append((f"Cloud reaches the ground at {', '.join(wet)}.",))
    return tuple(out)
