"""The rules of the house: who may import whom, how large a piece may be, what an import may do, what the docs name."""

from __future__ import annotations

import ast
import re
import subprocess
import sys
from collections.abc import Iterator
from functools import cache
from pathlib import Path

import pytest

from service.__main__ import _parser
from service.settings import listing

ROOT = Path(__file__).resolve().parents[2]
PACKAGE = ROOT / "service"
MODULES = sorted(PACKAGE.rglob("*.py"))

LONGEST_MODULE = 400
LONGEST_FUNCTION = 80

FLOORS = {
    "errors": 0,
    "fluids": 1, "units": 1,
    "balance": 2, "engine": 2,
    "wire": 3, "solvers": 3, "trust": 3, "advisories": 3,
    "web": 4,
    "app": 5, "settings": 5, "logs": 5, "server": 5, "__main__": 5,
}  # fmt: skip
DOMAIN = {"balance", "engine", "fluids", "solvers", "trust", "advisories"}
FRAMEWORKS = {"flask", "werkzeug", "jinja2", "marshmallow", "jsonschema", "jsonschema_rs", "pint", "gunicorn", "yaml"}


@cache
def tree(path: Path) -> ast.Module:
    return ast.parse(path.read_text(encoding="utf-8"))


def imported(path: Path) -> Iterator[str]:
    """Dotted names of all that a module imports, anywhere in it; relative ones written in full."""
    for node in ast.walk(tree(path)):
        if isinstance(node, ast.Import):
            yield from (alias.name for alias in node.names)
        elif isinstance(node, ast.ImportFrom):
            above = path.relative_to(ROOT).parts[: -node.level] if node.level else ()
            module = ".".join([*above, *([node.module] if node.module else [])])
            yield module
            yield from (f"{module}.{alias.name}" for alias in node.names)


def roots(path: Path) -> set[str]:
    return {name.split(".")[0] for name in imported(path)}


def part(path: Path) -> str:
    """The part of the house that a module belongs to: `fluids` for service/fluids/pairs.py."""
    return path.relative_to(PACKAGE).parts[0].removesuffix(".py")


def parts_used(path: Path) -> set[str]:
    used = {name.split(".")[1] for name in imported(path) if name.startswith("service.")}
    return used & set(FLOORS)


def ids(path: Path) -> str:
    return str(path.relative_to(ROOT))


def of(*parts: str) -> list[Path]:
    return [path for path in MODULES if part(path) in parts]


def test_every_part_of_the_house_has_its_floor() -> None:
    assert {part(path) for path in MODULES} - {"__init__"} == set(FLOORS)


@pytest.mark.parametrize("path", [p for p in MODULES if part(p) in FLOORS], ids=ids)
def test_imports_only_go_down(path: Path) -> None:
    above = {used for used in parts_used(path) if FLOORS[used] > FLOORS[part(path)]}
    assert not above


@pytest.mark.parametrize("path", of(*DOMAIN), ids=ids)
def test_the_domain_imports_no_framework_and_no_unit_library(path: Path) -> None:
    assert not roots(path) & FRAMEWORKS


@pytest.mark.parametrize("path", MODULES, ids=ids)
def test_only_fluids_imports_the_property_library(path: Path) -> None:
    assert "CoolProp" not in roots(path) or part(path) == "fluids"


@pytest.mark.parametrize("path", MODULES, ids=ids)
def test_only_the_wire_uses_units(path: Path) -> None:
    assert "units" not in parts_used(path) or part(path) in ("wire", "units")


@pytest.mark.parametrize("path", MODULES, ids=ids)
def test_each_framework_is_used_in_its_own_place(path: Path) -> None:
    allowed = {
        "web": {"flask", "werkzeug", "markupsafe", "jinja2", "yaml"},
        "app": {"flask"},
        "logs": {"flask", "gunicorn"},
        "server": {"flask", "gunicorn"},
        "wire": {"jsonschema", "jsonschema_rs", "marshmallow", "referencing"},
        "units": {"pint"},
    }
    assert not roots(path) & FRAMEWORKS - allowed.get(part(path), set())


@pytest.mark.parametrize("path", of("engine"), ids=ids)
def test_the_engine_knows_nothing_of_the_house_but_its_errors(path: Path) -> None:
    assert parts_used(path) <= {"engine", "errors"}


@pytest.mark.parametrize("path", MODULES, ids=ids)
def test_a_module_can_be_read_in_one_go(path: Path) -> None:
    assert len(path.read_text(encoding="utf-8").splitlines()) <= LONGEST_MODULE


@pytest.mark.parametrize("path", MODULES, ids=ids)
def test_a_function_fits_a_screen(path: Path) -> None:
    functions = [n for n in ast.walk(tree(path)) if isinstance(n, ast.FunctionDef)]
    lengths = {f.name: (f.end_lineno or 0) - f.lineno + 1 for f in functions}
    assert not {name: length for name, length in lengths.items() if length > LONGEST_FUNCTION}


