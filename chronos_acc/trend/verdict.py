# SPDX-License-Identifier: Apache-2.0
"""The verdict: a fixed sequence of questions at 5 %, as a table of rules.

The first rule of the main table that holds gives the code and the sentence; the clauses that hold after it add to it. Every number said
here stands in one of the tables of the analysis.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from . import words

LEVEL = 0.05
FEWEST_EVENTS = 8
FEWEST_INTERVALS = 5


@dataclass(frozen=True)
class FormTried:
    """A form of forgetting as the verdict sees it: estimate and interval in years, adequacy, the oldest listed share, unlisted events with
    interval."""

    form: str  # exponential or power
    estimate: float
    low: float | None
    high: float | None
    fit_p: float | None
    oldest_age: float
    oldest_share: float
    unlisted: float
    unlisted_low: float
    unlisted_high: float | None

    @property
    def adequate(self) -> bool:
        """The refitting bootstrap does not reject the form."""
        return self.fit_p is not None and self.fit_p >= LEVEL


@dataclass(frozen=True)
class Evidence:
    """What the rules look at. p1: laplace exact; p2: lewis_robinson by permutation; direction "speeding" or "slowing" (laplace's sign).

    doublings over the window with the wider 95 % interval; half_life in years with its interval (None: no forgetting needed, or unbounded);
    power: Laplace's at 1, 2 and 4 doublings for this n; smallest: fewest doublings that would show, None where none would.
    slope_p: log_uniform's upper tail for the slope. corrected: growth per year after correction for what lists missed independently, times
    window over ln 2.
    """

    n: int
    intervals: int  # closed and longer than zero
    span: float
    p1: float | None
    p2: float | None
    direction: str
    doublings: float | None = None
    doublings_low: float | None = None
    doublings_high: float | None = None
    half_life: float | None = None
    half_life_low: float | None = None
    half_life_high: float | None = None
    power: tuple[tuple[float, float], ...] = ()
    smallest: float | None = None
    forms: tuple[FormTried, ...] = ()
    age_exponent: float | None = None
    age_exponent_low: float | None = None
    age_exponent_high: float | None = None
    slope: float | None = None
    slope_p: float | None = None
    lists: int = 1
    corrected: float | None = None
    corrected_low: float | None = None
    corrected_high: float | None = None
    order: str = ""  # how the closed intervals run, beside the same in another order: speeding, slowing, none
    before: float = 0.0  # years from a given start to the first milestone
    after: float = 0.0  # years from the last milestone to the present

    @property
    def p1_shows(self) -> bool:
        """The steady rate is rejected."""
        return self.p1 is not None and self.p1 < LEVEL

    @property
    def p2_shows(self) -> bool:
        """Uneven spacing alone is rejected, in the direction of laplace: intervals whose order runs the other way do not bear it out."""
        return self.p2 is not None and self.p2 < LEVEL and not self.contrary

    @property
    def contrary(self) -> bool:
        """The order of the closed intervals runs against laplace, which then owes its sign to the ends of the window."""
        return {self.order, self.direction} == {"speeding", "slowing"}

    @property
    def kept_empty(self) -> float | None:
        """Years at the end of the window that laplace's direction owes something to: longer than a steady rate leaves empty at 5 %."""
        years = self.before if self.direction == "speeding" else self.after
        return years if years > 0 and self.chance_of_empty(years) < LEVEL else None

    def chance_of_empty(self, years: float) -> float:
        """That a steady rate leaves so long a stretch at one end of the window without any of the counted milestones."""
        return float(max(1.0 - years / self.span, 0.0) ** self.n) if self.span > 0 else 1.0

    @property
    def both(self) -> bool:
        """Both tests reject."""
        return self.p1_shows and self.p2_shows

    @property
    def speeding(self) -> bool:
        """Both reject, and the events crowd towards the present."""
        return self.both and self.direction == "speeding"

    @property
    def form(self) -> FormTried | None:
        """The form of forgetting to name: the first adequate one."""
        return next((f for f in self.forms if f.adequate), None)


@dataclass(frozen=True)
class Rule:
    """A row of the table: its number, its code (or the clause it adds), when it holds, and what it says."""

    number: int
    code: str
    clause: bool
    holds: Callable[[Evidence], bool]
    says: Callable[[Evidence], str]


@dataclass(frozen=True)
class Verdict:
    """code and clauses of the rules that held, the sentence, and the weakest null that the record does not rule out (None: all are ruled
    out)."""

    code: str
    clauses: tuple[str, ...]
    sentence: str
    weakest_null: str | None


# ------------------------------------------------------------------------------------------------- what the rules say


def _events(e: Evidence) -> str:
    return f"{e.n:,} counted milestone{'' if e.n == 1 else 's'}"


def _range(e: Evidence) -> str:
    if e.doublings_low is None or e.doublings_high is None:
        return "an unknown number of doublings"
    return f"{words.digits(e.doublings_low)} to {words.digits(e.doublings_high)} doublings"


def _too_few(e: Evidence) -> str:
    some = (
        f"the smallest growth that so few would show in four cases of five is {words.digits(e.smallest)} doublings over the window"
        if e.smallest is not None
        else "no growth, however large, would show in a list of this size"
    )
    have = f"{_events(e)} and {e.intervals} closed intervals longer than zero"
    return f"Too few to tell: {have}; at least {FEWEST_EVENTS} and {FEWEST_INTERVALS} are needed; {some}."


def _no_trend(e: Evidence) -> str:
    p1 = "" if e.p1 is None else f" (laplace {words.p(e.p1)})"
    return f"No trend shown: the {_events(e)} fit a steady rate{p1}; {_range(e)} over the window remain possible."


def _uneven(e: Evidence) -> str:
    p2 = f" (lewis_robinson {words.p(e.p2)})" if e.p2 is not None else ""
    p1 = f" (laplace {words.p(e.p1)})" if e.p1 is not None else ""
    if e.contrary and e.p2 is not None and e.p2 < LEVEL:
        said = f"but the order of the intervals does not bear it out: it runs the other way, towards {e.order}{p2}."
        return f"Uneven spacing alone gives this: evenly random milestones would not{p1}, {said}{_kept(e)}"
    return (
        f"Uneven spacing alone gives this: evenly random milestones would not{p1}, but the same intervals in another order often look as "
        f"trended{p2}.{_kept(e)}"
    )


def _kept(e: Evidence) -> str:
    """The stretch at an end of the window that no other order of the intervals moves."""
    if e.kept_empty is None:
        return ""
    chance = words.p(e.chance_of_empty(e.kept_empty))
    if e.direction == "speeding":
        return (
            f" The {words.years(e.kept_empty)} from the given start to the first milestone are empty ({chance} at a steady rate) and "
            "stay so in every order: the crowding comes from them, and only they would speak for speeding. Without --start the first milestone opens "
            "the window, and the rest is judged by itself."
        )
    return (
        f" The {words.years(e.kept_empty)} since the last milestone are empty ({chance} at a steady rate) and stay so in every order: the "
        "thinning comes from them. Look at the recent end: an earlier --present judges the rest by itself."
    )


def _slowing(e: Evidence) -> str:
    return (
        f"Slowing down{_both(e)}: the milestones thin out towards the present. Look at the recent end first: recognition takes time, and "
        "the latest years may not be listed yet."
    )


def _both(e: Evidence) -> str:
    return "" if e.p1 is None or e.p2 is None else f" (laplace {words.p(e.p1)}, lewis_robinson {words.p(e.p2)})"


def _forgetting(e: Evidence) -> str:
    f = e.form
    if f is None:
        return ""
    if f.form == "exponential":
        memory = f"half forgotten every {words.years(f.estimate)}"
    else:
        memory = f"half forgotten at an age of {words.years(f.estimate)} and ever more slowly after that"
    ends = f" (95 % {words.span(f.low, f.high)})"
    high = None if f.unlisted_high is None else words.count(f.unlisted_high)
    return (
        f"The milestones crowd towards the present{_both(e)}, but a steady rate explains that as well, if it is {memory}{ends}: then "
        f"{words.percent(f.oldest_share)} of the events as old as the oldest ({words.years(f.oldest_age)}) are listed, and "
        f"{words.count(f.unlisted)} are unlisted "
        f"(95 % {words.between(words.count(f.unlisted_low), high)}). A list alone cannot say which."
    )


def _log_uniform(e: Evidence) -> str:
    exponent = "" if e.age_exponent is None else f"age exponent {words.digits(e.age_exponent)}"
    if e.age_exponent_low is not None and e.age_exponent_high is not None:
        exponent += f", 95 % {words.digits(e.age_exponent_low)} to {words.digits(e.age_exponent_high)}; 1 is even picking, less is partial"
    said = f"Picking evenly per decade of age explains it as well, or more than enough{f' ({exponent})' if exponent else ''}"
    if e.slope is None or e.slope_p is None:
        return f"{said}."
    slope = f"a slope of {words.digits(e.slope)}"
    if e.slope_p >= LEVEL:
        return f"{said}; it gives {slope} or more by itself ({words.p(e.slope_p)})."
    return f"{said}, though {slope} is more than such picking by itself gives ({words.p(e.slope_p)})."


def _shape(e: Evidence) -> str:
    formula = {"exponential": "2^(−age/h)", "power": "1/(1 + age/s)"}
    tried = [f"{formula[f.form]} ({words.p(f.fit_p)})" for f in e.forms if f.fit_p is not None]
    ending = "neither suffices" if len(tried) > 1 else "it does not suffice"
    forms = f" Tried: a steady rate remembered as {words.listed(tried)}; {ending}." if tried else ""
    return f"Speeding up{_both(e)}, with a shape that simple forgetting does not give.{forms}"


def _completeness(e: Evidence) -> str:
    low, high = (None if v is None else words.digits(v) for v in (e.corrected_low, e.corrected_high))
    return (
        f"It survives correction for what the {e.lists} lists missed independently: {words.digits(e.corrected or 0.0)} doublings over the "
        f"window remain (95 % {words.between(low or '−∞', high)}); what all lists forgot alike stays unseen."
    )


def _tail(e: Evidence) -> str:
    """What every sentence carries: n, the growth in doublings with its interval, the half-life, and the power at this n."""
    parts = [f"n = {e.n:,}"]
    if e.doublings is not None:
        ends = (
            ""
            if e.doublings_low is None or e.doublings_high is None
            else f" (95 % {words.digits(e.doublings_low)} to {words.digits(e.doublings_high)})"
        )
        parts.append(f"growth {words.digits(e.doublings)} doublings over {words.years(e.span)}{ends}")
    if e.half_life is not None:
        parts.append(
            f"the same curve as a steady rate half forgotten every {words.years(e.half_life)} "
            f"(95 % {words.span(e.half_life_low, e.half_life_high)})"
        )
    elif e.doublings is not None:
        parts.append("no half-life of forgetting, since the rate does not grow")
    if e.power:
        sizes = words.listed([f"{d:g}" for d, _ in e.power])
        shares = words.listed([words.percent(s) for _, s in e.power])
        parts.append(f"laplace shows {sizes} doublings in a list of this size in {shares} of cases")
    text = "; ".join(parts)
    return text[0].upper() + text[1:] + "." if not text.startswith("n =") else text + "."


# ---------------------------------------------------------------------------------------------------------- the table

RULES: tuple[Rule, ...] = (
    Rule(0, "too_few", False, lambda e: e.n < FEWEST_EVENTS or e.intervals < FEWEST_INTERVALS, _too_few),
    Rule(1, "no_trend", False, lambda e: not e.p1_shows, _no_trend),
    Rule(2, "uneven", False, lambda e: e.p1_shows and not e.p2_shows, _uneven),
    Rule(3, "slowing", False, lambda e: e.both and e.direction == "slowing", _slowing),
    Rule(4, "forgetting", False, lambda e: e.speeding and e.form is not None, _forgetting),
    Rule(
        5,
        "log_uniform",
        True,
        lambda e: (
            e.speeding and ((e.age_exponent_low is not None and e.age_exponent_low < 1) or (e.slope_p is not None and e.slope_p >= LEVEL))
        ),
        _log_uniform,
    ),
    Rule(6, "shape", False, lambda e: e.speeding and e.form is None, _shape),
    Rule(
        7,
        "completeness",
        True,
        lambda e: e.speeding and e.lists >= 2 and e.corrected_low is not None and e.corrected_low > 0,
        _completeness,
    ),
)

SPEEDING = ("forgetting", "shape")  # the codes that clauses can follow


def judge(e: Evidence) -> Verdict:
    """Run the table: the first main rule that holds, then the clauses where it says speeding."""
    main = next(r for r in RULES if not r.clause and r.holds(e))
    clauses = tuple(r for r in RULES if r.clause and r.holds(e)) if main.code in SPEEDING else ()
    said = [main.says(e), *(r.says(e) for r in clauses), _tail(e)]
    return Verdict(main.code, tuple(r.code for r in clauses), " ".join(s for s in said if s), weakest_null(e))


def weakest_null(e: Evidence) -> str | None:
    """The first null that the record does not rule out at 5 %: steady (laplace), shuffled (lewis_robinson), recall_decay (adequate),
    log_uniform (slope).

    The last two explain speeding only; None where every one that applies is ruled out, or nothing could be tested.
    """
    if e.p1 is None:
        return None
    if e.p1 >= LEVEL:
        return "steady"
    if not e.p2_shows:
        return "shuffled"
    if e.direction == "speeding":
        if e.form is not None:
            return "recall_decay"
        if e.slope_p is not None and e.slope_p >= LEVEL:
            return "log_uniform"
    return None
