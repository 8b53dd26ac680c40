"""Units as exports write them: whether two are the same, and whether a text is one at all."""

from __future__ import annotations

import re
import unicodedata

_PRODUCT = str.maketrans({"·": ".", "⋅": ".", "•": ".", "×": ".", "*": ".", "∙": ".", "⁻": "-", "−": "-"})
_BRACKETED = re.compile(r"[\[(]\s*([^\[\]()]{1,24}?)\s*[\])]\s*$")
_FACTOR = re.compile(r"^([A-Za-zµμΩ°%‰\"']+?)(?:\^?-?[0-9])?$")
_PREFIXES = ("", "k", "M", "G", "m", "µ", "μ", "u", "n", "p", "c", "d", "h")
_SYMBOLS = frozenset(
    (
        "Pa", "N", "m", "g", "s", "h", "min", "l", "L", "mol", "J", "W", "V", "A", "K", "bar", "Hz", "P",
        "St", "S", "Ω", "Ohm", "eq", "C", "F", "lm", "lx", "cd", "d",
    )
)  # fmt: skip
_WHOLE = frozenset(
    (
        "%", "‰", "ppm", "ppb", "psi", "ksi", "lbf", "lb", "lbs", "oz", "in", "inch", "ft", "mil", "pli",
        "cP", "cSt", "°C", "°F", "°", "kgf", "kp", "a.u.", "HU", "wt%", "wt.%", "w%", "vol%", "mol%",
        "%(w/w)", "atm", "Torr", "mmHg", "dyn", "min", "sec", "hr", "t", "rpm", "BU", "KU",
    )
)  # fmt: skip


def normalised_unit(text: str) -> str:
    """Return a unit in one spelling: `mPa·s`, `mPa*s` and `mPa.s` are the same; capitals count."""
    plain = unicodedata.normalize("NFKC", text).translate(_PRODUCT)
    return re.sub(r"\s+", "", plain).replace("μ", "µ").replace("^", "")


def same_unit(first: str, second: str) -> bool:
    """Return whether two texts name the same unit; no conversion is attempted."""
    return normalised_unit(first) == normalised_unit(second)


def looks_like_unit(text: str) -> bool:
    """Return whether a text is made of known unit symbols."""
    plain = normalised_unit(text)
    if not plain or len(plain) > 24:
        return False
    if plain in _WHOLE:
        return True
    first, *others = re.split(r"[./]", plain)
    if " " not in text:  # `N/25mm`, and not `7 d / 23 C`
        others = [factor.lstrip("0123456789") or factor for factor in others]
    return all(_known_factor(factor) for factor in (first, *others))


def _known_factor(text: str) -> bool:
    found = _FACTOR.match(text)
    if found is None:
        return text == "1"
    symbol = found.group(1)
    if symbol in _WHOLE or symbol in _SYMBOLS:
        return True
    return any(symbol.startswith(p) and symbol[len(p) :] in _SYMBOLS for p in _PREFIXES if p)


def unit_in_heading(heading: str) -> str | None:
    """Return the text in brackets that ends a heading: `Lap shear [MPa]` → `MPa`."""
    found = _BRACKETED.search(heading)
    return found.group(1) if found else None


def without_unit(heading: str, unit: str | None) -> str:
    """Return a heading without what may be its unit: the bracket, or the unit (or any unit) as last word."""
    if found := _BRACKETED.search(heading):
        return heading[: found.start()].strip()
    stem, _, last = heading.strip().rpartition(" ")
    if stem and (looks_like_unit(last) or (unit is not None and same_unit(last, unit))):
        return stem.strip(" ,:")
    return heading.strip()
