"""Sums and products carried as two doubles, for the few differences that cancel.

Near critical damping and near resonance the answer hangs on the difference of two nearly
equal numbers. A number here is a pair (high, low) whose unevaluated sum holds about 32
digits. Error-free transformations after Dekker (1971) and Knuth (TAOCP vol. 2, 4.2.2).

Conventions, for all functions here: a double is an array, a pair a tuple of two of them, the
low one at most half a unit in the last place of the high one. Arrays broadcast against each
other, units are the caller's, and nothing is raised: what overflows or has no value becomes
infinite or not a number, as in numpy.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]
Pair = tuple[Array, Array]

_SPLITTER = 134217729.0  # 2**27 + 1: halves a 53-bit significand

TWO_PI: Pair = (np.asarray(6.283185307179586), np.asarray(2.4492935982947064e-16))


def exact(value: Array) -> Pair:
    """Take a double as a pair."""
    return value, np.zeros_like(value)


def two_sum(a: Array, b: Array) -> Pair:
    """Sum of two doubles, exactly."""
    total = a + b
    shadow = total - a
    return total, (a - (total - shadow)) + (b - shadow)


def _renormalise(high: Array, low: Array) -> Pair:
    total = high + low
    return total, low - (total - high)


def _split(a: Array) -> Pair:
    scaled = _SPLITTER * a
    high = scaled - (scaled - a)
    return high, a - high


def two_product(a: Array, b: Array) -> Pair:
    """Product of two doubles, exactly (below about 1e300)."""
    product = a * b
    a_high, a_low = _split(a)
    b_high, b_low = _split(b)
    error = ((a_high * b_high - product) + a_high * b_low + a_low * b_high) + a_low * b_low
    return product, error


def add(a: Pair, b: Pair) -> Pair:
    """Sum of two pairs."""
    high, error = two_sum(a[0], b[0])
    low, second_error = two_sum(a[1], b[1])
    high, error = _renormalise(high, error + low)
    return _renormalise(high, error + second_error)


def subtract(a: Pair, b: Pair) -> Pair:
    """Difference of two pairs."""
    return add(a, (-b[0], -b[1]))


def multiply(a: Pair, b: Pair) -> Pair:
    """Product of two pairs."""
    high, error = two_product(a[0], b[0])
    return _renormalise(high, error + (a[0] * b[1] + a[1] * b[0]))


def divide(a: Pair, b: Pair) -> Pair:
    """Quotient of two pairs, by two corrections of the plain quotient."""
    first = a[0] / b[0]
    rest = subtract(a, multiply(exact(first), b))
    second = rest[0] / b[0]
    rest = subtract(rest, multiply(exact(second), b))
    return add(_renormalise(first, second), exact(rest[0] / b[0]))


def square_root(a: Pair) -> Pair:
    """Square root of a pair that is not negative."""
    root = np.sqrt(a[0])
    safe = np.where(root == 0, 1.0, root)
    rest = subtract(a, two_product(safe, safe))[0]
    high, low = _renormalise(safe, rest / (2 * safe))
    return np.where(root == 0, 0.0, high), np.where(root == 0, 0.0, low)
