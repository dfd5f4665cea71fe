"""Numbered pins for the sites, staggered so that none hides another."""

from __future__ import annotations

from dataclasses import dataclass, replace
from math import ceil
from typing import TYPE_CHECKING

from orolift.report.figures.drawing import Anchor, Label, Pin
from orolift.report.figures.placing import Board, Box, box_of, free, meet, with_taken

if TYPE_CHECKING:
    from collections.abc import Iterator, Sequence

LONGEST_NAME = 22
CROWD = 10
"""Sites beyond which no place is searched for each name."""
RADIUS = 0.68
"""Of a disc, in letter heights."""
UPRIGHT = tuple((dx, -1.9 - 1.5 * level) for dx in (0.0, 1.5, -1.5) for level in range(10))
"""Places of the disc above its point, in letter heights: pins that stand on the ground."""
ASIDE = ((1.9, 0.0), (1.9, -1.5), (1.9, 1.5), (-1.9, 0.0), (3.8, 0.0), (1.9, -3.0), (1.9, 3.0), (5.7, 0.0))
"""Places of the disc around its point, in letter heights: pins on a curve."""


@dataclass(frozen=True)
class Spot:
    """A site on a drawing: where it is, and the words that may stand beside its disc, the first dropped first."""

    number: int
    x: float
    y: float
    name: str
    value: str = ""


@dataclass(frozen=True, eq=False)
class Placed:
    """Pins, the board with their room taken, how many fitted nowhere, and how many words there are."""

    pins: tuple[Pin, ...]
    board: Board
    left_over: int
    words: int


def shortened(name: str) -> str:
    """A name cut to what fits beside a pin.

    Examples
    --------
    >>> shortened("Lower Tarn"), shortened("A place with a very long name")
    ('Lower Tarn', 'A place with a very l…')
    """
    return name if len(name) <= LONGEST_NAME else f"{name[: LONGEST_NAME - 1].rstrip()}…"


def pins(
    spots: Sequence[Spot], board: Board, offsets: Sequence[tuple[float, float]], *, names: bool
) -> tuple[tuple[Pin, ...], Board]:
    """Pins for their points, with as many words as there is room for.

    Parameters
    ----------
    spots : sequence of Spot
    board : Board
        What is already on the drawing.
    offsets : sequence of (float, float)
        Places of the disc to try, from its point, in letter heights.
    names : bool
        Whether names are tried at all.

    Returns
    -------
    (tuple of Pin, Board)
        In the order of their numbers. Where there are many, or one fits nowhere,
        they are spread out evenly with the few words there is room for.
    """
    upward = sorted(spots, key=lambda spot: (spot.x, spot.number))
    upright = offsets[0][0] == 0.0
    if len(spots) > CROWD:
        best = _spread_out(upward, board, upright=upright, names=names)
    else:
        most = len(spots) * (2 if names and any(spot.value for spot in spots) else 1)
        best = _in_order(upward, board, offsets, names=names)
        if best.left_over or best.words < most:
            best = max(best, _in_order(upward[::-1], board, offsets, names=names), key=_merit)
        if best.left_over:
            best = _spread_out(upward, board, upright=upright, names=names)
    return tuple(sorted(best.pins, key=lambda pin: pin.number)), best.board


def _merit(placed: Placed) -> tuple[int, int]:
    return -placed.left_over, placed.words


def _in_order(spots: Sequence[Spot], board: Board, offsets: Sequence[tuple[float, float]], *, names: bool) -> Placed:
    """Pins placed one after the other, the first with the most choice."""
    reach = 10.0 * board.letter  # words leave the air above a pin to come free for its stem
    upright = offsets[0][0] == 0.0
    out: list[Pin] = []
    left_over = 0
    for count, spot in enumerate(spots):
        kept = [Box(s.x - 2.0, s.y - reach, s.x + 2.0, s.y) for s in spots[count + 1 :]] if upright else []
        found = next(_fitting(spot, board, offsets, kept, names=names), None)
        left_over += found is None
        pin, boxes = found or _candidate(spot, board, offsets[0], "start", ())
        board = with_taken(board, *boxes, *_stem(pin))
        out.append(pin)
    return Placed(tuple(out), board, left_over, sum(len(pin.labels) for pin in out))


