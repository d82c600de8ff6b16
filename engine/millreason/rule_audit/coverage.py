"""Options that no rule speaks of, and kinds of jobs in which nothing is said on a pick."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Iterator, Mapping
from itertools import combinations, product

from millreason.facts import Situation
from millreason.job import Given, Job
from millreason.lookups import complete_situation, first_situation, look_up_usual, size_facts
from millreason.rule_audit.findings import Found, Subject
from millreason.rule_audit.pairs import voices
from millreason.rule_audit.values import plain
from millreason.rulebook import Scalar
from millreason.spindle import spindle_of
from millreason.stages import Stage

# The picks that rules weigh; the others follow from the candidate.
DERIVED = ("teeth", "corner_radius_mm")
SPEED = "material.speed_start_m_min"
Region = Mapping[str, Scalar]


def check_options(subject: Subject) -> Found:
    """Yield options for which, or against which, no rule speaks."""
    spoken = {option: {stance for _, stance, _ in heard} for option, heard in voices(subject).items()}
    for pick, definition in subject.vocabulary.picks.items():
        for option in map(plain, definition.options):
            stances = spoken.get((pick, option), set())
            shown = f"{option:g}" if isinstance(option, float) else str(option)
            if not stances:
                message = f"no rule speaks for or against {shown}. Write one, or take the option away."
                yield subject.in_vocabulary("warning", "option without a voice", f"pick.{pick}", message)
            elif "for" not in stances:
                message = f"no rule speaks for {shown}; it wins only where all else is ruled out."
                yield subject.in_vocabulary("note", "nothing for an option", f"pick.{pick}", message)
            elif stances == {"for"}:
                message = f"no rule speaks against {shown}, nor rules it out."
                yield subject.in_vocabulary("note", "nothing against an option", f"pick.{pick}", message)


# ---------------------------------------------------------------------- kinds of jobs
def regions(subject: Subject) -> Iterator[Region]:
    """Yield kinds of jobs: every group, feature, hold and stage, a small and a large machine."""
    facts = subject.facts
    finish = facts["require.finish_ra_um"].plausible or [1.0, 5.0]
    axes: dict[str, list[Scalar]] = {
        "work.material": list(_materials(subject)),
        "work.feature": list(facts["work.feature"].options),
        "fixture.rigidity": list(facts["fixture.rigidity"].options),
        "machine.interface": _ends(subject),
        "require.finish_ra_um": [finish[0], finish[-1]],
    }
    for values in product(*axes.values()):
        yield dict(zip(axes, values, strict=True))


def _materials(subject: Subject) -> Iterator[str]:
    """Yield one material of each group, the first that is found by its own name without a question."""
    materials = subject.adviser.materials
    for group in map(str, subject.facts["work.iso_group"].options):
        for entry in materials.entries(group):  # type: ignore[arg-type]
            found = materials.look_up(entry.name)
            if found.question is None and {"material.chip_form", SPEED} <= {fact.name for fact in found.facts}:
                yield entry.name
                break


def _ends(subject: Subject) -> list[Scalar]:
    """Return the interfaces that carry the smallest and the largest cutters."""
    by_size = sorted(
        subject.adviser.knowledge.interfaces.values(), key=lambda entry: (entry.carries.largest_mm, entry.id)
    )
    return [by_size[0].id, by_size[-1].id] if by_size else []


def check_regions(subject: Subject) -> Found:
    """Yield picks on which no rule says anything in some kinds of jobs."""
    advice = _Advice(subject)
    sampled = list(regions(subject))
    weighed = [pick for pick in subject.vocabulary.picks if pick not in DERIVED]
    silent: dict[str, list[Region]] = defaultdict(list)
    for region in sampled:
        for pick in set(weighed) - advice.picks(region):
            silent[pick].append(region)
    for pick in weighed:
        if silent[pick]:
            where = _shared(silent[pick], sampled)
            message = (
                f"no rule says anything on it in {len(silent[pick])} of {len(sampled)} kinds of jobs "
                f"({where}); the order of the options would decide. Write what speaks for one of them there."
            )
            yield subject.in_vocabulary("warning", "no advice", f"pick.{pick}", message)


def _shared(silent: list[Region], sampled: list[Region]) -> str:
    """Describe kinds of jobs: by values all of whose jobs are silent, or else by an example."""
    if len(silent) == len(sampled):
        return "all of them"
    for size in (1, 2):
        told = [
            " with ".join(f"{name} {region[name]}" for name in names)
            for names in combinations(silent[0], size)
            for region in {tuple(entry[name] for name in names): entry for entry in silent}.values()
            if all(entry in silent for entry in sampled if all(entry[n] == region[n] for n in names))
        ]
        if told:
            return "; ".join(told[:4])
    return "for example " + ", ".join(f"{name} {value}" for name, value in silent[0].items())


class _Advice:
    """Runs the rules up to the weighing, without the search for a tool."""

    def __init__(self, subject: Subject) -> None:
        adviser = subject.adviser
        self._adviser, self._subject = adviser, subject
        book = adviser.rulebook
        self._assume = self._stage([rule for rule in book.stage("assume") if rule.then.assume])
        self._weigh = self._stage(book.stage("weigh"))
        self._size = self._stage(book.stage("weigh", about_size=True))

    def _stage(self, rules: list) -> Stage:  # type: ignore[type-arg]
        return Stage(rules, self._adviser.rulebook, self._adviser.vocabulary, "twin")

    def picks(self, region: Region) -> set[str]:
        """Return the picks of which something is said in a kind of job."""
        situation = self._situation(region)
        stages = [self._weigh, *([self._size] if self._add_size(situation) else [])]
        said: set[str] = set()
        for stage in stages:
            for firing in stage.run(situation):
                then = stage.rules[firing.rule].then
                said.update(then.for_ or then.against or then.rule_out or {})
        return said

    def _situation(self, region: Region) -> Situation:
        adviser, facts = self._adviser, self._subject.facts
        sizes = {
            name: entry.plausible[0] + (entry.plausible[1] - entry.plausible[0]) / 4
            for name in ("work.width_mm", "work.length_mm", "work.stock_mm")
            if (entry := facts[name]).plausible
        }
        given = {name: Given(value, str(value)) for name, value in {**sizes, **region}.items()}
        situation = first_situation(Job("", given), adviser.knowledge, adviser.materials, adviser.vocabulary).situation
        while self._fill(situation) | look_up_usual(situation, adviser.knowledge):
            pass
        complete_situation(situation, adviser.knowledge, adviser.vocabulary)
        self._subject.search.judge(situation)
        return situation

    def _fill(self, situation: Situation) -> bool:
        new = False
        for firing in self._assume.run(situation):
            for name, value in (self._assume.rules[firing.rule].then.assume or {}).items():
                settled = situation.value(value["fact"]) if isinstance(value, dict) else plain(value)
                several = self._subject.facts[name].kind in ("choices", "numbers")
                if several and settled is not None and not isinstance(settled, tuple):
                    settled = (settled,)
                new = situation.set(name, settled, "assumed", firing.rule) or new
        return new

    def _add_size(self, situation: Situation) -> bool:
        """Add the size facts of the smallest diameter in the series; say whether they could be computed."""
        knowledge = self._adviser.knowledge
        needed = ("machine.power_kw", "machine.speed_max_rpm", SPEED)
        if not knowledge.cutters.sizes or any(situation.value(name) is None for name in needed):
            return False
        spindle = spindle_of(situation, knowledge.practice)
        middle = knowledge.cutters.sizes[len(knowledge.cutters.sizes) // 2].nominal_mm
        for name, value in size_facts(middle, situation, knowledge, {}, spindle).items():
            situation.set(name, value, "computed", "size")
        return True
