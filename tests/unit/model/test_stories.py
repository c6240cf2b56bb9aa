"""Which terms and items make one story, and when a story is raised and cleared."""

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from vanner.model.stories import LEADING_TERMS, Candidate, Levels, StoryBook

NOW_S = 1_700_006_400.0
PULSE_S = 60.0
LEVELS = Levels(join_bits=6.0, floor_bits=10.0, ceiling_bits=0.0, noted_bits=6.0)
ICE, PIER, CRANE, GULL, FOG = range(5)


def _candidate(term, bits, *items):
    return Candidate(term, bits, float(len(items)), 0.1, items)


def _update(book, candidates, own_terms, arrivals=None, now_s=NOW_S, levels=LEVELS):
    """Update a book; `own_terms` is item id -> its terms, `arrivals` those that are new."""
    own = {item: dict.fromkeys(terms, 1.0) for item, terms in own_terms.items()}
    new = own if arrivals is None else {item: own[item] for item in arrivals}
    ranked = sorted(candidates, key=lambda one: (-one.bits, one.term))
    return book.update(now_s, new, ranked, own, levels)


def _begun(*candidates, own_terms, levels=LEVELS):
    book = StoryBook(3600.0)
    return book, _update(book, candidates, own_terms, levels=levels)


def _held_by_all(terms, *items):
    return {item: set(terms) for item in items}


def test_two_terms_that_share_their_items_make_one_story_named_by_the_stronger():
    _, stories = _begun(
        _candidate(PIER, 12.0, 1, 2, 3),
        _candidate(ICE, 20.0, 1, 2, 3),
        own_terms=_held_by_all({ICE, PIER}, 1, 2, 3),
    )
    (story,) = stories
    assert list(story.terms) == [ICE, PIER]
    assert list(story.items) == [1, 2, 3]
    assert (story.bits, story.strongest_bits) == (32.0, 20.0)


def test_terms_in_different_items_make_stories_of_their_own_strongest_first():
    own_terms = _held_by_all({ICE}, 1, 2) | _held_by_all({CRANE}, 3, 4)
    _, stories = _begun(
        _candidate(ICE, 12.0, 1, 2), _candidate(CRANE, 15.0, 3, 4), own_terms=own_terms
    )
    assert [(story.number, list(story.terms)) for story in stories] == [(1, [CRANE]), (2, [ICE])]


@pytest.mark.parametrize(("shared", "stories"), [(3, 1), (2, 2)])
def test_terms_keep_company_from_three_fifths_of_the_smaller_set_of_items(shared, stories):
    of_ice = (1, 2, 3, 4, 5, 6, 7)
    of_pier = of_ice[:shared] + (11, 12, 13, 14, 15)[: 5 - shared]
    own_terms = {item: set() for item in (*of_ice, *of_pier)}
    for item in of_ice:
        own_terms[item].add(ICE)
    for item in of_pier:
        own_terms[item].add(PIER)
    _, begun = _begun(
        _candidate(ICE, 30.0, *of_ice), _candidate(PIER, 8.0, *of_pier), own_terms=own_terms
    )
    assert len(begun) == stories


def test_a_storys_bits_are_those_of_its_two_strongest_terms():
    _, (story,) = _begun(
        _candidate(ICE, 20.0, 1, 2),
        _candidate(PIER, 15.0, 1, 2),
        _candidate(FOG, 9.0, 1, 2),
        own_terms=_held_by_all({ICE, PIER, FOG}, 1, 2),
    )
    assert story.bits == 35.0


def test_a_term_of_a_single_item_begins_no_story():
    _, stories = _begun(_candidate(ICE, 90.0, 1), own_terms={1: {ICE}})
    assert stories == []


def test_a_term_below_the_level_of_noting_begins_no_story():
    _, stories = _begun(_candidate(ICE, 5.9, 1, 2), own_terms=_held_by_all({ICE}, 1, 2))
    assert stories == []


def test_without_candidates_and_items_nothing_changes():
    assert _update(StoryBook(3600.0), [], {}) == []


def test_a_term_joins_the_story_that_owns_half_of_its_items():
    own_terms = _held_by_all({ICE, PIER}, 1, 2) | _held_by_all({FOG}, 3, 4)
    own_terms[1] = own_terms[2] = {ICE, PIER, FOG}
    book, _ = _begun(_candidate(ICE, 20.0, 1, 2), _candidate(PIER, 20.0, 1, 2), own_terms=own_terms)
    changed = _update(book, [_candidate(FOG, 9.0, 1, 2, 3, 4)], own_terms, arrivals=[3, 4])
    assert [story.number for story in changed] == [1]
    assert FOG in changed[0].terms
    assert list(book.live) == [1]


