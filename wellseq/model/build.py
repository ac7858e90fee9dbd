"""A tree of a sequence file → `Sequence`: header, trap, names, steps, all mistakes at once."""

from __future__ import annotations

import gc
import os
from collections.abc import Collection, Iterator, Mapping
from contextlib import contextmanager
from dataclasses import dataclass, replace
from fractions import Fraction
from pathlib import Path

from wellseq.base.finding import Mistake
from wellseq.base.names import nearest, normal, printable
from wellseq.base.place import Place
from wellseq.model.declare import declare
from wellseq.model.expand import Expansion
from wellseq.model.headers import EXAMPLES, Header, read_header
from wellseq.model.library import Chain, Library, beside, why_not_relative
from wellseq.model.patterns import settled
from wellseq.model.plan import STEPS_MAX, Body, Pick, Planner, TooLarge
from wellseq.model.reporter import Reporter
from wellseq.model.rule_files import read_rules
from wellseq.model.rulebook import Rulebook
from wellseq.model.scope import SORTS, FileScope, Names
from wellseq.model.sequence import CloudDeclared, Sequence, SourceFile
from wellseq.model.size import LeastSize
from wellseq.model.steps import verbs
from wellseq.model.trap import Trap
from wellseq.model.trap_file import read_trap
from wellseq.model.usage import names_in, statements_in
from wellseq.model.values import UNKNOWN
from wellseq.text.tree import Block, Name, Statement, Tree


@dataclass(frozen=True, slots=True)
class Built:
    """What came of a file.

    `sequence` is None for a file that holds none, which is a library of patterns and procedures,
    and where the trap could not be read; with mistakes it lacks the steps that have them.
    `sources` are all files that were read: this one, the trap's, rules, used ones.  `rules` are the
    interlock rules for this trap, None where there is no trap.
    """

    sequence: Sequence | None
    trap: Trap | None
    mistakes: tuple[Mistake, ...]
    sources: tuple[SourceFile, ...]
    rules: Rulebook | None = None


def build(
    tree: Tree,
    path: Path,
    *,
    known_findings: Collection[str],
    lets: Mapping[str, str] | None = None,
    each: Pick = None,
    content: bytes | None = None,
) -> Built:
    """Settle a file that was read from `path`.

    `known_findings` are the names that `allow` may give.  `lets` replace values of the file, as
    written on a command line.  `each` plays one value of an `each` only, counted from 1: of the
    one that sets that name, or of the only one.  `content` are the bytes of the file, as read.
    Never raises for what a file says.
    """
    with _quiet_collector():
        return _Build(tree, path, known_findings, lets or {}, each, content).run()


@contextmanager
def _quiet_collector() -> Iterator[None]:
    """No garbage collection meanwhile: steps are no garbage, and looking makes time quadratic."""
    was_on = gc.isenabled()
    gc.disable()
    try:
        yield
    finally:
        if was_on:
            gc.enable()


