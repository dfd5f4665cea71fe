"""Words on the section: what stands where, with its value, as far as there is room."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift.report.figures.axes import place
from orolift.report.figures.drawing import Anchor, Curve, Label
from orolift.report.figures.pins import Spot
from orolift.report.figures.placing import Board, Box, put, text_width
from orolift.report.figures.streams import label_beside
from orolift.report.quantities import first_number, quantity
from orolift.report.story import ROUNDING, cloudy_to_the_end, crest_index, is_blocked, starts_saturated

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.report.figures.view import View

    Line = tuple[NDArray[np.float64], NDArray[np.float64]]

Flag = tuple[Label, Curve | None]
"""Words, and the line that leads to what they name."""
Lettered = tuple[tuple[Label, ...], tuple[Curve, ...], Board]
"""Words placed, lines that lead to them, and the board with their room taken."""

WORDS_OF_SOURCE = 0.5
"""Share of the width of the frame that the words at its upwind end may take (design choice)."""


def board_of(view: View, followed: Line) -> Board:
    """The section before anything is written on it."""
    x, y = followed
    fine = np.linspace(x[0], x[-1], int(x[-1] - x[0]) + 2)
    layout = view.layout
    return Board(
        Box(layout.left, layout.top - 6.0, layout.right + 2.0, layout.bottom),
        layout.letter,
        ground_x=view.ground_x,
        ground_y=view.ground_y,
        points_x=fine,
        points_y=np.interp(fine, x, y),
    )


def spots(view: View) -> list[Spot]:
    """The sites with their temperatures."""
    return [
        Spot(
            air.number,
            place(view.across, air.distance),
            place(view.up, air.elevation),
            air.name,
            quantity(air.temperature, "temperature", 1, view.units),
        )
        for air in view.crossing.lee
    ]


def crest(view: View, board: Board) -> Lettered:
    """Height of the crest: in the ground under it, else above it, to one side where a site's pin needs the room."""
    shape, letter = view.crossing.features, board.letter
    x, y = place(view.across, shape.crest_distance), place(view.up, shape.crest)
    words = f"crest {quantity(shape.crest, 'height', 0, view.units)}"
    inside: list[Flag] = [
        (
            Label(words, round(x, 1), round(y + drop * letter, 1), "middle", "in-ground"),
            Curve(f"M{x:.1f} {y + 5.0:.1f}V{y + (drop - 0.95) * letter:.1f}", "in-ground"),
        )
        for drop in (2.0, 3.0, 4.0, 5.0, 6.0, 8.0, 10.0, 12.0)
    ]
    near = min((place(view.across, air.distance) - x for air in view.crossing.lee), key=abs)
    anchor: Anchor = "middle"
    shift = 0.0
    if abs(near) < 5.0 * letter:
        anchor, shift = ("end", -letter) if near >= 0.0 else ("start", letter)
    over: list[Flag] = [
        (Label(words, round(x + shift, 1), round(y - rise, 1), anchor, "place"), None)
        for rise in (10.0, 24.0, 38.0, 52.0, 66.0)
    ]
    labels, leaders, board = _put_flag(board, (inside, True), (over, False))
    return labels, leaders, board