def test_a_term_with_fewer_items_in_a_story_begins_another_with_what_is_free():
    own_terms = _held_by_all({ICE, PIER}, 1, 2) | _held_by_all({FOG}, 3, 4, 5)
    own_terms[1] = own_terms[2] = {ICE, PIER, FOG}
    book, _ = _begun(_candidate(ICE, 20.0, 1, 2), _candidate(PIER, 20.0, 1, 2), own_terms=own_terms)
    changed = _update(book, [_candidate(FOG, 9.0, 1, 2, 3, 4, 5)], own_terms, arrivals=[3, 4, 5])
    (story,) = changed
    assert (story.number, list(story.items)) == (2, [3, 4, 5])


def _story_of_two_terms():
    return _begun(
        _candidate(ICE, 20.0, 1, 2),
        _candidate(PIER, 18.0, 1, 2),
        own_terms=_held_by_all({ICE, PIER}, 1, 2),
    )


def test_an_item_with_one_leading_term_does_not_join_a_story_of_two():
    book, (story,) = _story_of_two_terms()
    assert _update(book, [], {3: {ICE, GULL, CRANE}}) == []
    assert list(story.items) == [1, 2]


def test_an_item_with_both_leading_terms_joins():
    book, (story,) = _story_of_two_terms()
    changed = _update(book, [], {3: {PIER, ICE, GULL}}, now_s=NOW_S + PULSE_S)
    assert changed == [story]
    assert story.items[3] == story.last_activity_s == NOW_S + PULSE_S


def test_an_item_with_two_weak_leading_terms_of_four_does_not_join():
    book, (story,) = _begun(
        *(_candidate(term, bits, 1, 2) for term, bits in enumerate([40.0, 40.0, 6.0, 6.0])),
        own_terms=_held_by_all({ICE, PIER, CRANE, GULL}, 1, 2),
    )
    assert _update(book, [], {3: {CRANE, GULL}}) == []
    assert _update(book, [], {4: {ICE, GULL}}) == [story]


def test_an_item_joins_the_story_that_it_fits_best():
    own_terms = _held_by_all({ICE, PIER}, 1, 2) | _held_by_all({CRANE, GULL}, 3, 4)
    book, _ = _begun(
        _candidate(ICE, 12.0, 1, 2),
        _candidate(PIER, 12.0, 1, 2),
        _candidate(CRANE, 15.0, 3, 4),
        _candidate(GULL, 15.0, 3, 4),
        own_terms=own_terms,
    )
    (story,) = _update(book, [], {5: {ICE, PIER, CRANE, GULL}})
    assert set(story.terms) == {CRANE, GULL}


def test_leading_terms_are_at_most_eight_and_a_stronger_takes_the_weakests_place():
    terms = range(LEADING_TERMS)
    book, (story,) = _begun(
        *(_candidate(term, 20.0 + term, 1, 2) for term in terms),
        own_terms=_held_by_all(terms, 1, 2),
    )
    assert set(story.terms) == set(terms)
    own_terms = _held_by_all({*terms, 98, 99}, 1, 2)
    _update(book, [_candidate(98, 50.0, 1, 2), _candidate(99, 6.0, 1, 2)], own_terms, arrivals=[])
    assert set(story.terms) == {98, *terms} - {0}
    assert 0 not in book.by_term
    assert book.by_term[98] == {1}


def test_a_known_term_keeps_its_best_evidence_and_the_time_it_joined():
    book, (story,) = _story_of_two_terms()
    own_terms = _held_by_all({ICE, PIER}, 1, 2, 3)
    for bits in (30.0, 11.0):
        _update(book, [_candidate(ICE, bits, 1, 2, 3)], own_terms, now_s=NOW_S + PULSE_S)
    assert (story.terms[ICE].bits, story.terms[ICE].joined_s) == (30.0, NOW_S)
    assert story.terms[ICE].seen == 3.0


def test_a_story_below_the_floor_is_noted_then_raised_once_when_it_grows():
    book, (story,) = _begun(
        _candidate(ICE, 9.0, 1, 2),
        _candidate(PIER, 8.0, 1, 2),
        own_terms=_held_by_all({ICE, PIER}, 1, 2),
    )
    assert (story.noted_s, story.raised_s) == (NOW_S, None)
    own_terms = _held_by_all({ICE, PIER}, 1, 2, 3, 4)
    for pulse, item in ((1, 3), (2, 4)):
        now_s = NOW_S + pulse * PULSE_S
        held = _candidate(ICE, 10.0 + pulse, *range(1, item + 1))
        assert _update(book, [held], own_terms, arrivals=[item], now_s=now_s) == [story]
    assert (story.noted_s, story.raised_s) == (NOW_S, NOW_S + PULSE_S)
    assert story.threshold_bits == LEVELS.floor_bits


@pytest.mark.parametrize(("ceiling_bits", "raised"), [(31.9, True), (32.0, False)])
def test_a_story_must_pass_the_ceiling_with_both_its_terms(ceiling_bits, raised):
    levels = Levels(6.0, 10.0, ceiling_bits, 6.0)
    _, (story,) = _begun(
        _candidate(ICE, 20.0, 1, 2),
        _candidate(PIER, 12.0, 1, 2),
        own_terms=_held_by_all({ICE, PIER}, 1, 2),
        levels=levels,
    )
    assert (story.raised_s is not None) is raised


