"""The only place that rounds: decimal arithmetic, half up.

Half up on decimals is what USP General Notices 7.20 and ASTM E29 (absolute method) print in their examples.
Binary rounding breaks them: 0.015 is stored below 0.015 and would go down. A double carries at least 15
decimal digits faithfully, so each number is taken at 15 significant digits before it is rounded.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from contextlib import contextmanager
from contextvars import ContextVar
from decimal import ROUND_HALF_UP, Context, Decimal

MINUS = "−"
TIMES = "×"
LARGEST_DECIMALS = 8
P_FLOOR = 1e-12
_WIDE = Context(prec=60, rounding=ROUND_HALF_UP)
_SUPERSCRIPTS = str.maketrans("0123456789-", "⁰¹²³⁴⁵⁶⁷⁸⁹⁻")


_MARK: ContextVar[str] = ContextVar("decimal_mark", default=".")


@contextmanager
def decimal_mark(mark: str) -> Iterator[None]:
    """Print every number inside with `mark` before its decimals, as the language of the report has it."""
    before = _MARK.set(mark)
    try:
        yield
    finally:
        _MARK.reset(before)


def to_decimal(value: float | str | Decimal) -> Decimal:
    """Return `value` as a decimal; a float at its 15 faithful significant digits."""
    if isinstance(value, float | int) and not isinstance(value, bool):
        return Decimal(format(float(value), ".15g"))
    return Decimal(value)


def round_half_up(value: float | str | Decimal, decimals: int) -> Decimal:
    """Return `value` rounded to `decimals` places, a final 5 going away from zero.

    Examples
    --------
    >>> [str(round_half_up(v, d)) for v, d in ((97.95, 1), (101.45, 1), (0.025, 2), (0.015, 2))]
    ['98.0', '101.5', '0.03', '0.02']
    """
    return to_decimal(value).quantize(Decimal(1).scaleb(-decimals), context=_WIDE)


def _printed(text: str) -> str:
    return text.replace("-", MINUS).replace(".", _MARK.get())


def fixed(value: float | str | Decimal, decimals: int) -> str:
    """Return `value` with exactly `decimals` places and the sign − where it is below zero.

    Examples
    --------
    >>> fixed(-0.344, 2), fixed(-0.001, 2), fixed(100, 2)
    ('−0.34', '0.00', '100.00')
    """
    rounded = round_half_up(value, min(max(decimals, 0), LARGEST_DECIMALS))
    if rounded == 0:
        rounded = abs(rounded)
    return _printed(format(rounded, "f"))


def signed(value: float, decimals: int) -> str:
    """Return `value` with its sign written out: +0.34, −0.34, 0.00."""
    text = fixed(value, decimals)
    return text if text.startswith(MINUS) or round_half_up(value, decimals) == 0 else f"+{text}"


def apart_from(value: float, decimals: int, marks: Iterable[float]) -> str:
    """Return `value` with as many places, at least `decimals`, as keep it apart from each of `marks`.

    An interval that ends at 1.4996 before a margin of 1.5 must not be printed as 1.50.
    """
    others = [to_decimal(m) for m in marks if to_decimal(m) != to_decimal(value)]
    places = decimals
    while places < LARGEST_DECIMALS and any(round_half_up(value, places) == other for other in others):
        places += 1
    return fixed(value, places)


def significant(value: float, digits: int) -> str:
    """Return `value` with `digits` significant digits, in powers of ten where far from one.

    Examples
    --------
    >>> significant(0.98712, 4), significant(16.21, 2), significant(0.0, 3)
    ('0.9871', '16', '0')
    """
    exact = to_decimal(value)
    if exact == 0:
        return "0"
    places = digits - 1 - exact.adjusted()
    rounded = round_half_up(exact, places)
    if rounded.adjusted() != exact.adjusted():
        places -= 1
        rounded = round_half_up(exact, places)
    exponent = rounded.adjusted()
    if exponent < -3 or exponent >= 9:
        return _power_of_ten(rounded, exponent, digits)
    return _printed(format(rounded, "f"))


def _power_of_ten(rounded: Decimal, exponent: int, digits: int) -> str:
    mantissa = round_half_up(rounded.scaleb(-exponent, context=_WIDE), digits - 1)
    return f"{_printed(format(mantissa, 'f'))}\u00a0{TIMES}\u00a010{str(exponent).translate(_SUPERSCRIPTS)}"


def shortest(value: float) -> str:
    """Return `value` without digits it does not need: 1.5, 18, 0.05."""
    text = format(to_decimal(value).normalize(), "f")
    return _printed(text)


def trimmed(value: float, digits: int) -> str:
    """Return `value` with at most `digits` significant digits and no zeros at the end of its decimals."""
    text, mark = significant(value, digits), _MARK.get()
    return text.rstrip("0").rstrip(mark) if mark in text and TIMES not in text else text


def probability(
    p: float, *, near: float | None = None, below: str = "below {}", above: str = "above {}"
) -> str:
    """Return a tail probability with two significant digits; more where it would read as `near`.

    Examples
    --------
    >>> probability(0.0142), probability(3e-15), probability(0.998)
    ('0.014', 'below 10⁻¹²', 'above 0.99')
    """
    if p < P_FLOOR:
        return below.format("10⁻¹²")
    if round_half_up(p, 2) >= 1:
        return above.format(_printed("0.99"))
    digits = 2
    while near is not None and digits < 6 and p != near and _rounds_to(p, digits, near):
        digits += 1
    if p < 1e-3:
        exact = to_decimal(p)
        rounded = round_half_up(exact, digits - 1 - exact.adjusted())
        if rounded < Decimal("0.001"):
            return _power_of_ten(rounded, rounded.adjusted(), digits)
    return significant(p, digits)


def _rounds_to(value: float, digits: int, target: float) -> bool:
    exact = to_decimal(value)
    return round_half_up(exact, digits - 1 - exact.adjusted()) == to_decimal(target)
