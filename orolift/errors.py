"""Errors: one root, and what each says.

    OroliftError                 anything orolift refuses
    |-- OutOfRangeError          a number outside the range a formula holds for     (ValueError)
    |-- CaseError                a key of the case file is wrong                    (ValueError)
    |-- DataFileError            a file cannot be used as what it should be         (ValueError)
    |-- MissingFileError         a file is not there or cannot be read or written   (OSError)
    |-- TerrainError             the terrain allows no transect                     (ValueError)
    |-- IncomingAirError         the incoming air contradicts itself                (ValueError)
    |-- NoCrossingError          the air does not cross the range                   (ValueError)
    |-- MissingExtraError        an optional library is needed                      (ImportError)
    `-- WorkersError             the processes that should do the work are not there (OSError)

Every message is one string that names the file, key or argument, the allowed
range and the next step; the facts are kept as attributes.
"""

from __future__ import annotations


class OroliftError(Exception):
    """Root of every error that orolift raises on purpose."""


class OutOfRangeError(OroliftError, ValueError):
    """A number lies outside the range a formula holds for."""


class CaseError(OroliftError, ValueError):
    """A key of the case file is missing, unknown or has a wrong value."""


class DataFileError(OroliftError, ValueError):
    """A file is there but cannot be used as what it should be."""


class MissingFileError(OroliftError, OSError):
    """A file is not there, or cannot be read or written."""


class TerrainError(OroliftError, ValueError):
    """The terrain allows no transect, or none with a range in it."""


class IncomingAirError(OroliftError, ValueError):
    """The incoming air is incomplete or contradicts itself."""


class NoCrossingError(OroliftError, ValueError):
    """The air does not cross the range."""


class MissingExtraError(OroliftError, ImportError):
    """An optional library is needed for this input."""


class WorkersError(OroliftError, OSError):
    """A scheduler does not answer, or a process ended before its work was done."""
