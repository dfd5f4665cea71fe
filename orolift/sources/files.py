"""Reading text and writing whole files: the rules every reader and writer shares."""

from __future__ import annotations

import csv
import io
import os
import re
import tempfile
from pathlib import Path
from typing import TYPE_CHECKING

from orolift.errors import CaseError, DataFileError, MissingFileError

if TYPE_CHECKING:
    from collections.abc import Iterable, Mapping, Sequence

TEXT_LIMIT = 32 * 1024 * 1024
"""Largest text file read, in bytes: a radiosonde ascent at one-second steps is under 1 MB."""

_READ: set[str] = set()
"""Files this run has read, so that none of them is written over."""

_ADDRESS = re.compile(r"^\s*(?:[a-z][a-z0-9+.-]+://|/vsi|(?:http|https|ftp|s3|gs|az)(?:/|:))", re.IGNORECASE)


def refuse_address(path: str | Path, where: str) -> None:
    """Refuse anything that is an address on a network and no file on this machine.

    Parameters
    ----------
    path : str or Path
        What the user gave as a file.
    where : str
        Key or option it came from, for the message.

    Raises
    ------
    DataFileError
        If `path` looks like a web, object-store or GDAL virtual address.

    Examples
    --------
    >>> refuse_address("varn.tif", "elevation_file")
    >>> refuse_address("/vsicurl/somewhere", "elevation_file")
    Traceback (most recent call last):
        ...
    orolift.errors.DataFileError: elevation_file: '/vsicurl/somewhere' is an address, and orolift reads local files only. Save it beside the case first.
    """  # noqa: E501 (a doctest shows the whole message)
    if _ADDRESS.match(str(path)):
        raise DataFileError(
            f"{where}: '{path}' is an address, and orolift reads local files only. Save it beside the case first."
        )


def existing_file(path: str | Path, where: str, folder: Path | None = None) -> Path:
    """Path of a file that is there and is a file.

    Parameters
    ----------
    path : str or Path
        As the user gave it.
    where : str
        Key or option it came from, for the message.
    folder : Path, optional
        Folder that relative paths start from; the current one by default.

    Returns
    -------
    Path

    Raises
    ------
    DataFileError
        If it is an address, a folder or empty.
    MissingFileError
        If nothing is there or it may not be read.
    """
    refuse_address(path, where)
    full = Path(path) if folder is None else folder / path
    try:
        if full.is_dir():
            raise DataFileError(f"{where}: {full} is a folder; name a file in it.")
        size = full.stat().st_size
    except (OSError, ValueError) as error:
        hint = "Paths in a case are relative to the case file." if folder is not None else "Check its name and folder."
        raise MissingFileError(f"{where}: {full} cannot be found ({_reason(error)}). {hint}") from error
    if size == 0:
        raise DataFileError(f"{where}: {full} is empty.")
    _READ.add(_real(full))
    return full


def forget_read() -> None:
    """Start a run: no file has been read yet."""
    _READ.clear()


def refuse_over_read(paths: Iterable[str | Path]) -> None:
    """Refuse to write over a file that this run has read: a table must not take the place of its observations.

    Parameters
    ----------
    paths : iterable of str or Path

    Raises
    ------
    CaseError
        That names the file.
    """
    for path in paths:
        if _real(path) in _READ:
            raise CaseError(f"{path} has been read in this run and is not written over. Give another name.")


def _real(path: str | Path) -> str:
    """One spelling of a path, however it is written."""
    return os.path.normcase(os.path.realpath(path))


def read_text(path: str | Path, where: str, folder: Path | None = None, *, limit: int = TEXT_LIMIT) -> str:
    """Whole text of a local file, without its byte-order mark.

    UTF-8 is expected; UTF-16, with a mark or without, and Latin-1 letters are read too.

    Parameters
    ----------
    path, where, folder
        As in `existing_file`.
    limit : int
        Most bytes that are read.

    Returns
    -------
    str
        With unix line ends.

    Raises
    ------
    DataFileError
        If it is larger than `limit` or is no text.
    MissingFileError
        If it cannot be read.
    """
    full = existing_file(path, where, folder)
    try:
        with full.open("rb") as stream:
            raw = stream.read(min(full.stat().st_size, limit) + 1)  # reading sets aside as much as is asked for
    except OSError as error:
        raise MissingFileError(f"{where}: {full} cannot be read ({_reason(error)}).") from error
    if len(raw) > limit:
        raise DataFileError(
            f"{where}: {full} is larger than {limit // 2**20} MB, the limit for text. Is it the right file?"
        )
    return _decoded(raw, f"{where}: {full}").replace("\r\n", "\n").replace("\r", "\n")