def spread(wanted: Sequence[float], apart: float, low: float, high: float) -> list[float]:
    """Places in order, at least so far apart and as near to the wanted ones as that allows.

    Parameters
    ----------
    wanted : sequence of float
        Rising.
    apart : float
        Least gap; smaller where the room does not allow it.
    low, high : float
        Ends of the room.

    Returns
    -------
    list of float

    Examples
    --------
    >>> spread([10.0, 11.0, 50.0], 5.0, 0.0, 100.0)
    [8.0, 13.0, 50.0]
    """
    gap = min(apart, (high - low) / max(len(wanted) - 1, 1))
    groups: list[list[float]] = []  # what each place would be, were the gaps before it taken out
    for count, value in enumerate(wanted):
        groups.append([value - gap * count])
        while len(groups) > 1 and _mean(groups[-2]) > _mean(groups[-1]):
            last = groups.pop()
            groups[-1] += last
    level = [_mean(group) for group in groups for _ in group]
    top = high - gap * (len(wanted) - 1)
    return [min(max(value, low), top) + gap * count for count, value in enumerate(level)]


def _mean(values: list[float]) -> float:
    return sum(values) / len(values)


def _spread_out(spots: Sequence[Spot], board: Board, *, upright: bool, names: bool) -> Placed:
    """Discs of a crowd side by side, or above each other on a curve; every second or third only, where all do not fit.

    The others keep their point; their number is in the table.
    """
    letter, frame = board.letter, board.frame
    size = 2.0 * RADIUS * letter + 3.0
    order = list(spots) if upright else sorted(spots, key=lambda spot: (spot.y, spot.number))
    room = frame.right - frame.left if upright else frame.bottom - frame.top - size
    every = ceil(len(order) / (1 + int(room / size)))
    chosen = order[::every]
    if upright:
        across = spread([spot.x for spot in chosen], size, frame.left, frame.right)
        down = [_clear_height(x, spot, board) for x, spot in zip(across, chosen, strict=True)]
    else:
        across = [spot.x + 2.2 * letter for spot in chosen]
        down = spread([spot.y for spot in chosen], size, frame.top + 0.5 * size, frame.bottom - 0.5 * size)
    placed = _at_places(chosen, across, down, board, names=names)
    points = tuple(_point_only(spot) for spot in order if spot not in chosen)
    return replace(placed, pins=placed.pins + points)


def _clear_height(x: float, spot: Spot, board: Board) -> float:
    """Lowest place of a disc above a point and off what is taken."""
    letter = board.letter
    radius = RADIUS * letter
    heights = [spot.y - (2.2 + 0.8 * level) * letter for level in range(8)]
    for y in heights:
        disc = Box(x - radius, y - radius, x + radius, y + radius)
        if not any(meet(disc, other) for other in board.taken):
            return y
    return heights[0]


def _point_only(spot: Spot) -> Pin:
    """A pin without disc and number."""
    x, y = round(spot.x, 1), round(spot.y, 1)
    return Pin(spot.number, stem="", x=x, y=y, radius=0.0, text_y=y, point_x=x, point_y=y, labels=())


