"""Why an option is not the pick: ruled out, rejected or outweighed, and the nearest change that would make it so."""

from __future__ import annotations

from collections.abc import Iterator

from millreason.candidates import kappa_key, size_key
from millreason.errors import MillreasonError, did_you_mean
from millreason.explain.nearest import find_nearest
from millreason.explain.reruns import Reruns
from millreason.explain.why import Argument
from millreason.explain.words import change_words, option_words
from millreason.explanation_records import Because, Change, Loss, Side, WhyNot
from millreason.limits import binding_limits
from millreason.outcome import Outcome, Tried
from millreason.own_cutters import own_cutters
from millreason.report.words import pick_name, pick_option
from millreason.trace import Evidence, LimitRecord

SAME_PICK = {"lead": "kappa_deg", "kappa": "kappa_deg", "diameter": "diameter_mm", "class": "cutter_class"}
_OF_THE_JOB = ("hand", "direction", "fluid", "application", "spacing")


def find_why_not(reruns: Reruns, pick: str, option: str, nearest: bool = True) -> WhyNot:
    """Return why an option is not the pick, with the nearest changes of the job that would make it so.

    Raises
    ------
    MillreasonError
        if there is no such pick or option.
    """
    pick, option = settle_option(reruns, pick, option)
    case = _Case(reruns, pick, option)
    found = case.found()
    if found.outcome == "chosen" or not nearest:
        return found
    before = reruns.runs
    changes = [_told(reruns, change) for change in find_nearest(reruns, pick, option)]
    return WhyNot(
        pick,
        option,
        found.outcome,
        found.text,
        found.because,
        found.sides,
        found.limits,
        changes,
        reruns.runs - before,
    )


def _told(reruns: Reruns, change: Change) -> Change:
    before = {fact: reruns.outcome.situation.value(fact) for fact in change.values}
    text = change_words(change.values, before, reruns.vocabulary, reruns.job.units)  # type: ignore[arg-type]
    return Change(change.values, text, change.then, change.picks)


def settle_option(reruns: Reruns, pick: str, option: str) -> tuple[str, str]:
    """Return pick and option as the ledgers name them."""
    if pick == "cutter":
        known = [cutter.id for cutter in own_cutters(reruns.job, reruns.adviser.knowledge)]
        if option not in known:
            listed = ", ".join(known) or "none; name them under 'cutters:' in the job, or in the shop's folder"
            raise MillreasonError(
                f"no cutter on hand is called {option!r}.{did_you_mean(option, known)} On hand: {listed}."
            )
        return pick, option
    name = SAME_PICK.get(pick, pick)
    picks = reruns.vocabulary.picks
    if name not in picks or name in ("teeth", "corner_radius_mm"):
        known = [*SAME_PICK, "cutter", *(entry for entry, fact in picks.items() if fact.options)]
        raise MillreasonError(f"there is no pick {pick!r}.{did_you_mean(pick, known)} Picks: {', '.join(known)}.")
    if name == "diameter_mm":
        return name, _size(reruns, option)
    if name == "kappa_deg":
        return name, _kappa(reruns, pick, option)
    options = [str(entry) for entry in picks[name].options]
    plain = option.strip().lower().replace(" ", "_").replace("-", "_")
    if plain not in options:
        listed = ", ".join(options)
        raise MillreasonError(
            f"{option!r} is no option of {pick_name(name)}.{did_you_mean(plain, options)} Options: {listed}."
        )
    return name, plain


def _size(reruns: Reruns, option: str) -> str:
    """Return a diameter of the series or of a cutter on hand, written as 80, '80 mm' or '3 in'."""
    from millreason.units import QuantityError, convert, parse_quantity

    try:
        number = float(option)
    except ValueError:
        try:
            quantity = parse_quantity(option, "mm")
        except QuantityError as problem:
            raise MillreasonError(str(problem)) from None
        number = convert(quantity.value, quantity.unit, "mm")
    return size_key(round(number, 3))


def _kappa(reruns: Reruns, pick: str, option: str) -> str:
    """Return a cutting-edge angle; written as a lead angle, it is turned into one."""
    options = [kappa_key(float(entry)) for entry in reruns.vocabulary.picks["kappa_deg"].options]
    word = option.lower().removesuffix("deg").strip()
    if word in ("round", "variable"):
        return "0"
    try:
        angle = float(word)
    except ValueError:
        angle = -1.0
    key = kappa_key(90 - angle if pick == "lead" else angle)
    if angle < 0 or key not in options:
        leads = [kappa_key(90 - float(entry)) for entry in options if entry != "0"]
        known = f"lead {', '.join(leads)}, or round" if pick == "lead" else f"kappa {', '.join(options)} (0: round)"
        raise MillreasonError(f"{option!r} is no {pick} angle of the bodies known here. Known: {known}.")
    return key


