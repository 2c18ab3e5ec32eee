"""The command line: the same answers and the same problem documents without a server."""

from __future__ import annotations

import io
import json
import os
import subprocess
import sys
from pathlib import Path
from typing import Any

import pytest
from flask.testing import FlaskClient

from service.__main__ import main
from service.settings import listing
from tests.contract.promises import let_down
from tests.contract.running import ROOT, environment

READINGS = "time,inlet.p [barg],inlet.T [degC]\n08:00,40,400\n09:00,38.5,395\n10:00,9,400\n11:00,,400\n"


@pytest.fixture(autouse=True)
def _own_environment(monkeypatch: pytest.MonkeyPatch) -> None:
    for name in [name for name in os.environ if name.startswith("BALANCE_")]:
        monkeypatch.delenv(name)


def written(path: Path, document: Any) -> str:
    path.write_text(document if isinstance(document, str) else json.dumps(document), encoding="utf-8")
    return str(path)


def test_a_solved_case_is_the_answer_of_the_service_to_the_byte(
    tmp_path: Path, client: FlaskClient, capfdbinary: pytest.CaptureFixture[bytes]
) -> None:
    assert main(["solve", written(tmp_path / "case.json", let_down())]) == 0
    out, err = capfdbinary.readouterr()
    assert out == client.post("/v1/balances", json=let_down()).data + b"\n"
    assert err == b""


def test_a_check_is_the_answer_of_the_service_to_the_byte(
    tmp_path: Path, client: FlaskClient, capfdbinary: pytest.CaptureFixture[bytes]
) -> None:
    assert main(["check", written(tmp_path / "case.json", let_down())]) == 0
    assert capfdbinary.readouterr().out == client.post("/v1/balances/check", json=let_down()).data + b"\n"


@pytest.mark.parametrize("command", ["solve", "check"])
def test_a_refused_case_leaves_its_problem_document_on_standard_error(
    command: str, tmp_path: Path, client: FlaskClient, capfdbinary: pytest.CaptureFixture[bytes]
) -> None:
    case = let_down()
    del case["streams"][1]["state"]["p"]
    assert main([command, written(tmp_path / "case.json", case)]) == 1
    out, err = capfdbinary.readouterr()
    path = {"solve": "/v1/balances", "check": "/v1/balances/check"}[command]
    assert out == b""
    assert err == client.post(path, json=case).data + b"\n"


def test_a_case_can_come_from_standard_input(
    monkeypatch: pytest.MonkeyPatch, capfdbinary: pytest.CaptureFixture[bytes]
) -> None:
    monkeypatch.setattr(sys, "stdin", io.TextIOWrapper(io.BytesIO(json.dumps(let_down()).encode())))
    assert main(["solve", "-"]) == 0
    assert json.loads(capfdbinary.readouterr().out)["status"] == "solved"


@pytest.mark.parametrize("text", ['{"a": 1, "a": 2}', "not json", ""])
def test_a_file_that_is_not_strict_json_is_refused(
    text: str, tmp_path: Path, capfdbinary: pytest.CaptureFixture[bytes]
) -> None:
    assert main(["solve", written(tmp_path / "case.json", text)]) == 1
    assert json.loads(capfdbinary.readouterr().err)["type"] == "/problems/malformed-json"


def test_a_file_that_is_not_there_is_told_by_its_name(capfdbinary: pytest.CaptureFixture[bytes]) -> None:
    assert main(["solve", "nowhere.json"]) == 2
    assert b"nowhere.json" in capfdbinary.readouterr().err


def test_a_readable_answer_shows_every_part_with_units(
    tmp_path: Path, capfdbinary: pytest.CaptureFixture[bytes]
) -> None:
    assert main(["solve", written(tmp_path / "case.json", let_down()), "--readable"]) == 0
    text = capfdbinary.readouterr().out.decode()
    for part in ("Answers", "Streams", "Ledger", "Steps", "Checks", "Assumptions", "Cautions"):
        assert f"\n{part}" in text
    assert text.startswith("Let-down station [solved]\n")
    assert "outlet.T  374.39 degC" in text  # 3212.70 - 15 kW / 3.3333 kg/s = 3208.20 kJ/kg at 11.01325 bar
    assert "does not replace local codes" in text


def test_a_series_of_readings_is_solved_row_by_row(tmp_path: Path, capfdbinary: pytest.CaptureFixture[bytes]) -> None:
    case, readings = written(tmp_path / "case.json", let_down()), written(tmp_path / "readings.csv", READINGS)
    out = tmp_path / "out.csv"
    assert main(["series", case, readings, "-o", str(out)]) == 0
    rows = out.read_text(encoding="utf-8").splitlines()
    assert rows[0] == "time,outlet.T [degC],status"
    assert len(rows) == 5
    assert rows[1].split(",")[2] == "solved"
    assert float(rows[1].split(",")[1]) == pytest.approx(374.39, abs=0.01)  # as the single case
    assert capfdbinary.readouterr().err.startswith(b"4 rows: ")


def test_a_series_with_a_header_that_means_nothing_is_refused(
    tmp_path: Path, capfdbinary: pytest.CaptureFixture[bytes]
) -> None:
    case = written(tmp_path / "case.json", let_down())
    readings = written(tmp_path / "readings.csv", "inlet.p [furlong]\n40\n")
    assert main(["series", case, readings, "-o", str(tmp_path / "out.csv")]) == 1
    assert json.loads(capfdbinary.readouterr().err)["type"].startswith("/problems/unit-")
    assert not (tmp_path / "out.csv").exists()


def test_the_settings_are_listed(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["settings"]) == 0
    assert capsys.readouterr().out == listing() + "\n"


def test_a_command_that_does_not_exist_is_a_call_without_sense(capsys: pytest.CaptureFixture[str]) -> None:
    with pytest.raises(SystemExit) as caught:
        main(["sovle"])
    assert caught.value.code == 2
    assert "solve" in capsys.readouterr().err


def test_the_program_runs_as_a_module_and_says_with_its_status_how_it_went() -> None:
    run = [sys.executable, "-m", "service", "solve", "-"]
    for body, status in ((json.dumps(let_down()), 0), ("{}", 1)):
        done = subprocess.run(run, input=body, cwd=ROOT, env=environment(), capture_output=True, text=True, timeout=60)
        assert done.returncode == status
        assert json.loads(done.stdout if status == 0 else done.stderr.splitlines()[0])
