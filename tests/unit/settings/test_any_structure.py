"""Whatever stands in the file, the answer is settings or a SettingsError of our own words."""

from __future__ import annotations

import tempfile
from datetime import date, datetime, time
from pathlib import Path

import pytest
import tomlkit
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from pydantic import TypeAdapter

from vanner.errors import SettingsError
from vanner.settings import Settings, load_settings
from vanner.settings.faults import _RULES, GENERAL_RULE
from vanner.settings.load import settings_of
from vanner.settings.models import DeskSettings, FeedSettings, FolderSettings, MailSettings

PATH = Path("/nowhere/vanner.toml")
KNOWN = sorted(
    {
        key
        for model in (Settings, DeskSettings, FeedSettings, FolderSettings, MailSettings)
        for key in model.model_fields
    }
    | {"database", "pulse", "log", "env", "file"}
)
WORDS = [
    "feed", "folder", "harbour", "metro", "60s", "5m", "0 7 * * *", "0 0 31 2 *", "L * * * *",
    "Europe/Vienna", "https://wire.example/feed", "https://[", "sqlite:///vanner.db",
    "postgresql://db.example/x", "sqlite://", "a@b.example", "@", "~", "text", "tls", "en",
]  # fmt: skip
keys = st.sampled_from(KNOWN) | st.text(max_size=12)
scalars = (
    st.sampled_from(WORDS)
    | st.text(max_size=80)
    | st.integers()
    | st.sampled_from([10**400, -(10**400)])
    | st.floats()
    | st.booleans()
    | st.dates()
    | st.times()
    | st.datetimes()
)
values = st.recursive(
    scalars,
    lambda inner: st.lists(inner, max_size=3) | st.dictionaries(keys, inner, max_size=5),
    max_leaves=12,
)


def tables_of(*models):
    """Tables near to right ones: known keys with any value, and some keys unknown."""
    fields = sorted({key for model in models for key in model.model_fields})
    return st.dictionaries(st.sampled_from(fields) | keys, values, max_size=8)


files = st.dictionaries(keys, values, max_size=6) | st.fixed_dictionaries(
    {
        "source": st.lists(tables_of(FeedSettings, FolderSettings), max_size=3),
        "desk": st.lists(tables_of(DeskSettings), max_size=3),
    },
    optional={"mail": tables_of(MailSettings), "service": values, "stray": values},
)


def check_answer(read):
    error = None
    try:
        found = read()
    except SettingsError as caught:
        error = caught
    if error is None:
        assert found.source
        assert found.desk
        return
    for line in (str(error), *error.faults):
        assert line.isprintable()
        assert GENERAL_RULE not in line
        # Words of the validating library that no rule of ours has.
        assert "Input should" not in line
        assert "pydantic" not in line
    assert all(line.startswith("vanner.toml: ") for line in error.faults)


@settings(max_examples=200, deadline=None)
@given(files)
def test_any_structure_gives_settings_or_our_own_error(raw):
    check_answer(lambda: settings_of(raw, PATH))


@settings(max_examples=100, deadline=None, suppress_health_check=[HealthCheck.too_slow])
@given(st.dictionaries(st.sampled_from(KNOWN), st.sampled_from(WORDS) | st.integers(), max_size=5))
def test_any_file_of_toml_gives_settings_or_our_own_error(raw):
    check_text(tomlkit.dumps({**raw, "desk": [raw], "source": [raw]}))


@settings(max_examples=200, deadline=None)
@given(
    st.text(max_size=60)
    | st.text(alphabet="[]{}=.,\"'#ab1_-: \n\\", max_size=60)
    | st.lists(
        st.sampled_from(
            ["[a]", "[[a]]", "a=1", "a.b=1", "[a.b]", "[[a.b]]", "a=[]", "a={}", "b=''"]
        ),
        max_size=6,
    ).map("\n".join)
)
def test_any_text_gives_settings_or_our_own_error(text):
    check_text(text)


@pytest.mark.parametrize("key", ["pulse", "timezone", "log", "stray"])
def test_number_too_long_to_be_written_is_our_own_error(key):
    # Python writes no decimal number of more than 4300 digits, but TOML may hold it as hex.
    check_text(f"[service]\n{key} = 0x{'f' * 5000}\n")


def check_text(text):
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "vanner.toml"
        path.write_text(text, encoding="utf-8", newline="")
        check_answer(lambda: load_settings(path))


WRONG = [None, 3, 1.5, -1, float("nan"), True, "", "§", [], [[]], {}, {"§": 1},
         date(2031, 1, 1), time(1), datetime(2031, 1, 1)]  # fmt: skip  # noqa: DTZ001 - as TOML has them


@pytest.mark.parametrize(
    "model", [FeedSettings, FolderSettings, DeskSettings, MailSettings, Settings]
)
def test_each_error_type_that_a_wrong_value_gives_has_a_rule(model):
    own = {"missing", "extra_forbidden", "value_error", "literal_error", *_RULES}
    seen = set()
    for key in model.model_fields:
        for value in WRONG:
            for inside in (value, [value], {key: value}):
                seen |= error_types(model, {key: inside})
    assert len(seen) > 3
    assert seen <= own


def error_types(model, raw):
    from pydantic import ValidationError

    try:
        TypeAdapter(model).validate_python(raw)
    except ValidationError as error:
        return {one["type"] for one in error.errors()}
    return set()
