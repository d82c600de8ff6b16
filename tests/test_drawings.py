from __future__ import annotations

import re
from dataclasses import replace
from xml.etree import ElementTree

import pytest

from millreason.formulas.engagement import engagement_arc
from millreason.report import charts, drawings, svg
from millreason.report.charts import Bar, WorkingPoint, margin_bars, power_at
from millreason.report.drawings import CutView, EdgeAngles, PassMap, cutter_over_work, pass_map, rakes_and_lead

SVG = "{http://www.w3.org/2000/svg}"
VIEW = CutView(100.0, 112.0, 60.0, 25.0, *(0.0, 0.0), "climb")
CURVE = [(1000.0, 8.0), (6000.0, 8.0)]


def view(width: float = 60.0, gap: float = 25.0, left_hand: bool = False) -> CutView:
    arc = engagement_arc(width, 100.0, gap)
    return replace(
        VIEW,
        width_mm=width,
        entry_gap_mm=gap,
        entry_deg=arc.entry_deg,
        exit_deg=arc.exit_deg,
        left_hand=left_hand,
    )


def root(drawing: str) -> ElementTree.Element:
    return ElementTree.fromstring(drawing)


def dots(drawing: str) -> list[tuple[float, float]]:
    small = [circle for circle in root(drawing).iter(f"{SVG}circle") if circle.get("r") == "4"]
    return [(float(circle.get("cx", "")), float(circle.get("cy", ""))) for circle in small]


def work_edges(drawing: str) -> list[float]:
    first = next(root(drawing).iter(f"{SVG}rect"))
    return [float(first.get("y", "")), float(first.get("y", "")) + float(first.get("height", ""))]


@pytest.mark.parametrize(("width", "gap"), [(60.0, 25.0), (60.0, 40.0), (80.0, 5.0), (30.0, 0.0)])
@pytest.mark.parametrize("left_hand", [False, True])
def test_teeth_enter_and_leave_where_the_rim_crosses_the_edges_of_the_work(
    width: float, gap: float, left_hand: bool
) -> None:
    drawing = cutter_over_work(view(width, gap, left_hand))
    (_, enter), (_, leave) = dots(drawing)
    assert sorted((enter, leave)) == pytest.approx(work_edges(drawing), abs=0.02)
    assert (enter > leave) == left_hand


def test_dots_lie_on_the_rim_at_the_front() -> None:
    drawing = cutter_over_work(view())
    centre = (175.0, 172.0)
    for x, y in dots(drawing):
        assert ((x - centre[0]) ** 2 + (y - centre[1]) ** 2) ** 0.5 == pytest.approx(112.0, abs=0.02)
        assert x > centre[0]


def test_the_description_tells_what_is_drawn() -> None:
    told = cutter_over_work(view(60.0, 40.0))
    assert "40 mm over on the side where teeth enter and 0 mm where they leave" in told
    assert root(told).get("role") == "img"


@pytest.mark.parametrize("passes", [1, 2, 5])
def test_the_pass_map_shows_every_pass_inside_the_face(passes: int) -> None:
    width = (200.0 + (passes - 1) * 3.0) / passes
    drawing = pass_map(PassMap(400.0, 200.0, passes, width, 3.0, 250.0, 0.0))
    numbers = [text.text for text in root(drawing).iter(f"{SVG}text") if (text.text or "").isdigit()]
    assert numbers == [str(place + 1) for place in range(passes)]
    face = next(root(drawing).iter(f"{SVG}rect"))
    assert float(face.get("height", "")) / float(face.get("width", "")) == pytest.approx(0.5, rel=0.01)


@pytest.mark.parametrize("size", [(3.0, 2.0), (20000.0, 40.0), (40.0, 3000.0)])
def test_the_pass_map_keeps_within_its_frame_for_any_size(size: tuple[float, float]) -> None:
    drawing = pass_map(PassMap(*size, 1, size[1], 0.0, size[1] * 1.3, size[1] * 0.2))
    _, _, width, height = (float(part) for part in root(drawing).get("viewBox", "").split())
    assert width == 520
    assert 0 < height < 700


