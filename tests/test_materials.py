"""Materials as people name them: what is found, what is asked, what is contradicted, and the facts."""

from __future__ import annotations

import shutil
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from millreason.errors import DataError
from millreason.materials import (
    Ambiguous,
    Found,
    Unknown,
    find_contradictions,
    find_material,
    load_materials,
    material_facts,
    speed_pick,
)
from millreason.materials.text import fold, join, key_of, leave_sizes_out, take_hardness
from millreason.provenance import Basis

ROOT = Path(__file__).parents[1]
BOOK = load_materials(ROOT)

# What stands on drawings, order sheets and labels: text, entry, state, hardness read in it.
NAMED = """
4140 | 42crmo4 | annealed |
42CrMo4 | 42crmo4 | annealed |
42 CrMo 4 | 42crmo4 | annealed |
1.7225 | 42crmo4 | annealed |
SCM440 | 42crmo4 | annealed |
en19 | 42crmo4 | annealed |
EN19T bar dia 80 | 42crmo4 | tempered |
UNS G41400 | 42crmo4 | annealed |
4140 prehard 30 HRC plate | 42crmo4 | tempered | 286
4140 HT, 28-32 HRC | 42crmo4 | tempered | 286
42CrMo4 QT 300 HB | 42crmo4 | tempered | 300
42CrMo4+QT | 42crmo4 | tempered |
42CrM04 | 42crmo4 | annealed |
4140 induction hardened 56 HRC | 42crmo4 | surface_hardened | 577
4340 annealed | 34crnimo6 | annealed |
EN24T | 34crnimo6 | tempered |
4130 tube | 25crmo4 | annealed |
S355J2 hot-rolled plate, flame-cut edges | s355j2 | as_rolled |
St 52-3 | s355j2 | as_rolled |
A36 plate 1 1/4 in thick | a36 | as_rolled |
A 36 | a36 | as_rolled |
S235JR 20 mm | s235jr | as_rolled |
mild steel plate 300 x 200 x 20 | mild_steel | as_rolled |
1018 hot-rolled block, black scale | c18 | as_rolled |
1018 cold drawn | c18 | cold_drawn |
C45 | c45 | normalised |
1045 normalised 180 HB | c45 | normalised | 180
steel 1.0503 | c45 | normalised |
12L14 | 11smnpb37 | as_rolled |
EN1A | 11smn30 | as_rolled |
16MnCr5 case hardened | 16mncr5 | case_hardened |
8620 | 20nicrmo2 | annealed |
100Cr6 62 HRC | 100cr6 | hardened | 688
1.2344 / H13, hardened | x40crmov5 | hardened |
H13 52 HRC | x40crmov5 | hardened | 512
X40CrMoV5-1 annealed | x40crmov5 | annealed |
D2 tool steel, annealed | x153crmov12 | annealed |
1.2379 60 HRC | x153crmov12 | hardened | 654
O1 gauge plate | 95mnwcr5 | annealed |
P20 mould steel | 40crmnmo7 | tempered |
1.2312 | 40crmnmos8 | tempered |
1.2767 hardened 52 HRC | x45nicrmo4 | hardened_50 | 512
Hardox 400 | wear_plate_400 | tempered |
304 stainless plate | 304 | solution |
1.4301 / 304 annealed plate | 304 | solution |
X5CrNi18-10 | 304 | solution |
X5CrNi1810 | 304 | solution |
SUS304 | 304 | solution |
AISI 316 | 316 | solution |
316L | 316l | solution |
316/316L dual cert | 316l | solution |
1.4571 | 316ti | solution |
2205 duplex | 2205 | solution |
17-4 PH H900 | 17_4ph | aged |
17-4PH cond. H1150 | 17_4ph | overaged |
420 stainless | x20cr13 | annealed |
EN-GJL-250 sand casting | gjl250 | as_cast |
GG25 | gjl250 | as_cast |
class 30 gray iron | gjl200 | as_cast |
65-45-12 casting | gjs450 | as_cast |
GGG 40 | gjs400 | as_cast |
EN-GJS-500-7 housing | gjs500 | as_cast |
SG iron | ductile_iron | as_cast |
CGI | gjv450 | as_cast |
6061-T6 plate | en_aw_6061 | aged |
EN AW-6082 T651 | en_aw_6082 | aged |
7075 billet | en_aw_7075 | aged |
5083-H111 plate | en_aw_5083 | soft |
MIC-6 tooling plate | cast_tooling_plate | soft |
AlSi9Cu3 die casting | en_ac_46000 | as_cast |
A356-T6 sand casting | en_ac_42100 | aged |
LM6 | en_ac_44200 | as_cast |
AZ91D die casting | az91 | as_cast |
CuZn39Pb3 | cuzn39pb3 | work_hardened |
brass 360 bar | cuzn36pb3 | work_hardened |
phosphor bronze PB102 half hard | cusn6 | work_hardened |
beryllium copper C17200 aged | cube2 | aged |
Ti-6Al-4V annealed plate | ti_6al_4v | annealed |
Ti6A14V | ti_6al_4v | annealed |
titanium grade 5 | ti_6al_4v | annealed |
Inconel 718 aged | alloy_718 | aged |
inconell 718 solution annealed | alloy_718 | solution |
Monel K500 | alloy_k500 | aged |
A-286 | a286 | aged |
hardened steel 58 HRC | hardened_steel | hardened_55 | 615
Ni-Hard 4 | ni_hard_4 | as_cast |
1050 aluminium sheet | en_aw_1050 | soft |
"""
ROWS = [[cell.strip() for cell in line.split("|")] for line in NAMED.strip().splitlines()]


