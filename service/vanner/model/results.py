"""What the model concluded, with terms by name instead of number, as records to hand on."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from vanner.model.read_batch import ItemRead
from vanner.model.story import Story
from vanner.records import Reading, StoryItem, StoryRecord, StoryTerm, Topic


def reading_of(read: ItemRead, terms: Sequence[str]) -> Reading:
    """A reading with the item's own terms, most weight first.

    Args:
        read: The reading in numbers.
        terms: Term number -> term.
    """
    active = np.flatnonzero(read.theta > 0)
    active = active[np.argsort(-read.theta[active], kind="stable")]
    topics = tuple(
        Topic(
            terms[read.terms[k]],
            float(read.theta[k]),
            float(read.own_share[k]),
            int(read.counts[k]),
        )
        for k in active.tolist()
    )
    standing, running, house, own = read.shares
    return Reading(
        read.item.item_id,
        int(read.counts.sum()),
        standing,
        running,
        house,
        own,
        read.bits_per_word,
        topics,
    )


def record_of(desk: str, story: Story, terms: Sequence[str]) -> StoryRecord:
    """A story as it stands, its leading terms strongest first."""
    leading = sorted(story.terms.items(), key=lambda pair: (-pair[1].bits, pair[0]))
    return StoryRecord(
        desk,
        story.number,
        story.noted_s,
        story.raised_s,
        story.last_activity_s,
        story.cleared_s,
        story.headline_item,
        story.bits,
        story.threshold_bits,
        tuple(
            StoryTerm(terms[number], t.bits, int(t.seen), t.expected, t.joined_s)
            for number, t in leading
        ),
        tuple(StoryItem(item_id, added_s) for item_id, added_s in story.items.items()),
    )
