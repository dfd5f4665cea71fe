"""A CSV table whose column names carry their units: numbers, texts, line of each row."""

from __future__ import annotations

import csv
import math
import re
from array import array
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

import numpy as np

from orolift.errors import DataFileError
from orolift.sources.units import UNITS, alternatives, nearest, suffix_of, to_si

if TYPE_CHECKING:
    from collections.abc import Iterator, Mapping, Sequence

    from numpy.typing import NDArray

MISSING = frozenset({"", "-", "--", "/", "//", "///", "////", "na", "n/a", "nan", "null", "none", "-999", "-9999", "m"})
"""Cells that mean no value, in small letters; ``-9999`` forms with decimals count too."""
MISSING_OUT_OF_RANGE = frozenset({-99.0, -99.9, 999.0, 999.9, 999.99, 9999.0, 9999.9, 9999.99, 99999.0, 99999.9})
"""Numbers that mean no value in a column where they are impossible anyway; noted. Common practice, no source."""
MOST_ROWS = 100_000
"""Rows read at most: a balloon that reports every second for three hours gives 10 800."""

_DECIMAL_COMMA = re.compile(r"[+-]?\d+,\d+")
_THOUSANDS = re.compile(r"[+-]?[1-9]\d{0,2},\d{3}")
_PLAIN_NUMBER = re.compile(r"[+-]?((\d+\.?\d*|\.\d+)(e[+-]?\d+)?|inf|infinity)", re.ASCII | re.IGNORECASE)


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
    notes : tuple of str
        How unusual cells were read.
    faults : mapping of int to str
        What is wrong with a row, by its number from 0; only where faults are forgiven.
    """

    name: str
    columns: Mapping[str, NDArray[np.float64]]
    line: NDArray[np.int64]
    texts: Mapping[str, tuple[str, ...]] = field(default_factory=dict)
    notes: tuple[str, ...] = ()
    faults: Mapping[int, str] = field(default_factory=dict)


@dataclass
class _Head:
    """A column while it is read: what it is, its range in its own unit, its numbers so far."""

    stem: str
    suffix: str
    usual: Column
    to_usual: tuple[float, float]
    values: array[float] = field(default_factory=lambda: array("d"))
    texts: list[str] = field(default_factory=list)
    comma_line: int = 0
    could_be_thousands: bool = True
    code_line: int = 0


def number_table(
    text: str, name: str, allowed: Sequence[Column], *, most_rows: int = MOST_ROWS, forgiving: bool = False
) -> NumberTable:
    r"""Table of numbers from CSV text with one header line.

    Lines that start with ``#`` and blank lines are passed over. Commas,
    semicolons and tabs separate; the header decides which.

    Parameters
    ----------
    text : str
    name : str
        File, for messages.
    allowed : sequence of Column
    most_rows : int
        More rows are refused.
    forgiving : bool
        Whether a cell that is no number or out of range makes a fault of its
        row, with NaN in its place, and does not refuse the file.

    Returns
    -------
    NumberTable

    Raises
    ------
    DataFileError
        If a column is unknown, doubled or in a unit of another kind, a row has
        the wrong number of cells, a cell is no number or out of range, commas
        may be decimal or thousands, or there are more than `most_rows` rows.

    Examples
    --------
    >>> table = number_table("height_m;wind_kt\n100;7,5", "tower.csv", [Column("height_m", 0, 900), Column("wind_ms", 0, 90)])
    >>> float(table.columns["wind"][0].round(3)), table.notes
    (3.858, ('tower.csv: decimal commas are read as decimal points (first on line 2).',))
    """  # noqa: E501 (a doctest in one line)
    lines = _data_lines(text)
    number, first = next(lines, (0, ""))
    if not number:
        raise DataFileError(f"{name}: holds no header and no rows.")
    separator = max(",;\t", key=first.count)
    heads = _heads(_cells(first, separator, f"{name}: line {number}"), allowed, f"{name}: line {number}")
    line_numbers = array("q")
    faults: dict[int, str] | None = {} if forgiving else None
    for number, line in lines:
        where = f"{name}: line {number}"
        row = _cells(line, separator, where)
        if len(row) != len(heads):
            raise DataFileError(_wrong_width(line, len(row), len(heads), separator, where))
        if len(line_numbers) == most_rows:
            raise DataFileError(
                f"{where}: more than {most_rows} rows. Is it the right file? If so, keep every tenth row."
            )
        _take(row, heads, number, where, faults, len(line_numbers))
        line_numbers.append(number)
    if not line_numbers:
        raise DataFileError(f"{name}: has a header and no rows.")
    notes = _reading_notes(heads, name)
    columns = {head.stem: _in_si(head) for head in heads if not head.usual.text}
    texts = {head.stem: tuple(head.texts) for head in heads if head.usual.text}
    return NumberTable(name, columns, np.frombuffer(line_numbers, dtype=np.int64), texts, notes, faults or {})


def _take(row: list[str], heads: list[_Head], line: int, where: str, faults: dict[int, str] | None, at: int) -> None:
    """Add the cells of a row to its columns; a wrong one is noted among the faults where there are any."""
    for cell, head in zip(row, heads, strict=True):
        if head.usual.text:
            head.texts.append(cell)
            continue
        try:
            value = _number(cell, head, line, where)
        except DataFileError as error:
            if faults is None:
                raise
            value = math.nan
            faults.setdefault(at, str(error))
        head.values.append(value)


def _in_si(head: _Head) -> NDArray[np.float64]:
    """Values in SI; of a column without a unit as they are."""
    values = np.frombuffer(head.values, dtype=np.float64)
    return to_si(values, head.suffix) if head.suffix else values.copy()


def _key(head: _Head) -> str:
    """Name of a column as it stands, for messages."""
    return f"{head.stem}_{head.suffix}" if head.suffix else head.stem


def _data_lines(text: str) -> Iterator[tuple[int, str]]:
    """Number and text of each line that holds data, without a list of all of them."""
    start, number = 0, 0
    while start <= len(text):
        end = text.find("\n", start)
        end = len(text) if end < 0 else end
        line, number, start = text[start:end], number + 1, end + 1
        if line.strip() and not line.lstrip().startswith("#"):
            yield number, line


def _cells(line: str, separator: str, where: str) -> list[str]:
    if '"' not in line:
        return [cell.strip() for cell in line.split(separator)]
    try:
        return [cell.strip() for cell in next(csv.reader([line], delimiter=separator, strict=True))]
    except (csv.Error, StopIteration) as error:
        raise DataFileError(f"{where}: not a row of a CSV table ({error}).") from error


def _wrong_width(line: str, have: int, wanted: int, separator: str, where: str) -> str:
    """What to say about a row with the wrong number of cells."""
    other = next((mark for mark in ",;\t" if mark != separator and line.count(mark) == wanted - 1), None)
    if other is not None and wanted > 1:
        marks = {",": "commas", ";": "semicolons", "\t": "tabs"}
        cause = f"The header is separated by {marks[separator]}, this line by {marks[other]}; use one of them."
    else:
        cause = "Decimal commas need another separator, for example a semicolon."
    return f"{where}: {have} cells, but the header has {wanted}. {cause}"


def _heads(cells: list[str], allowed: Sequence[Column], where: str) -> list[_Head]:
    if len(cells) == 1 and re.search(r"\S[\s|:]+\S", cells[0]):
        raise DataFileError(
            f"{where}: '{cells[0][:60]}' is one column. Separate columns by commas, semicolons or tabs, nothing else."
        )
    heads = []
    for cell in cells:
        column, stem, suffix = _column(cell, allowed, where)
        heads.append(_Head(stem, suffix, column, _to_usual(column, suffix)))
    stems = [head.stem for head in heads]
    twice = next((stem for stem in stems if stems.count(stem) > 1), None)
    if twice is not None:
        raise DataFileError(f"{where}: {twice} stands in two columns; keep one.")
    return heads


def _to_usual(column: Column, suffix: str) -> tuple[float, float]:
    """Factor and offset from the unit of a column in the file to that of its usual name."""
    if not suffix:
        return 1.0, 0.0
    own, usual = UNITS[suffix], UNITS[(suffix_of(column.name) or ("", suffix))[1]]
    return own.factor / usual.factor, (own.offset - usual.offset) / usual.factor


def _reading_notes(heads: list[_Head], name: str) -> tuple[str, ...]:
    """What to say about decimal commas and codes for missing values; refuses commas that may be thousands."""
    commas = [head for head in heads if head.comma_line]
    for head in commas:
        if head.could_be_thousands:
            raise DataFileError(
                f"{name}: line {head.comma_line}: the commas of {_key(head)} may separate decimals or "
                "thousands: every one is followed by three digits. Write decimal points."
            )
    notes = []
    if commas:
        line = min(head.comma_line for head in commas)
        notes.append(f"{name}: decimal commas are read as decimal points (first on line {line}).")
    notes += [
        f"{name}: numbers such as 999 or 9999 in {_key(head)} are read as no value (first on line {head.code_line})."
        for head in heads
        if head.code_line
    ]
    return tuple(notes)


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


def _number(cell: str, head: _Head, line: int, where: str) -> float:
    word = cell.lower()
    if word in MISSING or word.startswith(("-999.", "-9999.")):
        return math.nan
    if _DECIMAL_COMMA.fullmatch(cell):
        head.comma_line = head.comma_line or line
        head.could_be_thousands = head.could_be_thousands and _THOUSANDS.fullmatch(cell) is not None
        cell = cell.replace(",", ".")
    if not _PLAIN_NUMBER.fullmatch(cell):
        raise DataFileError(f"{where}: {head.stem} '{cell[:40]}' is not a number.")
    value = float(cell)
    factor, offset = head.to_usual
    if not head.usual.low <= round(value * factor + offset, 9) <= head.usual.high:
        if value in MISSING_OUT_OF_RANGE:
            head.code_line = head.code_line or line
            return math.nan
        raise DataFileError(
            f"{where}: {_key(head)} {value:g} is outside the plausible range of {head.usual.name}, "
            f"{head.usual.low:g} to {head.usual.high:g}. Check the column and its unit."
        )
    return value
