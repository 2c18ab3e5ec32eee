"""An answer for people: the same document as plain text, for a terminal."""

from __future__ import annotations

import textwrap
from collections.abc import Iterable, Iterator
from typing import Any

WIDTH = 110
ROWS = 13
"""Rows of a history that a terminal shows."""


def readable(answer: dict[str, Any]) -> str:
    """The answer document as text: answers, states, ledger, steps, checks, cautions."""
    parts = [_title(answer), _answers(answer), _course(answer), _states(answer), _ledger(answer), _steps(answer)]
    parts += [_checks(answer)]
    parts += [_texts("Assumptions", answer["assumptions"]), _advisories(answer["advisories"])]
    return "\n\n".join(part for part in parts if part) + "\n"


def _title(answer: dict[str, Any]) -> str:
    title = f"{answer.get('title') or 'Balance'} [{answer['status']}]"
    return f"{title}\n{'=' * len(title)}"


def _amount(quantity: dict[str, Any]) -> str:
    value = quantity.get("value")
    if value is None:
        return f"— ({quantity.get('reason', 'not defined')})"
    text = f"{value:.6g} {quantity['unit']}"
    return f"{text} ± {quantity['u']:.2g} (standard uncertainty)" if "u" in quantity else text


def _answers(answer: dict[str, Any]) -> str:
    return _section("Answers", _aligned((address, _amount(q)) for address, q in answer["answers"].items()))


def _states(answer: dict[str, Any]) -> str:
    rows = []
    for stream, state in answer["states"].items():
        shown = [f"{n} {_amount(q)}" for n, q in state.items() if isinstance(q, dict) and q.get("value") is not None]
        head = ", ".join(t for t in (state.get("fluid", ""), state.get("phase", "")) if t)
        rows.append((stream, f"{head}: {', '.join(shown)}"))
    held = any("." in name for name in answer["states"])
    return _section("States" if held else "Streams", _aligned(rows))


def _course(answer: dict[str, Any]) -> str:
    """What a transient tells over time."""
    told = answer.get("transient")
    if told is None:
        return ""
    lines = [f"  ended after {_amount(told['end']['time'])}: {told['end']['reason']}"]
    if told.get("stopped"):
        lines += _wrapped(f"stopped before that: {told['stopped']}", "  ")
    lines += _aligned((_amount(event["time"]), event["event"]) for event in told["events"])
    lines += _aligned((address, _range(found)) for address, found in told["extremes"].items())
    return _section("Over time", [*lines, *_history(told["history"])])


def _range(found: dict[str, Any]) -> str:
    return " to ".join(f"{_amount(found[end])} (at {_amount(found[end]['at'])})" for end in ("least", "largest"))


def _history(history: dict[str, Any]) -> Iterator[str]:
    """Some evenly spread rows of the history, at most as many columns as fit."""
    columns = {"time": history["time"], **history["columns"]}
    heads = [f"{name} [{column['unit']}]" for name, column in columns.items()]
    widths = [max(len(head), 10) for head in heads]
    while sum(widths) + 2 * len(widths) > WIDTH and len(widths) > 1:
        widths.pop()
    count = len(history["time"]["values"])
    rows = sorted({round(i * (count - 1) / (ROWS - 1)) for i in range(ROWS)}) if count else []
    yield "  " + "  ".join(f"{head:>{width}}" for head, width in zip(heads, widths, strict=False))
    for row in rows:
        cells = [column["values"][row] for column in columns.values()]
        shown = ["—" if cell is None else f"{cell:.6g}" for cell in cells]
        yield "  " + "  ".join(f"{cell:>{width}}" for cell, width in zip(shown, widths, strict=False))
    if len(widths) < len(heads):
        yield f"  ... and {len(heads) - len(widths)} more columns in the answer's `transient.history`."


def _ledger(answer: dict[str, Any]) -> str:
    lines: list[str] = []
    for account in answer["ledger"]:
        for mass in account.get("mass", ()):
            label = f" ({mass['circuit']})" if mass.get("circuit") else ""
            lines += [f"  {account['boundary']}, mass{label}", *_account(mass)]
        if account.get("energy"):
            lines += [f"  {account['boundary']}, energy", *_account(account["energy"])]
    return _section("Ledger, positive into the boundary", lines)


def _account(account: dict[str, Any]) -> Iterator[str]:
    for line in account["lines"]:
        yield f"    {_figure(line)} {line['term']} {line['of']}"
    closure = account["closure"]
    yield f"    {_figure(account['sum'])} sum" + (f" (closure {closure:.1e})" if closure is not None else "")


def _figure(quantity: dict[str, Any]) -> str:
    value = quantity["value"]
    return f"{'—' if value is None else f'{value:z,.4f}':>16} {quantity['unit']:8}"


def _steps(answer: dict[str, Any]) -> str:
    lines: list[str] = []
    for step in answer.get("steps", ()):
        lines += _step(step, "  ")
    return _section("Steps", lines)


def _step(step: dict[str, Any], margin: str) -> Iterator[str]:
    yield f"{margin}{step['number']}. {step['name']} ({step['method']})"
    yield from _wrapped(step["equation"], margin + "   ")
    if step.get("numbers"):
        yield from _wrapped(step["numbers"], margin + "   ")
    found = ", ".join(f"{address} = {_amount(quantity)}" for address, quantity in step["values"].items())
    yield from _wrapped(f"→ {found}" if found else "", margin + "   ")
    for inner in step.get("inner", ()):
        yield from _step(inner, margin + "   ")


def _checks(answer: dict[str, Any]) -> str:
    checks = answer["checks"]
    lines = [f"  second law, {c['boundary']}: {c['verdict']}. {c['why']}" for c in checks["entropy"]]
    lines += [f"  {c['name']}: {c['verdict']}" for c in checks["surplus"]]
    return _section("Checks", lines)


def _advisories(advisories: dict[str, Any]) -> str:
    lines: list[str] = []
    for item in advisories["items"]:
        lines += _wrapped(f"{item['signal_word']} {item['message']} [{item['basis']}]", "  ")
    lines += _wrapped(advisories["deference"], "  ")
    return _section("Cautions", lines)


def _texts(title: str, texts: Iterable[str]) -> str:
    return _section(title, [line for text in texts for line in _wrapped(text, "  ")])


def _wrapped(text: str, margin: str) -> list[str]:
    return textwrap.wrap(text, WIDTH, initial_indent=margin, subsequent_indent=margin + "  ")


def _aligned(rows: Iterable[tuple[str, str]]) -> list[str]:
    pairs = list(rows)
    widest = max((len(name) for name, _ in pairs), default=0)
    lines: list[str] = []
    for name, text in pairs:
        indent = " " * (widest + 4)
        lines += textwrap.wrap(text, WIDTH, initial_indent=f"  {name:{widest}}  ", subsequent_indent=indent)
    return lines


def _section(title: str, lines: list[str]) -> str:
    return "\n".join([title, *lines]) if lines else ""
