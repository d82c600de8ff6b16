"""Drawings of the cut as SVG text: the cutter over the work, the passes, and the angles of the edge."""

from __future__ import annotations

import math
from dataclasses import dataclass

from millreason.report import svg
from millreason.report.svg import CENTRE_LINE, CUT, GLASS, INK, SIGN, TOOL, WORK, Point, number
from millreason.units import plain, show

_FLATTEST_DRAWN_DEG = 5.0
_STEEPEST_RAKE_DRAWN_DEG = 60.0


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

    @property
    def exit_gap_mm(self) -> float:
        """Overhang of the cutter on the side where teeth leave."""
        return max(self.diameter_mm - self.width_mm - self.entry_gap_mm, 0.0)


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


# ---------------------------------------------------------------------- cutter over work
@dataclass(frozen=True)
class _Stage:
    """Places the cutter on the drawing; a left-hand cutter is the mirror image of a right-hand one."""

    view: CutView
    centre: Point = (175.0, 172.0)
    radius: float = 112.0
    width: float = 520.0

    @property
    def scale(self) -> float:
        return 2 * self.radius / self.view.diameter_mm

    @property
    def side(self) -> float:
        return -1.0 if self.view.left_hand else 1.0

    def rim(self, angle_deg: float, reach: float = 1.0) -> Point:
        """Return the place of an angle that turns with the cutter, 90 being the front."""
        turn = math.radians(angle_deg)
        across = self.side * reach * self.radius * math.cos(turn)
        return self.centre[0] + reach * self.radius * math.sin(turn), self.centre[1] - across

    @property
    def edges(self) -> tuple[float, float]:
        """Height of the side of the work where teeth enter, and of the one where they leave."""
        enter = self.centre[1] - self.side * (self.radius - self.view.entry_gap_mm * self.scale)
        return enter, enter + self.side * self.view.width_mm * self.scale


def cutter_over_work(view: CutView) -> str:
    """Draw the cutter over its strip of work, feed to the right: entry, exit, overhang, turning sense."""
    stage = _Stage(view)
    body = [*_work(stage), *_cutter(stage), *_entry_and_exit(stage), *_width_of_cut(stage)]
    told = (
        f"Cutter of {number(view.diameter_mm)} mm, cut {number(view.width_mm)} mm wide, {view.direction}. "
        f"It stands {number(view.entry_gap_mm)} mm over on the side where teeth enter and "
        f"{number(view.exit_gap_mm)} mm where they leave. Teeth enter at {number(view.entry_deg)} "
        f"and leave at {number(view.exit_deg)} degrees."
    )
    return svg.drawing("cut", (stage.width, 360), "Cutter over the work", told, body)


def _work(stage: _Stage) -> list[str]:
    top, bottom = sorted(stage.edges)
    view, end = stage.view, stage.width
    enter, leave = stage.rim(view.entry_deg), stage.rim(view.exit_deg)
    rim = svg.arc(enter, leave, stage.radius, not view.left_hand)
    uncut = f"{rim} L{number(end)},{number(leave[1])} L{number(end)},{number(enter[1])} Z"
    return [
        svg.rectangle((0, top), (end, bottom - top), WORK),
        svg.path(uncut, "none", CUT),
        svg.line((0, top), (end, top)),
        svg.line((0, bottom), (end, bottom)),
        svg.line((10, (top + bottom) / 2), (end - 130, (top + bottom) / 2), INK, 0.75, "3 4"),
    ]


def _cutter(stage: _Stage) -> list[str]:
    view, (x, y) = stage.view, stage.centre
    outer = min(view.outermost_mm * stage.scale / 2, stage.radius * 1.4)
    start, end = stage.rim(285, 0.72), stage.rim(330, 0.72)
    inner, over = (show(size, "mm", view.units) for size in (view.diameter_mm, view.outermost_mm))
    return [
        svg.circle(stage.centre, outer, TOOL, "none", 1, "5 4"),
        svg.circle(stage.centre, stage.radius, TOOL, GLASS, 2),
        svg.line((10, y), (stage.width - 130, y), TOOL, 0.75, CENTRE_LINE),
        svg.path(svg.arc(start, end, stage.radius * 0.72, not view.left_hand), TOOL, width=2),
        svg.arrow_head(stage.rim(322, 0.72), end, TOOL),
        svg.arrow((x - 30, y - 14), (x + 45, y - 14), INK, 2),
        svg.text((x - 30, y - 20), "feed of the cutter"),
        svg.text((10, 350), f"D {inner}, over the inserts {over} (dashed)"),
    ]


def _entry_and_exit(stage: _Stage) -> list[str]:
    view, down = stage.view, stage.side
    enter, leave = stage.rim(view.entry_deg), stage.rim(view.exit_deg)
    long_way = view.exit_deg - view.entry_deg > 180
    return [
        svg.path(svg.arc(enter, leave, stage.radius, not view.left_hand, long_way), SIGN, width=4),
        svg.circle(enter, 4, SIGN, SIGN),
        svg.circle(leave, 4, SIGN, "#fff"),
        _rim_label(view, enter, "entry", view.entry_deg, view.entry_gap_mm, -down),
        _rim_label(view, leave, "exit", view.exit_deg, view.exit_gap_mm, down),
    ]


