"""Limits and symmetries of holding, stiffness, tool life and cost."""

import math

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from millreason.errors import OutOfRangeError
from millreason.formulas import cutting_force, holding, life

steady = settings(max_examples=200, deadline=None, derandomize=True)
slopes = st.floats(0.1, 0.6)


def test_90_degrees_never_presses_and_a_lagging_nose_never_lifts():
    square = holding.lift_force(1000, 400, 90, 15)
    assert square.press_n == 0
    assert square.lift_n == pytest.approx(1000 * math.tan(math.radians(15)))
    assert holding.lift_force(1000, 400, 90, -15).lift_n == 0
    assert holding.lift_force(1000, 400, 45, 10).lift_n == 0


@steady
@given(st.floats(0, 5000), st.floats(0, 3000), st.floats(10, 90), st.floats(-20, 30))
def test_more_inclination_never_lifts_less(tangential, normal, kappa, slope):
    here = holding.lift_force(tangential, normal, kappa, slope)
    steeper = holding.lift_force(tangential, normal, kappa, slope + 5)
    assert steeper.lift_n >= here.lift_n
    assert here.lift_n == max(here.pull_n - here.press_n, 0)


def test_clamping_factor_and_force_are_inverse():
    needed = holding.clamp_force_needed(800, 2.5)
    assert holding.clamp_factor(needed, 800) == pytest.approx(2.5)


def test_lifted_work_has_no_grip():
    assert holding.slip_factor(500, 600, 0.2, 100) == 0
    assert holding.slip_factor(1000, 0, 0.2, 100) == pytest.approx(2)


def test_vacuum_never_holds_more_than_the_atmosphere():
    assert holding.vacuum_hold(10000, 0.101325) == pytest.approx(1013.25)


@steady
@given(st.floats(50, 200), st.floats(1.05, 2))
def test_overhang_enters_with_its_cube_and_square(length, ratio):
    short = holding.tool_deflection(1000, length, 40, 210000, 1e9)
    long = holding.tool_deflection(1000, length * ratio, 40, 210000, 1e9)
    assert long.bending_mm == pytest.approx(short.bending_mm * ratio**3)
    assert long.rotation_mm == pytest.approx(short.rotation_mm * ratio**2)


def test_gauge_length_150_for_100_softens_between_its_two_laws():
    """2.3 to 3.4 times softer. Source: beam theory, own arithmetic."""
    short = holding.tool_deflection(1000, 100, 40, 210000, 1e9).total_mm
    ratio = holding.tool_deflection(1000, 150, 40, 210000, 1e9).total_mm / short
    assert 1.5**2 < ratio < 1.5**3


@pytest.mark.parametrize(("modulus", "bent"), [(210000, 0.21), (70000, 0.64), (112000, 0.40)])
def test_wall_of_a_known_case(modulus, bent):
    """200 N on a wall 4 thick, 60 high, 60 long. Source: beam theory, own arithmetic."""
    assert holding.wall_deflection(200, 60, 4, 60, modulus) == pytest.approx(bent, abs=0.006)


def test_thin_floor_and_thin_wall_feel_different_forces():
    """90 degrees spares the floor and bends the wall; a flat edge does the opposite."""

    def gives(kappa: float) -> tuple[float, float]:
        parts = cutting_force.force_components(400, kappa)
        floor = holding.floor_deflection(parts.axial_n, 100, 4, 70000, 0.33, "clamped")
        return floor, holding.wall_deflection(parts.radial_n, 40, 4, 60, 70000)

    square, flat = gives(90), gives(15)
    assert square[0] == 0
    assert flat[0] > 0
    assert square[1] > flat[1]


@steady
@given(st.floats(1, 20), st.floats(1.1, 3))
def test_floor_stiffens_with_the_cube_of_its_thickness(thickness, ratio):
    thin = holding.floor_deflection(300, 100, thickness, 70000, 0.3, "resting")
    thick = holding.floor_deflection(300, 100, thickness * ratio, 70000, 0.3, "resting")
    assert thick == pytest.approx(thin / ratio**3)
    assert thin > holding.floor_deflection(300, 100, thickness, 70000, 0.3, "clamped")


def stable(kappa: float, soft: str) -> float:
    """Return the stable depth of a system that is soft in one direction."""
    factor = 0.7 * holding.chatter_gain(kappa, soft)
    return holding.stable_depth(20000, 0.03, 2500, factor, 1.5, kappa).depth_mm


