"""Which limits bind where nothing is possible: those that refuse, reject all, or exclude what was needed."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import replace
from typing import TYPE_CHECKING

from millreason.trace import LimitRecord

if TYPE_CHECKING:
    from millreason.outcome import Outcome

# Rejections that a larger cutter would cure: with them, what excluded the larger cutters binds too.
CURED_BY_SIZE = frozenset({"one_pass"})


def binding_limits(out: Outcome) -> list[LimitRecord]:
    """Return the limits that bind, those that stop most candidates first."""
    if out.limits:
        return out.limits
    rejected = _merged(limit for tried in out.rejected for limit in tried.limits)
    stopped_only_by_size = {limit.key for limit in rejected} <= CURED_BY_SIZE
    return [*rejected, *(_merged(out.excluded) if stopped_only_by_size else ())]


def _merged(limits: Iterable[LimitRecord]) -> list[LimitRecord]:
    """Return one record for each limit and rule, with the nearest miss and the number of candidates it stops."""
    merged: dict[tuple[str, str], LimitRecord] = {}
    for limit in limits:
        key = limit.key, limit.rule
        before = merged.get(key)
        if before is None:
            merged[key] = limit
        else:
            nearer = limit if _overshoot(limit) < _overshoot(before) else before
            merged[key] = replace(nearer, candidates=before.candidates + 1)
    return sorted(merged.values(), key=lambda limit: -limit.candidates)


def _overshoot(limit: LimitRecord) -> float:
    if isinstance(limit.value, int | float) and isinstance(limit.limit, int | float) and limit.limit and limit.value:
        ratio = abs(float(limit.value) / float(limit.limit))
        return max(ratio, 1 / ratio)
    return float("inf")
