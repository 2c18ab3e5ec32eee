"""What a wrong shape is called, in words that say what to change. The validator's own messages are not used: they
quote the instance, which may be megabytes."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from jsonschema.exceptions import ValidationError

from service.wire.suggest import did_you_mean, listed, quoted
from service.wire.vocabulary import EXAMPLES, HEAT_LAW, KIND_OF_MEMBER, STATE, STREAM

MOST_NAMES = 5
"""Unknown members of one object that are told one by one."""


@dataclass(frozen=True, slots=True)
class Told:
    """member: the member at fault, None for the value itself; keep: nothing has to be cut out to read the rest."""

    detail: str
    hint: str = ""
    member: str | None = None
    keep: bool = False
    at_parent: bool = False


NAMES: Mapping[str, str] = {
    "object": "an object, {...}",
    "array": "a list, [...]",
    "string": "a text",
    "number": "a number",
    "null": "null",
    "boolean": "true or false",
    "integer": "a whole number",
}


@dataclass(frozen=True, slots=True)
class _Error:
    """What the words need of an error of the validator; in_key: it is a member's name that is wrong."""

    instance: Any
    wants: Any
    message: str
    member: str
    in_key: bool


def explain(error: ValidationError) -> Iterator[Told]:
    """What to tell of one error of the validator; an object with several unknown members gives several."""
    schema = error.schema if isinstance(error.schema, Mapping) else {}
    found = _WORDS.get(str(error.validator))
    if found is None:
        yield Told("This does not have the form that belongs here.", str(schema.get("description", "")))
        return
    member = str(error.absolute_path[-1]) if error.absolute_path else ""
    in_key = "propertyNames" in error.absolute_schema_path
    yield from found(_Error(error.instance, error.validator_value, error.message, member, in_key), schema)


def _form(value: object) -> str:
    if isinstance(value, bool):
        return "true or false"
    if isinstance(value, (int, float)):
        return "a number"
    if isinstance(value, str):
        return "a text"
    if value is None:
        return "null"
    return "a list" if isinstance(value, list) else "an object"


def _unknown_member(error: _Error, schema: Mapping[str, Any]) -> Iterator[Told]:
    allowed: Sequence[str] = list(schema.get("properties", {}))
    extra = [name for name in error.instance if name not in schema.get("properties", {})]
    for name in extra[:MOST_NAMES]:
        elsewhere = _elsewhere(name, allowed)
        yield Told(f"There is no member {quoted(name)} here.", elsewhere or did_you_mean(name, allowed), name)
    if len(extra) > MOST_NAMES:
        yield Told(f"{len(extra)} members here are not known.", f"Allowed here: {listed(allowed)}.", None, keep=True)


def _elsewhere(name: str, allowed: Sequence[str]) -> str:
    """A hint for a member that is right one level up or down."""
    if "state" in allowed and name in (*STATE, "saturated"):
        return f'It belongs inside of "state": {{"{name}": ...}}.'
    if "saturated" in allowed and name in STREAM:
        return "It belongs to the stream, beside `state`."
    if "law" in allowed and name in HEAT_LAW:
        return f'It belongs inside of "law": {{"{name}": ...}}.'
    return ""


def _missing(error: _Error, schema: Mapping[str, Any]) -> Iterator[Told]:
    properties = schema.get("properties", {})
    required = [n for n in error.wants if n not in error.instance]
    # one error a missing member; the validator's message names it in quotes
    name = next((n for n in required if error.message.startswith(repr(n))), required[0])
    about = properties.get(name, {}).get("description", "")
    close = [n for n in error.instance if n not in properties]
    near = f" {quoted(close[0])} may be a misspelling of it." if len(close) == 1 and len(required) == 1 else ""
    yield Told(f"The member {quoted(name)} is missing.", f"Add {quoted(name)}. {about}{near}".strip(), None, keep=True)


