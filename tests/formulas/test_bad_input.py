"""Every formula refuses unsound values with the project's own error, and lets nothing else escape."""

import importlib
import inspect
import math
import pkgutil
from dataclasses import astuple, is_dataclass
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from millreason import formulas
from millreason.errors import MillreasonError, OutOfRangeError
from millreason.formulas.cutting_force import SpeedBranch
from millreason.formulas.life import Band, TaylorLaw

CURVE = ((1500.0, 11.0), (8000.0, 11.0))

# One sound call of every formula; a formula without a line here fails the first test.
SOUND: dict[str, dict[str, Any]] = {
    "approach": {"diameter_mm": 100, "entry_deg": 60, "exit_deg": 120},
    "approach_centred": {"width_mm": 60, "diameter_mm": 100},
    "approach_flush": {"width_mm": 60, "diameter_mm": 100},
    "available_power": {"points": CURVE, "speed_rpm": 700},
    "available_torque": {"points": CURVE, "speed_rpm": 700},
    "axial_rake": {"orthogonal_rake_deg": 5, "inclination_deg": 5, "kappa_deg": 45},
    "balanced_depth": {"stock_mm": 3, "passes": 2},
    "balanced_width": {"width_mm": 200, "passes": 4, "overlap_mm": 3},
    "base_speed": {"power_kw": 11, "torque_nm": 95},
    "best_gear": {"curves": [CURVE], "speed_rpm": 700},
    "body_mass": {"diameter_mm": 100, "height_mm": 50, "bore_mm": 32, "density_kg_m3": 7850, "fill": 0.65},
    "break_even_speed": {"first": TaylorLaw(0.1, 150), "second": TaylorLaw(0.3, 300)},
    "centred_arc": {"width_mm": 60, "diameter_mm": 100},
    "chatter_gain": {"kappa_deg": 45, "soft": "radial"},
    "chip_volume_per_tooth_pass": {"depth_mm": 3, "width_mm": 60, "feed_per_tooth_mm": 0.2},
    "clamp_factor": {"clamp_force_n": 5000, "lift_n": 800},
    "clamp_force_needed": {"lift_n": 800, "factor": 2},
    "combined_mass": {"parts": [(2.0, 30.0), (3.0, 80.0)]},
    "constant_band": {"likely": 2000, "low_ratio": 0.8, "high_ratio": 1.2},
    "cost_per_part": {
        "handling_min": 2, "cutting_min": 3, "change_min": 1, "edge_cost": 5, "rate_per_min": 1,
        "life_min": 45, "counting": "fractional",
    },
    "cutting_speed": {"spindle_speed_rpm": 700, "diameter_mm": 80},
    "diameter_at_depth": {"diameter_mm": 80, "depth_mm": 3, "kappa_deg": 45},
    "drive_curve": {"power_kw": 11, "base_speed_rpm": 1500, "speed_max_rpm": 8000},
    "duty_factor": {"duty_share": 0.4},
    "economic_life": {"exponent": 0.25, "change_min": 1, "edge_cost": 3, "rate_per_min": 1},
    "edges_per_batch": {"cutting_min": 3, "quantity": 50, "life_min": 45, "teeth": 6},
    "engagement_arc": {"width_mm": 60, "diameter_mm": 100, "entry_gap_mm": 20},
    "exit_angle_from_centreline": {"exit_deg": 120},
    "extended_constant": {
        "constant_m_min": 500, "feed_mm": 0.5, "feed_exponent": 0.5, "depth_mm": 2, "depth_exponent": 0.1,
    },
    "facet_roughness": {"feed_mm": 0.2, "kappa_deg": 75, "minor_kappa_deg": 5},
    "feed_factor": {"feed_per_tooth_mm": 0.2, "reference_mm": 0.3, "exponent": 0.2},
    "feed_for_chip_thickness": {"chip_thickness_mm": 0.1, "kappa_deg": 45, "entry_deg": 40, "exit_deg": 140},
    "feed_travel": {"length_mm": 400, "approach_mm": 10, "overrun_mm": 5, "clearance_mm": 2},
    "first_contact": {
        "depth_mm": 3, "feed_per_tooth_mm": 0.2, "kappa_deg": 45, "entry_deg": 60, "radial_rake_deg": -7,
        "axial_rake_deg": 15,
    },
    "flat_floor_hole_window": {"diameter_mm": 50, "corner_radius_mm": 0.8, "land_mm": 1.2},
    "floor_deflection": {
        "axial_force_n": 300, "span_mm": 100, "thickness_mm": 4, "youngs_modulus_n_mm2": 70000,
        "poisson_ratio": 0.33, "edges": "clamped",
    },
    "flush_arc": {"width_mm": 60, "diameter_mm": 100, "side": "exit"},
    "force_components": {"edge_normal_force_n": 1000, "kappa_deg": 45},
    "full_overrun_travel": {"length_mm": 400, "diameter_mm": 80, "clearance_mm": 3},
    "geared_curve": {"points": CURVE, "reduction": 4},
    "gullet_fill": {"chip_volume_mm3": 30, "chip_form_ratio": 10, "gullet_volume_mm3": 1500},
    "helix_path": {
        "hole_diameter_mm": 100, "outermost_diameter_mm": 63, "ramp_deg": 2, "depth_mm": 5,
        "edge_feed_mm_min": 1000,
    },
    "hoop_stress": {"density_kg_m3": 7850, "rim_speed_m_min": 3000},
    "in_exit_danger_band": {"exit_deg": 95, "half_band_deg": 30},
    "inclination": {"radial_rake_deg": -7, "axial_rake_deg": 15, "kappa_deg": 45},
    "insert_screw_load": {"insert_mass_kg": 0.01, "radius_mm": 80, "spindle_speed_rpm": 6000},
    "interface_separation_moment": {"face_force_n": 14400, "outer_mm": 63, "inner_mm": 50},
    "kappa_from_lead": {"lead_deg": 15},
    "land_against_feed": {"land_mm": 1.5, "feed_per_turn_mm": 1.2},
    "land_needed": {"feed_per_turn_mm": 1.2, "overlap": 1.25},
    "lead_angle": {"kappa_deg": 75},
    "lead_is_ambiguous": {"angle_deg": 15},
    "life_band": {
        "cutting_speed_m_min": 220, "reference_speed_m_min": 200, "reference_life": Band(30, 45, 60),
        "exponent": Band(0.2, 0.25, 0.35),
    },
    "lift_force": {"tangential_n": 1000, "edge_normal_n": 400, "kappa_deg": 75, "inclination_deg": 10},
    "maximum_chip_thickness": {"feed_per_tooth_mm": 0.2, "kappa_deg": 45, "entry_deg": 40, "exit_deg": 140},
    "mean_chip_thickness": {
        "feed_per_tooth_mm": 0.2, "kappa_deg": 45, "width_mm": 50, "diameter_mm": 100, "arc_deg": 60,
    },
    "mean_plane_forces": {
        "teeth": 6, "entry_deg": 40, "exit_deg": 140, "depth_mm": 3, "feed_per_tooth_mm": 0.2,
        "specific_force_n_mm2": 2500, "radial_ratio": 0.3,
    },
    "mean_tangential_force": {"power_kw": 6, "cutting_speed_m_min": 180},
    "mean_tooth_force": {
        "depth_mm": 3, "kappa_deg": 45, "chip_thickness_mm": 0.13, "specific_force_n_mm2": 2500,
    },
    "minimum_chip_thickness": {"edge_radius_mm": 0.04, "ratio": 0.25},
    "motor_power": {"net_kw": 6, "efficiency": 0.8},
    "net_power": {"depth_mm": 3, "width_mm": 50, "table_feed_mm_min": 800, "specific_force_n_mm2": 2500},
    "net_power_limit": {"motor_kw": 11, "efficiency": 0.8, "torque_nm": 95, "speed_rpm": 700},
    "normal_rake": {"orthogonal_rake_deg": 5, "inclination_deg": 5},
    "offset_arc": {"width_mm": 60, "diameter_mm": 100, "offset_mm": 5},
    "orthogonal_rake": {"radial_rake_deg": -7, "axial_rake_deg": 15, "kappa_deg": 45},
    "outermost_diameter": {"diameter_mm": 80, "usable_depth_mm": 6, "kappa_deg": 45},
    "pass_step": {"stepover_mm": 50, "lateral_tilt_mm_m": 0.1},
    "pass_time": {"travel_mm": 480, "table_feed_mm_min": 800, "passes": 4, "reposition_min": 0.05},
    "passes_across": {"width_mm": 200, "diameter_mm": 80, "overlap_mm": 3, "largest_ratio": 0.8},
    "passes_in_depth": {"stock_mm": 3, "largest_depth_mm": 1},
    "peak_torque": {
        "teeth": 6, "entry_deg": 40, "exit_deg": 140, "depth_mm": 3, "feed_per_tooth_mm": 0.2,
        "kappa_deg": 45, "diameter_mm": 100, "kc11_n_mm2": 1700, "exponent": 0.25, "factor": 1.0,
    },
    "peripheral_chip_thickness": {"feed_per_tooth_mm": 0.1, "depth_mm": 5, "diameter_mm": 70},
    "peripheral_roughness": {"feed_per_tooth_mm": 0.1, "diameter_mm": 70},
    "permissible_unbalance": {"grade_mm_s": 2.5, "spindle_speed_rpm": 8000},
    "plane_forces": {"tangential_n": 1000, "radial_n": 300, "angle_deg": 100},
    "power_band": {"power_kw": 10, "low_ratio": 0.8, "high_ratio": 1.2, "wear_factor": 1.3},
    "radial_rake": {"orthogonal_rake_deg": 5, "inclination_deg": 5, "kappa_deg": 45},
    "radius_roughness": {"feed_mm": 0.2, "corner_radius_mm": 0.8},
    "rake_factor": {"rake_deg": 10, "reference_rake_deg": 6, "change_per_degree": 0.015},
    "ramp_length": {"depth_mm": 2, "ramp_deg": 2},
    "ramp_limit_angle": {"body_clearance_mm": 1.5, "diameter_mm": 63, "floor_edge_mm": 6},
    "removal_rate": {"depth_mm": 3, "width_mm": 50, "table_feed_mm_min": 800},
    "roll_in_length": {"arc_radius_mm": 40, "arc_deg": 90},
    "roughness_with_runout": {
        "feed_per_tooth_mm": 0.15, "teeth": 8, "corner_radius_mm": 0.8, "runout_mm": 0.01,
    },
    "round_insert_angle": {"depth_mm": 2, "insert_diameter_mm": 12},
    "round_insert_effective_diameter": {"outside_diameter_mm": 63, "insert_diameter_mm": 12, "depth_mm": 2},
    "runout_for_single_mark": {"feed_per_tooth_mm": 0.2, "teeth": 6, "corner_radius_mm": 0.8},
    "slip_factor": {"hold_down_n": 5000, "lift_n": 500, "friction": 0.15, "sideways_n": 900},
    "specific_cutting_force": {
        "kc11_n_mm2": 1700, "exponent": 0.25, "chip_thickness_mm": 0.13, "factor": 1.0,
    },
    "specific_force_with_edge": {"cutting_n_mm2": 1825, "edge_n_mm": 29.7, "chip_thickness_mm": 0.1},
    "speed_at_or_below": {"steps": (80.0, 660.0), "wanted_rpm": 700},
    "speed_factor": {"cutting_speed_m_min": 200, "branches": [SpeedBranch(100, 600, 1.38, 0.07)]},
    "speed_for_life": {"life_min": 45, "constant_m_min": 400, "exponent": 0.25},
    "spindle_speed": {"cutting_speed_m_min": 200, "diameter_mm": 80},
    "stable_depth": {
        "stiffness_n_mm": 20000, "damping_ratio": 0.03, "specific_force_n_mm2": 2500, "direction_factor": 0.5,
        "mean_teeth": 1.5, "kappa_deg": 45,
    },
    "table_feed": {"feed_per_tooth_mm": 0.15, "teeth": 6, "spindle_speed_rpm": 800},
    "taylor_fit": {"speed_1_m_min": 60, "life_1_min": 81, "speed_2_m_min": 90, "life_2_min": 36},
    "teeth_in_cut": {"teeth": 6, "arc_deg": 90},
    "tilt_dish": {"tilt_mm_m": 0.1, "diameter_mm": 125, "width_mm": 100, "entry_gap_mm": 10},
    "tilt_window": {
        "diameter_mm": 125, "width_mm": 100, "dish_allowed_mm": 0.003, "lift_needed_mm": 0.005,
        "entry_gap_mm": 10,
    },
    "tilted_land_roughness": {"feed_mm": 2, "tilt_deg": 0.1},
    "tip_moment": {"mass_kg": 6, "centre_mm": 100},
    "tool_change_cost": {"change_min": 8, "regrind_min": 5, "rate_per_min": 1, "depreciation": 0.3},
    "tool_change_share": {"cutting_min": 10, "handling_min": 5, "change_min": 6, "life_min": 30},
    "tool_deflection": {
        "force_n": 1000, "gauge_length_mm": 150, "shank_diameter_mm": 63, "youngs_modulus_n_mm2": 210000,
        "interface_stiffness_nmm_rad": 2e9,
    },
    "tool_life": {"cutting_speed_m_min": 80, "constant_m_min": 400, "exponent": 0.25},
    "torque_from_power": {"power_kw": 8, "speed_rpm": 100},
    "trailing_lift": {"tilt_mm_m": 0.1, "diameter_mm": 125},
    "unit_power_check": {
        "removal_rate_cm3_min": 108, "unit_power_j_mm3": 2, "feed_factor": 1.1, "wear_factor": 1.2,
    },
    "vacuum_hold": {"sealed_area_mm2": 40000, "pressure_difference_n_mm2": 0.08},
    "wall_deflection": {
        "across_force_n": 200, "height_mm": 60, "thickness_mm": 4, "loaded_length_mm": 60,
        "youngs_modulus_n_mm2": 210000,
    },
}  # fmt: skip

