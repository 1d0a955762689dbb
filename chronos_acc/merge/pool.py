# SPDX-License-Identifier: Apache-2.0
"""One dating for each milestone from its entries' datings, and how well they agree.

Rules: ``mixture`` (default: each dating a component, so two humps stay two humps), ``inverse_variance``, ``random_effects`` (DerSimonian
and Laird 1986, Control. Clin. Trials 7:177-188), ``paule_mandel`` (Paule and Mandel 1982, J. Res. NBS 87:377-385), ``preferred`` (one
list's dating where it has one, else the mixture). Agreement: Cochran's Q with its p, I-squared (Higgins and Thompson 2002, Stat. Med.
21:1539-1558) and the Birge ratio (Birge 1932, Phys. Rev. 40:207-227).
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
import numpy.typing as npt
from scipy.special import gammaincc, ndtr

from ..dating.dating import Z975
from ..errors import WrongUse
from .entries import Entries, Floats, Ints

if TYPE_CHECKING:
    import pandas as pd

Bools = npt.NDArray[np.bool_]

RULES = ("mixture", "inverse_variance", "random_effects", "paule_mandel", "preferred")
UNIFORM, NORMAL = 0, 1
DAY = 1 / 365.2425  # years; a dating narrower than this counts as this wide, so that no weight is infinite


@dataclass(frozen=True)
class Combined:
    """Several results for one quantity, combined: mean and its standard error, and how well the results agree.

    tau2 is the variance between results (0 for inverse_variance). Agreement is measured around the inverse-variance mean. With one result
    q, q_p, i2, h2 and birge are NaN.
    """

    mean: float
    std_error: float
    tau2: float
    q: float
    q_p: float
    i2: float
    h2: float
    birge: float

    @property
    def low(self) -> float:
        """Lower 95 % limit."""
        return self.mean - Z975 * self.std_error

    @property
    def high(self) -> float:
        """Upper 95 % limit."""
        return self.mean + Z975 * self.std_error


def combine(values: npt.ArrayLike, variances: npt.ArrayLike, rule: str = "inverse_variance") -> Combined:
    """Combine n results with known variances by inverse_variance, random_effects or paule_mandel. Raises WrongUse for what is no such
    input."""
    y, v = np.asarray(values, dtype=float), np.asarray(variances, dtype=float)
    if y.ndim != 1 or y.shape != v.shape or not len(y) or not np.isfinite(y).all() or not (np.isfinite(v) & (v > 0)).all():
        raise WrongUse("combine needs as many finite values as variances above zero, one at least")
    if rule not in ("inverse_variance", "random_effects", "paule_mandel"):
        raise WrongUse(f"rule {rule!r} is unknown here; use inverse_variance, random_effects or paule_mandel")
    owner = np.zeros(len(y), dtype=np.int64)
    agreement = _agreement(y, v, owner, 1)
    tau2 = _between(y, v, owner, 1, rule, agreement)
    w = 1 / (v + tau2[0])
    q = float(agreement.q[0])
    df = len(y) - 1
    return Combined(
        float((w * y).sum() / w.sum()), float(w.sum() ** -0.5), float(tau2[0]), q, float(agreement.q_p[0]), float(agreement.i2[0]),
        q / df if df else float("nan"), float(agreement.birge[0]),
    )  # fmt: skip


@dataclass(frozen=True)
class Pooled:
    """One row a milestone (m rows, by id) and the flat parts of its dating (p rows, by milestone, then list).

    id (m,) the milestone's smallest entry id; title; earliest, best, latest (m,) decimal years, best the median; unit (m,) the width dated
    to; sd (m,) of a normal dating, else 0; support (m,) independent lists that name it; entries (m,) how many; q, q_p, i2 (0 to 1), birge
    (m,), NaN with one entry; disjoint (m,) True where some two datings have no moment in common. Parts: owner (p,) milestone row; source
    (p,) list; weight (p,) summing to 1; kind (p,) 0 uniform, 1 normal; low, mode, high (p,); member (p,) position in Entries of the entry
    whose part it is.
    """

    id: Ints
    title: tuple[str, ...]
    earliest: Floats
    best: Floats
    latest: Floats
    unit: Floats
    sd: Floats
    support: Ints
    entries: Ints
    q: Floats
    q_p: Floats
    i2: Floats
    birge: Floats
    disjoint: Bools
    owner: Ints
    source: Ints
    weight: Floats
    kind: npt.NDArray[np.int8]
    low: Floats
    mode: Floats
    high: Floats
    member: Ints
    rule: str = "mixture"
    notes: tuple[str, ...] = ()

    def __len__(self) -> int:
        return len(self.id)

    def to_frame(self) -> pd.DataFrame:
        """One row a milestone."""
        import pandas as pd

        columns = ("id", "title", "earliest", "best", "latest", "unit", "sd", "support", "entries", "q", "q_p", "i2", "birge", "disjoint")
        values = {"milestone" if c == "id" else c: getattr(self, c) for c in columns}
        return pd.DataFrame({**values, "title": list(self.title)})


def pool(
    entries: Entries, milestone: Ints, rule: str = "mixture", prefer: str | None = None, derives: Mapping[str, str] | None = None
) -> Pooled:
    """Pool the datings of each milestone; ``milestone`` (k,) as in ``Linked``.

    ``prefer`` names a list: its titles name the milestones, and with rule "preferred" its datings date them. ``derives`` maps a list to
    the list it derives from: such lists count once in support. Raises WrongUse for an unknown rule or list.
    """
    if rule not in RULES:
        raise WrongUse(f"pooling rule {rule!r} is unknown; use one of {', '.join(RULES)}")
    if prefer is not None and prefer not in entries.sources:
        raise WrongUse(f"list {prefer!r} is unknown; the lists are {', '.join(entries.sources) or 'none'}")
    if rule == "preferred" and prefer is None:
        raise WrongUse("the pooling rule 'preferred' needs a list to prefer; name it with --prefer")
    member = np.lexsort((entries.id, entries.source, milestone)).astype(np.int64)
    ids, first, owner = np.unique(milestone[member], return_index=True, return_inverse=True)
    m = len(ids)
    owner = owner.reshape(-1).astype(np.int64)
    count = np.bincount(owner, minlength=m).astype(np.int64)
    source = entries.source[member]
    low, mode, high = (x[member].astype(float) for x in (entries.earliest, entries.best, entries.latest))
    kind = np.where(entries.normal[member], NORMAL, UNIFORM).astype(np.int8)
    width = np.maximum(high - low, DAY)
    variance = np.where(kind == NORMAL, (width / (2 * Z975)) ** 2, width**2 / 12)
    agreement = _agreement(mode, variance, owner, m)
    disjoint = _disjoint(low, high, owner, first, count)
    chosen = entries.sources.index(prefer) if prefer is not None else -1
    if rule in ("mixture", "preferred"):
        weight = np.where(disjoint[owner], 1.0, 1 / width)
        if rule == "preferred":
            has = np.bincount(owner, weights=(source == chosen).astype(float), minlength=m) > 0
            # the other lists stay as parts (they name the milestone) but carry the preferred dating
            low, mode, high, kind, weight = _as_preferred(low, mode, high, kind, weight, owner, source == chosen, has)
        weight = weight / np.bincount(owner, weights=weight, minlength=m)[owner]
    else:
        several = count[owner] > 1
        tau2 = _between(mode, variance, owner, m, rule, agreement)
        w = 1 / (variance + tau2[owner])
        total = np.bincount(owner, weights=w, minlength=m)
        centre = np.bincount(owner, weights=w * mode, minlength=m) / np.where(total > 0, total, 1)
        half = Z975 / np.sqrt(np.where(total > 0, total, 1))
        mode = np.where(several, centre[owner], mode)
        low, high = np.where(several, mode - half[owner], low), np.where(several, mode + half[owner], high)
        kind = np.where(several, NORMAL, kind).astype(np.int8)
        weight = 1.0 / count[owner]
    best, earliest, latest, unit, sd = summaries(owner, weight, kind, low, mode, high, m)
    return Pooled(
        id=ids.astype(np.int64), title=_titles(entries, member, first, count, chosen), earliest=earliest, best=best, latest=latest,
        unit=unit, sd=sd, support=_support(owner, source, list_groups(entries.sources, derives or {}), m), entries=count, q=agreement.q,
        q_p=agreement.q_p, i2=agreement.i2, birge=agreement.birge, disjoint=disjoint, owner=owner, source=source, weight=weight, kind=kind,
        low=low, mode=mode, high=high, member=member, rule=rule,
    )  # fmt: skip


def list_groups(sources: tuple[str, ...], derives: Mapping[str, str]) -> Ints:
    """(lists,) one number for lists that derive from one another or from a common list, named here or not."""
    root = {name: name for name in (*sources, *derives, *derives.values())}

    def top(name: str) -> str:
        while root[name] != name:
            name = root[name]
        return name

    for child, parent in derives.items():
        a, b = top(child), top(parent)
        if a != b:
            root[a] = b
    tops = [top(name) for name in sources]
    return np.array([tops.index(t) for t in tops], dtype=np.int64)


@dataclass(frozen=True)
class _Agreement:
    q: Floats
    q_p: Floats
    i2: Floats
    birge: Floats


def _agreement(y: Floats, v: Floats, owner: Ints, m: int) -> _Agreement:
    """Cochran's Q and its kin for each of m groups; NaN where a group has one result."""
    df = np.bincount(owner, minlength=m) - 1.0
    w = 1 / v
    total = np.bincount(owner, weights=w, minlength=m)
    mean = np.bincount(owner, weights=w * y, minlength=m) / np.where(total > 0, total, 1)
    q = np.bincount(owner, weights=w * (y - mean[owner]) ** 2, minlength=m)
    several = df > 0
    safe = np.where(several, df, 1.0)
    q_p = gammaincc(safe / 2, q / 2)
    i2 = np.where(q > safe, 1 - safe / np.where(q > 0, q, 1), 0.0)
    return _Agreement(*(np.where(several, x, np.nan) for x in (q, q_p, i2, np.sqrt(q / safe))))


