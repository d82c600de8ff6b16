"""Complete answers made by hand, all invented, to test the report without running a choice."""

from __future__ import annotations

from dataclasses import replace

from millreason.trace import (
    Answer,
    BasisRecord,
    Calculation,
    CandidateRecord,
    CautionRecord,
    Check,
    ConditionRecord,
    Evidence,
    FactRecord,
    FiringRecord,
    Ledger,
    LimitRecord,
    Opening,
    OptionLedger,
    Picks,
    PlanRecord,
    Question,
    Refusal,
    Step,
    Trace,
)

PRACTICE = BasisRecord("common_practice", note="")
BOOK = BasisRecord("checked", "machinerys-handbook-31", "p. 1147 table 1b")
MEMORY = BasisRecord("recalled", "kienzle-victor-1957", "table of constants")

PICKS = Picks(
    cutter_class="face_mill",
    diameter_mm=80.0,
    largest_diameter_mm=92.0,
    teeth=6,
    pitch="fine",
    spacing="equal",
    rake="positive_negative",
    axial_rake_deg=12.0,
    radial_rake_deg=-5.0,
    lead_deg=45.0,
    kappa_deg=45.0,
    kappa_note="",
    corner="facet",
    edge="honed_coated",
    wiper="none",
    pockets="fixed",
    mounting="shell_arbor",
    hand="right",
    application="P general",
)

ROUGH = Step(
    name="roughing",
    layers=1,
    passes=4,
    cutting_speed_m_min=215.0,
    spindle_speed_rpm=855.5,
    feed_per_tooth_mm=0.19,
    feed_per_rev_mm=1.14,
    table_feed_mm_min=975.2,
    depth_of_cut_mm=2.5,
    width_of_cut_mm=52.25,
    hex_mm=0.134,
    mean_chip_mm=0.12,
    removal_rate_cm3_min=127.4,
    specific_force_n_mm2=2510.0,
    net_power_kw=5.33,
    net_power_worn_kw=6.93,
    available_power_kw=8.51,
    torque_nm=59.5,
    peak_torque_nm=88.1,
    tangential_force_n=1488.0,
    radial_force_n=421.0,
    axial_force_n=421.0,
    unit_power_kw=5.8,
    travel_mm=486.0,
    time_min=1.99,
)
FINISH = replace(
    ROUGH,
    name="finishing",
    cutting_speed_m_min=240.0,
    spindle_speed_rpm=954.9,
    feed_per_tooth_mm=0.15,
    feed_per_rev_mm=0.9,
    table_feed_mm_min=859.4,
    depth_of_cut_mm=0.5,
    net_power_kw=1.02,
    net_power_worn_kw=1.33,
    available_power_kw=8.8,
    time_min=2.26,
)

PLAN = PlanRecord(
    direction="climb",
    position="flush on the exit side",
    centre_offset_mm=13.875,
    entry="from_outside",
    entry_gap_mm=27.75,
    arc_deg=107.8,
    entry_angle_deg=72.2,
    exit_angle_deg=180.0,
    teeth_in_cut=[1.0, 1.8, 2.0],
    first_contact="U",
    radial_passes=4,
    axial_passes=2,
    width_of_cut_mm=52.25,
    overlap_mm=3.0,
    depth_of_cut_mm=2.5,
    fluid="air_blast",
    steps=[ROUGH, FINISH],
    travel_convention="length plus cutter diameter plus clearance at both ends",
    feed_time_min=4.25,
    time_min=4.75,
    time_low_min=4.3,
    time_high_min=6.1,
    expected_ra_um=1.9,
    ra_bounds_um=[1.1, 3.0],
    mass_kg=3.1,
    gauge_length_mm=105.0,
    entry_feed="roll in on an arc of half the diameter",
    tool_life_min=45.0,
    parts_per_edge_set=10.6,
    edge_sets_for_batch=1.2,
    cost_per_part=None,
)


def given(name: str, value: object, unit: str = "", text: str = "") -> FactRecord:
    """Return a fact that the job gave."""
    return FactRecord(name, value, unit, "given", "job", text)  # type: ignore[arg-type]