def found_in(text: str, **known: object) -> Found:
    found = find_material(BOOK, text, **known)  # type: ignore[arg-type]
    assert isinstance(found, Found), found
    return found


def values_of(text: str, hardness_hb: float | None = None) -> dict[str, object]:
    found = found_in(text, hardness_hb=hardness_hb)
    return {fact.name: fact.value for fact in material_facts(BOOK, found, hardness_hb)}


def test_at_least_sixty_ways_of_naming() -> None:
    assert len(ROWS) >= 60


@pytest.mark.parametrize(("text", "entry", "state", "hardness"), ROWS, ids=[row[0] for row in ROWS])
def test_named_material_is_found(text: str, entry: str, state: str, hardness: str) -> None:
    found = found_in(text)
    assert (found.material.id, found.state.id) == (entry, state)
    assert found.hardness_hb == (float(hardness) if hardness else None)


@pytest.mark.parametrize(
    "text",
    [
        "steel",
        "ali",
        "Aluminium",
        "stainless",
        "stainles steel",
        "cast iron",
        "bronze",
        "brass",
        "tool steel",
        "titanum",
        "inconel",
        "copper block",
        "magnesium casting",
        "wear plate",
        "80-55-06",
        "1050",
        "cast iron 316 x 200 x 40",
    ],
)
def test_a_word_for_many_materials_asks(text: str) -> None:
    found = find_material(BOOK, text)
    assert isinstance(found, Ambiguous)
    assert len(found.candidates) > 1 or "52100" in found.question
    assert found.question.endswith("?")


@pytest.mark.parametrize(
    ("text", "near"), [("4145", "4140"), ("42CrMo5", "42CrMo4"), ("45", "C45"), ("6063T", "6063"), ("GJL-275", "GJL")]
)
def test_an_unknown_name_says_what_is_near_and_never_guesses(text: str, near: str) -> None:
    found = find_material(BOOK, text)
    assert isinstance(found, Unknown), found
    assert any(near in name for name in found.near), found.near


@pytest.mark.parametrize(
    "text", ["", "   ", "plate", "300 x 200 mm", "???", "10 18", "41 40", "x" * 500, "part no 77-B, 12 off"]
)
def test_text_without_a_material_is_unknown(text: str) -> None:
    assert isinstance(find_material(BOOK, text), Unknown)


