"""Complete tools, best evidence first: body, size, pitch, rake, corner and wiper in every combination."""

from __future__ import annotations

import heapq
import math
from collections.abc import Container, Iterable, Iterator, Mapping
from dataclasses import dataclass
from functools import cached_property
from itertools import product
from typing import TYPE_CHECKING, Any, NamedTuple

from millreason.trace import Evidence, Ledger, OptionLedger

if TYPE_CHECKING:
    from millreason.cutters import BodySize, CornerOption, CutterFamily, CuttersFile, RakeOption
    from millreason.job import OwnCutter


@dataclass(frozen=True)
class Candidate:
    """One complete tool, before its plan."""

    family: CutterFamily
    size: BodySize
    pitch: str
    teeth: int
    rake: RakeOption
    edge: str
    corner: CornerOption
    wiper: str
    wiper_land_mm: float
    pockets: str
    mounting: str
    evidence: float
    own: OwnCutter | None = None
    blocked: tuple[Evidence, ...] = ()

    @property
    def is_round(self) -> bool:
        """Whether the inserts are round, so that the cutting-edge angle follows the depth."""
        return self.family.insert_diameter_mm is not None

    @property
    def diameter_mm(self) -> float:
        """Diameter at the edge that makes the floor."""
        return self.family.floor_diameter_mm(self.size)

    @property
    def land_mm(self) -> float:
        """Length of the land that makes the floor: the wiper's where there is one, else the insert's own."""
        return self.wiper_land_mm if self.wiper != "none" else self.corner.land_mm

    @property
    def speed_limit_rpm(self) -> float:
        """Speed marked on the body; a generic body has none, but an unbalanced one is held to its cautious speed."""
        marked = self.own.values.get("speed_limit_rpm") if self.own else None
        if isinstance(marked, int | float):
            return float(marked)
        caution = self.family.speed_caution
        return caution.spindle_speed_rpm if caution.binding else math.inf

    @property
    def outermost_mm(self) -> float:
        """Diameter over the inserts, which the changer, walls and clamps meet."""
        return self.family.outermost_mm(self.size)

    @property
    def options(self) -> dict[str, str]:
        """The option of every pick, as the ledgers name it."""
        return {
            "cutter_class": self.family.cutter_class,
            "kappa_deg": kappa_key(self.family.kappa_deg),
            "diameter_mm": size_key(self.size.nominal_mm),
            "pitch": self.pitch,
            "rake": self.rake.rake,
            "edge": self.edge,
            "corner": self.corner.corner,
            "wiper": self.wiper,
            "pockets": self.pockets,
            "mounting": self.mounting,
            **({"cutter": self.own.id} if self.own else {}),
        }

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
        self._evidence: dict[str, dict[str, list[Evidence]]] = {
            pick: {option: [] for option in names} for pick, names in options.items()
        }

    def add(self, pick: str, option: str, evidence: Evidence) -> None:
        """Write one piece of evidence into the ledger of a pick."""
        self._evidence.setdefault(pick, {}).setdefault(option, []).append(evidence)

    def evidence(self, pick: str, option: str) -> list[Evidence]:
        """Return every word for or against an option."""
        return list(self._evidence.get(pick, {}).get(option, ()))

    def scores(self, pick: str) -> dict[str, float | None]:
        """Return the balance of every option of a pick; None for one that is ruled out."""
        return {
            option: None if self.ruled_out(pick, option) else self.balance(pick, option)
            for option in self._evidence.get(pick, {})
        }

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


class _Parts(NamedTuple):
    """Everything of a tool but its body and size."""

    pitch: str
    rake: RakeOption
    edge: str
    corner: CornerOption
    wiper: str
    score: float


# Pitches, rakes with their edges, corners and wipers, each with its score.
_Pools = tuple[
    "list[tuple[float, str]]",
    "list[tuple[float, RakeOption, str]]",
    "list[tuple[float, CornerOption]]",
    "list[tuple[float, str]]",
]


