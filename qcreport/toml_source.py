"""Settings text in TOML, read so that every fault is told at once with file, line and key.

A reader asks for the keys it knows; what was never asked for is an unknown key. Nothing here touches a disk:
text comes in, checked values go out.
"""

from __future__ import annotations

import datetime as dt
import difflib
import math
import re
import tomllib
from collections.abc import Iterator, Mapping, Sequence
from typing import Any, Final

from qcreport.errors import ConfigError, Fault

Path = tuple[str | int, ...]


class _Required:
    """Marks a key that has no default."""


REQUIRED: Final = _Required()

_HEADER = re.compile(r"""\s*(\[\[?)((?:[^\[\]"'#]|"(?:[^"\\]|\\.)*"|'[^']*')+)\]""")
_KEY = re.compile(
    r"""^\s*((?:"[^"]*"|'[^']*'|[A-Za-z0-9_-]+)(?:\s*\.\s*(?:"[^"]*"|'[^']*'|[A-Za-z0-9_-]+))*)\s*="""
)
_PART = re.compile(r""""([^"]*)"|'([^']*)'|([A-Za-z0-9_-]+)""")
_TOKENS: Final = {
    "": re.compile(r"""\"{3}|'{3}|["'#\[\]{}]"""),
    '"': re.compile(r'\\.|"'),
    "'": re.compile("'"),
    '"""': re.compile(r'\\.|"{3}'),
    "'''": re.compile("'{3}"),
}
"""What ends or changes a value, by the quotes that are open."""
_OPENING: Final = frozenset("[{")
_CLOSING: Final = frozenset("]}")
_SYNTAX_LINE = re.compile(r"\(at line (\d+), column \d+\)")


def _parts(dotted: str) -> tuple[str, ...]:
    return tuple(a or b or c for a, b, c in _PART.findall(dotted))


def _lines_of_keys(text: str) -> dict[Path, int]:
    """Return the line of each table header and key.

    TOML's standard parser gives no positions, so the text is scanned a second time, line by line, outside
    strings and arrays that go over several lines. A key that is not found falls back to its table's line.
    """
    lines: dict[Path, int] = {}
    counts: dict[Path, int] = {}
    table: Path = ()
    inside = _Inside()
    for number, line in enumerate(text.split("\n"), start=1):
        if inside.value:
            inside.read(line)
            continue
        if header := _HEADER.match(line):
            names = _with_indexes(_parts(header.group(2)), counts)
            if header.group(1) == "[[":
                lines.setdefault(names, number)
                counts[names] = counts.get(names, -1) + 1
                names = (*names, counts[names])
            table = names
            lines.setdefault(table, number)
        elif key := _KEY.match(line):
            lines.setdefault((*table, *_parts(key.group(1))), number)
            inside.read(line[key.end() :])
    return lines


class _Inside:
    """Whether the scan stands inside a value that goes on over the end of a line."""

    def __init__(self) -> None:
        self._quotes = ""
        self._depth = 0

    @property
    def value(self) -> bool:
        """Whether a string or an array is still open."""
        return bool(self._quotes) or self._depth > 0

    def read(self, line: str) -> None:
        """Read a line, or the part of it that follows `key =`."""
        position = 0
        while found := _TOKENS[self._quotes].search(line, position):
            mark, position = found.group(), found.end()
            if mark == "#":
                break
            if mark in _OPENING:
                self._depth += 1
            elif mark in _CLOSING:
                self._depth -= 1
            elif mark == self._quotes:
                self._quotes = ""
            elif not mark.startswith("\\"):
                self._quotes = mark
        if len(self._quotes) == 1:  # never open at the end of a line in valid TOML
            self._quotes = ""


def _with_indexes(names: tuple[str, ...], counts: Mapping[Path, int]) -> Path:
    """Insert the current index behind each name that is an array of tables, except the last."""
    path: Path = ()
    for name in names[:-1]:
        path = (*path, name)
        if path in counts:
            path = (*path, counts[path])
    return (*path, names[-1])


