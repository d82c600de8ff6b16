"""The knowledge files: they load, agree with themselves, and errors in them are located."""

import shutil
import time
from itertools import pairwise
from pathlib import Path

import pytest

from millreason.errors import DataError, MillreasonError
from millreason.knowledge import data_root, load_knowledge
from millreason.provenance import labels
from millreason.vocabulary import load_vocabulary

KNOWLEDGE = load_knowledge()
VOCABULARY = load_vocabulary(data_root())
FAMILIES = KNOWLEDGE.cutters.families
MACHINES = tuple(KNOWLEDGE.machines.values())


@pytest.fixture
def copy(tmp_path: Path) -> Path:
    """Return a copy of the shipped knowledge that a test may spoil."""
    (tmp_path / "rules").mkdir()
    shutil.copytree(data_root() / "knowledge", tmp_path / "knowledge")
    return tmp_path


@pytest.fixture
def shop(tmp_path: Path) -> Path:
    """Return the folder of an invented shop with a machine, a family and a cutter of its own."""
    folder = tmp_path / "shop"
    folder.mkdir()
    (folder / "machines.yaml").write_text(
        "machines:\n"
        "  - {id: vertical-40, title: Our old vertical, class: machining_centre_vertical,"
        ' interface: "7/24-40", power_kw: 9}\n'
        '  - {id: blue-mill, title: The blue mill, class: knee_mill, interface: "R8", power_kw: 2.2}\n'
    )
    (folder / "cutters.yaml").write_text(
        "on_hand:\n"
        "  - {id: shelf-3, cutter_class: face_mill, diameter_mm: 80, teeth: 6, kappa_deg: 45,"
        " speed_limit_rpm: 9000, mass_kg: 1.3}\n"
    )
    return folder


def spoil(root: Path, file: str, old: str, new: str) -> DataError:
    """Change one text in a knowledge file and return the error that loading it raises."""
    path = root / "knowledge" / file
    text = path.read_text(encoding="utf-8")
    assert old in text, f"{old!r} is no longer in {file}"
    path.write_text(text.replace(old, new, 1), encoding="utf-8")
    with pytest.raises(DataError) as caught:
        load_knowledge(root)
    return caught.value


# ---------------------------------------------------------------------- what there is


def test_there_is_enough_to_choose_from() -> None:
    assert len(MACHINES) >= 15
    assert {family.cutter_class for family in FAMILIES} == set(VOCABULARY.picks["cutter_class"].options)
    assert {machine.interface for machine in MACHINES} >= {"R8", "7/24-30", "7/24-40", "7/24-50", "hollow-63"}


def test_strengths_rise_and_no_handful_of_one_level_beats_the_next_by_accident() -> None:
    weights = [level.weight for level in KNOWLEDGE.strengths.values()]
    assert list(KNOWLEDGE.strengths) == ["slight", "moderate", "strong", "decisive"]
    assert all(above == 3 * below for below, above in pairwise(weights))


def test_sources_are_sorted_by_id() -> None:
    assert list(KNOWLEDGE.sources) == sorted(KNOWLEDGE.sources)


def test_unused_sources_are_told_and_used_ones_are_not() -> None:
    unused = KNOWLEDGE.unused_sources(also=["din-857"])
    assert "din-857" not in unused
    assert "iso-6462" not in unused
    assert "iso-3855" in unused


# ---------------------------------------------------------------------- practice


def test_every_drive_edge_and_chip_form_has_its_figure() -> None:
    practice, facts = KNOWLEDGE.practice, VOCABULARY.facts
    assert set(practice["efficiency_by_drive"].by) == set(facts["machine.drive"].options)
    assert set(practice["short_duty_share"].by) == set(facts["machine.duty"].options)
    assert set(practice["chip_least_mm"].by) == set(VOCABULARY.picks["edge"].options)
    assert set(practice["chip_ratio"].by) == set(facts["material.chip_form"].options)
    assert set(practice["reference_rake_deg"].by) == set(facts["work.iso_group"].options)
    assert set(practice["ra_floor_um"].by) == set(facts["work.iso_group"].options)


def test_fluids_are_the_options_of_the_pick() -> None:
    assert set(KNOWLEDGE.fluids) == set(VOCABULARY.picks["fluid"].options)


