"""The table of the case file about fire weather."""

from __future__ import annotations

from typing import Annotated

from pydantic import Field

from orolift.sources.case_table import Name, Table


class Fire(Table):
    """What fire weather needs beside the air: the thresholds of the region, and what the fuel remembers."""

    rules_file: Name | None = Field(default=None, description="thresholds of the region, TOML")
    previous_fine_fuel_code: Annotated[float, Field(ge=0.0, le=101.0)] | None = Field(
        default=None, description="yesterday's Fine Fuel Moisture Code; default: codes and spread are left out"
    )
    drought_index: Annotated[float, Field(ge=0.0, le=800.0)] | None = Field(
        default=None, description="of Keetch and Byram, in hundredths of an inch"
    )
