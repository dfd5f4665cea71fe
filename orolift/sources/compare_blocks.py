"""What the results file of a comparison is made of."""

from __future__ import annotations

from pydantic import Field

from orolift.sources.result_block import Block
from orolift.sources.results import Program  # noqa: TC001 (pydantic reads it when the models are made)


class ScoreBlock(Block):
    """Errors, estimate minus observed, in the unit of the quantity."""

    count: int
    bias: float
    mean_absolute_error: float
    root_mean_square_error: float


class ReferenceBlock(Block):
    """A simple answer over the same pairs."""

    score: ScoreBlock
    skill: float | None = Field(description="of the estimate against it: 1 perfect, 0 no better, negative worse")


class QuantityBlock(Block):
    """Scores of one quantity over all pairs in the lee."""

    quantity: str
    score: ScoreBlock
    coverage: float | None = Field(description="share of observations inside the range; null without a range")
    unchanged: ReferenceBlock | None = Field(description="incoming air at the same height")
    popular_picture: ReferenceBlock | None = Field(description="surface air over the crest, all condensate removed")
    crest_air: ReferenceBlock | None = Field(description="incoming air of crest height, brought down dry")


class ContingencyBlock(Block):
    """Hits and false alarms."""

    hits: int
    false_alarms: int
    misses: int
    correct_rejections: int
    probability_of_detection: float | None
    false_alarm_ratio: float | None
    threat_score: float | None
    heidke_skill_score: float | None


class EventBlock(Block):
    """A threshold, of the command line or of the rules of the case."""

    event: str
    table: ContingencyBlock


class SpellBlock(Block):
    """A time in which the rule of the onset test holds."""

    start: str = Field(description="first time it holds, ISO 8601")
    end: str = Field(description="last time it holds")
    open_start: bool = Field(description="true when it holds at the first time known: it began earlier")
    open_end: bool = Field(description="true when it holds at the last time known: it lasts longer")


class RuleBlock(Block):
    """The rule of the onset test."""

    offset_k: float
    sector_from_deg: float | None
    sector_to_deg: float | None
    least_wind_ms: float
    bridge_min: float


class OnsetBlock(Block):
    """Warm air from over the crest at one place."""

    place: str
    estimated: list[bool | None] = Field(description="for each case, in their order: whether the rule holds")
    estimated_excess_k: list[float | None] = Field(description="potential temperature in the lee minus over the crest")
    estimated_spells: list[SpellBlock]
    observed_times: int = Field(description="observed times at which the rule can be judged")
    observed_spells: list[SpellBlock]
    table: ContingencyBlock | None


class WayBlock(Block):
    """One set of source level, share and depth, and what it gives."""

    source_level_m: float
    removed_share: float
    mixing_depth_m: float
    temperature_c: float
    mixing_ratio_g_kg: float
    misfit: float = Field(description="larger error in units of its tolerance; up to 1 it reproduces the observation")
    condenses: bool = Field(description="false when nothing condenses on this way: the share does not matter")


class ValleyBlock(Block):
    """Equally good answers that hang together."""

    best: WayBlock
    source_level_range_m: tuple[float, float]
    removed_share_range: tuple[float, float]
    mixing_depth_range_m: tuple[float, float]


class UpwindErrorBlock(Block):
    """Error of one quantity before the range that comes nearest to what was observed."""

    what: str
    factor: float
    temperature_c: float
    mixing_ratio_g_kg: float
    source_level_m: float | None
    misfit: float
    misfit_before: float
    explains: bool
    at_bound: bool


class ExplanationBlock(Block):
    """What would explain one comparison."""

    place: str
    time: str | None
    observations: int
    observed_temperature_c: float
    observed_mixing_ratio_g_kg: float
    temperature_tolerance_k: float
    mixing_ratio_tolerance_g_kg: float
    estimated_temperature_c: float
    estimated_mixing_ratio_g_kg: float
    own: WayBlock | None = Field(description="the rule with the source level, share and depth of the crossing")
    valleys: list[ValleyBlock] = Field(description="empty when nothing within the bounds reproduces the observation")
    nearest: WayBlock
    source_level_bounds_m: tuple[float, float]
    upwind: list[UpwindErrorBlock]


class LayerBlock(Block):
    """Estimate minus lee sounding, mean of a layer over the ground."""

    low_m: float
    high_m: float
    temperature_k: float
    mixing_ratio_g_kg: float


class ProfileBlock(Block):
    """A lee sounding against the estimate over a place."""

    place: str
    height_above_ground_m: list[float]
    estimated_temperature_c: list[float]
    observed_temperature_c: list[float | None]
    estimated_mixing_ratio_g_kg: list[float]
    observed_mixing_ratio_g_kg: list[float | None]
    layers: list[LayerBlock]


class ValueBlock(Block):
    """One estimate against what was observed near it, in the unit of the quantity."""

    place: str
    side: str
    time: str | None = Field(description="of the observation; of the estimate where several are averaged")
    quantity: str
    estimate: float
    low: float | None
    high: float | None
    observed: float
    difference: float
    inside: bool | None
    unchanged: float | None
    popular_picture: float | None
    crest_air: float | None
    observations: int = Field(description="how many the observed value is the mean of")
    line: int = Field(description="of the file; of the first when several are averaged")


class CompareResults(Block):
    """Everything `orolift compare` found."""

    schema_version: str
    orolift: Program
    cases: list[str | None] = Field(description="valid time of each case; null where it names none")
    within_min: float = Field(description="observations farther than this from an estimate are not compared")
    scores: list[QuantityBlock]
    events: list[EventBlock]
    rule: RuleBlock
    onset: list[OnsetBlock]
    explanation: ExplanationBlock | None
    profile: ProfileBlock | None
    values: list[ValueBlock]
    cautions: list[str]
    notes: list[str]
