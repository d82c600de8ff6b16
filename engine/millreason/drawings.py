"""Drawings as SVG text: pure functions of numbers, with a title and a description for those who cannot see them."""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from html import escape

from millreason.units import plain, show

INK, WORK, CUT, TOOL, SIGN = "#1d2429", "#eef0ea", "#d3dacb", "#2f5d8a", "#a03c12"
Point = tuple[float, float]


@dataclass(frozen=True)
class CutView:
    """A cutter over the work as the spindle sees it; lengths in mm, angles in degrees."""

    diameter_mm: float
    outermost_mm: float
    width_mm: float
    entry_gap_mm: float
    entry_deg: float
    exit_deg: float
    direction: str
    left_hand: bool = False
    units: str = "metric"


@dataclass(frozen=True)
class PassMap:
    """The passes over a face, seen from the spindle."""

    length_mm: float
    width_mm: float
    passes: int
    pass_width_mm: float
    overlap_mm: float
    diameter_mm: float
    entry_gap_mm: float
    left_hand: bool = False
    units: str = "metric"


@dataclass(frozen=True)
class EdgeAngles:
    """The angles of the cutting edge; `round_insert` draws a circle in place of a straight edge."""

    kappa_deg: float
    lead_deg: float | None
    axial_rake_deg: float
    radial_rake_deg: float
    depth_mm: float
    round_insert: bool = False
    units: str = "metric"


@dataclass(frozen=True)
class Bar:
    """One limit and how much of it is used."""

    name: str
    use_percent: float
    verdict: str


# ---------------------------------------------------------------------- small parts
def _svg(name: str, size: Point, title: str, told: str, body: Iterable[str]) -> str:
    """Wrap the parts of a drawing; `name` keeps ids apart when several stand on one page."""
    width, height = size
    head = (
        f'<svg xmlns="http://www.w3.org/2000/svg" class="drawing" role="img" viewBox="0 0 {_n(width)} {_n(height)}" '
        f'width="{_n(width)}" height="{_n(height)}" aria-labelledby="{name}-title {name}-told" font-family="Helvetica, Arial, sans-serif" font-size="12">'
    )
    return "\n".join((head, f'<title id="{name}-title">{escape(title)}</title>', f'<desc id="{name}-told">{escape(told)}</desc>', *body, "</svg>"))


def _n(number: float) -> str:
    return plain(number, 2)


def _text(at: Point, words: str, anchor: str = "start", colour: str = INK, size: float = 12) -> str:
    x, y = at
    # A white rim keeps the words readable where they cross a line.
    rim = 'paint-order="stroke" stroke="#fff" stroke-width="3" stroke-linejoin="round"'
    return f'<text x="{_n(x)}" y="{_n(y)}" text-anchor="{anchor}" fill="{colour}" font-size="{_n(size)}" {rim}>{escape(words)}</text>'


def _line(start: Point, end: Point, colour: str = INK, width: float = 1, dash: str = "") -> str:
    dashes = f' stroke-dasharray="{dash}"' if dash else ""
    return f'<line x1="{_n(start[0])}" y1="{_n(start[1])}" x2="{_n(end[0])}" y2="{_n(end[1])}" stroke="{colour}" stroke-width="{_n(width)}"{dashes}/>'


def _arrow(start: Point, end: Point, colour: str = INK, width: float = 1.5, both: bool = False) -> str:
    heads = _head(start, end, colour) + (_head(end, start, colour) if both else "")
    return _line(start, end, colour, width) + heads


def _head(start: Point, end: Point, colour: str) -> str:
    angle = math.atan2(end[1] - start[1], end[0] - start[0])
    sides = (end, *((end[0] - 9 * math.cos(angle + turn), end[1] - 9 * math.sin(angle + turn)) for turn in (0.35, -0.35)))
    return f'<polygon points="{" ".join(f"{_n(x)},{_n(y)}" for x, y in sides)}" fill="{colour}"/>'


def _circle(centre: Point, radius: float, stroke: str, fill: str = "none", width: float = 1.5, dash: str = "") -> str:
    dashes = f' stroke-dasharray="{dash}"' if dash else ""
    return f'<circle cx="{_n(centre[0])}" cy="{_n(centre[1])}" r="{_n(radius)}" fill="{fill}" stroke="{stroke}" stroke-width="{_n(width)}"{dashes}/>'


def _rect(corner: Point, size: Point, fill: str, stroke: str = "none") -> str:
    return f'<rect x="{_n(corner[0])}" y="{_n(corner[1])}" width="{_n(size[0])}" height="{_n(size[1])}" fill="{fill}" stroke="{stroke}"/>'