FACTS = [
    given("work.material", "S355 hot-rolled plate"),
    given("work.skin", ["mill_scale"]),
    given("work.length_mm", 400.0, "mm", "400 mm"),
    given("work.width_mm", 200.0, "mm", "200 mm"),
    given("work.stock_mm", 3.0, "mm", "3 mm"),
    given("require.quantity", 12.0),
    given("machine.interface", "7/24-40"),
    given("machine.power_kw", 11.0, "kW", "11 kW"),
    given("machine.changer_mass_kg", 7.0, "kg", "7 kg"),
    FactRecord("material.iso_group", "P", "", "looked_up", "materials", "", BOOK),
    FactRecord("material.kc11_n_mm2", 1780.0, "N/mm2", "looked_up", "materials", "", MEMORY),
    FactRecord("fixture.rigidity", "normal", "", "assumed", "ASM-004", "", PRACTICE),
    FactRecord("setup.stiffness", "normal", "", "concluded", "APP-002", "", PRACTICE),
    FactRecord("machine.net_curve", [[1106.0, 8.8], [8000.0, 8.8]], "", "computed"),
]

FIRINGS = [
    FiringRecord(
        "ASM-004",
        "holding-not-told",
        "assume",
        "Where the holding is not described, take it as normal.",
        "Most parts are held in a vise or with clamps.",
        [ConditionRecord("fixture.rigidity", "fixture.rigidity is not known", None, "absent")],
        "assume fixture.rigidity normal",
        PRACTICE,
    ),
    FiringRecord(
        "LEA-003",
        "open-face-wants-45",
        "weigh",
        "An open face on a firm part is best cut at a lead of 45 degrees.",
        "The edge enters softly and the chip is thinner for the same feed.",
        [
            ConditionRecord("work.feature", "work.feature is open_face", "open_face", "assumed"),
            ConditionRecord("setup.stiffness", "setup.stiffness is one of normal, stiff", "normal", "concluded"),
        ],
        "for kappa 45, strong",
        BOOK,
    ),
    FiringRecord(
        "SKN-001",
        "go-under-the-scale",
        "caution",
        "The first layer goes below the scale everywhere.",
        "Scale dulls an edge that skims it.",
        [ConditionRecord("work.skin", "work.skin is mill_scale", ["mill_scale"], "given")],
        "caution skin_first_pass",
        MEMORY,
        from_shop=True,
    ),
]

LEDGERS = [
    Ledger(
        "kappa_deg",
        "45",
        [
            OptionLedger(
                "45",
                9.0,
                False,
                [
                    Evidence(
                        "LEA-003",
                        "for",
                        "strong",
                        9.0,
                        "The edge enters softly and the chip is thinner for the same feed.",
                    )
                ],
            ),
            OptionLedger(
                "90",
                -3.0,
                False,
                [
                    Evidence(
                        "LEA-007",
                        "against",
                        "moderate",
                        -3.0,
                        "A square edge strikes the work over its whole depth at once.",
                    )
                ],
            ),
            OptionLedger(
                "15",
                0.0,
                True,
                [Evidence("LEA-011", "rule_out", "", 0.0, "Stock of {3 mm} is too deep for it.")],
            ),
        ],
    ),
    Ledger(
        "pitch",
        "fine",
        [
            OptionLedger(
                "fine",
                3.0,
                False,
                [Evidence("PIT-002", "for", "moderate", 3.0, "One tooth is always in the cut.")],
            )
        ],
    ),
]

TOO_WIDE = LimitRecord(
    "changer_diameter",
    "Outermost diameter above the changer limit",
    112.0,
    95.0,
    "JDG-001",
    ["machine.changer_full_mm"],
)
CANDIDATES = [
    CandidateRecord(
        "D 100 z 7 (fine), kappa 45, face mill",
        {"diameter_mm": 100.0},
        42.0,
        0.0,
        42.0,
        "rejected",
        [],
        [TOO_WIDE],
        {},
    ),
    CandidateRecord(
        "D 80 z 6 (fine), kappa 45, face mill",
        {"diameter_mm": 80.0},
        40.0,
        0.0,
        40.0,
        "chosen",
        [],
        [],
        {"plan.power_use_worn": 0.81},
    ),
    CandidateRecord(
        "D 63 z 5 (fine), kappa 45, face mill",
        {"diameter_mm": 63.0},
        36.0,
        1.0,
        35.0,
        "stands",
        ["One pass more across the face."],
        [],
        {"plan.time_min": 5.4},
    ),
]

CHECKS = [
    Check("Power with worn edges", "power", 6.93, 8.51, "kW", 81.4, "ok", "JDG-010", MEMORY),
    Check(
        "Changer diameter, neighbours full",
        "changer_diameter",
        92.0,
        95.0,
        "mm",
        96.8,
        "near",
        "JDG-001",
        BasisRecord("derived", "", "geometry of the body"),
    ),
    Check("Assembly mass", "changer_mass", 3.1, 7.0, "kg", 44.3, "ok", "JDG-003", PRACTICE),
]