def test_a_story_is_not_raised_by_a_threshold_that_sank_since_its_last_item():
    high = Levels(join_bits=6.0, floor_bits=10.0, ceiling_bits=50.0, noted_bits=6.0)
    own_terms = _held_by_all({ICE, PIER}, 1, 2, 3)
    book, (story,) = _begun(
        _candidate(ICE, 20.0, 1, 2), _candidate(PIER, 15.0, 1, 2), own_terms=own_terms, levels=high
    )
    later_s = NOW_S + 3600.0
    # The evidence is counted anew and is no stronger; no item is added.
    (same,) = _update(book, [_candidate(ICE, 20.0, 1, 2)], own_terms, arrivals=[], now_s=later_s)
    assert (same is story, story.raised_s, story.last_activity_s) == (True, None, NOW_S)
    _update(book, [], own_terms, arrivals=[3], now_s=later_s + PULSE_S)
    assert story.raised_s == later_s + PULSE_S


def test_stronger_evidence_is_activity_and_may_raise_a_story():
    high = Levels(join_bits=6.0, floor_bits=10.0, ceiling_bits=35.5, noted_bits=6.0)
    own_terms = _held_by_all({ICE, PIER}, 1, 2)
    book, (story,) = _begun(
        _candidate(ICE, 20.0, 1, 2), _candidate(PIER, 15.0, 1, 2), own_terms=own_terms, levels=high
    )
    later_s = NOW_S + 3600.0
    stronger = [_candidate(ICE, 21.0, 1, 2)]
    _update(book, stronger, own_terms, arrivals=[], now_s=later_s, levels=high)
    assert (story.raised_s, story.last_activity_s) == (later_s, later_s)


def test_the_headline_is_of_the_item_with_most_of_the_storys_bits_until_it_is_raised():
    book, (story,) = _begun(
        _candidate(ICE, 9.0, 1, 2, 3),
        _candidate(PIER, 8.0, 1, 2),
        _candidate(CRANE, 7.0, 2, 3),
        own_terms={1: {ICE, PIER}, 2: {ICE, PIER, CRANE}, 3: {ICE, CRANE}},
    )
    assert story.headline_item == 2
    own_terms = _held_by_all({ICE, PIER}, 1, 2, 4)
    _update(book, [_candidate(ICE, 12.0, 1, 2, 4)], own_terms, arrivals=[4])
    assert story.raised_s is not None
    shown = story.headline_item
    _update(book, [], {5: set(story.terms)})
    assert 5 in story.items
    assert story.headline_item == shown


def test_a_cleared_story_is_gone_and_its_terms_begin_a_new_one():
    book, (story,) = _story_of_two_terms()
    assert book.clear_due(NOW_S + 59.0, {1: NOW_S + 60.0}) == []
    assert book.clear_due(NOW_S + 90.0, {1: NOW_S + 60.0}) == [story]
    assert story.cleared_s == NOW_S + 60.0
    assert (book.live, book.by_term, book.story_of) == ({}, {}, {})
    own_terms = _held_by_all({ICE, PIER}, 1, 2, 3)
    (again,) = _update(
        book, [_candidate(ICE, 20.0, 1, 2, 3)], own_terms, arrivals=[3], now_s=NOW_S + 120.0
    )
    assert again.number == 2
    assert again.noted_s == NOW_S + 120.0


PULSES = st.lists(
    st.lists(st.sets(st.integers(0, 5), min_size=1, max_size=4), min_size=1, max_size=4),
    min_size=1,
    max_size=8,
)


@given(pulses=PULSES, bits=st.lists(st.floats(6.0, 40.0), min_size=48, max_size=48))
@settings(max_examples=150, deadline=None)
def test_an_item_belongs_to_one_live_story_at_most(pulses, bits):
    book, own_terms, strengths = StoryBook(3600.0), {}, iter(bits)
    for pulse, items in enumerate(pulses):
        arrivals = []
        for terms in items:
            arrivals.append(len(own_terms) + 1)
            own_terms[arrivals[-1]] = terms
        candidates = []
        for term in sorted({term for item in arrivals for term in own_terms[item]}):
            held = [item for item, terms in own_terms.items() if term in terms]
            candidates.append(_candidate(term, next(strengths), *held))
        _update(book, candidates, own_terms, arrivals, NOW_S + pulse * PULSE_S)
        owners = {}
        for story in book.live.values():
            for item in story.items:
                owners.setdefault(item, []).append(story.number)
        assert {item: held[0] for item, held in owners.items()} == book.story_of
        assert all(len(held) == 1 for held in owners.values())
        for term, numbers in book.by_term.items():
            assert numbers == {s.number for s in book.live.values() if term in s.terms}