class _Case:
    """One option against the answer."""

    def __init__(self, reruns: Reruns, pick: str, option: str) -> None:
        self._reruns = reruns
        self._out = reruns.outcome
        self._pick = pick
        self._option = option
        self._argument = Argument(reruns.adviser.vocabulary, self._out)

    def found(self) -> WhyNot:
        """Return how the option lost."""
        base = self._reruns.base
        if base.verdict == "ask":
            return self._say("not_made", "No option is picked yet: questions must be answered first.")
        if base.picks.get(self._pick) == self._option:
            return self._say("chosen", f"{self._name()} is the pick.")
        if self._out.ledgers is None:
            limits = binding_limits(self._out)
            return self._say("rejected", "No cutter stands at all; see the limits that bind.", limits=limits)
        ruled_out = self._out.ledgers.ruled_out(self._pick, self._option)
        if ruled_out:
            because = [self._argument.evidence(entry, self._size()) for entry in ruled_out]
            return self._say("ruled_out", f"{self._name()} is ruled out.", because)
        if self._pick in _OF_THE_JOB:
            return self._outweighed(None)
        forced = self._reruns.adviser.decide(self._reruns.job, {self._pick: self._option})
        if forced.stands:
            return self._outweighed(forced.stands[0])
        if forced.rejected:
            return self._rejected(forced)
        return self._never_made()

    def _name(self) -> str:
        return option_words(self._pick, self._option, self._reruns.job.units)

    def _size(self) -> str:
        return f"D {self._option}" if self._pick == "diameter_mm" else ""

    def _say(
        self,
        outcome: Loss,
        text: str,
        because: list[Because] | None = None,
        sides: list[Side] | None = None,
        limits: list[LimitRecord] | None = None,
    ) -> WhyNot:
        return WhyNot(self._pick, self._option, outcome, text, because or [], sides or [], limits or [])

    # ------------------------------------------------------------------ outweighed
    def _outweighed(self, tried: Tried | None) -> WhyNot:
        best = self._out.stands[0] if self._out.stands else None
        chosen = self._reruns.base.picks.get(self._pick, "")
        sides = [self._side(chosen, best), self._side(self._option, tried)]
        if tried is None or best is None:
            text = f"{self._name()} is outweighed: balance {sides[1].balance:+g} against {sides[0].balance:+g}."
        elif tried.standing == best.standing:
            text = f"{self._name()} stands level: the best tool with it has {tried.standing:+g} too, and comes later."
        else:
            text = (
                f"{self._name()} is outweighed: the best tool with it, {tried.candidate.label}, stands at "
                f"{tried.standing:+g} against {best.standing:+g} of the one chosen."
            )
        against = [entry for entry in sides[1].evidence if entry.stance == "against"]
        for_chosen = [entry for entry in sides[0].evidence if entry.stance == "for"]
        because = [self._argument.evidence(entry, self._size()) for entry in against]
        size = f"D {chosen}" if self._pick == "diameter_mm" else ""
        shared = {entry.rule for entry in sides[1].evidence if entry.stance == "for"}
        whose = option_words(self._pick, chosen, self._reruns.job.units)
        because += [self._argument.evidence(entry, size, whose) for entry in for_chosen if entry.rule not in shared]
        return self._say("outweighed", text, because, sides)

    def _side(self, option: str, tried: Tried | None) -> Side:
        ledgers = self._out.ledgers
        assert ledgers is not None
        evidence = ledgers.evidence(self._pick, option) if self._pick != "cutter" else []
        balance = sum(entry.weight for entry in evidence)
        if tried is None:
            return Side(option, balance, evidence)
        return Side(
            option,
            balance,
            evidence,
            tried.candidate.label,
            tried.candidate.evidence,
            tried.lowered,
            list(tried.reasons),
        )

    # ------------------------------------------------------------------ rejected, never made
    def _rejected(self, forced: Outcome) -> WhyNot:
        limits = binding_limits(forced)
        tools = len(forced.rejected)
        many = "the only tool" if tools == 1 else f"each of the {tools} tools"
        text = f"{self._name()}: {many} planned with it is rejected; {limits[0].text}"
        because = [self._rejection(limit, forced) for limit in limits]
        return self._say("rejected", text, because, limits=limits)

    def _rejection(self, limit: LimitRecord, forced: Outcome) -> Because:
        """Return a limit with the facts of the very tool that it is told of."""
        tried = next(
            (tried for tried in forced.rejected if any(limit.text == one.text for one in tried.limits)),
            forced.rejected[0],
        )
        return self._argument.rejection(limit, tried.situation, self._reruns.adviser.rulebook)

    def _never_made(self) -> WhyNot:
        """Say what keeps a tool with the option from being made up at all."""
        blockers = list(self._blockers())
        if not blockers:
            return self._say("not_made", f"{self._name()}: no body of this kind is in the knowledge.{self._nearby()}")
        because = [self._argument.evidence(entry, "") for entry in dict.fromkeys(blockers)]
        return self._say("ruled_out", f"{self._name()}: what goes with it is ruled out.", because)

    def _nearby(self) -> str:
        if self._pick != "diameter_mm":
            return ""
        made = sorted(size.nominal_mm for size in self._reruns.adviser.knowledge.cutters.sizes)
        wanted = float(self._option)
        near = sorted(sorted(made, key=lambda size: abs(size - wanted))[:2])
        names = [pick_option("diameter_mm", size_key(size), self._reruns.job.units) for size in near]
        return f" Nearest: {', '.join(names)}."

    def _blockers(self) -> Iterator[Evidence]:
        """Yield what rules out everything that the bodies with the option need besides."""
        ledgers = self._out.ledgers
        assert ledgers is not None
        for family in self._reruns.adviser.knowledge.cutters.families:
            offered: dict[str, list[str]] = {
                "cutter_class": [family.cutter_class],
                "kappa_deg": [kappa_key(family.kappa_deg)],
                "pitch": list(family.pitches),
                "rake": [rake.rake for rake in family.rakes],
                "edge": [edge for rake in family.rakes for edge in rake.edges],
                "corner": [corner.corner for corner in family.corners],
                "wiper": ["none", "one", "all"] if family.wipers else ["none"],
            }
            if self._option not in offered.get(self._pick, [self._option]):
                continue
            for pick, options in offered.items():
                blocks = [ledgers.ruled_out(pick, name) for name in options]
                if pick != self._pick and blocks and all(blocks):
                    yield from (entry for block in blocks for entry in block)
