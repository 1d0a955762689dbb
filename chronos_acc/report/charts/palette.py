# SPDX-License-Identifier: Apache-2.0
"""Colours, strokes and marks of printed figures.

Told apart by lightness and by form as well as by hue: hues follow the advice of Okabe and Ito (2008) for readers who see red and green
alike, and lightness falls in steps, so that a grey copy keeps the order. Nothing is said by colour alone.
"""

from __future__ import annotations

PAPER = "#ffffff"
INK = "#1c2230"  # data, text
QUIET = "#6b7280"  # axes, bars, rugs
SIGNAL = "#c2410c"  # what is still open, the tipping point
BANDS = ("#d9d3c3", "#b9c8d6")  # nulls, behind everything
LAWS = ("#0b5c8a", "#b8860b", "#7a3b69", "#3f7d5c")
STROKES: tuple[tuple[float, tuple[float, ...]], ...] = ((0, ()), (0, (5, 2)), (0, (1, 1.4)), (0, (7, 2, 1.5, 2)))
MARKS = ("o", "^", "s", "D")
HATCHES = ("", "////")