@pytest.mark.parametrize(
    ("text", "word"),
    [("POM block", "Plastics"), ("CFRP panel", "composites"), ("oak", "Wood"), ("graphite electrode", "Graphite")],
)
def test_materials_outside_the_field_are_named_so(text: str, word: str) -> None:
    found = find_material(BOOK, text)
    assert isinstance(found, Unknown)
    assert word in found.why


@settings(max_examples=150, deadline=None)
@given(
    st.lists(
        st.sampled_from(
            [
                "4140",
                "steel",
                "H13",
                "-",
                "/",
                "1.4301",
                "30",
                "HRC",
                "x",
                "20",
                "mm",
                "EN",
                "GJL",
                "250",
                "ali",
                "(",
                "cast",
                "iron",
                "°",
                "é",
                "0",
                "T6",
                "plate",
            ]
        )
    )
)
def test_any_mixture_of_words_has_an_answer(words: list[str]) -> None:
    found = find_material(BOOK, " ".join(words))
    assert isinstance(found, Found | Ambiguous | Unknown)
    find_contradictions(BOOK, found, "K", 200)


@given(st.text(max_size=60))
@settings(max_examples=150, deadline=None)
def test_any_text_has_an_answer(text: str) -> None:
    result = BOOK.look_up(text, "P", (200.0, "HB"), text)
    assert result.question is not None or result.facts


def test_two_names_of_different_materials_ask() -> None:
    found = find_material(BOOK, "4140 / 1018")
    assert isinstance(found, Ambiguous)
    assert {material.id for material in found.candidates} == {"42crmo4", "c18"}


def test_a_group_or_a_hardness_settles_a_shared_name() -> None:
    assert found_in("1050", iso_group="N").material.id == "en_aw_1050"
    assert found_in("1050", iso_group="P").material.id == "c50"
    assert found_in("80-55-06", hardness_hb=260).material.id == "gjs600"


def test_near_names_and_slips_and_group_words_are_doubts() -> None:
    assert "near to" in found_in("A572 Grade 50").doubts[0]
    assert "read as" in found_in("42CrM04").doubts[0]
    assert "group, not a grade" in found_in("grey cast iron").doubts[0]
    assert "could be" in found_in("4140").doubts[0]
    assert found_in("304").doubts == ()


@pytest.mark.parametrize(("text", "skins", "forms"), [
    ("S355J2 hot-rolled plate, flame-cut edges", {"mill_scale", "flame_cut_edge"}, {"plate"}),
    ("1018 block, black scale", {"mill_scale"}, {"block"}),
    ("EN-GJL-250 sand casting", {"cast_skin"}, {"casting"}),
    ("AZ91D die casting", set(), {"die_casting"}),
    ("7075 billet", set(), {"billet"}),
    ("4140 forging, descaled", {"forged_scale", "none"}, {"forging"}),
    ("Ti-6Al-4V plate with alpha case", {"alpha_case"}, {"plate"}),
    ("4140", set(), set()),
])  # fmt: skip
def test_words_for_skin_and_form_become_hints(text: str, skins: set[str], forms: set[str]) -> None:
    hints = found_in(text).said.hints
    assert {hint.skin for hint in hints if hint.skin} == skins
    assert {hint.form for hint in hints if hint.form} == forms


@pytest.mark.parametrize(("text", "group", "hardness", "side_a", "side_b"), [
    ("4140 cast iron", None, None, "heat-treatable alloy steel", "'cast iron' means group K"),
    ("EN-GJL-250", "P", None, "grey cast iron, group K", "the group given is P"),
    ("cast iron", "P", None, "'cast iron' means group K", "the group given is P"),
    ("304", None, 409, "does not go above about 360 HB", "409 HB"),
    ("304 stainless, 44 HRC", None, None, "does not go above about 360 HB", "409 HB"),
    ("S235JR", None, 300, "does not go above about 260 HB", "300 HB"),
    ("42CrMo4 annealed", None, 300, "annealed: 180 to 241 HB", "300 HB"),
    ("1.2344 hardened", None, 200, "hardened: 477 to 543 HB", "200 HB"),
    ("4140 30 HRC", None, 200, "30 HRC (about 286 HB)", "given is 200 HB"),
    ("6061-T6", None, 180, "90 to 100 HB", "180 HB"),
])  # fmt: skip
def test_contradictions_show_both_sides(
    text: str, group: str | None, hardness: float | None, side_a: str, side_b: str
) -> None:
    found = find_material(BOOK, text, group, hardness)  # type: ignore[arg-type]
    shown = [str(one) for one in find_contradictions(BOOK, found, group, hardness)]  # type: ignore[arg-type]
    assert any(side_a in one and side_b in one for one in shown), shown


