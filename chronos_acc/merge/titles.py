# SPDX-License-Identifier: Apache-2.0
"""How alike two titles are, word by word.

Each word takes its best counterpart in the other title by the character 2- and 3-grams they share (Dice's coefficient, each gram weighted
by its rarity among the words, so that endings such as "-ing" say little); spelling, inflection and the order of words do not matter. Words
are weighted by rarity, counted over spellings alike, so that a misspelt common word stays common. Words with digits (and Roman numerals)
agree exactly or not at all. Sources: Dice 1945 (Ecology 26:297-302) for the coefficient; Sparck Jones 1972 (J. Documentation 28:11-21) for
weighting by rarity.
"""

from __future__ import annotations

import re
import unicodedata
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
from scipy import sparse

Floats = npt.NDArray[np.float64]
Ints = npt.NDArray[np.int64]
Bools = npt.NDArray[np.bool_]
Complexes = npt.NDArray[np.complex128]

DISTINCTIVE = 0.75
ALIKE = 0.35  # words below this share of grams are no counterparts
# Share of titles in which a word is expected before anything was counted, and how many titles that expectation is worth: grammatical
# words, the words of events as such, and all others. It matters in small sets; with many titles the counted shares take over, in any
# language.
FUNCTION_WORDS = frozenset([
    "a", "an", "and", "as", "at", "by", "for", "from", "in", "into", "is", "its", "of", "on", "or", "that", "the", "this", "to",
    "was", "were", "with",
])  # fmt: skip
EVENT_WORDS = frozenset(
    [
    "first", "earliest", "oldest", "early", "origin", "origins", "beginning", "beginnings", "begin", "begins", "began", "start",
    "starts", "invention", "invented", "invents", "discovery", "discovered", "development", "developed", "develops",
    "introduction", "introduced", "appearance", "appear", "appears", "emergence", "emerges", "evolution", "evolves", "evolved",
    "rise", "creation", "created", "foundation", "founded", "use", "used", "new", "known", "modern",
]  # fmt: skip
)
EXPECTED = {"other": (0.002, 10.0), "event": (0.3, 100.0), "function": (0.6, 100.0)}
ROMAN = {
    "i": "1", "ii": "2", "iii": "3", "iv": "4", "vi": "6", "vii": "7", "viii": "8", "ix": "9", "xi": "11", "xii": "12", "xiii": "13",
    "xiv": "14", "xv": "15",
    "xvi": "16", "xvii": "17", "xviii": "18", "xix": "19", "xx": "20",
}  # fmt: skip
_POSSESSIVE = re.compile(r"['’`]s\b")
_GROUPED = re.compile(r"(?<=\d),(?=\d{3}(?!\d))")
_WORD = re.compile(r"\d+(?:\.\d+)+|[^\W_]+")


def words_of(title: str) -> tuple[str, ...]:
    """The words of a title: folded case, no accents, no possessive s; a title of none is one word as it stands."""
    text = unicodedata.normalize("NFKD", title.casefold())
    text = "".join(c for c in text if not unicodedata.combining(c))
    text = _GROUPED.sub("", _POSSESSIVE.sub("", text)).replace("'", "").replace("’", "")
    found = dict.fromkeys(ROMAN.get(w, w) for w in _WORD.findall(text))
    solid = tuple(w for w in found if w not in FUNCTION_WORDS)
    return solid or tuple(found) or (" ".join(title.split()),)


def grams_of(word: str) -> set[str]:
    """Character 2- and 3-grams of a word, its ends marked; of a word with digits only the whole, so that it agrees exactly or not at
    all."""
    if any(c.isdigit() for c in word) or len(word) == 1:
        return {f"\x00{word}"}
    marked = f"\x02{word}\x03"
    return {marked[i : i + n] for n in (2, 3) for i in range(len(marked) - n + 1)}


@dataclass(frozen=True)
class Titles:
    """Titles ready to be compared.

    mass (k,) summed weight of a title's words; own (k, v) sparse, weight of each word in each title, with imaginary part 1 for its
    distinctive words (at least ``DISTINCTIVE`` of the heaviest); cover (k, v) sparse, how well each word of the vocabulary is met by its
    best counterpart in each title (0 to 1). The weight of a's words met in b is then one sparse product, own[a] · cover[b], and says too
    whether a distinctive word is met.
    """

    mass: Floats
    own: sparse.csr_array
    cover: sparse.csr_array

    @classmethod
    def of(cls, titles: Sequence[str]) -> Titles:
        """From k titles as loaded."""
        split = [words_of(t) for t in titles]
        vocabulary = {w: i for i, w in enumerate(sorted({w for words in split for w in words}))}
        rows = np.repeat(np.arange(len(split)), [len(words) for words in split])
        columns = np.fromiter((vocabulary[w] for words in split for w in words), dtype=np.int64, count=len(rows))
        shape = (len(split), len(vocabulary))
        alike = _word_similarity(list(vocabulary))
        weight = _rarity(list(vocabulary), np.bincount(columns, minlength=shape[1]).astype(float), alike, len(split))
        heaviest = np.zeros(shape[0])
        np.maximum.at(heaviest, rows, weight[columns])
        marks = weight[columns] >= DISTINCTIVE * heaviest[rows]
        own = sparse.csr_array((weight[columns] + 1j * marks, (rows, columns)), shape=shape)
        mass = np.bincount(rows, weights=weight[columns], minlength=shape[0]).astype(np.float64)
        return cls(mass, own, _cover(rows, columns, alike, shape))

    def __len__(self) -> int:
        return len(self.mass)

    def compare(self, a: Ints, b: Ints) -> tuple[Floats, Bools]:
        """(q,) similarity of titles at positions a and b, 0 to 1, and whether a distinctive word of one is met in the other; symmetric."""
        out, met = np.empty(len(a)), np.empty(len(a), dtype=bool)
        for first in range(0, len(a), 50_000):
            i, j = a[first : first + 50_000], b[first : first + 50_000]
            here = _row_products(self.own, self.cover, i, j)
            there = _row_products(self.own, self.cover, j, i)
            out[first : first + 50_000] = _share_met(here, there, self.mass[i], self.mass[j])
            met[first : first + 50_000] = here.imag + there.imag > 0
        return out, met

    def block(self, rows: slice, columns: slice, least: float) -> tuple[Ints, Ints, Floats, Bools]:
        """Positions of all pairs of two slices whose similarity reaches ``least`` (above 0), and what ``compare`` says of them."""
        here = sparse.coo_array(self.own[rows] @ self.cover[columns].T)
        there = sparse.csr_array(self.cover[rows] @ self.own[columns].T)
        both = sparse.csr_array(here)
        both.sort_indices()
        there.sort_indices()
        # alike is symmetric, so both products have entries at the same places
        i = np.repeat(np.arange(both.shape[0]), np.diff(both.indptr)) + rows.start
        j = both.indices.astype(np.int64) + columns.start
        score = _share_met(both.data, there.data, self.mass[i], self.mass[j])
        kept = score >= least
        return i[kept].astype(np.int64), j[kept], score[kept], (both.data.imag + there.data.imag > 0)[kept]