@pytest.mark.parametrize("path", MODULES, ids=ids)
def test_a_module_says_what_it_is_for(path: Path) -> None:
    assert ast.get_docstring(tree(path)) or not tree(path).body


WATCH = """
import builtins, importlib, os, pathlib, pkgutil, sys, traceback
import CoolProp, flask, gunicorn.app.base, gunicorn.glogging, jsonschema, jsonschema_rs, marshmallow, numpy, pint, scipy
import scipy.optimize, scipy.sparse.csgraph, yaml

package = pathlib.Path(sys.argv[1])
found = []


def ours():
    frames = traceback.extract_stack()[:-2]
    return [f for f in frames if f.filename.startswith(str(package))]


def watched(owner, name):
    true = getattr(owner, name)

    def spy(*args, **kwargs):
        # reading the source of a module is the import itself; anything that a frame of ours asks for is not
        if (frames := ours()) and not any("importlib" in f.filename for f in traceback.extract_stack()[-4:-1]):
            found.append(f"{name} from {frames[-1].filename}:{frames[-1].lineno}")
        return true(*args, **kwargs)

    setattr(owner, name, spy)


watched(builtins, "open")
watched(os, "getenv")
watched(type(os.environ), "__getitem__")
watched(type(os.environ), "get")
watched(pathlib.Path, "open")
watched(pint.UnitRegistry, "__init__")
watched(flask.Flask, "__init__")
watched(jsonschema_rs, "Draft202012Validator")
watched(jsonschema, "Draft202012Validator")
for name in ("AbstractState", "PropsSI"):
    watched(CoolProp.CoolProp, name)
for module in pkgutil.walk_packages([str(package)], "service."):
    if module.name != "service.__main__":
        importlib.import_module(module.name)
import service.__main__
print("\\n".join(found))
"""


def test_nothing_happens_at_import() -> None:
    done = subprocess.run(
        [sys.executable, "-c", WATCH, str(PACKAGE)], capture_output=True, text=True, cwd=ROOT, check=True
    )
    assert done.stdout.strip() == ""


@pytest.mark.parametrize("path", MODULES, ids=ids)
def test_no_module_makes_a_property_state_or_a_registry_of_its_own(path: Path) -> None:
    made = {
        getattr(node.value.func, "attr", getattr(node.value.func, "id", ""))
        for node in tree(path).body
        if isinstance(node, ast.Assign | ast.AnnAssign) and isinstance(node.value, ast.Call)
    }
    assert not made & {"AbstractState", "UnitRegistry", "Flask", "FluidCatalogue", "build", "create_app", "read"}


# -- documentation -------------------------------------------------------------------------------------------------


def documentation() -> str:
    return "".join((ROOT / name).read_text(encoding="utf-8") for name in ("README.md", "DEVELOPERS.md"))


def commands_of_the_readme() -> list[list[str]]:
    text = (ROOT / "README.md").read_text(encoding="utf-8")
    return [found.split("#")[0].split() for found in re.findall(r"python -m service ([^\n`]+)", text)]


@pytest.mark.parametrize("command", commands_of_the_readme(), ids=" ".join)
def test_a_command_of_the_readme_is_one_that_the_program_takes(command: list[str]) -> None:
    assert _parser().parse_args(command)


def test_every_command_of_the_program_stands_in_the_readme() -> None:
    (choices,) = (a.choices for a in _parser()._actions if a.dest == "==SUPPRESS==" or a.choices)
    assert set(choices or ()) <= {command[0] for command in commands_of_the_readme()}


def test_every_setting_stands_in_the_documentation_with_its_default() -> None:
    text = documentation()
    for line in listing().splitlines():
        name, _, default = line.split()[0].partition("=")
        assert re.search(rf"`{name}`[^\n]*`{re.escape(default)}`", text), f"{name} with its default {default}"


def test_every_folder_of_the_house_stands_in_the_developers_guide() -> None:
    text = (ROOT / "DEVELOPERS.md").read_text(encoding="utf-8")
    for name in FLOORS:
        shown = f"{name}/" if (PACKAGE / name).is_dir() else f"{name}.py"
        assert shown in text, shown


def test_the_scripts_of_the_readme_exist() -> None:
    scripts = set(re.findall(r"sh ((?:deploy|tests)/\w+\.sh)", documentation()))
    assert {"deploy/try.sh", "tests/run.sh"} <= scripts
    assert all((ROOT / script).is_file() for script in scripts)


def test_the_continuous_integration_runs_the_readmes_test_command_and_nothing_else() -> None:
    lines = [line.strip() for line in (ROOT / ".ci" / "run").read_text(encoding="utf-8").splitlines()]
    commands = [line for line in lines if line and not line.startswith(("#", "set ", "cd "))]
    assert commands == ["sh tests/run.sh"]