def test_positive_rake_leans_back_and_negative_leans_forward() -> None:
    drawing = rakes_and_lead(EdgeAngles(45.0, 45.0, 12.0, -5.0, 2.5))
    lines = [line for line in root(drawing).iter(f"{SVG}line") if line.get("stroke-width") == "3"]
    axial, radial = lines[-2:]
    assert float(axial.get("x2", "")) > float(axial.get("x1", ""))
    assert float(radial.get("x2", "")) < float(radial.get("x1", ""))


@pytest.mark.parametrize("kappa", [90.0, 75.0, 45.0, 15.0])
def test_the_edge_is_drawn_at_its_angle(kappa: float) -> None:
    from math import atan2, degrees

    drawing = rakes_and_lead(EdgeAngles(kappa, 90 - kappa, 0.0, 0.0, 2.0))
    edge = next(line for line in root(drawing).iter(f"{SVG}line") if line.get("stroke-width") == "3")
    run = float(edge.get("x2", "")) - float(edge.get("x1", ""))
    rise = float(edge.get("y1", "")) - float(edge.get("y2", ""))
    assert degrees(atan2(rise, run)) == pytest.approx(kappa, abs=0.1)


def test_a_round_insert_is_drawn_round() -> None:
    drawing = rakes_and_lead(EdgeAngles(34.0, None, 0.0, 0.0, 2.0, round_insert=True))
    assert any(circle.get("r") == "58" for circle in root(drawing).iter(f"{SVG}circle"))


def test_power_falls_with_speed_below_the_base_speed_and_stays_above() -> None:
    assert power_at(CURVE, 500.0) == pytest.approx(4.0)
    assert power_at(CURVE, 1000.0) == power_at(CURVE, 3000.0) == 8.0
    assert power_at([(100.0, 1.0), (200.0, 3.0)], 150.0) == pytest.approx(2.0)


def test_the_working_point_lies_under_the_curve_when_power_suffices() -> None:
    drawing = charts.drive_curve(CURVE, WorkingPoint(2000.0, 4.0, 5.2))
    sharp, worn = [circle for circle in root(drawing).iter(f"{SVG}circle")]
    curve = next(line for line in root(drawing).iter(f"{SVG}polyline") if line.get("stroke") == svg.TOOL)
    top = min(float(pair.split(",")[1]) for pair in curve.get("points", "").split())
    assert float(sharp.get("cy", "")) > float(worn.get("cy", "")) > top
    assert "has 8 kW there" in drawing


def test_a_bar_passes_the_limit_line_exactly_when_the_limit_is_passed() -> None:
    drawing = margin_bars(
        [Bar("a", 100.0, "ok"), Bar("b", 130.0, "over"), Bar("c", 999.0, "over"), Bar("d", 0.0, "ok")]
    )
    lengths = [float(rect.get("width", "")) for rect in root(drawing).iter(f"{SVG}rect")][1::2]
    limit = next(root(drawing).iter(f"{SVG}line"))
    full = float(limit.get("x1", "")) - 225.0
    assert lengths == pytest.approx([full, full * 1.3, full * 1.3, 0.0])


def test_words_are_escaped() -> None:
    drawing = margin_bars([Bar("<script>&\"'", 50.0, "ok")])
    assert "<script>" not in drawing
    assert "&lt;script&gt;&amp;" in drawing
    assert root(drawing) is not None


def test_drawings_on_one_page_have_ids_of_their_own() -> None:
    made = "".join(
        (
            drawings.cutter_over_work(view()),
            pass_map(PassMap(400.0, 200.0, 4, 52.0, 3.0, 80.0, 28.0)),
            rakes_and_lead(EdgeAngles(45.0, 45.0, 12.0, -5.0, 2.5)),
            charts.drive_curve(CURVE, WorkingPoint(2000.0, 4.0, 5.2)),
            margin_bars([Bar("a", 50.0, "ok")]),
        )
    )
    ids = re.findall(r' id="([^"]+)"', made)
    assert len(ids) == len(set(ids)) == 10
