"""The job: what a person asks for, read from a YAML file with units at the edge and every error located."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field, replace
from pathlib import Path
from typing import Any

from millreason.errors import DataError, Finding, did_you_mean
from millreason.units import INCH_UNITS, SHARED_UNITS, QuantityError, convert, parse_quantity
from millreason.vocabulary import FactDefinition, Vocabulary
from millreason.yaml_source import Document, Key, parse_yaml, read_yaml

Value = str | float | bool | tuple[str, ...] | tuple[float, ...] | tuple[tuple[float, float], ...]
SECTIONS = (
    "job",
    "title",
    "work",
    "require",
    "machine",
    "fixture",
    "confirm",
    "costs",
    "cutters",
    "existing",
    "notes",
    "invented",
)
CASE_SECTIONS = ("case", "job", "expect")
LEAD_EQUAL_TO_KAPPA_DEG = 45.0


@dataclass(frozen=True)
class Given:
    """One value of a job: as stored, and as it was written."""

    value: Value
    text: str
    unit: str = ""
    line: int = 0


@dataclass(frozen=True)
class OwnCutter:
    """A cutter that the shop has, or the one that is in use; fields left out are unknown."""

    id: str
    values: Mapping[str, Value]
    line: int = 0


@dataclass(frozen=True)
class Job:
    """Everything a person said about one milling job."""

    title: str
    given: Mapping[str, Given]
    machine_name: str | None = None
    cutters: tuple[OwnCutter, ...] = ()
    existing: OwnCutter | None = None
    units: str = "metric"
    file: str = "job"
    notes: str = ""

    def with_value(self, fact: str, value: Value | None) -> Job:
        """Return the same job with one fact set to a value, or left blank for None."""
        given = {name: entry for name, entry in self.given.items() if name != fact}
        if value is not None:
            # Hardness is the one fact that keeps the scale it was given on.
            given[fact] = Given(value, str(value), "HB" if fact == "work.hardness_hb" else "")
        return replace(self, given=given)


# Fields of a cutter in a job file and the unit they are stored in; an empty unit is a word or a bare number.
CUTTER_FIELDS: dict[str, tuple[str, str]] = {
    "cutter_class": ("cutter_class", "word"), "diameter": ("diameter_mm", "mm"), "teeth": ("teeth", "count"),
    "kappa": ("kappa_deg", "deg"), "lead": ("lead_deg", "deg"), "lead_convention": ("lead_convention", "word"),
    "pitch": ("pitch", "word"), "rake": ("rake", "word"), "corner": ("corner", "word"), "edge": ("edge", "word"),
    "wiper": ("wiper", "word"), "pockets": ("pockets", "word"), "mounting": ("mounting", "word"),
    "hand": ("hand", "word"),
    "usable_depth": ("usable_depth_mm", "mm"), "speed_limit": ("speed_limit_rpm", "rpm"), "mass": ("mass_kg", "kg"),
    "land": ("land_mm", "mm"), "note": ("note", "text"),
    "cutting_speed": ("cutting_speed_m_min", "m/min"), "spindle_speed": ("spindle_speed_rpm", "rpm"),
    "feed_per_tooth": ("feed_per_tooth_mm", "mm"), "depth_of_cut": ("depth_of_cut_mm", "mm"),
    "width_of_cut": ("width_of_cut_mm", "mm"),
}  # fmt: skip


def read_job(path: Path, vocabulary: Vocabulary, interfaces: Mapping[str, str]) -> Job:
    """Read a job file.

    `interfaces` maps every spelling of a spindle interface (lower case) to its id.

    Raises
    ------
    DataError
        with every finding at once.
    """
    return _Reader(read_yaml(path, path.name), vocabulary, interfaces).job()


def parse_job(text: str, vocabulary: Vocabulary, interfaces: Mapping[str, str], name: str = "job") -> Job:
    """Read a job from YAML text; see `read_job`."""
    return _Reader(parse_yaml(text, name), vocabulary, interfaces).job()


@dataclass
class _Reader:
    document: Document
    vocabulary: Vocabulary
    interfaces: Mapping[str, str]
    findings: list[Finding] = field(default_factory=list)
    given: dict[str, Given] = field(default_factory=dict)
    inch: int = 0
    metric: int = 0

    def job(self) -> Job:
        content, base = self._content()
        title, machine_name, notes = "", None, ""
        cutters: tuple[OwnCutter, ...] = ()
        existing: OwnCutter | None = None
        for name, value in content.items():
            key = (*base, name)
            if name not in SECTIONS:
                self._say(key, f"unknown section.{did_you_mean(name, SECTIONS)} Sections: {', '.join(SECTIONS)}.")
            elif name in ("job", "title", "notes", "invented"):
                title, notes = (
                    (str(value), notes)
                    if name in ("job", "title")
                    else (title, str(value) if name == "notes" else notes)
                )
            elif name == "cutters":
                cutters = tuple(self._cutters(key, value))
            elif name == "existing":
                existing = self._cutter(key, value, "existing")
            elif not isinstance(value, dict):
                self._say(key, f"must hold named values, found {value!r}.")
            else:
                machine_name = self._section(name, key, value) or machine_name
        if self.findings:
            raise DataError(self.findings)
        units = "inch" if self.inch > self.metric else "metric"
        return Job(
            title or self.document.name,
            self.given,
            machine_name,
            cutters,
            existing,
            units,
            self.document.name,
            notes,
        )

    def _content(self) -> tuple[dict[str, Any], Key]:
        data = self.document.data
        if not isinstance(data, dict):
            raise DataError([self.document.finding((), "holds no job. Begin with 'work:' and what is milled.")])
        if isinstance(data.get("job"), dict):
            for name in data:
                if name not in CASE_SECTIONS:
                    self._say(
                        (name,),
                        f"unknown section.{did_you_mean(name, CASE_SECTIONS)} Sections: {', '.join(CASE_SECTIONS)}.",
                    )
            return data["job"], ("job",)
        return data, ()

    def _section(self, section: str, key: Key, values: dict[str, Any]) -> str | None:
        machine_name = None
        for name, raw in values.items():
            path = (*key, name)
            if section == "machine" and name == "name":
                machine_name = str(raw)
                continue
            fact = self.vocabulary.job_keys.get(f"{section}.{name}")
            if fact is None:
                known = [
                    entry.split(".", 1)[1] for entry in self.vocabulary.job_keys if entry.startswith(f"{section}.")
                ]
                self._say(
                    path,
                    f"unknown field.{did_you_mean(name, known)} Fields of {section}: {', '.join(sorted(known))}.",
                )
            elif raw is not None:
                self._fact(path, fact, raw)
        return machine_name

    def _fact(self, key: Key, fact: str, raw: Any) -> None:
        definition = self.vocabulary.facts[fact]
        try:
            entry = self._value(definition, fact, raw, self.document.line(key))
        except QuantityError as problem:
            self._say(key, str(problem))
            return
        problem_text = _outside(definition, entry)
        if problem_text:
            self._say(key, problem_text)
        else:
            self.given[fact] = entry

    def _value(self, definition: FactDefinition, fact: str, raw: Any, line: int) -> Given:
        kind, unit = definition.kind, definition.unit
        if kind == "number":
            return self._number(raw, unit, line)
        if kind == "numbers":
            items = raw if isinstance(raw, list) else [raw]
            numbers = tuple(self._number(item, unit, line) for item in items)
            return Given(
                tuple(sorted(_as_float(number.value) for number in numbers)),
                ", ".join(n.text for n in numbers),
                unit,
                line,
            )
        if kind == "curve":
            return Given(self._curve(raw), str(raw), "", line)
        if kind == "flag":
            if not isinstance(raw, bool):
                raise QuantityError(f"{raw!r} is neither yes nor no. Write yes or no.")
            return Given(raw, "yes" if raw else "no", "", line)
        if kind == "text":
            return Given(str(raw), str(raw), "", line)
        if kind == "choices":
            items = raw if isinstance(raw, list) else [raw]
            return Given(
                tuple(dict.fromkeys(self._choice(definition, fact, item) for item in items)),
                ", ".join(map(str, items)),
                "",
                line,
            )
        return Given(self._choice(definition, fact, raw), str(raw), "", line)

    def _number(self, raw: Any, unit: str, line: int) -> Given:
        if unit == "HB":
            quantity = parse_quantity(raw, unit)
            return Given(quantity.value, str(raw), quantity.unit, line)
        if unit in ("", "currency"):
            if isinstance(raw, bool) or not isinstance(raw, int | float):
                raise QuantityError(f"{raw!r} is not a plain number. Write digits without a unit.")
            return Given(float(raw), str(raw), unit, line)
        quantity = parse_quantity(raw, unit)
        if quantity.unit in INCH_UNITS:
            self.inch += 1
        elif quantity.unit not in SHARED_UNITS:
            self.metric += 1
        # Ten figures take away what the conversion leaves, so that 2 in is 50.8 mm and not a hair off a threshold.
        value = float(f"{convert(quantity.value, quantity.unit, unit):.10g}")
        return Given(value, str(raw), unit, line)

    def _choice(self, definition: FactDefinition, fact: str, raw: Any) -> str:
        word = str(raw).strip()
        if fact == "machine.interface":
            found = self.interfaces.get(word.lower())
            if found is not None:
                return found
        options = [str(option) for option in definition.options]
        plain = {option.lower().replace("-", "_"): option for option in options}
        match = plain.get(word.lower().replace(" ", "_").replace("-", "_"))
        if match is None:
            raise QuantityError(
                f"{raw!r} is not known here.{did_you_mean(word, options)} Allowed: {', '.join(options)}."
            )
        return match

    def _curve(self, raw: Any) -> tuple[tuple[float, float], ...]:
        shape = "Write a list of points such as {speed: 1500 rpm, torque: 70 N.m}."
        if not isinstance(raw, list) or not raw:
            raise QuantityError(f"holds no points. {shape}")
        points = []
        for point in raw:
            if not isinstance(point, dict) or set(point) != {"speed", "torque"}:
                raise QuantityError(f"{point!r} is not a point. {shape}")
            speed, torque = self._number(point["speed"], "rpm", 0), self._number(point["torque"], "N.m", 0)
            points.append((_as_float(speed.value), _as_float(torque.value)))
        return tuple(sorted(points))

    def _cutters(self, key: Key, raw: Any) -> Iterator[OwnCutter]:
        if not isinstance(raw, list):
            self._say(key, "must be a list of cutters, each beginning with '- id:'.")
            return
        for number, entry in enumerate(raw):
            cutter = self._cutter((*key, number), entry, f"cutter {number + 1}")
            if cutter is not None:
                yield cutter

    def _cutter(self, key: Key, raw: Any, fallback: str) -> OwnCutter | None:
        if not isinstance(raw, dict):
            self._say(key, f"must hold the fields of a cutter, found {raw!r}.")
            return None
        values: dict[str, Value] = {}
        for name, entry in raw.items():
            if name == "id":
                continue
            target, unit = CUTTER_FIELDS.get(name, ("", ""))
            if not target:
                known = ["id", *CUTTER_FIELDS]
                self._say(
                    (*key, name),
                    f"unknown field.{did_you_mean(name, known)} Fields of a cutter: {', '.join(known)}.",
                )
                continue
            try:
                values[target] = self._cutter_value(target, unit, entry)
            except QuantityError as problem:
                self._say((*key, name), str(problem))
        self._settle_lead(key, values)
        return OwnCutter(str(raw.get("id", fallback)), values, self.document.line(key))

    def _cutter_value(self, target: str, unit: str, entry: Any) -> Value:
        if unit == "text":
            return str(entry)
        if unit == "count":
            if isinstance(entry, bool) or not isinstance(entry, int) or entry < 1:
                raise QuantityError(f"{entry!r} is no number of teeth. Write a whole number from 1.")
            return float(entry)
        if unit != "word":
            number = self._number(entry, unit, 0).value
            if _as_float(number) <= 0 and target != "kappa_deg":
                raise QuantityError(f"{entry!r} must be above zero.")
            return number
        if target == "lead_convention":
            return str(entry)
        definition = self.vocabulary.picks[target]
        return self._choice(definition, f"pick.{target}", entry)

    def _settle_lead(self, key: Key, values: dict[str, Value]) -> None:
        """Turn a lead angle into the cutting-edge angle, or ask for the convention where both readings are possible."""
        lead = values.pop("lead_deg", None)
        convention = values.pop("lead_convention", None)
        if lead is None:
            return
        angle = _as_float(lead)
        if convention not in (None, "lead", "kappa"):
            self._say(
                (*key, "lead_convention"),
                f"{convention!r} is not known. Write lead (90 minus kappa) or kappa.",
            )
        elif "kappa_deg" in values and abs(_as_float(values["kappa_deg"]) + angle - 90) > 0.01:
            self._say(
                (*key, "lead"),
                f"lead {angle:g} and kappa {_as_float(values['kappa_deg']):g} do not add up to 90. Keep one.",
            )
        elif convention is None and angle != LEAD_EQUAL_TO_KAPPA_DEG and "kappa_deg" not in values:
            said = f"{angle:g} deg can mean kappa {90 - angle:g} or kappa {angle:g}: usage differs."
            self._say((*key, "lead"), f"{said} Write 'kappa: {90 - angle:g} deg' or 'kappa: {angle:g} deg' instead.")
        else:
            values.setdefault("kappa_deg", angle if convention == "kappa" else 90 - angle)

    def _say(self, key: Key, message: str) -> None:
        label = ".".join(str(part) for part in key if not (part == "job" and len(key) > 1))
        self.findings.append(self.document.finding(key, message, label))


def _as_float(value: Value) -> float:
    if isinstance(value, bool) or not isinstance(value, int | float):
        raise TypeError(f"{value!r} is not a number")
    return float(value)


def _outside(definition: FactDefinition, entry: Given) -> str | None:
    """Say how a number lies outside the range of its fact; hardness is judged after its scale is converted."""
    if definition.range is None or entry.unit in ("HRC", "HV"):
        return None
    low, high = definition.range
    numbers = entry.value if isinstance(entry.value, tuple) else (entry.value,)
    for number in numbers:
        if isinstance(number, int | float) and not isinstance(number, bool) and not low <= number <= high:
            unit = f" {definition.unit}" if definition.unit else ""
            allowed = f"{low:g} to {high:g}{unit}"
            return f"{entry.text} is outside what is possible here, {allowed}. Check the number and its unit."
    return None
