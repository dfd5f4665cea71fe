"""The files a command is going to write: no two to one path, none over a case; and the time their pages carry."""

from __future__ import annotations

import logging
import os
from datetime import UTC, datetime
from pathlib import Path

from orolift.errors import CaseError, MissingFileError

log = logging.getLogger(__name__)


class Outputs:
    """Files to write, gathered before the first of them is written.

    Attributes
    ----------
    contents : dict of Path to bytes
        For `orolift.sources.files.write_all`.
    """

    def __init__(self) -> None:
        self.contents: dict[Path, bytes] = {}
        self._taken: dict[str, str] = {}

    def keep(self, path: str | Path, what: str) -> None:
        """Let nothing be written over a file.

        Parameters
        ----------
        path : str or Path
        what : str
            What it is, for the message.

        Raises
        ------
        CaseError
            If it is kept already.
        """
        if _place(path) in self._taken:
            raise CaseError(f"{path} is given twice. Give each case once.")
        self._taken[_place(path)] = what

    def add(self, path: str | Path, content: bytes, what: str) -> None:
        """Take in a file.

        Parameters
        ----------
        path : str or Path
        content : bytes
        what : str
            Option or case it is for.

        Raises
        ------
        CaseError
            If another file of this run has the same path, or it is a case.
        """
        place = _place(path)
        if place in self._taken:
            raise CaseError(f"{what}: {path} is already {self._taken[place]}. Nothing is written; give another name.")
        self._taken[place] = f"what {what} writes"
        self.contents[Path(path)] = content

    def write(self, folder: Path | None) -> None:
        """Write all that was taken in, or nothing.

        Parameters
        ----------
        folder : Path or None
            Made for it when it is not there; gone again when nothing is written.

        Raises
        ------
        MissingFileError
            If something cannot be written.
        """
        from orolift.sources.files import write_all

        new = folder is not None and _made(folder)
        try:
            write_all(self.contents)
        except MissingFileError:
            if new and folder is not None:
                folder.rmdir()
            raise
        log.debug("written: %s", ", ".join(map(str, self.contents)))


def made_now() -> datetime:
    """The time that pages carry; it honours SOURCE_DATE_EPOCH."""
    stamp = os.environ.get("SOURCE_DATE_EPOCH")
    return datetime.fromtimestamp(int(stamp), UTC) if stamp and stamp.isdigit() else datetime.now(UTC)


def refuse_together(given: list[str], cases: int, folder: str | None) -> None:
    """Say which options cannot be met together.

    Parameters
    ----------
    given : list of str
        Options that name a file.
    cases : int
    folder : str or None

    Raises
    ------
    CaseError
    """
    for option in given:
        if folder is not None:
            raise CaseError(f"--folder writes everything there is; leave {option} out, or leave --folder out.")
        if cases > 1 and option not in {"--maps", "--lee-map"}:
            raise CaseError(
                f"{option} takes one case, and {cases} are given. Run it once for each case, or give --folder."
            )


def _made(folder: Path) -> bool:
    """Whether a folder had to be made; it is there afterwards."""
    if folder.is_dir():
        return False
    try:
        folder.mkdir()
    except OSError as error:
        raise MissingFileError(
            f"--folder: {folder} cannot be made ({error.strerror}). Name a new folder in one that exists."
        ) from error
    return True


def _place(path: str | Path) -> str:
    """A path as one word, however it is written."""
    return os.path.normcase(os.path.realpath(path))
