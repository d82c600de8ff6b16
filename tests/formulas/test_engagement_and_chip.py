"""Limits and symmetries of engagement, chip and rakes."""

import math

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from millreason.formulas import chip, engagement, rakes

steady = settings(max_examples=200, deadline=None, derandomize=True)
shares = st.floats(0.02, 1.0)
places = st.floats(0.0, 1.0)
rake_angles = st.floats(-30, 30)
kappas = st.floats(5, 90)


def at(share: float, place: float, diameter: float = 100.0) -> engagement.Engagement:
    return engagement.engagement_arc(share * diameter, diameter, (1 - share) * diameter * place)


@steady
@given(shares, places)
def test_mirrored_position_swaps_entry_and_exit(share, place):
    here, there = at(share, place), at(share, 1 - place)
    assert here.entry_deg == pytest.approx(180 - there.exit_deg, abs=1e-5)
    assert here.arc_deg == pytest.approx(there.arc_deg, abs=1e-5)
    thickest = [chip.maximum_chip_thickness(0.2, 45, arc.entry_deg, arc.exit_deg) for arc in (here, there)]
    assert thickest[0] == pytest.approx(thickest[1], rel=1e-6)


@steady
@given(shares, places)
def test_arc_is_shortest_centred_and_longest_flush(share, place):
    arc = at(share, place).arc_deg
    centred = engagement.centred_arc(share, 1.0)
    flush = [engagement.flush_arc(share, 1.0, side) for side in ("exit", "entry")]
    assert centred.arc_deg - 1e-5 <= arc <= flush[0].arc_deg + 1e-5
    assert flush[0].arc_deg == pytest.approx(flush[1].arc_deg, abs=1e-5)
    assert flush[0].exit_deg == 180
    assert flush[1].entry_deg == 0
    assert centred.entry_deg + centred.exit_deg == pytest.approx(180)


def test_full_width_is_half_a_turn_at_its_only_position():
    expected = engagement.Engagement(0, 180, 180)
    assert engagement.centred_arc(80, 80) == engagement.flush_arc(80, 80) == expected
    assert engagement.engagement_arc(80, 80, 0) == engagement.offset_arc(80, 80, 0) == expected


def test_symmetric_and_one_sided_arcs_are_kept_apart():
    """Two thirds of the diameter: 83.6 and 109.5 degrees. Source: own arithmetic."""
    arcs = engagement.centred_arc(2, 3).arc_deg, engagement.flush_arc(2, 3).arc_deg
    assert arcs == pytest.approx((83.62, 109.47), abs=0.005)


@steady
@given(shares, places, st.floats(0.1, 50))
def test_scale_changes_no_angle_and_scales_every_chip(share, place, scale):
    small, large = at(share, place, 100), at(share, place, 100 * scale)
    assert small.arc_deg == pytest.approx(large.arc_deg, abs=1e-4)
    means = [
        chip.mean_chip_thickness(0.1 * size, 45, share * 100 * size, 100 * size, arc.arc_deg)
        for size, arc in ((1, small), (scale, large))
    ]
    assert means[1] == pytest.approx(scale * means[0], rel=1e-5)


@steady
@given(shares, places, kappas)
def test_mean_chip_is_thinner_than_the_thickest(share, place, kappa):
    arc = at(share, place)
    mean = chip.mean_chip_thickness(0.2, kappa, share * 100, 100, arc.arc_deg)
    thickest = chip.maximum_chip_thickness(0.2, kappa, arc.entry_deg, arc.exit_deg)
    assert thickest / math.pi < mean <= thickest * (1 + 1e-9)
    back = chip.feed_for_chip_thickness(thickest, kappa, arc.entry_deg, arc.exit_deg)
    assert back == pytest.approx(0.2, rel=1e-9)


def test_full_slot_mean_is_two_over_pi():
    assert chip.mean_chip_thickness(1, 90, 50, 50, 180) == pytest.approx(2 / math.pi)


def test_thickest_chip_of_an_arc_before_the_front_is_at_its_end():
    """Entry 20, exit 60 degrees: 0.866 of the feed, not the sine of the arc. Source: geometry."""
    assert chip.maximum_chip_thickness(1, 90, 20, 60) == pytest.approx(math.sin(math.radians(60)))
    assert chip.maximum_chip_thickness(1, 90, 120, 160) == pytest.approx(math.sin(math.radians(120)))


@steady
@given(st.integers(1, 40), st.floats(1, 180))
def test_teeth_in_cut_bracket_their_mean(teeth, arc):
    found = engagement.teeth_in_cut(teeth, arc)
    assert found.least <= found.mean * (1 + 1e-8)
    assert found.mean <= found.most * (1 + 1e-8)
    assert found.most - found.least in (0, 1)