def source(view: View, board: Board) -> Lettered:
    """The heights the air of the site comes from: a bar at the upwind end, with words."""
    site, x = view.trace.site, view.layout.left + 3.5
    if site is None or site.source_level is None or site.source_level_low is None or site.source_level_high is None:
        return (), (), board
    middle, low, high = (
        round(place(view.up, level), 1) for level in (site.source_level, site.source_level_low, site.source_level_high)
    )
    bar = Curve(f"M{x:.1f} {low}V{high}", "source")
    level = quantity(site.source_level, "height", -1, view.units)
    start = quantity(float(view.trace.temperature[0]), "temperature", 1, view.units)
    ends = [first_number(v, "height", -1, view.units) for v in (site.source_level_low, site.source_level_high)]
    span = f" ({ends[0]} to {ends[1]})" if site.source_level_high - site.source_level_low > ROUNDING else ""
    letter = board.letter
    choices = [f"air from {level}{span}, {start}", f"air from {level}, {start}", f"from {level}, {start}", start]
    if site.went_round > 0.0:  # the level is then that of both ways together, and the line that of one
        choices = [f"air from {level}{span}", f"air from {level}", f"from {level}"]
    room = WORDS_OF_SOURCE * (view.layout.right - view.layout.left)
    near = (middle - 0.7 * letter, high - 0.5 * letter, high - 1.5 * letter, middle + 1.5 * letter)
    far = (high - 3.0 * letter, high - 5.0 * letter)
    places = [
        (Label(text, round(x + 9.0, 1), round(y, 1), "start", "value"),)
        for heights in (near, far)
        for text in choices
        if text_width(text, letter) <= room
        for y in heights
    ]
    labels, board = put(board, places)
    return labels, (bar,), board


def low_air(view: View, board: Board) -> Lettered:
    """Names of the blocked air, with its range, and of the cold pool."""
    crossing = view.crossing
    labels: tuple[Label, ...] = ()
    curves: tuple[Curve, ...] = ()
    if is_blocked(crossing):
        labels, curves, board = _blocked(view, board)
    if crossing.pool is not None:
        top = quantity(crossing.pool.top, "height", -1, view.units)
        y = place(view.up, crossing.pool.top)
        words = (f"cold pool up to {top}", f"cold pool {top}", "cold pool")
        right = view.layout.right - 4.0
        more, board = put(
            board,
            [
                (Label(text, at, round(y + drop * board.letter, 1), anchor, "place"),)
                for text in words
                for drop in (1.3, 2.2, -0.6, 3.2)
                for at, anchor in _ends(right, place(view.across, crossing.features.lee_foot_distance))
            ],
        )
        labels += more
    return labels, curves, board


def _ends(right: float, foot: float) -> tuple[tuple[float, Anchor], ...]:
    return (right, "end"), (min(foot, right), "middle"), (min(foot, right), "end"), (min(foot, right), "start")


def _blocked(view: View, board: Board) -> Lettered:
    """How high the air is stopped, the range of that as a bar, and what of it goes round."""
    flow, units, layout = view.crossing.flow, view.units, view.layout
    top = quantity(flow.blocked_top, "height", -1, units)
    low, high = (first_number(v, "height", -1, units) for v in view.blocked)
    share = quantity(flow.going_round_share, "share", 0, units)
    round_words = f"{share} of it goes round" if flow.going_round_share > 0.0 else "none of it goes round"
    x = layout.left + 0.3 * (place(view.across, view.crossing.features.crest_distance) - layout.left)
    y, low_y, high_y = (round(place(view.up, level), 1) for level in (flow.blocked_top, *view.blocked))
    bar = f"M{x:.1f} {low_y}V{high_y}M{x - 5:.1f} {low_y}h10M{x - 5:.1f} {high_y}h10M{x - 3:.1f} {y}h6"
    letter = board.letter
    groups: list[tuple[Label, ...]] = []
    for first, second in (
        (f"blocked up to {top} ({low} to {high})", round_words),
        (f"blocked up to {top}", round_words),
        (f"blocked up to {top}", ""),
        (f"blocked {top}", ""),
        ("blocked", ""),
    ):
        for drop in (1.5, 2.4, 3.4):
            for at in (x + 10.0, layout.left + 12.0):
                lines = [Label(first, round(at, 1), round(y + drop * letter, 1), "start", "place")]
                if second:
                    lines.append(Label(second, round(at, 1), round(y + (drop + 1.25) * letter, 1), "start", "note"))
                groups.append(tuple(lines))
    labels, board = put(board, groups)
    return labels, (Curve(bar, "reach"),), board


