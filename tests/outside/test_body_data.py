"""Bodies, interfaces and practice figures against published values, geometry and physical constants.

Each check names its source. "Recalled" means that the figures here were written down from memory of the
source; "seen" that its text, or a copy of the part quoted, was read.
"""

import math

import pytest
from scipy import constants, integrate

from millreason.cutters import BodySize, CutterFamily, RunOutClass
from millreason.formulas.body import body_mass
from millreason.formulas.cutting_force import rake_factor
from millreason.formulas.rakes import orthogonal_rake
from millreason.knowledge import load_knowledge
from millreason.machines import Interface

KNOWLEDGE = load_knowledge()
CUTTERS = KNOWLEDGE.cutters
PRACTICE = KNOWLEDGE.practice
METRIC = {size.label: size for size in CUTTERS.sizes if size.series == "metric"}
MM3_PER_M3 = 1e9


# ---------------------------------------------------------------------- bodies


@pytest.mark.parametrize("label", [label for label in METRIC if float(label) >= 32])
def test_diameters_are_preferred_numbers(label: str) -> None:
    # ISO 523 follows ISO 3; its series R20 are the powers of the twentieth root of ten, computed here.
    exponent = 20 * math.log10(float(label))
    nearest = 10 ** (round(exponent) / 20)
    assert float(label) == pytest.approx(nearest, rel=0.015)


@pytest.mark.parametrize(
    ("label", "bore", "height"),
    [("50", 22, 40), ("63", 22, 40), ("80", 27, 50), ("100", 32, 50), ("125", 40, 63), ("160", 40, 63)],
)
def test_bores_and_heights_of_arbor_mounted_bodies(label: str, bore: float, height: float) -> None:
    # ISO 6462, styles A and B, recalled (160: medium confidence). Not GOST 9305 (seen), whose 50-16 and
    # 125-32 are
    # another family of cutters.
    assert (METRIC[label].bore_mm, METRIC[label].height_mm) == (bore, height)


@pytest.mark.parametrize(("label", "height"), [("200", 63), ("250", 63), ("315", 80), ("400", 80), ("500", 80)])
def test_bodies_for_the_spindle_nose_have_a_bore_of_60(label: str, height: float) -> None:
    # ISO 6462, style C, recalled.
    assert (METRIC[label].bore_mm, METRIC[label].height_mm) == (60, height)


@pytest.mark.parametrize(("bore", "width"), [(16, 8.4), (22, 10.4), (27, 12.4), (32, 14.4), (40, 16.4)])
def test_tenon_slots(bore: float, width: float) -> None:
    # ISO 2780 and DIN 138, recalled: the slot is 0.4 mm wider than an even number of millimetres.
    tenon = next(one for one in CUTTERS.tenons if one.bore_mm == bore)
    assert tenon.slot_width_mm == width


def test_edge_lengths_of_square_inserts_follow_their_inscribed_circle() -> None:
    # Plane geometry: edge = d tan(pi/n); three eighths and half an inch are the usual inscribed circles.
    lengths = {family.edge_length_mm for family in CUTTERS.families if family.cutter_class == "face_mill"}
    assert sorted(lengths) == pytest.approx([25.4 * inches * math.tan(math.pi / 4) for inches in (3 / 8, 1 / 2)])


@pytest.mark.parametrize(
    "family",
    [one for one in CUTTERS.families if one.kappa_deg > 0 and one.usable_depth_mm > 1.5],
    ids=lambda family: family.id,
)
def test_usable_depth_is_half_to_seven_tenths_of_the_edge(family: CutterFamily) -> None:
    # Common practice: two thirds of the edge in general, half for interrupted work.
    share = family.usable_depth_mm / (family.edge_length_mm * math.sin(math.radians(family.kappa_deg)))
    assert 0.5 <= share <= 0.7


@pytest.mark.parametrize(
    "family", [one for one in CUTTERS.families if one.insert_diameter_mm], ids=lambda family: family.id
)
def test_round_inserts_are_used_to_a_quarter_of_their_diameter(family: CutterFamily) -> None:
    # Common practice; half the diameter is the geometric end.
    assert family.insert_diameter_mm is not None
    assert family.usable_depth_mm == pytest.approx(family.insert_diameter_mm / 4)


