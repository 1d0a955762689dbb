# SPDX-License-Identifier: Apache-2.0
"""The whole of trend for one record: tests, rate laws, age exponent, regressions, nulls, lists as studies, forgetting, completeness, and
the verdict."""

from __future__ import annotations

import math
from dataclasses import dataclass, field, fields
from typing import TYPE_CHECKING, Any

from ..errors import RecordRefused, WrongUse
from ..notebook import ShowsInNotebook
from ..progress import Tell, silent
from ..record import AFTER, Record, Window, after_note
from .age_exponent import ExponentRow, age_exponent
from .capture import Capture, against_forgetting, corrected_growth
from .forgetting import LN2, Tipping, tipping, wider
from .frames import frame, plain
from .null_model import Null
from .null_table import NullTable, null_table
from .nulls import LOG_UNIFORM, SHUFFLED, STEADY
from .power import DOUBLINGS, laplace_power, smallest_shown
from .rate_laws import LawsResult, fit_laws
from .regression_nulls import Beside, regression_nulls
from .regressions import LeverageRow, Regressions, regress
from .studies import Studies, lists_as_studies
from .trend_tests import TestsResult, run_tests
from .verdict import FEWEST_EVENTS, FEWEST_INTERVALS, Evidence, FormTried, Verdict, judge

if TYPE_CHECKING:
    import pandas as pd

SHOWN_LEVERAGE = 5  # intervals named in the document; the frame has all


@dataclass(frozen=True)
class Trend(ShowsInNotebook):
    """Everything ``analyse`` found. ``to_dict`` is the JSON document, ``tables`` the frames by name, in reading order."""

    record: Record
    window: Window
    tests: TestsResult
    laws: LawsResult
    exponents: tuple[ExponentRow, ...]
    regressions: Regressions
    nulls: NullTable
    regression_nulls: NullTable
    studies: Studies
    tipping: Tipping
    capture: Capture
    evidence: Evidence
    judged: Verdict
    made: dict[str, Any]
    next_event: Any = None
    notes: tuple[str, ...] = field(default=())

    @property
    def verdict(self) -> str:
        """The verdict in words."""
        return self.judged.sentence

    @property
    def verdict_code(self) -> str:
        """too_few, no_trend, uneven, slowing, forgetting or shape."""
        return self.judged.code

    @property
    def verdict_clauses(self) -> tuple[str, ...]:
        """Of log_uniform and completeness."""
        return self.judged.clauses

    @property
    def weakest_null(self) -> str | None:
        """The first null the record does not rule out."""
        return self.judged.weakest_null

    def _beside(self) -> Beside:
        return Beside(self.regressions.rows, self.nulls, self.regression_nulls)

    def facts(self) -> dict[str, Any]:
        """What was looked at: counts and the window, years decimal."""
        w = self.window
        return {
            "milestones": len(w.times),
            "n": w.n,
            "intervals": max(len(w.times) - 1, 0),
            "joined": w.joined,
            "start": w.start,
            "start_from": w.start_from,
            "present": w.present,
            "present_from": w.present_from,
            "outside": w.outside,
            "before": w.before,
            "after": w.after,
            "tied_with_start": w.tied_with_start,
            "closing": w.closing,
            "finest_unit": w.finest_unit,
            "lists": list(self.record.lists),
        }

    def headline(self) -> dict[str, Any]:
        """The numbers of the verdict's sentence."""
        e = self.evidence
        return {
            "p_laplace": e.p1,
            "p_lewis_robinson": e.p2,
            "direction": e.direction,
            "span": e.span,
            "doublings": e.doublings,
            "doublings_low": e.doublings_low,
            "doublings_high": e.doublings_high,
            "half_life": e.half_life,
            "half_life_low": e.half_life_low,
            "half_life_high": e.half_life_high,
            **{f"power_{d:g}": s for d, s in e.power},
            "smallest_doublings_shown": e.smallest,
            "corrected_doublings": e.corrected,
            "corrected_doublings_low": e.corrected_low,
            "corrected_doublings_high": e.corrected_high,
            "independent_lists": e.lists,
        }

    def to_dict(self) -> dict[str, Any]:
        """The document: native Python throughout, None where nothing was computed."""
        capture = {k: v for k, v in plain(_without_fits(self.capture)).items()}
        document = {
            "record": self.facts(),
            "tests": self.tests.rows,
            "rate_laws": self.laws.rows,
            "age_exponent": self.exponents,
            "regressions": self._beside().rows(),
            "leverage": self.regressions.leverage[:SHOWN_LEVERAGE],
            "nulls": self.nulls.rows,
            "regression_nulls": self.regression_nulls.rows,
            "lists": self.studies.rows,
            "lists_pooled": self.studies.pooled,
            "forgetting": self.tipping.forms,
            "completeness": capture,
            "headline": self.headline(),
            "verdict": self.verdict,
            "verdict_code": self.verdict_code,
            "verdict_clauses": list(self.verdict_clauses),
            "weakest_null": self.weakest_null,
            "notes": list(self.notes),
            "made": self.made,
        }
        if self.next_event is not None:
            document["next"] = self.next_event.rows
            document["track_record"] = self.next_event.track_record
        return {key: plain(value) for key, value in document.items()}

    def tables(self) -> dict[str, pd.DataFrame]:
        """Frames by name: unrounded, NaN or None where not computed."""
        import pandas as pd

        from .rate_laws import LawRow

        out = {
            "record": pd.DataFrame([{k: v for k, v in self.facts().items() if k != "lists"}]),
            "tests": self.tests.to_frame(),
            "rate_laws": frame(self.laws.rows, LawRow),
            "age_exponent": frame(self.exponents, ExponentRow),
            "regressions": self._beside().to_frame(),
            "leverage": frame(self.regressions.leverage, LeverageRow),
            "nulls": self.nulls.to_frame(),
            "regression_nulls": self.regression_nulls.to_frame(),
            "lists": self.studies.to_frame(),
            "lists_pooled": self.studies.pooled_frame(),
            "forgetting": self.tipping.to_frame(),
            "listed_shares": self.tipping.shares_frame(),
            "unlisted": self.tipping.bins_frame(),
            "completeness": self.capture.to_frame(),
            "completeness_bins": self.capture.bins_frame(),
            "headline": pd.DataFrame([self.headline()]),
        }
        if self.next_event is not None:
            out.update(self.next_event.tables())
        return out

    def to_frame(self, table: str = "tests") -> pd.DataFrame:
        """One of the tables."""
        return self.tables()[table]


