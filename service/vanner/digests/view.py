"""A digest's content worded for its templates."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import datetime
from zoneinfo import ZoneInfo

from vanner.alerts.lines import cells, one_line
from vanner.alerts.views import StoryView, story_view
from vanner.alerts.wording import amount, counted, full_time, near_time, sql_text
from vanner.clock import iso_utc
from vanner.records import DigestContent, SourceVolume

TERMS_SHOWN = 4
ITEMS_SHOWN = 3
NOTED_SHOWN = 20
VOLUMES_SHOWN = 40


@dataclass(frozen=True, slots=True)
class VolumeView:
    """A source's amount; `usual` is None where it is too young to have one."""

    source: str
    items: int
    usual: str | None
    last_item: str


@dataclass(frozen=True, slots=True)
class DigestView:
    """All that the templates say, in words.

    Attributes:
        slot: The local day and time at which the digest was due.
        lead: The digest in one sentence.
        empty: Whether there is no story of any kind to tell of.
        alert_in_query: An alert whose items are not all shown, for a query; None if all are.
        noted_more: How many noted stories are not among `noted`.
        noted_query: Lines of an SQL query for all of them; empty where none was left out.
        silent: Sources that are quiet though they usually are not.
        volumes_more: How many sources are not among `volumes`.
    """

    desk: str
    slot: str
    covers_from: str
    covers_until: str
    lead: str
    empty: bool
    alerts: tuple[StoryView, ...]
    alert_in_query: int | None
    noted: tuple[StoryView, ...]
    noted_more: int
    noted_query: tuple[str, ...]
    cleared: tuple[StoryView, ...]
    silent: tuple[VolumeView, ...]
    volumes: tuple[VolumeView, ...]
    volumes_more: int


def digest_view(content: DigestContent, zone: ZoneInfo) -> DigestView:
    """Word a digest's content; times are local, and on its own day without the day."""
    due_s = content.scheduled_s
    due = datetime.fromtimestamp(due_s, zone)
    noted = content.noted[:NOTED_SHOWN]
    more = len(content.noted) - len(noted)
    alerts = tuple(
        story_view(story, zone, due_s, TERMS_SHOWN, ITEMS_SHOWN) for story in content.raised
    )
    volumes = [_volume_view(volume, zone, due_s) for volume in content.volumes]
    return DigestView(
        desk=one_line(content.desk),
        slot=f"{due:%a} {due.day} {due:%b %H:%M}",
        covers_from=full_time(content.covers_from_s, zone),
        covers_until=full_time(content.covers_until_s, zone),
        lead=_lead(content),
        empty=is_empty(content),
        alerts=alerts,
        alert_in_query=next((alert.story_id for alert in alerts if alert.more), None),
        noted=tuple(story_view(story, zone, due_s, 0, 0) for story in noted),
        noted_more=more,
        noted_query=_noted_query(content) if more else (),
        cleared=tuple(story_view(story, zone, due_s, 0, 0) for story in content.cleared),
        silent=tuple(view for view, one in zip(volumes, content.volumes, strict=True) if one.quiet),
        volumes=tuple(volumes[:VOLUMES_SHOWN]),
        volumes_more=max(len(volumes) - VOLUMES_SHOWN, 0),
    )


def is_empty(content: DigestContent) -> bool:
    """Whether a digest has no story of any kind to tell of."""
    return not (content.raised or content.noted or content.cleared)


def _lead(content: DigestContent) -> str:
    received = sum(volume.items for volume in content.volumes)
    flow = f"{counted(received, 'item')} came from {counted(len(content.volumes), 'source')}"
    if is_empty(content):
        return f"The desk was quiet: no alerts and nothing noted; {flow}."
    told = f"{counted(len(content.raised), 'alert')}, {len(content.noted) or 'nothing'} noted"
    if content.cleared:
        told += f", {len(content.cleared)} cleared"
    return f"{told[0].upper()}{told[1:]}; {flow}."


def _volume_view(volume: SourceVolume, zone: ZoneInfo, due_s: float) -> VolumeView:
    last_s = volume.last_item_s
    return VolumeView(
        source=one_line(volume.source),
        items=volume.items,
        usual=None if volume.usual is None else amount(volume.usual),
        last_item="never" if last_s is None else near_time(last_s, zone, due_s),
    )


def _noted_query(content: DigestContent) -> tuple[str, ...]:
    """The query that lists what the digest counts as noted, in lines short enough for mail."""
    desk = sql_text(content.desk)
    # A long name gets a line of its own: SQL does not mind, and the line keeps its width.
    where = (f"WHERE desk = {desk}",) if cells(desk) <= 60 else ("WHERE desk =", desk)
    return (
        "SELECT noted_at, headline, items, bits FROM noted",
        *where,
        f"AND noted_at > '{iso_utc(content.covers_from_s)}'",
        f"AND noted_at <= '{iso_utc(content.covers_until_s)}'",
        "ORDER BY bits DESC;",
    )
