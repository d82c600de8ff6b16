"""The answer and its whole trace: frozen records, the return value of a choice and the published JSON."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from functools import cache
from typing import TYPE_CHECKING, Any, Literal

if TYPE_CHECKING:
    from millreason.explanation_records import Explanation

Origin = Literal["given", "looked_up", "computed", "assumed", "concluded"]
Verdict = Literal["recommend", "recommend_with_warnings", "conditional", "ask", "refuse"]
Severity = Literal["note", "caution", "warning"]
Plain = str | int | float | bool | list[str] | list[float] | list[list[float]] | None


@dataclass(frozen=True)
class BasisRecord:
    """What a statement rests on, ready to print: kind, source, place."""

    kind: str
    source: str = ""
    where: str = ""
    note: str = ""


@dataclass(frozen=True)
class FactRecord:
    """One fact with its origin: who said it, where it was looked up, or which rule or formula made it."""

    name: str
    value: Plain
    unit: str
    origin: Origin
    by: str = ""
    text: str = ""
    basis: BasisRecord | None = None


@dataclass(frozen=True)
class ConditionRecord:
    """One condition of a rule as it was met: the test, the value that met it and where that came from."""

    fact: str
    test: str
    value: Plain
    origin: Origin | Literal["absent"]


@dataclass(frozen=True)
class FiringRecord:
    """One rule that fired, with the facts it fired on and what it concluded."""

    rule: str
    name: str
    stage: str
    says: str
    why: str
    conditions: list[ConditionRecord]
    conclusion: str
    basis: BasisRecord
    about: str = ""
    from_shop: bool = False


@dataclass(frozen=True)
class Evidence:
    """One rule's word for or against an option."""

    rule: str
    stance: Literal["for", "against", "rule_out"]
    strength: str
    weight: float
    why: str


@dataclass(frozen=True)
class OptionLedger:
    """One option of a pick: its balance and every piece of evidence."""

    option: str
    balance: float
    ruled_out: bool
    evidence: list[Evidence]


@dataclass(frozen=True)
class Ledger:
    """All options of a pick, best first, and the one chosen."""

    pick: str
    chosen: str | None
    options: list[OptionLedger]


@dataclass(frozen=True)
class Calculation:
    """One formula as it was used: inputs by name, result, unit and references."""

    result_of: str
    formula: str
    inputs: dict[str, Plain]
    value: Plain
    unit: str
    references: list[str]


@dataclass(frozen=True)
class Check:
    """One computed limit: the value, the limit, and how much of it is used."""

    name: str
    key: str
    value: float
    limit: float
    unit: str
    use_percent: float
    verdict: Literal["ok", "near", "over"]
    by: str
    basis: BasisRecord | None = None


@dataclass(frozen=True)
class Picks:
    """The complete cutter."""

    cutter_class: str
    diameter_mm: float
    largest_diameter_mm: float
    teeth: int
    pitch: str
    spacing: str
    rake: str
    axial_rake_deg: float
    radial_rake_deg: float
    lead_deg: float | None
    kappa_deg: float
    kappa_note: str
    corner: str
    edge: str
    wiper: str
    pockets: str
    mounting: str
    hand: str
    application: str
    own_cutter: str | None = None


@dataclass(frozen=True)
class Step:
    """One kind of layer of the plan with every number."""

    name: str
    layers: int
    passes: int
    cutting_speed_m_min: float
    spindle_speed_rpm: float
    feed_per_tooth_mm: float
    feed_per_rev_mm: float
    table_feed_mm_min: float
    depth_of_cut_mm: float
    width_of_cut_mm: float
    hex_mm: float
    mean_chip_mm: float
    removal_rate_cm3_min: float
    specific_force_n_mm2: float
    net_power_kw: float
    net_power_worn_kw: float
    available_power_kw: float
    torque_nm: float
    peak_torque_nm: float
    tangential_force_n: float
    radial_force_n: float
    axial_force_n: float
    unit_power_kw: float | None
    travel_mm: float
    time_min: float


