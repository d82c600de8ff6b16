"""Cutter bodies: the series rise, every body can be held, and only real combinations exist."""

from itertools import pairwise

import pytest

from millreason.cutters import PITCHES, BodySize, CutterFamily
from millreason.knowledge import data_root, load_knowledge
from millreason.vocabulary import load_vocabulary

KNOWLEDGE = load_knowledge()
VOCABULARY = load_vocabulary(data_root())
FAMILIES = KNOWLEDGE.cutters.families
SERIES = {
    name: sorted((size for size in KNOWLEDGE.cutters.sizes if size.series == name), key=lambda size: size.nominal_mm)
    for name in ("metric", "inch")
}


@pytest.mark.parametrize("name", SERIES)
def test_height_bore_and_teeth_never_fall_with_diameter(name: str) -> None:
    for smaller, larger in pairwise(SERIES[name]):
        assert larger.nominal_mm > smaller.nominal_mm
        assert larger.height_mm >= smaller.height_mm
        assert (larger.bore_mm or 0) >= (smaller.bore_mm or 0)
        for count, more in zip(smaller.teeth, larger.teeth, strict=True):
            assert count is None or (more is not None and more >= count), larger.label


@pytest.mark.parametrize("size", KNOWLEDGE.cutters.sizes, ids=lambda size: size.label)
def test_a_finer_pitch_has_more_teeth(size: BodySize) -> None:
    counts = [count for count in size.teeth if count is not None]
    assert counts == sorted(set(counts))
    assert size.bore_mm is None or size.bore_mm < size.nominal_mm / 2 + 1


@pytest.mark.parametrize("size", SERIES["inch"], ids=lambda size: size.label)
def test_inch_bodies_have_the_teeth_of_the_nearest_metric_body(size: BodySize) -> None:
    assert size.nominal_mm == pytest.approx(25.4 * float(size.label.removesuffix(" in")))
    nearest = min(SERIES["metric"], key=lambda other: abs(other.nominal_mm - size.nominal_mm))
    assert size.teeth == nearest.teeth


@pytest.mark.parametrize("name", SERIES)
@pytest.mark.parametrize("pitch", range(3), ids=PITCHES)
def test_gullets_grow_with_diameter_at_one_count_and_shrink_with_teeth(name: str, pitch: int) -> None:
    gullet = KNOWLEDGE.cutters.gullet
    for smaller, larger in pairwise(SERIES[name]):
        teeth = smaller.teeth[pitch]
        if teeth is not None:
            assert gullet.area_mm2(larger.nominal_mm, teeth) > gullet.area_mm2(smaller.nominal_mm, teeth)
            assert gullet.area_mm2(smaller.nominal_mm, teeth + 1) < gullet.area_mm2(smaller.nominal_mm, teeth)


@pytest.mark.parametrize("family", FAMILIES, ids=lambda family: family.id)
def test_every_family_has_bodies_in_both_series_and_every_pitch(family: CutterFamily) -> None:
    for sizes in SERIES.values():
        made = {pitch for pitch in PITCHES for size in sizes if family.teeth_for(size, pitch)}
        assert made == set(family.pitches)


@pytest.mark.parametrize("family", FAMILIES, ids=lambda family: family.id)
def test_every_body_can_be_held_and_is_wider_over_the_inserts(family: CutterFamily) -> None:
    for size in KNOWLEDGE.cutters.sizes:
        if family.from_mm <= size.nominal_mm <= family.to_mm:
            assert KNOWLEDGE.cutters.mountings_for(family, size), f"{size.label} has no mounting"
            assert 0 < family.floor_diameter_mm(size) <= family.outermost_mm(size) + 1e-9
            assert family.pockets_for(size), f"{size.label} has no pockets"