def _path(points: str, stroke: str, fill: str = "none", width: float = 1.5) -> str:
    return f'<path d="{points}" fill="{fill}" stroke="{stroke}" stroke-width="{_n(width)}"/>'


def _polyline(points: Sequence[Point], colour: str, dash: str = "", width: float = 2) -> str:
    dashes = f' stroke-dasharray="{dash}"' if dash else ""
    joined = " ".join(f"{_n(x)},{_n(y)}" for x, y in points)
    return f'<polyline points="{joined}" fill="none" stroke="{colour}" stroke-width="{_n(width)}"{dashes}/>'


# ---------------------------------------------------------------------- cutter over work
def cutter_over_work(view: CutView) -> str:
    """Draw the cutter over its strip of work, feed to the right, with entry, exit, overhang and turning sense.

    The picture is that of a right-hand cutter seen from the spindle; a left-hand cutter is its mirror image.
    """
    width, height, radius = 430.0, 330.0, 105.0
    scale = 2 * radius / view.diameter_mm
    centre = (185.0, height / 2 - 5)
    flip = -1.0 if view.left_hand else 1.0

    def rim(angle_deg: float, reach: float = 1.0) -> Point:
        turn = math.radians(angle_deg)
        return centre[0] + reach * radius * math.sin(turn), centre[1] - flip * reach * radius * math.cos(turn)

    near = centre[1] - flip * (radius - view.entry_gap_mm * scale)
    far = near + flip * view.width_mm * scale
    top, bottom = min(near, far), max(near, far)
    enter, leave = rim(view.entry_deg), rim(view.exit_deg)
    sweep = 0 if view.left_hand else 1
    large = 1 if view.exit_deg - view.entry_deg > 180 else 0
    uncut = f"M{_n(width)},{_n(enter[1])} L{_n(enter[0])},{_n(enter[1])} A{_n(radius)},{_n(radius)} 0 {large} {sweep} {_n(leave[0])},{_n(leave[1])} L{_n(width)},{_n(leave[1])} Z"
    arc = f"M{_n(enter[0])},{_n(enter[1])} A{_n(radius)},{_n(radius)} 0 {large} {sweep} {_n(leave[0])},{_n(leave[1])}"
    outer = min(view.outermost_mm * scale / 2, radius * 1.4)
    body = [
        _rect((0, top), (width, bottom - top), WORK),
        _path(uncut, "none", CUT),
        _line((0, top), (width, top), INK, 1), _line((0, bottom), (width, bottom), INK, 1),
        _circle(centre, outer, TOOL, "none", 1, "5 4"), _circle(centre, radius, TOOL, "#2f5d8a14", 2),
        _path(arc, SIGN, "none", 4),
        _line((20, centre[1]), (width - 100, centre[1]), TOOL, 0.75, "12 4 2 4"),
        _line((20, (top + bottom) / 2), (width - 100, (top + bottom) / 2), INK, 0.75, "3 4"),
        _circle(enter, 4, SIGN, SIGN), _circle(leave, 4, SIGN, "#fff"),
        *_turning(rim, flip), *_cut_labels(view, enter, leave, flip),
        *_width_mark(view, width - 62, top, bottom),
        _arrow((centre[0] - 30, centre[1] - 14), (centre[0] + 45, centre[1] - 14), INK, 2),
        _text((centre[0] - 30, centre[1] - 20), "feed of the cutter"),
        _text((10, height - 8), f"D {show(view.diameter_mm, 'mm', view.units)}, over the inserts {show(view.outermost_mm, 'mm', view.units)} (dashed)"),
    ]  # fmt: skip
    leave_gap = max(view.diameter_mm - view.width_mm - view.entry_gap_mm, 0.0)
    told = (
        f"Cutter of {_n(view.diameter_mm)} mm over a cut {_n(view.width_mm)} mm wide, {view.direction}. It stands {_n(view.entry_gap_mm)} mm over on the side "
        f"where teeth enter and {_n(leave_gap)} mm where they leave. Teeth enter at {_n(view.entry_deg)} and leave at {_n(view.exit_deg)} degrees."
    )
    return _svg("cut", (width, height), "Cutter over the work", told, body)


def _turning(rim, flip: float) -> list[str]:  # type: ignore[no-untyped-def]
    start, end, sweep = rim(285, 0.72), rim(330, 0.72), 1 if flip > 0 else 0
    almost = rim(322, 0.72)
    return [_path(f"M{_n(start[0])},{_n(start[1])} A75.6,75.6 0 0 {sweep} {_n(end[0])},{_n(end[1])}", TOOL, "none", 2), _head(almost, end, TOOL)]


