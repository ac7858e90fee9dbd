"""The rules of the house and the files that a trap file names → one rulebook.

A laboratory's files stand beside the trap file or below it, like everything that is used; no link
leads out.  A name belongs to one rule, whichever file it stands in.
"""

from __future__ import annotations

import os
from dataclasses import dataclass, field
from functools import lru_cache
from pathlib import Path

from wellseq.base.data import data_folder
from wellseq.base.finding import Mistake
from wellseq.base.names import printable
from wellseq.base.place import Place
from wellseq.model.library import beside, why_not_relative
from wellseq.model.rule_settle import settle_rule
from wellseq.model.rulebook import Rule, Rulebook, RulesFile
from wellseq.model.sequence import SourceFile
from wellseq.model.trap import Trap
from wellseq.text.read import decode, read_bytes
from wellseq.text.rules import RULES_MAX, parse_rules
from wellseq.text.rules_tree import RulesTree, RuleText

BYTES_MAX = 1_000_000
HINT = 'files of rules stand in the trap file\'s folder or below it, as in rules = ["our.rules"]'


@dataclass(slots=True)
class ReadRules:
    """What came of reading: the book, every mistake, the laboratory's files as they were read."""

    book: Rulebook = field(default_factory=Rulebook)
    mistakes: list[Mistake] = field(default_factory=list)
    sources: list[SourceFile] = field(default_factory=list)


@lru_cache(maxsize=1)
def house_trees() -> tuple[tuple[RulesFile, RulesTree], ...]:
    """The files of rules that come with wellseq, in the order of their names.

    Raises FileNotFoundError when the installation is incomplete.
    """
    found = []
    for path in sorted(data_folder("safety").glob("*.rules")):
        content = path.read_bytes()
        tree = parse_rules(content.decode("utf-8"), f"safety/{path.name}")
        found.append((RulesFile(path.name, content), tree))
    return tuple(found)


def read_rules(trap: Trap, path: Path | None) -> ReadRules:
    """Every rule for a trap that was read from `path` (None: built in code, it names no files).

    Never raises for what a file says.
    """
    reading = _Reading(trap)
    for _, tree in house_trees():
        reading.take(tree, house=True)
    own = reading.open_all(path) if path is not None else []
    for tree in own:
        reading.take(tree, house=False)
    result = reading.result
    house = tuple(file for file, _ in house_trees())
    result.book = Rulebook(tuple(reading.rules), house, tuple(tree.file for tree in own))
    return result


def own_trees(trap: Trap, path: Path) -> list[RulesTree]:
    """The laboratory's files that can be read, as they are written; nothing is settled."""
    return _Reading(trap).open_all(path)


class _Reading:
    """The rules met so far; names are compared over all files."""

    def __init__(self, trap: Trap) -> None:
        self.trap = trap
        self.rules: list[Rule] = []
        self.places: dict[str, Place] = {}
        self.result = ReadRules()

    def refuse(self, name: str, message: str, hint: str = "") -> None:
        """A mistake of the trap file's list; it points at the file as a whole."""
        self.result.mistakes.append(Mistake(name, Place(self.trap.file), message, hint))

    def open_all(self, trap_path: Path) -> list[RulesTree]:
        """Every file that the trap names and that may be read, in the order named."""
        found: dict[str, RulesTree] = {}
        for written in self.trap.site.rules:
            shown = beside(self.trap.file, written)
            if shown in found:
                self.refuse("name-reused", f"'{printable(written)}' is named twice")
                continue
            tree = self._open(written, shown, trap_path)
            if tree is not None:
                found[shown] = tree
        return list(found.values())

    def _open(self, written: str, shown: str, trap_path: Path) -> RulesTree | None:
        """Read one file of the laboratory, None when it may not or cannot be read."""
        why = why_not_relative(written)
        if why:
            self.refuse("import-refused", f"rules file '{printable(written)}': {why}", HINT)
            return None
        root = Path(os.path.realpath(trap_path)).parent
        try:
            path = Path(os.path.realpath(trap_path.parent / written, strict=True))
        except (OSError, ValueError):
            self.refuse("import-refused", f"there is no rules file '{printable(written)}'", HINT)
            return None
        if not path.is_relative_to(root):
            message = f"'{printable(written)}' lies outside the trap's folder"
            self.refuse("import-refused", message, HINT)
            return None
        content = read_bytes(path, shown)
        text = content if isinstance(content, Mistake) else decode(content, shown)
        if isinstance(content, Mistake) or isinstance(text, Mistake):
            assert isinstance(text, Mistake)
            self.result.mistakes.append(text)
            return None
        if len(content) > BYTES_MAX:
            message = f"'{printable(shown)}' has more than {BYTES_MAX // 10**6} MB"
            self.result.mistakes.append(Mistake("too-large", Place(shown), message))
            return None
        self.result.sources.append(SourceFile(shown, content))
        return parse_rules(text, shown)

    def take(self, tree: RulesTree, house: bool) -> None:
        """Settle the rules of one file."""
        self.result.mistakes.extend(tree.mistakes)
        for text in tree.rules:
            if self._is_new(text) and self._is_one_of_few(text):
                self.rules.append(settle_rule(text, self.trap, house, self.result.mistakes))

    def _is_new(self, text: RuleText) -> bool:
        first = self.places.setdefault(text.name.text, text.name.place)
        if first is text.name.place:
            return True
        message = f"there is a rule '{text.name.text}' already, {first.file} line {first.line}"
        hint = "every rule has a name of its own; those of the house cannot be replaced"
        self.result.mistakes.append(Mistake("name-reused", text.name.place, message, hint))
        return False

    def _is_one_of_few(self, text: RuleText) -> bool:
        if len(self.rules) < RULES_MAX:
            return True
        if len(self.rules) == RULES_MAX and len(self.places) == RULES_MAX + 1:
            message = f"more than {RULES_MAX} rules in all files together"
            self.result.mistakes.append(Mistake("too-large", text.name.place, message))
        return False