@dataclass(frozen=True)
class PlanRecord:
    """How the cutter is used: position, direction, passes, steps and time."""

    direction: str
    position: str
    centre_offset_mm: float
    entry: str
    entry_gap_mm: float
    arc_deg: float
    entry_angle_deg: float
    exit_angle_deg: float
    teeth_in_cut: list[float]
    first_contact: str
    radial_passes: int
    axial_passes: int
    width_of_cut_mm: float
    overlap_mm: float
    depth_of_cut_mm: float
    fluid: str
    steps: list[Step]
    travel_convention: str
    feed_time_min: float
    time_min: float
    time_low_min: float
    time_high_min: float
    expected_ra_um: float
    ra_bounds_um: list[float]
    mass_kg: float
    gauge_length_mm: float
    entry_feed: str
    tool_life_min: float
    parts_per_edge_set: float
    edge_sets_for_batch: float
    cost_per_part: list[float] | None


@dataclass(frozen=True)
class CautionRecord:
    """One caution with what to do about it."""

    key: str
    severity: Severity
    text: str
    do: str
    rules: list[str]
    basis: BasisRecord


@dataclass(frozen=True)
class Question:
    """One thing to ask a person, and why."""

    fact: str
    text: str
    because: str
    need: Literal["must", "useful"]
    rules: list[str]
    effect: str = ""


@dataclass(frozen=True)
class LimitRecord:
    """A limit that binds: value against limit, the rule, and which facts could relax it."""

    key: str
    text: str
    value: Plain
    limit: Plain
    rule: str
    relax: list[str]
    candidates: int = 1
    unit: str = ""


@dataclass(frozen=True)
class Opening:
    """A change of the job that opens a way, verified by running it."""

    change: dict[str, Plain]
    text: str
    then: str


@dataclass(frozen=True)
class Refusal:
    """Why nothing is possible, and what would open a way."""

    limits: list[LimitRecord]
    openings: list[Opening]
    alternatives: list[str]


@dataclass(frozen=True)
class CandidateRecord:
    """One complete tool that was tried."""

    label: str
    picks: dict[str, Plain]
    evidence: float
    lowered: float
    standing: float
    outcome: Literal["chosen", "stands", "rejected"]
    reasons: list[str]
    limits: list[LimitRecord]
    key_numbers: dict[str, float]


@dataclass(frozen=True)
class SourceRecord:
    """A published work that the answer rests on."""

    id: str
    kind: str
    author: str
    title: str
    edition: str
    year: int | None


@dataclass(frozen=True)
class Trace:
    """Everything that happened on the way to the answer."""

    facts: list[FactRecord]
    firings: list[FiringRecord]
    ledgers: list[Ledger]
    candidates: list[CandidateRecord]
    calculations: list[Calculation]
    candidates_possible: int
    sources: list[SourceRecord] = field(default_factory=list)


@dataclass(frozen=True)
class Answer:
    """The answer to one job."""

    job: str
    file: str
    units: str
    verdict: Verdict
    summary: str
    picks: Picks | None
    plan: PlanRecord | None
    checks: list[Check]
    cautions: list[CautionRecord]
    assumptions: list[FactRecord]
    questions: list[Question]
    conditions: list[Question]
    contradictions: list[str]
    notes: list[str]
    refusal: Refusal | None
    runners_up: list[CandidateRecord]
    robustness: str
    trace: Trace
    engine: str
    version: str
    knowledge_hash: str
    provenance: dict[str, int] = field(default_factory=dict)
    existing: CandidateRecord | None = None
    explanation: Explanation | None = None

    @property
    def exit_code(self) -> int:
        """0 for an answer, 3 for questions, 4 for a refusal."""
        return {"ask": 3, "refuse": 4}.get(self.verdict, 0)

    def to_dict(self) -> dict[str, Any]:
        """Return the answer as plain JSON values."""
        result: dict[str, Any] = _adapter().dump_python(self, mode="json")
        return result

    def to_json(self) -> str:
        """Return the answer as JSON text; the same input gives the same bytes."""
        text: bytes = _adapter().dump_json(self, indent=2)
        return text.decode() + "\n"


@cache
def _adapter() -> Any:
    from pydantic import TypeAdapter

    # The name must be at hand where the fields of Answer are resolved.
    from millreason.explanation_records import Explanation  # noqa: F401

    return TypeAdapter(Answer)


def answer_schema() -> Mapping[str, Any]:
    """Return the JSON Schema of an answer."""
    schema: Mapping[str, Any] = _adapter().json_schema(mode="serialization")
    return schema