def _cut_labels(view: CutView, enter: Point, leave: Point, flip: float) -> list[str]:
    leave_gap = max(view.diameter_mm - view.width_mm - view.entry_gap_mm, 0.0)
    up = -1 if flip > 0 else 1

    def label(at: Point, word: str, angle: float, gap: float, side: int) -> list[str]:
        y = at[1] + side * 14 + (4 if side > 0 else 0)
        return [_text((at[0] + 12, y), f"{word} {plain(angle, 1)}°, overhang {show(gap, 'mm', view.units)}", colour=SIGN)]

    return label(enter, "entry", view.entry_deg, view.entry_gap_mm, up) + label(leave, "exit", view.exit_deg, leave_gap, -up)


def _width_mark(view: CutView, x: float, top: float, bottom: float) -> list[str]:
    return [_arrow((x, (top + bottom) / 2), (x, top)), _arrow((x, (top + bottom) / 2), (x, bottom)),
            _text((x + 6, (top + bottom) / 2 - 4), "ae", size=13), _text((x + 6, (top + bottom) / 2 + 11), f"{plain(view.width_mm, 2)}", size=11)]  # fmt: skip


# ---------------------------------------------------------------------- pass map
def pass_map(lanes: PassMap) -> str:
    """Draw the passes side by side over the face, each with its number, feed arrow and the path of the cutter centre."""
    width, room, left = 430.0, 240.0, 70.0
    scale = min(250.0 / lanes.length_mm, room / max(lanes.width_mm, lanes.diameter_mm), 3.0)
    long, wide = max(lanes.length_mm * scale, 60.0), lanes.width_mm * scale
    radius = lanes.diameter_mm * scale / 2
    margin = max(radius - wide / 2, 0.0) + 24
    top = margin + max(lanes.entry_gap_mm, 0.0) * scale * 0.2
    height = top + wide + margin + 26
    flip = lanes.left_hand
    body = [_rect((left, top), (long, wide), CUT, INK)]
    pitch = (lanes.pass_width_mm - lanes.overlap_mm) * scale
    for number in range(lanes.passes):
        start = number * pitch
        strip = (start, min(start + lanes.pass_width_mm * scale, wide))
        centre = start - lanes.entry_gap_mm * scale + radius
        low, centre = (wide - strip[1], wide - centre) if flip else (strip[0], centre)
        y = top + centre
        if number:
            edge = top + (wide - start if flip else start)
            body.append(_rect((left, edge - (0 if not flip else lanes.overlap_mm * scale)), (long, max(lanes.overlap_mm * scale, 1)), "#a03c1255"))
        body += [_line((left - 40, y), (left + long + 45, y), TOOL, 0.75, "12 4 2 4"), _arrow((left + long * 0.35, y), (left + long * 0.65, y), INK, 2),
                 _text((left + 6, top + low + 14), f"{number + 1}", size=13)]  # fmt: skip
        if number == 0:
            body += [_circle((left - 8, y), radius, TOOL, "#2f5d8a14", 1.5)]
    body += [_text((left + long / 2, top + wide + margin - 6), f"{show(lanes.length_mm, 'mm', lanes.units)} long, {show(lanes.width_mm, 'mm', lanes.units)} wide", "middle"),
             _text((left + long / 2, height - 8), _lanes_words(lanes), "middle", size=11)]  # fmt: skip
    told = f"{lanes.passes} passes of {_n(lanes.pass_width_mm)} mm over a face {_n(lanes.length_mm)} by {_n(lanes.width_mm)} mm, overlapping by {_n(lanes.overlap_mm)} mm, all fed the same way."
    return _svg("passes", (width, height), "Pass map", told, body)


def _lanes_words(lanes: PassMap) -> str:
    if lanes.passes == 1:
        return "one pass; the chain line is the path of the cutter centre"
    return f"{lanes.passes} passes, one way, overlap {show(lanes.overlap_mm, 'mm', lanes.units)} (red)"


# ---------------------------------------------------------------------- lead and rake
def rakes_and_lead(angles: EdgeAngles) -> str:
    """Draw the lead angle in section, the axial rake from the side and the radial rake from below."""
    body = [*_lead_part(angles), *_rake_part((215, 40), "axial rake", angles.axial_rake_deg, "from the side"),
            *_rake_part((335, 40), "radial rake", angles.radial_rake_deg, "from below")]  # fmt: skip
    lead = "round insert, lead follows the depth" if angles.lead_deg is None else f"lead {_n(angles.lead_deg)}, kappa {_n(angles.kappa_deg)} degrees"
    told = f"{lead}; axial rake {angles.axial_rake_deg:+g}, radial rake {angles.radial_rake_deg:+g} degrees."
    return _svg("edge", (430, 200), "Lead and rake", told, body)


