"""Settings, read once at start from the environment. A wrong or unknown one stops the start with a hint."""

from __future__ import annotations

import difflib
import math
from collections.abc import Mapping
from dataclasses import Field, dataclass, field, fields
from typing import Any

PREFIX = "BALANCE_"


class WrongSetting(Exception):
    """A setting that cannot be used; the text says what to change."""


def _setting(
    default: Any, help_text: str, *, least: float = -math.inf, most: float = math.inf, one_of: str = ""
) -> Any:
    return field(default=default, metadata={"help": help_text, "least": least, "most": most, "one_of": one_of.split()})


@dataclass(frozen=True, slots=True)
class Settings:
    """Every setting with its default; its variable is BALANCE_ and the name in capitals. Raises WrongSetting."""

    host: str = _setting("127.0.0.1", "address to listen on")
    port: int = _setting(8080, "port to listen on", least=1, most=65_535)
    workers: int = _setting(0, "worker processes; 0 for one a core", least=0, most=256)
    max_body_bytes: int = _setting(32_000_000, "largest request body [bytes]", least=1_000, most=2_000_000_000)
    time_budget: float = _setting(20.0, "longest time for one solution [s]", least=0.001, most=3_600)
    log_level: str = _setting("info", "what is logged; requests are at info", one_of="debug info warning error")

    def __post_init__(self) -> None:
        for one in fields(self):
            _check(one, getattr(self, one.name))

    @classmethod
    def read(cls, environment: Mapping[str, str]) -> Settings:
        """The settings of an environment. Raises WrongSetting for a value that does not fit and for an unknown name."""
        known = {variable(f): f for f in fields(cls)}
        values: dict[str, Any] = {}
        for name, text in environment.items():
            if not name.startswith(PREFIX):
                continue
            if name not in known:
                near = difflib.get_close_matches(name.removeprefix(PREFIX), [f.name.upper() for f in fields(cls)], 1)
                hint = f"Did you mean {PREFIX}{near[0]}?" if near else f"Known are {', '.join(known)}."
                raise WrongSetting(f"{name} is not a setting. {hint}")
            values[known[name].name] = _parsed(known[name], text)
        return cls(**values)


def variable(setting: Field[Any]) -> str:
    """The name of a setting's environment variable."""
    return PREFIX + setting.name.upper()


def listing() -> str:
    """Every setting with its default and its meaning, one a line."""
    names = [f"{variable(f)}={f.default}" for f in fields(Settings)]
    widest = max(map(len, names))
    return "\n".join(f"{n:{widest}}  {f.metadata['help']}" for n, f in zip(names, fields(Settings), strict=True))


def _parsed(setting: Field[Any], text: str) -> Any:
    kind: Any = type(setting.default)
    try:
        return kind(text)
    except ValueError:
        wanted = "a whole number" if kind is int else "a number"
        raise WrongSetting(f"{variable(setting)} must be {wanted}, not {text!r}.") from None


def _check(setting: Field[Any], value: Any) -> None:
    about = setting.metadata
    if about["one_of"] and value not in about["one_of"]:
        raise WrongSetting(f"{variable(setting)} must be one of {', '.join(about['one_of'])}, not {value!r}.")
    if isinstance(value, str):
        if not value.strip():
            raise WrongSetting(f"{variable(setting)} must not be empty.")
    elif not about["least"] <= value <= about["most"]:
        ends = f"between {about['least']:,g} and {about['most']:,.0f}"
        raise WrongSetting(f"{variable(setting)} ({about['help']}) must be {ends}, not {value}.")
