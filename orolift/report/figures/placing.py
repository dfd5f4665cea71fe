"""Places for labels that cover neither each other nor the lines."""

from __future__ import annotations

from dataclasses import dataclass, field, replace
from typing import TYPE_CHECKING

import numpy as np

from orolift.report.figures.drawing import Anchor, Label

if TYPE_CHECKING:
    from collections.abc import Iterable

    from numpy.typing import NDArray

_WIDE_LETTERS = frozenset("mwMW@%—…")
_SLIM_LETTERS = frozenset("iljtfrI.,:;'|!()[] \u00a0\u202f")


@dataclass(frozen=True)
class Box:
    """A rectangle on a drawing, y downward."""

    left: float
    top: float
    right: float
    bottom: float


def meet(one: Box, other: Box) -> bool:
    """Whether two boxes share ground."""
    return one.left < other.right and other.left < one.right and one.top < other.bottom and other.top < one.bottom


def text_width(text: str, letter: float) -> float:
    """Width of a text in a plain sans serif, guessed on the wide side.

    Notes
    -----
    Three classes of letters; widths per letter height as common system fonts
    have them, rounded up: a judgement.
    """
    widths = (
        0.95 if c in _WIDE_LETTERS else 0.36 if c in _SLIM_LETTERS else 0.72 if c.isupper() else 0.61 for c in text
    )
    return letter * sum(widths)


def shortened(text: str, room: float, letter: float) -> str:
    """A text cut, with three dots at its end, so that it is no wider than the room for it.

    Examples
    --------
    >>> shortened("threshold met: dry", 200.0, 10.0), shortened("threshold met: dry and windy", 100.0, 10.0)
    ('threshold met: dry', 'threshold met: dr…')
    """
    if text_width(text, letter) <= room:
        return text
    while text and text_width(f"{text}…", letter) > room:
        text = text[:-1]
    return f"{text.rstrip()}…"


def box_of(label: Label, letter: float) -> Box:
    """The room a label takes."""
    width = text_width(label.text, letter)
    left = label.x - {"start": 0.0, "middle": 0.5, "end": 1.0}[label.anchor] * width
    return Box(left, label.y - 0.82 * letter, left + width, label.y + 0.26 * letter)


@dataclass(frozen=True, eq=False)
class Board:
    """A drawing being lettered: its frame, what is already there, the ground and the lines.

    Attributes
    ----------
    frame : Box
        Labels stay inside.
    letter : float
    ground_x, ground_y : ndarray
        Labels stay above this line.
    points_x, points_y : ndarray
        Labels cover none of these points.
    taken : tuple of Box
        Labels placed before.
    """

    frame: Box
    letter: float
    ground_x: NDArray[np.float64] = field(default_factory=lambda: np.empty(0))
    ground_y: NDArray[np.float64] = field(default_factory=lambda: np.empty(0))
    points_x: NDArray[np.float64] = field(default_factory=lambda: np.empty(0))
    points_y: NDArray[np.float64] = field(default_factory=lambda: np.empty(0))
    taken: tuple[Box, ...] = ()


def free(board: Board, box: Box, *, underground: bool = False) -> bool:
    """Whether a box lies inside the frame, off what is taken, off the lines, and above the ground or wholly in it."""
    frame = board.frame
    if box.left < frame.left or box.right > frame.right or box.top < frame.top or box.bottom > frame.bottom:
        return False
    if any(meet(box, other) for other in board.taken):
        return False
    if board.ground_x.size:
        inside = board.ground_y[(board.ground_x >= box.left) & (board.ground_x <= box.right)]
        edges = np.interp([box.left, box.right], board.ground_x, board.ground_y)
        if underground and max(float(inside.max(initial=-np.inf)), float(edges.max())) > box.top - 3.0:
            return False
        if not underground and min(float(inside.min(initial=np.inf)), float(edges.min())) < box.bottom:
            return False
    x, y = board.points_x, board.points_y
    covered = (x > box.left - 2.0) & (x < box.right + 2.0) & (y > box.top - 1.0) & (y < box.bottom + 1.0)
    return not bool(covered.any())


def with_taken(board: Board, *boxes: Box) -> Board:
    """The board with more of it taken."""
    return replace(board, taken=(*board.taken, *boxes))


def put(
    board: Board, candidates: Iterable[tuple[Label, ...]], *, needed: bool = False, underground: bool = False
) -> tuple[tuple[Label, ...], Board]:
    """The first group of labels that fits, and the board with its room taken.

    Parameters
    ----------
    board : Board
    candidates : iterable of tuple of Label
        Groups in order of preference; a group is placed whole.
    needed : bool
        Whether to take the first group when none fits, instead of none.
    underground : bool
        Whether the labels belong into the ground instead of above it.

    Returns
    -------
    (tuple of Label, Board)
        No labels when nothing fits and they are not needed.
    """
    first: tuple[Label, ...] = ()
    for group in candidates:
        first = first or group
        boxes = [box_of(label, board.letter) for label in group]
        if all(free(board, box, underground=underground) for box in boxes):
            return group, with_taken(board, *boxes)
    if not needed:
        return (), board
    return first, with_taken(board, *(box_of(label, board.letter) for label in first))


def beside(
    x: NDArray[np.float64], y: NDArray[np.float64], text: str, kind: str, board: Board
) -> list[tuple[Label, ...]]:
    """Places for the name of a line: near its middle first, on either side of it."""
    length = np.concatenate([[0.0], np.cumsum(np.hypot(np.diff(x), np.diff(y)))])
    drop = 0.3 * board.letter
    sides: tuple[tuple[Anchor, float], ...] = (("start", 1.0), ("end", -1.0))
    out: list[tuple[Label, ...]] = []
    for gap in (0.7, 1.3, 2.0, 3.0):
        for share in (0.5, 0.4, 0.6, 0.3, 0.7, 0.2, 0.8, 0.1, 0.9):
            at_x, at_y = (float(np.interp(share * length[-1], length, value)) for value in (x, y))
            for anchor, side in sides:
                spot = round(at_x + side * gap * board.letter, 1)
                out.append((Label(text, spot, round(at_y + drop, 1), anchor, kind),))
    return out
