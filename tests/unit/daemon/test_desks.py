"""A desk in service: items as terms, taught items before the rest, and states read back."""

import dataclasses
import io
import json

import numpy as np
import pytest

from vanner.daemon.desks import (
    TAUGHT_AT_ONCE,
    clear_until,
    new_desk,
    restored_desk,
    step,
    term_items,
)
from vanner.errors import DatabaseError
from vanner.model.desk import DeskModel
from vanner.model.state import STATE_VERSION, pack
from vanner.records import StoredItem
from vanner.store.checkpoints import Checkpoint
from vanner.terms import count_terms

START_S = 1_700_006_400.0


@pytest.fixture
def stored():
    """Builds an accepted item."""

    def build(item_id, text, *, title="", at_s=START_S, teaches=False, published_s=None):
        published_s = at_s if published_s is None else published_s
        return StoredItem(
            item_id, 1, "town gazette", f"g{item_id}", title, text, "en", published_s, at_s, teaches
        )

    return build


def test_an_item_becomes_the_terms_of_its_title_and_text(stored):
    (one,) = term_items([stored(7, "The ferry, the quay.", title="Ferry late", teaches=True)])
    assert one.terms == count_terms("Ferry late", "The ferry, the quay.")
    assert one.terms["ferry"] == 2
    assert (one.item_id, one.revision, one.teaches) == (7, 1, True)


@pytest.mark.parametrize(
    ("first", "second", "copies"),
    [
        ("tide quay ferry", "Ferry: TIDE, quay!", True),
        ("tide quay quay", "quay tide quay", True),
        ("tide quay", "tide quay quay", False),
        ("tide quay", "tide", False),
        ("ab c", "a bc", False),
        ("tide 1", "tide 2", True),  # a number is no term
    ],
)
def test_items_with_the_same_words_in_the_same_numbers_are_copies(stored, first, second, copies):
    one, other = term_items([stored(1, first), stored(2, second)])
    assert (one.copy_key == other.copy_key) is copies


def test_the_words_of_a_title_and_of_a_text_count_alike_for_copies(stored):
    one, other = term_items([stored(1, "ferry late", title="Quay"), stored(2, "quay ferry late")])
    assert one.copy_key == other.copy_key


def test_items_without_words_are_no_copies_of_each_other(stored):
    one, other = term_items([stored(1, "12 -- 7"), stored(2, "...")])
    assert one.terms == other.terms == {}
    assert one.copy_key != other.copy_key


def test_taught_items_come_first_and_oldest_first_and_count_for_what_arrives(plan, stored):
    model = DeskModel(plan().parameters)
    arriving = stored(1, "sluice gate tide")
    taught = [
        stored(2 + n, "sluice gate tide", teaches=True, published_s=START_S - 3600.0 * (n % 5))
        for n in range(20)
    ]
    results = step(model, START_S + 60.0, term_items([arriving, *taught]))
    assert [len(result.readings) for result in results] == [20, 1]
    order = [reading.item_id for reading in results[0].readings]
    by_age = sorted(taught, key=lambda one: one.published_s)
    assert order == [one.item_id for one in by_age]
    # Read against an empty desk it would own nearly all of its words.
    alone = step(DeskModel(plan().parameters), START_S + 60.0, term_items([arriving]))
    assert results[1].readings[0].own < alone[0].readings[0].own


def test_many_taught_items_are_read_a_part_at_a_time(plan, stored):
    taught = [stored(n, "tide quay", teaches=True) for n in range(1, 2 * TAUGHT_AT_ONCE + 8)]
    results = step(DeskModel(plan().parameters), START_S + 60.0, term_items(taught))
    assert [len(result.readings) for result in results] == [TAUGHT_AT_ONCE, TAUGHT_AT_ONCE, 7]
    assert results[2].readings[0].own < results[0].readings[0].own


def test_a_pulse_without_items_is_one_step(plan):
    (result,) = step(DeskModel(plan().parameters), START_S, [])
    assert (result.readings, result.stories) == ((), ())


@pytest.fixture
def with_story(plan, stored):
    """A desk with one live story, and when that clears."""
    desk = new_desk(plan(warm_up_s=0.0, warm_up_words=0), START_S)
    for n in range(20):
        at_s = START_S + 60.0 * n
        step(desk.model, at_s, term_items([stored(n + 1, f"tide board word{n}", at_s=at_s)]))
    for n in range(20, 28):
        at_s = START_S + 60.0 * n
        text = f"tide sinkhole quarry ref{n}"
        step(desk.model, at_s, term_items([stored(n + 1, text, at_s=at_s)]))
    due_s = desk.model.next_clearing_s()
    assert due_s is not None
    return desk, due_s


@pytest.mark.parametrize(
    ("after_s", "inclusive", "clears"),
    [(-1.0, True, False), (0.0, False, False), (0.0, True, True), (1.0, False, True)],
)
def test_stories_clear_before_a_time_or_up_to_it(with_story, after_s, inclusive, clears):
    desk, due_s = with_story
    clear_until(desk.model, due_s + after_s, inclusive=inclusive)
    assert (desk.model.next_clearing_s() is None) is clears


def test_a_restored_desk_is_the_desk_that_was_saved(open_database, with_story):
    desk, due_s = with_story
    saved = desk.checkpoint(due_s - 60.0)
    again = restored_desk(open_database(), desk.plan, saved, due_s - 60.0, START_S)
    assert pack(again.model) == saved.state
    assert (again.plan, again.started_s) == (desk.plan, START_S)


def test_a_restored_desk_has_cleared_what_was_due_since(open_database, with_story):
    desk, due_s = with_story
    saved = desk.checkpoint(due_s - 60.0)
    again = restored_desk(open_database(), desk.plan, saved, due_s, START_S)
    assert again.model.next_clearing_s() is None
    assert again.model.book.next_number == desk.model.book.next_number


def test_a_restored_desk_follows_todays_plan(open_database, with_story, plan):
    desk, due_s = with_story
    today = plan(sources=("weather mast",), alerts_per_day=1.0, running_half_life_s=3600.0)
    again = restored_desk(
        open_database(), today, desk.checkpoint(due_s - 60.0), due_s - 60.0, START_S
    )
    assert again.plan == today
    assert again.model.parameters == today.parameters
    assert again.model.budget.alerts_per_day == 1.0


def test_a_state_of_another_version_is_refused_with_what_to_do(open_database, plan):
    database = open_database()
    saved = new_desk(plan(), START_S).checkpoint(START_S)
    with np.load(io.BytesIO(saved.state)) as held:
        arrays = dict(held)
    facts = json.loads(bytes(arrays["facts"])) | {"version": STATE_VERSION + 7}
    arrays["facts"] = np.frombuffer(json.dumps(facts).encode(), dtype=np.uint8)
    state = io.BytesIO()
    np.savez(state, **arrays)
    other = Checkpoint(saved.at_s, saved.parameters, STATE_VERSION + 7, state.getvalue())
    with pytest.raises(DatabaseError) as refused:
        restored_desk(database, plan(), other, START_S, START_S)
    sentence = str(refused.value)
    assert str(database.path) in sentence
    assert str(STATE_VERSION + 7) in sentence
    assert "vanner rebuild" in sentence


def test_a_checkpoint_says_under_which_plan_and_when_it_was_made(plan):
    desk = new_desk(plan(), START_S)
    saved = desk.checkpoint(START_S + 60.0)
    assert (saved.at_s, saved.version) == (START_S + 60.0, STATE_VERSION)
    other = dataclasses.replace(desk, plan=plan(alerts_per_day=1.0))
    assert other.checkpoint(START_S + 60.0).parameters != saved.parameters