def _without_fits(capture: Capture) -> dict[str, Any]:
    return {f.name: getattr(capture, f.name) for f in fields(capture) if f.name not in ("fit", "steady")}


def analyse(
    record: Record,
    *,
    seed: int = 1,
    draws: int = 2000,
    replicates: int = 1999,
    bootstrap: int = 499,
    exposure: Any = None,
    next_event: bool = False,
    half_life: float | None = None,
    scale: float | None = None,
    command: str = "trend",
    tell: Tell = silent,
) -> Trend:
    """Is it speeding up, and would the making of the list give that? Works on the milestones inside the record's window, on best dates.

    draws: drawn datings behind the sensitivity row; replicates: null records; bootstrap: refits behind the fit p-values. exposure turns
    time into operational time before anything else. half_life and scale (years) add recall_decay nulls that were not fitted. Raises
    RecordRefused below three milestones, or where all stand at the present.
    """
    late = after_note(record)  # in years, whatever time the analysis runs in
    if exposure is not None:
        from .exposure import operational

        record = operational(record, exposure)
    window = record.window
    if len(window.times) < 3:
        outside = f", {window.outside} more lie outside it" if window.outside else ""
        raise RecordRefused(
            f"{_milestones(len(window.times))} in the window{outside}; a trend needs at least 3. Choose more lists, an earlier --start "
            "or a later --present"
        )
    if bootstrap < 19 or replicates < 19:
        raise WrongUse(
            f"{min(bootstrap, replicates)} simulated records cannot judge at 5 %; give at least 19 replicates and 19 bootstrap refits"
        )
    if not window.span > 0:
        raise RecordRefused(f"all milestones stand at the present, {window.present:g}; choose a later --present")
    tell("tests", 0.0)
    tests = run_tests(window, seed=seed, replicates=replicates)
    tell("rate laws", 0.15)
    laws = fit_laws(window, seed=seed, replicates=bootstrap)
    exponents = tuple(age_exponent(window))
    tip = tipping(window, laws=laws, seed=seed)
    tell("regressions", 0.3)
    regressions = regress(window, record=record, draws=draws, seed=seed)
    tell("null models", 0.4)
    family = (STEADY, SHUFFLED, *_given(half_life, scale), *tip.nulls(), LOG_UNIFORM)
    nulls = null_table(record, family, seed=seed, replicates=replicates, tell=_part(tell, 0.4, 0.6))
    lines = regression_nulls(
        record, family, seed=seed, replicates=replicates, drawn=regressions.row(estimator="draws"), tell=_part(tell, 0.6, 0.75)
    )
    tell("overlap of the lists", 0.75)
    capture = corrected_growth(record, window)
    studies = lists_as_studies(record, seed=seed)
    evidence = evidence_of(window, tests, laws, exponents, nulls, tip, capture, seed)
    following = None
    if next_event:
        from .next_event import next_event as following_event

        following = following_event(window, seed=seed)
    from .. import __version__

    made = {
        "command": command,
        "version": __version__,
        "seed": seed,
        "draws": draws,
        "replicates": replicates,
        "bootstrap": bootstrap,
        "record": record.hash,
    }
    tell("done", 1.0)
    return Trend(
        record=record,
        window=window,
        tests=tests,
        laws=laws,
        exponents=exponents,
        regressions=regressions,
        nulls=nulls,
        regression_nulls=lines,
        studies=studies,
        tipping=tip,
        capture=capture,
        evidence=evidence,
        judged=judge(evidence),
        made=made,
        next_event=following,
        notes=_notes(
            record,
            window,
            *(tests, laws, regressions, nulls, lines, tip, capture, studies, following),
            late=late,
            told=against_forgetting(capture, tip),
        ),
    )


