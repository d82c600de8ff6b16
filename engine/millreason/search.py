"""The search: complete tools best first, each with its plan and judgement, until nothing left can beat the best."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import TYPE_CHECKING, Any

from millreason.candidates import Candidate, Catalogue
from millreason.cut_plan import Plan
from millreason.measures import BODY_FACTS, CORNER_FACTS, CUT_FACTS, Meter
from millreason.outcome import Outcome, Tried
from millreason.own_cutters import own_candidates, own_cutters
from millreason.plan import Planner
from millreason.rulebook import Condition, TestSpec
from millreason.spindle import Spindle
from millreason.trace import LimitRecord

if TYPE_CHECKING:
    from millreason.choice import Adviser

EXTRA_TRIES = 12
Kin = tuple[Any, ...]
BODY_PICKS = ("cutter_class", "kappa_deg", "diameter_mm")


class Search:
    """Tries the candidates of one job and writes what stands and what is rejected into the outcome."""

    def __init__(self, adviser: Adviser, out: Outcome, spindle: Spindle) -> None:
        knowledge = adviser.knowledge
        self._adviser = adviser
        self._out = out
        self._interface = knowledge.interfaces[out.situation.value("machine.interface")]
        self._meter = Meter(out.situation, knowledge.practice, knowledge.cutters, self._interface, spindle)
        self._planner = Planner(out.situation, out.tuning.values, knowledge.practice, spindle)
        self._best: float | None = None
        out.spindle, out.meter = spindle, self._meter

    def run(self, only: Mapping[str, str]) -> None:
        """Try candidates, best evidence first, with the options in `only`."""
        out = self._out
        dead: set[Kin] = set()
        for candidate in self._candidates(only, dead):
            if self._settled(candidate):
                break
            if any(candidate.options.get(pick, option) != option for pick, option in only.items()):
                continue
            out.candidates_possible += 1
            if dead.isdisjoint(_kin(candidate)):
                tried = self._try(candidate)
                (out.rejected if tried.limits else out.stands).append(tried)
                if not tried.limits and (self._best is None or tried.standing > self._best):
                    self._best = tried.standing
                dead.update(self._ruled_out_with(tried))
                if self._best is not None and candidate.evidence <= self._best:
                    # From here on only runners-up of other bodies and sizes are of interest.
                    dead.update(_kin(standing.candidate)[0] for standing in out.stands)
        out.stands.sort(key=lambda tried: -tried.standing)

    def _candidates(self, only: Mapping[str, str], dead: set[Kin]) -> Iterator[Candidate]:
        out, cutters = self._out, self._adviser.knowledge.cutters
        assert out.ledgers is not None
        offered = self._interface.mountings.options
        own = own_cutters(out.job, self._adviser.knowledge)
        if own:
            made = own_candidates(own, cutters, out.ledgers, offered)
            left = {cutter.id for cutter in own} - {candidate.own.id for candidate in made if candidate.own}
            out.notes.extend(
                f"Cutter {name} is left aside: its class, angle and size fit no body." for name in sorted(left)
            )
            return iter(made)
        return Catalogue(cutters, out.ledgers, out.job.units, offered, only).best_first(dead)

    def _settled(self, candidate: Candidate) -> bool:
        """Whether no candidate from here on can beat the best, and enough runners-up are known."""
        stands, best = self._out.stands, self._best
        if best is None or candidate.evidence > best:
            return False
        kinds = {tuple(map(tried.candidate.options.get, BODY_PICKS)) for tried in stands}
        beyond = sum(1 for tried in stands + self._out.rejected if tried.candidate.evidence <= best)
        return len(kinds) > self._adviser.runners_up or beyond >= EXTRA_TRIES

    def _try(self, candidate: Candidate) -> Tried:
        out, stage = self._out, self._adviser.stages["judge"]
        plan, measured = self._measured(candidate)
        facts = {**self._meter.picks(candidate, out.separate), **measured}
        situation = out.situation.with_facts(facts, "plan")
        limits = [LimitRecord("cutter_on_hand", entry.why, None, None, entry.rule, []) for entry in candidate.blocked]
        reasons, lowered = [], 0.0
        firings = stage.run(situation)
        for firing in firings:
            then = stage.rules[firing.rule].then
            if then.reject:
                limits.append(stage.limit(firing.rule, then.reject, situation, out.job.units))
            if then.lower:
                lowered += self._adviser.knowledge.strengths[then.lower].weight
                why = stage.why(firing.rule, situation, out.job.units)
                reasons.append(f"{why} ({firing.rule}, {then.lower})")
        return Tried(candidate, plan, facts, tuple(limits), lowered, tuple(reasons), tuple(firings), situation)

    def _measured(self, candidate: Candidate) -> tuple[Plan, dict[str, Any]]:
        """Return the plan of a candidate and what it measures up to."""
        plan = self._planner.plan(candidate, self._out.separate["direction"])
        return plan, self._meter.measure(plan)

    def _at_finest(self, tried: Tried) -> bool:
        """Whether a plan reaches the finest surface that face milling leaves at all, which no other can better."""
        finest = self._adviser.knowledge.practice["ra_floor_um"].by[self._out.situation.value("material.iso_group")]
        return bool(tried.facts["plan.ra_um"] <= finest)

    def _ruled_out_with(self, tried: Tried) -> Iterator[Kin]:
        """Yield what else need not be tried: tools that share everything the rejecting rules looked at."""
        rules = self._adviser.stages["judge"].rules
        body, cut, corner, every = _kin(tried.candidate)
        rough = tried.plan.loads[0].name == "roughing"
        for limit in tried.limits:
            if limit.rule not in rules:
                continue
            when = rules[limit.rule].when
            looked_at = {fact for fact in when if fact.startswith(("plan.", "pick."))}
            if looked_at <= BODY_FACTS:
                yield body
            elif looked_at <= CORNER_FACTS:
                yield corner
            elif looked_at == {"plan.ra_use"} and _is_floor(when["plan.ra_use"]) and self._at_finest(tried):
                yield every
            elif rough and looked_at <= CUT_FACTS:
                yield cut


def _is_floor(condition: Condition) -> bool:
    """Whether a condition that a value meets is met by every larger value too."""
    return isinstance(condition, TestSpec) and (condition.above is not None or condition.at_least is not None)


def _kin(candidate: Candidate) -> tuple[Kin, Kin, Kin, Kin]:
    """Return what a candidate shares with others: its body; its cut; its corner; and the job."""
    body = (candidate.family.id, candidate.size.label, candidate.own.id if candidate.own else None)
    cut = (*body, candidate.pitch, candidate.rake.axial_deg, candidate.rake.radial_deg, candidate.edge)
    return body, cut, ("corner", candidate.family.id, candidate.corner.corner, body[2]), ()


def identity_of(candidate: Candidate) -> Kin:
    """Return everything in which a candidate can differ from another."""
    _, cut, *_ = _kin(candidate)
    return *cut, candidate.teeth, candidate.corner.corner, candidate.wiper, candidate.mounting, candidate.pockets
