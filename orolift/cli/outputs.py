"""The files a command is going to write: no two to one path, none over a case."""

from __future__ import annotations

import os
from pathlib import Path

from orolift.errors import CaseError


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


def _place(path: str | Path) -> str:
    """A path as one word, however it is written."""
    return os.path.normcase(os.path.realpath(path))