def _share_met(met_a: Complexes, met_b: Complexes, mass_a: Floats, mass_b: Floats) -> Floats:
    """Similarity from the weight of each title's words met in the other."""
    return np.asarray(np.minimum((met_a.real + met_b.real) / (mass_a + mass_b), 1.0))


def _row_products(left: sparse.csr_array, right: sparse.csr_array, i: Ints, j: Ints) -> Complexes:
    return np.asarray(left[i].multiply(right[j]).sum(axis=1)).ravel()


def _word_similarity(words: list[str]) -> sparse.csr_array:
    """(v, v) Dice coefficient of every two words over their weighted grams, symmetric, kept from ``ALIKE`` up; 1 on the diagonal."""
    grams: dict[str, int] = {}
    rows, columns = [], []
    for i, word in enumerate(words):
        for gram in sorted(grams_of(word)):
            rows.append(i)
            columns.append(grams.setdefault(gram, len(grams)))
    v = len(words)
    row, column = np.array(rows, dtype=np.int64), np.array(columns, dtype=np.int64)
    seen = np.bincount(column, minlength=len(grams))
    weight = np.log1p((v + 50.0) / (seen + 1.0))  # rarity among words; the constant keeps small vocabularies near equal weights
    incidence = sparse.csr_array((np.ones(len(row)), (row, column)), shape=(v, len(grams)))
    weighted = sparse.csr_array((weight[column], (row, column)), shape=(v, len(grams)))
    total = np.bincount(row, weights=weight[column], minlength=v)
    transposed = sparse.csr_array(incidence.T)
    kept_rows, kept_columns, kept = [row[:0]], [row[:0]], [total[:0]]
    for first in range(0, v, 1000):
        shared = sparse.coo_array(weighted[first : first + 1000] @ transposed)
        i, j = shared.row + first, shared.col
        dice = np.round(2 * shared.data / (total[i] + total[j]), 9)  # rounded, so that i against j equals j against i
        good = dice >= ALIKE
        kept_rows.append(i[good])
        kept_columns.append(j[good])
        kept.append(np.minimum(dice[good], 1.0))
    row, column, dice = np.concatenate(kept_rows), np.concatenate(kept_columns), np.concatenate(kept)
    dice[row == column] = 1.0
    return sparse.csr_array((dice, (row, column)), shape=(v, v))


def _rarity(words: list[str], count: Floats, alike: sparse.csr_array, titles: int) -> Floats:
    """(v,) weight of each word: log of the inverse share of titles that hold it or a spelling alike, shrunk to a prior share in small
    sets."""
    strong = alike.copy()
    strong.data = np.where(strong.data >= 0.6, strong.data, 0.0)
    seen = np.minimum(np.asarray(strong @ count).ravel(), titles)
    least = np.full(len(words), np.inf)
    for kind, listed in (("other", None), ("event", EVENT_WORDS), ("function", FUNCTION_WORDS)):
        expected, worth = EXPECTED[kind]
        member = np.ones(len(words)) if listed is None else np.array([float(w in listed) for w in words])
        near = strong @ member > 0  # the word itself or a spelling alike
        share = (seen + worth * expected) / (titles + worth)
        least = np.where(near, np.minimum(least, -np.log(np.minimum(share, 1.0))), least)
    return np.asarray(np.maximum(least, 0.05))


def _cover(rows: Ints, columns: Ints, alike: sparse.csr_array, shape: tuple[int, int]) -> sparse.csr_array:
    """(k, v) best counterpart of every word in every title: the maximum over the title's words of their likeness to it."""
    reach = np.diff(alike.indptr)[columns]
    if not len(columns):
        return sparse.csr_array(shape)
    starts = np.repeat(alike.indptr[columns] - np.concatenate([[0], np.cumsum(reach)[:-1]]), reach)
    source = starts + np.arange(int(reach.sum()))
    row, column, value = np.repeat(rows, reach), alike.indices[source], alike.data[source]
    order = np.lexsort((column, row))
    row, column, value = row[order], column[order], value[order]
    fresh = np.nonzero(np.concatenate([[True], (np.diff(row) != 0) | (np.diff(column) != 0)]))[0]
    best = np.maximum.reduceat(value, fresh)
    return sparse.csr_array((best, (row[fresh], column[fresh])), shape=shape)
