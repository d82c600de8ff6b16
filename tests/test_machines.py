"""Interfaces and machines: they agree with each other, with the vocabulary, and with what people write."""

from itertools import pairwise

import pytest

from millreason.errors import MillreasonError
from millreason.knowledge import data_root, load_knowledge
from millreason.machines import Interface, Machine
from millreason.vocabulary import FactDefinition, load_vocabulary

KNOWLEDGE = load_knowledge()
VOCABULARY = load_vocabulary(data_root())
MACHINES = tuple(KNOWLEDGE.machines.values())
INTERFACES = tuple(KNOWLEDGE.interfaces.values())


def test_no_spelling_means_two_interfaces() -> None:
    spellings = [name.casefold() for one in INTERFACES for name in {one.id, *one.aliases}]
    folded = {name.casefold() for one in INTERFACES for name in (one.id, *one.aliases)}
    assert len({(name, KNOWLEDGE.interface(name).id) for name in spellings}) == len(folded)
    for one in INTERFACES:
        for name in (one.id, *one.aliases):
            assert KNOWLEDGE.interface(name) is one


@pytest.mark.parametrize(
    ("written", "meant"),
    [
        ("CAT40", "7/24-40"),
        ("BT 30", "7/24-30"),
        ("SK-50", "7/24-50"),
        ("40 taper", "7/24-40"),
        ("HSK-A63", "hollow-63"),
        ("hsk a100", "hollow-100"),
        ("r8", "R8"),
        ("Polygonal 63", "polygon-63"),
        ("7/24 No. 40", "7/24-40"),
    ],
)
def test_interfaces_are_found_by_what_people_write(written: str, meant: str) -> None:
    assert KNOWLEDGE.interface(written).id == meant


def test_an_unknown_interface_is_answered_with_near_names() -> None:
    with pytest.raises(MillreasonError, match="hollow-6"):
        KNOWLEDGE.interface("hollow-64")


def test_interfaces_are_the_options_of_the_vocabulary() -> None:
    assert set(KNOWLEDGE.interfaces) == set(VOCABULARY.facts["machine.interface"].options)
    assert {one.size for one in INTERFACES} == set(VOCABULARY.facts["machine.taper_size"].options)


@pytest.mark.parametrize("family", ["steep_taper", "hollow_taper", "polygon"])
def test_a_larger_interface_carries_no_less(family: str) -> None:
    row = sorted((one for one in INTERFACES if one.family == family), key=lambda one: one.gauge.diameter_mm)
    assert len(row) >= 5
    for smaller, larger in pairwise(row):
        assert larger.carries.largest_mm >= smaller.carries.largest_mm
        assert larger.drive.power_kw >= smaller.drive.power_kw
        assert larger.drive.torque_high_nm >= smaller.drive.torque_high_nm
        assert larger.adapter.mass_kg >= smaller.adapter.mass_kg
        assert larger.reach.longest_overhang_mm > smaller.reach.longest_overhang_mm
        assert larger.speed.most_rpm <= smaller.speed.most_rpm
        assert smaller.changer is not None
        assert larger.changer is not None
        assert larger.changer.full_mm >= smaller.changer.full_mm
        assert larger.changer.mass_kg >= smaller.changer.mass_kg


@pytest.mark.parametrize("one", INTERFACES, ids=lambda one: one.id)
def test_limits_of_an_interface_are_in_order(one: Interface) -> None:
    assert one.carries.largest_mm <= one.carries.light_mm
    assert one.drive.power_low_kw <= one.drive.power_kw <= one.drive.power_high_kw
    assert one.drive.torque_low_nm < one.drive.torque_high_nm
    assert one.reach.longest_overhang_mm == pytest.approx(3 * one.gauge.diameter_mm, rel=0.01)
    assert ("spindle_nose_flange" in one.mountings.options) <= (one.nose is not None)
    assert one.changer is None or one.changer.full_mm < one.changer.empty_mm


def allowed(definition: FactDefinition, value: object) -> bool:
    """Whether a value is one that the vocabulary allows for a fact."""
    if isinstance(value, tuple):
        return all(definition.kind == "curve" or allowed(definition, item) for item in value)
    if definition.options:
        return value in definition.options
    if definition.range is not None and isinstance(value, int | float):
        return definition.range[0] <= value <= definition.range[1]
    return definition.kind in ("text", "flag")


@pytest.mark.parametrize("machine", MACHINES, ids=lambda machine: machine.id)
def test_a_machine_gives_facts_that_the_vocabulary_allows(machine: Machine) -> None:
    facts = machine.facts()
    assert facts["machine.class"] == machine.kind
    assert set(facts) <= set(VOCABULARY.facts)
    assert {name: value for name, value in facts.items() if not allowed(VOCABULARY.facts[name], value)} == {}


@pytest.mark.parametrize("machine", MACHINES, ids=lambda machine: machine.id)
def test_power_torque_and_speeds_of_a_machine_agree(machine: Machine) -> None:
    assert machine.power_kw is not None
    assert machine.speed_min_rpm is not None
    assert machine.speed_max_rpm is not None
    assert machine.speed_min_rpm < machine.speed_max_rpm
    if machine.torque_nm is not None:
        base = 9549 * machine.power_kw / machine.torque_nm
        assert machine.speed_min_rpm < base < machine.speed_max_rpm
    if machine.curve:
        powers = [speed * torque / 9549 for speed, torque in machine.curve]
        assert max(powers) == pytest.approx(machine.power_kw, rel=0.01)
        assert max(torque for _, torque in machine.curve) == machine.torque_nm
        assert machine.curve[-1][0] == machine.speed_max_rpm
    if machine.speed_steps_rpm:
        assert (machine.speed_steps_rpm[0], machine.speed_steps_rpm[-1]) == (
            machine.speed_min_rpm,
            machine.speed_max_rpm,
        )


@pytest.mark.parametrize("machine", MACHINES, ids=lambda machine: machine.id)
def test_a_machine_suits_its_interface(machine: Machine) -> None:
    interface = KNOWLEDGE.interfaces[machine.interface]
    assert machine.power_kw is not None
    assert 0.5 * interface.drive.power_low_kw <= machine.power_kw <= 1.25 * interface.drive.power_high_kw
    assert machine.speed_max_rpm is None or machine.speed_max_rpm <= interface.speed.most_rpm
    assert (machine.changer == "automatic") == (machine.changer_full_mm is not None)
    if machine.nose == "bolted_flange":
        assert interface.nose is not None
    if machine.control == "manual":
        assert machine.backlash_mm is not None
        assert machine.backlash_mm > 0.05


def test_machine_centres_do_not_take_bolted_cutters_unless_their_builder_says_so() -> None:
    centres = [machine for machine in MACHINES if machine.kind.startswith("machining_centre")]
    assert centres
    assert {machine.nose for machine in centres} == {"none"}
