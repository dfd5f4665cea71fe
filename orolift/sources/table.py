"""A CSV table whose column names carry their units: numbers, texts, line of each row."""

from __future__ import annotations

import csv
import math
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

import numpy as np

from orolift.errors import DataFileError
from orolift.sources.units import alternatives, converted, nearest, suffix_of, to_si

if TYPE_CHECKING:
    from collections.abc import Iterator, Mapping, Sequence

    from numpy.typing import NDArray

MISSING = frozenset({"", "-", "--", "/", "//", "///", "////", "na", "n/a", "nan", "null", "none", "-999", "-9999", "m"})
"""Cells that mean no value, in small letters; ``-9999`` forms with decimals count too."""


@dataclass(frozen=True)
class Column:
    """One quantity a table may hold.

    Attributes
    ----------
    name : str
        Name with the usual unit, ``temperature_c``; other units of the kind are read too. A name
        that ends in no unit (``longitude``) is read as it is.
    low, high : float
        Plausible range, in the unit of `name`.
    text : bool
        True for a column of names; it has no range.
    """

    name: str
    low: float = -math.inf
    high: float = math.inf
    text: bool = False


@dataclass(frozen=True)
class NumberTable:
    """Columns of a table in SI.

    Attributes
    ----------
    name : str
        File, for messages.
    columns : mapping of str to ndarray (n,)
        By quantity, without the unit: ``temperature`` in K, ``height`` in m; NaN where missing.
    line : ndarray of int (n,)
        Line of the file each row stands on, first line 1.
    texts : mapping of str to tuple of str, length n
        Columns of text, as they stand.
    """

    name: str
    columns: Mapping[str, NDArray[np.float64]]
    line: NDArray[np.int64]
    texts: Mapping[str, tuple[str, ...]] = field(default_factory=dict)


def number_table(text: str, name: str, allowed: Sequence[Column]) -> NumberTable:
    """Table of numbers from CSV text with one header line.

    Lines that start with ``#`` and blank lines are passed over. Commas,
    semicolons and tabs separate; the header decides which.

    Parameters
    ----------
    text : str
    name : str
        File, for messages.
    allowed : sequence of Column

    Returns
    -------
    NumberTable

    Raises
    ------
    DataFileError
        If a column is unknown, doubled or in a unit of another kind, a row has
        the wrong number of cells, or a cell is no number or out of range.
    """
    lines = [(number, line) for number, line in enumerate(text.split("\n"), start=1) if _holds_data(line)]
    if not lines:
        raise DataFileError(f"{name}: holds no header and no rows.")
    separator = max(",;\t", key=lines[0][1].count)
    cells = list(_rows(lines, separator, name))
    if len(cells) == 1:
        raise DataFileError(f"{name}: has a header and no rows.")
    heads = [_column(head, allowed, f"{name}: line {cells[0][0]}") for head in cells[0][1]]
    stems = [stem for _, stem, _ in heads]
    twice = next((stem for stem in stems if stems.count(stem) > 1), None)
    if twice is not None:
        raise DataFileError(f"{name}: line {cells[0][0]}: {twice} stands in two columns; keep one.")
    numeric = [(i, head) for i, head in enumerate(heads) if not head[0].text]
    rows = [[_number(row[i], head, f"{name}: line {number}") for i, head in numeric] for number, row in cells[1:]]
    values = np.array(rows, dtype=np.float64)
    columns = {stem: _in_si(values[:, i], suffix) for i, (_, (_, stem, suffix)) in enumerate(numeric)}
    texts = {stem: tuple(row[i] for _, row in cells[1:]) for i, (column, stem, _) in enumerate(heads) if column.text}
    return NumberTable(name, columns, np.array([number for number, _ in cells[1:]], dtype=np.int64), texts)


def _in_si(values: NDArray[np.float64], suffix: str) -> NDArray[np.float64]:
    """Values in SI; without a suffix as they are."""
    return to_si(values, suffix) if suffix else values


def _holds_data(line: str) -> bool:
    return bool(line.strip()) and not line.lstrip().startswith("#")


def _rows(lines: list[tuple[int, str]], separator: str, name: str) -> Iterator[tuple[int, list[str]]]:
    width = 0
    for number, line in lines:
        try:
            row = [cell.strip() for cell in next(csv.reader([line], delimiter=separator, strict=True))]
        except (csv.Error, StopIteration) as error:
            raise DataFileError(f"{name}: line {number}: not a row of a CSV table ({error}).") from error
        width = width or len(row)
        if len(row) != width:
            raise DataFileError(
                f"{name}: line {number}: {len(row)} cells, but the header has {width}. "
                "Decimal commas need another separator, for example a semicolon."
            )
        yield number, row


def _column(head: str, allowed: Sequence[Column], where: str) -> tuple[Column, str, str]:
    """Column a header cell names, with its quantity and unit suffix."""
    key = head.strip().lower()
    names = [column.name for column in allowed]
    for column in allowed:
        if key == column.name or key in alternatives(column.name):
            stem, suffix = suffix_of(key) or (key, "")
            return column, stem, suffix
    parts = suffix_of(key)
    same = next((known for known in names if parts and (suffix_of(known) or ("",))[0] == parts[0]), None)
    if same is not None:
        raise DataFileError(f"{where}: column '{head}': use one of {', '.join([same, *alternatives(same)])}.")
    stem_only = next((known for known in names if (suffix_of(known) or ("",))[0] == key), None)
    close = stem_only or nearest(key, [*names, *(other for known in names for other in alternatives(known))])
    hint = f"Did you mean {close}?" if close else f"Known columns: {', '.join(names)}."
    raise DataFileError(f"{where}: column '{head}' is not known. {hint}")


def _number(cell: str, head: tuple[Column, str, str], where: str) -> float:
    column, stem, suffix = head
    word = cell.lower()
    if word in MISSING or word.startswith(("-999.", "-9999.")):
        return math.nan
    try:
        value = float(cell)
    except ValueError:
        raise DataFileError(f"{where}: {stem} '{cell[:40]}' is not a number.") from None
    in_usual = converted(value, suffix, (suffix_of(column.name) or ("", suffix))[1]) if suffix else value
    if not column.low <= in_usual <= column.high:
        raise DataFileError(
            f"{where}: {stem}{'_' if suffix else ''}{suffix} {value:g} is outside the plausible range of "
            f"{column.name}, {column.low:g} to {column.high:g}. Check the column and its unit."
        )
    return value
