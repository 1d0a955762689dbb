# SPDX-License-Identifier: Apache-2.0
"""Precision and recall of linking over many gold sets, default settings, before any review: ``python -m tests.simulate.linking
[SEEDS]``."""

from __future__ import annotations

import sys
import time

import numpy as np

from chronos_acc.merge import link
from tests.generate_gold import gold, pairs_inside, precision_recall

SETTINGS: dict[str, dict[str, object]] = {
    "300 milestones, four lists": {},
    "all in deep time": {"deep_share": 1.0},
    "all recent": {"deep_share": 0.0},
    "30 milestones": {"milestones": 30},
    "8 milestones, two lists": {"milestones": 8, "lists": 2},
    "one list much larger": {"share": (0.95, 0.12, 0.12, 0.2)},
    "lists share little": {"share": 0.2},
    "dates off three times as much": {"off": 3.0},
}


def main(seeds: int = 20) -> None:
    """Print a Markdown table."""
    print("| generator | set | precision | lowest | recall | lowest | seconds |\n| --- | --- | --- | --- | --- | --- | --- |")
    for synonyms in (False, True):
        for name, settings in SETTINGS.items():
            rows, began = [], time.perf_counter()
            for seed in range(100, 100 + seeds):
                g = gold(seed, synonyms=synonyms, **settings)  # type: ignore[arg-type]
                rows.append(precision_recall(pairs_inside(link(g.entries).milestone, g.entries.source), g.pairs()))
            p, r = np.array(rows).T
            kind = "synonyms, dropped words" if synonyms else "misspelt, reordered, reworded"
            seconds = (time.perf_counter() - began) / seeds
            print(f"| {kind} | {name} | {p.mean():.3f} | {p.min():.3f} | {r.mean():.3f} | {r.min():.3f} | {seconds:.2f} |", flush=True)


if __name__ == "__main__":
    main(int(sys.argv[1]) if len(sys.argv) > 1 else 20)
