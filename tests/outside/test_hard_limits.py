"""Hard limits that any answer must keep, on jobs that lean against each of them.

The limits are physics and geometry (P = M omega, a body goes through a gap or does not), or stand on the machine; none
is taken from the program. Basis: common practice, and the definitions of vc, vf and Q in ISO 3002-1 (recalled).
"""

from __future__ import annotations

import math
from itertools import pairwise

import pytest

from example_jobs import PLATE, SHOULDER, TITANIUM, answered
from hard_limits import breaches
from millreason.trace import Answer

RECOMMENDED = ("recommend", "recommend_with_warnings")


def kept(text: str) -> Answer:
    answer = answered(text)
    assert breaches(answer.to_dict()) == []
    return answer


@pytest.mark.parametrize("full", [40, 50, 63, 80, 100])
def test_the_inserts_pass_the_changer(full: int) -> None:
    answer = kept(PLATE.replace("changer_full: 90", f"changer_full: {full}"))
    assert answer.picks is None or answer.picks.largest_diameter_mm <= full


@pytest.mark.parametrize("torque", [10, 20, 40, 80, 160])
def test_torque_at_the_speed_bounds_the_power(torque: int) -> None:
    answer = kept(PLATE.replace("95 N.m", f"{torque} N.m"))
    for step in answer.plan.steps if answer.plan else ():
        assert step.net_power_worn_kw * 30000 / math.pi / step.spindle_speed_rpm <= torque * 1.001


def test_more_torque_never_takes_longer_by_much() -> None:
    """The same job gets no slower with a stronger spindle; a tie between bodies may cost a little."""
    times = [answered(PLATE.replace("95 N.m", f"{torque} N.m")).plan for torque in (20, 40, 80, 160)]
    minutes = [plan.time_min for plan in times if plan is not None]
    assert len(minutes) == 4
    assert all(later <= earlier * 1.15 for earlier, later in pairwise(minutes))


@pytest.mark.parametrize("radius", ["0.4 mm", "0.8 mm", "1.6 mm", "1/32 in"])
def test_a_square_wall_is_cut_square_and_within_the_print(radius: str) -> None:
    answer = kept(SHOULDER.replace("corner_radius: 1 mm", f"corner_radius: {radius}"))
    assert answer.picks is not None
    assert answer.picks.kappa_deg == 90


@pytest.mark.parametrize("stock", [1, 4, 9, 25])
def test_no_layer_is_deeper_than_the_edge(stock: int) -> None:
    answer = kept(PLATE.replace("stock: 3 mm", f"stock: {stock} mm"))
    assert answer.verdict in RECOMMENDED


@pytest.mark.parametrize("fluids", ["[air]", "[air, mineral_oil]", "[flood_water_mixed]", "[flood, through_tool, mql]"])
def test_no_water_on_magnesium(fluids: str) -> None:
    """Wet magnesium chips give hydrogen: common practice, and NFPA 484 (recalled)."""
    text = PLATE.replace("C45, hardness: 190 HB", "AZ91D").replace("[air, flood]", fluids)
    answer = kept(text + "confirm: {magnesium_fire_controls: yes, no_steel_inserts_cast_in: yes}")
    assert answer.plan is None or answer.plan.fluid in ("dry", "air_blast", "mineral_oil")


@pytest.mark.parametrize("backlash", ["0.02 mm", "0.2 mm", "0.015 in"])
def test_a_loose_table_is_not_climbed_on(backlash: str) -> None:
    text = PLATE.replace("machining_centre_vertical", f"knee_mill, control: manual, backlash: {backlash}")
    answer = kept(text)
    if answer.plan is not None and backlash != "0.02 mm":
        assert answer.plan.direction == "conventional"


@pytest.mark.parametrize("width", [21, 25, 30, 50, 80])
def test_a_slot_lets_the_body_in(width: int) -> None:
    answer = kept(SHOULDER.replace("shoulder", "slot").replace("width: 40 mm", f"width: {width} mm"))
    assert answer.picks is None or answer.picks.largest_diameter_mm <= width * 1.001


def test_titanium_is_not_cut_dry() -> None:
    answer = kept(TITANIUM)
    assert answer.plan is not None
    assert answer.plan.fluid in ("flood", "through_tool")
    dry = answered(PLATE.replace("C45, hardness: 190 HB", "Ti-6Al-4V").replace("[air, flood]", "[air]"))
    assert dry.verdict == "refuse"
