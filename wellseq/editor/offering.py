"""The text before a spot → what may stand there: verbs, clauses, names, units, states."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import dataclass

from wellseq.base.quantity import UNITS
from wellseq.checks.judging import check_names, waivable
from wellseq.editor.documents import Documents
from wellseq.editor.names import Symbol
from wellseq.model.headers import EXAMPLES, INSIDE, OUTSIDE
from wellseq.model.library import BROUGHT
from wellseq.model.operands import Slot
from wellseq.model.reader import Signature, signature
from wellseq.model.species import SPECIES
from wellseq.model.steps import step_class, verbs
from wellseq.model.trap import Switch, Trap
from wellseq.text.mistakes import Mistakes, ReadingStops
from wellseq.text.scan import scan
from wellseq.text.split import GOES_ON_AFTER, GOES_ON_BEFORE
from wellseq.text.tokens import Token
from wellseq.text.tree import Number

FIGURES = ("number", "radius", "temperature", "energy", "duration")
_SORTS = {"quantity": ("let", "argument", "each"), "spread": ("let",), "pattern": ("pattern",)}


@dataclass(frozen=True, slots=True)
class Offer:
    """A word that may stand there, what sort of word it is, and a few words on it."""

    word: str
    sort: str
    says: str = ""


def offers(documents: Documents, path: str, line: int, column: int) -> list[Offer]:
    """Everything that may stand at a spot, each word once, in order of likelihood."""
    text = documents.text(path) or ""
    tokens, depth, outer = _before(text, path, line, column)
    found = _Offering(documents, path, tokens, depth, outer).all()
    return list({offer.word: offer for offer in found}.values())


def _before(text: str, path: str, line: int, column: int) -> tuple[list[Token], int, list[Token]]:
    """The tokens of the statement under the pen, how deep it stands, the statement around it.

    The word that is being written is left out: the editor matches it.
    """
    stack: list[list[Token]] = []
    current: list[Token] = []
    newline = False
    for token in _scanned(text, path):
        if token.line > line or (token.line == line and token.column >= column):
            break
        being_written = token.line == line and token.end_column >= column
        if being_written and token.type in ("NAME", "CLAUSE", "BECAUSE", "_ALLOW", "FINDING"):
            if _ends(current, token, newline):
                current = []
            newline = False
            break
        if token.type == "NEWLINE":
            newline = True
            continue
        if _ends(current, token, newline):
            current = []
        newline = False
        if token.type == "LBRACE":
            stack.append(current)
            current = []
        elif token.type == "RBRACE":
            current = stack.pop() if stack else []
        elif token.type == "SEMICOLON":
            current = []
        else:
            current.append(token)
    if newline and current and current[-1].type not in GOES_ON_AFTER and not _is_label(current):
        current = []
    return current, len(stack), stack[-1] if stack else []


def _scanned(text: str, path: str) -> Iterator[Token]:
    try:
        yield from scan(text.removeprefix("\ufeff"), Mistakes(path))
    except ReadingStops:
        return


def _is_label(tokens: list[Token]) -> bool:
    return len(tokens) == 1 and tokens[0].type == "STRING"


def _ends(current: list[Token], token: Token, newline: bool) -> bool:
    """Whether a new line before this token ends the statement."""
    if not newline or not current or current[-1].type in GOES_ON_AFTER or _is_label(current):
        return False
    return token.type not in GOES_ON_BEFORE


class _Offering:
    """One question: the statement so far, and everything that has a name."""

    def __init__(
        self, documents: Documents, path: str, tokens: list[Token], depth: int, outer: list[Token]
    ) -> None:
        if tokens and tokens[0].type == "STRING":
            tokens = tokens[1:]
        self.documents, self.path = documents, path
        self.tokens, self.depth, self.outer = tokens, depth, outer
        self.trap: Trap | None = documents.trap(path)

    def all(self) -> Iterator[Offer]:
        """Offers for the place after the tokens."""
        last = self.tokens[-1] if self.tokens else None
        around = str(self.outer[0].value) if self.outer else ""
        if around in ("cloud",):
            yield from (Offer(word, "property") for word in FIGURES if last is None)
        elif around == "pattern" or self._in_pattern():
            yield from self._electrodes() if not self._after_sign() else self._values()
            yield Offer("others", "keyword", "every electrode that is not named")
        elif last is None:
            yield from self._beginnings()
        elif isinstance(last.value, Number) and not last.value.unit:
            yield from (Offer(word, "unit") for word in UNITS)
        elif last.type == "_ALLOW":
            yield from (Offer(name, "type") for name in check_names() if waivable(name))
        else:
            yield from self._within(str(self.tokens[0].value))

    def _in_pattern(self) -> bool:
        """Whether the braces around are a pattern written in place, as in `ramp { … }`."""
        kind = step_class(str(self.outer[0].value)) if self.outer else None
        return kind is not None and not kind.BRACED

    def _after_sign(self) -> bool:
        return any(token.type == "_EQUALS" for token in self.tokens)

    def _beginnings(self) -> Iterator[Offer]:
        around = str(self.outer[0].value) if self.outer else ""
        braced = step_class(around)
        if self.depth == 0:
            yield from (Offer(word, "keyword", EXAMPLES[word]) for word in OUTSIDE)
        elif braced is not None and braced.BRACED:
            yield from self._clauses(signature(braced), ())
        elif around == "alongside":
            yield Offer("lane", "keyword", EXAMPLES["lane"])
        else:
            yield from (Offer(verb, "keyword", _says(verb)) for verb in verbs())
            yield from (Offer(word, "keyword", EXAMPLES[word]) for word in INSIDE)

    def _within(self, verb: str) -> Iterator[Offer]:
        """What may go on a statement that has begun with a verb."""
        if verb in EXAMPLES:
            yield from self._special(verb)
            return
        kind = step_class(verb)
        if kind is None:
            around = step_class(str(self.outer[0].value)) if self.outer else None
            if around is not None and around.BRACED:
                yield from self._after(signature(around), self.tokens)
            return
        yield from self._after(signature(kind), self.tokens[1:])

    def _special(self, verb: str) -> Iterator[Offer]:
        if verb == "do":
            yield from self._symbols("procedure")
        elif verb == "cloud" and self.tokens[-1].value == "is":
            yield from (Offer(name, "type") for name in (*SPECIES, "ion"))
        elif verb == "cloud":
            yield Offer("is", "keyword")
        elif verb in ("let", "each") and len(self.tokens) > 1:
            yield from self._values()

    def _after(self, takes: Signature, tokens: list[Token]) -> Iterator[Offer]:
        """Offers after the verb: what its last clause or next subject wants, then other clauses."""
        words = [str(token.value) for token in tokens if token.type in ("CLAUSE", "BECAUSE")]
        last = tokens[-1] if tokens else None
        if last is not None and last.type in ("CLAUSE", "_COMMA", "_DOTS"):
            slot = takes.clauses.get(words[-1]) if words else None
            subject = takes.subjects[-1] if takes.subjects and not words else None
            yield from self._for(slot or subject, tokens)
            return
        subjects = [token for token in tokens if token.type in ("NAME", "NUMBER", "STRING")]
        if not words and len(subjects) < len(takes.subjects):
            yield from self._for(takes.subjects[len(subjects)], tokens)
            return
        yield from self._clauses(takes, words)

    def _clauses(self, takes: Signature, said: Iterable[str]) -> Iterator[Offer]:
        for word in (*takes.clauses, *takes.words):
            if word not in said:
                yield Offer(word, "keyword")
        yield Offer("allow", "keyword", 'allow NAME because "reason"')

    def _for(self, slot: Slot | None, tokens: list[Token]) -> Iterator[Offer]:
        """What a field takes."""
        what = slot.takes.what if slot is not None else ""
        if what in ("electrode", "electrodes"):
            yield from self._electrodes()
        elif what == "cloud":
            yield from self._symbols("cloud", "argument")
        elif what == "choice" and slot is not None:
            yield from (Offer(word, "keyword") for word in slot.choices)
        elif what == "line" and self.trap is not None:
            yield from (Offer(one.name, "line", ", ".join(one.states)) for one in self.trap.lines)
        elif what == "state" and self.trap is not None:
            names = {str(token.value) for token in tokens}
            states = [one.states for one in self.trap.lines if one.name in names]
            yield from (Offer(state, "state") for group in states for state in group)
        elif what == "trigger" and self.trap is not None:
            yield from (Offer(one.name, "trigger") for one in self.trap.triggers)
        elif what == "level" and self.trap is not None:
            yield from self._levels(self.trap)
            yield from self._values()
        elif what == "label":
            labels = self.documents.index(self.path).labels
            yield from (Offer(f'"{label}"', "text") for label in labels)
        elif what in _SORTS:
            yield from self._symbols(*_SORTS[what])

    def _levels(self, trap: Trap) -> Iterator[Offer]:
        for output in trap.outputs:
            if isinstance(output, Switch):
                yield from (Offer(name, "output") for name in output.passes)

    def _electrodes(self) -> Iterator[Offer]:
        for one in self.trap.electrodes if self.trap is not None else ():
            yield Offer(one.name, "electrode", f"on {one.output}")
        yield from self._symbols("argument", "each")

    def _values(self) -> Iterator[Offer]:
        yield from self._symbols("let", "argument", "each")

    def _symbols(self, *sorts: str) -> Iterator[Offer]:
        """Names of this file and of those that it uses."""
        found: list[Symbol] = list(self.documents.index(self.path).symbols)
        for file in self.documents.uses(self.path):
            found += [one for one in self.documents.index(file).symbols if one.sort in BROUGHT]
        for symbol in found:
            if symbol.sort in sorts:
                yield Offer(symbol.name, symbol.sort)


def _says(verb: str) -> str:
    kind = step_class(verb)
    return " ".join((kind.__doc__ or "").split("\n\n")[0].split()) if kind is not None else ""
