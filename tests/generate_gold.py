# SPDX-License-Identifier: Apache-2.0
"""Invented gold sets for linking: lists that name the same milestones in other words and at other dates, and the truth beside them.

``spelling_gold`` misspells, reorders and rewords titles; ``synonym_gold`` swaps words for synonyms and drops words. Both mix deep time
(ages of millions of years, dated to per cents) with recent time (dated to years), titles of one to six words, stated ranges and bare
years. Milestones are combinations of everyday nouns with invented place names, so that many share words such as "first", "origin of" or a
common noun.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from chronos_acc.merge.entries import Entries

NOUNS = (
    "glass", "plough", "wheel", "bridge", "harbour", "lighthouse", "canal", "aqueduct", "loom", "needle", "kiln", "furnace", "anvil",
    "hammer", "saw", "lathe",
    "pump", "turbine", "boiler", "piston", "engine", "motor", "battery", "lamp", "lens", "telescope", "microscope", "mirror", "prism",
    "clock", "calendar",
    "compass", "sextant", "map", "globe", "alphabet", "ink", "paper", "press", "library", "school", "hospital", "vaccine", "antiseptic",
    "scalpel", "thermometer",
    "barometer", "balance", "coin", "bank", "market", "insurance", "parliament", "census", "granary", "irrigation", "barley", "rice",
    "maize", "potato", "olive",
    "vine", "cattle", "sheep", "horse", "camel", "dog", "bee", "silk", "cotton", "wool", "linen", "dye", "leather", "rope", "sail",
    "rudder", "anchor", "keel",
    "submarine", "balloon", "glider", "airship", "helicopter", "parachute", "rocket", "satellite", "probe", "antenna", "radar",
    "telegraph", "telephone", "radio",
    "television", "camera", "film", "transistor", "laser", "computer", "network", "robot", "algorithm", "database", "compiler", "concrete",
    "brick", "steel",
    "bronze", "iron", "copper", "tin", "aluminium", "plastic", "rubber", "nylon", "fertiliser", "pesticide", "refrigerator", "cannery",
    "bicycle", "tractor",
    "tramway", "railway", "tunnel", "elevator", "skyscraper", "dam", "reactor", "windmill", "watermill", "flute", "drum", "organ",
    "violin", "theatre", "novel",
)  # fmt: skip
LIFE = (
    "algae", "sponges", "corals", "worms", "molluscs", "trilobites", "crabs", "insects", "spiders", "fishes", "sharks", "amphibians",
    "reptiles", "turtles",
    "crocodiles", "birds", "mammals", "whales", "bats", "primates", "mosses", "ferns", "conifers", "grasses", "flowers", "fungi",
    "lichens", "forests",
    "eukaryotes", "bacteria", "photosynthesis", "respiration", "multicellularity", "skeletons", "jaws", "limbs", "eggs", "feathers",
    "wings", "placenta",
    "continents", "oceans", "atmosphere", "glaciation", "supercontinent", "mantle", "magnetic field", "mass extinction",
    "meteorite impact", "volcanism",
)  # fmt: skip
QUALITIES = (
    "public", "portable", "electric", "magnetic", "steam", "hydraulic", "pneumatic", "optical", "digital", "mechanical", "automatic",
    "wooden", "stone", "painted",
    "printed", "woven", "cast", "forged", "double", "floating", "underground", "coastal", "royal", "municipal", "private", "commercial",
    "industrial", "domestic",
    "wild", "giant", "miniature", "synthetic", "artificial", "natural", "liquid", "solid", "rotary", "vertical", "horizontal", "suspended",
    "armoured", "early",
    "marine", "land", "freshwater", "jawless", "armoured", "flying", "burrowing", "colonial", "toothed", "feathered", "tropical", "polar",
)  # fmt: skip
TEMPLATES = (
    "Invention of the {x}", "{x} invented", "First {x}", "Earliest {x}", "Origin of the {x}", "The first {x}", "{x}",
    "Introduction of {x}", "{x} introduced",
    "Beginning of {x}", "Development of the {x}", "Appearance of {x}", "{x} appears", "Emergence of {x}",
)  # fmt: skip
SYNONYMS = {
    "engine": "motor", "telegraph": "telegraphy", "railway": "railroad", "lamp": "light", "tractor": "farm machine", "plough": "ard",
    "cattle": "cows", "film": "movie",
    "aluminium": "light metal", "hospital": "infirmary", "bank": "lender", "theatre": "playhouse", "insects": "hexapods", "fishes": "fish",
    "sharks": "elasmobranchs",
    "birds": "avians", "mammals": "mammalia", "eukaryotes": "nucleated cells", "fungi": "mushrooms", "forests": "woodland", "volcanism":
    "eruptions", "glaciation": "ice age",
    "oceans": "seas", "atmosphere": "air", "electric": "electrical", "automatic": "self-acting", "underground": "subterranean", "giant":
    "huge", "miniature": "small",
    "synthetic": "man-made", "wooden": "timber", "bicycle": "velocipede", "clock": "timepiece", "harbour": "port", "bridge": "span",
    "coin": "money", "dam": "barrage",
    "computer": "calculating machine", "camera": "photographic apparatus", "vaccine": "inoculation", "furnace": "smelter", "boat":
    "vessel", "novel": "prose fiction",
    "artificial": "manufactured", "royal": "crown", "public": "open", "marine": "sea", "flying": "aerial", "horse": "equine", "rocket":
    "missile", "elevator": "lift",
    "refrigerator": "cooling cabinet", "skyscraper": "high-rise", "map": "chart", "alphabet": "letters", "market": "fair", "school":
    "academy", "dye": "pigment",
}  # fmt: skip
TYPING = "abcdefghijklmnopqrstuvwxyz"


@dataclass(frozen=True)
class Gold:
    """Entries of several lists and the milestone (k,) each of them truly names."""

    entries: Entries
    truth: np.ndarray

    def pairs(self) -> set[tuple[int, int]]:
        """All true pairs, as positions a < b in entries of different lists."""
        return pairs_inside(self.truth, self.entries.source)


def pairs_inside(label: np.ndarray, source: np.ndarray) -> set[tuple[int, int]]:
    """Pairs of positions with one label and different lists."""
    order = np.argsort(label, kind="stable")
    out = set()
    for group in np.split(order, np.nonzero(np.diff(label[order]))[0] + 1):
        for i, a in enumerate(group):
            out |= {(int(min(a, b)), int(max(a, b))) for b in group[i + 1 :] if source[a] != source[b]}
    return out


def precision_recall(found: set[tuple[int, int]], true: set[tuple[int, int]]) -> tuple[float, float]:
    """Shares of the found pairs that are true, and of the true pairs that were found."""
    both = len(found & true)
    return (both / len(found) if found else 1.0), (both / len(true) if true else 1.0)


def place_name(rng: np.random.Generator) -> str:
    """An invented name of two or three syllables."""
    syllable = [rng.choice(list("bdfgklmnprstvz")) + rng.choice(list("aeiou")) + rng.choice(["", "", "n", "r", "l", "s"]) for _ in
    range(rng.integers(2, 4))]
    return "".join(syllable).capitalize()


def misspell(word: str, rng: np.random.Generator) -> str:
    """One slip of the keyboard: a letter lost, doubled, changed, or two swapped."""
    if len(word) < 4:
        return word
    i = int(rng.integers(1, len(word) - 1))
    kind = rng.integers(4)
    if kind == 0:
        return word[:i] + word[i + 1 :]
    if kind == 1:
        return word[:i] + word[i] + word[i:]
    if kind == 2:
        return word[:i] + str(rng.choice(list(TYPING))) + word[i + 1 :]
    return word[: i - 1] + word[i] + word[i - 1] + word[i + 1 :]


def cores(count: int, rng: np.random.Generator, deep: np.ndarray) -> list[list[str]]:
    """``count`` distinct things, one to four words each, some told apart by an invented name only."""
    seen: set[str] = set()
    out: list[list[str]] = []
    while len(out) < count:
        noun = str(rng.choice(LIFE if deep[len(out)] else NOUNS))
        words = noun.split()
        if rng.random() < 0.65:
            words = [str(rng.choice(QUALITIES)), *words]
        kind = rng.random()
        if kind < 0.30:
            words = [*words, "of", place_name(rng)]
        elif kind < 0.40:
            words = [*words, str(rng.choice(NOUNS))]
        elif kind < 0.43:
            words = [*words, str(rng.integers(1, 9))]
        key = " ".join(words)
        if key not in seen:
            seen.add(key)
            out.append(words)
    return out


def dates(count: int, rng: np.random.Generator, deep_share: float, present: float) -> tuple[np.ndarray, np.ndarray]:
    """Years of ``count`` milestones and which of them lie in deep time."""
    deep = rng.random(count) < deep_share
    age = np.where(deep, 10 ** rng.uniform(4.5, 9.6, count), 10 ** rng.uniform(0.7, 3.7, count))
    return present - age, deep


def dating(year: float, deep: bool, present: float, off: float, rng: np.random.Generator) -> tuple[float, float, float, bool]:
    """One list's dating of a milestone: earliest, best, latest, normal."""
    age = present - year
    if deep:
        age *= float(np.exp(rng.normal(0, 0.008 * off)))
        digits = 10 ** (np.floor(np.log10(age)) - rng.integers(1, 3))
        age = max(round(age / digits) * digits, digits)
        half = digits / 2 if rng.random() < 0.6 else age * rng.uniform(0.005, 0.05)
        best = present - age
        return best - half, best, min(best + half, present), bool(rng.random() < 0.3)
    shift = 0.0 if rng.random() < 0.55 else rng.normal(0, (1.5 + 0.004 * age) * off)
    at = min(float(np.floor(year + shift)), np.floor(present) - 1)
    if age > 800 and rng.random() < 0.4:
        step = 10.0 if rng.random() < 0.5 else 50.0
        at = round(at / step) * step
        return at - step / 2, at, at + step / 2, False
    if rng.random() < 0.1:
        wide = float(rng.integers(2, 15))
        return at - wide, at, min(at + wide, present), False
    return at, at + 0.5, at + 1, False


