"""Whether a document says in its own form what was read from it: no `"false"` read as true, no 4.9 as 4."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any


def deviations(written: Any, understood: Any, path: str = "") -> Iterator[str]:
    """Yield the places where a document has another value, or another kind of value, than was understood.

    Parameters
    ----------
    written : object
        The JSON document as it stands.
    understood : object
        The document as it is written again from what was read.
    path : str
        Where both are.

    Notes
    -----
    What only `written` has is unknown to this version and was not read; what only `understood` has was not
    known to the version that wrote it. Neither is a deviation.
    """
    if isinstance(written, Mapping) and isinstance(understood, Mapping):
        for key in sorted({*written} & {*understood}):
            yield from deviations(written[key], understood[key], f"{path}.{key}" if path else key)
    elif isinstance(written, list) and isinstance(understood, list) and len(written) == len(understood):
        for index, (one, other) in enumerate(zip(written, understood, strict=True)):
            yield from deviations(one, other, f"{path}[{index}]")
    elif not _says(written, understood):
        yield path


def _says(written: Any, understood: Any) -> bool:
    """Return whether both are one value of one kind; a whole number may stand for a decimal one."""
    same_kind = type(written) is type(understood) or (type(written) is int and type(understood) is float)
    return same_kind and bool(written == understood)
