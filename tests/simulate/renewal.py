# SPDX-License-Identifier: Apache-2.0
"""Records with spacing of any kind: equilibrium renewal processes in operational time, bent by a growing rate."""

from __future__ import annotations

from typing import Any

import numpy as np

SPACINGS: dict[str, Any] = {
    "Poisson (CV² 1)": lambda rng, size: rng.exponential(size=size),
    "clustered: gamma 1/2 (CV² 2)": lambda rng, size: rng.gamma(0.5, 2.0, size=size),
    "clustered: log-normal (CV² 3)": lambda rng, size: rng.lognormal(-np.log(4.0) / 2, np.sqrt(np.log(4.0)), size=size),
    "regular: gamma 2 (CV² 1/2)": lambda rng, size: rng.gamma(2.0, 0.5, size=size),
    "regular: gamma 4 (CV² 1/4)": lambda rng, size: rng.gamma(4.0, 0.25, size=size),
}


def records(spacing: str, mean: float, growth: float, records: int, rng: np.random.Generator) -> list[np.ndarray]:
    """Positions in (0, 1) of ``records`` records with ``mean`` events expected; growth × window is ``growth``. Observation begins
    long after the process.
    """
    draw = SPACINGS[spacing]
    width = int(mean + 12 * np.sqrt(3 * mean) + 40)
    out = []
    chunk = max(1, 400_000 // width)
    for first in range(0, records, chunk):
        size = min(chunk, records - first)
        burn = rng.uniform(20.0, 40.0, size=(size, 1))  # start of observation, in mean intervals
        times = np.cumsum(draw(rng, (size, width + 60)), axis=1) - burn
        for row in times:
            shares = row[(row > 0) & (row < mean)] / mean
            out.append(shares if growth == 0 else np.log1p(shares * np.expm1(growth)) / growth)
    return out