def _lead_part(angles: EdgeAngles) -> list[str]:
    floor, foot, depth = 140.0, 70.0, 60.0
    base = [_text((15, 20), "lead, in section", size=12)]
    if angles.round_insert:
        radius = 75.0
        x = math.sqrt(max(radius**2 - (radius - depth) ** 2, 0.0))
        work = f"M10,{_n(floor)} H{_n(foot + 10)} A{radius},{radius} 0 0 0 {_n(foot + 10 + x)},{_n(floor - depth)} H195 V165 H10 Z"
        return [*base, _path(work, INK, CUT, 1), _circle((foot + 10, floor - radius), radius, TOOL, "#2f5d8a22", 2), _depth_mark(angles, floor, depth),
                _text((15, 185), "round insert: kappa follows the depth")]  # fmt: skip
    kappa = math.radians(max(angles.kappa_deg, 5.0))
    run = min(depth / math.tan(kappa), 110.0)
    rise = run * math.tan(kappa) if run == 110.0 else depth
    reach = 1.25
    tip = (foot + run * reach, floor - rise * reach)
    work = f"M10,{_n(floor)} H{_n(foot)} L{_n(foot + run)},{_n(floor - rise)} H195 V165 H10 Z"
    insert = f"M{_n(foot)},{_n(floor)} L{_n(tip[0])},{_n(tip[1])} L{_n(tip[0] - 42)},{_n(tip[1] - 14)} L{_n(foot - 42)},{_n(floor - 6)} Z"
    mark = 34.0
    end = (foot + mark * math.cos(kappa), floor - mark * math.sin(kappa))
    arc = f"M{_n(foot + mark)},{_n(floor)} A{mark},{mark} 0 0 0 {_n(end[0])},{_n(end[1])}"
    lead = "" if angles.lead_deg is None else f"lead {plain(angles.lead_deg, 1)}° (κr {plain(angles.kappa_deg, 1)}°)"
    return [*base, _path(work, INK, CUT, 1), _path(insert, TOOL, "#2f5d8a22", 1), _line((foot, floor), tip, TOOL, 3), _line((foot, floor), (foot + 60, floor), INK, 0.75, "3 3"),
            _path(arc, SIGN), _text((foot + mark + 4, floor - 6), f"κr {plain(angles.kappa_deg, 1)}°", colour=SIGN), _depth_mark(angles, floor, rise), _text((15, 185), lead)]  # fmt: skip


def _depth_mark(angles: EdgeAngles, floor: float, rise: float) -> str:
    x = 185.0
    return _line((x, floor), (x, floor - rise), INK, 1) + _line((x - 5, floor), (x + 5, floor)) + _line((x - 5, floor - rise), (x + 5, floor - rise)) + _text(
        (x - 4, floor - rise - 5), f"ap {show(angles.depth_mm, 'mm')}", "end", size=11)  # fmt: skip


def _rake_part(corner: Point, name: str, rake_deg: float, seen: str) -> list[str]:
    """Draw a rake face against its reference line; the edge moves to the left, a positive face leans back."""
    x, y = corner
    tip = (x + 40, y + 100)
    lean = math.tan(math.radians(max(min(rake_deg, 60), -60))) * 75
    top = (tip[0] + lean, tip[1] - 75)
    insert = f"M{_n(tip[0])},{_n(tip[1])} L{_n(top[0])},{_n(top[1])} L{_n(top[0] + 30)},{_n(top[1])} L{_n(tip[0] + 34)},{_n(tip[1] - 8)} Z"
    return [
        _text((x, 20), name), _text((x, 34), f"({seen})", size=10),
        _rect((x - 5, tip[1]), (100, 14), CUT), _line((x - 5, tip[1]), (x + 95, tip[1])),
        _path(insert, TOOL, "#2f5d8a22", 1), _line(tip, top, TOOL, 3), _line(tip, (tip[0], tip[1] - 85), INK, 0.75, "3 3"),
        _arrow((tip[0] - 6, tip[1] - 30), (tip[0] - 38, tip[1] - 30)), _text((x, 185), f"{rake_deg:+g}°", colour=SIGN, size=13),
    ]  # fmt: skip


