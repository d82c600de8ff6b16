"""What an audit finds, and the rule base as it is audited."""

from __future__ import annotations

import re
from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from functools import cached_property
from pathlib import Path
from typing import TYPE_CHECKING, Literal

from millreason.errors import DataError, Finding
from millreason.rule_audit.witness import WitnessSearch
from millreason.rulebook import Rule
from millreason.yaml_source import Document, Key, read_yaml

if TYPE_CHECKING:
    from millreason.choice import Adviser

Severity = Literal["error", "warning", "note"]
SEVERITIES: tuple[Severity, ...] = ("error", "warning", "note")


@dataclass(frozen=True)
class AuditFinding:
    """One thing found in the rule base: how grave, of what kind, where, and what to do."""

    severity: Severity
    kind: str
    finding: Finding

    def __str__(self) -> str:
        place = f"{self.finding.file}:{self.finding.line}: {self.finding.field}"
        return f"{place}: {self.severity}: {self.kind}: {self.finding.message}"


Found = Iterator[AuditFinding]


class Subject:
    """The rule base under audit, with what several checks need."""

    def __init__(self, adviser: Adviser) -> None:
        self.adviser = adviser
        self.book = adviser.rulebook
        self.vocabulary = adviser.vocabulary
        self.facts = adviser.vocabulary.facts
        self.root = adviser.knowledge.root
        self.search = WitnessSearch(self.book, self.vocabulary, adviser.knowledge)

    @property
    def rules(self) -> Iterable[Rule]:
        """All rules, in the order of the files."""
        return self.book.rules.values()

    def in_rule(self, severity: Severity, kind: str, rule: Rule, message: str) -> AuditFinding:
        """Return a finding at a rule."""
        file, _, line = self.book.places[rule.id].rpartition(":")
        return AuditFinding(severity, kind, Finding(file, int(line), rule.id, message))

    def in_file(self, severity: Severity, kind: str, name: str, key: Key, message: str) -> AuditFinding:
        """Return a finding at an entry of a knowledge file."""
        document = self._document(name)
        line = document.line(key) if document is not None else 1
        return AuditFinding(severity, kind, Finding(name, line, str(key[-1]), message))

    def in_vocabulary(self, severity: Severity, kind: str, fact: str, message: str) -> AuditFinding:
        """Return a finding at a fact of the vocabulary."""
        return self.in_file(severity, kind, "knowledge/vocabulary.yaml", ("facts", fact), message)

    def formula_files(self) -> list[Path]:
        """Return the modules whose docstrings cite sources."""
        return sorted((Path(__file__).resolve().parent.parent / "formulas").glob("*.py"))

    def place(self, rule: Rule) -> str:
        """Return a rule's id and place, to name it in a finding about another."""
        return f"{rule.id} ({self.book.places[rule.id]})"

    def _document(self, name: str) -> Document | None:
        if name not in self._documents:
            path = self.root / name
            try:
                self._documents[name] = read_yaml(path, name) if path.is_file() else None
            except DataError:
                self._documents[name] = None
        return self._documents[name]

    @cached_property
    def _documents(self) -> dict[str, Document | None]:
        return {name: file.document for name, file in self.adviser.knowledge.files.items()}

    @cached_property
    def source_words(self) -> SourceWords:
        """Every word of the program's own text."""
        return SourceWords(Path(__file__).resolve().parent.parent)


class SourceWords:
    """The words of the program, to see which names of the vocabulary and the knowledge it reads."""

    def __init__(self, package: Path) -> None:
        audit = Path(__file__).resolve().parent
        paths = [path for suffix in ("py", "jinja") for path in sorted(package.rglob(f"*.{suffix}"))]
        texts = [path.read_text(encoding="utf-8") for path in paths if audit not in path.parents]
        whole = "\n".join(texts)
        self.words = frozenset(re.findall(r"[a-z][a-z_0-9.]*", whole))
        self.quoted = frozenset(re.findall(r"[\"']([a-z][a-z_0-9.]*)[\"']", whole))
        self._prefixes = frozenset(re.findall(r"f\"([a-z][a-z_0-9.]*)\{", whole))

    def reads(self, fact: str) -> bool:
        """Whether the program names the fact in full."""
        return fact in self.words

    def makes(self, fact: str) -> bool:
        """Whether the program names the fact in full, or builds its name from parts that it holds."""
        built = (part for part in self._prefixes if fact.startswith(part))
        return self.reads(fact) or any(fact[len(part) :] in self.words for part in built)
