"""The demo's two desks and their sources: who writes, how often, on what and in what manner."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

NEWSROOM = "newsroom"
OPERATIONS = "operations"


@dataclass(frozen=True, slots=True)
class DemoDesk:
    """A desk of the demo: its name, its sources and a fitting number of alerts a day."""

    name: str
    sources: tuple[str, ...]
    alerts_per_day: float


@dataclass(frozen=True, slots=True)
class Outlet:
    """An invented source and its manner.

    Attributes:
        share: Its part of its desk's items.
        night: Whether it writes between 20 and 6 hours UTC.
        topics: Routine topics with their weights.
        openings: Templates put before the text; an empty one puts nothing.
        closings: Templates put after it.
    """

    name: str
    desk: str
    domain: str
    share: float
    night: bool
    topics: Mapping[str, float]
    openings: tuple[str, ...]
    closings: tuple[str, ...]


OUTLETS: tuple[Outlet, ...] = (
    Outlet(
        "courier",
        NEWSROOM,
        "ossenhithe-courier.example",
        0.36,
        True,
        {
            "council": 3, "planning": 2, "court": 3, "roads": 3, "schools": 2, "health": 2,
            "shipping": 1, "fish_market": 1, "ferry": 1, "weather": 1.5, "business": 3,
            "nature": 1, "football": 2.5, "other_sport": 1.5, "culture": 3, "notices": 1,
            "police": 3, "people": 2,
        },
        ("By {writer}.", "By {writer}.", "From our reporter in {district}.", ""),
        ("", "", "Letters to the Courier, Lantern Parade.", "{writer.last} for the Courier."),
    ),
    Outlet(
        "ebbing-wire",
        NEWSROOM,
        "ebbing-wire.example",
        0.25,
        True,
        {
            "court": 2, "roads": 1, "health": 1, "shipping": 2, "fish_market": 3, "ferry": 1,
            "weather": 3, "business": 4, "nature": 1, "football": 3, "other_sport": 1.5,
            "culture": 1, "police": 2,
        },
        ("OSSENHITHE (EW) -",),
        ("(EW/{wireman})", "(EW/{wireman}) Check against later copy."),
    ),
    Outlet(
        "harbour-press",
        NEWSROOM,
        "harbour-authority.example",
        0.11,
        False,
        {"shipping": 6, "fish_market": 1, "ferry": 3, "weather": 2, "nature": 1},
        ("Press notice.", ""),
        ("Harbour Authority, press office, Cask Quay.",),
    ),
    Outlet(
        "town-council",
        NEWSROOM,
        "town-council.example",
        0.10,
        False,
        {"council": 4, "planning": 4, "roads": 4, "schools": 2, "health": 1.5, "culture": 1},
        ("Public notice {num 100 990}.", "From the town hall:"),
        ("The counter is open on weekday mornings.", "Town Clerk's Office."),
    ),
    Outlet(
        "saltpan-echo",
        NEWSROOM,
        "saltpan-echo.example",
        0.18,
        True,
        {
            "football": 5, "other_sport": 4, "notices": 4, "people": 3, "culture": 2,
            "schools": 2, "nature": 1, "police": 1,
        },
        ("", "", "Written by a neighbour."),
        ("Your Echo, free through the door.", "", "Send us yours by {weekday}."),
    ),
    Outlet(
        "watch-log",
        OPERATIONS,
        "watch-log.example",
        0.44,
        True,
        {"traffic": 6, "pilotage": 4, "berths": 3, "tides": 3, "handover": 1.5, "gates": 1.5,
         "rounds": 2.5},
        ("",),
        ("{officer}, {crew}.", "Entered by {officer}.", "Log closed, {officer}."),
    ),
    Outlet(
        "tickets",
        OPERATIONS,
        "tickets.example",
        0.30,
        True,
        {"cranes": 4, "pumps": 4, "power": 3, "computers": 4, "gates": 1, "soundings": 1},
        ("",),
        ("Assigned to {officer}, workshop.", "State: in hand.", "State: closed by {officer}."),
    ),
    Outlet(
        "status-notes",
        OPERATIONS,
        "status-notes.example",
        0.26,
        True,
        {"tides": 3, "berths": 3, "soundings": 3, "cranes": 2, "pumps": 2, "power": 2.5,
         "computers": 1.5, "gates": 1, "handover": 1},
        ("Status note.", ""),
        ("Next note as required.", "Distribution: tower, workshop, gates."),
    ),
)  # fmt: skip

_ALERTS_PER_DAY = {NEWSROOM: 4.0, OPERATIONS: 3.0}


def demo_desks() -> tuple[DemoDesk, ...]:
    """The newsroom and the operations room."""
    return tuple(
        DemoDesk(desk, tuple(outlet.name for outlet in outlets_of(desk)), alerts)
        for desk, alerts in _ALERTS_PER_DAY.items()
    )


def outlets_of(desk: str) -> tuple[Outlet, ...]:
    """The sources of one desk."""
    return tuple(outlet for outlet in OUTLETS if outlet.desk == desk)


def outlet_named(name: str) -> Outlet:
    """The source of that name.

    Raises:
        KeyError: There is none.
    """
    for outlet in OUTLETS:
        if outlet.name == name:
            return outlet
    raise KeyError(name)