def template(words: list[str], rng: np.random.Generator, keep: str | None, reword: float) -> str:
    """The core inside a phrase: the milestone's own, or (with probability ``reword``) another."""
    chosen = keep if keep is not None and rng.random() >= reword else str(rng.choice(TEMPLATES))
    text = chosen.format(x=" ".join(words))
    return text[0].upper() + text[1:]


def reorder(words: list[str], rng: np.random.Generator) -> list[str]:
    """The same words in another order: "harbour of Denar" becomes "Denar harbour" or "harbour, Denar"."""
    if "of" in words:
        i = words.index("of")
        return words[i + 1 :] + words[:i] if rng.random() < 0.5 else [*words[: i - 1], words[i - 1] + ",", *words[i + 1 :]]
    if len(words) > 1:
        return [words[-1] + ",", *words[:-1]]
    return words


def spelled(words: list[str], phrase: str, rng: np.random.Generator) -> str:
    """Generator one: misspelt, reordered, reworded."""
    words = list(words)
    if rng.random() < 0.3:
        words = reorder(words, rng)
    text = template(words, rng, phrase, 0.5)
    if rng.random() < 0.4:
        parts = text.split()
        for _ in range(1 if rng.random() < 0.7 else 2):
            i = int(rng.integers(len(parts)))
            parts[i] = misspell(parts[i], rng)
        text = " ".join(parts)
    return text.lower() if rng.random() < 0.1 else text


