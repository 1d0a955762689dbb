# SPDX-License-Identifier: Apache-2.0
"""Rate laws, which are forgetting curves too: one small file each."""

from __future__ import annotations

from . import hyperbolic, log_linear, power_law, steady, step
from .curve import Curve, Place

CURVES: tuple[Curve, ...] = (steady.CURVE, log_linear.CURVE, power_law.CURVE, hyperbolic.CURVE, step.CURVE)

__all__ = ["CURVES", "Curve", "Place"]
