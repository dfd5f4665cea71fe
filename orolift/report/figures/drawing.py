"""What drawings are made of: curves, labels, pins; coordinates in drawing units, y downward."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Generic, Literal, TypeVar

import numpy as np

if TYPE_CHECKING:
    from numpy.typing import NDArray

Anchor = Literal["start", "middle", "end"]
Drawn = TypeVar("Drawn")


@dataclass(frozen=True)
class Curve:
    """A line or an area.

    Attributes
    ----------
    path : str
        Path data.
    kind : str
        What it stands for: the class the style sheet knows.
    """

    path: str
    kind: str


@dataclass(frozen=True)
class Label:
    """A line of text.

    Attributes
    ----------
    text : str
    x, y : float
        Anchor point, on the baseline.
    anchor : 'start', 'middle' or 'end'
    kind : str
        What it stands for: the class the style sheet knows.
    """

    text: str
    x: float
    y: float
    anchor: Anchor = "start"
    kind: str = "note"


@dataclass(frozen=True)
class Pin:
    """A numbered site: a point, a stem, a disc with the number, words beside it.

    Attributes
    ----------
    number : int
        The same in every figure and table.
    stem : str
        Path from the point to the disc.
    x, y, radius : float
        The disc; radius 0 where there is no room for one.
    text_y : float
        Baseline of the number.
    point_x, point_y : float
    labels : tuple of Label
    """

    number: int
    stem: str
    x: float
    y: float
    radius: float
    text_y: float
    point_x: float
    point_y: float
    labels: tuple[Label, ...]


@dataclass(frozen=True)
class Figure(Generic[Drawn]):
    """One figure, drawn twice: for a page and for a narrow screen.

    Attributes
    ----------
    key : str
        Stem of its ids, unique on the page.
    drawing, narrow : Drawn
    title, alt : str
        For readers who cannot see it.
    caption : str
    """

    key: str
    drawing: Drawn
    narrow: Drawn
    title: str
    alt: str
    caption: str


def path_data(x: NDArray[np.float64], y: NDArray[np.float64], *, closed: bool = False) -> str:
    """Path data of a polyline, to a tenth of a unit.

    Examples
    --------
    >>> path_data(np.array([0.0, 10.0]), np.array([5.0, 7.25]))
    'M0 5L10 7.2'
    """
    across, down = (np.round(values, 1) + 0.0 for values in (x, y))
    steps = "L".join([f"{a:g} {b:g}" for a, b in zip(across.tolist(), down.tolist(), strict=True)])
    return f"M{steps}{'Z' if closed else ''}"


def thinned(x: NDArray[np.float64], y: NDArray[np.float64], tolerance: float = 0.35) -> NDArray[np.int_]:
    """Indices of the points that draw a polyline within a tolerance.

    Parameters
    ----------
    x, y : ndarray, shape (n,)
    tolerance : float
        Largest distance of a dropped point from the line drawn.

    Returns
    -------
    ndarray of int, shape (m,)
        First and last always among them.

    Notes
    -----
    The farthest point from the chord is kept and the two halves are treated
    in the same way (Douglas and Peucker 1973, Cartographica 10, 112-122).

    Examples
    --------
    >>> thinned(np.array([0.0, 1.0, 2.0, 3.0]), np.array([0.0, 1.0, 2.0, 0.0]))
    array([0, 2, 3])
    """
    keep = np.zeros(x.size, dtype=bool)
    keep[[0, -1]] = True
    first, last = np.array([0]), np.array([x.size - 1])
    while True:
        wide = last - first > 1
        first, last = first[wide], last[wide]
        if not first.size:
            return np.flatnonzero(keep)
        middle, away = _farthest(x, y, first, last)
        split = away > tolerance
        first, middle, last = first[split], middle[split], last[split]
        keep[middle] = True
        first, last = np.concatenate([first, middle]), np.concatenate([middle, last])


def _farthest(
    x: NDArray[np.float64], y: NDArray[np.float64], first: NDArray[np.int_], last: NDArray[np.int_]
) -> tuple[NDArray[np.int_], NDArray[np.float64]]:
    """Of each stretch between two points the inner one farthest from the chord, and its distance; all at once."""
    inner = last - first - 1
    start = np.concatenate([[0], np.cumsum(inner)[:-1]])
    index = np.arange(int(inner.sum())) + np.repeat(first + 1 - start, inner)
    dx, dy = (np.repeat(v[last] - v[first], inner) for v in (x, y))
    px, py = (v[index] - np.repeat(v[first], inner) for v in (x, y))
    length = np.hypot(dx, dy)
    closed = length == 0.0
    away = np.where(closed, np.hypot(px, py), np.abs(px * dy - py * dx) / np.where(closed, 1.0, length))
    most = np.maximum.reduceat(away, start)
    top = np.flatnonzero(away == np.repeat(most, inner))
    of_stretch = np.repeat(np.arange(first.size), inner)[top]
    leading = np.concatenate([[True], np.diff(of_stretch) > 0])
    return index[top[leading]], most


def polyline(x: NDArray[np.float64], y: NDArray[np.float64], kind: str, index: NDArray[np.int_] | None = None) -> Curve:
    """A line through points, thinned to what can be seen or to the points of an index."""
    chosen = thinned(x, y) if index is None else index
    return Curve(path_data(x[chosen], y[chosen]), kind)


def area(
    x: NDArray[np.float64], y: NDArray[np.float64], floor: float, kind: str, index: NDArray[np.int_] | None = None
) -> Curve:
    """The area between a line, thinned as in `polyline`, and a level floor below it."""
    chosen = thinned(x, y) if index is None else index
    across = np.concatenate([x[chosen], x[chosen[[-1, 0]]]])
    return Curve(path_data(across, np.concatenate([y[chosen], [floor, floor]]), closed=True), kind)


def arrow_head(x: float, y: float, along_x: float, along_y: float, size: float, kind: str) -> Curve:
    """A small filled triangle whose point is at (x, y), looking along a direction."""
    length = float(np.hypot(along_x, along_y)) or 1.0
    ux, uy = along_x / length, along_y / length
    back_x, back_y = x - size * ux, y - size * uy
    half = 0.42 * size
    corners_x = np.array([x, back_x - half * uy, back_x + half * uy])
    corners_y = np.array([y, back_y + half * ux, back_y - half * ux])
    return Curve(path_data(corners_x, corners_y, closed=True), kind)


def head_along(x: NDArray[np.float64], y: NDArray[np.float64], share: float, size: float, kind: str) -> Curve | None:
    """An arrow head on a line, at a share of its length; None on a line too short for one."""
    length = np.concatenate([[0.0], np.cumsum(np.hypot(np.diff(x), np.diff(y)))])
    if length[-1] < 4.0 * size:
        return None
    here = share * length[-1]
    ends = np.array([max(here - size, 0.0), min(here + 0.5 * size, length[-1])])
    end_x, end_y = np.interp(ends, length, x), np.interp(ends, length, y)
    return arrow_head(
        float(end_x[1]), float(end_y[1]), float(end_x[1] - end_x[0]), float(end_y[1] - end_y[0]), size, kind
    )
