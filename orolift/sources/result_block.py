"""What every block of the results file is made of."""

from __future__ import annotations

from pydantic import BaseModel, ConfigDict

Range = dict[str, tuple[float, float]]
Chance = dict[str, float]


class Block(BaseModel):
    """One block of the results; numbers are never NaN or infinite."""

    model_config = ConfigDict(extra="forbid", allow_inf_nan=False, frozen=True)
