"""Readings of a pulse: the items beside an item, their order and their length change no bit."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from vanner.model import read_batch
from vanner.model.desk import DeskModel
from vanner.model.read_batch import read_items

START_S = 1_700_006_400.0


def _words(rng, distinct, vocabulary=4000):
    picked = rng.choice(vocabulary, distinct, replace=False)
    return {f"word{n}": int(rng.integers(1, 6)) for n in picked}


@pytest.fixture(scope="module")
def taught(parameters, term_item):
    """A desk with backgrounds; every word of the tests is numbered already."""
    model, rng = DeskModel(parameters()), np.random.default_rng(3)
    model.number_terms([f"word{n}" for n in range(4000)])
    for pulse in range(20):
        now_s = START_S + pulse * 60.0
        model.step(now_s, [term_item(pulse * 9 + n, _words(rng, 40), now_s) for n in range(9)])
    return model


def _facts(read):
    arrays = (read.terms, read.counts, read.theta, read.own_share)
    return [array.tobytes() for array in arrays], read.shares, read.bits_per_word


@given(seed=st.integers(0, 2**32 - 1))
@settings(max_examples=20, deadline=None)
def test_a_reading_is_the_same_alone_in_any_order_and_beside_any_items(taught, term_item, seed):
    rng = np.random.default_rng(seed)
    now_s = START_S + 5000.0
    sizes = rng.choice([0, 1, 31, 32, 33, 64, 65, 200], 8)
    items = [term_item(n, _words(rng, int(size)), now_s) for n, size in enumerate(sizes)]
    together = read_items(taught, items, now_s)
    assert [read.item for read in together] == items
    alone = [_facts(read_items(taught, [item], now_s)[0]) for item in items]
    assert [_facts(read) for read in together] == alone
    order = rng.permutation(8).tolist()
    shuffled = read_items(taught, [items[place] for place in order], now_s)
    assert [_facts(read) for read in shuffled] == [alone[place] for place in order]


def test_items_that_do_not_fit_one_matrix_are_read_alike(taught, term_item, monkeypatch):
    rng = np.random.default_rng(1)
    items = [term_item(n, _words(rng, 50), START_S) for n in range(23)]
    at_once = [_facts(read) for read in read_items(taught, items, START_S + 5000.0)]
    monkeypatch.setattr(read_batch, "_LARGEST_CELLS", 64 * 5)
    assert [_facts(read) for read in read_items(taught, items, START_S + 5000.0)] == at_once
    monkeypatch.setattr(read_batch, "_LARGEST_CELLS", 1)  # one row at a time
    assert [_facts(read) for read in read_items(taught, items, START_S + 5000.0)] == at_once


@pytest.mark.parametrize(
    ("terms", "width"),
    [(0, 32), (1, 32), (32, 32), (33, 64), (64, 64), (65, 128), (1000, 1024), (1025, 2048)],
)
def test_a_rows_width_is_the_power_of_two_that_holds_the_items_terms(terms, width):
    assert read_batch._width(terms) == width


def test_no_items_have_no_readings(taught):
    assert read_items(taught, [], START_S) == []


def test_padding_takes_no_part(taught, term_item):
    (read,) = read_items(taught, [term_item(1, {"word1": 2, "word2": 1}, START_S)], START_S)
    assert read.terms.tolist() == taught.number_terms(["word1", "word2"]).tolist()
    assert read.counts.tolist() == [2.0, 1.0]
    assert read.theta.sum() == pytest.approx(1.0)


def test_a_word_never_seen_is_numbered_in_order_of_appearance(parameters, term_item):
    model = DeskModel(parameters())
    read_items(
        model, [term_item(1, "quay gull quay", START_S), term_item(2, "fog gull", START_S)], START_S
    )
    assert model.terms == ["quay", "gull", "fog"]
