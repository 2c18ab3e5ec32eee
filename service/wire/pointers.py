"""JSON Pointers (RFC 6901) in their URI fragment form, `#/streams/1/state/p`."""

from __future__ import annotations

from collections.abc import Iterable
from urllib.parse import quote, unquote

SAFE = "/!$&'()*+,;=:@-._~?"
"""Characters that RFC 3986 allows in a fragment as they are."""


def pointer(path: Iterable[object]) -> str:
    """The pointer of a path of member names and positions."""
    return "#" + "".join("/" + token(part) for part in path)


def token(part: object) -> str:
    """One reference token, escaped for JSON Pointer and for a URI fragment."""
    text = str(part)
    if text.isalnum() and text.isascii():
        return text
    return quote(text.replace("~", "~0").replace("/", "~1"), safe=SAFE.replace("/", ""), errors="replace")


def parts(text: str) -> list[str]:
    """The tokens of a pointer in fragment form, unescaped."""
    body = text[1:] if text.startswith("#") else text
    if not body:
        return []
    return [unquote(t).replace("~1", "/").replace("~0", "~") for t in body[1:].split("/")]


def resolve(document: object, text: str) -> object:
    """What a pointer points at. Raises KeyError where there is nothing."""
    here = document
    for part in parts(text):
        if isinstance(here, dict):
            here = here[part]
        elif isinstance(here, list) and part.isascii() and part.isdigit() and int(part) < len(here):
            here = here[int(part)]
        else:
            raise KeyError(text)
    return here


def nearest_existing(document: object, text: str) -> str:
    """The pointer itself where it resolves, else that of its closest parent that does."""
    path = parts(text)
    while path:
        try:
            resolve(document, pointer(path))
        except KeyError:
            path.pop()
        else:
            break
    return pointer(path)
