"""What fire weather needs from a case: its rule file read, and yesterday's code."""

from __future__ import annotations

from typing import TYPE_CHECKING

from orolift.fire.sites import FireSettings
from orolift.sources.rules_file import read_rules
from orolift.sources.units import to_si

if TYPE_CHECKING:
    from pathlib import Path

    from orolift.sources.case_model import Case


def fire_settings(case: Case, folder: Path) -> FireSettings:
    """Settings of fire weather of a case.

    Parameters
    ----------
    case : Case
    folder : Path
        Of the case file.

    Returns
    -------
    FireSettings
        Without the table [fire]: no thresholds, no codes.

    Raises
    ------
    CaseError, DataFileError, MissingFileError
        If the rule file is at fault.
    """
    rain = to_si(case.rain.duration_h, "h")
    if case.fire is None:
        return FireSettings(rain_duration=rain)
    rules = None if case.fire.rules_file is None else read_rules(case.fire.rules_file, folder)
    return FireSettings(
        previous_code=case.fire.previous_fine_fuel_code,
        drought_index=case.fire.drought_index,
        rules=rules,
        rain_duration=rain,
    )
