# SPDX-License-Identifier: Apache-2.0
"""What a grid found: a row a combination, shares question by question with the joint test, the extremes in words, and the
variance by choice.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from functools import cached_property
from typing import TYPE_CHECKING, Any

import numpy as np
import numpy.typing as npt

from ...notebook import ShowsInNotebook
from ..result import plain
from .choices import ARBITRARY, BY_NAME, CHOICES, Choices, Option
from .variance import shares
from .variants import Combination, question_of, words

if TYPE_CHECKING:
    import pandas as pd

Floats = npt.NDArray[np.float64]
Z95 = 1.959963984540054
ESTIMANDS = {"log10_interval": "slope of log10 interval", "rate": "growth per year"}
EXTREMES = 3


@dataclass(frozen=True)
class Line:
    """One combination. n: intervals or counted events; estimate: slope or growth per year, comparable within one response,
    predictor and estimator only; z on best dates; median and 95 % range of both over drawn dates; reason: why it could not be
    run, or empty.
    """

    number: int
    options: Mapping[str, Option | None]
    own: bool
    n: int | None
    estimate: float | None
    z: float | None
    draws_estimate: float | None
    draws_low: float | None
    draws_high: float | None
    draws_z: float | None
    draws_speeding: float | None
    reason: str

    @classmethod
    def invalid(cls, c: Combination, reason: str) -> Line:
        """A combination that could not be run."""
        return cls(c.number, c.options, c.own, None, None, None, None, None, None, None, None, reason)

    @classmethod
    def found(cls, c: Combination, n: int, estimate: float, z: float, drawn: Floats, drawn_z: Floats) -> Line:
        """A combination with its values over draws."""
        good = np.isfinite(drawn)
        low = median = high = middle = share = None
        if good.any():
            low, median, high = (float(q) for q in np.quantile(drawn[good], (0.025, 0.5, 0.975)))
            middle, share = float(np.median(drawn_z[good])), float((drawn_z[good] >= Z95).mean())
        return cls(c.number, c.options, c.own, n, estimate, z, median, low, high, middle, share, "")

    def row(self) -> dict[str, Any]:
        """As a row of the table of combinations."""
        response = str(self.options["response"])
        return {
            "combination": self.number,
            **{c.name: self.options[c.name] for c in CHOICES},
            "own": self.own,
            "valid": not self.reason,
            "n": self.n,
            "estimand": ESTIMANDS[response],
            "estimate": plain(self.estimate),
            "z": plain(self.z),
            "draws_estimate": plain(self.draws_estimate),
            "draws_low": plain(self.draws_low),
            "draws_high": plain(self.draws_high),
            "draws_z": plain(self.draws_z),
            "draws_speeding": plain(self.draws_speeding),
            "reason": self.reason or None,
        }


@dataclass(frozen=True)
class Grid(ShowsInNotebook):
    """``lines`` in order of number; ``z_joint`` (B, combinations) z of every combination on each null record, None without the
    joint test; ``declared`` how many combinations the choices make.
    """

    lines: tuple[Line, ...]
    z_joint: Floats | None
    null: str
    joint: int
    options: Mapping[str, tuple[Option, ...]]
    choices: Choices
    declared: int
    seed: int
    draws: int
    record_hash: str
    notes: tuple[str, ...] = ()

    @cached_property
    def _z(self) -> Floats:
        return np.array([np.nan if x.z is None else x.z for x in self.lines], dtype=float)

    def rows(self, table: str) -> list[dict[str, Any]]:
        """Rows of a table: summary, combinations, extremes, variance, choices, invalid."""
        return list(getattr(self, f"_{table}")())

    def to_dict(self) -> dict[str, Any]:
        """The JSON object: tables, notes, and what made it."""
        out: dict[str, Any] = {name: self.rows(name) for name in TABLES}
        out["notes"] = [self.sentence, *self.notes]
        out["made"] = self.made
        return out

    @property
    def made(self) -> dict[str, Any]:
        """What made the result: version, seed, draws, null records, hashes of the record and of the choices."""
        from ... import __version__

        return {
            "command": "grid",
            "version": __version__,
            "seed": self.seed,
            "draws": self.draws,
            "joint": self.joint,
            "null": self.null,
            "record": self.record_hash,
            "choices": self.choices.origin,
            "choices_hash": self.choices.hash,
        }

    def to_frame(self, table: str = "combinations") -> pd.DataFrame:
        """One table; by default every combination a row."""
        import pandas as pd

        return pd.DataFrame(self.rows(table), columns=None if self.rows(table) else list(_EMPTY[table]))

    def tables(self) -> dict[str, pd.DataFrame]:
        """All tables by name, the summary first."""
        return {name: self.to_frame(name) for name in TABLES}

    @property
    def sentence(self) -> str:
        """The first question of the user's own in a sentence."""
        rows = [r for r in self._summary() if r["valid"]]
        if not rows:
            return "no combination could be run"
        r = next((x for x in rows if x["own"]), rows[0])
        text = (
            f"of {r['valid']} combinations of arbitrary choices that ask the same question, "
            f"{_percent(r['share_speeding'])} find speeding and "
            f"{_percent(r['share_slowing'])} slowing; median z {r['median_z']:.2f}"
        )
        if r["p_share"] is not None:
            text += f"; {self.null} records give as large a significant share with p = {r['p_share']:.2g}"
        return text

    def _summary(self) -> list[dict[str, Any]]:
        """A row a question: shares over its arbitrary choices."""
        groups: dict[tuple[Option | None, ...], list[int]] = {}
        for i, line in enumerate(self.lines):
            groups.setdefault(question_of(line.options), []).append(i)
        return [self._question(np.array(members)) for members in groups.values()]

    def _question(self, members: npt.NDArray[np.int64]) -> dict[str, Any]:
        first = self.lines[int(members[0])]
        head: dict[str, Any] = {c.name: first.options[c.name] for c in CHOICES if c.group != ARBITRARY}
        z = self._z[members]
        good = np.isfinite(z)
        own = next((int(i) for i in members if self.lines[int(i)].own), None)
        head.update(own=own is not None, combinations=len(members), valid=int(good.sum()))
        names = (
            "share_speeding",
            "share_slowing",
            "share_significant",
            "share_opposite",
            "median_z",
            "least_z",
            "greatest_z",
            "own_z",
            "own_place",
            "p_share",
            "p_median_z",
        )
        if not good.any():
            return head | dict.fromkeys(names)
        z = z[good]
        middle = float(np.median(z))
        significant = float((np.abs(z) >= Z95).mean())
        own_z = None if own is None else plain(float(self._z[own]))
        p_share, p_median = self._joint_p(members[good], significant, middle)
        values = (
            float((z >= Z95).mean()),
            float((z <= -Z95).mean()),
            significant,
            float((z * middle < 0).mean()),
            middle,
            float(z.min()),
            float(z.max()),
            own_z,
            None if own_z is None else float((z < own_z).mean() + 0.5 * (z == own_z).mean()),
            p_share,
            p_median,
        )
        return head | dict(zip(names, values, strict=True))

    def _joint_p(self, members: npt.NDArray[np.int64], significant: float, middle: float) -> tuple[float | None, float | None]:
        """p of the share significant (upper tail) and of the median z (doubled smaller tail) over null records."""
        if self.z_joint is None or not self.joint:
            return None, None
        z = self.z_joint[:, members]
        z = z[np.isfinite(z).any(axis=1)]
        if not len(z):
            return None, None
        known = np.isfinite(z)
        share = (np.abs(np.where(known, z, 0.0)) >= Z95).sum(axis=1) / known.sum(axis=1)
        median = np.nanmedian(z, axis=1)
        upper = (1 + int((share >= significant - 1e-12).sum())) / (len(z) + 1)
        tail = min(int((median >= middle).sum()), int((median <= middle).sum()))
        return upper, min(1.0, 2.0 * (1 + tail) / (len(z) + 1))

    def _combinations(self) -> list[dict[str, Any]]:
        return [x.row() for x in self.lines]

    def _extremes(self) -> list[dict[str, Any]]:
        """The combinations with the greatest and least z of each response, spelled out, and the user's own."""
        out = []
        for response in dict.fromkeys(str(x.options["response"]) for x in self.lines):
            mine = [i for i, x in enumerate(self.lines) if x.options["response"] == response and np.isfinite(self._z[i])]
            ranked = sorted(mine, key=lambda i: (-self._z[i], i))
            picked = [("greatest", i) for i in ranked[:EXTREMES]] + [
                ("least", i) for i in ranked[-EXTREMES:][::-1] if i not in ranked[:EXTREMES]
            ]
            picked += [("own", i) for i in mine if self.lines[i].own]
            out += [
                {
                    "response": response,
                    "extreme": name,
                    "z": float(self._z[i]),
                    "estimate": plain(self.lines[i].estimate),
                    "n": self.lines[i].n,
                    "combination": self.lines[i].number,
                    "in_words": words(self.lines[i].options),
                }
                for name, i in picked
            ]
        return out

    def _variance(self) -> list[dict[str, Any]]:
        """Shares of the variance of z, response by response."""
        out = []
        for response in dict.fromkeys(str(x.options["response"]) for x in self.lines):
            mine = [i for i, x in enumerate(self.lines) if x.options["response"] == response and np.isfinite(self._z[i])]
            levels = {}
            for c in CHOICES:
                if c.name != "response" and response in c.responses:
                    known = list(dict.fromkeys(self.lines[i].options[c.name] for i in mine))
                    levels[c.name] = np.array([known.index(self.lines[i].options[c.name]) for i in mine], dtype=np.int64)
            for s in shares(levels, self._z[mine]) if mine else ():
                out.append(
                    {
                        "response": response,
                        "choice": s.choice,
                        "group": BY_NAME[s.choice].group,
                        "first_order": s.first_order,
                        "total": s.total,
                        "method": s.method,
                    }
                )
        return out

    def _choices(self) -> list[dict[str, Any]]:
        """What was chosen from, as declared for this record."""
        own = next((x.options for x in self.lines if x.own), {})
        return [
            {
                "choice": c.name,
                "group": c.group,
                "options": ", ".join(f"{o:g}" if isinstance(o, float) else str(o) for o in self.options[c.name]),
                "own": own.get(c.name),
                "meaning": c.meaning,
                "origin": self.choices.origin,
                "hash": self.choices.hash,
            }
            for c in CHOICES
        ]

    def _invalid(self) -> list[dict[str, Any]]:
        """Combinations that could not be run, counted by reason and by what they ask."""
        counts: dict[tuple[str, str], int] = {}
        for x in self.lines:
            if x.reason:
                asked = words({c.name: x.options[c.name] for c in CHOICES if c.group != ARBITRARY})
                counts[asked, x.reason] = counts.get((asked, x.reason), 0) + 1
        return [{"question": asked, "reason": reason, "combinations": n} for (asked, reason), n in counts.items()]


TABLES = ("summary", "combinations", "extremes", "variance", "choices", "invalid")
_EMPTY = {
    "summary": ("response",),
    "combinations": ("combination",),
    "extremes": ("response", "extreme", "z", "estimate", "n", "combination", "in_words"),
    "variance": ("response", "choice", "group", "first_order", "total", "method"),
    "choices": ("choice",),
    "invalid": ("question", "reason", "combinations"),
}


def _percent(share: float) -> str:
    return f"{100 * share:.0f} %" if share >= 0.01 or share == 0 else f"{100 * share:.1f} %"
