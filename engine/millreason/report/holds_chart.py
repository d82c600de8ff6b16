"""How far each number may move while the picks stay, as bars in SVG."""

from __future__ import annotations

import math
from collections.abc import Sequence

from millreason.explain.words import value_words
from millreason.explanation_records import Interval
from millreason.report import svg
from millreason.report.svg import INK, PALE, SIGN, TOOL
from millreason.report.words import fact_words

_LEFT, _FULL, _PITCH, _BAR = 210.0, 420.0, 30.0, 12.0
_LONGEST_NAME = 34


def holds_chart(intervals: Sequence[Interval], units: str) -> str:
    """Draw every interval on the span that was searched: blue where the picks stay, a mark at the present value."""
    height = _PITCH * len(intervals) + 8
    body = [part for row, entry in enumerate(intervals) for part in _row(entry, 4 + row * _PITCH, units)]
    told = "; ".join(_told(entry, units) for entry in intervals)
    return svg.drawing("holds", (_LEFT + _FULL + 60, height), "How far the inputs may move", told, body)


def _told(entry: Interval, units: str) -> str:
    low = entry.low.inside if entry.low else entry.bounds[0]
    high = entry.high.inside if entry.high else entry.bounds[1]
    ends = " to ".join(value_words(end, entry.unit, units) for end in (low, high))
    return f"{fact_words(entry.fact)}: {ends}"


def _row(entry: Interval, y: float, units: str) -> list[str]:
    low = entry.low.inside if entry.low else entry.bounds[0]
    high = entry.high.inside if entry.high else entry.bounds[1]
    a, b, now = (_LEFT + _FULL * _share(entry, value) for value in (low, high, entry.value))
    name = fact_words(entry.fact)
    words = name if len(name) <= _LONGEST_NAME else f"{name[: _LONGEST_NAME - 3]}..."
    parts = [
        svg.text((_LEFT - 8, y + 11), words, "end", size=11),
        svg.rectangle((_LEFT, y), (_FULL, _BAR), PALE),
        svg.rectangle((a, y), (max(b - a, 1.0), _BAR), TOOL),
        svg.line((now, y - 3), (now, y + _BAR + 3), INK, 2),
    ]
    for end, x, anchor in ((entry.low, a, "start"), (entry.high, b, "end")):
        if end is not None:
            parts.append(svg.line((x, y - 2), (x, y + _BAR + 2), SIGN, 1.5))
            parts.append(svg.text((x, y + _BAR + 11), value_words(end.inside, entry.unit, units), anchor, SIGN, 9.5))
    return parts


def _share(entry: Interval, value: float) -> float:
    """Return the place of a value on the span: by its logarithm, or straight where the span begins at zero."""
    low, high = entry.bounds
    if low > 0:
        return math.log(value / low) / math.log(high / low)
    return (value - low) / (high - low)
