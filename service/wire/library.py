"""The files beside the program that it serves: JSON Schemas and ready cases."""

from __future__ import annotations

import json
from collections.abc import Mapping
from pathlib import Path

SUFFIX = ".schema.json"


def schema_directory() -> Path:
    """The `schemas` directory: beside the package, or inside of it where an installation put it there."""
    package = Path(__file__).resolve().parent.parent
    for candidate in (package.parent / "schemas", package / "schemas"):
        if candidate.is_dir():
            return candidate
    raise FileNotFoundError("The directory `schemas` is neither beside the package `service` nor inside of it.")


def read_schemas(directory: Path) -> Mapping[str, dict[str, object]]:
    """Every JSON Schema by its name: `case` for case.schema.json."""
    return {
        path.name.removesuffix(SUFFIX): json.loads(path.read_text(encoding="utf-8"))
        for path in sorted(directory.glob(f"*{SUFFIX}"))
    }


def read_examples(directory: Path) -> Mapping[str, dict[str, object]]:
    """Every ready case by its name, the file's name without its ending."""
    return {
        path.stem: json.loads(path.read_text(encoding="utf-8"))
        for path in sorted((directory / "examples").glob("*.json"))
    }