def cloud_marks(view: View, board: Board) -> Lettered:
    """Base and end of the cloud with their heights."""
    crossing = view.crossing
    labels: tuple[Label, ...] = ()
    leaders: tuple[Curve, ...] = ()
    base = None if starts_saturated(crossing) else crossing.cloud.base
    end = None if cloudy_to_the_end(crossing) else crossing.cloud.end
    for name, height, distance, side in (
        ("cloud base", base, crossing.cloud.base_distance, -1.0),
        ("cloud ends", end, crossing.cloud.end_distance, 1.0),
    ):
        if height is None or distance is None or height > view.up.high:
            continue
        spot = place(view.across, distance), place(view.up, height)
        words = f"{name} {quantity(height, 'height', -1, view.units)}"
        more, lines, board = _put_flag(
            board,
            (_beside_the_slope(*spot, words, side, board.letter), False),
            (_in_the_ground(*spot, words, side, board.letter), True),
            (_flags(*spot, words, "place", side, (14.0, 24.0, 40.0, 60.0, 80.0, 100.0, 120.0, 150.0, 180.0)), False),
        )
        labels, leaders = labels + more, leaders + lines
    return labels, leaders, board


def _flags(x: float, y: float, words: str, kind: str, side: float, rises: tuple[float, ...]) -> list[Flag]:
    """Places for words above a point, on the wished side first; those far above get a leader down to it."""
    anchors: tuple[tuple[Anchor, float], ...] = (("end", -5.0), ("start", 5.0))
    out: list[Flag] = []
    for rise in rises:
        for anchor, shift in anchors[:: 1 if side < 0.0 else -1]:
            leader = Curve(f"M{x:.1f} {y:.1f}V{y - rise - 8.0:.1f}", "leader") if rise > 24.0 else None
            out.append((Label(words, round(x + shift, 1), round(y - rise, 1), anchor, kind), leader))
    return out


def _beside_the_slope(x: float, y: float, words: str, side: float, letter: float) -> list[Flag]:
    """Places for words at the height of a point on a slope, on a line that runs out to the free side."""
    end = x + side * (text_width(words, letter) + 10.0)
    leader = Curve(f"M{x:.1f} {y:.1f}H{end:.1f}", "leader")
    anchor: Anchor = "end" if side < 0.0 else "start"
    return [(Label(words, round(x + 8.0 * side, 1), round(y - 6.0, 1), anchor, "place"), leader)]


def _in_the_ground(x: float, y: float, words: str, side: float, letter: float) -> list[Flag]:
    """Places for words under a point, for drawings without room above it."""
    anchor: Anchor = "start" if side < 0.0 else "end"
    return [
        (
            Label(text, round(x - 5.0 * side, 1), round(y + drop, 1), anchor, "in-ground"),
            Curve(f"M{x:.1f} {y + 4.0:.1f}V{y + drop:.1f}", "in-ground"),
        )
        for text in (words, words.removeprefix("cloud "))
        for drop in (1.9 * letter, 2.6 * letter, 3.6 * letter, 5.0 * letter, 7.0 * letter, 9.0 * letter)
    ]


def _put_flag(board: Board, *wishes: tuple[list[Flag], bool]) -> Lettered:
    """The first flag that fits, with its leader; each list of wishes says whether it stands in the ground."""
    for flags, underground in wishes:
        labels, board = put(board, [(label,) for label, _ in flags], underground=underground)
        if labels:
            leaders = tuple(leader for label, leader in flags if leader is not None and (label,) == labels)
            return labels, leaders[:1], board
    return (), (), board


def on_the_way(view: View, board: Board) -> Lettered:
    """Temperature of the followed air at its highest point."""
    trace = view.trace
    at = trace.top
    text = quantity(float(trace.temperature[at]), "temperature", 1, view.units)
    x, y = place(view.across, float(trace.distance[at])), place(view.up, float(trace.height[at]))
    rises = (9.0, 16.0, 24.0)
    anchors: tuple[tuple[Anchor, float], ...] = (("middle", 0.0), ("end", -8.0), ("start", 8.0))
    places = [
        (Label(text, round(x + shift, 1), round(y - rise, 1), anchor, "value"),)
        for rise in rises
        for anchor, shift in anchors
    ]
    labels, board = put(board, places)
    return labels, (), board


