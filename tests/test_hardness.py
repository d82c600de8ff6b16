"""Hardness: conversion tables with their limits, tensile strength, and force over hardness."""

from __future__ import annotations

from itertools import pairwise
from pathlib import Path

import pytest

from millreason.errors import DataError, OutOfRangeError
from millreason.knowledge import load_sources
from millreason.materials.hardness import (
    convert_hardness,
    hardness_as_hb,
    hardness_force_ratio,
    interpolate,
    load_hardness,
    unit_power,
)

ROOT = Path(__file__).parents[1]
SOURCES = load_sources(ROOT)
KNOWN = load_hardness(ROOT, SOURCES)
SCALES = ("hb", "hv", "hrc", "mpa")


@pytest.mark.parametrize("name", KNOWN.tables)
def test_every_column_rises(name: str) -> None:
    for scale, column in KNOWN.tables[name].columns.items():
        held = [value for value in column if value is not None]
        assert held == sorted(set(held)), scale


def test_the_two_parts_of_e140_join_at_one_row() -> None:
    soft, hard = KNOWN.tables["e140_soft"].columns, KNOWN.tables["e140_hard"].columns
    for scale in ("hrc", "hv", "hb"):
        assert soft[scale][-1] == hard[scale][0]


@pytest.mark.parametrize(("scale_from", "scale_to"), [("hb", "hv"), ("hrc", "hb"), ("hv", "hb"), ("hb", "mpa")])
def test_conversion_never_falls(scale_from: str, scale_to: str) -> None:
    """One table hands over to the next without a step down."""
    values = []
    for number in range(15, 800):
        try:
            values.append(convert_hardness(KNOWN, number, scale_from, scale_to).value)  # type: ignore[arg-type]
        except OutOfRangeError:
            continue
    assert len(values) > 40
    # Where two tables meet they differ by a few parts in a hundred.
    assert all(later >= 0.97 * earlier for earlier, later in pairwise(values))


# ASTM E140 table 1 as reprinted (checked from 35 HRC on, recalled below).
@pytest.mark.parametrize(
    ("hrc", "hb", "hv"), [(30, 286, 302), (40, 371, 392), (45, 421, 446), (52, 512, 544), (60, 654, 697)]
)
def test_rows_of_e140(hrc: float, hb: float, hv: float) -> None:
    assert convert_hardness(KNOWN, hrc, "hrc", "hb").value == hb
    assert convert_hardness(KNOWN, hrc, "hrc", "hv").value == hv
    assert convert_hardness(KNOWN, hb, "hb", "hrc").value == hrc


# wikipedia-hardness and a stockist's table (both checked): HB and HRC; the tables differ by up to two points.
@pytest.mark.parametrize(
    ("hb", "hrc"), [(495, 51), (444, 46), (401, 43), (370, 40), (331, 36), (301, 33), (285, 31), (258, 27)]
)
def test_other_tables_agree_within_two_points(hb: float, hrc: float) -> None:
    assert convert_hardness(KNOWN, hb, "hb", "hrc").value == pytest.approx(hrc, abs=2)


# shigley-design: Rm = 3.4 HB for steel between 200 and 450 HB (checked in notes); the tables run 3.29 to 3.56.
@pytest.mark.parametrize("hb", range(200, 450, 25))
def test_tensile_strength_of_steel_is_about_3_4_hb(hb: int) -> None:
    assert convert_hardness(KNOWN, hb, "hb", "mpa").value == pytest.approx(3.4 * hb, rel=0.06)


def test_grey_iron_does_not_follow_steel() -> None:
    iron = convert_hardness(KNOWN, 200, "hb", "mpa", "grey_iron")
    assert iron.value == pytest.approx(1.58 * 200 - 86)
    assert iron.value < 0.5 * convert_hardness(KNOWN, 200, "hb", "mpa").value
    with pytest.raises(OutOfRangeError, match="between 130 and 280 HB"):
        convert_hardness(KNOWN, 400, "hb", "mpa", "grey_iron")


def test_a_converted_value_names_its_table_and_whether_it_was_seen() -> None:
    hard, soft = convert_hardness(KNOWN, 50, "hrc", "hb"), convert_hardness(KNOWN, 25, "hrc", "hb")
    assert (hard.basis.kind, soft.basis.kind) == ("checked", "recalled")
    assert "E140" in hard.table
    assert any("450 HB" in note for note in hard.notes)
    assert not any("450 HB" in note for note in soft.notes)


