# SPDX-License-Identifier: Apache-2.0
"""CSV: any common delimiter, told by the header; the comma is tried first."""

from __future__ import annotations

from functools import partial

from .. import delimited
from ..table import Format

FORMAT = Format(
    "csv", (".csv", ".txt"), "text with a comma, semicolon, tab or bar between cells (RFC 4180)", partial(delimited.read, first=",")
)
