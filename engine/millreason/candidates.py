"""Complete tools in the order of what speaks for them: every combination of body, size, pitch, rake, corner and wiper."""

from __future__ import annotations

import heapq
from collections.abc import Callable, Iterable, Iterator, Mapping
from dataclasses import dataclass
from itertools import product
from typing import TYPE_CHECKING

from millreason.formulas.body import outermost_diameter
from millreason.trace import Evidence, Ledger, OptionLedger

if TYPE_CHECKING:
    from millreason.job import OwnCutter
    from millreason.knowledge import Corner, Cutters, Family, Rake, Size

PITCHES = ("coarse", "fine", "extra_fine")
ROUND_KAPPA_DEG = 0.0


@dataclass(frozen=True)
class Candidate:
    """One complete tool, before its plan."""

    family: Family
    size: Size
    pitch: str
    teeth: int
    rake: Rake
    edge: str
    corner: Corner
    wiper: str
    wiper_land_mm: float
    pockets: str
    mounting: str
    evidence: float
    own: OwnCutter | None = None

    @property
    def is_round(self) -> bool:
        """Whether the inserts are round, so that the cutting-edge angle follows the depth."""
        return self.family.insert_diameter_mm is not None

    @property
    def diameter_mm(self) -> float:
        """Diameter at the edge that makes the floor."""
        nominal = self.size.nominal_mm
        if self.family.nominal_at == "floor":
            return nominal
        return nominal - (self.family.insert_diameter_mm or 0.0)

    @property
    def outermost_mm(self) -> float:
        """Diameter over the inserts, which the changer, walls and clamps meet."""
        if self.family.nominal_at == "outermost":
            return self.size.nominal_mm
        if self.is_round:
            return self.size.nominal_mm + (self.family.insert_diameter_mm or 0.0)
        return outermost_diameter(self.size.nominal_mm, self.family.usable_depth_mm, self.family.kappa_deg)

    @property
    def label(self) -> str:
        """Short name for lists: '80 z6 fine, face mill 45°, positive negative, facet'."""
        angle = "round inserts" if self.is_round else f"kappa {self.family.kappa_deg:g}"
        words = (self.family.cutter_class, self.rake.rake, self.corner.corner)
        named = ", ".join(word.replace("_", " ") for word in words)
        wiper = "" if self.wiper == "none" else f", wiper {self.wiper}"
        return f"D {self.size.label} z {self.teeth} ({self.pitch.replace('_', ' ')}), {angle}, {named}{wiper}"


class Ledgers:
    """What was said for and against every option of every pick."""

    def __init__(self, options: Mapping[str, Iterable[str]]) -> None:
        self._evidence: dict[str, dict[str, list[Evidence]]] = {pick: {option: [] for option in names} for pick, names in options.items()}

    def add(self, pick: str, option: str, evidence: Evidence) -> None:
        """Write one piece of evidence into the ledger of a pick."""
        self._evidence.setdefault(pick, {}).setdefault(option, []).append(evidence)

    def balance(self, pick: str, option: str) -> float:
        """Return what speaks for an option less what speaks against it."""
        return sum(entry.weight for entry in self._evidence.get(pick, {}).get(option, ()))

    def ruled_out(self, pick: str, option: str) -> list[Evidence]:
        """Return the evidence that rules an option out."""
        return [entry for entry in self._evidence.get(pick, {}).get(option, ()) if entry.stance == "rule_out"]

    def best(self, pick: str, options: Iterable[str] | None = None) -> str | None:
        """Return the option with the best balance that is not ruled out; the order of the options breaks a tie."""
        names = list(options) if options is not None else list(self._evidence.get(pick, {}))
        open_options = [name for name in names if not self.ruled_out(pick, name)]
        return max(open_options, key=lambda name: self.balance(pick, name), default=None)

    def records(self, chosen: Mapping[str, str]) -> list[Ledger]:
        """Return every ledger, best option first."""
        result = []
        for pick, options in self._evidence.items():
            lines = [
                OptionLedger(option, self.balance(pick, option), bool(self.ruled_out(pick, option)), list(evidence))
                for option, evidence in options.items()
            ]
            lines.sort(key=lambda line: (line.ruled_out, -line.balance))
            result.append(Ledger(pick, chosen.get(pick), lines))
        return result


def size_key(nominal_mm: float) -> str:
    """Return the option name of a diameter in its ledger."""
    return f"{nominal_mm:g}"


def kappa_key(kappa_deg: float) -> str:
    """Return the option name of a cutting-edge angle in its ledger."""
    return f"{kappa_deg:g}"


@dataclass(frozen=True)
class _Parts:
    """Everything of a tool but its body and size."""

    pitch: str
    rake: Rake
    edge: str
    corner: Corner
    wiper: str
    score: float


