"""The files a command is going to write: no two to one path, none over a case; and the time their pages carry."""

from __future__ import annotations

import logging
import os
from datetime import UTC, datetime
from pathlib import Path

from orolift.errors import CaseError, MissingFileError
from orolift.sources.read_files import place_of, refuse_over_inputs

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
        self._planned: set[str] = set()
        self._folders: dict[Path, str] = {}

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
        if place_of(path) in self._taken:
            raise CaseError(f"{path} is given twice. Give each case once.")
        self._taken[place_of(path)] = what

    def plan(self, path: str | Path, what: str) -> None:
        """Say before any work that a file is going to be written.

        Parameters
        ----------
        path : str or Path
        what : str
            Option or case it is for, as for `add`.

        Raises
        ------
        CaseError
            If another file of this run has the same path, or it is a case or another input.
        MissingFileError
            If it could not be written.
        """
        from orolift.sources.files import refuse_unwritable
        from orolift.sources.read_files import to_be_written

        self._take(path, what)
        if Path(path).parent not in self._folders:
            refuse_unwritable(Path(path))
        to_be_written({Path(path): what})
        self._planned.add(place_of(path))

    def plan_folder(self, folder: Path, option: str) -> None:
        """Say before any work that files go into a folder; one that is not there is made when they are written.

        Parameters
        ----------
        folder : Path
        option : str

        Raises
        ------
        MissingFileError
            If it is a file, or could not be made.
        """
        if folder.is_dir():
            return
        if folder.exists():
            raise MissingFileError(f"{option}: {folder} is a file. Name a folder.")
        if not folder.absolute().parent.is_dir():
            raise MissingFileError(
                f"{option}: {folder} cannot be made: {folder.parent} is not a folder. Name a new folder in one that "
                "exists."
            )
        self._folders[folder] = option

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
            If another file of this run has the same path, or it is a case or another input.
        """
        place = place_of(path)
        if place in self._planned:
            self._planned.remove(place)
        else:
            self._take(path, what)
            refuse_over_inputs({Path(path): what})
        self.contents[Path(path)] = content

    def write(self) -> None:
        """Write all that was taken in, or nothing; folders made for it are gone again when nothing is written.

        Raises
        ------
        MissingFileError
            If something cannot be written.
        """
        from orolift.sources.files import write_all

        made: list[Path] = []
        try:
            for folder, option in self._folders.items():
                _make(folder, option)
                made.append(folder)
            write_all(self.contents)
            made.clear()
        finally:
            for folder in made:
                folder.rmdir()
        log.debug("written: %s", ", ".join(map(str, self.contents)))

    def _take(self, path: str | Path, what: str) -> None:
        """Give a path to one output."""
        place = place_of(path)
        if place in self._taken:
            raise CaseError(f"{what}: {path} is already {self._taken[place]}. Nothing is written; give another name.")
        self._taken[place] = f"what {what} writes"


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


def _make(folder: Path, option: str) -> None:
    try:
        folder.mkdir(exist_ok=True)
    except OSError as error:
        raise MissingFileError(
            f"{option}: {folder} cannot be made ({error.strerror}). Name a new folder in one that exists."
        ) from error
