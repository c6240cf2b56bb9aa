"""The demo's grammar: slots, alternatives and text blocks."""

import pytest

from vanner.sources.demo.compose import LEXICON, TOPICS, seeded
from vanner.sources.demo.desks import OUTLETS
from vanner.sources.demo.grammar import Phrasing, WordList, entries, listed
from vanner.sources.demo.topic import topic

WORDS = {
    "ship": WordList.ranked(("Patient Plover", "Sober Verger")),
    "fish": WordList.ranked(("cod",)),
    "fruit": WordList.ranked(("apple",)),
    "meal": WordList.ranked(("{_fish} with [peas|peas]",)),
}


def phrasing(seed=0):
    return Phrasing(seeded(seed, "grammar"), WORDS)


@pytest.mark.parametrize("seed", range(10))
def test_a_slot_stays_the_same_within_an_item_and_its_second_differs(seed):
    words = phrasing(seed)
    first = words.sentence("{ship}")
    assert words.sentence("{ship}") == first
    assert words.sentence("{ship2}") != first


def test_a_part_of_a_slot_is_its_last_word():
    words = phrasing()
    assert words.sentence("{ship}").endswith(words.sentence("{ship.last}"))
    assert " " not in words.sentence("{ship.last}")


def test_values_are_expanded_in_turn():
    assert phrasing().sentence("served: {meal}") == "Served: cod with peas"


def test_a_list_that_is_used_up_gives_a_value_again():
    words = phrasing()
    assert [words.sentence("{fish}"), words.sentence("{fish2}")] == ["Cod", "Cod"]


def test_numbers_lie_within_their_bounds():
    found = {int(phrasing(seed).sentence("{num 3 5}")) for seed in range(50)}
    assert found == {3, 4, 5}


def test_the_article_fits_the_word_after_it():
    text = phrasing().sentence("a {fruit}, a {fish}, a one-off and a unit")
    assert text == "An apple, a cod, a one-off and a unit"


def test_an_unknown_slot_is_an_error():
    with pytest.raises(KeyError):
        phrasing().sentence("{whatever}")


def test_lower_ranks_are_drawn_less_often():
    words = WordList.ranked(("first", "second", "third", "fourth", "fifth", "sixth"))
    rng = seeded(1, "ranks")
    drawn = [words.draw(rng) for _ in range(3000)]
    assert drawn.count("first") > drawn.count("third") > drawn.count("sixth") > 0


def test_an_indented_line_continues_the_entry_above():
    assert entries("\none\n two\nthree\n   \n") == ("one two", "three")


def test_a_list_is_parted_at_commas():
    assert listed("\n a b,\n c\n d , ") == ("a b", "c d")


def test_a_tagged_sentence_follows_only_its_openings():
    first, second = topic("One :: Lead one.\nTwo :: Lead two.", "2> Only two.\nBoth.").openings
    assert first.bodies == ("Both.",)
    assert second.bodies == ("Only two.", "Both.")


def test_an_opening_without_its_mark_is_refused():
    with pytest.raises(ValueError, match="headline :: lead"):
        topic("Only a headline", "A sentence.")


def test_every_template_of_the_demo_can_be_worded():
    count = 0
    for name, found in TOPICS.items():
        for opening in found.openings:
            for template in (opening.headline, opening.lead, *opening.bodies):
                held = {"hm": "0000"} if "{hm}" in template else {}
                text = Phrasing(seeded(0, name), LEXICON, held).sentence(template)
                assert text.strip() == text
                count += 1
    assert count > 400


def test_the_outlets_know_every_topic_and_every_topic_has_an_outlet():
    assert {name for outlet in OUTLETS for name in outlet.topics} == set(TOPICS)


def test_the_shares_of_a_desks_outlets_sum_to_one():
    for desk in ("newsroom", "operations"):
        shares = [outlet.share for outlet in OUTLETS if outlet.desk == desk]
        assert sum(shares) == pytest.approx(1.0)
