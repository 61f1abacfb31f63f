"""Exact numbers as doubles and as plain decimals."""

from __future__ import annotations

from fractions import Fraction

from effluent.errors import ValueRefused

__all__ = ["decimal_text", "leading_power", "nearest"]

_PLACES = 30
_LARGEST_PLAIN = Fraction(10) ** 40


def nearest(value: Fraction) -> float:
    """Return the double nearest to a rational number (ties to even).

    Parameters
    ----------
    value : fractions.Fraction
        Any unit.

    Raises
    ------
    ValueRefused
        If it is too large for a double, or so small that it would become zero.

    Notes
    -----
    IEEE 754-2019, clause 4.3.1, roundTiesToEven; division of two Python integers rounds so.
    """
    try:
        double = value.numerator / value.denominator
    except OverflowError as error:
        raise ValueRefused("number", _short(value), "it is larger than any measured value") from error
    if value and not double:
        raise ValueRefused("number", _short(value), "it is smaller than any measured value")
    return double


def _short(value: Fraction) -> str:
    """Return the order of magnitude of a number that is too long to print."""
    bits = value.numerator.bit_length() - value.denominator.bit_length()
    return f"about 1e{bits * 30103 // 100000}"


def decimal_text(value: Fraction, *, digits: int = 10) -> str:
    """Return a number as a plain decimal.

    Exact where the decimal ends within 30 places; otherwise rounded half-even to significant digits.

    Parameters
    ----------
    value : fractions.Fraction
        Any unit.
    digits : int
        Significant digits of a decimal that does not end.

    Raises
    ------
    ValueRefused
        If the number is 1e40 or larger, or below 1e-40 and not zero.

    Notes
    -----
    A fraction in lowest terms ends at place n when its denominator divides 10**n.

    Examples
    --------
    >>> decimal_text(Fraction(11, 100))
    '0.11'
    >>> decimal_text(Fraction(2, 3), digits=3)
    '0.667'
    """
    if abs(value) >= _LARGEST_PLAIN:
        raise ValueRefused("number", _short(value), "it is larger than any measured value")
    if value and abs(value) * _LARGEST_PLAIN < 1:
        raise ValueRefused("number", _short(value), "it is smaller than any measured value")
    places = _PLACES if 10**_PLACES % value.denominator == 0 else digits - 1 - leading_power(value)
    scaled = round(value * Fraction(10) ** places)
    if places <= 0:
        return str(scaled * 10**-places)
    whole, part = divmod(abs(scaled), 10**places)
    text = f"{whole}.{part:0{places}d}".rstrip("0").rstrip(".")
    return f"-{text}" if value < 0 else text


def leading_power(value: Fraction) -> int:
    """Return the power of ten of the first significant digit.

    Parameters
    ----------
    value : fractions.Fraction
        Any unit; not zero.

    Raises
    ------
    ValueError
        If it is zero.

    Notes
    -----
    The largest n with 10**n <= abs(value).

    Examples
    --------
    >>> leading_power(Fraction(11, 100))
    -1
    """
    if not value:
        raise ValueError("zero has no first significant digit")
    size = abs(value)
    guess = (size.numerator.bit_length() - size.denominator.bit_length()) * 30103 // 100000
    while Fraction(10) ** guess > size:
        guess -= 1
    while Fraction(10) ** (guess + 1) <= size:
        guess += 1
    return guess
