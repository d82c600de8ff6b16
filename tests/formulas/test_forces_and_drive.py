"""Limits and symmetries of force, power, drive, speeds and masses."""

import math

import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from millreason.formulas import body, cutting_force, drive, engagement

steady = settings(max_examples=200, deadline=None, derandomize=True)
kappas = st.floats(5, 90)
forces = st.floats(1, 1e4)


@steady
@given(forces, kappas)
def test_force_components_by_kappa(force, kappa):
    parts = cutting_force.force_components(force, kappa)
    assert math.hypot(parts.radial_n, parts.axial_n) == pytest.approx(force)
    if kappa < 90:
        assert math.degrees(math.atan2(parts.radial_n, parts.axial_n)) == pytest.approx(kappa)


def test_45_degrees_splits_in_halves_and_90_pushes_only_sideways():
    half = cutting_force.force_components(1000, 45)
    assert half.radial_n == pytest.approx(half.axial_n)
    assert cutting_force.force_components(1000, 90) == cutting_force.ForceComponents(1000, 0)
    flat = cutting_force.force_components(1000, 15)
    assert (flat.radial_n, flat.axial_n) == pytest.approx((258.8, 965.9), abs=0.1)


@steady
@given(forces, st.floats(0, 1e4), st.floats(0, 180))
def test_plane_forces_keep_the_resultant(tangential, radial, angle):
    plane = cutting_force.plane_forces(tangential, radial, angle)
    assert math.hypot(plane.feed_n, plane.cross_n) == pytest.approx(math.hypot(tangential, radial))


def test_climb_pulls_and_conventional_resists():
    climb = cutting_force.mean_plane_forces(6, 120, 180, 3, 0.2, 2500, 0.3)
    conventional = cutting_force.mean_plane_forces(6, 0, 60, 3, 0.2, 2500, 0.3)
    assert climb.feed_n < 0 < conventional.feed_n
    assert cutting_force.mean_plane_forces(6, 50, 130, 3, 0.2, 2500, 0.0).feed_n == pytest.approx(0, abs=1e-9)


@steady
@given(st.integers(1, 40), st.floats(0.05, 1.0), st.floats(0.0, 0.4))
def test_peak_per_tooth_falls_with_more_teeth(teeth, share, exponent):
    arc = engagement.centred_arc(100 * share, 100)
    law = (1700, exponent)
    few = cutting_force.peak_torque(teeth, arc.entry_deg, arc.exit_deg, 3, 0.2, 45, 100, *law)
    many = cutting_force.peak_torque(teeth * 50, arc.entry_deg, arc.exit_deg, 3, 0.2, 45, 100, *law)
    assert few.tangential_force_n * 50 >= many.tangential_force_n * (1 - 1e-6)
    single = cutting_force.peak_torque(1, arc.entry_deg, arc.exit_deg, 3, 0.2, 45, 100, *law)
    assert few.tangential_force_n >= single.tangential_force_n * (1 - 1e-12)
    assert few.teeth <= engagement.teeth_in_cut(teeth, arc.arc_deg).most + 1


@steady
@given(st.integers(1, 30), st.floats(0.05, 1.0), st.floats(0, 1))
def test_peak_torque_is_the_same_at_the_mirrored_position(teeth, share, place):
    room = 100 * (1 - share)
    arcs = [engagement.engagement_arc(100 * share, 100, room * p) for p in (place, 1 - place)]
    peaks = [
        cutting_force.peak_torque(teeth, a.entry_deg, a.exit_deg, 3, 0.2, 45, 100, 1700, 0.25).torque_nm for a in arcs
    ]
    assert peaks[0] == pytest.approx(peaks[1], rel=1e-4)


@steady
@given(st.floats(0.1, 10), st.floats(1, 200), st.floats(1, 5000), st.floats(100, 5000), st.floats(0.1, 10))
def test_power_scales_with_each_input(depth, width, feed, force, scale):
    power = cutting_force.net_power(depth, width, feed, force)
    for place in range(4):
        inputs = [depth, width, feed, force]
        inputs[place] *= scale
        assert cutting_force.net_power(*inputs) == pytest.approx(scale * power)


def test_same_cut_in_inches():
    """Unit conversion: a cut given in inches has the power of the same cut in millimetres."""
    inch = 25.4
    feed_inch = body.table_feed(0.008, 6, body.spindle_speed(200, 4 * inch))
    feed_metric = body.table_feed(0.008 * inch, 6, body.spindle_speed(200, 101.6))
    assert feed_inch * inch == pytest.approx(feed_metric)
    power = cutting_force.net_power(0.1 * inch, 2.5 * inch, feed_metric, 2000)
    cubic_inches = 0.1 * 2.5 * feed_inch
    assert power == pytest.approx(cubic_inches * inch**3 * 2000 / 60e6)


def test_specific_force_at_one_millimetre_is_the_constant():
    assert cutting_force.specific_cutting_force(1700, 0.25, 1.0) == 1700
    assert cutting_force.specific_cutting_force(1700, 0, 0.1, 1.3) == pytest.approx(2210)
    assert cutting_force.specific_force_with_edge(1825, 0, 0.1) == 1825


def test_rake_factor_takes_the_reference_off_once():
    """Radial -7 and axial +20 at 45 degrees, against 6: 0.945. Source: Tschaetsch, recalled."""
    assert cutting_force.rake_factor(9.68, 6, 1 / 66.7) == pytest.approx(0.945, abs=0.0005)
    assert cutting_force.rake_factor(6, 6, 1 / 66.7) == 1