def _at_places(
    spots: Sequence[Spot], across: Sequence[float], down: Sequence[float], board: Board, *, names: bool
) -> Placed:
    """Pins with their discs at given places, words only where they cover nothing."""
    letter = board.letter
    places = [((x - s.x) / letter, (y - s.y) / letter) for s, x, y in zip(spots, across, down, strict=True)]
    bare = [_candidate(spot, board, at, "start", ()) for spot, at in zip(spots, places, strict=True)]
    out: list[Pin] = []
    for count, (spot, at) in enumerate(zip(spots, places, strict=True)):
        others = [boxes[0] for k, (_, boxes) in enumerate(bare) if k != count]
        pin, boxes = next(_fitting(spot, board, [at], others, names=names), bare[count])
        board = with_taken(board, *boxes, *_stem(pin))
        out.append(pin)
    return Placed(tuple(out), board, 0, sum(len(pin.labels) for pin in out))


def _fitting(
    spot: Spot, board: Board, offsets: Sequence[tuple[float, float]], kept: Sequence[Box], *, names: bool
) -> Iterator[tuple[Pin, tuple[Box, ...]]]:
    """Candidates that cover nothing, the wordiest first."""
    name, value = ("place", shortened(spot.name)), ("value", spot.value)
    value_only = (value,) if spot.value else ()
    anchors: tuple[Anchor, ...] = ("start", "end")
    for words in ((name, *value_only), value_only, ()) if names else (value_only, ()):
        for offset in offsets:
            for anchor in anchors:
                pin, boxes = _candidate(spot, board, offset, anchor, words)
                if _pin_free(board, pin, boxes, kept):
                    yield pin, boxes


def _pin_free(board: Board, pin: Pin, boxes: tuple[Box, ...], kept: Sequence[Box]) -> bool:
    """Whether disc and words cover nothing, and the stem crosses no words."""
    disc, *words = boxes
    # a disc may stand out of the frame, its number is still read there
    wide = replace(board, frame=Box(board.frame.left - 12.0, board.frame.top, board.frame.right + 12.0, disc.bottom))
    if not free(wide, disc) or not all(free(with_taken(board, *kept), box) for box in words):
        return False
    return not any(meet(part, other) for part in _stem(pin) for other in board.taken)


def _stem(pin: Pin) -> tuple[Box, ...]:
    """The room a stem takes, in pieces along it."""
    pieces = 1 if pin.x == pin.point_x else 8
    across = [pin.point_x + (pin.x - pin.point_x) * i / pieces for i in range(pieces + 1)]
    down = [pin.point_y + (pin.y - pin.point_y) * i / pieces for i in range(pieces + 1)]
    return tuple(
        Box(
            min(across[i], across[i + 1]) - 1.0,
            min(down[i], down[i + 1]),
            max(across[i], across[i + 1]) + 1.0,
            max(down[i], down[i + 1]),
        )
        for i in range(pieces)
    )


def _candidate(
    spot: Spot, board: Board, offset: tuple[float, float], anchor: Anchor, words: tuple[tuple[str, str], ...]
) -> tuple[Pin, tuple[Box, ...]]:
    """A pin with its disc at one place, and the boxes it takes."""
    letter = board.letter
    radius = RADIUS * letter
    x, y = spot.x + offset[0] * letter, spot.y + offset[1] * letter
    first = y + (0.36 if len(words) < 2 else -0.25) * letter
    shift = (radius + 0.35 * letter) * (1.0 if anchor == "start" else -1.0)
    labels = tuple(
        Label(text, round(x + shift, 1), round(first + 1.15 * letter * row, 1), anchor, kind)
        for row, (kind, text) in enumerate(words)
    )
    disc = Box(x - radius - 1.0, y - radius - 1.0, x + radius + 1.0, y + radius + 1.0)
    pin = Pin(
        number=spot.number,
        stem=f"M{spot.x:.1f} {spot.y:.1f}L{x:.1f} {y:.1f}",
        x=round(x, 1),
        y=round(y, 1),
        radius=round(radius, 1),
        text_y=round(y + 0.34 * letter, 1),
        point_x=round(spot.x, 1),
        point_y=round(spot.y, 1),
        labels=labels,
    )
    return pin, (disc, *(box_of(label, letter) for label in labels))
