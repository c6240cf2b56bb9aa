"""A desk's saved state: going on from it gives bit for bit what not stopping gives."""

import io
import json

import numpy as np
import pytest

from vanner.model.desk import DeskModel
from vanner.model.state import (
    STATE_VERSION,
    StateError,
    pack,
    pack_parameters,
    retune,
    unpack,
    unpack_parameters,
)

DAY_S = 86400.0
START_S = 1_700_006_400.0


def _unpacked(state):
    """A state's parts; the unused end of an array, which holds zeros, is left out."""
    with np.load(io.BytesIO(state)) as held:
        by_term = {n: held[n].T if n == "window_counts" else held[n] for n in held.files}
    parts = {name: np.trim_zeros(array.ravel(), "b") for name, array in by_term.items()}
    return json.loads(bytes(parts.pop("facts"))), {n: a.tolist() for n, a in parts.items()}


def _through(model, pulses):
    return [model.step(now_s, items) for now_s, items in pulses]


@pytest.mark.parametrize("seed", range(3))
def test_stopping_and_going_on_gives_exactly_the_results_of_not_stopping(parameters, stream, seed):
    told = parameters(warm_up_s=7200.0, warm_up_at_most_s=7200.0)
    pulses = stream(seed, hours=20)
    whole = DeskModel(told)
    expected = _through(whole, pulses)
    assert any(story.raised_s for result in expected for story in result.stories)
    rng = np.random.default_rng(seed)
    cuts = sorted(rng.integers(0, len(pulses) + 1, 4).tolist())
    model, results = DeskModel(told), []
    for start, end in zip([0, *cuts], [*cuts, len(pulses)], strict=True):
        model = unpack(pack(model), told)
        results += _through(model, pulses[start:end])
    assert results == expected
    assert _unpacked(pack(model)) == _unpacked(pack(whole))


@pytest.mark.parametrize("seed", range(3))
def test_a_state_read_back_and_saved_again_is_the_same_bytes(parameters, stream, seed):
    model = DeskModel(parameters())
    _through(model, stream(seed, hours=10))
    saved = pack(model)
    assert pack(unpack(saved, parameters())) == saved


def test_a_desk_that_has_read_nothing_can_be_saved(parameters, term_item):
    model = unpack(pack(DeskModel(parameters())), parameters())
    assert (model.terms, model.words, model.oldest_s) == ([], 0, None)
    result = model.step(START_S, [term_item(1, "quay gull", START_S)])
    assert result == DeskModel(parameters()).step(START_S, [term_item(1, "quay gull", START_S)])


def test_words_of_any_script_are_kept(parameters, term_item):
    words = {"пристань": 1, "埠頭": 2, "l'écluse": 1, "\ud800odd": 1, "🛶": 1}
    model = DeskModel(parameters())
    model.step(START_S, [term_item(1, words, START_S)])
    assert unpack(pack(model), parameters()).terms == list(words)


@pytest.mark.parametrize("version", [STATE_VERSION + 1, STATE_VERSION - 1])
def test_a_state_of_another_version_is_refused_by_name(parameters, version):
    with np.load(io.BytesIO(pack(DeskModel(parameters())))) as held:
        arrays = dict(held)
    facts = json.loads(bytes(arrays["facts"])) | {"version": version}
    arrays["facts"] = np.frombuffer(json.dumps(facts).encode(), dtype=np.uint8)
    changed = io.BytesIO()
    np.savez(changed, **arrays)
    with pytest.raises(StateError, match=rf"version {version}\b.*knows {STATE_VERSION}"):
        unpack(changed.getvalue(), parameters())


@pytest.mark.parametrize("state", [b"", b"no archive", b"PK\x03\x04 cut short"])
def test_a_damaged_state_is_refused_as_that(parameters, state):
    with pytest.raises(StateError, match="damaged"):
        unpack(state, parameters())


def test_a_state_that_is_cut_short_anywhere_is_refused(parameters, term_item):
    model = DeskModel(parameters())
    model.step(START_S, [term_item(1, "quay gull", START_S)])
    whole = pack(model)
    for length in range(0, len(whole), 97):
        with pytest.raises(StateError):
            unpack(whole[:length], parameters())


def test_parameters_are_kept_to_the_bit(parameters):
    told = parameters(background_share=0.1 + 0.2, zone="Europe/Berlin", desk="Häfen & Docks")
    assert unpack_parameters(pack_parameters(told)) == told


RETUNED = {
    "standing_half_life_s": 7 * DAY_S,
    "running_half_life_s": 3600.0,
    "alerts_per_day": 1.0,
    "false_alerts_per_day": 0.1,
    "clear_after_s": 600.0,
}


def test_retuning_keeps_present_values_and_fades_by_the_new_half_lives(parameters, stream):
    model = DeskModel(parameters())
    pulses = stream(1, hours=12)
    _through(model, pulses)
    now_s = pulses[-1][0]
    terms = np.arange(len(model.terms))
    backgrounds = {"standing": model.standing, "running": model.running}
    before = {name: b.probabilities(terms, 1e-6, now_s) for name, b in backgrounds.items()}
    counts = {name: b.counts.at(terms, now_s) for name, b in backgrounds.items()}
    told = parameters(**RETUNED)
    retune(model, told, now_s)
    for name, background in backgrounds.items():
        assert background.probabilities(terms, 1e-6, now_s) == pytest.approx(before[name])
        half_life_s = RETUNED[f"{name}_half_life_s"]
        later = background.counts.at(terms, now_s + half_life_s)
        assert later == pytest.approx(counts[name] / 2)
    assert model.parameters == told
    assert (model.budget.alerts_per_day, model.budget.false_alerts_per_day) == (1.0, 0.1)
    assert model.book.clear_after_s == 600.0


def test_retuning_to_the_same_parameters_changes_no_bit(parameters, stream):
    model = DeskModel(parameters())
    pulses = stream(2, hours=8)
    _through(model, pulses)
    saved = pack(model)
    retune(model, parameters(), pulses[-1][0])
    assert pack(model) == saved


def test_a_desk_that_has_read_nothing_can_be_retuned(parameters, term_item):
    model = DeskModel(parameters())
    retune(model, parameters(**RETUNED), START_S)
    item = term_item(1, "quay gull", START_S)
    assert model.step(START_S, [item]) == DeskModel(parameters(**RETUNED)).step(START_S, [item])