@pytest.mark.parametrize(("text", "group", "hardness"), [
    ("1.2344 / H13, hardened", "H", 512), ("1.2344 hardened tool steel", "P", None), ("17-4PH", "M", 300),
    ("42CrMo4 QT 300 HB", "P", 300),
    ("S355J2 hot-rolled plate", "P", 160), ("EN-GJL-250 sand casting", "K", 200), ("304 stainless plate", "M", 170),
    ("duplex stainless steel 2507", "M", 260), ("Ti-6Al-4V annealed plate", "S", 319), 
    ("hardened tool steel", "H", 600), ("steel", "P", None),
])  # fmt: skip
def test_consistent_statements_raise_no_contradiction(text: str, group: str, hardness: float | None) -> None:
    found = find_material(BOOK, text, group, hardness)  # type: ignore[arg-type]
    assert find_contradictions(BOOK, found, group, hardness) == []  # type: ignore[arg-type]


def test_one_name_for_alloys_that_cut_alike_does_not_stop_the_job() -> None:
    """C101 is an electrolytic copper in one country and an oxygen-free one in another; both are cut the same way."""
    found = find_material(BOOK, "C101 copper")
    assert isinstance(found, Found)
    assert any("Cu-ETP or Cu-OF" in doubt and "cut alike" in doubt for doubt in found.doubts)


def test_hardness_moves_force_and_speed_the_right_way() -> None:
    soft, hard = values_of("42CrMo4 QT", 270), values_of("42CrMo4 QT", 335)
    assert soft["material.kc11_n_mm2"] < hard["material.kc11_n_mm2"]  # type: ignore[operator]
    assert soft["material.speed_start_m_min"] > hard["material.speed_start_m_min"]  # type: ignore[operator]


@pytest.mark.parametrize("text", ["4140", "C45", "304", "EN-GJL-250", "H13", "6061-T6", "Inconel 718", "Ti-6Al-4V"])
def test_force_and_speed_stay_in_order_over_all_hardness(text: str) -> None:
    found = found_in(text)
    speeds = [speed_pick(BOOK, found.state, hb).speed[1] for hb in range(60, 700, 10)]
    assert speeds == sorted(speeds, reverse=True)
    for hb in range(60, 700, 40):
        facts = values_of(text, hb)
        low, start, high = (facts[f"material.speed_{part}_m_min"] for part in ("min", "start", "max"))
        assert low <= start <= high  # type: ignore[operator]
        assert facts["material.kc_low_ratio"] <= 1 <= facts["material.kc_high_ratio"]  # type: ignore[operator]


def test_a_steel_at_52_hrc_is_cut_as_group_h() -> None:
    for text in ("1.2344", "1.2767", "4140", "C45"):
        facts = values_of(text, 512)
        assert facts["material.iso_group"] == "H", text
        assert "hard" in facts["material.traits"], text  # type: ignore[operator]
    assert values_of("1.2344", 210)["material.iso_group"] == "P"


def test_facts_are_those_of_the_vocabulary_and_each_has_a_basis() -> None:
    found = found_in("4140 prehard")
    facts = material_facts(BOOK, found)
    names = {fact.name for fact in facts}
    wanted = "id name family iso_group chip_form traits hazards kc11_n_mm2 mc kc_low_ratio kc_high_ratio level"
    assert {f"material.{name}" for name in wanted.split()} <= names
    for part in ("min", "start", "max"):
        assert {f"material.speed_{part}_m_min", f"material.fz45_{part}_mm"} <= names
    assert "work.hardness_hb" in names
    assert all(isinstance(fact.basis, Basis) for fact in facts)


