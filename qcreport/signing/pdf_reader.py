"""A strict PDF reader that reads the index of each object stream once.

The stock reader reads the whole index again for every object it takes from a stream. Judging changes looks at
every object of a tagged report, so that made up most of the time of a check.
"""

from __future__ import annotations

from io import BytesIO
from typing import Any, NamedTuple

from pyhanko.pdf_utils import generic
from pyhanko.pdf_utils.decode_limits import DecodePurpose
from pyhanko.pdf_utils.misc import PdfStrictReadError
from pyhanko.pdf_utils.reader import PdfFileReader

MOST_OBJECTS = 100_000
"""Objects in one object stream; programs write a few hundred."""


class _Unpacked(NamedTuple):
    """One object stream, unpacked."""

    data: bytes
    places: tuple[tuple[int, int], ...]
    """(object number, offset from the start of the data), in order."""


class IndexedReader(PdfFileReader):
    """Read a PDF strictly, each object stream's index once."""

    def __init__(self, data: bytes) -> None:
        self._unpacked: dict[int, _Unpacked] = {}
        super().__init__(BytesIO(data), strict=True)

    def _get_object_from_stream(self, idnum: int, stmnum: int, idx: int) -> Any:
        if stmnum not in self._unpacked:
            self._unpacked[stmnum] = self._unpack(stmnum)
        held = self._unpacked[stmnum]
        if not 0 <= idx < len(held.places) or held.places[idx][0] != idnum:
            raise PdfStrictReadError("object not at its place in the object stream")
        stream = BytesIO(held.data)
        stream.seek(held.places[idx][1])
        item = generic.read_object(stream, generic.Reference(idnum, 0, self))
        if isinstance(item, (generic.StreamObject, generic.IndirectObject)):
            raise PdfStrictReadError("object of a kind that no object stream may hold")
        return item

    def _unpack(self, number: int) -> _Unpacked:
        stream = generic.Reference(number, 0, self).get_object()
        if not isinstance(stream, generic.StreamObject) or stream["/Type"] != "/ObjStm":
            raise PdfStrictReadError("not an object stream")
        count, first = int(stream["/N"]), int(stream["/First"])
        data: bytes = stream.read_data(DecodePurpose.OBJECT_STREAM)
        if not 0 <= count <= MOST_OBJECTS or not 0 <= first <= len(data):
            raise PdfStrictReadError("object stream with an index that cannot be")
        numbers = [int(word) for word in data[:first].split()[: 2 * count]]
        if len(numbers) != 2 * count or min(numbers, default=0) < 0:
            raise PdfStrictReadError("object stream with a broken index")
        pairs = zip(numbers[::2], numbers[1::2], strict=True)
        return _Unpacked(data, tuple((item, first + offset) for item, offset in pairs))