def _decoded(raw: bytes, name: str) -> str:
    if raw.startswith((b"\xff\xfe", b"\xfe\xff")):
        return _utf_16(raw, "utf-16", name)
    if b"\0" in raw:
        zeros = raw[0::2].count(0), raw[1::2].count(0)
        # Text in UTF-16 has its zeros on one side, one for most letters.
        if len(raw) % 2 or min(zeros) > 0 or max(zeros) < len(raw) // 4:
            raise DataFileError(f"{name} is a binary file, not text.")
        return _utf_16(raw, "utf-16-le" if zeros[1] else "utf-16-be", name)
    try:
        return raw.decode("utf-8-sig")
    except UnicodeDecodeError:
        return raw.decode("latin-1")


def _utf_16(raw: bytes, encoding: str, name: str) -> str:
    try:
        text = raw.decode(encoding)
    except UnicodeDecodeError as error:
        raise DataFileError(f"{name} starts like UTF-16 text but is not. Save it as UTF-8.") from error
    if "\0" in text:
        raise DataFileError(f"{name} is a binary file, or text in UTF-32. Save it as UTF-8.")
    return text


def _reason(error: Exception) -> str:
    text = getattr(error, "strerror", None) or str(error)
    return str(text).lower()


def write_all(contents: Mapping[Path, bytes]) -> None:
    """Write several files so that either all of them appear, whole, or none.

    Each goes to a temporary file in its own folder; only when every one is
    written are they renamed.

    Parameters
    ----------
    contents : mapping of Path to bytes

    Raises
    ------
    CaseError
        If one of them has been read in this run.
    MissingFileError
        If a folder is missing, a name is taken by a folder, or the disk is full.
    """
    refuse_over_read(contents)
    waiting: list[tuple[str, Path]] = []
    try:
        for path, data in contents.items():
            waiting.append((_written_aside(path, data), path))
        while waiting:
            aside, path = waiting[0]
            try:
                os.replace(aside, path)  # noqa: PTH105 (a str from mkstemp)
            except OSError as error:
                raise MissingFileError(f"{path} cannot be written ({_reason(error)}).") from error
            waiting.pop(0)
    finally:
        for aside, _ in waiting:
            Path(aside).unlink(missing_ok=True)


def refuse_unwritable(path: Path) -> None:
    """Refuse a file that could not be written, before long work is done for it.

    Parameters
    ----------
    path : Path

    Raises
    ------
    MissingFileError
        If its folder is missing or closed to us, or its name is taken by a folder.
    """
    if path.is_dir():
        raise MissingFileError(f"{path} is a folder; give the name of a file in it.")
    folder = path.parent
    if not folder.is_dir():
        raise MissingFileError(f"{path} cannot be written: {folder} is not a folder. Make it first.")
    if not os.access(folder, os.W_OK):
        raise MissingFileError(f"{path} cannot be written: {folder} is closed to you.")


def _written_aside(path: Path, data: bytes) -> str:
    refuse_unwritable(path)
    folder = path.parent
    aside = ""
    try:
        handle, aside = tempfile.mkstemp(prefix=f".{path.name}.", suffix=".part", dir=folder)
        with os.fdopen(handle, "wb") as stream:
            stream.write(data)
        umask = os.umask(0)
        os.umask(umask)
        Path(aside).chmod(0o666 & ~umask)
    except OSError as error:
        if aside:
            Path(aside).unlink(missing_ok=True)
        raise MissingFileError(f"{path} cannot be written ({_reason(error)}).") from error
    return aside


def csv_text(header: Sequence[str], rows: Iterable[Sequence[object]]) -> str:
    r"""Comma-separated table that a spreadsheet reads as data, never as formulas.

    Text that starts with ``= + - @`` is quoted and led by an apostrophe;
    numbers, negative ones too, stay numbers. None becomes an empty cell.

    Parameters
    ----------
    header : sequence of str
    rows : iterable of sequences

    Returns
    -------
    str

    Examples
    --------
    >>> csv_text(["name", "temperature_c"], [["=1+1", -2.5], ["Tarn", None]]).splitlines()
    ['"name","temperature_c"', '"\'=1+1",-2.5', '"Tarn",""']
    """
    out = io.StringIO()
    writer = csv.writer(out, quoting=csv.QUOTE_NONNUMERIC, lineterminator="\n")
    for row in [list(header), *rows]:
        writer.writerow([_cell(value) for value in row])
    return out.getvalue()


def _cell(value: object) -> object:
    if value is None:
        return ""
    if isinstance(value, str) and value[:1] in {"=", "+", "-", "@", "\t"}:
        return f"'{value}"
    return value