def test_group_values_say_so() -> None:
    assert values_of("S355J2")["material.level"] == "own"
    assert values_of("A36")["material.level"] == "group"
    basis = {fact.name: fact.basis for fact in material_facts(BOOK, found_in("A36"))}["material.level"]
    assert basis is not None
    assert "S275JR" in basis.remark


def test_look_up_of_a_job() -> None:
    result = BOOK.look_up("1.2344 / H13, hardened", None, (52, "HRC"))
    facts = {fact.name: fact for fact in result.facts}
    assert (facts["work.hardness_hb"].value, facts["work.hardness_hb"].given) == (512, True)
    assert (facts["work.hardness_hrc"].value, facts["work.hardness_hrc"].given) == (52, True)
    assert facts["material.iso_group"].value == "H"
    assert result.question is None
    assert result.contradictions == []


def test_look_up_reads_condition_and_words_of_the_blank() -> None:
    facts = {fact.name: fact for fact in BOOK.look_up("4140 hot-rolled plate", condition="prehard").facts}
    assert facts["work.skin_words"].value == ("hot_rolled",)
    assert facts["work.form_words"].value == ("plate",)
    assert facts["material.hardness_low_hb"].value == 260
    assert facts["material.speed_spread"].value == 1.0
    assert {fact.name: fact for fact in BOOK.look_up("6061-T6").facts}["work.skin_words"].value == ("none",)


def test_look_up_asks_and_warns() -> None:
    steel = BOOK.look_up("steel", None, (160, "HB"))
    assert steel.question is not None
    assert "which grade" in steel.question
    assert {fact.name for fact in steel.facts} >= {"work.hardness_hb", "material.speed_spread"}
    unknown = BOOK.look_up("4145")
    assert "Near:" in (unknown.question or "")
    assert BOOK.look_up(None).question is None
    assert BOOK.look_up("304", None, (44, "HRC")).contradictions
    assert any("left aside" in note for note in BOOK.look_up("304", None, (10, "HRC")).notes)


def test_list_search_and_show() -> None:
    assert len(BOOK.entries()) == len(BOOK.materials)
    assert {BOOK.family(entry).groups[0] for entry in BOOK.entries("K")} <= {"K", "H"}
    assert BOOK.materials["42crmo4"] in BOOK.search("4140")
    assert BOOK.search("") == []
    shown = {fact.name: fact for fact in BOOK.show(BOOK.materials["42crmo4"])}
    assert shown["tempered.kc11_n_mm2"].value == 1910
    assert shown["hardened_50.iso_group"].value == "H"
    assert shown["names.en"].basis.kind == "checked"  # type: ignore[union-attr]


SHOP = """
bases: {}
materials:
  house_alloy: {family: aluminium_wrought, names: {trade: [house alloy X7]},
    states: {aged: {hb: [80, 90], group_force: aluminium_6000}}}
  s355j2: {family: structural_steel, names: {en: S355J2}, states: {as_rolled: {hb: [150, 170], group_force: s355}}}
"""


def test_a_shop_lays_its_materials_over(tmp_path: Path) -> None:
    (tmp_path / "materials.yaml").write_text(SHOP, encoding="utf-8")
    book = load_materials(ROOT, tmp_path)
    found = find_material(book, "House Alloy X7 plate")
    assert isinstance(found, Found)
    assert found.material.from_shop
    assert book.materials["s355j2"].states[0].hb_max == 170
    assert {fact.name: fact for fact in book.look_up("house alloy x7").facts}["material.id"].from_shop


