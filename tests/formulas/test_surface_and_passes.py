"""Limits and symmetries of surface, tilt, passes, travel and entry paths."""

import math

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from millreason.formulas import passes, surface

steady = settings(max_examples=200, deadline=None, derandomize=True)
shares = st.floats(0.05, 0.99)
places = st.floats(0, 1)


@steady
@given(shares, places, st.floats(0, 2))
def test_tilt_zero_leaves_no_dish_and_dish_is_symmetric(share, place, tilt):
    room = 100 * (1 - share)
    here = surface.tilt_dish(tilt, 100, 100 * share, room * place)
    there = surface.tilt_dish(tilt, 100, 100 * share, room * (1 - place))
    assert here == pytest.approx(there, rel=1e-4, abs=1e-9)
    assert surface.tilt_dish(0, 100, 100 * share, room * place) == 0
    assert surface.trailing_lift(0, 100) == surface.pass_step(50, 0) == 0


@steady
@given(shares, st.floats(0.01, 2), st.floats(0.1, 10))
def test_dish_and_lift_scale_with_tilt_and_size(share, tilt, scale):
    dish = surface.tilt_dish(tilt, 100, 100 * share)
    assert surface.tilt_dish(tilt, 100 * scale, 100 * share * scale) == pytest.approx(scale * dish, rel=1e-6)
    assert surface.tilt_dish(2 * tilt, 100, 100 * share) == pytest.approx(2 * dish, rel=1e-4)
    assert surface.trailing_lift(tilt, 100) == pytest.approx(tilt / 10, rel=1e-4)


def test_dish_of_two_known_cases():
    """0.1 mm/m: D 100 over 80 mm 2.0 um, D 125 over 100 mm 2.5 um. Source: geometry."""
    assert surface.tilt_dish(0.1, 100, 80) * 1000 == pytest.approx(2.0, abs=0.01)
    assert surface.tilt_dish(0.1, 125, 100) * 1000 == pytest.approx(2.5, abs=0.01)


@steady
@given(shares, st.floats(0.0005, 0.05), st.floats(0.0005, 0.05))
def test_tilt_window_ends_meet_both_aims(share, dish, lift):
    window = surface.tilt_window(100, 100 * share, dish, lift)
    assert surface.trailing_lift(window.least_mm_m, 100) == pytest.approx(lift)
    assert window.largest_mm_m is not None
    assert surface.tilt_dish(window.largest_mm_m, 100, 100 * share) == pytest.approx(dish, rel=1e-6)
    assert window.is_open == (surface.tilt_dish(window.least_mm_m, 100, 100 * share) <= dish)


def test_tilt_window_without_a_dish_to_fear_is_open():
    assert surface.tilt_window(100, 1, 5, 0.01) == surface.TiltWindow(pytest.approx(0.1), None)
    assert surface.tilt_window(100, 1, 5, 0.01).is_open


@steady
@given(st.floats(0.01, 0.4), st.integers(1, 20), st.floats(0.4, 3), st.floats(0, 0.1))
def test_runout_roughness_lies_between_both_laws(feed, teeth, radius, runout):
    bounds = surface.roughness_with_runout(feed, teeth, radius, runout)
    alone = 1000 * (feed * teeth) ** 2 / (8 * radius)
    assert bounds.perfect == surface.radius_roughness(feed, radius)
    assert bounds.perfect.rt_um <= bounds.runout.rt_um * (1 + 1e-9)
    assert bounds.runout.rt_um <= alone * (1 + 1e-9)
    assert surface.roughness_with_runout(feed, teeth, radius, 0).runout == bounds.perfect


def test_runout_of_known_cases():
    """z 8, fz 0.15, r 0.8, 10 um: 13.5 um; z 6, fz 0.2: 16.3 um. Source: envelope simulation."""
    assert surface.roughness_with_runout(0.15, 8, 0.8, 0.01).runout.rt_um == pytest.approx(13.5, abs=0.05)
    assert surface.roughness_with_runout(0.2, 6, 0.8, 0.01).runout.rt_um == pytest.approx(16.3, abs=0.06)


def test_single_mark_needs_the_middle_insert_highest():
    """z 6, fz 0.2, r 0.8: the third insert behind needs 225 um. Source: own derivation."""
    assert surface.runout_for_single_mark(0.2, 6, 0.8) == pytest.approx(0.225)
    assert surface.runout_for_single_mark(0.2, 1, 0.8) == 0
    assert surface.runout_for_single_mark(0.2, 5, 0.8) < surface.runout_for_single_mark(0.2, 6, 0.8)