def _wrong_type(error: _Error, schema: Mapping[str, Any]) -> Iterator[Told]:
    wanted = error.wants if isinstance(error.wants, list) else [error.wants]
    hint = str(schema.get("description", ""))
    if "value" in schema.get("properties", {}) and "string" in wanted:  # a quantity
        if isinstance(error.instance, (int, float)) and not isinstance(error.instance, bool):
            yield Told(
                "The number has no unit.", f"Every number carries its unit; write for example {_example(error)}."
            )
        else:
            yield Told(
                f"A quantity belongs here, not {_form(error.instance)}.", f"Write for example {_example(error)}."
            )
        return
    forms = listed([NAMES.get(t, t) for t in wanted], "or")
    yield Told(f"{forms[0].upper()}{forms[1:]} belongs here, not {_form(error.instance)}.", hint)


def _example(error: _Error) -> str:
    kind = KIND_OF_MEMBER.get(error.member, "")
    return EXAMPLES.get(kind, '"40 barg"')


def _unknown_word(error: _Error, schema: Mapping[str, Any]) -> Iterator[Told]:
    options = [str(v) for v in error.wants]
    if isinstance(error.instance, str):
        yield Told(f"{quoted(error.instance)} is not one of the words allowed here.", _choice(error.instance, options))
    else:
        yield Told(f"One of the words {listed(options, 'or')} belongs here, not {_form(error.instance)}.")


def _choice(word: str, options: Sequence[str]) -> str:
    near = did_you_mean(word, options)
    return near if near.startswith("Allowed") else f"{near} Allowed here: {listed(options)}."


def _not_this(error: _Error, schema: Mapping[str, Any]) -> Iterator[Told]:
    yield Told(f"Only {_plain(error.wants)} is allowed here.", str(schema.get("description", "")))


def _plain(value: object) -> str:
    return "true" if value is True else quoted(value)


def _pattern(error: _Error, schema: Mapping[str, Any]) -> Iterator[Told]:
    about = str(schema.get("description", ""))
    if "\\." in str(error.wants):
        hint = about or "An address is item.property, for example outlet.T."
        yield Told(f"{quoted(error.instance)} is not an address.", hint, str(error.instance) if error.in_key else None)
    else:
        yield Told(
            f"{quoted(error.instance)} cannot be a name.",
            "A name has letters, digits, - and _, begins with a letter or digit, and has at most 64 characters.",
            str(error.instance) if error.in_key else None,
        )


def _size(what: str, few: bool) -> Callable[[_Error, Mapping[str, Any]], Iterator[Told]]:
    def words(error: _Error, schema: Mapping[str, Any]) -> Iterator[Told]:
        limit = error.wants
        amount = f"at least {limit}" if few else f"at most {limit}"
        noun = what if limit != 1 else what.removesuffix("s").replace("entrie", "entry")
        yield Told(
            f"{amount[0].upper()}{amount[1:]} {noun} belong{'s' if limit == 1 else ''} here; there "
            f"{'is' if len(error.instance) == 1 else 'are'} {len(error.instance)}.",
            str(schema.get("description", "")),
        )

    return words


def _bound(words: str) -> Callable[[_Error, Mapping[str, Any]], Iterator[Told]]:
    def told(error: _Error, schema: Mapping[str, Any]) -> Iterator[Told]:
        yield Told(f"The number has to be {words} {error.wants}.", str(schema.get("description", "")))

    return told


_WORDS: Mapping[str, Callable[[_Error, Mapping[str, Any]], Iterator[Told]]] = {
    "additionalProperties": _unknown_member,
    "required": _missing,
    "type": _wrong_type,
    "enum": _unknown_word,
    "const": _not_this,
    "pattern": _pattern,
    "maxLength": _size("characters", few=False),
    "minLength": _size("characters", few=True),
    "maxItems": _size("entries", few=False),
    "minItems": _size("entries", few=True),
    "maxProperties": _size("members", few=False),
    "minProperties": _size("members", few=True),
    "minimum": _bound("at least"),
    "maximum": _bound("at most"),
    "exclusiveMinimum": _bound("above"),
    "exclusiveMaximum": _bound("below"),
}
