"""Names of pure and pseudo-pure fluids: a client's text is looked up here and never reaches the property library."""

from __future__ import annotations

import re
from collections.abc import Iterable, Iterator, Mapping
from difflib import get_close_matches
from functools import cache

import CoolProp.CoolProp as CoolPropLibrary

from service.errors import UnknownFluid
from service.fluids.fluid_names import ALIASES, NAMES, REFRIGERANT_PREFIXES

LONGEST = 64
"""No fluid has a longer name; longer texts are refused without a search."""

_SKIPPED = str.maketrans("", "", " -_()'")
_REFRIGERANT = re.compile(rf"(?:{'|'.join(REFRIGERANT_PREFIXES)})(\d[0-9a-z]{{0,10}})")


def key(name: str) -> str:
    """A name with everything dropped that does not matter: case, blanks, hyphens, underscores, parentheses."""
    return name.casefold().translate(_SKIPPED)


def own_name(library_name: str) -> str:
    """What we call a fluid: words in small letters, refrigerants as ISO 817 writes them."""
    if library_name in NAMES:
        return NAMES[library_name]
    if re.match(r"R\d", library_name):
        return library_name
    return library_name[0].lower() + library_name[1:] if library_name[1] != "-" else library_name.lower()


@cache
def table() -> Mapping[str, str]:
    """key → the library's name, for every pure and pseudo-pure fluid. Built on first use."""
    found: dict[str, str] = {}
    fluids = sorted(CoolPropLibrary.get_global_param_string("FluidsList").split(","))
    for fluid in fluids:  # a fluid's own name goes before another's alias
        found[key(fluid)] = fluid
        found[key(own_name(fluid))] = fluid
    for fluid in fluids:
        for alias in _aliases(fluid):
            found.setdefault(key(alias), fluid)
    return found


def _aliases(fluid: str) -> Iterator[str]:
    yield from ALIASES.get(fluid, ())
    # names with commas in them come apart here; the pieces of those are left out
    text = CoolPropLibrary.get_fluid_param_string(fluid, "aliases")
    yield from (part for part in text.split(",") if part and not _is_fragment(part, text))
    number = CoolPropLibrary.get_fluid_param_string(fluid, "CAS")
    if re.fullmatch(r"\d+-\d\d-\d", number):
        yield number


def _is_fragment(part: str, text: str) -> bool:
    return bool(re.search(r"\d,\d", text)) and bool(re.match(r"[(a-zA-Z-]*\d$|\d", part) or "-" in part)


@cache
def own_names() -> tuple[str, ...]:
    """Every name that answers use, sorted."""
    return tuple(sorted({own_name(fluid) for fluid in table().values()}, key=str.casefold))


@cache
def aliases(library_name: str) -> tuple[str, ...]:
    """What else a fluid may be called (spellings that differ only in case or hyphens are told once)."""
    seen = {key(own_name(library_name))}
    kept = []
    for alias in (library_name, *_aliases(library_name)):
        if key(alias) not in seen and table().get(key(alias)) == library_name:
            seen.add(key(alias))
            kept.append(alias)
    return tuple(kept)


def library_name(name: str) -> str | None:
    """The library's name for what a client calls a fluid, None where there is no such fluid."""
    if len(name) > LONGEST:
        return None
    wanted = key(name)
    found = table().get(wanted)
    if found is None and (match := _REFRIGERANT.fullmatch(wanted)):
        found = table().get("r" + match.group(1))
    return found


def unknown(name: str, others: Iterable[str] = ()) -> UnknownFluid:
    """The error for a name that is not known, with the nearest spellings; others: names beside the pure fluids."""
    shown = name if len(name) <= 40 else f"{name[:40]}..."
    spellings = {key(own): own for own in others} | {k: own_name(fluid) for k, fluid in table().items()}
    near = get_close_matches(key(name[:40]), spellings, n=6, cutoff=0.6)
    offers = list(dict.fromkeys(spellings[k] for k in near))[:3]
    hint = f"Did you mean {' or '.join(offers)}?" if offers else "GET /v1/fluids lists every name."
    return UnknownFluid(f"There is no fluid named {shown!r}.", hint=hint)
