# SPDX-License-Identifier: Apache-2.0
"""Record: what every analysis takes. Milestones as mixtures of datings, the lists that name them, and the window they are seen in."""

from __future__ import annotations

import hashlib
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, field, replace
from functools import cached_property

import numpy as np
import numpy.typing as npt

from .errors import RecordRefused, WrongUse
from .mixture import Mixture, summary_of_parts

Floats = npt.NDArray[np.float64]
Ints = npt.NDArray[np.int64]
Bools = npt.NDArray[np.bool_]

CHUNK_CELLS = 4_000_000  # draws are made in chunks of about this many cells, so memory does not grow with their number


@dataclass(frozen=True)
class Record:
    """m milestones, p parts (one entry's dating each, the components of the mixtures), k lists.

    Milestones: id (m,) stable, title m strings, best (m,) median of the pooled dating, earliest and latest (m,) its bounds (the entry's own
    bounds for one entry, the mixture's 2.5 and 97.5 % points for several), unit (m,) the width to which it is dated in years, sd (m,) of
    a normal dating, else 0. Parts: owner (p,) milestone position (sorted), source (p,) list position, weight (p,) summing to 1 in a milestone, kind (p,)
    UNIFORM or NORMAL, low, mode, high (p,) its bounds and best. Lists: lists k names, compiled (k,) years or NaN, group (k,) equal for lists
    that derive from one another, mentions (m, k). Attributes: category m strings or None, importance (m,) or NaN, level and parent m strings or None.
    orders: pairs of positions (i, j) where i is known to precede j. present and start in decimal years; start None opens at the first milestone.
    """

    id: Ints
    title: tuple[str, ...]
    best: Floats
    earliest: Floats
    latest: Floats
    unit: Floats
    sd: Floats
    owner: Ints
    source: Ints
    weight: Floats
    kind: npt.NDArray[np.int8]
    low: Floats
    mode: Floats
    high: Floats
    lists: tuple[str, ...]
    compiled: Floats
    group: Ints
    mentions: Bools
    category: tuple[str | None, ...]
    importance: Floats
    level: tuple[str | None, ...]
    parent: tuple[str | None, ...]
    present: float
    present_from: str = "given"
    start: float | None = None
    orders: tuple[tuple[int, int], ...] = ()
    notes: tuple[str, ...] = field(default=())

    def __len__(self) -> int:
        return len(self.id)

    @cached_property
    def support(self) -> Ints:
        """(m,) independent lists that name each milestone: lists with a common ancestor count once."""
        return _support(self.mentions, self.group)

    @cached_property
    def hash(self) -> str:
        """Sixteen hexadecimal digits that stand for everything an analysis sees of this record."""
        digest = hashlib.sha256()
        for array in (self.id, self.best, self.owner, self.source, self.weight, self.kind, self.low, self.mode, self.high, self.mentions, self.importance):
            digest.update(np.ascontiguousarray(array).tobytes())
        digest.update(repr((self.title, self.lists, self.category, self.present, self.start, self.orders)).encode())
        return digest.hexdigest()[:16]

    @cached_property
    def window(self) -> Window:
        """The milestones inside the window, on best dates."""
        return _window(self)

    @classmethod
    def from_dates(
        cls,
        dates: Sequence[float] | Floats,
        *,
        present: float,
        start: float | None = None,
        unit: float | Sequence[float] | Floats = 0.0,
        titles: Sequence[str] | None = None,
        mentions: npt.ArrayLike | None = None,
        lists: Sequence[str] | None = None,
        category: Sequence[str | None] | None = None,
        importance: Sequence[float] | Floats | None = None,
    ) -> Record:
        """A record of plain dates in decimal years, each uniform over ``unit`` years around its date; one list unless mentions (m, k) are given."""
        best = np.asarray(dates, dtype=float)
        if best.ndim != 1 or not np.isfinite(best).all():
            raise WrongUse("dates must be one row of finite decimal years")
        m = len(best)
        half = np.broadcast_to(np.asarray(unit, dtype=float), (m,)) / 2
        named = np.ones((m, 1), bool) if mentions is None else np.asarray(mentions, dtype=bool)
        names = tuple(lists) if lists is not None else tuple(f"list {i + 1}" for i in range(named.shape[1]))
        if named.shape != (m, len(names)) or not named.any(axis=1).all():
            raise WrongUse(f"mentions must be {m} rows by {len(names)} lists, every milestone named by one list at least")
        owner, source = np.nonzero(named)
        return cls(
            id=np.arange(1, m + 1, dtype=np.int64),
            title=tuple(titles) if titles is not None else tuple(f"milestone {i + 1}" for i in range(m)),
            best=best,
            earliest=best - half,
            latest=best + half,
            unit=2 * half,
            sd=np.zeros(m),
            owner=owner.astype(np.int64),
            source=source.astype(np.int64),
            weight=1.0 / named.sum(axis=1)[owner],
            kind=np.zeros(len(owner), np.int8),
            low=(best - half)[owner],
            mode=best[owner],
            high=(best + half)[owner],
            lists=names,
            compiled=np.full(len(names), np.nan),
            group=np.arange(len(names), dtype=np.int64),
            mentions=named,
            category=tuple(category) if category is not None else (None,) * m,
            importance=np.full(m, np.nan) if importance is None else np.asarray(importance, dtype=float),
            level=(None,) * m,
            parent=(None,) * m,
            present=float(present),
            start=None if start is None else float(start),
        )

    def only(
        self,
        *,
        sources: Sequence[str] | None = None,
        min_support: int | None = None,
        category: str | None = None,
        min_importance: float | None = None,
        keep: Bools | None = None,
        present: float | None = None,
        start: float | None = None,
    ) -> Record:
        """The same record with fewer lists or milestones; needs no database.

        Leaving a list out drops its parts and the milestones that nobody else names; the pooled dates of the rest follow from the parts that stay. ``keep`` (m,)
        picks milestones. Raises WrongUse for a list or category that the record does not have.
        """
        record = self
        if sources is not None:
            record = _with_lists(record, sources)
        chosen = np.ones(len(record), bool)
        if keep is not None:
            if sources is not None:
                raise WrongUse("keep and sources do not go together: choose the lists first")
            chosen &= keep
        if min_support is not None:
            chosen &= record.support >= min_support
        if category is not None:
            known = sorted({c for c in record.category if c is not None})
            if category not in known:
                raise WrongUse(f"category {category!r} is not in the record; it has {', '.join(known) or 'none'}")
            chosen &= np.array([c == category for c in record.category], dtype=bool)
        if min_importance is not None:
            with np.errstate(invalid="ignore"):
                chosen &= record.importance >= min_importance
        if not chosen.all():
            record = _with_milestones(record, chosen)
        changes: dict[str, object] = {}
        if present is not None:
            changes.update(present=float(present), present_from="given")
        if start is not None:
            changes.update(start=float(start))
        return replace(record, **changes) if changes else record  # type: ignore[arg-type]

    def with_dates(self, best: Floats) -> Record:
        """The same milestones at other best dates, each dating moved along with its best date."""
        shift = np.asarray(best, dtype=float) - self.best
        part = shift[self.owner]
        return replace(
            self, best=self.best + shift, earliest=self.earliest + shift, latest=self.latest + shift,
            low=self.low + part, mode=self.mode + part, high=self.high + part,
        )  # fmt: skip

    def draws(self, count: int, seed: int, chunk: int | None = None) -> Iterator[Floats]:
        """Dates drawn from the datings: arrays (about ``chunk``, m), ``count`` rows in all, milestones in the record's order.

        One uniform per milestone and draw, keyed by the milestone's id, so that variants of a record share them. Nothing is drawn after the
        present; known orders hold in every row. Same seed, same numbers, whatever the chunk (where known orders make rows be drawn again, for the same chunk).
        """
        m = len(self)
        rows = chunk or max(1, min(count, CHUNK_CELLS // max(m, 1)))
        streams = [np.random.Generator(np.random.Philox(key=[seed & (2**64 - 1), int(i)])) for i in self.id]
        mixtures = [self._mixture(j) for j in range(m)]
        groups = _order_groups(self.orders)
        done = 0
        while done < count:
            size = min(rows, count - done)
            columns = np.empty((m, size))
            for j in range(m):
                columns[j] = mixtures[j].quantile(streams[j].random(size))
            for members, pairs in groups:
                _respect(columns, members, pairs, mixtures, streams, self)
            done += size
            yield np.ascontiguousarray(columns.T)

    def _mixture(self, j: int) -> Mixture:
        first, last = np.searchsorted(self.owner, [j, j + 1])
        part = slice(int(first), int(last))
        return Mixture.of(self.weight[part], self.kind[part], self.low[part], self.mode[part], self.high[part], self.present)

    def all_draws(self, count: int, seed: int) -> Floats:
        """(count, m) dates at once; for small counts. See ``draws``."""
        return np.concatenate(list(self.draws(count, seed))) if count else np.empty((0, len(self)))


AFTER = "after the present"


def after_note(record: Record) -> str | None:
    """What lies after the present, and the option that would take it in, in a sentence; None where nothing does."""
    late = record.best[record.best > record.present]
    if not len(late):
        return None
    lie, are, them = ("milestones lie", "are", "them") if len(late) > 1 else ("milestone lies", "is", "it")
    value = np.floor(float(late.max())) + 1
    return f"{len(late)} {lie} {AFTER} {record.present:.10g} ({record.present_from}) and {are} left out; --present {value:.0f} takes {them} in"


@dataclass(frozen=True)
class Window:
    """The milestones an analysis sees, in order of best date (ties by id).

    index (w,) positions in the record; times (w,) best dates, all in [start, present]; ``opening`` how many of them stand at the start and open
    the window, ``closing`` how many stand exactly at the present and close it: neither is counted. before and after: milestones left outside.
    unit (w,): the width in years to which each is dated, within which tests and laws spread equal dates.
    """

    index: Ints
    times: Floats
    start: float
    start_from: str  # "given" or "first milestone"
    present: float
    present_from: str
    opening: int
    closing: int
    before: int
    after: int
    finest_unit: float
    unit: Floats = field(default_factory=lambda: np.empty(0))  # (w,) widths to which they are dated; empty where not known

    @property
    def n(self) -> int:
        """Counted events."""
        return len(self.times) - self.opening - self.closing

    @property
    def span(self) -> float:
        """Length of the window in years."""
        return self.present - self.start

    @property
    def opened_by_milestone(self) -> bool:
        """True where the first milestone opens the window, False where a start was given."""
        return self.start_from == "first milestone"

    @property
    def tied_with_start(self) -> int:
        """Milestones in the very instant of the start, beside the one that opens the window."""
        return self.opening - (1 if self.opened_by_milestone else 0)

    @property
    def counted(self) -> Floats:
        """(n,) dates of the counted events, in order."""
        return self.times[self.opening : len(self.times) - self.closing]

    @property
    def ages(self) -> Floats:
        """(w,) present minus date."""
        return self.present - self.times

    @property
    def intervals(self) -> Floats:
        """(w - 1,) years from each milestone to the next, never negative; the open one is not among them."""
        return np.diff(self.times)

    @property
    def joined(self) -> int:
        """Milestones that share their best date with the one before, joined for regressions on log intervals only."""
        return int((self.intervals == 0).sum())

    @property
    def outside(self) -> int:
        """Milestones before a given start or after the present."""
        return self.before + self.after


def _support(mentions: Bools, group: Ints) -> Ints:
    labels = np.unique(group)
    return np.asarray(sum(mentions[:, group == g].any(axis=1).astype(np.int64) for g in labels), dtype=np.int64)


def _with_lists(record: Record, sources: Sequence[str]) -> Record:
    unknown = [s for s in sources if s not in record.lists]
    if unknown:
        raise WrongUse(f"list {unknown[0]!r} is not in the record; it has {', '.join(record.lists)}")
    stay = np.array([name in set(sources) for name in record.lists])
    if stay.all():
        return record
    part = stay[record.source]
    owner, source, weight = record.owner[part], record.source[part], record.weight[part]
    total = np.zeros(len(record))
    np.add.at(total, owner, weight)
    named = total > 0
    position = np.cumsum(stay) - 1
    thinner = replace(
        record, owner=owner, source=position[source], weight=weight / total[owner], kind=record.kind[part], low=record.low[part], mode=record.mode[part],
        high=record.high[part], lists=tuple(n for n, s in zip(record.lists, stay, strict=True) if s), compiled=record.compiled[stay],
        group=record.group[stay], mentions=record.mentions[:, stay],
    )  # fmt: skip
    changed = named & (np.bincount(owner, minlength=len(record)) < np.bincount(record.owner, minlength=len(record)))
    thinner = _with_milestones(thinner, named)
    return _pooled_again(thinner, changed[named])


def _pooled_again(record: Record, changed: Bools) -> Record:
    """Best dates and bounds from the parts, for the milestones that lost some."""
    best, earliest, latest, unit, sd = (a.copy() for a in (record.best, record.earliest, record.latest, record.unit, record.sd))
    for j in np.nonzero(changed)[0]:
        first, last = np.searchsorted(record.owner, [j, j + 1])
        p = slice(int(first), int(last))
        best[j], earliest[j], latest[j], unit[j], sd[j] = summary_of_parts(
            record.weight[p], record.kind[p], record.low[p], record.mode[p], record.high[p]
        )
    return replace(record, best=best, earliest=earliest, latest=latest, unit=unit, sd=sd)


def _with_milestones(record: Record, chosen: Bools) -> Record:
    position = np.cumsum(chosen) - 1
    part = chosen[record.owner]
    pick = np.nonzero(chosen)[0]
    return replace(
        record, id=record.id[chosen], title=tuple(record.title[i] for i in pick), best=record.best[chosen], earliest=record.earliest[chosen],
        latest=record.latest[chosen], unit=record.unit[chosen], sd=record.sd[chosen], owner=position[record.owner[part]], source=record.source[part],
        weight=record.weight[part], kind=record.kind[part], low=record.low[part], mode=record.mode[part], high=record.high[part],
        mentions=record.mentions[chosen], category=tuple(record.category[i] for i in pick), importance=record.importance[chosen],
        level=tuple(record.level[i] for i in pick), parent=tuple(record.parent[i] for i in pick),
        orders=tuple((int(position[i]), int(position[j])) for i, j in record.orders if chosen[i] and chosen[j]),
    )  # fmt: skip


def _window(record: Record) -> Window:
    order = np.lexsort((record.id, record.best))
    times = record.best[order]
    after = int((times > record.present).sum())
    before = 0 if record.start is None else int((times < record.start).sum())
    inside = slice(before, len(times) - after)
    index, times = order[inside], times[inside]
    start = record.start if record.start is not None else (float(times[0]) if len(times) else record.present)
    if not start < record.present and len(times) and record.start is not None:
        raise RecordRefused(f"the start {start:g} is not before the present {record.present:g}; give an earlier --start or a later --present")
    opening = int((times == start).sum())
    closing = int((times == record.present).sum()) if start < record.present else 0
    units = record.unit[index]
    units = units[units > 0]
    return Window(
        index=index,
        times=times,
        start=start,
        start_from="first milestone" if record.start is None else "given",
        present=record.present,
        present_from=record.present_from,
        opening=opening,
        closing=closing,
        before=before,
        after=after,
        finest_unit=float(units.min()) if len(units) else 0.0,
        unit=record.unit[index],
    )


def _order_groups(orders: Sequence[tuple[int, int]]) -> list[tuple[list[int], list[tuple[int, int]]]]:
    """Connected groups of milestones with known orders."""
    parent: dict[int, int] = {}

    def root(i: int) -> int:
        while parent.setdefault(i, i) != i:
            i = parent[i]
        return i

    for i, j in orders:
        parent[root(i)] = root(j)
    groups: dict[int, tuple[list[int], list[tuple[int, int]]]] = {}
    for i in sorted(parent):
        groups.setdefault(root(i), ([], []))[0].append(i)
    for i, j in orders:
        groups[root(i)][1].append((i, j))
    return list(groups.values())


def _respect(
    columns: Floats, members: list[int], pairs: list[tuple[int, int]], mixtures: list[Mixture], streams: list[np.random.Generator], record: Record
) -> None:
    """Redraw the rows in which a known order is broken until all hold: the exact conditional law."""
    first, second = np.array(pairs).T
    bad = np.nonzero((columns[first] > columns[second]).any(axis=0))[0]
    for _ in range(2000):
        if not len(bad):
            return
        for j in members:
            columns[j, bad] = mixtures[j].quantile(streams[j].random(len(bad)))
        bad = bad[(columns[first][:, bad] > columns[second][:, bad]).any(axis=0)]
    broken = (columns[first][:, bad] > columns[second][:, bad]).any(axis=1)
    i, j = pairs[int(np.argmax(broken))]
    raise RecordRefused(
        f"{record.title[i]!r} is stated to precede {record.title[j]!r}, but their datings leave no room for it; mend a date or withdraw the order"
    )
