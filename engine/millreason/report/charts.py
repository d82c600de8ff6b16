"""Charts of the report as SVG text: the spindle's power and torque, and how much of each limit is used."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from millreason.report import svg
from millreason.report.svg import INK, NEAR, PALE, SIGN, TOOL, Point
from millreason.units import plain

_LONGEST_NAME = 36
_WIDEST_USE = 130.0


@dataclass(frozen=True)
class Bar:
    """One limit and how much of it is used."""

    name: str
    use_percent: float
    verdict: str


@dataclass(frozen=True)
class WorkingPoint:
    """Where the cut runs: spindle speed [rpm] and net power [kW] with sharp and with worn edges."""

    speed_rpm: float
    sharp_kw: float
    worn_kw: float


@dataclass(frozen=True)
class _Frame:
    left: float
    right: float
    top: float
    floor: float
    fastest: float
    strongest: float

    def at(self, speed: float, share: float) -> Point:
        """Return the place of a speed and a share of the height."""
        return (
            self.left + (self.right - self.left) * speed / self.fastest,
            self.floor - (self.floor - self.top) * share,
        )


def drive_curve(points: Sequence[Point], work: WorkingPoint) -> str:
    """Draw net power and torque over spindle speed from points of speed [rpm] and net power [kW]."""
    ends = sorted(points)
    fastest = max(ends[-1][0], work.speed_rpm * 1.05)
    strongest = max([power for _, power in ends] + [work.worn_kw]) * 1.15
    frame = _Frame(50.0, 375.0, 30.0, 200.0, fastest, strongest)
    speeds = sorted({*(ends[-1][0] * step / 60 for step in range(1, 61)), *(speed for speed, _ in ends)})
    power = [(speed, power_at(ends, speed)) for speed in speeds]
    torque = [(speed, kilowatt * 30000 / math.pi / speed) for speed, kilowatt in power]
    most_torque = max(value for _, value in torque) * 1.15
    body = [
        *_axes(frame, most_torque),
        svg.polyline([frame.at(speed, value / strongest) for speed, value in power], TOOL),
        svg.polyline([frame.at(speed, value / most_torque) for speed, value in torque], INK, 1.5, "6 4"),
        *_working_point(frame, work),
    ]
    told = (
        f"At {plain(work.speed_rpm, 0)} rpm the cut takes {plain(work.sharp_kw, 2)} kW with sharp and "
        f"{plain(work.worn_kw, 2)} kW with worn edges; the spindle has "
        f"{plain(power_at(ends, work.speed_rpm), 2)} kW there."
    )
    return svg.drawing("drive", (430, 264), "Power and torque of the spindle", told, body)


def power_at(points: Sequence[Point], speed: float) -> float:
    """Return the power at a speed; below the first point the torque is constant."""
    before: Point = (0.0, 0.0)
    for point in points:
        if speed <= point[0]:
            share = (speed - before[0]) / (point[0] - before[0]) if point[0] > before[0] else 1.0
            return before[1] + share * (point[1] - before[1])
        before = point
    return before[1]


def _axes(frame: _Frame, most_torque: float) -> list[str]:
    left, right, top, floor = frame.left, frame.right, frame.top, frame.floor
    parts = [
        svg.polyline([(left, top), (left, floor), (right, floor), (right, top)], INK, 1),
        svg.text((left, 18), "net power, kW", colour=TOOL),
        svg.text((right, 18), "torque, N.m (dashed)", "end"),
        svg.text(((left + right) / 2, floor + 32), "spindle speed, rpm", "middle"),
    ]
    for quarter in range(5):
        share = quarter / 4
        x, y = frame.at(frame.fastest * share, share)
        parts += [
            svg.text((x, floor + 16), plain(frame.fastest * share, 0), "middle", size=10),
            svg.text((left - 5, y + 4), plain(frame.strongest * share, 1), "end", size=10),
            svg.text((right + 5, y + 4), plain(most_torque * share, 0), size=10),
        ]
    return parts


def _working_point(frame: _Frame, work: WorkingPoint) -> list[str]:
    sharp = frame.at(work.speed_rpm, work.sharp_kw / frame.strongest)
    worn = frame.at(work.speed_rpm, work.worn_kw / frame.strongest)
    words = (
        f"{plain(work.speed_rpm, 0)} rpm: {plain(work.sharp_kw, 2)} kW with sharp edges (full dot), "
        f"{plain(work.worn_kw, 2)} kW worn (open)"
    )
    return [
        svg.line((sharp[0], frame.floor), (sharp[0], frame.top), SIGN, 0.75, "3 3"),
        svg.line(sharp, worn, SIGN, 2),
        svg.circle(sharp, 5, SIGN, SIGN),
        svg.circle(worn, 5, SIGN, "#fff"),
        svg.text((frame.left, 258), words, size=11),
    ]


def margin_bars(bars: Sequence[Bar]) -> str:
    """Draw how much of each limit is used; a bar that passes the line is over its limit."""
    left, full, pitch = 225.0, 190.0, 24.0
    height = pitch * len(bars) + 26
    body = [part for row, bar in enumerate(bars) for part in _bar(bar, 8 + row * pitch, left, full)]
    body.append(svg.line((left + full, 2), (left + full, height - 18), INK, 1.5, "4 3"))
    body.append(svg.text((left + full, height - 5), "limit", "middle", size=11))
    told = "; ".join(f"{bar.name}: {bar.use_percent:.0f} % of the limit, {bar.verdict}" for bar in bars)
    return svg.drawing("margins", (560, height), "Use of each limit", told, body)


def _bar(bar: Bar, y: float, left: float, full: float) -> list[str]:
    long = full * min(max(bar.use_percent, 0.0), _WIDEST_USE) / 100
    colour = {"ok": TOOL, "near": NEAR}.get(bar.verdict, SIGN)
    name = bar.name if len(bar.name) <= _LONGEST_NAME else f"{bar.name[: _LONGEST_NAME - 3]}..."
    words = f"{bar.use_percent:.0f} % {bar.verdict}"
    return [
        svg.text((left - 8, y + 13), name, "end"),
        svg.rectangle((left, y), (full, 16), PALE),
        svg.rectangle((left, y), (long, 16), colour),
        svg.text((left + full * _WIDEST_USE / 100 + 10, y + 13), words, size=11),
    ]
