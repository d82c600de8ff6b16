"""The choice: five stages of rules, a complete best-first search over tools, and the plan each of them gets."""

from __future__ import annotations

from collections import Counter
from collections.abc import Mapping
from functools import cache, cached_property
from pathlib import Path
from typing import Any

from millreason.candidates import Ledgers, kappa_key, size_key
from millreason.facts import Situation, basis_record
from millreason.inference import Firing
from millreason.job import Job, read_job
from millreason.knowledge import Knowledge, load_knowledge
from millreason.limits import binding_limits
from millreason.lookups import complete_situation, first_situation, look_up_usual, size_facts, unit_doubts
from millreason.materials import Materials, load_materials
from millreason.measures import BODY_FACTS
from millreason.outcome import Outcome
from millreason.own_cutters import own_cutters
from millreason.rulebook import Conclusion, RuleBook, load_rules
from millreason.search import Search
from millreason.spindle import Spindle, spindle_of
from millreason.stages import Stage, Tuning, fill
from millreason.trace import Answer, Evidence, FiringRecord, LimitRecord, Question
from millreason.vocabulary import Vocabulary, load_vocabulary

SEPARATE_PICKS = ("hand", "direction", "fluid", "application", "spacing")
RUNNERS_UP = 3
_STAGES = ("assume", "appraise", "weigh", "size", "judge", "caution")


class Adviser:
    """The program with its knowledge and rules loaded; it answers any number of jobs.

    `runners_up` is how many bodies of another kind or size the search looks for behind the best.
    """

    runners_up = RUNNERS_UP

    def __init__(
        self,
        knowledge: Knowledge,
        materials: Materials,
        vocabulary: Vocabulary,
        rulebook: RuleBook,
        engine: str | None = None,
    ) -> None:
        self.knowledge = knowledge
        self.materials = materials
        self.vocabulary = vocabulary
        self.rulebook = rulebook
        self.engine = engine

    def choose_file(self, path: Path | str) -> Answer:
        """Answer the job in a file; see `choose`.

        Raises
        ------
        DataError
            with everything that is wrong in the file.
        """
        return self.choose(read_job(Path(path), self.vocabulary, self.knowledge.interface_names))

    def choose(self, job: Job) -> Answer:
        """Answer a job with a cutter and its plan, questions, or a refusal, and the whole trace."""
        from millreason.answer import write_answer

        return write_answer(self, self.decide(job))

    def decide(self, job: Job, only: Mapping[str, str] | None = None) -> Outcome:
        """Run the stages and the search for a job, without writing the answer.

        `only` keeps the search to candidates with the given options, such as {"pitch": "coarse"}.
        """
        return _Run(self, job).outcome(only or {})

    def search(self, out: Outcome, spindle: Spindle) -> Search:
        """Return the search over the candidates of one job."""
        return Search(self, out, spindle)

    @cached_property
    def provenance(self) -> Mapping[str, int]:
        """How many values of the knowledge, materials included, stand on each kind of basis."""
        total = Counter[str](self.knowledge.provenance_counts())
        total.update(self.materials.counts)
        return dict(sorted(total.items()))

    @cached_property
    def stages(self) -> Mapping[str, Stage]:
        """The compiled stages; rules on single diameters form a stage of their own."""
        rules = {
            "assume": self.rulebook.stage("assume"),
            "appraise": self.rulebook.stage("appraise"),
            "weigh": self.rulebook.stage("weigh"),
            "size": self.rulebook.stage("weigh", about_size=True),
            "judge": self.rulebook.stage("judge"),
            "caution": self.rulebook.stage("caution"),
        }
        return {name: Stage(rules[name], self.rulebook, self.vocabulary, self.engine) for name in _STAGES}


def load_adviser(shop: Path | None = None, engine: str | None = None, root: Path | None = None) -> Adviser:
    """Load knowledge, rules and a shop's own folder.

    Raises
    ------
    DataError
        with everything that is wrong in any of the files.
    """
    knowledge = load_knowledge(root, shop)
    vocabulary = load_vocabulary(knowledge.root)
    rulebook = load_rules(knowledge.root, vocabulary, shop, knowledge.sources, knowledge.strengths)
    return Adviser(knowledge, load_materials(knowledge.root, shop, knowledge.sources), vocabulary, rulebook, engine)


