"""The file that `vanner init` writes: right as it stands, complete, and true to the defaults."""

from __future__ import annotations

import re
import tomllib

import pytest
from pydantic import BaseModel

from vanner.errors import SettingsError
from vanner.settings import (
    DeskSettings,
    FeedSettings,
    FolderSettings,
    MailSettings,
    Secret,
    ServiceSettings,
    Settings,
    load_settings,
    write_template,
)
from vanner.settings.template import TEMPLATE

# A setting that is switched off: `#` and a key or a table's head without a blank between.
SWITCHED_ON = re.sub(r"(?m)^#(?=[a-z\[])", "", TEMPLATE)
HEADS = {"[service]": ServiceSettings, "[[desk]]": DeskSettings, "[mail]": MailSettings}


def told():
    """Model, key, what the comment above says of its default, and the value shown."""
    rows, lines, model = [], SWITCHED_ON.splitlines(), None
    for number, line in enumerate(lines):
        if line == "[[source]]":
            model = FeedSettings if 'kind = "feed"' in lines[number:][:7] else FolderSettings
        elif line.startswith("["):
            model = HEADS[line]
        elif found := re.match(r"([a-z_]+) = (.+)", line):
            rows.append((model, found[1], lines[number - 1], found[2]))
    return rows


def toml_value(text):
    return tomllib.loads(f"value = {text}")["value"]


def test_template_loads_as_it_stands(tmp_path):
    path = tmp_path / "vanner.toml"
    write_template(path)
    settings = load_settings(path)
    assert [source.name for source in settings.source] == ["inbox"]
    assert [desk.sources for desk in settings.desk] == [("inbox",)]
    assert settings.source[0].path == tmp_path / "inbox"
    assert settings.mail is None


def test_what_is_switched_on_as_it_stands_equals_the_defaults(tmp_path):
    path = tmp_path / "vanner.toml"
    write_template(path)
    settings = load_settings(path)
    assert settings.service.model_dump(exclude={"database"}) == ServiceSettings().model_dump(
        exclude={"database"}
    )
    assert settings.desk[0] == DeskSettings(name="watch", sources=("inbox",))


def test_template_loads_with_everything_switched_on(write):
    settings = load_settings(write(SWITCHED_ON))
    assert [source.kind for source in settings.source] == ["folder", "feed"]
    assert settings.mail is not None


@pytest.mark.parametrize(
    "model", [ServiceSettings, FolderSettings, FeedSettings, DeskSettings, MailSettings]
)
def test_every_key_of_every_table_stands_in_the_template_once(model):
    assert sorted(key for of, key, _, _ in told() if of is model) == sorted(model.model_fields)


def test_every_table_and_both_places_of_a_secret_stand_in_the_template():
    for section in Settings.model_fields:
        assert re.search(rf"(?m)^#?\[+{section}\]+$", TEMPLATE)
    for place in Secret.model_fields:
        assert re.search(rf"(?m)^#password = \{{ {place} = ", TEMPLATE)


@pytest.mark.parametrize("row", told(), ids=lambda row: f"{row[0].__name__}.{row[1]}")
def test_default_that_is_told_is_the_models_own(row):
    model, key, comment, shown = row
    field = model.model_fields[key]
    assert comment.startswith("# ")
    if field.is_required():
        assert comment.endswith("Required.")
        return
    default = comment.partition("Default: ")[2]
    if field.default is None:
        assert default in {"none", "a tenth of alerts_per_day", "the one of [service]"}
    elif field.default == ():
        assert default == "[]"
    else:
        assert default == shown
        assert read_as(model, key, shown) == field.default


def read_as(model: type[BaseModel], key, shown):
    needed = {
        other: toml_value(text)
        for of, other, _, text in told()
        if of is model and model.model_fields[other].is_required()
    }
    return getattr(model.model_validate({**needed, key: toml_value(shown)}), key)


def test_tenth_that_is_told_is_what_a_desk_takes():
    desk = DeskSettings(name="watch", sources=("inbox",))
    shown = next(text for _, key, _, text in told() if key == "false_alerts_per_day")
    assert desk.false_level_per_day == toml_value(shown)


def test_file_that_is_there_stays_as_it_is(tmp_path):
    path = tmp_path / "vanner.toml"
    path.write_text("mine", encoding="utf-8")
    with pytest.raises(SettingsError, match="is there already"):
        write_template(path)
    assert path.read_text(encoding="utf-8") == "mine"


@pytest.mark.parametrize("name", ["missing/vanner.toml", "nul\0.toml", "a" * 5000])
def test_file_that_cannot_be_written_is_one_sentence(name, tmp_path):
    with pytest.raises(SettingsError, match="cannot be written") as caught:
        write_template(tmp_path / name)
    assert str(caught.value).isprintable()
