"""Demo data: an invented port town's newsroom and its operations room.

Ossenhithe on the Quarle, its people, outlets, ships and firms exist nowhere. Everything is a
function of a start time and an integer `random_state`.
"""

from vanner.sources.demo.archive import demo_archive
from vanner.sources.demo.desks import DemoDesk, demo_desks
from vanner.sources.demo.drip import DripSource, demo_drip, demo_live
from vanner.sources.demo.planted import PlantedStory, planted_live, planted_stories

__all__ = [
    "DemoDesk",
    "DripSource",
    "PlantedStory",
    "demo_archive",
    "demo_desks",
    "demo_drip",
    "demo_live",
    "planted_live",
    "planted_stories",
]
