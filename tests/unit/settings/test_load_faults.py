"""Each kind of fault: the key, the value as written and what would be right."""

from __future__ import annotations

import pytest

SOURCE = '[[source]]\nname = "harbour"\nkind = "folder"\npath = "inbox"\n'
FEED = '[[source]]\nname = "wire"\nkind = "feed"\nurl = "https://wire.example/feed"\n'
DESK = '[[desk]]\nname = "metro"\nsources = ["harbour"]\n'
MAIL = '[mail]\nhost = "mail.example"\nsender = "vanner@town.example"\n'


def in_service(line):
    return f"[service]\n{line}\n{SOURCE}{DESK}"


def in_source(line):
    return f"{SOURCE}{line}\n{DESK}"


def in_feed(line):
    return f"{FEED}{line}\n{SOURCE}{DESK}"


def in_desk(line):
    return f"{SOURCE}{DESK}{line}\n"


def in_mail(line):
    return f"{SOURCE}{DESK}{MAIL}{line}\n"


def with_url(url):
    return FEED.replace("https://wire.example/feed", url) + SOURCE + DESK


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
    "recipients without mail": (
        in_desk('recipients = ["desk@town.example"]'),
        'desk "metro", recipients = ["desk@town.example"]',
        "a [mail] table must say",
    ),
    "no mail address": (
        in_desk('recipients = ["desk"]') + MAIL,
        'desk "metro", recipients 1 = "desk"',
        "must be a mail address",
    ),
    "two addresses in one": (
        in_desk('recipients = ["a@x.example, b@x.example"]') + MAIL,
        'desk "metro", recipients 1 = "a@x.example, b@x.example"',
        "must be a mail address",
    ),
    "host with a port": (
        in_mail("").replace('"mail.example"', '"mail.example:25"'),
        'mail, host = "mail.example:25"',
        "without scheme and port",
    ),
    "PostgreSQL": (
        in_service('database = "postgresql://db.example/vanner"'),
        'service, database = "postgresql://db.example/vanner"',
        "PostgreSQL comes later",
    ),
    "unknown database": (
        in_service('database = "mysql://db.example/vanner"'),
        'service, database = "mysql://db.example/vanner"',
        "must be sqlite:///PATH",
    ),
    "database as a bare path": (
        in_service('database = "vanner.db"'),
        'service, database = "vanner.db"',
        "must be sqlite:///PATH",
    ),
    "database of two slashes": (
        in_service('database = "sqlite://vanner.db"'),
        'service, database = "sqlite://vanner.db"',
        "must be sqlite:///PATH",
    ),
    "database in memory": (
        in_service('database = "sqlite:///:memory:"'),
        'service, database = "sqlite:///:memory:"',
        "nothing would be kept",
    ),
    "database of no name": (
        in_service('database = "sqlite://"'),
        'service, database = "sqlite://"',
        "nothing would be kept",
    ),
    "bad cron": (
        in_desk('digests = ["0 7 * * *", "61 7 * * *"]'),
        'desk "metro", digests 2 = "61 7 * * *"',
        "five cron fields",
    ),
    "cron of six fields": (
        in_desk('digests = ["0 7 * * * 0"]'),
        'desk "metro", digests 1 = "0 7 * * * 0"',
        "five cron fields",
    ),
    "cron alias": (
        in_desk('digests = ["@daily"]'),
        'desk "metro", digests 1 = "@daily"',
        "five cron fields",
    ),
    "cron drawn at random": (
        in_desk('digests = ["R 7 * * *"]'),
        'desk "metro", digests 1 = "R 7 * * *"',
        "five cron fields",
    ),
    "day that never comes": (
        in_desk('digests = ["0 7 31 2 *"]'),
        'desk "metro", digests 1 = "0 7 31 2 *"',
        "must be a day that comes",
    ),
    "bad zone": (
        in_service('timezone = "Europe/Viena"'),
        'service, timezone = "Europe/Viena"',
        'such as "Europe/Vienna"',
    ),
    "bad zone of a desk": (
        in_desk('timezone = "../UTC"'),
        'desk "metro", timezone = "../UTC"',
        "must be a time zone of the IANA database",
    ),
    "bad duration": (
        in_source('every = "5 minutes"'),
        'source "harbour", every = "5 minutes"',
        "must be a duration",
    ),
    "no duration": (
        in_source('every = "0s"'),
        'source "harbour", every = "0s"',
        "must be a duration above zero",
    ),
    "endless duration": (
        in_source("every = inf"),
        'source "harbour", every = inf',
        "at most ten years",
    ),
    "pulse too short": (in_service("pulse = 0.5"), "service, pulse = 0.5", 'from "1s" to "1h"'),
    "pulse too long": (in_service('pulse = "2h"'), 'service, pulse = "2h"', 'from "1s" to "1h"'),
    "pulse out of step": (
        in_service('pulse = "7s"'),
        'service, pulse = "7s"',
        "divide an hour evenly",
    ),
    "password without user": (
        in_feed('password = { env = "WIRE" }'),
        'source "wire", username is missing',
        "where there is a password",
    ),
    "mail password without user": (
        in_mail('password = { env = "MAIL" }'),
        "mail, username is missing",
        "where there is a password",
    ),
    "mail user without password": (
        in_mail('username = "vanner"'),
        "mail, password is missing",
        "where there is a username",
    ),
    "password in two places": (
        in_mail('username = "vanner"\npassword = { env = "A", file = "b" }'),
        "mail, password = (not shown)",
        'either { env = "NAME" } or { file = "PATH" }',
    ),
    "empty user": (
        in_feed('username = ""'),
        'source "wire", username = ""',
        "must not be empty",
    ),
    "feed address of another scheme": (
        with_url("ftp://wire.example/feed"),
        'source "wire", url = "ftp://wire.example/feed"',
        "must be an address",
    ),
    "feed address without host": (
        with_url("https:///feed"),
        'source "wire", url = "https:///feed"',
        "must be an address",
    ),
    "feed address of a broken host": (
        with_url("https://[::1/feed"),
        'source "wire", url = "https://[::1/feed"',
        "must be an address",
    ),
    "language": (
        in_feed('language = "english please"'),
        'source "wire", language = "english please"',
        "BCP 47",
    ),
    "home folder": (
        in_desk('digest_folder = "~/digests"'),
        'desk "metro", digest_folder = "~/digests"',
        "without ~",
    ),
    "empty path": (
        in_desk('digest_folder = ""'),
        'desk "metro", digest_folder = ""',
        "must be a path",
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


def test_desk_with_less_than_no_alerts_is_told_in_full(error_of, right):
    error = error_of(right + "alerts_per_day = -1\n")
    assert error.faults == ('vanner.toml: desk "metro", alerts_per_day = -1: must be above 0',)


def test_eight_different_faults_come_in_one_report(error_of):
    error = error_of(
        'watch = true\n[service]\npulse = "7s"\n'
        '[[source]]\nname = "harbour"\nkind = "foldr"\nevery = "soon"\n'
        '[[source]]\nname = "harbour"\nkind = "feed"\nurl = "wire.example"\n'
        '[[desk]]\nname = "metro"\nsources = ["harbor"]\ndigests = ["daily"]\n'
        'recipients = ["desk@town.example"]\n'
    )
    places = [line.removeprefix("vanner.toml: ").partition(":")[0] for line in error.faults]
    assert places == [
        "watch = true",
        'service, pulse = "7s"',
        'source 1, kind = "foldr"',
        'source 1, every = "soon"',
        'source 2, url = "wire.example"',
        'source 2, name = "harbour"',
        'desk "metro", digests 1 = "daily"',
        'desk "metro", sources 1 = "harbor"',
        'desk "metro", recipients = ["desk@town.example"]',
    ]
    assert "9 faults" in str(error)


def test_source_of_unknown_kind_is_checked_as_far_as_it_can_be(error_of, right):
    error = error_of(right.replace('"folder"', '"feeed"') + "\n")
    assert [line for line in error.faults if "path" in line] == []
    error = error_of(right.replace('kind = "folder"', 'kind = 3\nevry = "5s"\nlanguage = 5'))
    told = "\n".join(error.faults)
    assert 'evry = "5s": unknown key; did you mean every?' in told
    assert "language = 5: must be text in quotes" in told
    assert 'kind = 3: must be "feed" or "folder"' in told


def test_empty_file_lacks_source_and_desk(error_of):
    assert error_of("").faults == (
        "vanner.toml: source is missing: there must be at least one [[source]]",
        "vanner.toml: desk is missing: there must be at least one [[desk]]",
    )


def test_long_and_unprintable_values_stay_on_one_short_line(error_of, right):
    error = error_of(right + f'timezone = "a\\u001b[31m\\n\\u2028{"b" * 500}"\n')
    (line,) = error.faults
    assert line.isprintable()
    assert len(line) < 250
    assert '"a\\u001b[31m\\n\\u2028bbb' in line


def test_name_that_two_entries_share_names_neither(error_of, right):
    error = error_of(right + '[[desk]]\nname = "metro"\nsources = ["harbour"]\npuls = 1\n')
    assert any(line.startswith("vanner.toml: desk 2, puls = 1: ") for line in error.faults)