# Quantities that may be below zero: rakes, the offset of the centre.
SIGNED = {"rake_deg", "inclination_deg", "radial_rake_deg", "axial_rake_deg", "orthogonal_rake_deg"} | {
    "reference_rake_deg",
    "offset_mm",
}
NOT_A_NUMBER = [math.nan, math.inf, -math.inf, "many", "12", None, [1.0], True]


def all_formulas() -> dict[str, Any]:
    """Return every public formula by name."""
    found = {}
    for info in pkgutil.iter_modules(formulas.__path__):
        module = importlib.import_module(f"millreason.formulas.{info.name}")
        for name, member in inspect.getmembers(module, inspect.isfunction):
            if member.__module__ == module.__name__ and not info.name.startswith("_") and name[0] != "_":
                found[name] = member
    return found


FORMULAS = all_formulas()
NUMBERS = [
    (name, argument)
    for name, inputs in SOUND.items()
    for argument, value in inputs.items()
    if isinstance(value, int | float)
]
each_number = pytest.mark.parametrize(("name", "argument"), NUMBERS, ids=lambda text: text)


def numbers_in(result: Any) -> list[float]:
    """Return every number of a result, however deep."""
    if is_dataclass(result) and not isinstance(result, type):
        return numbers_in(astuple(result))
    if isinstance(result, tuple | list):
        return [number for part in result for number in numbers_in(part)]
    return [result] if isinstance(result, int | float) else []