def test_widths_diameters_and_clearances_fit_together() -> None:
    practice = KNOWLEDGE.practice
    most, one_pass = (practice[f"width_to_diameter_{name}"] for name in ("most", "one_pass"))
    assert one_pass.number < most.number < one_pass.high < 1


def test_asking_for_a_figure_that_is_not_there_says_what_is() -> None:
    with pytest.raises(MillreasonError, match="geared_head"):
        KNOWLEDGE.practice["efficiency_by_drive"].of("geared")
    with pytest.raises(MillreasonError, match="no single value"):
        _ = KNOWLEDGE.practice["efficiency_by_drive"].number
    assert KNOWLEDGE.practice["efficiency_by_drive"].basis_label("direct") == "drive_practice"
    assert KNOWLEDGE.practice["efficiency_by_drive"].basis_label("belt") == "drive_efficiency"


# ---------------------------------------------------------------------- provenance


def test_values_are_counted_by_what_they_rest_on(copy: Path) -> None:
    before = load_knowledge(copy).provenance_counts()
    assert set(before) <= {"checked", "recalled", "common_practice", "derived", "invented", "shop"}
    path = copy / "knowledge" / "practice.yaml"
    extra = "\nvalues:\n  spare_mm: {value: 1, low: 0.5, unit: mm, says: A spare figure, basis: lifting_niosh}\n"
    path.write_text(path.read_text(encoding="utf-8").replace("\nvalues:\n", extra), encoding="utf-8")
    after = load_knowledge(copy).provenance_counts()
    assert after["checked"] == before["checked"] + 2
    assert after["common_practice"] == before["common_practice"]


@pytest.mark.parametrize("name", KNOWLEDGE.files)
def test_every_basis_is_used(name: str) -> None:
    file = KNOWLEDGE.files[name]
    assert set(file.bases) - {label for _, label in labels(file.document.data)} == set()


def test_the_hash_follows_the_contents_and_not_the_place(copy: Path) -> None:
    (copy / "rules" / "one.yaml").write_text("rules: []\n")
    first = load_knowledge(copy).content_hash
    assert load_knowledge(copy).content_hash == first
    (copy / "rules" / "one.yaml").write_text("rules: [1]\n")
    assert load_knowledge(copy).content_hash != first


# ---------------------------------------------------------------------- a shop's own folder


def test_a_shop_adds_and_replaces_and_what_is_its_own_is_remembered(shop: Path) -> None:
    knowledge = load_knowledge(shop=shop)
    assert knowledge.machines["vertical-40"].power_kw == 9
    assert knowledge.machines["blue-mill"].interface == "R8"
    assert len(knowledge.machines) == len(MACHINES) + 1
    assert knowledge.from_shop == {"vertical-40", "blue-mill", "shelf-3"}
    assert knowledge.on_hand["shelf-3"].values() == {
        "cutter_class": "face_mill",
        "diameter_mm": 80,
        "teeth": 6,
        "kappa_deg": 45,
        "speed_limit_rpm": 9000,
        "mass_kg": 1.3,
    }
    assert knowledge.provenance_counts()["shop"] > 0
    assert knowledge.content_hash != KNOWLEDGE.content_hash


def test_a_shop_without_files_changes_nothing(tmp_path: Path) -> None:
    knowledge = load_knowledge(shop=tmp_path)
    assert knowledge.machines.keys() == KNOWLEDGE.machines.keys()
    assert not knowledge.from_shop


def test_errors_of_a_shop_are_located_in_its_own_file(shop: Path) -> None:
    path = shop / "machines.yaml"
    path.write_text(path.read_text().replace('"R8"', '"R9"'))
    with pytest.raises(DataError, match=r"shop/machines\.yaml:3: machines\.1\.interface: unknown interface 'R9'"):
        load_knowledge(shop=shop)


# ---------------------------------------------------------------------- located errors


