"""What would explain one comparison, in words and two small tables."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import UTC, datetime
from typing import TYPE_CHECKING

from orolift.report.quantities import Amount
from orolift.report.words import Words, counted

if TYPE_CHECKING:
    from orolift.crossing.explain import Valley, Way
    from orolift.crossing.upwind_error import UpwindError
    from orolift.report.quantities import Kind
    from orolift.spread.compared import Compared
    from orolift.spread.explained import Explained


@dataclass(frozen=True)
class ValueRow:
    """One of the three values.

    Attributes
    ----------
    name : str
    crossing : Words
        In the crossing; empty where it has none.
    best : Words
    span : Words
        Over all answers that are as good; empty when there is none.
    """

    name: str
    crossing: Words
    best: Words
    span: Words


@dataclass(frozen=True)
class UpwindRow:
    """The error of one quantity before the range."""

    name: str
    change: Words
    temperature: Amount
    mixing_ratio: Amount
    source_level: Amount | None
    verdict: str


@dataclass(frozen=True)
class Explanation:
    """The section of the page.

    Attributes
    ----------
    heading : Words
    sentences : tuple of Words
    rows : tuple of ValueRow
    best_name : str
        What the column of best values holds.
    upwind : tuple of UpwindRow
    """

    heading: Words
    sentences: tuple[Words, ...]
    rows: tuple[ValueRow, ...]
    best_name: str
    upwind: tuple[UpwindRow, ...]


def explanation(found: Compared) -> Explanation | None:
    """The section that explains one comparison.

    Parameters
    ----------
    found : Compared

    Returns
    -------
    Explanation or None
    """
    one = found.explained
    if one is None:
        return None
    return Explanation(
        heading=_heading(one),
        sentences=(_what(one, found.names[one.place]), _answers(one), *_own(one), _bounds(one)),
        rows=_rows(one),
        best_name="One answer" if one.explanation.valleys else "Nearest",
        upwind=tuple(_upwind(error) for error in one.upwind),
    )


def _near(one: Explained) -> bool:
    """Whether the estimate itself is within the tolerance."""
    seen, air = one.explanation.observed, one.estimate
    return (
        abs(air.temperature - seen.temperature) <= seen.temperature_tolerance
        and abs(air.mixing_ratio - seen.mixing_ratio) <= seen.mixing_ratio_tolerance
    )


def _heading(one: Explained) -> Words:
    valleys = one.explanation.valleys
    if _near(one):
        return ("The estimate is as near to what was observed as one station can tell",)
    if not valleys:
        return ("No source level, rain-out share and mixing depth within reach give what was observed",)
    best = valleys[0].best
    words: Words = ("Air from ", Amount(best.source_level, "height", -1))
    if any(valley.best.condenses for valley in valleys[:1]):
        words = (*words, " that loses ", Amount(best.removed_share, "share"), " of what condenses")
    return (*words, " would give what was observed")


def _what(one: Explained, name: str) -> Words:
    seen, air = one.explanation.observed, one.estimate
    when = "" if one.time is None else f", {datetime.fromtimestamp(one.time, UTC):%d %b %H:%M} UTC"
    mean = f", mean of {one.rows} observations" if one.rows > 1 else ""
    return (
        f"{name}{when}{mean}: observed ",
        Amount(seen.temperature, "temperature", 1),
        " and ",
        Amount(seen.mixing_ratio, "mixing_ratio", 1),
        ", estimated ",
        Amount(air.temperature, "temperature", 1),
        " and ",
        Amount(air.mixing_ratio, "mixing_ratio", 1),
        ". An answer counts when it is within ",
        Amount(seen.temperature_tolerance, "temperature_difference", 1),
        " and ",
        Amount(seen.mixing_ratio_tolerance, "mixing_ratio", 1),
        ".",
    )


def _answers(one: Explained) -> Words:
    valleys = one.explanation.valleys
    if not valleys:
        near = one.explanation.nearest
        return (
            "The nearest that can be had is ",
            Amount(near.temperature, "temperature", 1),
            " and ",
            Amount(near.mixing_ratio, "mixing_ratio", 1),
            ", with air from ",
            Amount(near.source_level, "height", -1),
            ". Something else is at work: other air, ground or clouds nearby, cold air that stays, or a wrong reading.",
        )
    several = (
        "Two numbers cannot fix three values: the answers form one family"
        if len(valleys) == 1
        else f"Two numbers cannot fix three values: there are {counted(len(valleys), 'family', 'families')} of answers"
    )
    words: Words = (several, ", ")
    for i, valley in enumerate(valleys):
        words = (*words, "; or " if i else "", *_valley(valley))
    return (*words, ". Not every combination of these is an answer.")


def _valley(valley: Valley) -> Words:
    low, high = valley.source_level
    shallow, deep = valley.mixing_depth
    share: Words = ("whatever the rain-out share",)
    if valley.removed_share[1] - valley.removed_share[0] < 0.99:
        least, most = (Amount(x, "share") for x in valley.removed_share)
        share = ("a rain-out share of ", least, " to ", most)
    return (
        "with air from ",
        Amount(low, "height", -1),
        " to ",
        Amount(high, "height", -1),
        " mixed over ",
        Amount(shallow, "height", -1),
        " to ",
        Amount(deep, "height", -1),
        ", ",
        *share,
    )


def _own(one: Explained) -> tuple[Words, ...]:
    own = one.own
    if own is None:
        return (
            (
                (
                    "In the crossing the place lies in cold air that stays: what is said here is of air from over "
                    "the range that would reach it."
                ),
            ),
        )
    return (
        (
            (
                "The rule these answers come from prescribes the source level, mixes no air in that went round, and "
                "with the crossing's own three values gives "
            ),
            Amount(own.temperature, "temperature", 1),
            " and ",
            Amount(own.mixing_ratio, "mixing_ratio", 1),
            ".",
        ),
    )


def _bounds(one: Explained) -> Words:
    low, high = one.explanation.bounds
    return (
        "Looked at: source levels from ",
        Amount(low, "height", -1),
        " to ",
        Amount(high, "height", -1),
        ", every share, mixing depths from ",
        Amount(10.0, "height"),
        " to ",
        Amount(1000.0, "height"),
        ".",
    )


def _rows(one: Explained) -> tuple[ValueRow, ...]:
    valleys = one.explanation.valleys
    best: Way = valleys[0].best if valleys else one.explanation.nearest
    first = valleys[0] if valleys else None

    def span(ends: tuple[float, float] | None, kind: Kind, digits: int) -> Words:
        if ends is None:
            return ()
        return (Amount(ends[0], kind, digits, bare=True), " to ", Amount(ends[1], kind, digits))

    level = one.estimate.source_level
    share = one.removed_share
    return (
        ValueRow(
            "Source level",
            () if level is None else (Amount(level, "height", -1),),
            (Amount(best.source_level, "height", -1),),
            span(None if first is None else first.source_level, "height", -1),
        ),
        ValueRow(
            "Rain-out share",
            ("nothing condensed",) if share is None else (Amount(share, "share"),),
            (Amount(best.removed_share, "share"),) if best.condenses else ("nothing condenses",),
            span(None if first is None else first.removed_share, "share", 0),
        ),
        ValueRow(
            "Mixing depth",
            (Amount(one.mixing_depth, "height", -1),),
            (Amount(best.mixing_depth, "height", -1),),
            span(None if first is None else first.mixing_depth, "height", -1),
        ),
    )


def _upwind(error: UpwindError) -> UpwindRow:
    more, less = {"wind": ("stronger", "weaker"), "humidity": ("moister", "drier")}[error.what]
    change: Words = ("as given",)
    if error.factor > 1.0:
        change = (Amount(error.factor - 1.0, "share"), f" {more}")
    elif error.factor < 1.0:
        change = (Amount(1.0 - error.factor, "share"), f" {less}")
    if error.explains:
        verdict = "gives what was observed"
    elif error.helps:
        verdict = "comes nearer, and does not explain it"
    else:
        verdict = "changes nothing that matters"
    if error.at_bound and error.helps:
        verdict += "; the end of what was looked at"
    return UpwindRow(
        name={"wind": "Wind before the range", "humidity": "Humidity before the range"}[error.what],
        change=change,
        temperature=Amount(error.temperature, "temperature", 1),
        mixing_ratio=Amount(error.mixing_ratio, "mixing_ratio", 1),
        source_level=None if error.source_level is None else Amount(error.source_level, "height", -1),
        verdict=verdict,
    )