def synonymous(words: list[str], phrase: str, rng: np.random.Generator) -> str:
    """Generator two: synonyms, dropped words, a few slips of spelling."""
    words = [SYNONYMS[w] if w in SYNONYMS and rng.random() < 0.25 else w for w in words]
    solid = [i for i, w in enumerate(words) if w != "of"]
    if len(solid) > 1 and rng.random() < 0.3:
        gone = int(rng.choice(solid))
        words = [w for i, w in enumerate(words) if i != gone]
        words = [w for i, w in enumerate(words) if w != "of" or 0 < i < len(words) - 1]
    text = template(words, rng, phrase, 0.6)
    if rng.random() < 0.15:
        parts = text.split()
        i = int(rng.integers(len(parts)))
        parts[i] = misspell(parts[i], rng)
        text = " ".join(parts)
    return text


def gold(
    seed: int,
    *,
    synonyms: bool = False,
    milestones: int = 300,
    lists: int = 4,
    share: tuple[float, ...] | float = 0.7,
    deep_share: float = 0.35,
    off: float = 1.0,
    present: float = 2025.0,
) -> Gold:
    """A gold set: ``share`` of the milestones in each list (one figure, or one a list), dates off by ``off`` times a few years or about 1
    % of age."""
    rng = np.random.default_rng([seed, 4711 + int(synonyms)])
    years, deep = dates(milestones, rng, deep_share, present)
    things = cores(milestones, rng, deep)
    phrases = [str(rng.choice(TEMPLATES)) for _ in things]
    shares = (share,) * lists if isinstance(share, float) else share
    rows = []
    for s, p in enumerate(shares):
        for i in rng.permutation(milestones):
            if rng.random() < p:
                title = (synonymous if synonyms else spelled)(things[i], phrases[i], rng)
                rows.append((s, title, *dating(years[i], bool(deep[i]), present, off, rng), int(i)))
    source, title, earliest, best, latest, normal, truth = zip(*rows, strict=True)
    k = len(rows)
    entries = Entries(
        id=np.arange(1, k + 1, dtype=np.int64), source=np.array(source, dtype=np.int64), sources=tuple(f"list {s + 1}" for s in
        range(len(shares))), title=tuple(title), earliest=np.array(earliest), best=np.array(best), latest=np.array(latest),
        normal=np.array(normal, dtype=bool), category=(None,) * k, present=present,
    )  # fmt: skip
    return Gold(entries, np.array(truth, dtype=np.int64))


def spelling_gold(seed: int, **settings: object) -> Gold:
    """Generator one. See ``gold``."""
    return gold(seed, **settings)  # type: ignore[arg-type]


def synonym_gold(seed: int, **settings: object) -> Gold:
    """Generator two. See ``gold``."""
    return gold(seed, synonyms=True, **settings)  # type: ignore[arg-type]