def dotted(path: Path) -> str:
    """Return a path as people write it, array members counted from 1: `characteristic[2].margin`."""
    text = ""
    for part in path:
        if isinstance(part, int):
            text += f"[{part + 1}]"
        else:
            text += f".{part}" if text else part
    return text


class TomlSource:
    """One settings text with the faults found in it so far."""

    def __init__(self, text: str, file: str) -> None:
        self.file = file
        self.faults: list[Fault] = []
        try:
            data = tomllib.loads(text)
        except ValueError as error:  # TOMLDecodeError, or a whole number of thousands of digits
            found = _SYNTAX_LINE.search(str(error))
            line = int(found.group(1)) if found else None
            if line is None and "at end of document" in str(error):
                line = text.count("\n", 0, len(text.rstrip())) + 1
            raise ConfigError((Fault(text=f"not valid TOML: {error}", file=file, line=line),)) from None
        except RecursionError:
            raise ConfigError((Fault(text="nested too deeply", file=file),)) from None
        self._lines = _lines_of_keys(text)
        self.top = TableReader(self, data, ())

    @classmethod
    def from_bytes(cls, data: bytes, file: str) -> TomlSource:
        """Return the source of UTF-8 bytes; a ConfigError where they are not UTF-8."""
        try:
            text = data.decode("utf-8-sig")
        except UnicodeDecodeError as error:
            raise ConfigError((Fault(text=f"not UTF-8 text ({error.reason})", file=file),)) from None
        return cls(text.replace("\r\n", "\n"), file)

    def line_of(self, path: Path) -> int | None:
        """Return the line of a key, else of the nearest table above it."""
        while path:
            if path in self._lines:
                return self._lines[path]
            path = path[:-1]
        return None

    def fault(self, path: Path, text: str) -> None:
        """Note a fault at a key."""
        self.faults.append(
            Fault(text=text, file=self.file, line=self.line_of(path), key=dotted(path) if path else None)
        )

    def finish(self) -> None:
        """Note the unknown keys and raise ConfigError with all faults in line order, if any."""
        self.top.note_unknown()
        if self.faults:
            ordered = sorted(self.faults, key=lambda f: (f.line or 0, f.key or ""))
            raise ConfigError(tuple(ordered))


