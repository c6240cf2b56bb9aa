"""Faults of keys, types, bounds and names: the key, its value and what would be right."""

from __future__ import annotations

import pytest

SOURCE = '[[source]]\nname = "harbour"\nkind = "folder"\npath = "inbox"\n'
FEED = '[[source]]\nname = "wire"\nkind = "feed"\nurl = "https://wire.example/feed"\n'
DESK = '[[desk]]\nname = "metro"\nsources = ["harbour"]\n'
MAIL = '[mail]\nhost = "mail.example"\nsender = "vanner@town.example"\n'


def in_service(line):
    return f"[service]\n{line}\n{SOURCE}{DESK}"


def in_feed(line):
    return f"{FEED}{line}\n{SOURCE}{DESK}"


def in_desk(line):
    return f"{SOURCE}{DESK}{line}\n"


def in_mail(line):
    return f"{SOURCE}{DESK}{MAIL}{line}\n"


# Each row: the file, then the place with the value as written, then part of the rule.
ONE_FAULT = {
    "unknown top key": (f"sourse = 1\n{SOURCE}{DESK}", "sourse = 1", "did you mean source?"),
    "unknown table": (f"{SOURCE}{DESK}[mial]\nport = 1\n", "mial = { ... }", "did you mean mail?"),
    "unknown desk key": (
        in_desk("alerts_a_day = 5"),
        'desk "metro", alerts_a_day = 5',
        "did you mean alerts_per_day?",
    ),
    "unknown key like none": (
        in_service("colour = 1"),
        "service, colour = 1",
        "there may be database, log, pulse, timezone",
    ),
    "key of another table": (
        in_desk("port = 25"),
        'desk "metro", port = 25',
        "it belongs below [mail]",
    ),
    "key of another kind": (
        in_feed('path = "x"'),
        'source "wire", path = "x"',
        "there may be every, kind, language, name, password, url, username",
    ),
    "key in quotes": (
        in_desk('"a b" = 1'),
        'desk "metro", "a b" = 1',
        "unknown key",
    ),
    "text for a number": (
        in_desk('alerts_per_day = "5"'),
        'desk "metro", alerts_per_day = "5"',
        "must be a number",
    ),
    "truth for a number": (
        in_desk("alerts_per_day = true"),
        'desk "metro", alerts_per_day = true',
        "must be a number",
    ),
    "number for a truth": (
        in_desk("mail_alerts = 1"),
        'desk "metro", mail_alerts = 1',
        "must be true or false",
    ),
    "part of a word": (
        in_desk("warm_up_words = 1.5"),
        'desk "metro", warm_up_words = 1.5',
        "must be a whole number",
    ),
    "number for text": (in_service("database = 3"), "service, database = 3", "must be text"),
    "number for a path": (
        in_desk("digest_folder = 3"),
        'desk "metro", digest_folder = 3',
        "must be a path in quotes",
    ),
    "date for a duration": (
        in_desk("warm_up = 2031-05-27"),
        'desk "metro", warm_up = 2031-05-27',
        "must be a duration",
    ),
    "text for a list": (
        in_desk('digests = "0 7 * * *"'),
        'desk "metro", digests = "0 7 * * *"',
        "must be a list in square brackets",
    ),
    "number for a table": (f"mail = 3\n{SOURCE}{DESK}", "mail = 3", "must be a table"),
    "number for a source": (
        f"source = [3]\n{DESK}",
        "source 1 = 3",
        "must be a table",
    ),
    "below the bound": (
        in_desk("alerts_per_day = -1"),
        'desk "metro", alerts_per_day = -1',
        "must be above 0",
    ),
    "above the bound": (
        in_desk("alerts_per_day = 1001"),
        'desk "metro", alerts_per_day = 1001',
        "must be at most 1000",
    ),
    "negative words": (
        in_desk("warm_up_words = -1"),
        'desk "metro", warm_up_words = -1',
        "must be at least 0",
    ),
    "whole share": (
        in_desk("background_share = 1"),
        'desk "metro", background_share = 1',
        "must be below 1",
    ),
    "no number": (
        in_desk("background_share = nan"),
        'desk "metro", background_share = nan',
        "must be a finite number",
    ),
    "port too high": (in_mail("port = 65536"), "mail, port = 65536", "must be at most 65535"),
    "word not offered": (in_service('log = "xml"'), 'service, log = "xml"', '"text" or "json"'),
    "kind not offered": (
        f"{SOURCE.replace('folder', 'foldr')}{DESK}",
        'source "harbour", kind = "foldr"',
        '"feed" or "folder"',
    ),
    "kind missing": (
        f'[[source]]\nname = "harbour"\n{DESK}',
        'source "harbour", kind is missing',
        '"feed" or "folder"',
    ),
    "url missing": (
        f'[[source]]\nname = "wire"\nkind = "feed"\n{SOURCE}{DESK}',
        'source "wire", url is missing',
        "must be an address",
    ),
    "name missing": (
        f'{SOURCE}[[desk]]\nsources = ["harbour"]\n',
        "desk 1, name is missing",
        "must be a name",
    ),
    "name of no letters": (
        f'{SOURCE}[[desk]]\nname = "!"\nsources = ["harbour"]\n',
        'desk 1, name = "!"',
        "begins with a letter or digit",
    ),
    "desk without a source": (
        f'{SOURCE}[[desk]]\nname = "metro"\nsources = []\n',
        'desk "metro", sources = []',
        "at least 1 entry",
    ),
    "unknown source": (
        in_desk("").replace('["harbour"]', '["harbour", "harbor"]'),
        'desk "metro", sources 2 = "harbor"',
        'did you mean "harbour"?',
    ),
    "unknown source like none": (
        in_desk("").replace('["harbour"]', '["harbour", "zzz"]'),
        'desk "metro", sources 2 = "zzz"',
        "add it or name one that is there",
    ),
    "two sources of a name": (
        f"{SOURCE}{SOURCE}{DESK}",
        'source 2, name = "harbour"',
        "source 1 has this one",
    ),
    "two desks of a name": (
        f"{SOURCE}{DESK}{DESK.replace('metro', ' metro ')}",
        'desk 2, name = " metro "',
        "desk 1 has this one",
    ),
    "no source": (
        f"source = []\n{DESK}",
        "source = []",
        "at least one [[source]]",
    ),
    "no desk": (SOURCE, "desk is missing", "at least one [[desk]]"),
    "single brackets": (
        f"{SOURCE}{DESK}".replace("[[desk]]", "[desk]"),
        "desk = [{ ... }]",
        "double brackets: [[desk]]",
    ),
    "double brackets": (
        in_mail("").replace("[mail]", "[[mail]]"),
        "mail = { ... }",
        "single brackets: [mail]",
    ),
}


@pytest.mark.parametrize("row", ONE_FAULT.values(), ids=ONE_FAULT.keys())
def test_fault_names_key_value_and_rule(row, error_of):
    text, place, rule = row
    error = error_of(text)
    matching = [line for line in error.faults if line.startswith(f"vanner.toml: {place}: ")]
    assert len(matching) == 1, error.faults
    assert rule in matching[0].removeprefix(f"vanner.toml: {place}: ")


# In these two the desk's source is missing as well.
@pytest.mark.parametrize(
    "row",
    [row for name, row in ONE_FAULT.items() if name not in {"no source", "number for a source"}],
    ids=[name for name in ONE_FAULT if name not in {"no source", "number for a source"}],
)
def test_one_mistake_is_one_fault(row, error_of):
    text, _, _ = row
    assert len(error_of(text).faults) == 1
