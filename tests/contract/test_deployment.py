"""What is deployed: scripts that parse, a lock that covers the dependencies, manifests that agree with the service."""

from __future__ import annotations

import re
import subprocess
import tomllib
from typing import Any

import pytest
import yaml

from service.server import GRACE, options
from service.settings import Settings
from tests.contract.promises import contract
from tests.contract.running import ROOT

DEPLOY = ROOT / "deploy"
SCRIPTS = [DEPLOY / "try.sh", DEPLOY / "venv.sh", ROOT / "tests" / "run.sh", ROOT / ".ci" / "run"]
NAME = re.compile(r"[a-z0-9-]+")


def locked() -> dict[str, str]:
    lines = (DEPLOY / "requirements.lock").read_text(encoding="utf-8").splitlines()
    return dict(line.split("==") for line in lines if not line.startswith("#"))


def manifest() -> dict[str, Any]:
    documents = list(yaml.safe_load_all((DEPLOY / "kubernetes.yaml").read_text(encoding="utf-8")))
    pod: dict[str, Any] = documents[0]["spec"]["template"]["spec"]
    return pod


@pytest.mark.parametrize("path", SCRIPTS, ids=lambda path: path.name)
def test_a_script_parses(path: Any) -> None:
    shell = "bash" if "bash" in path.read_text(encoding="utf-8").splitlines()[0] else "sh"
    subprocess.run([shell, "-n", str(path)], check=True)


def test_the_starting_script_explains_itself_when_called_wrongly() -> None:
    done = subprocess.run(["sh", str(DEPLOY / "try.sh"), "--onec"], capture_output=True, text=True, cwd="/")
    assert done.returncode == 2
    assert "usage: sh deploy/try.sh [--once]" in done.stderr


def test_the_lock_fixes_every_dependency_of_the_project() -> None:
    project = tomllib.loads((ROOT / "pyproject.toml").read_text(encoding="utf-8"))["project"]
    needed = {match[0] for text in project["dependencies"] if (match := NAME.match(text))}
    assert needed <= set(locked())


def test_the_lock_names_packages_and_versions_and_nothing_else() -> None:
    for name, version in locked().items():
        assert NAME.fullmatch(name), name
        assert re.fullmatch(r"[0-9]+(\.[0-9]+)*(\.post[0-9]+)?", version), version


def test_the_container_has_every_file_that_the_service_reads_and_no_root() -> None:
    text = (DEPLOY / "Containerfile").read_text(encoding="utf-8")
    for needed in ("service", "schemas", "openapi.yaml", "deploy/requirements.lock"):
        assert re.search(rf"^COPY {needed} ", text, re.MULTILINE), needed
        assert f"!{needed}\n" in (ROOT / ".dockerignore").read_text(encoding="utf-8")
    assert re.search(r"^USER 65534:65534$", text, re.MULTILINE)


def test_the_probes_of_the_manifest_are_paths_of_the_contract() -> None:
    (container,) = manifest()["containers"]
    for probe in ("startupProbe", "readinessProbe", "livenessProbe"):
        assert container[probe]["httpGet"]["path"] in contract()["paths"]


def test_a_pod_and_a_unit_may_end_after_the_longest_request() -> None:
    longest = options(Settings())["graceful_timeout"]
    assert longest == Settings().time_budget + GRACE
    pod = manifest()
    pause = int(pod["containers"][0]["lifecycle"]["preStop"]["exec"]["command"][1])
    assert pod["terminationGracePeriodSeconds"] > pause + longest
    unit = (DEPLOY / "balance.service").read_text(encoding="utf-8")
    (stop,) = re.findall(r"^TimeoutStopSec=(\d+)$", unit, re.MULTILINE)
    assert int(stop) > longest


def test_settings_named_in_deployments_are_settings() -> None:
    for path in DEPLOY.iterdir():
        if path.is_file():
            for name, value in re.findall(r"(BALANCE_[A-Z_]+)(?:, value: \"|=)(\w[\w.]*)", path.read_text("utf-8")):
                Settings.read({name: value})  # raises for one that is none
