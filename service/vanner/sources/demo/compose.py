"""From outlet, topic and moment to a whole demo item."""

from __future__ import annotations

import hashlib
import math
import random
from datetime import UTC, datetime

from vanner.clock import DAY_S, iso_utc
from vanner.records import RawItem
from vanner.sources.demo.desks import NEWSROOM, Outlet
from vanner.sources.demo.grammar import Phrasing, WordList
from vanner.sources.demo.names import NAMES
from vanner.sources.demo.news_life import LIFE
from vanner.sources.demo.news_port import PORT
from vanner.sources.demo.news_town import TOWN
from vanner.sources.demo.ops_marine import MARINE
from vanner.sources.demo.ops_technical import TECHNICAL
from vanner.sources.demo.things import THINGS
from vanner.sources.demo.topic import Topic

LEXICON = {slot: WordList.ranked(values) for slot, values in {**NAMES, **THINGS}.items()}
TOPICS: dict[str, Topic] = {**TOWN, **PORT, **LIFE, **MARINE, **TECHNICAL}

MOST_WORDS = 80
# Words kept free for what an outlet puts before and after its texts.
_MANNER_WORDS = 16
_NEWS_WORDS = (32, 68)
_OPERATIONS_WORDS = (46, 74)
# From what happened, `{hm}` in the text, to the item's publication.
_LONGEST_WRITING_S = 300


def seeded(random_state: int, purpose: str) -> random.Random:
    """A generator of its own for one purpose, so that one's draws never move another's."""
    return random.Random(f"{random_state}/{purpose}")  # noqa: S311 - demo texts, no secrets


def routine_text(outlet: Outlet, time_s: float, rng: random.Random) -> tuple[str, str]:
    """Title and text of one routine item of an outlet."""
    topic = TOPICS[_topic_name(outlet, time_s, rng)]
    clock = datetime.fromtimestamp(time_s - rng.randrange(_LONGEST_WRITING_S), UTC)
    phrasing = Phrasing(rng, LEXICON, {"hm": clock.strftime("%H%M")})
    opening = rng.choice(topic.openings)
    # The lead first: its slots decide who and what the headline names.
    sentences = [phrasing.sentence(opening.lead)]
    title = phrasing.sentence(opening.headline)
    least, most = _NEWS_WORDS if outlet.desk == NEWSROOM else _OPERATIONS_WORDS
    wanted = rng.randint(least, most)
    words = len(sentences[0].split())
    for template in rng.sample(opening.bodies, len(opening.bodies)):
        if words >= wanted:
            break
        sentence = phrasing.sentence(template)
        if words + len(sentence.split()) <= MOST_WORDS - _MANNER_WORDS:
            sentences.append(sentence)
            words += len(sentence.split())
    return title, in_manner(outlet, " ".join(sentences), phrasing)


def in_manner(outlet: Outlet, text: str, phrasing: Phrasing) -> str:
    """The text with its outlet's byline or dateline before it and signature after it."""
    opening = phrasing.sentence(phrasing.rng.choice(outlet.openings))
    closing = phrasing.sentence(phrasing.rng.choice(outlet.closings))
    return " ".join(part for part in (opening, text, closing) if part)


def whole_item(
    outlet: Outlet, key: str, *, random_state: int, title: str, text: str, time_s: float
) -> RawItem:
    """The item as its outlet publishes it; `key` is unique among the outlet's items."""
    code = hashlib.blake2s(
        f"{random_state}/{outlet.name}/{key}".encode(), digest_size=6
    ).hexdigest()
    day = datetime.fromtimestamp(time_s, UTC).strftime("%Y/%m/%d")
    return RawItem(
        guid=f"{outlet.name}-{code}",
        title=title,
        content_text=text,
        url=f"https://{outlet.domain}/{day}/{code}",
        language="en",
        date_raw=iso_utc(time_s),
        published_s=time_s,
        source=outlet.name,
    )


def _topic_name(outlet: Outlet, time_s: float, rng: random.Random) -> str:
    """One of the outlet's topics, by weights that drift slowly.

    Each topic swells and ebbs by a quarter over 20 to 40 days with a phase of its own, so that
    what is talked about changes, but never fast enough to look like news.
    """
    names = tuple(outlet.topics)
    weights = []
    for place, name in enumerate(names):
        period_s = (20 + 7 * place % 21) * DAY_S
        turn = time_s / period_s + 0.37 * place
        weights.append(outlet.topics[name] * (1 + 0.25 * math.sin(2 * math.pi * turn)))
    return rng.choices(names, weights)[0]
