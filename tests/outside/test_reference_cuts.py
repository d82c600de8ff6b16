"""Independently computed reference cuts: speed, chip, force, power, torque and time within 1 %.

The force constants of reference_cuts.yaml are recalled text-book figures (+/- 30 %), used here only to
reproduce numbers that were computed apart from this program.
"""

from pathlib import Path
from typing import Any

import pytest
import yaml

from millreason.formulas import body, chip, cutting_force, drive, engagement, passes

REFERENCE = yaml.safe_load(Path(__file__).with_name("reference_cuts.yaml").read_text(encoding="utf-8"))
CUTS = REFERENCE["cuts"]
WITHIN = 0.01
each_cut = pytest.mark.parametrize("cut", CUTS, ids=lambda cut: cut["id"])


def spindle_speed(given: dict[str, Any]) -> float:
    """Return the speed as given, or the one that the cutting speed means."""
    if "speed" in given:
        return float(given["speed"])
    return body.spindle_speed(given["cutting_speed"], given["diameter"])


def computed(given: dict[str, Any]) -> dict[str, float]:
    """Return every number of a reference cut, by the program's formulas."""
    diameter, width, kappa, feed = (given[name] for name in ("diameter", "width", "kappa", "feed_per_tooth"))
    speed = spindle_speed(given)
    table_feed = body.table_feed(feed, given["teeth"], speed)
    arc = engagement.centred_arc(width, diameter)
    mean = chip.mean_chip_thickness(feed, kappa, width, diameter, arc.arc_deg)
    law = REFERENCE["materials"][given["material"]]
    force = cutting_force.specific_cutting_force(**law, chip_thickness_mm=mean, factor=given["rake_factor"])
    power = cutting_force.net_power(given["depth"], width, table_feed, force)
    rate = body.removal_rate(given["depth"], width, table_feed)
    travel = passes.full_overrun_travel(given["length"], diameter, REFERENCE["clearance_each_end"])
    between = REFERENCE["minutes_between_passes"]
    return {
        "speed": speed,
        "table_feed": table_feed,
        "feed_per_turn": feed * given["teeth"],
        "maximum_chip": chip.maximum_chip_thickness(feed, kappa, arc.entry_deg, arc.exit_deg),
        "mean_chip": mean,
        "teeth_in_cut": engagement.teeth_in_cut(given["teeth"], arc.arc_deg).mean,
        "specific_force": force,
        "removal_rate": rate,
        "net_power": power,
        "torque": cutting_force.torque_from_power(power, speed),
        "power_per_rate": power / rate,
        "time": passes.pass_time(travel, table_feed, given["passes"], between),
        "time_length_only": passes.pass_time(given["length"], table_feed, given["passes"], 0.0),
    }


@each_cut
def test_reference_cut(cut):
    ours = computed(cut["given"])
    assert set(ours) == set(cut["result"])
    assert ours == pytest.approx(cut["result"], rel=WITHIN)


@each_cut
def test_power_is_teeth_times_force_times_speed(cut):
    """The second published form of the power, from the mean tooth force, agrees with the first."""
    given, ours = cut["given"], computed(cut["given"])
    tooth = cutting_force.mean_tooth_force(given["depth"], given["kappa"], ours["mean_chip"], ours["specific_force"])
    speed = body.cutting_speed(ours["speed"], given["diameter"])
    together = cutting_force.mean_tangential_force(ours["net_power"], speed)
    assert ours["teeth_in_cut"] * tooth == pytest.approx(together, rel=1e-9)


@pytest.mark.parametrize("cut", [cut for cut in CUTS if "drive" in cut], ids=lambda cut: cut["id"])
def test_power_that_the_drive_leaves(cut):
    plate, speed = cut["drive"], spindle_speed(cut["given"])
    limit = drive.net_power_limit(plate["motor_kw"], plate["efficiency"], plate["torque_nm"], speed)
    assert limit == pytest.approx(plate["net_limit_kw"], rel=WITHIN)