MISTAKES = {
    "a label that is not there": (
        "practice.yaml", "basis: travel}", "basis: travl}",
        "values.approach_clearance_mm.basis", "unknown basis 'travl'. Did you mean 'travel'",
    ),
    "a source that is not there": (
        "cutters.yaml", "source: iso-3338,", "source: iso-3339,",
        "bases.shanks.cited.source", "unknown source 'iso-3339'. Did you mean 'iso-3338'",
    ),
    "an interface that is not there": (
        "machines.yaml", 'interface: "R8"', 'interface: "R7"', "machines.0.interface",
        "unknown interface 'R7'",
    ),
    "an id used twice": (
        "machines.yaml", "id: knee-mill-30\n", "id: knee-mill-r8\n", "machines.2.id",
        "'knee-mill-r8' is used",
    ),
    "a source listed twice": (
        "sources.yaml", "id: altintas-budak-1995", "id: altintas-automation",
        "sources.1.id", "'altintas-automation' is used twice",
    ),
    "a word for a number": (
        "machines.yaml", "power_kw: 2.2", "power_kw: two", "machines.2.power_kw", "valid number",
    ),
    "a key that is not known": (
        "machines.yaml", "power_kw: 2.2", "pover_kw: 2.2",
        "machines.2.pover_kw", "unknown key. Did you mean 'power_kw'",
    ),
    "speeds out of order": ("machines.yaml", "[80, 125, 200,", "[80, 200, 125,", "machines.0", "must rise"),
    "a rake against its sign": (
        "cutters.yaml", "axial_deg: 20, radial_deg: -7", "axial_deg: 20, radial_deg: 7",
        "families.0.rakes.0", "positive_negative disagrees",
    ),
    "a facet with a radius": (
        "cutters.yaml", "corner: facet, land_mm: 2.0", "corner: facet, radius_mm: 1, land_mm: 2.0",
        "families.0.corners.0", "a facet has no radius_mm",
    ),
    "a body material that is not there": (
        "cutters.yaml", "body_materials: [steel, light_alloy]", "body_materials: [steel, wood]",
        "families.0.body_materials.1", "unknown body material 'wood'",
    ),
    "a span upside down": (
        "practice.yaml", "low: 2, high: 5", "low: 5, high: 2", "values.pass_overlap_mm", "must rise",
    ),
    "a basis of no kind": (
        "strengths.yaml", "common_practice:", "comon_practice:", "bases.house.comon_practice", "unknown key",
    ),
}  # fmt: skip
# A finding about a whole entry is located where the entry starts.
ENTRY_STARTS_AT = {"speeds out of order": "id: knee-mill-r8\n"}


@pytest.mark.parametrize("mistake", MISTAKES)
def test_a_mistake_is_told_with_file_line_field_and_remedy(copy: Path, mistake: str) -> None:
    file, old, new, field, said = MISTAKES[mistake]
    text = (copy / "knowledge" / file).read_text(encoding="utf-8")
    anchor = ENTRY_STARTS_AT.get(mistake, old)
    line = text[: text.index(anchor)].count("\n") + 1
    error = spoil(copy, file, old, new)
    found = [finding for finding in error.findings if said in finding.message]
    assert found, str(error)
    assert (found[0].file, found[0].field) == (f"knowledge/{file}", field)
    assert found[0].line == line


def test_mistakes_in_several_files_are_told_together(copy: Path) -> None:
    path = copy / "knowledge" / "practice.yaml"
    path.write_text(path.read_text(encoding="utf-8").replace("basis: travel}", "basis: travl}", 1), encoding="utf-8")
    error = spoil(copy, "strengths.yaml", "basis: house", "basis: horse")
    assert {finding.file for finding in error.findings} == {
        "knowledge/practice.yaml",
        "knowledge/strengths.yaml",
    }


def test_a_missing_file_is_told(copy: Path) -> None:
    (copy / "knowledge" / "interfaces.yaml").unlink()
    with pytest.raises(DataError, match=r"knowledge/interfaces\.yaml:1: file: cannot be read"):
        load_knowledge(copy)


def test_loading_is_fast_enough_for_a_command_line() -> None:
    times = []
    for _ in range(5):
        start = time.perf_counter()
        load_knowledge()
        times.append(time.perf_counter() - start)
    assert min(times) < 0.08


def test_knowledge_cannot_be_changed() -> None:
    machine = KNOWLEDGE.machines["vertical-40"]
    with pytest.raises(ValueError, match="frozen"):
        machine.power_kw = 99  # type: ignore[misc]
