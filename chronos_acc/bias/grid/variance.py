# SPDX-License-Identifier: Apache-2.0
"""How much of the variance of z each choice makes: first-order and total shares over a full factorial, Type II sums of squares
where cells are missing.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

Floats = npt.NDArray[np.float64]
Ints = npt.NDArray[np.int64]


@dataclass(frozen=True)
class Share:
    """Shares of the variance. first_order: of the means over everything else; total: with every interaction, None for Type II."""

    choice: str
    first_order: float
    total: float | None
    method: str


def shares(levels: Mapping[str, Ints], z: Floats) -> tuple[Share, ...]:
    """Shares for each choice with two levels or more that occur; levels name -> (q,) level of each combination, z (q,) finite.

    Empty where nothing varies.
    """
    names = [k for k, v in levels.items() if len(np.unique(v)) > 1]
    spread = float(((z - z.mean()) ** 2).sum()) if len(z) else 0.0
    if not names or not spread > 1e-12 * max(1.0, float((z**2).sum())):
        return ()
    codes = {k: np.unique(levels[k], return_inverse=True)[1].reshape(-1) for k in names}
    sizes = [int(codes[k].max()) + 1 for k in names]
    flat = np.ravel_multi_index([codes[k] for k in names], sizes)
    if len(np.unique(flat)) == len(flat) == int(np.prod(sizes)):
        cube = np.empty(int(np.prod(sizes)))
        cube[flat] = z
        return _factorial(names, cube.reshape(sizes))
    return _type_two(names, codes, z, spread)


def _factorial(names: Sequence[str], cube: Floats) -> tuple[Share, ...]:
    whole = float(cube.var())
    axes = range(cube.ndim)
    out = []
    for i, name in enumerate(names):
        first = float(cube.mean(axis=tuple(a for a in axes if a != i)).var()) / whole
        total = float(cube.var(axis=i).mean()) / whole
        out.append(Share(name, first, total, "full factorial"))
    return tuple(out)


def _type_two(names: Sequence[str], codes: Mapping[str, Ints], z: Floats, spread: float) -> tuple[Share, ...]:
    """Each main effect after the others."""
    dummies = {k: np.eye(int(codes[k].max()) + 1)[codes[k]][:, 1:] for k in names}
    left = _left(list(dummies.values()), z)
    return tuple(
        Share(k, max(0.0, _left([d for j, d in dummies.items() if j != k], z) - left) / spread, None, "Type II, cells missing")
        for k in names
    )


def _left(columns: Sequence[Floats], z: Floats) -> float:
    design = np.column_stack([np.ones(len(z)), *columns])
    fitted = design @ np.linalg.lstsq(design, z, rcond=None)[0]
    return float(((z - fitted) ** 2).sum())
