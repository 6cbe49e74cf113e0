"""What an operator can set: on the command line, else in the environment, else the value here.

Left out: what is fixed by the contract, and opening anything.
"""

import os
import re
from collections.abc import Mapping
from dataclasses import dataclass, fields
from typing import Any

LOG_LEVELS = ("critical", "error", "warning", "info", "debug")
ENVIRONMENT_PREFIX = "ARMSPAN_"
_YES = frozenset({"1", "true", "yes", "on"})
_NO = frozenset({"0", "false", "no", "off", ""})


class WrongSetting(ValueError):
    """A setting that cannot be used; the text names the setting, the value and what would do."""


@dataclass(frozen=True, slots=True)
class Settings:
    """All settings of one process.

    Attributes
    ----------
    host, port : where to listen; port 0 takes a free one.
    database : a database URL or the path of an SQLite file; empty: the user's data folder.
    demo : store the made-up arms of the demonstration at the start.
    body_limit : bytes a request's body may have.
    body_timeout_s : seconds a body may stall.
    connections : connections and requests served at once; more are answered 503.
    log_level : one of LOG_LEVELS.
    cluster : address of a scheduler that surveys are worked on by; empty: processes of our own.
    survey_workers : processes for surveys; 0: one for each processor. One of several rests while
        other questions come.
    surveys_days : days for which surveys that are over are kept; 0: until they are removed.
    events_kept : events of arms that are kept; the oldest that are over go first.
    events_days : days for which they are kept.
    frame_ancestors : origins whose pages may show ours in a frame, a panel's for example; blanks or
        commas between them, ``self`` is the service's own. Empty: nobody may.

    Examples
    --------
    >>> Settings.from_environment({"port": "0"}, environment={"ARMSPAN_HOST": "::1"}).host
    '::1'
    >>> Settings.from_environment({}, environment={"ARMSPAN_PORT": "http"})
    Traceback (most recent call last):
    service.settings.WrongSetting: ARMSPAN_PORT: "http" is no whole number from 0 to 65535
    """

    host: str = "127.0.0.1"
    port: int = 8017
    database: str = ""
    demo: bool = False
    body_limit: int = 64 * 2**20
    body_timeout_s: float = 20.0
    connections: int = 512
    log_level: str = "warning"
    cluster: str = ""
    survey_workers: int = 0
    surveys_days: int = 0
    events_kept: int = 100_000
    events_days: int = 365
    frame_ancestors: str = ""

    @classmethod
    def from_environment(
        cls,
        overrides: Mapping[str, object] | None = None,
        *,
        environment: Mapping[str, str] | None = None,
    ) -> "Settings":
        """Return the settings: ``overrides`` first, then ``ARMSPAN_<NAME>``, then the defaults.

        Raises
        ------
        WrongSetting : a value that cannot be read or is out of range, or an unknown override.
        """
        environment = os.environ if environment is None else environment
        given = {name: value for name, value in (overrides or {}).items() if value is not None}
        chosen: dict[str, Any] = {}
        for field in fields(cls):
            variable = ENVIRONMENT_PREFIX + field.name.upper()
            if field.name in given:
                option = "--" + field.name.replace("_", "-")
                chosen[field.name] = _read(field.name, given.pop(field.name), option)
            elif variable in environment:
                chosen[field.name] = _read(field.name, environment[variable], variable)
        if given:
            raise WrongSetting(f"unknown setting: {', '.join(sorted(given))}")
        return cls(**chosen)


def unknown_variables(environment: Mapping[str, str] | None = None) -> list[str]:
    """Return the ``ARMSPAN_`` variables that mean nothing here, most likely misspelt ones.

    Examples
    --------
    >>> unknown_variables({"ARMSPAN_PROT": "1", "ARMSPAN_PORT": "1", "HOME": "/"})
    ['ARMSPAN_PROT']
    """
    environment = os.environ if environment is None else environment
    known = {ENVIRONMENT_PREFIX + field.name.upper() for field in fields(Settings)}
    return sorted(
        name for name in environment if name.startswith(ENVIRONMENT_PREFIX) and name not in known
    )


def _read(name: str, value: object, source: str) -> object:
    text = str(value).strip()
    try:
        return _READERS[name](text)
    except ValueError as error:
        raise WrongSetting(f'{source}: "{text}" is {error}') from None


def _whole(least: int, most: int) -> Any:
    def read(text: str) -> int:
        if text.isascii() and text.isdigit() and len(text) < 19 and least <= int(text) <= most:
            return int(text)
        raise ValueError(f"no whole number from {least} to {most}")

    return read


def _seconds(text: str) -> float:
    try:
        value = float(text)
    except ValueError:
        value = -1.0
    if not 0.0 < value <= 3600.0:
        raise ValueError("no number of seconds above 0 and up to 3600")
    return value


def _switch(text: str) -> bool:
    if text.lower() in _YES | _NO:
        return text.lower() in _YES
    raise ValueError("neither yes nor no")


def _host(text: str) -> str:
    if not text or any(letter.isspace() or letter == "/" for letter in text):
        raise ValueError("no host name or address")
    return text


def _log_level(text: str) -> str:
    if text.lower() not in LOG_LEVELS:
        raise ValueError(f"none of {', '.join(LOG_LEVELS)}")
    return text.lower()


def _origins(text: str) -> str:
    """Return origins as Content-Security-Policy has them (CSP 3, 6.4.2)."""
    found = ["'self'" if one in ("self", "'self'") else one for one in re.split(r"[\s,]+", text)]
    for one in found:
        if one and one != "'self'" and not _ORIGIN.fullmatch(one):
            raise ValueError("no list of origins, such as http://panel-7:8080 https://hmi.plant")
    return " ".join(filter(None, found))


_ORIGIN = re.compile(
    r"https?://[A-Za-z0-9*.\-]+(?::(?:[0-9]{1,5}|\*))?|https?://\[[0-9a-fA-F:]+\](?::[0-9]{1,5})?"
)


_READERS: Mapping[str, Any] = {
    "host": _host,
    "port": _whole(0, 65535),
    "database": str,
    "demo": _switch,
    "body_limit": _whole(1, 2**40),
    "body_timeout_s": _seconds,
    "connections": _whole(1, 100_000),
    "log_level": _log_level,
    "cluster": str,
    "survey_workers": _whole(0, 1024),
    "surveys_days": _whole(0, 36_500),
    "events_kept": _whole(1, 10_000_000),
    "events_days": _whole(1, 36_500),
    "frame_ancestors": _origins,
}