def test_outside_its_diameters_and_pitches_a_family_has_no_teeth() -> None:
    face, fly = (next(one for one in FAMILIES if one.id == name) for name in ("face-45", "fly-75"))
    sizes = {size.label: size for size in KNOWLEDGE.cutters.sizes}
    assert face.teeth_for(sizes["20"], "fine") is None
    assert face.teeth_for(sizes["80"], "fine") == 6
    assert fly.teeth_for(sizes["80"], "coarse") == 1
    assert fly.teeth_for(sizes["80"], "fine") is None


def test_an_80_at_45_degrees_measures_88_to_93_and_a_square_shoulder_80_measures_80() -> None:
    # Common practice; the changer meets the outermost diameter.
    size = next(one for one in KNOWLEDGE.cutters.sizes if one.label == "80")
    for family in FAMILIES:
        if family.cutter_class == "face_mill" and family.kappa_deg == 45:
            assert 88 <= family.outermost_mm(size) <= 93
        if family.kappa_deg == 90:
            assert family.outermost_mm(size) == pytest.approx(80)


def test_a_round_insert_cutter_measures_its_floor_diameter_and_one_insert() -> None:
    size = next(one for one in KNOWLEDGE.cutters.sizes if one.label == "80")
    for family in FAMILIES:
        if family.insert_diameter_mm is not None:
            assert family.outermost_mm(size) - family.floor_diameter_mm(size) == pytest.approx(
                family.insert_diameter_mm
            )


@pytest.mark.parametrize("family", FAMILIES, ids=lambda family: family.id)
def test_options_of_a_family_are_words_of_the_vocabulary(family: CutterFamily) -> None:
    picks = VOCABULARY.picks
    assert family.kappa_deg in picks["kappa_deg"].options
    for pick, options in (
        ("pitch", family.pitches),
        ("corner", [option.corner for option in family.corners]),
        ("rake", [option.rake for option in family.rakes]),
        ("edge", [edge for option in family.rakes for edge in option.edges]),
    ):
        assert set(options) <= set(picks[pick].options)


@pytest.mark.parametrize("family", FAMILIES, ids=lambda family: family.id)
def test_no_rake_and_edge_is_given_twice_and_sharp_edges_are_positive(family: CutterFamily) -> None:
    pairs = [(option.rake, edge) for option in family.rakes for edge in option.edges]
    assert len(pairs) == len(set(pairs))
    assert ("double_negative", "sharp_polished_uncoated") not in pairs
    first = family.rakes[0]
    assert family.rake_for(first.rake, first.edges[0]) is first
    assert family.rake_for("double_negative", "sharp_polished_uncoated") is None


@pytest.mark.parametrize("family", FAMILIES, ids=lambda family: family.id)
def test_small_cutters_have_no_wiper_and_larger_ones_may(family: CutterFamily) -> None:
    for size in KNOWLEDGE.cutters.sizes:
        takes = family.wipers is not None and size.nominal_mm >= family.wipers.from_mm
        assert ("one" in family.wipers_for(size)) == takes


def test_every_bore_of_the_metric_series_has_a_tenon_slot() -> None:
    bores = {tenon.bore_mm for tenon in KNOWLEDGE.cutters.tenons}
    assert {size.bore_mm for size in SERIES["metric"] if size.bore_mm is not None} <= bores


def test_from_some_diameter_on_only_the_spindle_nose_holds_a_body() -> None:
    face = next(one for one in FAMILIES if one.id == "face-45")
    largest = max(KNOWLEDGE.cutters.sizes, key=lambda size: size.nominal_mm)
    assert {row.mounting for row in KNOWLEDGE.cutters.mountings_for(face, largest)} == {"spindle_nose_flange"}
    for size in KNOWLEDGE.cutters.sizes:
        rows = KNOWLEDGE.cutters.mountings_for(face, size)
        if size.nominal_mm > 51:
            assert "straight_shank_collet" not in {row.mounting for row in rows}
        assert len({row.mounting for row in rows}) == len(rows), f"{size.label} is held two ways of one kind"