@pytest.mark.parametrize("size", METRIC.values(), ids=lambda size: size.label)
def test_the_mass_of_a_body_lies_between_a_third_and_all_of_a_solid_ring(size: BodySize) -> None:
    # Density of steel 7.85 g/cm3 (any handbook); the solid ring by numerical integration, not by the formula.
    steel = CUTTERS.body_material("steel")
    bore = size.bore_mm or 0.0
    area, _ = integrate.quad(lambda radius: 2 * math.pi * radius, bore / 2, size.nominal_mm / 2)
    solid = area * size.height_mm * 7.85e-6
    density = steel.density_kg_mm3 * MM3_PER_M3
    mass = body_mass(size.nominal_mm, size.height_mm, bore, density, steel.fill)
    assert 0.5 * solid < mass < 0.8 * solid


@pytest.mark.parametrize(
    ("label", "mass"), [("80", 1.2), ("100", 1.8), ("125", 3.6), ("160", 6), ("200", 9.3), ("250", 15)]
)
def test_masses_are_those_of_the_trade(label: str, mass: float) -> None:
    # Common practice: what plain steel bodies weigh.
    steel, size = CUTTERS.body_material("steel"), METRIC[label]
    found = body_mass(size.nominal_mm, size.height_mm, size.bore_mm or 0, steel.density_kg_mm3 * MM3_PER_M3, steel.fill)
    assert found == pytest.approx(mass, rel=0.07)


def test_one_tooth_is_always_in_the_cut_with_a_fine_pitch_from_63_on() -> None:
    # Milling kinematics: width two thirds of the diameter, centred, has an arc of 83.6 degrees: five teeth
    # or more.
    arc = 2 * math.degrees(math.asin(2 / 3))
    for size in METRIC.values():
        fine = size.teeth[1]
        assert fine is not None
        assert (fine * arc / 360 >= 1) == (size.nominal_mm >= 63)


@pytest.mark.parametrize("row", CUTTERS.run_out, ids=lambda row: row.id)
def test_run_out_classes_stay_below_the_published_ceiling(row: RunOutClass) -> None:
    # GOST 24360-2016 (seen): face edges up to 160 mm at most 0.05 mm; main edges of opposite teeth at most
    # 0.1 mm.
    assert row.axial_mm <= 0.05
    assert row.radial_mm <= max(ceiling.opposite_mm for ceiling in CUTTERS.run_out_ceilings)


def test_run_out_ceilings_are_the_published_ones() -> None:
    # GOST 24360-2016, table 1 (seen, scanned text).
    found = [(row.to_mm, row.adjacent_mm, row.opposite_mm) for row in CUTTERS.run_out_ceilings]
    assert found[:3] == [(160, 0.03, 0.06), (250, 0.04, 0.08), (400, 0.05, 0.1)]


SPANS = {  # axial low, high; radial low, high
    "double_negative": (-10, -5, -15, -5),
    "positive_negative": (5, 20, -12, -3),
    "double_positive": (5, 20, 0, 15),
}


@pytest.mark.parametrize("family", CUTTERS.families, ids=lambda family: family.id)
def test_rakes_lie_in_the_usual_spans(family: CutterFamily) -> None:
    # Kalpakjian and Schmid, Stephenson and Agapiou, ASM Handbook 16 for the combinations; the angles are
    # common practice.
    for option in family.rakes:
        axial_low, axial_high, radial_low, radial_high = SPANS[option.rake]
        assert axial_low <= option.axial_deg <= axial_high
        assert radial_low <= option.radial_deg <= radial_high


@pytest.mark.parametrize("family", [one for one in CUTTERS.families if one.kappa_deg >= 45], ids=lambda one: one.id)
def test_double_negative_bodies_ask_ten_to_twenty_percent_more_force(family: CutterFamily) -> None:
    # Common practice: 10 to 20 %. Computed with the correction of Tschaetsch (recalled) from the orthogonal
    # rake.
    for option in family.rakes:
        rake = orthogonal_rake(option.radial_deg, option.axial_deg, family.kappa_deg)
        factor = rake_factor(rake, PRACTICE["reference_rake_deg"].of("P"), PRACTICE["rake_change_per_deg"].number)
        if option.rake == "double_negative":
            assert 1.1 <= factor <= 1.2
        else:
            assert factor < 1.17


# ---------------------------------------------------------------------- interfaces


@pytest.mark.parametrize(
    ("identity", "inches"),
    [("7/24-30", 1.25), ("7/24-40", 1.75), ("7/24-45", 2.25), ("7/24-50", 2.75), ("7/24-60", 4.25)],
)
def test_gauge_diameters_of_steep_tapers_are_whole_quarters_of_an_inch(identity: str, inches: float) -> None:
    # ISO 297 and ASME B5.50, recalled: 1 1/4, 1 3/4, 2 1/4, 2 3/4 and 4 1/4 in.
    assert KNOWLEDGE.interfaces[identity].gauge.diameter_mm == pytest.approx(25.4 * inches)