def _part(tell: Tell, first: float, last: float) -> Tell:
    return lambda what, share: tell(what, first + share * (last - first))


def _milestones(number: int) -> str:
    return f"{number} milestone{'' if number == 1 else 's'}"


def _given(half_life: float | None, scale: float | None) -> tuple[Null, ...]:
    from .nulls import recall_decay

    out = [] if half_life is None else [recall_decay(half_life=half_life)]
    return tuple(out if scale is None else [*out, recall_decay(scale=scale)])


def evidence_of(
    window: Window,
    tests: TestsResult,
    laws: LawsResult,
    exponents: tuple[ExponentRow, ...],
    nulls: NullTable,
    tip: Tipping,
    capture: Capture,
    seed: int,
) -> Evidence:
    laplace, lewis = tests.row("laplace"), tests.row("lewis_robinson")
    growth, low, high = wider(laws.row("log_linear"), "growth")
    turns = window.span / LN2
    intervals = int((window.intervals > 0).sum())
    enough = window.n >= FEWEST_EVENTS and intervals >= FEWEST_INTERVALS
    slope = nulls.row("log_uniform", "slope")
    exponent = exponents[0]
    exponential = tip.form("exponential")

    def doublings(value: float | None) -> float | None:
        return None if value is None else value * turns if abs(value * turns) > 1e-9 else 0.0

    return Evidence(
        n=window.n,
        intervals=intervals,
        span=window.span,
        p1=laplace.p_exact,
        p2=lewis.p_exact,
        direction=laplace.direction,
        doublings=doublings(growth),
        doublings_low=doublings(low),
        doublings_high=doublings(high),
        half_life=exponential.estimate,
        half_life_low=exponential.low,
        half_life_high=exponential.high,
        power=tuple((d, laplace_power(window.n, d, seed)) for d in DOUBLINGS) if window.n else (),
        smallest=None if enough else smallest_shown(window.n, seed),
        forms=tuple(
            FormTried(
                f.form,
                f.estimate,
                f.low,
                f.high,
                f.fit_p,
                f.shares[0].age,
                f.shares[0].share,
                f.unlisted or 0.0,
                f.unlisted_low or 0.0,
                f.unlisted_high,
            )
            for f in tip.forms
            if f.estimate is not None
        ),
        age_exponent=exponent.estimate,
        age_exponent_low=exponent.low,
        age_exponent_high=exponent.high,
        slope=None if slope is None else slope.observed,
        slope_p=None if slope is None else slope.p_value,
        lists=len(capture.lists),
        order=order_of(window),
        before=0.0 if window.opened_by_milestone or not len(window.times) else float(window.times[0] - window.start),
        after=float(window.present - window.times[-1]) if len(window.times) else 0.0,
        corrected=doublings(capture.growth),
        corrected_low=doublings(capture.low),
        corrected_high=doublings(capture.high),
    )


def order_of(window: Window) -> str:
    """How the closed intervals run: speeding where the milestones between the first and the last stand later, on average, than the same
    intervals do in random order, which put them half way."""
    first, last = window.present - window.times[0], window.present - window.times[-1]  # ages keep their digits near the present
    late = float((0.5 * (first + last) - window.ages).mean())
    return "none" if abs(late) <= 1e-12 * float(first - last) else "speeding" if late > 0 else "slowing"


def _of_the_window(window: Window) -> list[str]:
    """What a reader should know before taking doublings over the window, or tests of intervals, at their word."""
    notes = []
    closed = window.intervals
    if window.opened_by_milestone and len(closed) > 2 and closed[0] > window.span / 2:
        rest = math.ceil(window.times[1]) - 1  # a year before, so that the second milestone counts
        notes.append(
            f"the first interval takes {closed[0] / window.span:.0%} of the window, so doublings over the window hang on one milestone;"
            f" --start {rest} looks at the rest"
        )
    if len(closed) and 2 * int((closed == 0).sum()) > len(closed):
        notes.append(
            "more than half of the intervals are zero, dated too coarsely to part: tests of intervals lose power; read laplace and its exact p first"
        )
    return notes


def _notes(record: Record, window: Window, *parts: Any, late: str | None, told: str) -> tuple[str, ...]:
    """What a reader should know, once each: the record's own remarks, the window's, then every part's."""
    # whoever made the record may have said what lies after its present, of a present changed since
    notes = [n for n in record.notes if AFTER not in n]
    notes.extend([late] if late else [])
    if window.before and not any("before the start" in n for n in notes):
        notes.append(f"{_milestones(window.before)} before the start {window.start:g} left out; an earlier --start takes them in")
    if window.closing:
        notes.append("the milestone at the present closes the window and is not counted")
    if window.tied_with_start:
        notes.append(f"{window.tied_with_start} more in the instant of the start open the window with it and are not counted")
    if window.joined:
        notes.append(
            f"{window.joined} intervals of zero length are left out of the regressions on log intervals only (their milestones are joined)"
        )
    notes.extend(_of_the_window(window))
    for part in parts:
        notes.extend(getattr(part, "notes", ()) if part is not None else ())
    return tuple(dict.fromkeys([*notes, told] if told else notes))
