"""The spindle: power over speed from torque, base speed, steps or a curve, after duty and efficiency."""

from __future__ import annotations

import math

import pytest

from example_jobs import adviser
from millreason.facts import Situation
from millreason.formulas.drive_curve import available_power
from millreason.spindle import Spindle, spindle_of


def spindle(**facts: object) -> Spindle:
    situation = Situation(adviser().vocabulary)
    for name, value in {"power_kw": 10.0, "efficiency": 0.8, **facts}.items():
        situation.set(f"machine.{name}", value, "given")
    return spindle_of(situation, adviser().knowledge.practice)


def torque(of: Spindle, speed: float) -> float:
    """M = 30000 P / (pi n)."""
    return available_power(of.net_curve, speed) * 30000 / math.pi / speed


def test_below_the_base_speed_torque_is_the_limit() -> None:
    made = spindle(torque_nm=100.0, speed_max_rpm=6000.0)
    assert made.base_speed_rpm == pytest.approx(8 * 30000 / math.pi / 100)
    assert torque(made, 200) == pytest.approx(100)
    assert available_power(made.net_curve, 3000) == pytest.approx(8)


def test_a_short_rating_leaves_less() -> None:
    share = adviser().knowledge.practice["short_duty_share"].by["S6"]
    full, short = (spindle(torque_nm=100.0, speed_max_rpm=6000.0, duty=duty) for duty in ("S1", "S6"))
    assert available_power(short.net_curve, 3000) == pytest.approx(8 * share)
    assert torque(short, 200) == pytest.approx(100 * share)
    assert full.base_speed_rpm == pytest.approx(short.base_speed_rpm)


def test_little_torque_never_gives_the_full_power() -> None:
    made = spindle(torque_nm=5.0, speed_max_rpm=6000.0)
    for speed in (100, 1000, 3000, 6000):
        assert torque(made, speed) == pytest.approx(5)


def test_steps_give_full_power_at_each_unless_a_base_speed_is_given() -> None:
    made = spindle(speed_steps_rpm=(80.0, 660.0, 2720.0))
    assert made.speed_max_rpm == 2720
    assert available_power(made.net_curve, 80) == pytest.approx(8)
    slowed = spindle(speed_steps_rpm=(80.0, 660.0, 2720.0), base_speed_rpm=660.0)
    assert available_power(slowed.net_curve, 330) == pytest.approx(4)


def test_a_curve_is_taken_point_by_point_and_bounds_the_speed() -> None:
    made = spindle(curve=((500.0, 80.0), (1500.0, 40.0), (4000.0, 10.0)), speed_max_rpm=6000.0)
    assert made.speed_max_rpm == 4000
    assert torque(made, 500) == pytest.approx(80)
    assert torque(made, 1500) == pytest.approx(40)
    assert torque(made, 4000) == pytest.approx(10)


@pytest.mark.parametrize("more", ["power_kw", "torque_nm", "efficiency"])
def test_more_never_leaves_less_at_any_speed(more: str) -> None:
    facts = {"power_kw": 10.0, "torque_nm": 60.0, "efficiency": 0.7, "speed_max_rpm": 5000.0}
    here, there = spindle(**facts), spindle(**{**facts, more: facts[more] * 1.3})
    for speed in range(50, 5001, 150):
        assert available_power(there.net_curve, speed) >= available_power(here.net_curve, speed) * (1 - 1e-9)