class _Build:
    """One run of `build`."""

    def __init__(
        self,
        tree: Tree,
        path: Path,
        known_findings: Collection[str],
        lets: Mapping[str, str],
        each: Pick,
        content: bytes | None,
    ) -> None:
        self.tree = tree
        self.path = path
        self.lets = {normal(name): value for name, value in lets.items()}
        self.reporter = Reporter()
        self.planner = Planner(self.reporter, known_findings, each)
        self.known_findings = known_findings
        if content is None:
            content = tree.source.encode("utf-8", "surrogatepass")
        self.sources = [SourceFile(tree.file, content)]
        self.rules: Rulebook | None = None

    def run(self) -> Built:
        """Header, trap, names, steps; then what only the whole file can tell."""
        for mistake in self.tree.mistakes:
            self.reporter.add(mistake)
        header = read_header(self.tree, self.reporter)
        trap, trap_path = self._trap(header)
        scope = self._names(header, trap, trap_path)
        body = self._plan(header, scope)
        items = Expansion(self.reporter).play(body) if body is not None else ()
        self._look_at_the_rest(header, scope)
        mistakes = self.reporter.listed([source.shown for source in self.sources])
        sources = tuple(self.sources)
        if trap is None or header.sequence is None:
            return Built(None, trap, mistakes, sources, self.rules)
        sequence = Sequence(
            name=_name(header.sequence),
            file=self.tree.file,
            trap=trap,
            clouds=_clouds(scope),
            items=items,
            allowances=tuple(self.planner.allowed.values()),
            lets=self.lets,
            sources=sources,
            mistakes=mistakes,
            steps_written=sum(
                1
                for item in statements_in(self.tree.statements)
                if item.verb is not None and item.verb.text in verbs()
            ),
            end=_end(header.sequence),
            each_values=self._each_values(),
        )
        return Built(sequence, trap, mistakes, sources, self.rules)

    def _trap(self, header: Header) -> tuple[Trap | None, Path | None]:
        if header.trap is None:
            if self.tree.statements and not len(self.reporter):
                hint = "a file that others use needs none, but cannot be checked by itself"
                message = f"this file names no trap; after the version stands: {EXAMPLES['trap']}"
                self.reporter.add(Mistake("syntax", self.tree.statements[0].place, message, hint))
            return None, None
        why = why_not_relative(header.trap.text)
        if why:
            self.reporter.add(Mistake("import-refused", header.trap.place, why, EXAMPLES["trap"]))
            return None, None
        path = self.path.parent / header.trap.text
        trap, mistakes = read_trap(path, beside(self.tree.file, header.trap.text))
        for mistake in mistakes:
            # What cannot be opened has no place of its own: the mistake is where it is named.
            unreadable = mistake.name == "unreadable-file"
            self.reporter.add(replace(mistake, place=header.trap.place) if unreadable else mistake)
        if trap is None:
            return None, None
        self.sources.append(SourceFile(trap.file, trap.source.encode("utf-8")))
        read = read_rules(trap, path)
        for mistake in read.mistakes:
            self.reporter.add(mistake)
        self.sources.extend(read.sources)
        self.rules = read.book
        return trap, Path(os.path.realpath(path))

    def _names(self, header: Header, trap: Trap | None, trap_path: Path | None) -> FileScope:
        scope = FileScope(
            self.tree.file,
            trap,
            self.reporter,
            unread=self.tree.unread,
            spoilt=tuple(mistake.place for mistake in self.tree.mistakes),
        )
        here = Path(os.path.realpath(self.path))
        root = trap_path.parent if trap_path is not None else here.parent
        library = Library(trap, trap_path, root, self.reporter, self.sources)
        library.bring_all(header, scope, Chain((here,), (self.tree.file,)))
        declare(scope, header, self.lets)
        return scope

    def _plan(self, header: Header, scope: FileScope) -> Body | None:
        """The sequence's steps, None when there are none or more than can be played."""
        block = header.sequence.operands[1] if header.sequence is not None else None
        if header.sequence is None or not isinstance(block, Block):
            return None
        self.planner.complete = not len(self.reporter)
        size = LeastSize(single=self.planner.pick is not None).of(block, scope)
        if size > STEPS_MAX:
            self._too_large(header.sequence, f"at least {_number(size)}")
            return None
        try:
            body = self.planner.body(block, Names(scope))
        except TooLarge:
            return None
        self._look_at_the_pick()
        if body.size > STEPS_MAX:
            self._too_large(header.sequence, _number(body.size))
            return None
        return body

    def _too_large(self, sequence: Statement, count: str) -> None:
        message = f"this sequence plays {count} steps, and at most {STEPS_MAX:,} can be played"
        self.reporter.add(Mistake("too-large", sequence.operands[0].place, message))

    def _look_at_the_pick(self) -> None:
        """One value of an `each` can be asked for only where there is one."""
        pick, names = self.planner.pick, [name for name, _ in self.planner.each.values()]
        if pick is None or (names if isinstance(pick, int) else pick[0] in names):
            return
        said = "" if isinstance(pick, int) else f" that goes through '{printable(pick[0])}'"
        near = self.reporter.near(pick[0], names, "each") if isinstance(pick, tuple) else ""
        message = f"this file plays no `each`{said}"
        self.reporter.add(Mistake("unknown-name", Place(self.tree.file), message, near))

    def _look_at_the_rest(self, header: Header, scope: FileScope) -> None:
        """Patterns and procedures that nothing called, and names that nothing uses."""
        for pattern in scope.own("pattern"):
            settled(pattern)
        other = Planner(self.reporter, self.known_findings, complete=self.planner.complete)
        for procedure in scope.own("procedure"):
            if procedure in self.planner.called or procedure.block is None:
                continue
            unknown = {parameter.text: UNKNOWN for parameter in procedure.parameters}
            try:
                other.body(procedure.block, Names(scope, unknown))
            except TooLarge:
                break
        if header.sequence is not None and not self.tree.mistakes:
            self._unused(scope)

    def _unused(self, scope: FileScope) -> None:
        used, hints = names_in(self.tree.statements), self.reporter.hints()
        for item in scope.own("let", "pattern", "procedure", "cloud"):
            if item.place is None or item.name in used:
                continue
            if nearest(item.name, (item.name,)) not in hints:  # else it is used, and misspelt
                message = f"nothing uses {SORTS[item.sort].split()[1]} '{printable(item.name)}'"
                self.reporter.add(Mistake("name-unused", item.place, message, "leave it out"))

    def _each_values(self) -> tuple[Fraction | str, ...]:
        pick = self.planner.pick
        for name, values in self.planner.each.values():
            if not isinstance(pick, tuple) or pick[0] == name:
                return values
        return ()


def _name(sequence: Statement) -> str:
    subject = sequence.operands[0]
    return subject.text if isinstance(subject, Name) else ""


def _number(count: int) -> str:
    return f"{count:,}" if count < 10**12 else "10^12 or more"


def _clouds(scope: FileScope) -> dict[str, CloudDeclared]:
    declared = {item.name: item.declared for item in scope.own("cloud")}
    return {name: cloud for name, cloud in declared.items() if cloud is not None}


def _end(sequence: Statement) -> Place:
    """The brace that closes the sequence."""
    place = sequence.place
    start = max(1, place.end_column - 1)
    return Place(place.file, place.end_line, start, place.end_line, place.end_column)
