# SPDX-License-Identifier: Apache-2.0
"""Would the making of the lists produce this? One small file a check, run together or by name."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

from ..errors import RecordRefused, WrongUse
from . import (
    completeness,
    covariates,
    dating,
    depth,
    equal_effort,
    exposure,
    false_splits,
    granularity,
    importance,
    leave_out,
    lists,
    merging,
    recall_decay,
    recent_end,
    support,
)
from .check import Answer, Check, Context, Row
from .growth import growth
from .result import Bias, questions

CHECKS: tuple[Check, ...] = (
    recall_decay.CHECK,
    completeness.CHECK,
    support.CHECK,
    importance.CHECK,
    granularity.CHECK,
    leave_out.CHECK,
    depth.CHECK,
    recent_end.CHECK,
    dating.CHECK,
    merging.CHECK,
    false_splits.CHECK,
    equal_effort.CHECK,
    covariates.CHECK,
    lists.CHECK,
    exposure.CHECK,
)
LEAST_MILESTONES = 3

__all__ = ["CHECKS", "Answer", "Bias", "Check", "Context", "Row", "run_checks"]


def run_checks(context: Context, names: Sequence[str] | None = None) -> Bias:
    """Run the checks named, all by default, in the order of ``CHECKS``.

    A check that cannot run has no rows and a sentence in ``notes``. Raises WrongUse for a name that is no check, RecordRefused
    below three milestones.
    """
    known = [c.name for c in CHECKS]
    unknown = [n for n in names or () if n not in known]
    if unknown:
        raise WrongUse(f"{unknown[0]!r} is no check; choose from {', '.join(known)}")
    window = context.record.window
    if len(window.times) < LEAST_MILESTONES:
        raise RecordRefused(
            f"{len(window.times)} milestone{'' if len(window.times) == 1 else 's'} in the window; "
            f"checks need {LEAST_MILESTONES}: widen the window or load more"
        )
    chosen = [c for c in CHECKS if names is None or c.name in names]
    answers: dict[str, Answer] = {}
    notes: list[str] = []
    for i, check in enumerate(chosen):
        context.tell(f"check {check.name}", i / len(chosen))
        answer = check.run(context)
        if answer.rows and answer.headline is None:
            answer = replace(answer, notes=(*answer.notes, f"{check.name}: no row has enough milestones to speak for the check"))
        answers[check.name] = answer
        notes.extend(answer.notes)
    context.tell("checks", 1.0)
    return Bias(
        answers=answers,
        questions=questions(CHECKS),
        published=growth(window),
        seed=context.seed,
        replicates=context.replicates,
        draws=context.draws,
        record_hash=context.record.hash,
        notes=tuple(dict.fromkeys(notes)),
    )
