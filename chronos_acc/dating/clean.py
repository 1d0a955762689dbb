# SPDX-License-Identifier: Apache-2.0
"""One spelling for the signs that keyboards, typesetters and spreadsheets vary."""

from __future__ import annotations

import re

_SIGNS = str.maketrans(
    {
        **dict.fromkeys("\u2212\u2010\u2011\ufe63\uff0d\u207b", "-"),  # minus, hyphens, superscript minus
        **dict.fromkeys("\u2012\u2014\u2015\u2013\u2e3a", "–"),  # dashes
        **dict.fromkeys("\u00a0\u2000\u2001\u2002\u2003\u2004\u2005\u2006\u2007\u2008\u2009\u200a\u202f\u205f\u3000\t\n\r\f\v", " "),
        **dict.fromkeys("\u200b\u200c\u200d\u2060\ufeff\u00ad\u200e\u200f", ""),  # nothing to see
        **dict.fromkeys("\u2018\u2019\u02bc\u2032\u00b4`", "'"),
        **dict.fromkeys("\u223c\u2248\u2243\u02dc\uff5e", "~"),
        **dict.fromkeys("\u2215\u2044\uff0f", "/"),
        **dict.fromkeys("\u22c5\u00b7\u2219\u2022", "·"),
        "\u2a09": "×",
        "\u2715": "×",
        "\u2264": "<=",
        "\u2265": ">=",
        "\u2a7d": "<=",
        "\u2a7e": ">=",
        "\u2026": "...",
        "\u03c2": "σ",
        "\u01a9": "σ",
        "\u03a3": "σ",
        **{chr(0xFF10 + digit): str(digit) for digit in range(10)},
    }
)
_SUPERSCRIPTS = str.maketrans("⁰¹²³⁴⁵⁶⁷⁸⁹", "0123456789")
_RAISED = re.compile("[⁰¹²³⁴⁵⁶⁷⁸⁹]+")
_LEAD = re.compile(r"(?:in the year|in|on|the year|year|dated|dated to)\s+(?=\S)", re.IGNORECASE)


def clean(text: str) -> str:
    """Dashes, minus signs, spaces, quotes and superscripts in one spelling each; no space at the ends or doubled."""
    if not text.isascii():
        if _RAISED.search(text):  # 10⁹ is a power, ¹⁴C is not
            text = _RAISED.sub(
                lambda found: ("^" if found.start() and text[found.start() - 1].isdigit() else "") + found[0].translate(_SUPERSCRIPTS), text
            )
        text = text.translate(_SIGNS)
        if text[:1] == "–" and text[1:2].isdigit():  # a dash that opens a text can only be a sign
            text = "-" + text[1:]
    text = " ".join(text.split()).rstrip(" ,;")
    if text[-1:] == "." and text[-2:-1].isdigit():
        text = text[:-1]  # a full stop behind a number ends a sentence
    lead = _LEAD.match(text) if text[:1] in "iodtyIODTY" else None
    return text[lead.end() :] if lead else text