class Catalogue:
    """All tools that exist for a job, tried best first."""

    def __init__(self, cutters: Cutters, ledgers: Ledgers, series: str, mountings: Iterable[str], plan_mounting: Callable[[Size], str | None] | None = None) -> None:
        self._cutters = cutters
        self._ledgers = ledgers
        self._sizes = [size for size in cutters.sizes if size.series == series]
        self._interface_mountings = frozenset(mountings)
        self._mounting_of: dict[str, str | None] = {}

    def best_first(self) -> Iterator[Candidate]:
        """Yield every candidate whose parts are not ruled out, best evidence first."""
        lanes = [lane for place, family in enumerate(self._cutters.families) if (lane := self._lane(place, family))]
        heap = [(-lane.score(0, 0), lane.place, 0, 0) for lane in lanes]
        by_place = {lane.place: lane for lane in lanes}
        heapq.heapify(heap)
        while heap:
            _, place, row, column = heapq.heappop(heap)
            lane = by_place[place]
            candidate = self._candidate(lane, row, column)
            if candidate is not None:
                yield candidate
            if column + 1 < len(lane.parts):
                heapq.heappush(heap, (-lane.score(row, column + 1), place, row, column + 1))
            if column == 0 and row + 1 < len(lane.sizes):
                heapq.heappush(heap, (-lane.score(row + 1, 0), place, row + 1, 0))

    def count(self) -> int:
        """Return how many candidates there are."""
        return sum(1 for _ in self.best_first())

    def _lane(self, place: int, family: Family) -> _Lane | None:
        body = self._score("cutter_class", family.cutter_class), self._score("kappa_deg", kappa_key(family.kappa_deg))
        if None in body:
            return None
        sizes = [
            (score, size)
            for size in self._sizes
            if family.from_mm <= size.nominal_mm <= family.to_mm
            and (score := self._score("diameter_mm", size_key(size.nominal_mm))) is not None
            and self._mounting(size) is not None
        ]
        sizes.sort(key=lambda entry: (-entry[0], entry[1].nominal_mm))
        parts = sorted(self._parts(family), key=lambda entry: -entry.score)
        if not sizes or not parts:
            return None
        return _Lane(place, family, sum(score or 0.0 for score in body), sizes, parts)

    def _score(self, pick: str, option: str) -> float | None:
        return None if self._ledgers.ruled_out(pick, option) else self._ledgers.balance(pick, option)

    def _parts(self, family: Family) -> Iterator[_Parts]:
        wipers = ["none", "one", "all"] if family.wipers else ["none"]
        rakes = [(rake, edge) for rake in family.rakes for edge in rake.edges]
        for pitch, (rake, edge), corner, wiper in product(family.pitches, rakes, family.corners, wipers):
            scores = [
                self._score("pitch", pitch),
                self._score("rake", rake.rake),
                self._score("edge", edge),
                self._score("corner", corner.corner),
                self._score("wiper", wiper),
            ]
            if None not in scores:
                yield _Parts(pitch, rake, edge, corner, wiper, sum(score or 0.0 for score in scores))

    def _mounting(self, size: Size) -> str | None:
        if size.label not in self._mounting_of:
            fits = {row.mounting: None for row in self._cutters.mountings if row.from_mm <= size.nominal_mm <= row.to_mm}
            offered = [mounting for mounting in fits if mounting in self._interface_mountings]
            self._mounting_of[size.label] = self._ledgers.best("mounting", offered)
        return self._mounting_of[size.label]

    def _candidate(self, lane: _Lane, row: int, column: int) -> Candidate | None:
        size, parts = lane.sizes[row][1], lane.parts[column]
        teeth = size.teeth[PITCHES.index(parts.pitch)]
        land = wiper_land(lane.family, size.nominal_mm) if parts.wiper != "none" else 0.0
        mounting = self._mounting(size)
        if teeth is None or mounting is None or land is None:
            return None
        cartridge_from = lane.family.cartridge_from_mm
        pockets = ["fixed", "cartridge"] if cartridge_from is not None and size.nominal_mm >= cartridge_from else ["fixed"]
        best_pockets = self._ledgers.best("pockets", pockets)
        if best_pockets is None:
            return None
        return Candidate(
            lane.family, size, parts.pitch, int(teeth), parts.rake, parts.edge, parts.corner, parts.wiper, land, best_pockets, mounting, lane.score(row, column)
        )  # fmt: skip


def wiper_land(family: Family, nominal_mm: float) -> float | None:
    """Return the longest wiper land of a body, or None where it takes no wiper."""
    if family.wipers is None or nominal_mm < family.wipers.from_mm:
        return None
    return max(family.wipers.lands_mm)


@dataclass(frozen=True)
class _Lane:
    """All sizes and parts of one family, each sorted best first."""

    place: int
    family: Family
    body_score: float
    sizes: list[tuple[float, Size]]
    parts: list[_Parts]

    def score(self, row: int, column: int) -> float:
        return self.body_score + self.sizes[row][0] + self.parts[column].score