class TableReader:
    """One table of a settings text; each key is asked for by the kind of value it must hold."""

    def __init__(self, source: TomlSource, data: Mapping[str, Any], path: Path) -> None:
        self._source = source
        self._data = data
        self._known: set[str] = set()
        self._children: list[TableReader] = []
        self.path = path

    def __contains__(self, key: str) -> bool:
        """Return whether the key is present."""
        return key in self._data

    def names(self) -> Iterator[str]:
        """Return the keys present, in file order."""
        return iter(self._data)

    def fault(self, key: str | None, text: str) -> None:
        """Note a fault at `key` of this table (or at the table itself)."""
        self._source.fault((*self.path, key) if key is not None else self.path, text)

    def raw(self, key: str, default: Any = REQUIRED) -> Any:
        """Return the value of any kind; notes a fault where it is required and absent."""
        self._known.add(key)
        if key in self._data:
            return self._data[key]
        if isinstance(default, _Required):
            self.fault(None, f'"{key}" is missing')
            return None
        return default

    def _typed(self, key: str, default: Any, kinds: tuple[type, ...], words: str, fallback: Any) -> Any:
        value = self.raw(key, default)
        if key not in self._data:
            return fallback if isinstance(default, _Required) else default
        if not isinstance(value, kinds) or (isinstance(value, bool) and bool not in kinds):
            self.fault(key, f"must be {words}, found {value!r}")
            return fallback if isinstance(default, _Required) else default
        return value

    def text(
        self, key: str, default: Any = REQUIRED, *, choices: Sequence[str] | None = None, blank: bool = False
    ) -> Any:
        """Return a text; one of `choices` where given; blank only where allowed."""
        value = self._typed(key, default, (str,), "a text", "")
        if key in self._data and isinstance(self._data[key], str):
            if choices is not None and value not in choices:
                self.fault(key, f"must be one of {', '.join(repr(str(c)) for c in choices)}, found {value!r}")
            elif not blank and not value.strip():
                self.fault(key, "must not be blank")
        return value

    def number(
        self,
        key: str,
        default: Any = REQUIRED,
        *,
        above: float | None = None,
        below: float | None = None,
        minimum: float | None = None,
    ) -> Any:
        """Return a finite number, strictly between `above` and `below` where given."""
        value = self._typed(key, default, (int, float), "a number", 0.0)
        if key not in self._data or not isinstance(value, (int, float)):
            return value
        try:
            number = float(value)
        except OverflowError:  # a whole number beyond the range of double precision
            number = math.inf
        if not math.isfinite(number):
            self.fault(key, "must be a finite number")
            return 0.0
        if above is not None and not number > above:
            self.fault(key, f"must be greater than {above:g}, found {value!r}")
        if below is not None and not number < below:
            self.fault(key, f"must be less than {below:g}, found {value!r}")
        if minimum is not None and not number >= minimum:
            self.fault(key, f"must be at least {minimum:g}, found {value!r}")
        return number

    def integer(self, key: str, default: Any = REQUIRED, *, minimum: int | None = None) -> Any:
        """Return a whole number of at least `minimum`."""
        value = self._typed(key, default, (int,), "a whole number", 0)
        if key in self._data and isinstance(value, int) and minimum is not None and value < minimum:
            self.fault(key, f"must be at least {minimum}, found {value}")
        return value

    def flag(self, key: str, default: Any = REQUIRED) -> Any:
        """Return true or false."""
        return self._typed(key, default, (bool,), "true or false", False)

    def date(self, key: str, default: Any = REQUIRED) -> Any:
        """Return a date such as 2026-11-02."""
        value = self._typed(key, default, (dt.date,), "a date such as 2026-11-02", None)
        if isinstance(value, dt.datetime):
            return value.date()
        return value

    def texts(self, key: str, default: Any = REQUIRED) -> Any:
        """Return a list of texts as a tuple."""
        return self._list(key, default, str, "a list of texts")

    def integers(self, key: str, default: Any = REQUIRED) -> Any:
        """Return a list of whole numbers as a tuple."""
        return self._list(key, default, int, "a list of whole numbers")

    def _list(self, key: str, default: Any, kind: type, words: str) -> Any:
        value = self._typed(key, default, (list,), words, ())
        if key not in self._data or not isinstance(value, list):
            return value
        if not all(isinstance(v, kind) and not isinstance(v, bool) for v in value):
            self.fault(key, f"must be {words}, found {value!r}")
            return ()
        return tuple(value)

    def table(self, key: str, *, required: bool = False) -> TableReader:
        """Return a sub-table; an empty one where it is absent and not required."""
        value = self._typed(key, REQUIRED if required else {}, (dict,), f"a table [{key}]", {})
        return self._child(value, (*self.path, key))

    def tables(self, key: str, *, required: bool = False) -> tuple[TableReader, ...]:
        """Return an array of tables ([[key]])."""
        value = self._typed(key, REQUIRED if required else [], (list,), f"tables [[{key}]]", [])
        if not all(isinstance(v, dict) for v in value):
            self.fault(key, f"must be tables [[{key}]]")
            return ()
        return tuple(self._child(v, (*self.path, key, i)) for i, v in enumerate(value))

    def _child(self, data: Mapping[str, Any], path: Path) -> TableReader:
        child = TableReader(self._source, data, path)
        self._children.append(child)
        return child

    def note_unknown(self) -> None:
        """Note every key that no reader asked for, with the nearest known one."""
        for key in self._data:
            if key not in self._known:
                near = difflib.get_close_matches(key, sorted(self._known), n=1)
                hint = f'; did you mean "{near[0]}"?' if near else ""
                known = ", ".join(sorted(self._known))
                self.fault(
                    key,
                    f"unknown key{hint} Known here: {known}" if hint else f"unknown key. Known here: {known}",
                )
        for child in self._children:
            child.note_unknown()
