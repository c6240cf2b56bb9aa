"""A desk's state as bytes and back, bit for bit.

Arrays go into numpy's own archive format, everything else into one JSON text inside it;
JSON floats are written so that they read back to the same float64. The format has a version,
and a state of another version is refused rather than guessed at.
"""

from __future__ import annotations

import io
import json
import zipfile
from collections import deque
from dataclasses import asdict
from typing import Any

import numpy as np

from vanner.model.decay import DecayedCounts, Floats, Ints
from vanner.model.desk import DeskModel, DeskParameters
from vanner.model.stories import LeadingTerm, Story
from vanner.model.windows import WindowItem

STATE_VERSION = 1


class StateError(ValueError):
    """The state is damaged, or written in a format that this version does not know."""


def pack_parameters(parameters: DeskParameters) -> str:
    """Parameters as JSON text."""
    return json.dumps(asdict(parameters), sort_keys=True)


def unpack_parameters(text: str) -> DeskParameters:
    """Parameters from JSON text."""
    return DeskParameters(**json.loads(text))


def pack(model: DeskModel) -> bytes:
    """The whole state of a desk."""
    arrays: dict[str, Any] = {"window_counts": model.windows.counts[:, : len(model.terms)]}
    decays = {}
    for name, counts in _decayed(model).items():
        arrays[f"{name}_stored"] = counts.stored[: len(model.terms)]
        arrays[f"{name}_total"] = counts.total
        decays[name] = counts.decay.landmark_s
    items = list(model.windows.items)
    arrays["item_terms"] = np.concatenate([i.terms for i in items] or [np.zeros(0, np.int64)])
    facts = {
        "version": STATE_VERSION,
        "terms": model.terms,
        "words": model.words,
        "oldest_s": model.oldest_s,
        "begun_s": model.begun_s,
        "own_terms": {str(i): list(terms) for i, terms in model.own_terms.items()},
        "landmarks": decays,
        "windows": _pack_windows(model, items),
        "budget": _pack_budget(model),
        "book": {
            "next_number": model.book.next_number,
            "stories": [_pack_story(story) for story in model.book.live.values()],
        },
    }
    arrays["facts"] = np.frombuffer(json.dumps(facts).encode(), dtype=np.uint8)
    buffer = io.BytesIO()
    np.savez(buffer, **arrays)
    return buffer.getvalue()


def _decayed(model: DeskModel) -> dict[str, DecayedCounts]:
    histories = {f"history_{n}": h for n, h in enumerate(model.windows.histories)}
    return {
        "standing": model.standing.counts,
        "running": model.running.counts,
        "seasons": model.windows.seasons,
        **histories,
    }


def _pack_windows(model: DeskModel, items: list[WindowItem]) -> dict[str, Any]:
    return {
        "dropped": model.windows.dropped,
        "first": model.windows.first,
        "items": [
            [i.item_id, i.received_s, i.published_s, i.terms.size, list(i.season), i.copy_key]
            for i in items
        ],
    }


def _pack_budget(model: DeskModel) -> dict[str, Any]:
    budget = model.budget
    return {
        "since_s": budget.since_s,
        "tests": budget.tests,
        "tests_at_s": budget.tests_at_s,
        "peaks": [[number, *budget.peaks[number]] for number in budget.order],
    }


def _pack_story(story: Story) -> dict[str, Any]:
    facts = asdict(story)
    facts["terms"] = [[term, *asdict(lead).values()] for term, lead in story.terms.items()]
    facts["items"] = [[item_id, added_s] for item_id, added_s in story.items.items()]
    return facts


def unpack(state: bytes, parameters: DeskParameters) -> DeskModel:
    """A desk from its saved state and the parameters under which that was made.

    Raises:
        StateError: Another version's format, or no state at all.
    """
    try:
        return _unpacked(state, parameters)
    except (zipfile.BadZipFile, EOFError, OSError, KeyError, TypeError, ValueError) as error:
        if isinstance(error, StateError):
            raise
        raise StateError("a damaged model state") from error


def _unpacked(state: bytes, parameters: DeskParameters) -> DeskModel:
    with np.load(io.BytesIO(state), allow_pickle=False) as arrays:
        facts = json.loads(bytes(arrays["facts"]))
        if facts["version"] != STATE_VERSION:
            raise StateError(
                f"a model state of version {facts['version']} (this program knows {STATE_VERSION})"
            )
        model = DeskModel(parameters)
        model.terms = facts["terms"]
        model.vocabulary = {term: number for number, term in enumerate(model.terms)}
        model.words, model.oldest_s = facts["words"], facts["oldest_s"]
        model.begun_s = facts["begun_s"]
        model.own_terms = {
            int(i): dict.fromkeys(terms, 1.0) for i, terms in facts["own_terms"].items()
        }
        for name, counts in _decayed(model).items():
            counts.stored = arrays[f"{name}_stored"]
            counts.total = arrays[f"{name}_total"]
            counts.decay.landmark_s = facts["landmarks"][name]
        _unpack_windows(model, facts["windows"], arrays["window_counts"], arrays["item_terms"])
    _unpack_budget(model, facts["budget"])
    _unpack_book(model, facts["book"])
    return model


def _unpack_windows(
    model: DeskModel, facts: dict[str, Any], counts: Floats, item_terms: Ints
) -> None:
    windows = model.windows
    windows.dropped, windows.first, windows.counts = facts["dropped"], facts["first"], counts
    start = 0
    for item_id, received_s, published_s, size, season, copy_key in facts["items"]:
        number = windows.end
        terms = item_terms[start : start + size]
        start += size
        windows.items.append(
            WindowItem(item_id, received_s, published_s, terms, (season[0], season[1]), copy_key)
        )
        windows.copies[copy_key] = number
        for term in terms.tolist():
            windows.holders.setdefault(term, deque()).append(number)


def _unpack_budget(model: DeskModel, facts: dict[str, Any]) -> None:
    budget = model.budget
    budget.since_s = facts["since_s"]
    budget.tests, budget.tests_at_s = facts["tests"], facts["tests_at_s"]
    for number, noted_s, bits in facts["peaks"]:
        budget.note_story(number, noted_s, bits)


def _unpack_book(model: DeskModel, facts: dict[str, Any]) -> None:
    book = model.book
    book.next_number = facts["next_number"]
    for told in facts["stories"]:
        terms = {term: LeadingTerm(*lead) for term, *lead in told.pop("terms")}
        items = dict(told.pop("items"))
        book.adopt(Story(**told, terms=terms, items=items))


def retune(model: DeskModel, parameters: DeskParameters, now_s: float) -> None:
    """Go on with other parameters. Counts keep their present value and fade anew from now."""
    for background, half_life_s in (
        (model.standing, parameters.standing_half_life_s),
        (model.running, parameters.running_half_life_s),
    ):
        decay = background.counts.decay
        if decay.landmark_s is not None and decay.half_life_s != half_life_s:
            factor = decay.factor_at(now_s)
            background.counts.stored *= factor
            background.counts.total *= factor
            decay.landmark_s = now_s
        decay.half_life_s = half_life_s
    model.parameters = parameters
    model.budget.alerts_per_day = parameters.alerts_per_day
    model.budget.false_alerts_per_day = parameters.false_alerts_per_day
    model.book.clear_after_s = parameters.clear_after_s