def test_teeth_needed_to_keep_one_and_two_in_the_cut():
    """Five and nine teeth at two thirds of the diameter, centred. Source: own arithmetic."""
    arc = engagement.centred_arc(2, 3).arc_deg
    least = [engagement.teeth_in_cut(teeth, arc).least for teeth in (4, 5, 8, 9)]
    assert least == [0, 1, 1, 2]


def test_exit_on_the_centreline_is_the_worst():
    middle = engagement.flush_arc(50, 100, "entry")
    assert engagement.exit_angle_from_centreline(middle.exit_deg) == pytest.approx(0)
    assert engagement.in_exit_danger_band(middle.exit_deg, 1)
    thin = engagement.flush_arc(60, 100, "exit")
    assert not engagement.in_exit_danger_band(thin.exit_deg, 89)


@pytest.mark.parametrize("offset", [-20.0, -7.5, 0.0, 7.5, 20.0])
def test_offset_above_zero_thins_the_exit(offset):
    arc = engagement.offset_arc(60, 100, offset)
    leaving, entering = (math.sin(math.radians(angle)) for angle in (arc.exit_deg, arc.entry_deg))
    assert (leaving < entering) == (offset > 0) or offset == 0
    assert 50 * (math.cos(math.radians(arc.entry_deg)) + math.cos(math.radians(arc.exit_deg))) == (
        pytest.approx(-2 * offset)
    )


@pytest.mark.parametrize(
    ("radial", "axial", "points"),
    [(-7, -7, "U"), (-7, 7, "V"), (75, 7, "S"), (75, -7, "T")],
)
def test_first_contact_of_a_square_shoulder(radial, axial, points):
    """kappa_r 90, entry at 60 degrees: the face touches inside while the radial rake is below 30."""
    assert engagement.first_contact(3, 0.2, 90, 60, radial, axial).points == points


def test_contact_of_lines_and_faces_is_a_tie():
    assert engagement.first_contact(3, 0.2, 90, 90, 0, 0).points == "STUV"
    assert engagement.first_contact(3, 0.2, 90, 60, -7, 0).points == "UV"
    assert engagement.first_contact(3, 0.2, 90, 0, 0, -7).points == "STUV"
    assert engagement.first_contact(3, 0.2, 90, 60, -7, -7).margin_mm > 0


@steady
@given(rake_angles, rake_angles)
def test_rakes_of_a_square_shoulder_are_the_body_rakes(radial, axial):
    """kappa_r 90: orthogonal is radial rake, inclination is axial rake. Source: ISO 3002-2, recalled."""
    assert rakes.orthogonal_rake(radial, axial, 90) == pytest.approx(radial, abs=1e-9)
    assert rakes.inclination(radial, axial, 90) == pytest.approx(axial, abs=1e-9)


@steady
@given(rake_angles, rake_angles, kappas)
def test_rakes_go_there_and_back(radial, axial, kappa):
    edge = rakes.orthogonal_rake(radial, axial, kappa), rakes.inclination(radial, axial, kappa)
    assert rakes.radial_rake(*edge, kappa) == pytest.approx(radial, abs=1e-9)
    assert rakes.axial_rake(*edge, kappa) == pytest.approx(axial, abs=1e-9)
    lead = math.radians(rakes.lead_angle(kappa))
    by_lead = math.tan(math.radians(radial)) * math.cos(lead) + math.tan(math.radians(axial)) * math.sin(lead)
    assert math.tan(math.radians(edge[0])) == pytest.approx(by_lead, abs=1e-9)


def test_lead_and_kappa_mean_the_same_only_at_45():
    assert rakes.lead_angle(45) == rakes.kappa_from_lead(45) == 45
    assert not rakes.lead_is_ambiguous(45)
    assert all(rakes.lead_is_ambiguous(angle) for angle in (0, 10, 15, 44, 46, 60, 75, 90))
    assert rakes.kappa_from_lead(rakes.lead_angle(75)) == 75
    assert rakes.kappa_from_lead(0) == 90


@pytest.mark.parametrize(("depth", "top"), [(0.5, 24), (1, 34), (2, 48)])
def test_round_insert_of_twelve(depth, top):
    """Angle at the top of the cut, whole degrees. Source: own arithmetic."""
    angle = chip.round_insert_angle(depth, 12)
    assert round(angle.top_deg) == top
    assert angle.mean_deg == pytest.approx(angle.top_deg / 2)


def test_round_insert_at_half_its_diameter_is_square():
    assert chip.round_insert_angle(6, 12).top_deg == pytest.approx(90)
    assert chip.round_insert_effective_diameter(63, 12, 6) == pytest.approx(63)