def _between(y: Floats, v: Floats, owner: Ints, m: int, rule: str, agreement: _Agreement) -> Floats:
    """(m,) variance between results, never below 0."""
    if rule == "inverse_variance":
        return np.zeros(m)
    df = (np.bincount(owner, minlength=m) - 1.0).astype(np.float64)
    w = 1 / v
    total = np.bincount(owner, weights=w, minlength=m)
    squares = np.bincount(owner, weights=w**2, minlength=m)
    q = np.where(df > 0, agreement.q, 0.0)
    if rule == "random_effects":
        scale = total - squares / np.where(total > 0, total, 1)
        return np.where(df > 0, np.maximum(q - df, 0.0) / np.where(df > 0, np.maximum(scale, 1e-300), 1.0), 0.0)
    return _paule_mandel(y, v, owner, m, df)


def _paule_mandel(y: Floats, v: Floats, owner: Ints, m: int, df: Floats) -> Floats:
    """tau2 at which the generalised Q equals its degrees of freedom, by bisection in all groups at once (Q falls as tau2 grows)."""

    def excess(tau2: Floats) -> Floats:
        w = 1 / (v + tau2[owner])
        total = np.bincount(owner, weights=w, minlength=m)
        mean = np.bincount(owner, weights=w * y, minlength=m) / np.where(total > 0, total, 1)
        return np.bincount(owner, weights=w * (y - mean[owner]) ** 2, minlength=m) - df

    low = np.zeros(m)
    top, bottom = np.full(m, -np.inf), np.full(m, np.inf)
    np.maximum.at(top, owner, y)
    np.minimum.at(bottom, owner, y)
    high = np.where(df > 0, (top - bottom) ** 2 * np.maximum(df + 1, 1), 0.0)  # there every weighted square is below its share of df
    high = np.where(np.isfinite(high), high, 0.0)
    needed = excess(low) > 0
    for _ in range(200):
        middle = 0.5 * (low + high)
        above = excess(middle) > 0
        low, high = np.where(above, middle, low), np.where(above, high, middle)
    return np.where(needed & (df > 0), 0.5 * (low + high), 0.0)


