"""Builders of parameters, items and streams for the model's tests."""

import numpy as np
import pytest

from vanner.model.desk import DeskParameters, TermItem

HOUR_S = 3600.0
DAY_S = 24 * HOUR_S
START_S = 1_700_006_400.0  # 2023-11-15 00:00 UTC, a Wednesday


@pytest.fixture(scope="session")
def parameters():
    """Builds a desk's parameters: ready to speak from the first pulse unless told otherwise."""

    def build(**changes):
        told = {
            "desk": "quay",
            "zone": "UTC",
            "pulse_s": 60.0,
            "alerts_per_day": 5.0,
            "false_alerts_per_day": 0.5,
            "warm_up_s": 0.0,
            "warm_up_words": 0,
            "warm_up_at_most_s": 0.0,
            "standing_half_life_s": 28 * DAY_S,
            "running_half_life_s": DAY_S,
            "background_share": 0.9,
            "clear_after_s": 3 * HOUR_S,
        }
        return DeskParameters(**told | changes)

    return build


@pytest.fixture(scope="session")
def term_item():
    """Builds an item; its words are "herring ice herring" or a mapping of counts."""

    def build(item_id, words, received_s, **changes):
        terms = words
        if isinstance(words, str):
            terms = {}
            for word in words.split():
                terms[word] = terms.get(word, 0) + 1
        told = {
            "item_id": item_id,
            "revision": 1,
            "published_s": received_s,
            "received_s": received_s,
            "teaches": False,
            "terms": terms,
            "copy_key": f"item {item_id}",
        }
        return TermItem(**told | changes)

    return build


@pytest.fixture(scope="session")
def stream(term_item):
    """Builds pulses (end, items) of ordinary talk in which a few events break out."""

    def build(seed, hours=30, per_hour=12, events=4, start_s=START_S):
        rng = np.random.default_rng(seed)
        ordinary = 1.0 / np.arange(1, 201)
        ordinary /= ordinary.sum()
        arrivals = []
        for at_s in np.sort(start_s + rng.random(hours * per_hour) * hours * HOUR_S):
            words = [f"word{n}" for n in rng.choice(200, 12, p=ordinary)]
            if arrivals and rng.random() < 0.1:  # somebody passes on what another wrote
                words = arrivals[rng.integers(0, len(arrivals))][1]
            revision = int(rng.choice([1, 1, 1, 1, 2]))
            late_s = float(rng.choice([0.0, 0.0, 600.0, 3 * DAY_S]))
            arrivals.append((float(at_s), words, revision, late_s))
        for event in range(events):
            begun_s = start_s + (0.2 + 0.75 * rng.random()) * hours * HOUR_S
            for _ in range(9):
                words = [f"event{event}{part}" for part in "abc"]
                words += [f"word{n}" for n in rng.choice(200, 6, p=ordinary)]
                arrivals.append((begun_s + rng.random() * 1800.0, words, 1, 0.0))
        pulses = {}
        for number, (at_s, words, revision, late_s) in enumerate(sorted(arrivals), 1):
            item = term_item(
                number,
                " ".join(words),
                at_s,
                revision=revision,
                published_s=at_s - late_s,
                copy_key=" ".join(sorted(words)),
            )
            pulses.setdefault((at_s // 60 + 1) * 60.0, []).append(item)
        return sorted(pulses.items())

    return build