def _rim_label(view: CutView, at: Point, word: str, angle: float, gap: float, below: float) -> str:
    """Write angle and overhang beside a point of the rim, on the side away from the cutter's middle."""
    first, second = (16.0, 30.0) if below > 0 else (-22.0, -8.0)
    place = at[0] + 12
    over = svg.text((place, at[1] + second), f"overhang {svg.length(gap, view.units)}", colour=SIGN)
    return svg.text((place, at[1] + first), f"{word} {plain(angle, 1)}°", colour=SIGN) + over


def _width_of_cut(stage: _Stage) -> list[str]:
    top, bottom = sorted(stage.edges)
    x, middle = stage.width - 110, (top + bottom) / 2
    words = svg.stacked((x + 6, middle + 11), stage.view.width_mm, stage.view.units)
    up, down = svg.arrow((x, middle), (x, top)), svg.arrow((x, middle), (x, bottom))
    return [up, down, svg.text((x + 6, middle - 4), "ae", size=13), *words]


# ---------------------------------------------------------------------- pass map
@dataclass(frozen=True)
class _Face:
    """Places the face and its passes on the drawing."""

    lanes: PassMap

    @property
    def scale(self) -> float:
        lanes = self.lanes
        return min(300.0 / lanes.length_mm, 230.0 / max(lanes.width_mm, lanes.diameter_mm), 3.0)

    @property
    def left(self) -> float:
        """Return where the face begins: centred, with room for the cutter before it."""
        return max((520 - self.size[0]) / 2, self.radius + 16)

    @property
    def size(self) -> Point:
        return max(self.lanes.length_mm * self.scale, 60.0), self.lanes.width_mm * self.scale

    @property
    def radius(self) -> float:
        return self.lanes.diameter_mm * self.scale / 2

    @property
    def top(self) -> float:
        first = self.lanes.entry_gap_mm * self.scale
        last = self.radius * 2 - self.lanes.pass_width_mm * self.scale - first
        return max(first, last, 0.0) + 14

    def across(self, from_entry_side: float) -> float:
        """Return the height of a line that lies a distance from the side where the first pass enters."""
        wide = self.size[1]
        return self.top + (wide - from_entry_side if self.lanes.left_hand else from_entry_side)


def pass_map(lanes: PassMap) -> str:
    """Draw the passes side by side: number, feed arrow, overlap and the path of the cutter centre."""
    face = _Face(lanes)
    long, wide = face.size
    floor = face.top + wide
    body = [svg.rectangle((face.left, face.top), (long, wide), CUT, INK)]
    body += [part for place in range(lanes.passes) for part in _lane(face, place)]
    size = f"{show(lanes.length_mm, 'mm', lanes.units)} long, {show(lanes.width_mm, 'mm', lanes.units)} wide"
    words_at = floor + face.top + 6
    body.append(svg.text((260, words_at), size, "middle"))
    body.append(svg.text((260, words_at + 17), _lanes_words(lanes), "middle", size=11))
    told = (
        f"{lanes.passes} passes of {number(lanes.pass_width_mm)} mm over a face {number(lanes.length_mm)} by "
        f"{number(lanes.width_mm)} mm, overlapping by {number(lanes.overlap_mm)} mm, all fed the same way."
    )
    return svg.drawing("passes", (520, words_at + 26), "Pass map", told, body)


def _lane(face: _Face, place: int) -> list[str]:
    lanes, (long, wide) = face.lanes, face.size
    start = place * (lanes.pass_width_mm - lanes.overlap_mm) * face.scale
    end = min(start + lanes.pass_width_mm * face.scale, wide)
    y = face.across(start - lanes.entry_gap_mm * face.scale + face.radius)
    parts = [
        svg.line((face.left - 60, y), (face.left + long + 60, y), TOOL, 0.75, CENTRE_LINE),
        svg.arrow((face.left + long * 0.35, y), (face.left + long * 0.65, y), INK, 2),
        svg.text((face.left + 6, face.across((start + end) / 2) + 5), f"{place + 1}", size=13),
    ]
    if place == 0:
        return [*parts, svg.circle((face.left - 8, y), face.radius, TOOL, GLASS)]
    first, last = sorted((face.across(start), face.across(start + lanes.overlap_mm * face.scale)))
    return [svg.rectangle((face.left, first), (long, max(last - first, 1.0)), "#a03c1266"), *parts]


def _lanes_words(lanes: PassMap) -> str:
    if lanes.passes == 1:
        return "one pass; the chain line is the path of the cutter centre"
    return f"{lanes.passes} passes, one way, overlap {show(lanes.overlap_mm, 'mm', lanes.units)} (red)"


