"""The command line: serve, solve, check, series, settings."""

from __future__ import annotations

import argparse
import dataclasses
import os
import sys
from collections.abc import Callable, Sequence
from pathlib import Path
from typing import Any

from service.errors import CaseError
from service.settings import Settings, WrongSetting, listing
from service.wire.json_text import dumps, loads
from service.wire.operations import Operations
from service.wire.problems import problem


def main(arguments: Sequence[str] | None = None) -> int:
    """Run one command. Returns the exit status: 0; 1 for a case without an answer; 2 for a call without sense."""
    options = _parser().parse_args(arguments)
    try:
        settings = Settings.read(os.environ)
        command: Callable[[argparse.Namespace, Settings], int] = options.command
        return command(options, settings)
    except CaseError as error:
        sys.stderr.buffer.write(dumps(problem(error)) + b"\n")
        return 1
    except WrongSetting as error:
        print(error, file=sys.stderr)
    except BrokenPipeError:  # whoever read our output has stopped; nothing more can be said
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
    except OSError as error:
        print(f"{error.filename or 'file'}: {error.strerror or error}", file=sys.stderr)
    return 2


def _parser() -> argparse.ArgumentParser:
    parser = argparse.ArgumentParser(
        prog="python -m service", description="Mass and energy balances of plant equipment."
    )
    commands = parser.add_subparsers(required=True, metavar="COMMAND")
    serve = commands.add_parser("serve", help="serve over HTTP until stopped")
    serve.add_argument("--host", help="address to listen on")
    serve.add_argument("--port", type=int, help="port to listen on")
    serve.add_argument("--workers", type=int, help="worker processes (default: one a core)")
    serve.set_defaults(command=_serve)
    for name, text in (("solve", "solve one case"), ("check", "count equations and unknowns, without solving")):
        one = commands.add_parser(name, help=text)
        one.add_argument("case", help="file with the case as JSON; - for standard input")
        one.set_defaults(command=_solve if name == "solve" else _check)
        if name == "solve":
            one.add_argument("--readable", action="store_true", help="print the answer for people, not for programs")
    series = commands.add_parser("series", help="solve one case for every row of a CSV file")
    series.add_argument("case", help="file with the case as JSON")
    series.add_argument("readings", help="CSV file with headers such as: inlet.p [barg]")
    series.add_argument("-o", "--output", required=True, help="CSV file to write")
    series.set_defaults(command=_series)
    settings = commands.add_parser("settings", help="list the settings that the environment can change")
    settings.set_defaults(command=_settings)
    return parser


def _serve(options: argparse.Namespace, settings: Settings) -> int:
    from service.server import serve  # gunicorn is needed for serving only

    chosen = {n: v for n in ("host", "port", "workers") if (v := getattr(options, n)) is not None}
    serve(dataclasses.replace(settings, **chosen))
    return 0


def _solve(options: argparse.Namespace, settings: Settings) -> int:
    from service.wire.readable import readable

    return _one(options, settings, Operations.solve, readable if options.readable else None)


def _check(options: argparse.Namespace, settings: Settings) -> int:
    return _one(options, settings, Operations.check, None)


def _one(
    options: argparse.Namespace,
    settings: Settings,
    work: Callable[[Operations, Any], dict[str, Any]],
    render: Callable[[dict[str, Any]], str] | None,
) -> int:
    answer = work(Operations.build(settings), _document(options.case))
    text = render(answer).encode() if render else dumps(answer)
    sys.stdout.buffer.write(text + b"\n")
    sys.stdout.flush()
    return 0


def _series(options: argparse.Namespace, settings: Settings) -> int:
    from service.wire.series_csv import run_csv

    case = _document(options.case)
    count = run_csv(Operations.build(settings), case, Path(options.readings), Path(options.output))
    unsolved = "".join(f", {rows} {kind}" for kind, rows in count["unsolved"].items())
    print(f"{count['rows']} rows: {count['solved']} solved{unsolved}", file=sys.stderr)
    return 0


def _settings(_: argparse.Namespace, __: Settings) -> int:
    print(listing())
    return 0


def _document(name: str) -> Any:
    return loads(sys.stdin.buffer.read() if name == "-" else Path(name).read_bytes())


if __name__ == "__main__":
    sys.exit(main())