def freezing_marks(view: View, lines: tuple[Line, ...], level: float, board: Board) -> Lettered:
    """Name of the freezing level: at its line, else where it is."""
    ice = "0 °C" if view.units == "metric" else "32 °F"
    if not lines and level <= view.crossing.incoming.height[0]:
        return (), (), board  # all of the air is below freezing: no height to name
    if not lines:
        height = quantity(level, "height", -1, view.units)
        above = ", above this picture" if level >= view.up.high else ""
        text = f"{ice} in the incoming air: {height}{above}"
        if text_width(text, board.letter) > 0.7 * (board.frame.right - board.frame.left):
            text = f"freezing level {height}"
        spot = (Label(text, board.frame.right - 2.0, board.frame.top + board.letter + 4.0, "end", "freezing"),)
        labels, board = put(board, [spot], needed=level >= view.up.high)
        return labels, (), board
    longest = max(lines, key=lambda line: float(line[0][-1] - line[0][0]))
    places = [
        (label_beside(longest, ice, "freezing", share, rise),)
        for share in (0.06, 0.12, 0.2, 0.9, 0.8, 0.3, 0.7, 0.5)
        for rise in (4.0, -1.1 * board.letter)
    ]
    labels, board = put(board, places)
    return labels, (), board


def carried_marks(view: View, board: Board) -> Lettered:
    """Temperatures of the air higher up: before the range, over the crest and behind it."""
    crossing = view.crossing
    labels: tuple[Label, ...] = ()
    if view.layout.name == "narrow":
        return (), (), board
    crest_at = crest_index(crossing)
    places = (int(0.12 * crossing.distance.size), crest_at, (2 * crest_at + crossing.distance.size) // 3)
    span = view.up.high - crossing.features.crest
    for share in (0.3, 0.72):
        start = crossing.features.crest + share * span
        number = int(np.argmin(np.abs(crossing.start_height - start)))
        for at in places:
            x = place(view.across, float(crossing.distance[at]))
            y = place(view.up, float(crossing.height[at, number]))
            text = quantity(float(crossing.air.temperature[at, number]), "temperature", 0, view.units)
            spots_ = [(Label(text, round(x, 1), round(y + d, 1), "middle", "carried"),) for d in (4.0, 14.0, -8.0)]
            more, board = put(board, spots_)
            labels += more
    return labels, (), board


def isentrope_marks(view: View, lines: tuple[tuple[Line, float], ...], board: Board) -> Lettered:
    """Values of the lines of equal potential temperature, once each, near the downwind end."""
    labels: tuple[Label, ...] = ()
    done: set[float] = set()
    for line, level in sorted(lines, key=lambda pair: -float(pair[0][0][-1])):
        if level in done or line[0][-1] - line[0][0] < 60.0:
            continue
        text = quantity(level, "potential_temperature", 0, view.units)
        more, board = put(board, [(label_beside(line, text, "isentrope", share, -4.0),) for share in (0.96, 0.9, 0.84)])
        if more:
            done.add(level)
            labels += more
    return labels, (), board


def breaking_mark(view: View, curls: tuple[tuple[float, float], ...], board: Board) -> Lettered:
    """Name of the place where waves break, beside one of its curls."""
    words, letter = "waves break", board.letter
    if not curls:
        if not view.crossing.flow.wave_breaking:
            return (), (), board
        text = f"{words} above this picture"
        right, top = board.frame.right - 2.0, board.frame.top + letter + 4.0
        spots_ = [(Label(text, right, round(top + drop * letter, 1), "end", "breaking"),) for drop in (0.0, 1.3)]
        labels, board = put(board, spots_)
        return labels, (), board
    beside: tuple[tuple[Anchor, float], ...] = (("start", 14.0), ("end", -14.0))
    labels, board = put(
        board,
        [
            (Label(words, round(x + shift, 1), round(y + 0.3 * letter, 1), anchor, "breaking"),)
            for anchor, shift in beside
            for x, y in sorted(curls, key=lambda at: (-shift * at[0], at[1]))
        ],
    )
    return labels, (), board