@pytest.mark.parametrize(("old", "new", "field", "message"), [
    ("aluminium_wrought", "aluminium_rought", "materials.house_alloy.family", "Did you mean 'aluminium_wrought'"),
    ("group_force: s355", "group_force: s356", "materials.s355j2.states.as_rolled", "not in forces.yaml"),
    ("hb: [80, 90]", "hb: [90, 80]", "materials.house_alloy.states.aged.hb", "two rising figures"),
    ("aged:", "ripened:", "materials.house_alloy.states.ripened", "not in words.yaml"),
    ("force: s355", "force: s355, force: s355", "materials.s355j2.states.as_rolled", "exactly one of force"),
    ("names: {trade", "names: {near", "materials.house_alloy.names", "no exact name"),
    ("states:", "stages:", "materials.house_alloy.stages", "unknown key"),
])  # fmt: skip
def test_faults_of_a_shop_file_are_located(tmp_path: Path, old: str, new: str, field: str, message: str) -> None:
    (tmp_path / "materials.yaml").write_text(SHOP.replace(old, new), encoding="utf-8")
    with pytest.raises(DataError) as caught:
        load_materials(ROOT, tmp_path)
    hit = [finding for finding in caught.value.findings if finding.field == field]
    assert hit, str(caught.value)
    assert message in hit[0].message
    assert (hit[0].file, 4 <= hit[0].line <= 6) == ("shop/materials.yaml", True)


def test_faults_of_the_tables_are_located(tmp_path: Path) -> None:
    shutil.copytree(ROOT / "knowledge", tmp_path / "knowledge")
    forces = tmp_path / "knowledge" / "materials" / "forces.yaml"
    forces.write_text(
        forces.read_text(encoding="utf-8").replace("band: [2300, 2600]", "band: [2500, 2600]"), encoding="utf-8"
    )
    speeds = tmp_path / "knowledge" / "speeds.yaml"
    speeds.write_text(
        speeds.read_text(encoding="utf-8").replace("speed: [180, 220, 260]", "speed: [180, 290, 260]"), encoding="utf-8"
    )
    with pytest.raises(DataError) as caught:
        load_materials(tmp_path)
    assert {finding.field for finding in caught.value.findings} >= {"rows.s355.band", "rows.low_carbon_steel"}


@pytest.mark.parametrize(
    ("text", "value", "scale"),
    [
        ("4140 30 HRC", 30, "hrc"),
        ("HRC 58-60", 59, "hrc"),
        ("160-180 HB", 170, "hb"),
        ("300 HV10", 300, "hv"),
        ("Rm 900 MPa", 900, "mpa"),
        ("1000 N/mm2", 1000, "mpa"),
        ("280 BHN", 280, "hb"),
    ],
)
def test_hardness_is_read_in_a_text(text: str, value: float, scale: str) -> None:
    reading, rest = take_hardness(text)
    assert reading is not None
    assert (reading.value, reading.scale) == (value, scale)
    assert str(int(value)) not in rest


@pytest.mark.parametrize("text", ["EN-GJN-HV600", "4140", "HB"])
def test_no_hardness_is_made_up(text: str) -> None:
    assert take_hardness(text) == (None, text)


@pytest.mark.parametrize(
    ("text", "kept"),
    [
        ("4140 120 x 300 x 20 mm", "4140"),
        ('1018 2" thick', "1018"),
        ("6061-T6 12 off", "6061-T6"),
        ("304 dia 316", "304"),
        ("316 in stock", "316"),
        ("C45 0.5 in", "C45"),
    ],
)
def test_sizes_are_no_grades(text: str, kept: str) -> None:
    left = leave_sizes_out(text)
    assert kept in left
    assert not any(size in left for size in ("120", '2"', "12 off", "dia 316", "0.5"))


def test_keys_forgive_case_spaces_and_marks() -> None:
    assert key_of("EN-GJL-250") == key_of("en gjl 250")
    assert key_of("Ti-6Al-4V") == key_of("ti 6al 4v") == "ti6al4v"
    assert key_of("10 18") != key_of("1018")
    assert fold("René") == "rene"
    assert join(["17", "4", "ph"]) == "17-4ph"
