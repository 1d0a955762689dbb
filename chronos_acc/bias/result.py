# SPDX-License-Identifier: Apache-2.0
"""The result of all checks: one table a check, and a summary page with one row a check."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from ..notebook import ShowsInNotebook
from .check import COLUMNS, Answer, Check, Row
from .growth import Growth
from .rows import LEVEL, number, p_words

if TYPE_CHECKING:
    import pandas as pd

SUMMARY_COLUMNS = (*COLUMNS, "question", "published", "published_p_value", "finding", "report")


@dataclass(frozen=True)
class Bias(ShowsInNotebook):
    """``answers`` by check, in order; ``published`` the growth of the record as it stands (per year); what made the result."""

    answers: Mapping[str, Answer]
    questions: Mapping[str, str]
    published: Growth
    seed: int
    replicates: int
    draws: int
    record_hash: str
    notes: tuple[str, ...] = ()

    def rows(self, name: str) -> list[dict[str, Any]]:
        """Rows of one table as plain dictionaries: the common columns first, then those of the check; None where not computed."""
        if name == "summary":
            return self._summary()
        found = self.answers[name].rows
        extra = list(dict.fromkeys(k for r in found for k in r.more))
        return [plain_row(r) | {k: plain(r.more.get(k)) for k in extra} for r in found]

    def to_dict(self) -> dict[str, Any]:
        """The JSON object: tables by check, then notes and what made it."""
        out: dict[str, Any] = {"summary": self._summary()}
        out.update((name, self.rows(name)) for name in self.answers)
        out["notes"] = [self.sentence, *self.notes] if self.answers else list(self.notes)
        out["made"] = self.made
        return out

    @property
    def made(self) -> dict[str, Any]:
        """What made the result: version, seed, draws, replicates, hash of the record."""
        from .. import __version__

        return {
            "command": "bias",
            "version": __version__,
            "seed": self.seed,
            "draws": self.draws,
            "replicates": self.replicates,
            "record": self.record_hash,
        }

    def to_frame(self, table: str = "summary") -> pd.DataFrame:
        """One table as a frame; columns stand even where there is no row."""
        import pandas as pd

        rows = self.rows(table)
        if rows:
            return pd.DataFrame(rows)
        return pd.DataFrame(columns=list(SUMMARY_COLUMNS if table == "summary" else COLUMNS))

    def tables(self) -> dict[str, pd.DataFrame]:
        """All tables by name, the summary first."""
        return {name: self.to_frame(name) for name in ("summary", *self.answers)}

    def _summary(self) -> list[dict[str, Any]]:
        return [self._line(name, answer) for name, answer in self.answers.items() if answer.rows]

    def _line(self, name: str, answer: Answer) -> dict[str, Any]:
        """One line of the summary page: the row that speaks for the check, and what it means."""
        shown = answer.shown or (answer.rows[answer.headline] if answer.headline is not None else None)
        if shown is None:  # no row has enough events to speak for the check
            base = plain_row(
                Row(name, "all rows", max(r.n for r in answer.rows), None, answer.rows[0].null, None, None, None, None, "too few")
            )
        else:
            base = plain_row(shown) | {"check": name}
        significant = self.published.p_value is not None and self.published.p_value < LEVEL
        finding = answer.summary if significant else f"nothing to overturn: no trend as published; {answer.summary}"
        return base | {
            "question": self.questions[name],
            "published": plain(self.published.estimate),
            "published_p_value": plain(self.published.p_value),
            "finding": finding,
            "report": answer.report,
        }

    @property
    def sentence(self) -> str:
        """The page in a sentence."""
        lines = self._summary()
        failing = [r["check"] for r in lines if r["stands"] in ("weaker", "no")]
        growth = f"growth as published is {number(self.published.estimate)} a year (p {p_words(self.published.p_value)})"
        if not (self.published.p_value is not None and self.published.p_value < LEVEL):
            return f"{growth}: nothing to overturn"
        return f"{growth}; it is weaker or gone under {', '.join(failing)}" if failing else f"{growth}; no check weakens it below half"


def plain_row(row: Row) -> dict[str, Any]:
    """The common columns."""
    return {name: plain(getattr(row, name)) for name in COLUMNS}


def plain(value: Any) -> Any:
    """Python's own types, None for what is not a finite number."""
    if hasattr(value, "item"):
        value = value.item()
    if isinstance(value, float) and not math.isfinite(value):
        return None
    return value


def questions(checks: tuple[Check, ...]) -> dict[str, str]:
    """Question of each check by name."""
    return {c.name: c.question for c in checks}
