"""The settings file that `vanner init` writes: every key, with its unit and its default.

It works as it stands. A line that begins with `#` and no blank is a setting that can be
switched on by taking the `#` away; the tests do that with all of them and load the result.
"""

from __future__ import annotations

from pathlib import Path
from typing import Final

from vanner.errors import SettingsError
from vanner.settings.written import plain

TEMPLATE: Final = """\
# Settings of Vanner. After a change run: vanner check
#
# A line that begins with # and a word is a setting that is switched off: take the # away.
# Durations are a number with s, m, h, d or w, such as "90s", "15m", "6h", "28d" or "2w".
# Paths that do not begin with / start at the folder of this file.
# An item is a lead, never a fact: verify before you publish or act.

[service]
# Where everything is kept: sqlite:/// and a path. Default: "sqlite:///vanner.db"
#database = "sqlite:///vanner.db"
# Time zone of the IANA database for schedules and times of day. Default: "UTC"
#timezone = "UTC"
# Step of the desks' clocks, from "1s" to "1h", an even part of an hour. Default: "60s"
#pulse = "60s"
# How the log is written: "text" for people, "json" for programs. Default: "text"
#log = "text"

# ---- Sources: where text comes from. One [[source]] for each. ----

# A folder: .txt .html .htm .eml .jsonl and .jsonl.gz files that are dropped into it are
# read and put away into its folder "done".
[[source]]
# What desks call it; no two sources share a name. Required.
name = "inbox"
# What it is: "folder" or "feed". Required.
kind = "folder"
# The folder; the daemon makes it if it is not there. Required.
path = "inbox"
# Time between two looks, a duration. Default: "5s"
#every = "5s"
# Language of items that name none, a BCP 47 tag such as "en" or "de-AT". Default: none
#language = "en"

# A feed: RSS, Atom or JSON Feed.
#[[source]]
# What desks call it. Required.
#name = "wire"
# What it is. Required.
#kind = "feed"
# Its address, http or https. Required.
#url = "https://news.example/feed.xml"
# Time between two looks, a duration. Default: "5m"
#every = "5m"
# Language of items that name none, a BCP 47 tag. Default: none
#language = "en"
# User name where the feed asks for one. Default: none
#username = "watch"
# Its password: { env = "VARIABLE" } or { file = "PATH" }, never itself. Default: none
#password = { env = "VANNER_FEED_PASSWORD" }

# ---- Desks: who reads what, and how much they can take. One [[desk]] for each. ----

[[desk]]
# The desk's name in alerts, digests and commands. Required.
name = "watch"
# Names of the sources that it reads together. Required.
sources = ["inbox"]
# Alerts a day that the desk can take, above 0 to 1000. Default: 5
#alerts_per_day = 5
# Alerts a day that may come of chance alone. Default: a tenth of alerts_per_day
#false_alerts_per_day = 0.5
# When digests are due: cron texts of minute hour day month weekday. Default: []
#digests = ["0 7,15,23 * * *"]
# Mail addresses that get the digests and alerts; needs [mail] below. Default: []
#recipients = ["desk@newsroom.example"]
# Whether each alert is mailed at once: true or false. Default: true
#mail_alerts = true
# Folder into which digests are also written as files. Default: none
#digest_folder = "digests"
# The desk's own time zone. Default: the one of [service]
#timezone = "Europe/Vienna"
# No alert before it has read for so long, a duration ... Default: "3d"
#warm_up = "3d"
# ... and has read so many words ... Default: 20000
#warm_up_words = 20000
# ... but it waits no longer than this, a duration. Default: "14d"
#warm_up_at_most = "14d"
# Time in which the desk's lasting language fades to half, a duration. Default: "28d"
#standing_half_life = "28d"
# Time in which the desk's language of the day fades to half, a duration. Default: "1d"
#running_half_life = "1d"
# Share of an item's words that counts as ordinary, above 0 and below 1. Default: 0.9
#background_share = 0.9
# An alert with no new item for so long is cleared, a duration. Default: "2d"
#clear_after = "2d"

# ---- Outgoing mail: the server that takes it. Without it no mail is sent. ----

#[mail]
# Name or address of the server. Required.
#host = "mail.newsroom.example"
# Its port, 1 to 65535. Default: 587
#port = 587
# The address that mail comes from. Required.
#sender = "vanner@newsroom.example"
# How the way there is encrypted: "starttls", "tls" or "none". Default: "starttls"
#encryption = "starttls"
# User name where the server asks for one. Default: none
#username = "vanner"
# Its password: { env = "VARIABLE" } or { file = "PATH" }, never itself. Default: none
#password = { file = "mail-password.txt" }
# How long the server may take to answer, a duration. Default: "30s"
#timeout = "30s"
"""


def write_template(path: Path) -> None:
    """Write the commented settings file; a file that is there already stays as it is.

    Raises:
        SettingsError: There is one already, or the file cannot be written.
    """
    place = plain(str(path))
    try:
        with path.open("x", encoding="utf-8", newline="\n") as file:
            file.write(TEMPLATE)
    except FileExistsError:
        raise SettingsError(
            f"{place} is there already and stays as it is; name another file for the new one."
        ) from None
    except (OSError, ValueError) as error:
        reason = error.strerror if isinstance(error, OSError) else "no such name can be"
        raise SettingsError(
            f"{place} cannot be written ({reason}); name a file in a folder that you may write to."
        ) from error