def _disjoint(low: Floats, high: Floats, owner: Ints, first: Ints, count: Ints) -> Bools:
    """(m,) True where the datings of a milestone have no span in common, which on a line means that some two of them have none."""
    if not len(first):
        return np.zeros(0, dtype=bool)
    start, end = np.maximum.reduceat(low, first), np.minimum.reduceat(high, first)
    point = np.minimum.reduceat(high - low, first) <= 0  # a dating of no width may stand at another's very end
    return np.asarray((count > 1) & ((start > end) | ((start == end) & ~point)))


def _as_preferred(
    low: Floats, mode: Floats, high: Floats, kind: npt.NDArray[np.int8], weight: Floats, owner: Ints, chosen: Bools, has: Bools
) -> tuple[Floats, Floats, Floats, npt.NDArray[np.int8], Floats]:
    at = np.zeros(len(has), dtype=np.int64)
    at[owner[chosen][::-1]] = np.nonzero(chosen)[0][::-1]  # the first entry of the preferred list
    take = np.where(has[owner], at[owner], np.arange(len(owner)))
    return low[take], mode[take], high[take], kind[take], np.where(has[owner], 1.0, weight)


def summaries(
    owner: Ints, weight: Floats, kind: npt.NDArray[np.int8], low: Floats, mode: Floats, high: Floats, m: int
) -> tuple[Floats, Floats, Floats, Floats, Floats]:
    """best, earliest, latest, unit, sd (m,) from parts sorted by owner: the part's own where all are one, else quantiles of the mixture."""
    first = np.searchsorted(owner, np.arange(m))
    best, earliest, latest = mode[first].copy(), low[first].copy(), high[first].copy()
    unlike = (low != low[first][owner]) | (mode != mode[first][owner]) | (high != high[first][owner]) | (kind != kind[first][owner])
    mixed = np.bincount(owner, weights=unlike, minlength=m) > 0
    if mixed.any():
        part = mixed[owner]
        rank = (np.cumsum(mixed) - 1)[owner[part]]
        earliest[mixed], best[mixed], latest[mixed] = _quantiles(
            rank, weight[part], kind[part], low[part], mode[part], high[part], int(mixed.sum()), (0.025, 0.5, 0.975)
        )
    unit = latest - earliest
    normal = np.bincount(owner, weights=kind != NORMAL, minlength=m) == 0
    return best, earliest, latest, unit, np.where(normal, unit / (2 * Z975), 0.0)


