"""Settings, read once at start from the environment. A wrong or unknown one stops the start with a hint."""

from __future__ import annotations

import difflib
import os
from collections.abc import Mapping
from dataclasses import dataclass, field, fields
from typing import Any

PREFIX = "BALANCE_"


class WrongSetting(Exception):
    """A setting that cannot be used; the text says what to change."""


def _setting(default: Any, help_text: str, least: float | None = None) -> Any:
    return field(default=default, metadata={"help": help_text, "least": least})


@dataclass(frozen=True, slots=True)
class Settings:
    """Every setting with its default; the variable is BALANCE_ and the name in capitals."""

    host: str = _setting("127.0.0.1", "address to listen on")
    port: int = _setting(8080, "port to listen on", 0)
    workers: int = _setting(0, "worker processes; 0: one a core", 0)
    max_body_bytes: int = _setting(32_000_000, "largest request body, in bytes", 1_000)
    time_budget: float = _setting(20.0, "longest time for one solution, in seconds", 0.001)
    log_level: str = _setting("info", "debug, info, warning or error")

    @classmethod
    def read(cls, environment: Mapping[str, str] | None = None) -> Settings:
        """The settings of an environment (the process's own by default). Raises WrongSetting."""
        environment = os.environ if environment is None else environment
        known = {PREFIX + f.name.upper(): f for f in fields(cls)}
        values: dict[str, Any] = {}
        for variable, text in environment.items():
            if not variable.startswith(PREFIX):
                continue
            if variable not in known:
                near = difflib.get_close_matches(variable, known, 1)
                hint = f" Did you mean {near[0]}?" if near else f" Known are {', '.join(known)}."
                raise WrongSetting(f"{variable} is not a setting.{hint}")
            values[known[variable].name] = _value(variable, text, known[variable])
        return cls(**values)


def _value(variable: str, text: str, setting: Any) -> Any:
    kind = type(setting.default)
    try:
        value = kind(text)
    except ValueError:
        raise WrongSetting(f"{variable} must be {_wanted(kind)}, not {text!r}.") from None
    least = setting.metadata["least"]
    if least is not None and not value >= least:
        raise WrongSetting(f"{variable} must be at least {least:g}, not {text!r}.")
    if setting.name == "log_level" and value not in ("debug", "info", "warning", "error"):
        raise WrongSetting(f"{variable} must be debug, info, warning or error, not {text!r}.")
    return value


def _wanted(kind: type) -> str:
    return {int: "a whole number", float: "a number", str: "a text"}[kind]


def listing() -> str:
    """Every setting with its default and its meaning, one a line."""
    return "\n".join(f"{PREFIX}{f.name.upper()}={f.default}  {f.metadata['help']}" for f in fields(Settings))
