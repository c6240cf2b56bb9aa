"""Faults of what a value means: the key, the value as written and what would be right."""

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
def test_only_fault_names_key_value_and_rule(row, error_of):
    text, place, rule = row
    error = error_of(text)
    matching = [line for line in error.faults if line.startswith(f"vanner.toml: {place}: ")]
    assert len(matching) == 1, error.faults
    assert rule in matching[0].removeprefix(f"vanner.toml: {place}: ")
    assert len(error.faults) == 1
