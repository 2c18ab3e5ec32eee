"""Citations of the equations of state, from the bibliography that the property library brings along."""

from __future__ import annotations

import re
from collections.abc import Mapping
from functools import cache
from pathlib import Path

import CoolProp

COOLPROP = (
    "I. H. Bell, J. Wronski, S. Quoilin, V. Lemort: Pure and pseudo-pure fluid thermophysical property evaluation and "
    "the open-source thermophysical property library CoolProp. Ind. Eng. Chem. Res. 53 (2014) 2498-2508"
)
# the paper from memory, the release by its number
IF97 = (
    "W. Wagner et al.: The IAPWS Industrial Formulation 1997 for the thermodynamic properties of water and steam. "
    "J. Eng. Gas Turbines Power 122 (2000) 150-184; IAPWS R7-97(2012)"
)

_ENTRY = re.compile(r"@\w+\s*\{\s*([^,\s]+)\s*,(.*?)(?=^@|\Z)", re.DOTALL | re.MULTILINE)
_FIELD = re.compile(r"^\s*(\w+)\s*=\s*[{\"](.*?)[}\"]\s*,?\s*$", re.MULTILINE)
_ACCENT = re.compile(r"\\[`'^\"~=.Hcvurkbd]\s*\{?\\?([A-Za-z])\}?")


@cache
def _entries() -> Mapping[str, str]:
    path = Path(CoolProp.__file__).with_name("CoolPropBibTeXLibrary.bib")
    try:
        text = path.read_text(encoding="utf-8", errors="replace")
    except OSError:  # some packagings of the library leave it out
        return {}
    return {match.group(1): match.group(2) for match in _ENTRY.finditer(text)}


def _plain(text: str) -> str:
    text = _ACCENT.sub(r"\1", text)
    text = re.sub(r"\\(ss|o|l|ae|aa)\b\s*", lambda m: {"ss": "ss", "aa": "a"}.get(m.group(1), m.group(1)), text)
    text = re.sub(r"\\[a-zA-Z]+\s*", "", text).replace("\\", "")
    return re.sub(r"\s+", " ", text.replace("{", "").replace("}", "").replace("$", "")).strip()


@cache
def citation(keys: str) -> str:
    """One line (authors: title. journal volume (year) pages) for a BibTeX key or several with commas between."""
    return "; ".join(_one(name.strip()) for name in keys.split(",") if name.strip())


def _one(name: str) -> str:
    body = _entries().get(name)
    if body is None:
        return name
    fields = {match.group(1).lower(): _plain(match.group(2)) for match in _FIELD.finditer(body)}
    authors = re.split(r"\s+and\s+", fields.get("author", "")) if fields.get("author") else []
    names = ", ".join(authors[:3]) + (" et al." if len(authors) > 3 else "")
    place = next((fields[f] for f in ("journal", "booktitle", "publisher", "school") if fields.get(f)), "")
    volume, pages = fields.get("volume", ""), fields.get("pages", "")
    year = f"({fields['year']})" if fields.get("year") else ""
    source = " ".join(part for part in (place, volume, year, pages.replace("--", "-")) if part)
    title = fields.get("title", "")
    return f"{names}: {title}. {source}" if names else f"{title}. {source}"