class _Run:
    """One choice."""

    def __init__(self, adviser: Adviser, job: Job) -> None:
        self._adviser = adviser
        self._vocabulary = adviser.vocabulary
        self._practice = adviser.knowledge.practice
        first = first_situation(job, adviser.knowledge, adviser.materials, adviser.vocabulary)
        self._situation = first.situation
        tuning = Tuning({name: entry.how for name, entry in adviser.vocabulary.adjustables.items()}, {}, {})
        self._out = Outcome(
            job, self._situation, tuning, contradictions=list(first.contradictions), notes=list(first.notes)
        )
        self._out.unit_doubts = unit_doubts(
            first.situation, adviser.vocabulary, self._practice["unit_doubt_factor"].number
        )
        if first.question is not None:
            self._out.questions[first.question.fact] = first.question

    def outcome(self, only: Mapping[str, str]) -> Outcome:
        out = self._out
        self._fill_gaps()
        complete_situation(self._situation, self._adviser.knowledge, self._adviser.vocabulary)
        self._appraise()
        if not out.must_ask and not out.limits and self._ready():
            self._weigh()
            self._search(only)
        self._caution()
        return out

    def _ready(self) -> bool:
        """Whether every number is there that a plan needs; what is not becomes a question."""
        needed = (
            "work.width_mm",
            "work.length_mm",
            "work.stock_mm",
            "material.kc11_n_mm2",
            "machine.interface",
            "machine.power_kw",
            "machine.efficiency",
        )
        for fact in needed:
            if self._situation.value(fact) is None:
                asked = "work.material" if fact.startswith("material.") else fact
                self._question(asked, "must", "plan")
        if self._situation.value("machine.speed_max_rpm") is None and not self._situation.value(
            "machine.speed_steps_rpm"
        ):
            self._question("machine.speed_max_rpm", "must", "plan")
        return not self._out.must_ask

    # ------------------------------------------------------------------ assume and appraise
    def _fill_gaps(self) -> None:
        """Run the assuming rules until nothing new can be looked up for what they have assumed."""
        while self._assume() | look_up_usual(self._situation, self._adviser.knowledge):
            pass
        self._out.questions = {fact: question for fact, question in self._out.questions.items() if self._open(fact)}

    def _open(self, fact: str) -> bool:
        """Whether a question is still worth putting: what is asked is unknown, or only assumed."""
        record = self._situation.record(fact)
        return fact == "work.material" or record is None or record.origin == "assumed"

    def _assume(self) -> bool:
        stage = self._adviser.stages["assume"]
        new = False
        for firing in stage.run(self._situation):
            then = stage.rules[firing.rule].then
            if then.ask and then.ask in self._out.questions and self._fired(firing.rule):
                continue
            self._record(stage, firing)
            for fact, value in (then.assume or {}).items():
                settled = self._situation.value(value["fact"]) if isinstance(value, dict) else value
                new = self._set(fact, settled, "assumed", firing.rule, stage) or new
            if then.ask:
                self._question(then.ask, then.need or "useful", firing.rule)
        return new

    def _fired(self, rule: str) -> bool:
        return any(firing.rule == rule for firing in self._out.firings)

    def _appraise(self) -> None:
        stage = self._adviser.stages["appraise"]
        for firing in stage.run(self._situation):
            then = stage.rules[firing.rule].then
            for fact, value in (then.set or {}).items():
                self._set(fact, value, "concluded", firing.rule, stage)
            self._record(stage, firing)
            if then.adjust:
                self._out.tuning.apply(firing.rule, then.adjust)
            if then.ask:
                self._question(then.ask, then.need or "useful", firing.rule)
            if then.condition:
                self._out.conditions[then.condition] = self._make_question(then.condition, "must", firing.rule)
            if then.refuse:
                self._out.limits.append(stage.limit(firing.rule, then.refuse, self._situation, self._out.job.units))

    def _set(self, fact: str, value: Any, origin: Any, rule: str, stage: Stage) -> bool:
        definition = self._vocabulary.facts[fact]
        if definition.kind in ("choices", "numbers") and value is not None and not isinstance(value, tuple):
            value = (value,)
        if definition.kind == "number" and value is not None:
            value = float(value)
        return self._situation.set(fact, value, origin, rule, basis=basis_record(stage.rules[rule].basis))

    def _question(self, fact: str, need: Any, rule: str) -> None:
        before = self._out.questions.get(fact)
        if before is None or (before.need == "useful" and need == "must"):
            self._out.questions[fact] = self._make_question(fact, need, rule)

    def _make_question(self, fact: str, need: Any, rule: str) -> Question:
        definition = self._vocabulary.facts[fact]
        return Question(fact, definition.ask or definition.means, definition.because or "", need, [rule])

    # ------------------------------------------------------------------ weigh
    def _weigh(self) -> None:
        picks = self._vocabulary.picks
        out = self._out
        out.ledgers = Ledgers(
            {name: [_option(option) for option in pick.options] for name, pick in picks.items() if pick.options}
        )
        stage = self._adviser.stages["weigh"]
        for firing in stage.run(self._situation):
            record = self._record(stage, firing)
            self._write_evidence(stage, record, None, self._situation)
        for nominal_mm in self._sizes():
            self._weigh_size(nominal_mm)
        for pick in SEPARATE_PICKS:
            best = out.ledgers.best(pick)
            if best is None:
                rules = [e.rule for option in picks[pick].options for e in out.ledgers.ruled_out(pick, str(option))]
                out.limits.append(
                    LimitRecord(
                        "fluid" if pick == "fluid" else "process",
                        f"every option of {pick} is ruled out",
                        None,
                        None,
                        ", ".join(rules),
                        [],
                    )
                )
            else:
                out.separate[pick] = best

    def _sizes(self) -> list[float]:
        """Return every diameter to weigh: the series in the person's units, and the cutters on hand."""
        series = [
            size.nominal_mm for size in self._adviser.knowledge.cutters.sizes if size.series == self._out.job.units
        ]
        own = [
            float(value)
            for cutter in own_cutters(self._out.job, self._adviser.knowledge)
            if isinstance(value := cutter.values.get("diameter_mm"), int | float)
        ]
        return sorted({*series, *own})

    def _weigh_size(self, nominal_mm: float) -> None:
        stage = self._adviser.stages["size"]
        situation = self._situation.copy()
        for name, value in size_facts(
            nominal_mm, self._situation, self._adviser.knowledge, self._out.tuning.values, self.spindle
        ).items():
            situation.set(name, value, "computed", "size")
        for firing in stage.run(situation):
            record = stage.record(firing, situation, self._out.job.units, f"D {nominal_mm:g}")
            self._out.firings.append(record)
            self._write_evidence(stage, record, nominal_mm, situation)

    def _write_evidence(self, stage: Stage, record: FiringRecord, size: float | None, situation: Situation) -> None:
        assert self._out.ledgers is not None
        then = stage.rules[record.rule].then
        if then.limit:
            self._out.excluded.append(stage.limit(record.rule, then.limit, situation, self._out.job.units))
        stance: Any = "for" if then.for_ else "against" if then.against else "rule_out"
        strength = then.strength or "rule_out"
        weight = self._adviser.knowledge.strengths[strength].weight if then.strength else 0.0
        evidence = Evidence(record.rule, stance, strength, -weight if then.against else weight, record.why)
        for pick, options in (then.for_ or then.against or then.rule_out or {}).items():
            for option in options if isinstance(options, list) else [options]:
                named = size_key(size) if pick == "diameter_mm" and size is not None else _option(option)
                self._out.ledgers.add(pick, named, evidence)

    # ------------------------------------------------------------------ search
    @cached_property
    def spindle(self) -> Spindle:
        """The machine's spindle."""
        spindle = spindle_of(self._situation, self._practice)
        self._situation.set("machine.net_curve", spindle.net_curve, "computed", "spindle")
        return spindle

    def _search(self, only: Mapping[str, str]) -> None:
        out = self._out
        if not out.limits:
            self._adviser.search(out, self.spindle).run(only)

    # ------------------------------------------------------------------ cautions
    def _caution(self) -> None:
        out, stage = self._out, self._adviser.stages["caution"]
        situation = self._situation.with_facts(self._seen_by_cautions(), "plan")
        for name, value in self._answer_facts().items():
            situation.set(name, value, "computed", "answer")
        for firing in stage.run(situation):
            record = stage.record(firing, situation, out.job.units)
            out.firings.append(record)
            out.cautions.append(
                (record, _filled(stage.rules[firing.rule].then, situation, self._vocabulary, out.job.units))
            )

    def _seen_by_cautions(self) -> Mapping[str, Any]:
        """Return the facts of the chosen candidate; while a condition is open, only its body is seen."""
        facts = self._out.stands[0].facts if self._out.stands else {}
        if not self._out.conditions:
            return facts
        return {name: value for name, value in facts.items() if name.startswith("pick.") or name in BODY_FACTS}

    def _answer_facts(self) -> dict[str, Any]:
        out = self._out
        facts: dict[str, Any] = {"answer.verdict": "recommend"}
        if out.must_ask and not out.limits:
            facts["answer.verdict"] = "ask"
            facts["answer.missing"] = ("some",)
        elif not out.stands:
            facts["answer.verdict"] = "refuse"
            keys = [limit.key for limit in binding_limits(out)]
            facts["answer.limits"] = tuple(dict.fromkeys(keys))
        elif out.conditions:
            facts["answer.verdict"] = "conditional"
        if out.contradictions:
            facts["answer.contradictions"] = ("some",)
        if out.unit_doubts:
            facts["answer.unit_doubt"] = ("some",)
        return facts

    def _record(self, stage: Stage, firing: Firing) -> FiringRecord:
        record = stage.record(firing, self._situation, self._out.job.units)
        self._out.firings.append(record)
        return record


def _filled(then: Conclusion, situation: Situation, vocabulary: Vocabulary, system: str) -> Conclusion:
    """Return a caution or an offer with the values of the situation in its text."""
    if then.caution:
        filled = fill(then.caution.do, situation, vocabulary, system)
        return then.model_copy(update={"caution": then.caution.model_copy(update={"do": filled})})
    return then.model_copy(update={"offer": fill(then.offer or "", situation, vocabulary, system)})


def _option(option: object) -> str:
    return kappa_key(float(option)) if isinstance(option, int | float) else str(option)


@cache
def shipped_adviser() -> Adviser:
    """Return the adviser with the shipped knowledge and the default engine, loaded once."""
    return load_adviser()


def choose_file(path: Path | str) -> Answer:
    """Answer the job in a file with the shipped knowledge."""
    return shipped_adviser().choose_file(path)