def test_every_formula_has_a_sound_call():
    assert set(SOUND) == set(FORMULAS)


@pytest.mark.parametrize("name", SOUND)
def test_sound_call_gives_finite_numbers(name):
    assert set(SOUND[name]) == set(inspect.signature(FORMULAS[name]).parameters)
    assert all(math.isfinite(number) for number in numbers_in(FORMULAS[name](**SOUND[name])))


@each_number
def test_what_is_no_finite_number_is_refused(name, argument):
    optional = inspect.signature(FORMULAS[name]).parameters[argument].default is None
    for value in NOT_A_NUMBER:
        if value is None and optional:
            continue
        with pytest.raises(OutOfRangeError) as refusal:
            FORMULAS[name](**{**SOUND[name], argument: value})
        assert refusal.value.allowed
        assert str(value) in str(refusal.value)


@each_number
def test_below_zero_is_refused_unless_signed(name, argument):
    if argument in SIGNED:
        result = FORMULAS[name](**{**SOUND[name], argument: -1.0})
        assert all(math.isfinite(number) for number in numbers_in(result))
        return
    with pytest.raises(OutOfRangeError):
        FORMULAS[name](**{**SOUND[name], argument: -1.0})


@settings(max_examples=40, deadline=None, derandomize=True)
@given(data=st.data())
@pytest.mark.parametrize("name", SOUND)
def test_any_numbers_give_a_finite_result_or_the_own_error(name, data):
    numbers = [argument for owner, argument in NUMBERS if owner == name]
    wild = st.one_of(st.floats(), st.floats(0, 200), st.integers(-5, 400))
    inputs = {argument: data.draw(wild, label=argument) for argument in numbers}
    try:
        result = FORMULAS[name](**{**SOUND[name], **inputs})
    except MillreasonError:
        return
    assert all(math.isfinite(number) for number in numbers_in(result))


