# SPDX-License-Identifier: Apache-2.0
"""Remarks on a list that was read: refused rows, and columns that speak of radiocarbon."""

from __future__ import annotations

from collections.abc import Mapping

from .ledger import Ledger
from .rows import Rows
from .table import Table

RADIOCARBON = r"(?i)(\b14[ -]?c\b|\bc[ -]?14\b|radiocarbon|rcybp|\buncal)"


def remarks_of(ledger: Ledger, rows: Rows, table: Table, columns: Mapping[str, int], refused: int) -> list[str]:
    """Sentences for ``notes``."""
    made = []
    if refused:
        made.append(
            f"{'1 row was' if refused == 1 else f'{refused:,} rows were'} refused and kept with the reason; see: chronos-acc rejects"
        )
    texts = [name for name in ("note", "category") if name in columns]
    if rows.has_rest:
        texts.append("rest")
    if texts:
        said = " OR ".join(f"regexp_matches({name}, '{RADIOCARBON}')" for name in texts)
        count = int(ledger.value(f"SELECT count(*) FROM list_rows WHERE {said}"))
        if count:
            made.append(
                f"{'1 row speaks' if count == 1 else f'{count:,} rows speak'} of radiocarbon (14C) in another column: "
                "make sure that the dates are calibrated; uncalibrated radiocarbon years are no calendar years"
            )
    return made
