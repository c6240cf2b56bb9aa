"""What each desk of an engine is to do, taken from the settings or from a few options."""

from __future__ import annotations

import json
from dataclasses import dataclass
from pathlib import Path
from zoneinfo import ZoneInfo

from vanner.model.desk import DeskParameters
from vanner.model.state import pack_parameters, unpack_parameters
from vanner.settings import DeskSettings, Settings

REPLAY_DESK = "replay"


@dataclass(frozen=True, slots=True)
class DeskPlan:
    """A desk's model parameters and what becomes of its results.

    Attributes:
        sources: Names of the sources that it reads, or None for every one.
        schedules: Five-field cron texts of its digests.
        recipients: Who gets its mail; empty for nobody.
    """

    parameters: DeskParameters
    sources: tuple[str, ...] | None
    schedules: tuple[str, ...] = ()
    recipients: tuple[str, ...] = ()
    mails_alerts: bool = False
    digest_folder: Path | None = None

    @property
    def desk(self) -> str:
        """The desk's name."""
        return self.parameters.desk

    @property
    def zone(self) -> ZoneInfo:
        """The time zone of its schedules and hour bands."""
        return ZoneInfo(self.parameters.zone)

    def reads(self, source: str) -> bool:
        """Whether the desk reads a source."""
        return self.sources is None or source in self.sources


def plans_from(settings: Settings) -> tuple[DeskPlan, ...]:
    """The plans of the settings' desks, in their order."""
    return tuple(_plan(settings, desk) for desk in settings.desk)


def _plan(settings: Settings, desk: DeskSettings) -> DeskPlan:
    has_mail = settings.mail is not None
    return DeskPlan(
        parameters=_parameters(desk, settings.zone_of(desk).key, settings.service.pulse),
        sources=desk.sources,
        schedules=tuple(dict.fromkeys(desk.digests)),
        recipients=desk.recipients if has_mail else (),
        mails_alerts=desk.mail_alerts and has_mail,
        digest_folder=desk.digest_folder,
    )


def _parameters(desk: DeskSettings, zone: str, pulse_s: float) -> DeskParameters:
    return DeskParameters(
        desk=desk.name,
        zone=zone,
        pulse_s=pulse_s,
        alerts_per_day=desk.alerts_per_day,
        false_alerts_per_day=desk.false_level_per_day,
        warm_up_s=desk.warm_up,
        warm_up_words=desk.warm_up_words,
        warm_up_at_most_s=desk.warm_up_at_most,
        standing_half_life_s=desk.standing_half_life,
        running_half_life_s=desk.running_half_life,
        background_share=desk.background_share,
        clear_after_s=desk.clear_after,
    )


def replay_plan(alerts_per_day: float, zone: str, pulse_s: float) -> DeskPlan:
    """The one desk of a replay without settings: it reads every source of the archive."""
    desk = DeskSettings(name=REPLAY_DESK, sources=("all",), alerts_per_day=alerts_per_day)
    return DeskPlan(_parameters(desk, zone, pulse_s), sources=None)


def pack_plan(plan: DeskPlan, *, away: bool = False) -> str:
    """What a checkpoint must know of a plan to derive the pulses after it again.

    Args:
        plan: The plan.
        away: Whether the desk is no longer served, so that nothing after the checkpoint is its.
    """
    parameters = json.loads(pack_parameters(plan.parameters))
    told = {"parameters": parameters, "sources": plan.sources, "away": away}
    return json.dumps(told, sort_keys=True)


def is_away(text: str) -> bool:
    """Whether a checkpoint is of a desk that was no longer served."""
    return bool(json.loads(text)["away"])


def unpack_plan(text: str) -> DeskPlan:
    """A plan from a checkpoint; it knows parameters and sources only."""
    told = json.loads(text)
    sources = told["sources"]
    return DeskPlan(
        unpack_parameters(json.dumps(told["parameters"])),
        sources=None if sources is None else tuple(sources),
    )