def test_speed_factor_branches_meet_at_one():
    """Both published branches are 1.000 at 100 m/min. Source: Tschaetsch, recalled."""
    low = cutting_force.SpeedBranch(20, 100, 2.023, 0.153)
    high = cutting_force.SpeedBranch(100, 600, 1.380, 0.07)
    assert cutting_force.speed_factor(100, [low]) == pytest.approx(1, abs=0.001)
    assert cutting_force.speed_factor(100, [high]) == pytest.approx(1, abs=0.001)
    assert cutting_force.speed_factor(20, [low, high]) > cutting_force.speed_factor(600, [low, high])


def test_band_says_what_a_limit_holds():
    band = cutting_force.power_band(10, 0.8, 1.2, 1.3)
    assert [band.holds(limit) for limit in (15.61, 10, 9.9)] == ["all", "likely", "none"]
    assert band.overlaps(cutting_force.constant_band(20, 0.7, 1.1))
    assert not band.overlaps(cutting_force.constant_band(20, 0.8, 1.1))


@steady
@given(st.floats(1, 60), st.floats(200, 4000), st.floats(4100, 20000), st.floats(0.01, 1.0))
def test_torque_is_constant_below_base_speed_and_power_above(power, base, top, share):
    curve = drive.drive_curve(power, base, top)
    full = cutting_force.torque_from_power(power, base)
    assert drive.available_torque(curve, share * base) == pytest.approx(full)
    assert drive.available_power(curve, base + share * (top - base)) == pytest.approx(power)
    assert drive.base_speed(power, full) == pytest.approx(base)


def test_curve_and_plate_agree():
    curve = drive.drive_curve(11 * 0.8, drive.base_speed(11 * 0.8, 95), 8000)
    for speed in (100, 500, 884, 900, 8000):
        limit = drive.net_power_limit(11, 0.8, 95, speed)
        assert drive.available_power(curve, speed) == pytest.approx(limit)


def test_gears_trade_speed_for_torque():
    motor = drive.drive_curve(11, 1500, 6000)
    low = drive.geared_curve(motor, 4)
    assert drive.available_torque(low, 300) == pytest.approx(4 * drive.available_torque(motor, 300))
    assert drive.best_gear([motor, low], 300).gear == 1
    assert drive.best_gear([motor, low], 3000).gear == 0
    assert drive.best_gear([low, low], 300).gear == 0


def test_base_speed_beyond_the_top_leaves_constant_torque():
    curve = drive.drive_curve(10, 4000, 2000)
    assert drive.available_power(curve, 2000) == pytest.approx(5)
    assert drive.available_torque(curve, 100) == pytest.approx(drive.available_torque(curve, 2000))


def test_duty_and_losses_at_their_ends():
    assert drive.duty_factor(1) == 1
    assert drive.motor_power(6, 1) == 6


@steady
@given(st.lists(st.floats(10, 5000), min_size=1, max_size=12), st.floats(10, 6000))
def test_step_is_the_highest_that_does_not_exceed(steps, wanted):
    assume(min(steps) <= wanted)
    step = drive.speed_at_or_below(steps, wanted)
    assert step in steps
    assert step <= wanted * (1 + 1e-8)
    assert not [other for other in steps if step < other <= wanted]
    assert drive.speed_at_or_below(steps, step) == step


@steady
@given(st.floats(1, 2000), st.floats(5, 500))
def test_speed_goes_there_and_back(speed, diameter):
    assert body.cutting_speed(body.spindle_speed(speed, diameter), diameter) == pytest.approx(speed)


@pytest.mark.parametrize(
    ("diameter", "height", "bore", "mass"),
    [(100, 50, 32, 1.8), (125, 63, 40, 3.5), (160, 63, 40, 6.1), (200, 63, 60, 9.2), (250, 63, 60, 15)],
)
def test_body_mass_of_usual_sizes(diameter, height, bore, mass):
    """Estimates with a fill of 0.65. Source: own geometry, the fill common practice."""
    assert body.body_mass(diameter, height, bore, 7850, 0.65) == pytest.approx(mass, rel=0.03)


def test_diameter_grows_with_depth_only_below_90():
    assert body.diameter_at_depth(80, 5, 90) == pytest.approx(80)
    assert body.outermost_diameter(80, 6.5, 45) == pytest.approx(93)
    assert body.outermost_diameter(80, 4, 45) == pytest.approx(88)


def test_loads_from_turning_grow_with_the_square():
    """10 g at 160 mm and 6000 1/min: 316 N; 50 m/s in steel: 20 MPa. Source: mechanics."""
    assert body.insert_screw_load(0.01, 80, 6000) == pytest.approx(316, abs=1)
    assert body.insert_screw_load(0.01, 80, 12000) == pytest.approx(4 * 316, abs=4)
    assert body.hoop_stress(7850, 3000) == pytest.approx(20, abs=0.5)
    assert body.hoop_stress(7850, 6000) == pytest.approx(78, abs=1)


@pytest.mark.parametrize(("grade", "offset"), [(2.5, 2.98), (6.3, 7.5), (16, 19), (40, 48)])
def test_balance_grades_at_8000(grade, offset):
    """Residual unbalance per mass. Source: ISO 21940-11, recalled."""
    assert body.permissible_unbalance(grade, 8000) == pytest.approx(offset, rel=0.01)


def test_tip_moment_of_cutter_and_adapter():
    whole = body.combined_mass([(2.0, 110.0), (3.0, 40.0)])
    parts = body.tip_moment(2, 110) + body.tip_moment(3, 40)
    assert body.tip_moment(whole.mass_kg, whole.centre_mm) == pytest.approx(parts)