# ---------------------------------------------------------------------- power and torque
def drive_curve(points: Sequence[Point], speed_rpm: float, net_kw: float, worn_kw: float) -> str:
    """Draw net power and torque over spindle speed from points of speed [rpm] and power [kW], with the working point."""
    width, height, left, right, top, floor = 430.0, 250.0, 50.0, 375.0, 30.0, 200.0
    ends = sorted(points)
    fastest = max([ends[-1][0], speed_rpm * 1.05])
    strongest = max([power for _, power in ends] + [worn_kw]) * 1.15
    speeds = sorted({*(fastest * step / 60 for step in range(1, 61)), *(speed for speed, _ in ends)})
    power = [(speed, _power_at(ends, speed)) for speed in speeds if speed <= ends[-1][0]]
    torque = [(speed, kilowatt * 30000 / math.pi / speed) for speed, kilowatt in power]
    most_torque = max(value for _, value in torque) * 1.15

    def place(speed: float, share: float) -> Point:
        return left + (right - left) * speed / fastest, floor - (floor - top) * share

    spot, worn = place(speed_rpm, net_kw / strongest), place(speed_rpm, worn_kw / strongest)
    body = [
        _line((left, floor), (right, floor)), _line((left, floor), (left, top)), _line((right, floor), (right, top)),
        *_ticks(left, right, top, floor, fastest, strongest, most_torque),
        _polyline([place(speed, value / strongest) for speed, value in power], TOOL),
        _polyline([place(speed, value / most_torque) for speed, value in torque], INK, "6 4", 1.5),
        _line((spot[0], floor), (spot[0], top), SIGN, 0.75, "3 3"), _line(spot, worn, SIGN, 2),
        _circle(spot, 5, SIGN, SIGN), _circle(worn, 5, SIGN, "#fff"),
        _text((left, 18), "net power, kW", colour=TOOL), _text((right, 18), "torque, N.m (dashed)", "end"),
        _text(((left + right) / 2, floor + 32), "spindle speed, rpm", "middle"),
        _text((left, height - 4), f"working point {plain(speed_rpm, 0)} rpm: {plain(net_kw)} kW sharp (full), {plain(worn_kw)} kW worn (open)", size=11),
    ]  # fmt: skip
    told = f"At {_n(speed_rpm)} rpm the cut takes {_n(net_kw)} kW with sharp and {_n(worn_kw)} kW with worn edges; the spindle has {_n(_power_at(ends, speed_rpm))} kW there."
    return _svg("drive", (width, height), "Power and torque of the spindle", told, body)


def _power_at(points: Sequence[Point], speed: float) -> float:
    """Interpolate power; below the first point the torque is constant."""
    before: Point = (0.0, 0.0)
    for point in points:
        if speed <= point[0]:
            share = (speed - before[0]) / (point[0] - before[0]) if point[0] > before[0] else 1.0
            return before[1] + share * (point[1] - before[1])
        before = point
    return points[-1][1]


def _ticks(left: float, right: float, top: float, floor: float, fastest: float, strongest: float, most_torque: float) -> list[str]:
    marks = []
    for step in range(5):
        x, y = left + (right - left) * step / 4, floor - (floor - top) * step / 4
        marks += [_text((x, floor + 16), plain(fastest * step / 4, 0), "middle", size=10), _text((left - 5, y + 4), plain(strongest * step / 4, 1), "end", size=10),
                  _text((right + 5, y + 4), plain(most_torque * step / 4, 0), size=10)]  # fmt: skip
    return marks


# ---------------------------------------------------------------------- margins
def margin_bars(bars: Sequence[Bar]) -> str:
    """Draw how much of each limit is used; a bar that passes the line is over its limit."""
    width, left, full, pitch = 640.0, 230.0, 270.0, 24.0
    height = pitch * len(bars) + 26
    body = []
    for row, bar in enumerate(bars):
        y = 8 + row * pitch
        long = full * min(max(bar.use_percent, 0.0), 130.0) / 100
        colour, pattern = {"ok": (TOOL, ""), "near": ("#c98a1b", "")}.get(bar.verdict, (SIGN, ""))
        body += [_text((left - 8, y + 13), _short(bar.name), "end"), _rect((left, y), (full, 16), "#f1f1ee"), _rect((left, y), (long, 16), colour),
                 _text((left + max(long, 0) + 6, y + 13), f"{bar.use_percent:.0f} % {bar.verdict}{pattern}", size=11)]  # fmt: skip
    body.append(_line((left + full, 2), (left + full, height - 18), INK, 1.5, "4 3"))
    body.append(_text((left + full, height - 5), "limit", "middle", size=11))
    told = "; ".join(f"{bar.name}: {bar.use_percent:.0f} % of the limit, {bar.verdict}" for bar in bars)
    return _svg("margins", (width, height), "Use of each limit", told, body)


def _short(name: str) -> str:
    return name if len(name) <= 36 else f"{name[:35]}…"