# ---------------------------------------------------------------------- lead and rake
def rakes_and_lead(angles: EdgeAngles) -> str:
    """Draw the lead angle in section, the axial rake from the side and the radial rake from below."""
    section = _round_section(angles) if angles.round_insert else _straight_section(angles)
    axial = _rake((285, 40), "axial rake", angles.axial_rake_deg, "from the side")
    radial = _rake((405, 40), "radial rake", angles.radial_rake_deg, "from below")
    lead = "round insert, lead follows the depth"
    if angles.lead_deg is not None:
        lead = f"lead {number(angles.lead_deg)}, kappa {number(angles.kappa_deg)} degrees"
    told = f"{lead}; axial rake {angles.axial_rake_deg:+g}, radial rake {angles.radial_rake_deg:+g} degrees."
    body = [svg.text((15, 20), "lead, in section"), *section, *axial, *radial]
    return svg.drawing("edge", (520, 200), "Lead and rake", told, body)


_FLOOR, _FOOT, _DEEP, _WORK_END = 140.0, 65.0, 60.0, 185.0


def _round_section(angles: EdgeAngles) -> list[str]:
    radius, deep, foot = 58.0, 42.0, _FOOT + 10
    run = math.sqrt(radius**2 - (radius - deep) ** 2)
    rim = svg.arc((foot, _FLOOR), (foot + run, _FLOOR - deep), radius, clockwise=False)
    rest = f" H{number(_WORK_END)} V165 H10 V{number(_FLOOR)} Z"
    return [
        svg.path(rim + rest, INK, CUT, 1),
        svg.circle((foot, _FLOOR - radius), radius, TOOL, GLASS, 2),
        *_depth_mark(angles, deep),
        svg.text((15, 185), "round insert: kappa follows the depth"),
    ]


def _straight_section(angles: EdgeAngles) -> list[str]:
    kappa = math.radians(max(angles.kappa_deg, _FLATTEST_DRAWN_DEG))
    run = min(_DEEP / math.tan(kappa), 110.0)
    rise = min(run * math.tan(kappa), _DEEP) if run == 110.0 else _DEEP
    foot = (_FOOT, _FLOOR)
    tip = (_FOOT + run * 1.25, _FLOOR - rise * 1.25)
    shoulder = (_FOOT + run, _FLOOR - rise)
    work = ((10, _FLOOR), foot, shoulder, (_WORK_END, _FLOOR - rise), (_WORK_END, 165.0), (10, 165.0))
    insert = (foot, tip, (tip[0] - 42, tip[1] - 14), (_FOOT - 42, _FLOOR - 6))
    mark = (_FOOT + 34 * math.cos(kappa), _FLOOR - 34 * math.sin(kappa))
    named = "" if angles.lead_deg is None else f"lead {plain(angles.lead_deg, 1)}°, kappa {plain(angles.kappa_deg, 1)}°"
    return [
        svg.polygon(work, INK, CUT),
        svg.polygon(insert, TOOL, GLASS),
        svg.line(foot, tip, TOOL, 3),
        svg.line(foot, (_FOOT + 60, _FLOOR), INK, 0.75, "3 3"),
        svg.path(svg.arc((_FOOT + 34, _FLOOR), mark, 34, clockwise=False), SIGN),
        svg.text((_FOOT + 38, _FLOOR - 6), f"{plain(angles.kappa_deg, 1)}°", colour=SIGN),
        *_depth_mark(angles, rise),
        svg.text((15, 185), named),
    ]


def _depth_mark(angles: EdgeAngles, rise: float) -> list[str]:
    x, top = _WORK_END + 10, _FLOOR - rise
    ticks = [svg.line((x - 5, y), (x + 5, y)) for y in (_FLOOR, top)]
    middle = (_FLOOR + top) / 2
    words = svg.stacked((x + 6, middle + 12), angles.depth_mm, angles.units)
    return [svg.line((x, _FLOOR), (x, top)), *ticks, svg.text((x + 6, middle - 2), "ap", size=13), *words]


def _rake(corner: Point, name: str, rake_deg: float, seen: str) -> list[str]:
    """Draw a rake face against its reference line; the edge moves to the left, a positive face leans back."""
    x, y = corner
    tip = (x + 40, y + 100)
    drawn = max(min(rake_deg, _STEEPEST_RAKE_DRAWN_DEG), -_STEEPEST_RAKE_DRAWN_DEG)
    top = (tip[0] + math.tan(math.radians(drawn)) * 75, tip[1] - 75)
    insert = (tip, top, (top[0] + 30, top[1]), (tip[0] + 34, tip[1] - 8))
    return [
        svg.text((x, 20), name),
        svg.text((x, 34), f"({seen})", size=10),
        svg.rectangle((x - 5, tip[1]), (100, 14), CUT),
        svg.line((x - 5, tip[1]), (x + 95, tip[1])),
        svg.polygon(insert, TOOL, GLASS),
        svg.line(tip, top, TOOL, 3),
        svg.line(tip, (tip[0], tip[1] - 85), INK, 0.75, "3 3"),
        svg.arrow((tip[0] - 6, tip[1] - 30), (tip[0] - 38, tip[1] - 30)),
        svg.text((x, 185), f"{rake_deg:+g}°", colour=SIGN, size=13),
    ]