@pytest.mark.parametrize(
    ("identity", "inches"), [("7/24-30", 2.125), ("7/24-40", 2.625), ("7/24-50", 4.0), ("7/24-60", 7.0)]
)
def test_bolt_circles_of_spindle_noses_agree_in_both_systems(identity: str, inches: float) -> None:
    # ISO 297 gives millimetres, ASME B5.18 inches (both recalled): the same circle, other threads.
    nose = KNOWLEDGE.interfaces[identity].nose
    assert nose is not None
    assert nose.bolt_circle_mm == pytest.approx(25.4 * inches, abs=0.05)
    assert nose.outer_mm > nose.bolt_circle_mm > KNOWLEDGE.interfaces[identity].gauge.diameter_mm


@pytest.mark.parametrize(("size", "gauge"), [(40, 30), (50, 38), (63, 48), (80, 60), (100, 75), (125, 95)])
def test_gauge_diameters_of_hollow_tapers(size: int, gauge: float) -> None:
    # ISO 12164-1, recalled; 48 mm for size 63 seen in Ito, Modular Design for Machine Tools (2008), figure
    # 9-21.
    interface = KNOWLEDGE.interfaces[f"hollow-{size}"]
    assert (interface.gauge.flange_mm, interface.gauge.diameter_mm) == (size, gauge)
    assert interface.face_contact


@pytest.mark.parametrize(
    "interface",
    [one for one in KNOWLEDGE.interfaces.values() if one.bending is not None],
    ids=lambda one: one.id,
)
def test_bending_estimates_follow_from_the_clamping_force(interface: Interface) -> None:
    # Mechanics: pressure p = F/A + M y/I on an annulus; the faces part where it is nil. Area and inertia are
    # integrated.
    assert interface.bending is not None
    assert interface.clamp is not None
    assert interface.gauge.flange_mm is not None
    outer, inner = interface.gauge.flange_mm / 2, 0.79 * interface.gauge.flange_mm / 2
    force = 0.8 * interface.clamp.force_kn * 1000
    area, _ = integrate.quad(lambda radius: 2 * math.pi * radius, inner, outer)
    inertia, _ = integrate.quad(lambda radius: math.pi * radius**3, inner, outer)
    assert interface.bending.separation_nm == pytest.approx(force / area * inertia / outer / 1000, rel=0.03)


@pytest.mark.parametrize(
    ("identity", "most"),
    [
        ("R8", 63),
        ("7/24-30", 63),
        ("7/24-40", 125),
        ("hollow-63", 125),
        ("7/24-50", 315),
        ("hollow-100", 315),
    ],
)
def test_largest_usual_diameters(identity: str, most: float) -> None:
    # Common practice.
    assert KNOWLEDGE.interfaces[identity].carries.largest_mm == most


# ---------------------------------------------------------------------- practice


def test_drive_efficiencies_are_those_of_the_handbook() -> None:
    # Machinery's Handbook, machine tool efficiency factors, recalled.
    drives = PRACTICE["efficiency_by_drive"].by
    assert drives["belt"] == 0.9
    assert drives["back_gear"] == 0.75
    assert 0.7 <= drives["geared_head"] <= 0.8
    assert 0.6 <= drives["hydraulic"] <= 0.9


def test_the_speed_factor_is_one_at_100_m_min() -> None:
    # Tschaetsch, recalled: the formula ends at 100 m/min, where the force constants were measured.
    by = PRACTICE["speed_factor_slow"].by
    assert by["coefficient"] / 100 ** by["exponent"] == pytest.approx(1, abs=0.001)


def test_one_degree_of_rake_is_the_published_divisor() -> None:
    # Tschaetsch, recalled: K = 1 - (rake - reference) / 66.7.
    assert PRACTICE["rake_change_per_deg"].number == pytest.approx(1 / 66.7, rel=0.001)


def test_a_vacuum_plate_holds_no_more_than_the_atmosphere() -> None:
    # Standard atmosphere, CODATA through scipy.
    value = PRACTICE["vacuum_pressure_n_mm2"]
    assert value.high is not None
    assert value.number < value.high < constants.atm / 1e6


def test_planned_life_lies_between_the_published_ones() -> None:
    # Machinery's Handbook table 15e (recalled) 45 min; a university summary (seen) 60 min in milling.
    life = PRACTICE["tool_life_min"]
    assert life.number == 45
    assert life.high == 60