def test_long_tool_gains_and_thin_floor_loses_with_a_flat_edge():
    """45 against 90 degrees, radially soft: 1.41 times the depth. Source: own derivation."""
    assert stable(45, "radial") / stable(90, "radial") == pytest.approx(math.sqrt(2))
    assert stable(15, "axial") < stable(45, "axial") < stable(75, "axial")
    assert holding.chatter_gain(90, "axial") == 0


@steady
@given(st.floats(1e3, 1e5), st.floats(0.01, 0.2), st.floats(0.2, 5))
def test_stable_depth_scales(stiffness, damping, teeth):
    one = holding.stable_depth(stiffness, damping, 2500, 0.5, teeth, 90)
    assert one.depth_mm == pytest.approx(one.edge_length_mm)
    assert holding.stable_depth(2 * stiffness, damping, 2500, 0.5, 2 * teeth, 90) == one


@steady
@given(st.floats(10, 1000), slopes, st.floats(0.5, 500))
def test_life_goes_there_and_back(constant, slope, minutes):
    speed = life.speed_for_life(minutes, constant, slope)
    assert life.tool_life(speed, constant, slope) == pytest.approx(minutes, rel=1e-6)
    assert life.tool_life(constant, constant, slope) == pytest.approx(1)


@steady
@given(st.floats(20, 200), st.floats(1.1, 3), st.floats(5, 100), slopes)
def test_fit_finds_the_law_that_made_the_points(speed, ratio, minutes, slope):
    constant = speed * minutes**slope
    faster = life.tool_life(speed * ratio, constant, slope)
    law = life.taylor_fit(speed, minutes, speed * ratio, faster)
    assert (law.exponent, law.constant_m_min) == pytest.approx((slope, constant), rel=1e-6)


def test_extended_law_is_the_plain_one_at_unit_feed():
    assert life.extended_constant(500, 1, 0.5) == 500
    assert life.extended_constant(500, 0.25, 0.5, 4, 0.5) == pytest.approx(500)


@steady
@given(st.floats(50, 400))
def test_life_band_opens_with_the_distance_from_its_reference(speed):
    reference, exponent = life.Band(30, 45, 60), life.Band(0.2, 0.25, 0.35)
    band = life.life_band(speed, 200, reference, exponent)
    assert band.low <= band.likely <= band.high
    assert band.high / band.low >= 2 * (1 - 1e-9)
    further = life.life_band(speed * (1.1 if speed >= 200 else 0.9), 200, reference, exponent)
    assert further.high / further.low >= band.high / band.low * (1 - 1e-9)


def test_grades_break_even_where_both_live_equally_long():
    first, second = life.TaylorLaw(0.1, 150), life.TaylorLaw(0.3, 300)
    speed = life.break_even_speed(first, second)
    lives = [life.tool_life(speed, law.constant_m_min, law.exponent) for law in (first, second)]
    assert lives[0] == pytest.approx(lives[1])
    assert speed == life.break_even_speed(second, first)


@steady
@given(slopes, st.floats(0.1, 20), st.floats(0, 50), st.floats(0.1, 5))
def test_least_cost_lasts_longer_than_most_output(slope, change, edge, rate):
    assert life.economic_life(slope, change, edge, rate) >= life.economic_life(slope, change)


@steady
@given(st.floats(0.1, 20), st.floats(1, 20), st.floats(0, 10), st.floats(0, 50))
def test_whole_parts_never_cost_less(cutting, ratio, change, edge):
    inputs = (3.0, cutting, change, edge, 1.5, cutting * ratio)
    whole, part = (life.cost_per_part(*inputs, counting) for counting in ("whole", "fractional"))
    assert whole.total >= part.total * (1 - 1e-9)
    assert whole.parts_per_set == int(whole.parts_per_set)
    assert part.total == pytest.approx(part.handling + part.cutting + part.tool_change + part.edges)
    share = life.tool_change_share(cutting, 3.0, change, cutting * ratio)
    assert share == pytest.approx(part.tool_change / (1.5 * part.cycle_min), abs=1e-12)


def test_a_set_that_lasts_no_whole_part_is_said():
    with pytest.raises(OutOfRangeError, match="at least one part"):
        life.cost_per_part(1, 10, 1, 5, 1, 9, "whole")


@steady
@given(st.floats(0.1, 20), st.integers(1, 500), st.floats(5, 90), st.integers(1, 20))
def test_edges_of_a_batch_cover_its_cutting_time(cutting, quantity, minutes, teeth):
    edges = life.edges_per_batch(cutting, quantity, minutes, teeth)
    assert edges % teeth == 0
    assert edges // teeth * minutes >= cutting * quantity * (1 - 1e-6)
    assert (edges // teeth - 1) * minutes < cutting * quantity or edges == teeth
