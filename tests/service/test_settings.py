"""Settings: options before variables before defaults, and a clear word about a wrong one."""

from dataclasses import fields

import pytest

from service.__main__ import main
from service.settings import Settings, WrongSetting, unknown_variables

SAMPLES = {
    "host": ("::1", "::1"),
    "port": ("80", 80),
    "database": ("arms.db", "arms.db"),
    "demo": ("yes", True),
    "body_limit": ("1000", 1000),
    "body_timeout_s": ("0.5", 0.5),
    "connections": ("7", 7),
    "log_level": ("DEBUG", "debug"),
    "cluster": ("tcp://10.0.0.7:8786", "tcp://10.0.0.7:8786"),
    "survey_workers": ("3", 3),
    "surveys_days": ("90", 90),
    "events_kept": ("5000", 5000),
    "events_days": ("30", 30),
    "frame_ancestors": ("self, https://hmi.plant:8443", "'self' https://hmi.plant:8443"),
}


def test_defaults_are_the_documented_ones() -> None:
    settings = Settings.from_environment(environment={})
    assert (settings.host, settings.port) == ("127.0.0.1", 8017)
    assert settings.body_limit == 64 * 1024 * 1024
    assert settings == Settings()


@pytest.mark.parametrize("name", sorted(SAMPLES))
def test_every_setting_is_a_variable(name: str) -> None:
    text, value = SAMPLES[name]
    settings = Settings.from_environment(environment={f"ARMSPAN_{name.upper()}": text})
    assert getattr(settings, name) == value
    assert settings != Settings()


def test_the_samples_are_all_settings() -> None:
    assert sorted(SAMPLES) == sorted(field.name for field in fields(Settings))


def test_an_option_wins_over_a_variable() -> None:
    environment = {"ARMSPAN_PORT": "1", "ARMSPAN_HOST": "::1"}
    settings = Settings.from_environment({"port": 2, "host": None}, environment=environment)
    assert (settings.port, settings.host) == (2, "::1")


@pytest.mark.parametrize(
    ("name", "text"),
    [
        ("port", "http"),
        ("port", "65536"),
        ("port", "-1"),
        ("port", "٣"),
        ("port", "tcp://10.0.0.1:8017"),
        ("host", ""),
        ("host", "http://here"),
        ("frame_ancestors", "panel-7"),
        ("frame_ancestors", "*"),
        ("frame_ancestors", "http://panel-7; script-src *"),
        ("frame_ancestors", "http://panel-7/page"),
        ("demo", "maybe"),
        ("body_limit", "0"),
        ("body_timeout_s", "nan"),
        ("body_timeout_s", "soon"),
        ("connections", "0"),
        ("log_level", "loud"),
    ],
)
def test_a_wrong_variable_is_named(name: str, text: str) -> None:
    variable = f"ARMSPAN_{name.upper()}"
    with pytest.raises(WrongSetting, match=variable):
        Settings.from_environment(environment={variable: text})


def test_an_unknown_override_is_refused() -> None:
    with pytest.raises(WrongSetting, match="prot"):
        Settings.from_environment({"prot": 1}, environment={})


def test_misspelt_variables_are_found() -> None:
    assert unknown_variables({"ARMSPAN_PROT": "1", "PORT": "2"}) == ["ARMSPAN_PROT"]


def test_a_wrong_option_ends_with_two(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["serve", "--port", "http"]) == 2
    told = capsys.readouterr().err
    assert told == 'armspan: --port: "http" is no whole number from 0 to 65535\n'
