"""General-purpose mathematics libraries judge surface, tilt and stiffness.

Each test states the error of the closed form that it allows: rounding where the form is exact, a share
where it approximates.
"""

import math

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from scipy.integrate import quad
from scipy.optimize import minimize_scalar
from scipy.spatial.transform import Rotation

from millreason.formulas import holding, surface

some = settings(max_examples=200, deadline=None, derandomize=True)
positions = st.floats(0.0, 1.0)


@some
@given(st.floats(40, 300), st.floats(0.1, 0.98), positions, st.floats(0.01, 1.0))
def test_tilt_dish_against_a_turned_circle(diameter, share, position, tilt):
    """First order in the tilt: within 0.1 % of a circle turned in space, leading half."""
    width = diameter * share
    gap = (diameter - width) * position
    across = np.linspace(diameter / 2 - gap - width, diameter / 2 - gap, 4001)
    forwards = np.sqrt(np.clip((diameter / 2) ** 2 - across**2, 0, None))
    circle = np.column_stack([forwards, across, np.zeros_like(across)])
    turned = Rotation.from_euler("y", math.atan(tilt / 1000)).apply(circle)
    depth = float(np.ptp(turned[:, 2]))
    closed = surface.tilt_dish(tilt, diameter, width, gap)
    assert closed == pytest.approx(depth, rel=1e-3, abs=1e-6)
    assert surface.trailing_lift(tilt, diameter) == pytest.approx(
        2 * -Rotation.from_euler("y", math.atan(tilt / 1000)).apply([diameter / 2, 0, 0])[2], rel=1e-9
    )


def envelope_height(feed: float, radius: float, runouts: list[float]) -> float:
    """Return peak to valley of the floor that arcs of the given heights leave, by sampling one turn."""
    teeth = len(runouts)
    turn = feed * teeth
    x = np.linspace(0, turn, 4001)
    places = feed * np.arange(-teeth, 2 * teeth)
    heights = np.tile(runouts, 3)
    gap = np.abs(x[:, None] - places[None, :])
    arcs = np.where(gap < radius, radius - np.sqrt(np.clip(radius**2 - gap**2, 0, None)), radius)
    profile = np.min(arcs + heights[None, :], axis=1)
    return 1000 * float(np.ptp(profile))


@some
@given(st.floats(0.05, 1.0), st.floats(0.2, 2.0))
def test_radius_roughness_against_arcs(share, radius):
    """Parabola for the arc: up to 7.2 % low at a feed of one radius, under 0.5 % at a quarter of it."""
    feed = share * radius
    closed = surface.radius_roughness(feed, radius).rt_um
    true = envelope_height(feed, radius, [0.0])
    allowed = 0.005 if share <= 0.25 else 0.072
    assert -1e-3 <= true / closed - 1 <= allowed + 1e-3


@some
@given(st.floats(0.05, 0.3), st.floats(0.4, 2.0), st.lists(st.floats(0, 0.03), min_size=2, max_size=10))
def test_runout_roughness_lies_between_its_bounds(feed, radius, runouts):
    """Both bounds hold for any set of insert heights, apart from the parabola's own error."""
    lowest = [height - min(runouts) for height in runouts]
    bounds = surface.roughness_with_runout(feed, len(runouts), radius, max(lowest))
    true = envelope_height(feed, radius, lowest)
    assert true <= bounds.runout.rt_um * 1.072 + 0.05
    assert true >= bounds.perfect.rt_um * 0.98 - 0.05


@some
@given(st.floats(0.05, 0.25), st.integers(2, 8), st.floats(0.4, 2.0))
def test_single_mark_against_arcs(feed, teeth, radius):
    """Above the run-out named the others leave no mark; at half of it they do."""
    needed = surface.runout_for_single_mark(feed, teeth, radius)
    assume(feed * teeth <= radius)
    alone = envelope_height(feed, radius, [0.0] + [1000.0] * (teeth - 1))
    clear = envelope_height(feed, radius, [0.0] + [1.08 * needed] * (teeth - 1))
    marked = envelope_height(feed, radius, [0.0] + [0.5 * needed] * (teeth - 1))
    assert clear == pytest.approx(alone, rel=1e-6)
    assert marked < alone * 0.999


@some
@given(st.floats(50, 300), st.floats(20, 100), st.floats(10, 3000))
def test_tool_and_wall_bending_against_unit_load_integrals(length, size, force):
    """Exact: the unit-load integral of the cantilever."""
    inertia = math.pi * size**4 / 64
    true = quad(lambda x: force * (length - x) ** 2 / (210000 * inertia), 0, length)[0]
    tool = holding.tool_deflection(force, length, size, 210000, 1e9)
    assert tool.bending_mm == pytest.approx(true, rel=1e-9)
    assert tool.total_mm == pytest.approx(true + force * length**2 / 1e9, rel=1e-9)
    thickness = size / 10
    wall = quad(lambda x: force * (length - x) ** 2 / (70000 * size * thickness**3 / 12), 0, length)[0]
    assert holding.wall_deflection(force, length, thickness, size, 70000) == pytest.approx(wall, rel=1e-9)


@pytest.mark.parametrize(("edges", "coefficient"), [("clamped", 0.217), ("resting", 0.552)])
def test_plate_against_handbook_coefficients(edges, coefficient):
    """Round plate, load at the middle, nu 0.3: w = c F a2 / (E t3). Source: Roark, recalled."""
    closed = holding.floor_deflection(500, 120, 5, 70000, 0.3, edges)
    assert closed == pytest.approx(coefficient * 500 * 60**2 / (70000 * 5**3), rel=2e-3)


@some
@given(st.floats(1e3, 1e5), st.floats(0.01, 0.15))
def test_stable_depth_against_the_response_of_one_mode(stiffness, damping):
    """Exact: -1 / (2 Ks mu z Re min), the minimum of the real part found numerically."""

    def real_part(ratio: float) -> float:
        return float((1 / (stiffness * complex(1 - ratio**2, 2 * damping * ratio))).real)

    lowest = minimize_scalar(real_part, bounds=(1.0, 2.0), method="bounded", options={"xatol": 1e-10}).fun
    edge = holding.stable_depth(stiffness, damping, 2000, 0.6, 1.7, 90).edge_length_mm
    assert edge == pytest.approx(-1 / (2 * 2000 * 0.6 * 1.7 * lowest), rel=1e-6)
