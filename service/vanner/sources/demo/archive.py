"""The archive: some two invented weeks of both desks, routine and planted stories together."""

from __future__ import annotations

import math
import random
from collections.abc import Iterator, Sequence

from vanner.clock import DAY_S
from vanner.records import RawItem
from vanner.sources.demo.compose import routine_text, seeded, whole_item
from vanner.sources.demo.desks import NEWSROOM, OPERATIONS, Outlet, outlet_named, outlets_of
from vanner.sources.demo.planted import archive_items
from vanner.sources.demo.rhythm import NEWSROOM_RHYTHM, OPERATIONS_RHYTHM, hour_of

_RHYTHMS = {NEWSROOM: NEWSROOM_RHYTHM, OPERATIONS: OPERATIONS_RHYTHM}
_DAY_HOURS = range(6, 20)
# How often another paper prints a wire item word for word, and after how long.
_COPIED_SHARE = 0.08
_COPY_DELAY_S = (300.0, 5400.0)
_WIRE, _COPYISTS = "ebbing-wire", ("courier", "saltpan-echo")


def demo_archive(start_s: float, days: float, random_state: int) -> Iterator[RawItem]:
    """The demo's items from `start_s` up to `start_s + days * 86400`, by publication time.

    The same arguments give the same items. Dates are whole seconds.

    Args:
        start_s: Where the archive begins, in Unix seconds.
        days: Its length, at least 2.
        random_state: Seeds every draw.

    Raises:
        ValueError: `days` is below 2.
    """
    end_s = start_s + days * DAY_S
    items = [item for _, told in archive_items(start_s, days, random_state) for item in told]
    for desk, rhythm in _RHYTHMS.items():
        rng = seeded(random_state, f"archive/{desk}")
        moments = [
            float(max(math.floor(moment), math.ceil(start_s)))
            for moment in rhythm.moments(start_s, end_s, rng)
        ]
        items.extend(routine_items(desk, moments, "archive", random_state, rng))
    items.extend(_copies(items, end_s, random_state))
    yield from in_order(items)


def routine_items(
    desk: str,
    moments: Sequence[float],
    part: str,
    random_state: int,
    rng: random.Random,
    *,
    by_night: bool = False,
) -> Iterator[RawItem]:
    """One routine item of the desk for each moment.

    Args:
        desk: The desk's name.
        moments: Publication times in Unix seconds.
        part: Tells the parts of the demo apart, so that their guids differ.
        random_state: Joins the guids.
        rng: Draws outlets and wording.
        by_night: Whether outlets write at hours at which they usually do not.
    """
    outlets = outlets_of(desk)
    for number, time_s in enumerate(moments):
        awake = [o for o in outlets if by_night or o.night or hour_of(time_s) in _DAY_HOURS]
        outlet: Outlet = rng.choices(awake, [o.share for o in awake])[0]
        title, text = routine_text(outlet, time_s, rng)
        yield whole_item(
            outlet,
            f"{part}/{number}",
            random_state=random_state,
            title=title,
            text=text,
            time_s=time_s,
        )


def in_order(items: Sequence[RawItem]) -> list[RawItem]:
    """By publication time; at the same time by guid, so that the order is always the same."""
    return sorted(items, key=lambda item: (item.published_s or 0.0, item.guid or ""))


def _copies(items: Sequence[RawItem], end_s: float, random_state: int) -> Iterator[RawItem]:
    """Word-for-word copies of some routine and some planted wire items by the papers."""
    rng = seeded(random_state, "copies")
    for item in items:
        if item.source != _WIRE or rng.random() >= _COPIED_SHARE:
            continue
        time_s = math.floor((item.published_s or 0.0) + rng.uniform(*_COPY_DELAY_S))
        copyist = outlet_named(rng.choice(_COPYISTS))
        if time_s < end_s:
            yield whole_item(
                copyist,
                f"copy/{item.guid}",
                random_state=random_state,
                title=str(item.title),
                text=str(item.content_text),
                time_s=float(time_s),
            )
