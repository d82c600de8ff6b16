"""Cutters on hand as candidates: what is known of each is kept, what is not is filled from its family's best option."""

from __future__ import annotations

from collections.abc import Iterable
from typing import Any

from millreason.candidates import Candidate, Ledgers, kappa_key, size_key
from millreason.cutters import BodySize, CutterFamily, CuttersFile
from millreason.job import Job, OwnCutter
from millreason.knowledge import Knowledge
from millreason.trace import Evidence

SHARED_PICKS = ("cutter_class", "pitch", "rake", "edge", "corner", "wiper")


def own_cutters(job: Job, knowledge: Knowledge) -> tuple[OwnCutter, ...]:
    """Return the cutters to choose from: the job's own list, else the shop's shelf; empty for a free choice."""
    return job.cutters or tuple(OwnCutter(cutter.id, cutter.values()) for cutter in knowledge.on_hand.values())


def own_candidates(
    own: Iterable[OwnCutter], cutters: CuttersFile, ledgers: Ledgers, mountings: Iterable[str]
) -> list[Candidate]:
    """Return a candidate for every cutter on hand, best evidence first; one that a rule excludes says which."""
    offered = tuple(mountings)
    made = [candidate for cutter in own if (candidate := _candidate(cutter, cutters, ledgers, offered)) is not None]
    return sorted(made, key=lambda candidate: -candidate.evidence)


def _candidate(cutter: OwnCutter, cutters: CuttersFile, ledgers: Ledgers, offered: tuple[str, ...]) -> Candidate | None:
    known = cutter.values
    family = _family(known, cutters)
    diameter = known.get("diameter_mm")
    if family is None or not isinstance(diameter, int | float):
        return None
    size = _size(float(diameter), cutters)
    if family.floor_diameter_mm(size) <= 0:
        return None
    rakes = [(rake, edge) for rake in family.rakes for edge in rake.edges]
    rake, edge = max(
        rakes,
        key=lambda pair: (
            (pair[0].rake == known.get("rake")) + (pair[1] == known.get("edge")),
            ledgers.balance("rake", pair[0].rake) + ledgers.balance("edge", pair[1]),
        ),
    )
    corners = [corner for corner in family.corners if corner.corner == known.get("corner")] or list(family.corners)
    corner = max(corners, key=lambda option: ledgers.balance("corner", option.corner))
    counted = known.get("teeth")
    teeth = int(counted) if isinstance(counted, int | float) else family.teeth_for(size, "fine") or 1
    pitch = str(known.get("pitch") or _pitch(family, size, teeth))
    wiper = str(known.get("wiper", "none"))
    land = known.get("land_mm")
    wiper_land = float(land) if isinstance(land, int | float) else max(family.wipers.lands_mm) if family.wipers else 0.0
    fits = [row.mounting for row in cutters.mountings_for(family, size) if row.mounting in offered]
    mounting = known.get("mounting") or ledgers.best("mounting", fits) or "shell_arbor"
    named = {
        "cutter_class": family.cutter_class,
        "pitch": pitch,
        "rake": rake.rake,
        "edge": edge,
        "corner": corner.corner,
        "wiper": wiper,
    }
    options = [
        *named.items(),
        ("kappa_deg", kappa_key(family.kappa_deg)),
        ("diameter_mm", size_key(size.nominal_mm)),
    ]
    blocked: list[Evidence] = [entry for pick, option in options for entry in ledgers.ruled_out(pick, option)]
    return Candidate(
        family, size, pitch, teeth, rake, edge, corner, wiper, wiper_land if wiper != "none" else 0.0,
        str(known.get("pockets", "fixed")), str(mounting), sum(ledgers.balance(*entry) for entry in options),
        cutter, tuple(blocked),
    )  # fmt: skip


def _family(known: Any, cutters: CuttersFile) -> CutterFamily | None:
    """Return the family that is nearest to a cutter: the same class where it is said, then the nearest angle."""
    kappa = known.get("kappa_deg")
    choices = [family for family in cutters.families if known.get("cutter_class") in (None, family.cutter_class)]
    if not choices:
        return None
    nearest = min(
        choices,
        key=lambda family: (
            abs(family.kappa_deg - kappa) if kappa is not None else 0.0,
            not _within(family, known),
        ),
    )
    changes: dict[str, Any] = {}
    if kappa is not None and nearest.insert_diameter_mm is None:
        changes["kappa_deg"] = float(kappa)
    if known.get("usable_depth_mm") is not None:
        depth = float(known["usable_depth_mm"])
        # Measured at the outside, a longer edge would leave less floor: the angle of such a family bounds its depth.
        changes["usable_depth_mm"] = min(depth, nearest.usable_depth_mm) if nearest.nominal_at == "outermost" else depth
    return nearest.model_copy(update=changes) if changes else nearest


def _within(family: CutterFamily, known: Any) -> bool:
    return bool(family.from_mm <= known.get("diameter_mm", family.from_mm) <= family.to_mm)


def _size(diameter_mm: float, cutters: CuttersFile) -> BodySize:
    nearest = min(cutters.sizes, key=lambda size: abs(size.nominal_mm - diameter_mm))
    return nearest.model_copy(update={"nominal_mm": diameter_mm, "label": f"{diameter_mm:g}"})


def _pitch(family: CutterFamily, size: BodySize, teeth: int) -> str:
    """Return the pitch class whose number of teeth is nearest."""
    made = {pitch: count for pitch in family.pitches if (count := family.teeth_for(size, pitch)) is not None}
    return min(made, key=lambda pitch: abs(made[pitch] - teeth), default="fine")
