"""Small invented jobs that the module tests share, and the advisers that answer them."""

from __future__ import annotations

from functools import cache
from pathlib import Path

from millreason.answer import write_answer
from millreason.choice import Adviser, load_adviser
from millreason.job import Job, parse_job, read_job
from millreason.outcome import Outcome
from millreason.trace import Answer

ROOT = Path(__file__).resolve().parent.parent
CASES = sorted((ROOT / "cases" / "accept").glob("*.yaml"))
PLATE = """\
work: {material: C45, hardness: 190 HB, skin: [none], feature: open_face, length: 300 mm, width: 120 mm, stock: 3 mm}
require: {finish: 3.2 um, quantity: 10}
machine: {class: machining_centre_vertical, interface: 7/24-40, power: 11 kW, torque: 95 N.m, speed_max: 8000 rpm,
          changer_full: 90 mm, changer_empty: 150 mm, changer_mass: 7 kg, changer_state: full, fluids: [air, flood]}
fixture: {rigidity: normal, hold: vise}
"""
SHOULDER = PLATE.replace("open_face", "shoulder, corner_radius: 1 mm").replace("width: 120 mm", "width: 40 mm")
IRON = PLATE.replace("C45, hardness: 190 HB", "GJL-250").replace("[none]", "[cast_skin]")
TITANIUM = PLATE.replace("C45, hardness: 190 HB", "Ti-6Al-4V").replace("flood", "flood, through_tool")
WEAK = PLATE.replace("rigidity: normal", "rigidity: weak").replace("11 kW, torque: 95 N.m", "3 kW, torque: 30 N.m")


@cache
def adviser(engine: str = "twin") -> Adviser:
    """Return an adviser with the shipped knowledge, loaded once."""
    return load_adviser(engine=engine)


def read(text: str, of: Adviser | None = None) -> Job:
    """Read a job from YAML text."""
    by = of or adviser()
    return parse_job(text, by.vocabulary, by.knowledge.interface_names)


def case(path: Path, of: Adviser | None = None) -> Job:
    """Read the job of a shipped case."""
    by = of or adviser()
    return read_job(path, by.vocabulary, by.knowledge.interface_names)


def decided(text: str) -> Outcome:
    """Decide a job on the plain engine."""
    return adviser().decide(read(text))


def answered(text: str) -> Answer:
    """Answer a job on the plain engine, without the search for what would open a way."""
    return write_answer(adviser(), decided(text), openings=False)
