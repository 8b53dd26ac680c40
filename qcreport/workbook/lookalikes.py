"""Names that a person may take for one another."""

from __future__ import annotations

import re
import unicodedata

_SAME_SHAPE = {
    "a": "аα", "b": "вьβß", "c": "сϲ", "d": "ԁ", "e": "еёε", "h": "һн", "i": "іιı", "j": "ј", "k": "кκ",
    "m": "мμ", "n": "ηп", "o": "оοσ", "p": "рρ", "q": "ԛ", "s": "ѕ", "t": "тτ", "u": "υц", "v": "ν",
    "w": "ωԝ", "x": "хχ", "y": "уγ", "z": "ζ", "3": "з",
}  # fmt: skip
_CONFUSABLE = str.maketrans({shape: plain for plain, shapes in _SAME_SHAPE.items() for shape in shapes})
_LETTERS_AS_DIGITS = str.maketrans("oil|", "0111")
_INVISIBLE = re.compile("[\u00ad\u180e\u200b-\u200f\u202a-\u202e\u2060-\u2069\ufeff]")
_SEPARATORS = re.compile(r"[\s\-_./\\‐‑‒–—―−·,:;]+")
_BOUNDARY = re.compile(r"(?<=[0-9])(?=[^0-9-])|(?<=[^0-9-])(?=[0-9])")
_LEADING_ZEROS = re.compile(r"(?<![0-9])0+(?=[0-9])")


def skeleton(name: str) -> str:
    """Return a form that look-alike names share.

    Capitals, kinds of spaces and dashes, leading zeros of numbers, letters of other scripts that look the
    same, and the letters O, I and l beside the digits 0 and 1 make no difference.
    """
    plain = _INVISIBLE.sub("", unicodedata.normalize("NFKC", name)).casefold()
    plain = "".join(c for c in unicodedata.normalize("NFKD", plain) if not unicodedata.combining(c))
    plain = "".join(str(unicodedata.digit(c, -1)) if c.isdigit() and not c.isascii() else c for c in plain)
    plain = plain.translate(_CONFUSABLE).translate(_LETTERS_AS_DIGITS)
    plain = _SEPARATORS.sub("-", plain).strip("-")
    plain = _BOUNDARY.sub("-", plain)
    return _LEADING_ZEROS.sub("", plain)


_UNUSUAL = re.compile(r"[<>{}\[\]\"'`;|$\\]|--")
_FORMULA_START = ("=", "+", "-", "@")
_LONG = 64


def is_unusual(name: str) -> bool:
    """Return whether a name would act as something else if printed carelessly, or is hard to print."""
    if len(name) > _LONG or name.startswith(_FORMULA_START) or _UNUSUAL.search(name):
        return True
    return _INVISIBLE.search(name) is not None or not all(c.isprintable() for c in name)
