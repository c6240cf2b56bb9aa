"""The shape of `vanner.toml`: frozen models with their bounds and defaults.

Unknown keys are faults, so that a mistyped one is not silently ignored. Values that name
other parts of the file (a desk's sources) are checked where the whole file is seen.
"""

from __future__ import annotations

import os
from pathlib import Path
from typing import Annotated, Literal
from zoneinfo import ZoneInfo

from pydantic import BaseModel, ConfigDict, Field, model_validator

from vanner.errors import SettingsError
from vanner.settings.duration import DurationS, PulseS
from vanner.settings.values import (
    SQLITE,
    Address,
    Cron,
    DatabaseUrl,
    FolderPath,
    HostName,
    LanguageTag,
    Name,
    Number,
    UserName,
    VariableName,
    WebAddress,
    WholeNumber,
    YesNo,
    ZoneName,
)

ONE_PLACE = 'either { env = "NAME" } or { file = "PATH" }'


class _Model(BaseModel):
    model_config = ConfigDict(
        frozen=True, extra="forbid", str_strip_whitespace=True, hide_input_in_errors=True
    )


class Secret(_Model):
    """Where a secret is to be had: an environment variable or a file. Never the value itself."""

    env: VariableName | None = None
    file: FolderPath | None = None

    @model_validator(mode="after")
    def _one_place(self) -> Secret:
        if (self.env is None) == (self.file is None):
            raise ValueError(ONE_PLACE)
        return self

    def read(self) -> str:
        """The secret's value, without a trailing line end.

        Raises:
            SettingsError: The variable is not set or the file cannot be read.
        """
        if self.env is not None:
            value = os.environ.get(self.env)
            if value is None:
                raise SettingsError(
                    f"The environment variable {self.env} is not set; set it before starting."
                )
            return value
        assert self.file is not None  # noqa: S101 - holds by _one_place; tells the type checker
        try:
            return self.file.read_text(encoding="utf-8").rstrip("\r\n")
        except (OSError, UnicodeDecodeError) as error:
            raise SettingsError(
                f"The secret's file {self.file} cannot be read; make it readable to Vanner."
            ) from error


class ServiceSettings(_Model):
    """`[service]`: the database, the time zone, the pulse and the log."""

    database: Annotated[DatabaseUrl, Field(validate_default=True)] = "sqlite:///vanner.db"
    timezone: ZoneName = "UTC"
    pulse: PulseS = 60.0
    log: Literal["text", "json"] = "text"


class SourceBase(_Model):
    """What every kind of source has."""

    name: Name
    every: DurationS = 300.0
    language: LanguageTag | None = None


class FeedSettings(SourceBase):
    """A `[[source]]` of kind "feed": RSS, Atom or JSON Feed at an http or https address."""

    kind: Literal["feed"]
    url: WebAddress
    username: UserName | None = None
    password: Secret | None = None


class FolderSettings(SourceBase):
    """A `[[source]]` of kind "folder": files dropped into a directory."""

    kind: Literal["folder"]
    path: FolderPath
    every: DurationS = 5.0


SourceSettings = Annotated[FeedSettings | FolderSettings, Field(discriminator="kind")]


class DeskSettings(_Model):
    """A `[[desk]]`: which sources it reads, its budget, its digests and who gets them.

    `false_alerts_per_day` defaults to a tenth of `alerts_per_day`. A desk stays silent until
    its background holds `warm_up` and `warm_up_words`, at the latest after `warm_up_at_most`.
    """

    name: Name
    sources: Annotated[tuple[str, ...], Field(min_length=1)]
    alerts_per_day: Annotated[Number, Field(gt=0, le=1000)] = 5.0
    false_alerts_per_day: Annotated[Number, Field(gt=0, le=1000)] | None = None
    digests: tuple[Cron, ...] = ()
    recipients: tuple[Address, ...] = ()
    mail_alerts: YesNo = True
    digest_folder: FolderPath | None = None
    timezone: ZoneName | None = None
    warm_up: DurationS = 3 * 86400.0
    warm_up_words: Annotated[WholeNumber, Field(ge=0)] = 20_000
    warm_up_at_most: DurationS = 14 * 86400.0
    standing_half_life: DurationS = 28 * 86400.0
    running_half_life: DurationS = 86400.0
    background_share: Annotated[Number, Field(gt=0, lt=1)] = 0.9
    clear_after: DurationS = 2 * 86400.0

    @property
    def false_level_per_day(self) -> float:
        """The false alerts a day that chance may raise."""
        if self.false_alerts_per_day is not None:
            return self.false_alerts_per_day
        return self.alerts_per_day / 10


class MailSettings(_Model):
    """`[mail]`: the server that takes outgoing mail."""

    host: HostName
    port: Annotated[WholeNumber, Field(ge=1, le=65535)] = 587
    sender: Address
    encryption: Literal["starttls", "tls", "none"] = "starttls"
    username: UserName | None = None
    password: Secret | None = None
    timeout: DurationS = 30.0


class Settings(_Model):
    """The whole file. Read by `load_settings`, its paths start at the file's own folder."""

    service: ServiceSettings = ServiceSettings()
    source: tuple[SourceSettings, ...] = ()
    desk: tuple[DeskSettings, ...] = ()
    mail: MailSettings | None = None

    @property
    def database_path(self) -> Path:
        """The database's file, absolute."""
        return Path(self.service.database.removeprefix(SQLITE)).absolute()

    def source_named(self, name: str) -> SourceSettings:
        """The source of that name.

        Raises:
            KeyError: There is none.
        """
        for source in self.source:
            if source.name == name:
                return source
        raise KeyError(name)

    def zone_of(self, desk: DeskSettings) -> ZoneInfo:
        """The time zone in which a desk's schedules and hour bands are meant."""
        return ZoneInfo(desk.timezone or self.service.timezone)
