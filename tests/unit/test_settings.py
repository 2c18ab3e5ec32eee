"""Settings: read once, checked, and told where they do not fit."""

from __future__ import annotations

import dataclasses

import pytest

from service.settings import Settings, WrongSetting, listing, variable


def test_an_empty_environment_gives_the_defaults() -> None:
    assert Settings.read({}) == Settings()


def test_a_variable_replaces_its_default_and_others_are_left_alone() -> None:
    settings = Settings.read({"BALANCE_PORT": "9000", "BALANCE_TIME_BUDGET": "2.5", "PATH": "/bin", "BALANCED": "x"})
    assert settings == Settings(port=9000, time_budget=2.5)


@pytest.mark.parametrize(
    ("name", "text", "told"),
    [
        ("BALANCE_PORT", "eighty", "BALANCE_PORT must be a whole number, not 'eighty'."),
        ("BALANCE_PORT", "70000", "between 1 and 65,535"),
        ("BALANCE_PORT", "0", "between 1 and 65,535"),
        ("BALANCE_WORKERS", "2.5", "a whole number"),
        ("BALANCE_WORKERS", "-1", "between 0 and 256"),
        ("BALANCE_TIME_BUDGET", "soon", "a number"),
        ("BALANCE_TIME_BUDGET", "nan", "between 0.001 and 3,600"),
        ("BALANCE_TIME_BUDGET", "inf", "between 0.001 and 3,600"),
        ("BALANCE_LOG_LEVEL", "loud", "one of debug, info, warning, error"),
        ("BALANCE_HOST", " ", "must not be empty"),
        ("BALANCE_PROT", "80", "Did you mean BALANCE_PORT?"),
        ("BALANCE_XYZ", "1", "Known are BALANCE_HOST, "),
    ],
)
def test_a_wrong_setting_stops_the_start_and_says_what_to_change(name: str, text: str, told: str) -> None:
    with pytest.raises(WrongSetting) as caught:
        Settings.read({name: text})
    assert name in str(caught.value)
    assert told in str(caught.value)


def test_a_value_from_elsewhere_is_checked_like_one_of_the_environment() -> None:
    with pytest.raises(WrongSetting, match="BALANCE_PORT"):
        dataclasses.replace(Settings(), port=99_999)


def test_settings_cannot_be_changed_after_the_start() -> None:
    with pytest.raises(dataclasses.FrozenInstanceError):
        Settings().port = 1  # type: ignore[misc]


def test_the_listing_names_every_setting_with_its_default_and_its_meaning() -> None:
    lines = listing().splitlines()
    for line, setting in zip(lines, dataclasses.fields(Settings), strict=True):
        assert line.startswith(f"{variable(setting)}={setting.default} ")
        assert line.endswith(setting.metadata["help"])
        assert len(setting.metadata["help"]) > 10