class Catalogue:
    """All tools that exist for a job, tried best first; `only` keeps those that have the options it names."""

    def __init__(
        self,
        cutters: CuttersFile,
        ledgers: Ledgers,
        series: str,
        mountings: Iterable[str],
        only: Mapping[str, str] | None = None,
    ) -> None:
        self._cutters = cutters
        self._ledgers = ledgers
        self._only = only or {}
        self._scores: dict[str, dict[str, float | None]] = {}
        self._sizes = [size for size in cutters.sizes if size.series == series]
        self._interface_mountings = frozenset(mountings)
        self._mounting_of: dict[tuple[str, str], str | None] = {}
        self._best_mounting: dict[tuple[str, ...], str | None] = {}

    def best_first(self, dead: Container[tuple[Any, ...]] = ()) -> Iterator[Candidate]:
        """Yield every candidate whose parts are not ruled out, best evidence first.

        A body of a size that is in `dead` by then, as (family, size, None), is passed over with all its parts.
        """
        lanes = [lane for place, family in enumerate(self._cutters.families) if (lane := self._lane(place, family))]
        heap = [(-lane.score(0, 0), lane.place, 0, 0) for lane in lanes]
        by_place = {lane.place: lane for lane in lanes}
        heapq.heapify(heap)
        while heap:
            _, place, row, column = heapq.heappop(heap)
            lane = by_place[place]
            body = lane.family.id, lane.sizes[row][1].label, None
            if body not in dead:
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

    def _lane(self, place: int, family: CutterFamily) -> _Lane | None:
        body = (
            self._score("cutter_class", family.cutter_class),
            self._score("kappa_deg", kappa_key(family.kappa_deg)),
        )
        if None in body:
            return None
        sizes = [
            (score, size)
            for size in self._sizes
            if family.from_mm <= size.nominal_mm <= family.to_mm
            and (score := self._score("diameter_mm", size_key(size.nominal_mm))) is not None
            and self._mounting(family, size) is not None
        ]
        sizes.sort(key=lambda entry: (-entry[0], entry[1].nominal_mm))
        pools = self._pools(family)
        if not sizes or not all(pools):
            return None
        return _Lane(place, family, sum(score or 0.0 for score in body), sizes, pools)

    def _score(self, pick: str, option: str) -> float | None:
        if not self._wanted(pick, option):
            return None
        if pick not in self._scores:
            self._scores[pick] = self._ledgers.scores(pick)
        return self._scores[pick].get(option, 0.0)

    def _wanted(self, pick: str, option: str) -> bool:
        return self._only.get(pick, option) == option

    def _pools(self, family: CutterFamily) -> _Pools:
        """Return the options of each part that are not ruled out, with their scores."""
        wipers = self._open("wiper", ("none", "one", "all") if family.wipers else ("none",))
        pitches = self._open("pitch", family.pitches)
        corners = [
            (score, corner) for corner in family.corners if (score := self._score("corner", corner.corner)) is not None
        ]
        rakes = [
            (rake_score + edge_score, rake, edge)
            for rake in family.rakes
            if (rake_score := self._score("rake", rake.rake)) is not None
            for edge_score, edge in self._open("edge", rake.edges)
        ]
        return pitches, rakes, corners, wipers

    def _open(self, pick: str, options: Iterable[str]) -> list[tuple[float, str]]:
        return [(score, option) for option in options if (score := self._score(pick, option)) is not None]

    def _mounting(self, family: CutterFamily, size: BodySize) -> str | None:
        key = family.id, size.label
        if key not in self._mounting_of:
            made = self._cutters.mountings_for(family, size)
            offered = (row.mounting for row in made if row.mounting in self._interface_mountings)
            fits = tuple(name for name in dict.fromkeys(offered) if self._wanted("mounting", name))
            if fits not in self._best_mounting:
                self._best_mounting[fits] = self._ledgers.best("mounting", fits)
            self._mounting_of[key] = self._best_mounting[fits]
        return self._mounting_of[key]

    def _candidate(self, lane: _Lane, row: int, column: int) -> Candidate | None:
        family, size, parts = lane.family, lane.sizes[row][1], lane.parts[column]
        teeth = family.teeth_for(size, parts.pitch)
        mounting = self._mounting(family, size)
        pockets = self._ledgers.best(
            "pockets", [name for name in family.pockets_for(size) if self._wanted("pockets", name)]
        )
        if teeth is None or mounting is None or pockets is None or parts.wiper not in family.wipers_for(size):
            return None
        land = max(family.wipers.lands_mm) if family.wipers and parts.wiper != "none" else 0.0
        score = lane.score(row, column)
        return Candidate(
            family, size, parts.pitch, teeth, parts.rake, parts.edge, parts.corner, parts.wiper, land,
            pockets, mounting, score,
        )  # fmt: skip


class _Lane:
    """All sizes and parts of one family, each sorted best first."""

    def __init__(
        self, place: int, family: CutterFamily, body_score: float, sizes: list[tuple[float, BodySize]], pools: _Pools
    ) -> None:
        self.place = place
        self.family = family
        self.sizes = sizes
        self._body_score = body_score
        self._pools = pools
        self._best_parts: float = sum(max(entry[0] for entry in pool) for pool in pools)

    @cached_property
    def parts(self) -> list[_Parts]:
        """Every combination of parts; made only when the lane's best candidate comes up."""
        made = [
            _Parts(pitch, rake, edge, corner, wiper, a + b + c + d)
            for (a, pitch), (b, rake, edge), (c, corner), (d, wiper) in product(*self._pools)
        ]
        return sorted(made, key=lambda entry: -entry.score)

    def score(self, row: int, column: int) -> float:
        """Return the evidence for one candidate of the lane."""
        parts = self.parts[column].score if column else self._best_parts
        return self._body_score + self.sizes[row][0] + parts