@pytest.mark.parametrize(
    ("name", "changed"),
    [
        ("engagement_arc", {"width_mm": 101}),
        ("engagement_arc", {"entry_gap_mm": 41}),
        ("offset_arc", {"offset_mm": 20.1}),
        ("offset_arc", {"offset_mm": -20.1}),
        ("flush_arc", {"side": "left"}),
        ("maximum_chip_thickness", {"entry_deg": 140, "exit_deg": 40}),
        ("mean_chip_thickness", {"arc_deg": 95}),
        ("mean_chip_thickness", {"arc_deg": 50}),
        ("table_feed", {"teeth": 5.5}),
        ("round_insert_angle", {"depth_mm": 6.1}),
        ("specific_cutting_force", {"exponent": 1.0}),
        ("rake_factor", {"rake_deg": 80}),
        ("speed_factor", {"cutting_speed_m_min": 99}),
        ("speed_factor", {"branches": []}),
        ("available_power", {"speed_rpm": 8001}),
        ("available_power", {"points": ()}),
        ("available_power", {"points": ((1500, 11), (1500, 12))}),
        ("best_gear", {"speed_rpm": 8001}),
        ("best_gear", {"curves": []}),
        ("speed_at_or_below", {"wanted_rpm": 79}),
        ("speed_at_or_below", {"steps": ()}),
        ("motor_power", {"efficiency": 1.1}),
        ("vacuum_hold", {"pressure_difference_n_mm2": 0.11}),
        ("floor_deflection", {"poisson_ratio": 0.51}),
        ("facet_roughness", {"kappa_deg": 90, "minor_kappa_deg": 90}),
        ("radius_roughness", {"feed_mm": 0.81}),
        ("tilt_dish", {"entry_gap_mm": 26}),
        ("passes_across", {"overlap_mm": 64}),
        ("balanced_width", {"overlap_mm": 300}),
        ("helix_path", {"outermost_diameter_mm": 100}),
        ("ramp_limit_angle", {"floor_edge_mm": 31.5}),
        ("flat_floor_hole_window", {"land_mm": 24.5}),
        ("body_mass", {"bore_mm": 100}),
        ("combined_mass", {"parts": []}),
        ("tool_life", {"exponent": 1.0}),
        ("tool_life", {"cutting_speed_m_min": 1e-9}),
        ("taylor_fit", {"life_2_min": 90}),
        ("taylor_fit", {"speed_2_m_min": 60}),
        ("break_even_speed", {"second": TaylorLaw(0.1, 300)}),
        ("economic_life", {"change_min": 0, "edge_cost": 0}),
        ("cost_per_part", {"life_min": 2, "counting": "whole"}),
        ("cost_per_part", {"counting": "roughly"}),
    ],
)
def test_outside_its_validity_a_formula_refuses(name, changed):
    with pytest.raises(OutOfRangeError) as refusal:
        FORMULAS[name](**{**SOUND[name], **changed})
    assert refusal.value.quantity
    assert "must be" in str(refusal.value)
