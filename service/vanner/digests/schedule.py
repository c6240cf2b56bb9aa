"""When digests are due: cron on the desk's wall clock, one digest for each slot.

A slot's key is its local wall time. The cron text is laid out on naive local time, where every
day has 24 hours, and each wall time is then mapped to the one instant at which it is due. So
neither a restart nor a change of the clock sends a slot twice or leaves it out.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from datetime import datetime, timedelta
from zoneinfo import ZoneInfo

from croniter import croniter

# No zone has ever moved its clock by more than this: Samoa left out a whole day in 2011.
_LARGEST_CHANGE = timedelta(days=1)


@dataclass(frozen=True, slots=True)
class Slot:
    """One time of a schedule.

    Attributes:
        local: The wall time in the desk's zone as YYYY-MM-DDTHH:MM; the slot's key.
        scheduled_s: The instant at which it is due, in Unix seconds.
    """

    local: str
    scheduled_s: float


def slots(cron: str, zone: ZoneInfo, after_s: float, until_s: float) -> list[Slot]:
    """The slots of a schedule with after_s < scheduled_s <= until_s, earliest first.

    When the clock goes back, a wall time occurs twice and its slot is due at the first
    occurrence only: hourly digests leave one gap of two hours that night, and a digest every
    minute pauses for the hour that repeats. When the clock goes forward, a wall time that is
    left out is due where it would have been with the offset before the change, such as 03:30
    on the new clock for 02:30; where the schedule holds that later wall time too, one slot
    serves for both, under the later time.

    Where both day of month and day of week are restricted, a day matches that meets either.

    Args:
        cron: Five cron fields.
        zone: The desk's time zone.
        after_s: Unix seconds; a slot at exactly this time is left out.
        until_s: Unix seconds; a slot at exactly this time belongs to the result. Not after
            `after_s` gives no slots, as does a cron text that no date fulfils.

    Raises:
        ValueError: The cron text cannot be read.
    """
    if until_s <= after_s:
        return []
    start = _wall_time(after_s, zone) - _LARGEST_CHANGE
    end = _wall_time(until_s, zone) + _LARGEST_CHANGE
    # A day more on both sides: right after a change, wall times out of the window's own range
    # can be due within it.
    by_instant: dict[float, Slot] = {}
    for wall in _wall_times(cron, start, end):
        scheduled_s = wall.replace(tzinfo=zone, fold=0).timestamp()
        if after_s < scheduled_s <= until_s:
            # A wall time that a change left out shares its instant with a later one, which
            # exists; where the schedule holds both, the later one takes its place here.
            by_instant[scheduled_s] = Slot(wall.strftime("%Y-%m-%dT%H:%M"), scheduled_s)
    return [by_instant[instant_s] for instant_s in sorted(by_instant)]


def _wall_time(time_s: float, zone: ZoneInfo) -> datetime:
    return datetime.fromtimestamp(time_s, zone).replace(tzinfo=None)


def _wall_times(cron: str, start: datetime, end: datetime) -> Iterator[datetime]:
    """The naive wall times of a cron text after `start` up to `end`.

    Given naive times, croniter counts on a clock without any zone and yields naive times. The
    search is bounded by the years in question: a text such as the 31st of February ends it.
    """
    years = end.year - start.year + 1
    times: Iterator[datetime] = croniter(
        cron, start, ret_type=datetime, max_years_between_matches=years
    ).all_next()
    for wall in times:
        if wall > end:
            return
        yield wall
