"""How evidence is weighed: the typed form of ``weighing.yaml``."""

from __future__ import annotations

from functools import cache
from importlib.resources import files

import msgspec
import yaml


class Family(msgspec.Struct, frozen=True, kw_only=True, forbid_unknown_fields=True):
    """Readings that go together on one machine."""

    correlation: float
    measures: tuple[str, ...]


class ProposalSettings(msgspec.Struct, frozen=True, kw_only=True, forbid_unknown_fields=True):
    """Numbers of the choice of the next reading."""

    hypotheses: int
    draws: int
    overhead_minutes: float
    hazard_cost: float
    least_bits: float
    least_chance: float
    part_weight: float
    visible_sigmas: float
    access: dict[str, float]
    found_standing: float
    telling_readings: int
    arrange_minutes: dict[str, float]


class SlipSettings(msgspec.Struct, frozen=True, kw_only=True, forbid_unknown_fields=True):
    """When a reading is called a likely slip."""

    least_share: float
    strange_sigmas: float
    mended_sigmas: float


class PairSettings(msgspec.Struct, frozen=True, kw_only=True, forbid_unknown_fields=True):
    """When two faults at once are considered."""

    faults: int
    together: float
    margin_nats: float
    strained_sigmas: float
    strained_nats: float


class Weighing(msgspec.Struct, frozen=True, kw_only=True, forbid_unknown_fields=True):
    """Numbers of the weighing; the YAML file says what each does."""

    soft_power: float
    impossible_state: float
    standing_reading: float
    unlisted_complaint: float
    other_odds: float
    other_soft_nats: float
    spread_nu: float
    families: dict[str, Family]
    proposal: ProposalSettings
    slip: SlipSettings
    pairs: PairSettings
    decisions: dict[str, str]
    learned_weight: float
    shared_gain: float


@cache
def weighing() -> Weighing:
    """Load ``weighing.yaml`` once."""
    text = (files("rules.weigh") / "weighing.yaml").read_text(encoding="utf-8")
    return msgspec.convert(yaml.safe_load(text), Weighing)