def test_facet_is_symmetric_in_its_flanks_and_linear_in_the_feed():
    one, other = surface.facet_roughness(0.2, 75, 5), surface.facet_roughness(0.2, 5, 75)
    assert one.rt_um == pytest.approx(other.rt_um) == pytest.approx(17.1, abs=0.05)
    assert surface.facet_roughness(0.4, 75, 5).rt_um == pytest.approx(2 * one.rt_um)
    assert surface.facet_roughness(0.2, 45, 45).rt_um == pytest.approx(100)


def test_land_covers_the_feed_from_one_upwards():
    assert surface.land_against_feed(surface.land_needed(2.0, 1.25), 2.0) == pytest.approx(1.25)
    assert surface.tilted_land_roughness(1, 0) == 0


@steady
@given(st.floats(1, 2000), st.floats(20, 400), st.floats(0, 5), st.floats(0.5, 1))
def test_passes_are_balanced_and_never_too_wide(width, diameter, overlap, ratio):
    count = passes.passes_across(width, diameter, overlap, ratio)
    each = (width + (count - 1) * overlap) / count
    assert each <= ratio * diameter * (1 + 1e-6)
    assert passes.passes_across(width * 1.5, diameter, overlap, ratio) >= count
    if count > 1:
        assert passes.balanced_width(width, count, overlap) == pytest.approx(each)


def test_passes_of_known_faces():
    """200 mm with 80 mm: four, not three; 160 mm at 0.8 of 200: one. Source: common practice."""
    assert passes.passes_across(200, 80, 3, 0.8) == 4
    assert passes.passes_across(160, 200, 3, 0.8) == 1
    assert passes.passes_across(160.1, 200, 3, 0.8) == 2


@steady
@given(st.floats(0.1, 50), st.floats(0.1, 10))
def test_layers_are_the_fewest(stock, deepest):
    layers = passes.passes_in_depth(stock, deepest)
    assert passes.balanced_depth(stock, layers) <= deepest * (1 + 1e-6)
    if layers > 1:
        assert passes.balanced_depth(stock, layers - 1) > deepest * (1 - 1e-6)


@steady
@given(shares)
def test_approach_grows_from_centred_to_flush_and_ends_at_the_radius(share):
    centred = passes.approach_centred(100 * share, 100)
    flush = passes.approach_flush(100 * share, 100)
    assert 0 < centred <= flush <= 50
    assert passes.approach_centred(100, 100) == passes.approach_flush(100, 100) == 50
    assert passes.approach_centred(2540 * share, 2540) == pytest.approx(25.4 * centred)


def test_flush_approach_keeps_the_radius_beyond_half():
    """At 0.8 of the diameter the root alone would give 0.40 D. Source: geometry."""
    assert passes.approach_flush(80, 100) == 50


def test_conventions_of_travel_are_ordered():
    least = passes.feed_travel(400, passes.approach_centred(60, 80), 0)
    full = passes.full_overrun_travel(400, 80, 0)
    assert least < full == 480
    assert passes.pass_time(full, 800, 1, 9) == pytest.approx(0.6)
    assert passes.pass_time(full, 800, 3, 0.1) == pytest.approx(2.0)


def test_roll_in_quarter_is_longer_than_its_radius():
    assert passes.roll_in_length(40, 90) == pytest.approx(40 * math.pi / 2)


@steady
@given(st.floats(0.1, 20), st.floats(0.1, 30))
def test_ramp_and_helix_reach_the_depth(depth, angle):
    length = passes.ramp_length(depth, angle)
    assert math.degrees(math.atan(depth / length)) == pytest.approx(angle)
    helix = passes.helix_path(100, 63, angle, depth, 1000)
    turns = depth / helix.pitch_mm
    flat = turns * math.pi * helix.diameter_mm
    assert math.hypot(flat, depth) == pytest.approx(helix.length_mm)
    assert helix.centre_feed_mm_min < 1000


def test_ramp_limit_falls_with_the_diameter():
    assert passes.ramp_limit_angle(1.5, 50, 6) > passes.ramp_limit_angle(1.5, 100, 6)
    assert passes.ramp_limit_angle(1.0, 52, 25.5) == pytest.approx(45)