CAUTIONS = [
    CautionRecord(
        "chip_housekeeping",
        "note",
        "Hot chips fly off an open machine.",
        "Close the guard; clear chips with a hook, not by hand.",
        ["CAU-002"],
        PRACTICE,
    ),
    CautionRecord(
        "skin_first_pass",
        "caution",
        "Mill scale lies on the face.",
        "Set the first layer so that it stays under the scale everywhere.",
        ["SKN-001"],
        MEMORY,
    ),
    CautionRecord(
        "atc_diameter_neighbours",
        "warning",
        "The cutter nearly fills its pocket.",
        "Check the pocket beside it by hand before the first change.",
        ["CAU-009"],
        BOOK,
    ),
]

CALCULATION = Calculation(
    "net power, roughing",
    "cutting_force.net_power",
    {"depth_mm": 2.5, "width_mm": 52.25},
    5.33,
    "kW",
    ["kienzle-victor-1957"],
)
ASSUMED = [
    FactRecord("fixture.rigidity", "normal", "", "assumed", "ASM-004", "", PRACTICE),
    FactRecord(
        "machine.efficiency",
        0.8,
        "",
        "assumed",
        "ASM-011",
        "A belt or direct drive loses about a fifth.",
        PRACTICE,
    ),
]
USEFUL = Question(
    "fixture.overhang_mm",
    "How far does the tool reach out?",
    "A long reach bends.",
    "useful",
    ["ASM-020"],
    "a smaller diameter beyond 160 mm",
)
TRACE = Trace(FACTS, FIRINGS, LEDGERS, CANDIDATES, [CALCULATION], 5184)


def recommended() -> Answer:
    """Return a plain recommendation in metric units."""
    return Answer(
        job="Base plate, top face (invented)",
        file="plate.yaml",
        units="metric",
        verdict="recommend_with_warnings",
        summary="An 80 mm face mill at 45 degrees in four passes.",
        picks=PICKS,
        plan=PLAN,
        checks=CHECKS,
        cautions=CAUTIONS,
        assumptions=ASSUMED,
        questions=[USEFUL],
        conditions=[],
        contradictions=[],
        notes=["Hardness is that of the usual rolled state."],
        refusal=None,
        runners_up=[CANDIDATES[2]],
        robustness="The choice holds over the whole band of the cutting force.",
        trace=TRACE,
        engine="durable",
        version="0.1.0",
        knowledge_hash="0123456789abcdef0123456789abcdef",
        provenance={"checked": 120, "recalled": 40, "common_practice": 75},
    )


def in_inches() -> Answer:
    """Return the same recommendation for a reader who works in inches."""
    return replace(recommended(), units="inch")


def asking() -> Answer:
    """Return an answer that needs more before it can choose."""
    must = [
        Question(
            "work.material",
            "Which material is it: grade, and condition or hardness?",
            "Speed differs by a factor of five between steels alone.",
            "must",
            ["ASK-001"],
        ),
        Question(
            "machine.power_kw",
            "What power has the spindle motor?",
            "Power limits depth and width of cut.",
            "must",
            ["ASK-003"],
        ),
    ]
    trace = Trace(FACTS[2:5], FIRINGS[:1], [], [], [], 0)
    return replace(
        recommended(),
        verdict="ask",
        summary="Two things must be known first.",
        picks=None,
        plan=None,
        checks=[],
        cautions=CAUTIONS[:1],
        questions=must,
        runners_up=[],
        robustness="",
        trace=trace,
    )


def refused() -> Answer:
    """Return a refusal with what would open a way."""
    opening = Opening(
        {"machine.changer_full_mm": 115.0},
        "A changer that takes 115 mm with neighbours full",
        "recommended: D 100 z 7 at 45 degrees",
    )
    refusal = Refusal([TOO_WIDE], [opening], ["Load the cutter by hand."])
    trace = Trace(FACTS, FIRINGS, [], CANDIDATES[:1], [], 5184)
    return replace(
        recommended(),
        verdict="refuse",
        summary="No cutter passes the changer.",
        picks=None,
        plan=None,
        checks=[],
        refusal=refusal,
        questions=[],
        runners_up=[],
        robustness="",
        trace=trace,
    )


def held_back() -> Answer:
    """Return an answer whose data wait for a confirmation."""
    condition = Question(
        "confirm.magnesium_fire_controls",
        "Are class D media at the machine?",
        "Magnesium burns.",
        "must",
        ["MAG-001"],
    )
    return replace(
        recommended(),
        verdict="conditional",
        summary="Magnesium: held back.",
        picks=None,
        plan=None,
        checks=[],
        conditions=[condition],
        questions=[],
        runners_up=[],
        robustness="",
    )