def _quantiles(
    owner: Ints,
    weight: Floats,
    kind: npt.NDArray[np.int8],
    low: Floats,
    mode: Floats,
    high: Floats,
    m: int,
    probabilities: tuple[float, ...],
) -> list[Floats]:
    """Quantiles of m mixtures at once, by bisection as in ``record.mixture_points``."""
    wide = high - low
    uniform = kind == UNIFORM
    bottom, top = np.full(m, np.inf), np.full(m, -np.inf)
    np.minimum.at(bottom, owner, low - 3 * wide)
    np.maximum.at(top, owner, high + 3 * wide)
    below_sd, above_sd = (np.where(side > 0, side / Z975, 1.0) for side in (mode - low, high - mode))
    out = []
    for p in probabilities:
        lo, hi = bottom.copy(), top.copy()
        for _ in range(100):
            middle = 0.5 * (lo + hi)
            x = middle[owner]
            flat = np.where(wide > 0, np.clip((x - low) / np.where(wide > 0, wide, 1.0), 0.0, 1.0), (low <= x).astype(float))
            side = np.where(x < mode, mode - low, high - mode)
            bell = np.where(side > 0, ndtr((x - mode) / np.where(x < mode, below_sd, above_sd)), (x >= mode).astype(float))
            mass = np.bincount(owner, weights=weight * np.where(uniform, flat, bell), minlength=m)
            less = mass < p
            lo, hi = np.where(less, middle, lo), np.where(less, hi, middle)
        out.append(0.5 * (lo + hi))
    return out


def _support(owner: Ints, source: Ints, group: Ints, m: int) -> Ints:
    """(m,) groups of lists that name each milestone."""
    if not len(owner):
        return np.zeros(m, dtype=np.int64)
    named = np.unique(np.stack([owner, group[source]]), axis=1)
    return np.bincount(named[0], minlength=m).astype(np.int64)


def _titles(entries: Entries, member: Ints, first: Ints, count: Ints, chosen: int) -> tuple[str, ...]:
    """The preferred list's title, else the most central: the one most like the others."""
    out = []
    for start, size in zip(first, count, strict=True):
        group = member[start : start + size]
        mine = [i for i in group if entries.source[i] == chosen]
        out.append(entries.title[mine[0]] if mine else central([entries.title[i] for i in group]))
    return tuple(out)


def central(titles: list[str]) -> str:
    """The title most like the others by shared 3-grams of characters; the first of equals."""
    if len(titles) < 3 or len(set(titles)) == 1:
        return titles[0]
    grams = [_trigrams(t) for t in titles]
    sums = [sum(2 * len(g & h) / max(len(g) + len(h), 1) for h in grams) for g in grams]
    return titles[int(np.argmax(np.round(sums, 9)))]


def _trigrams(title: str) -> set[str]:
    text = f"  {' '.join(title.casefold().split())} "
    return {text[i : i + 3] for i in range(len(text) - 2)}
