# SPDX-License-Identifier: Apache-2.0
"""Numbers as a person reads them, read back: what is printed must mean what was computed."""

from __future__ import annotations

import math

import pytest
from hypothesis import example, given
from hypothesis import strategies as st

from chronos_acc.report import numbers

SIZES = {"yr": 1.0, "kyr": 1e3, "Myr": 1e6, "Gyr": 1e9, "d": 1 / 365.2425, "ka": 1e3, "Ma": 1e6, "Ga": 1e9}
SUPERSCRIPT = str.maketrans("⁻⁰¹²³⁴⁵⁶⁷⁸⁹", "-0123456789")


def _value(text: str) -> float:
    text = text.replace(",", "").replace("−", "-")
    if "×10" in text:
        mantissa, _, power = text.partition("×10")
        return float(mantissa) * 10.0 ** int(power.translate(SUPERSCRIPT))
    return float(text)


@given(st.floats(1e-3, 1e11))
@example(9_999.6)
@example(10_000.0)
@example(300_000.0)
@example(999_999.9)
@example(1e6)
def test_spans_read_back(x):
    value, _, unit = numbers.span(x).rpartition(" ")
    assert _value(value) * SIZES[unit] == pytest.approx(x, rel=6e-3)


@given(st.floats(-1.4e10, 2500))
@example(-297_999.5)
@example(-12_999.0)
@example(-13_001.0)
@example(0.5)
@example(-0.5)
@example(1.0)
@example(999.99)
def test_dates_read_back(x):
    text = numbers.when(x)
    if text.endswith(" BCE"):
        assert 1 - _value(text[:-4]) == math.floor(x)
    elif text.endswith(" CE"):
        assert _value(text[:-3]) == math.floor(x)
    elif " " in text:
        value, unit = text.split()
        assert 2000 - _value(value) * SIZES[unit] == pytest.approx(x, rel=6e-4, abs=6e-4 * (2000 - x))
    else:
        assert _value(text) == pytest.approx(x, abs=0.051)


@given(st.floats(-1e15, 1e15).filter(lambda x: x == 0 or abs(x) > 1e-12), st.integers(2, 6))
def test_numbers_read_back(x, digits):
    assert _value(numbers.number(x, digits)) == pytest.approx(x, rel=6 * 10.0 ** -max(digits - 1, 1))


def test_small_print():
    assert numbers.p_value(0.0004) == "<.001" and numbers.p_value(0.0312) == ".031" and numbers.p_value(1.0) == "1"
    assert numbers.share(0.034) == "3.4 %" and numbers.share(0.4) == "40 %" and numbers.share(0.0) == "0 %"
    for form in (numbers.number, numbers.count, numbers.p_value, numbers.share, numbers.span, numbers.when, numbers.truth):
        assert form(None) == form(math.nan) == "–"
    assert numbers.number(math.inf) == numbers.span(math.inf) == "unbounded"