@pytest.mark.parametrize(
    ("value", "scale_from", "scale_to"),
    [(180, "hb", "hrc"), (10, "hrc", "hb"), (760, "hb", "hrc"), (70, "hrc", "hb"), (62, "hrc", "mpa")],
)
def test_beyond_the_table_is_refused_with_its_limits(value: float, scale_from: str, scale_to: str) -> None:
    with pytest.raises(OutOfRangeError, match="within") as caught:
        convert_hardness(KNOWN, value, scale_from, scale_to)  # type: ignore[arg-type]
    assert "E140" in str(caught.value)


@pytest.mark.parametrize("kind", ["austenitic", "other"])
def test_not_for_other_materials(kind: str) -> None:
    with pytest.raises(OutOfRangeError, match="for steel"):
        convert_hardness(KNOWN, 30, "hrc", "hb", kind)  # type: ignore[arg-type]


def test_brinell_for_finding_data_is_marked_when_out_of_scope() -> None:
    assert hardness_as_hb(KNOWN, 34, "hrc", "steel").in_scope
    other = hardness_as_hb(KNOWN, 34, "hrc", "other")
    assert not other.in_scope
    assert other.value == 319
    assert any("for steel" in note for note in other.notes)
    assert hardness_as_hb(KNOWN, 180, "hb", "austenitic").value == 180


@pytest.mark.parametrize("name", KNOWN.runs)
def test_force_never_falls_with_hardness(name: str) -> None:
    run = KNOWN.runs[name]
    assert list(run.values) == sorted(run.values)
    ratios = [hardness_force_ratio(KNOWN, name, run.hb[0], hb).ratio for hb in range(60, 800, 10)]
    assert ratios == sorted(ratios)
    assert ratios[0] == 1.0


def test_force_ratio_is_that_of_unit_power() -> None:
    """machinerys-handbook-31 p. 1147 (checked), AISI 4140: 2.38 at 280-300 HB and 1.97 J/mm3 at 200-220 HB."""
    ratio = hardness_force_ratio(KNOWN, "alloy_steel_a", 210, 290)
    assert ratio.ratio == pytest.approx(2.38 / 1.97)
    assert "machinerys-handbook-31" in ratio.basis.remark
    assert ratio.limit == ""


def test_force_ratio_says_its_limits() -> None:
    beyond = hardness_force_ratio(KNOWN, "alloy_steel_a", 300, 400)
    assert beyond.ratio == hardness_force_ratio(KNOWN, "alloy_steel_a", 300, 350).ratio
    assert "150 to 350 HB" in beyond.limit
    without = hardness_force_ratio(KNOWN, None, 300, 400)
    assert without.ratio == 1.0
    assert "not moved" in without.limit


def test_unit_power_between_the_bins_and_beyond() -> None:
    """machinerys-handbook-31 p. 1147 (checked): carbon steel 2.24 at 180-200 and 2.32 J/mm3 at 200-220 HB."""
    assert unit_power(KNOWN, "carbon_steel", 200)[0] == pytest.approx(2.28)
    with pytest.raises(OutOfRangeError, match="between 90 and 350 HB"):
        unit_power(KNOWN, "carbon_steel", 400)
    with pytest.raises(OutOfRangeError, match="one of carbon_steel"):
        unit_power(KNOWN, "brass", 100)


def test_interpolation_meets_its_points() -> None:
    xs, ys = [1.0, 2.0, 4.0], [10.0, 30.0, 50.0]
    assert [interpolate(xs, ys, x) for x in xs] == ys
    assert interpolate(xs, ys, 3.0) == 40.0


def test_faults_in_the_file_are_located(tmp_path: Path) -> None:
    text = (ROOT / "knowledge" / "hardness.yaml").read_text(encoding="utf-8")
    folder = tmp_path / "knowledge"
    folder.mkdir()
    broken = text.replace("order: [e140_hard,", "order: [e140_heard,").replace(
        "hb: [170, 190, 210]", "hb: [170, 230, 210]"
    )
    (folder / "hardness.yaml").write_text(broken, encoding="utf-8")
    with pytest.raises(DataError) as caught:
        load_hardness(tmp_path, SOURCES)
    listed = [(finding.field, finding.line > 1) for finding in caught.value.findings]
    assert listed == [("order", True), ("unit_power.alloy_steel_c", True)]
