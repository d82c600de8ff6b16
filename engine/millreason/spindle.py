"""The machine's spindle as the plan needs it: net power over speed, steps and highest speed."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from millreason.facts import Situation
from millreason.formulas.drive import net_power_limit
from millreason.formulas.drive_curve import base_speed, drive_curve

Curve = tuple[tuple[float, float], ...]
_TINY = 1e-9


@dataclass(frozen=True)
class Spindle:
    """Net power at the cutter over spindle speed, after duty and efficiency."""

    net_curve: Curve
    base_speed_rpm: float
    speed_max_rpm: float
    steps: tuple[float, ...]
    power_kw: float
    efficiency: float


def spindle_of(situation: Situation, practice: Mapping[str, Any]) -> Spindle:
    """Build the spindle from the facts of a job: a torque curve, a torque, a base speed, or steps of constant power."""
    fact = situation.value
    efficiency = fact("machine.efficiency")
    duty = practice["short_duty_share"].by[fact("machine.duty", "S1")]
    net = fact("machine.power_kw") * duty * efficiency
    steps = tuple(fact("machine.speed_steps_rpm") or ())
    top = max(fact("machine.speed_max_rpm") or 0.0, max(steps, default=0.0))
    curve = fact("machine.curve")
    if curve:
        motor = fact("machine.power_kw") * duty
        points = tuple((speed, net_power_limit(motor, efficiency, torque * duty, speed)) for speed, torque in curve)
        top = min(top, points[-1][0]) if top else points[-1][0]
    else:
        torque = fact("machine.torque_nm")
        if torque:
            # A spindle with little torque may not reach its motor's power at any speed.
            net = net_power_limit(fact("machine.power_kw") * duty, efficiency, torque * duty, top)
        points = drive_curve(net, _base_speed(situation, net, duty, steps, top), top)
    full = max(kilowatt for _, kilowatt in points)
    base = next(speed for speed, kilowatt in points if kilowatt >= full * (1 - _TINY))
    return Spindle(points, base, top, steps, fact("machine.power_kw"), efficiency)


def _base_speed(situation: Situation, net_kw: float, duty: float, steps: tuple[float, ...], top: float) -> float:
    """Return the speed below which torque is constant; torque is what the spindle has, after the drive."""
    torque, base = situation.value("machine.torque_nm"), situation.value("machine.base_speed_rpm")
    if torque:
        return min(base_speed(net_kw, torque * duty), top)
    if steps and not base:
        # A stepped belt or gear drive turns the motor at one speed: full power at every step.
        return min(steps)
    return min(base or top, top)
