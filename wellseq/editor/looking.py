"""A spot in a file → what is known about what stands there, as Markdown."""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.base.place import Place
from wellseq.base.quantity import QuantityError, kind_name, unit_of
from wellseq.checks.judging import check_names
from wellseq.checks.numbers import amount
from wellseq.editor.documents import Documents, Looked
from wellseq.editor.going import definition
from wellseq.editor.times import spans_of
from wellseq.emit.about import about
from wellseq.emit.outline import outline
from wellseq.model.headers import EXAMPLES
from wellseq.model.steps import step_class
from wellseq.model.trap import Converter, Trap
from wellseq.review.picture import STATED
from wellseq.text.mistakes import Mistakes
from wellseq.text.scan import scan
from wellseq.text.tokens import Token
from wellseq.text.tree import Number, Statement

HARDWARE = ("electrode", "output", "line", "trigger")
Said = tuple[str, Place]


def hover(documents: Documents, path: str, line: int, column: int) -> Said | None:
    """What to say at a spot, and the stretch it is about; None where there is nothing to say."""
    token = _token_at(documents.text(path) or "", path, line, column)
    if token is None:
        return None
    text = "\n\n".join(part for part in _parts(documents, path, token) if part)
    return (text, token.place) if text else None


def _token_at(text: str, path: str, line: int, column: int) -> Token | None:
    for token in scan(text.removeprefix("\ufeff"), Mistakes(path)):
        if token.line > line:
            break
        inside = token.column <= column < token.end_column
        if token.line == line and token.type != "NEWLINE" and inside:
            return token
    return None


def _parts(documents: Documents, path: str, token: Token) -> Iterator[str]:
    if isinstance(token.value, Number):
        yield _number(token.value)
        return
    if token.type not in ("NAME", "CLAUSE", "BECAUSE", "_ALLOW", "FINDING"):
        return
    word = str(token.value)
    index = documents.index(path)
    statement = index.statement_at(token.line, token.column)
    verb = statement.verb if isinstance(statement, Statement) else None
    if verb is not None and verb.place == token.place:
        yield from _verb(documents, path, word, statement)
    elif token.type == "FINDING" or word in check_names():
        yield f"**{word}**: {about(word).says}"
    elif token.type == "NAME":
        yield from _name(documents, path, token)
    elif verb is not None and (kind := step_class(verb.text)) is not None:
        yield _doc(kind)


def _number(number: Number) -> str:
    """A quantity in base units."""
    try:
        factor, kind = unit_of(number.unit)
    except QuantityError:
        return ""
    value = float(number.value * factor)
    return f"{value:.12g} {kind_name(kind)}" if number.unit else f"{value:.12g}, a plain number"


def _doc(kind: type) -> str:
    return " ".join((kind.__doc__ or "").split("\n\n")[0].split())


def _verb(documents: Documents, path: str, word: str, statement: object) -> Iterator[str]:
    kind = step_class(word)
    if kind is not None:
        yield _doc(kind)
    elif word in EXAMPLES:
        yield f"`{EXAMPLES[word]}`"
    looked = documents.looked.get(path)
    current = looked is not None and looked.text == documents.texts.get(path)
    if looked is not None and current and isinstance(statement, Statement):
        yield "\n".join(forecast(looked, statement.place))


def forecast(looked: Looked, place: Place) -> Iterator[str]:
    """When a step is played, and what stands for every cloud then, a line of Markdown each."""
    spans = spans_of(looked).get(place, [])
    if not spans:
        return
    block, first = spans[0]
    begins, lasts = float(first.start_s), float(first.end_s - first.start_s)
    times = f", {len(spans)} times" if len(spans) > 1 else ""
    name = looked.case.block_name(block)
    yield f"- begins at {amount(begins, 's')} of block {name}, lasts {amount(lasts, 's')}{times}"
    steps = [looked.picture.steps[span.number] for _, span in spans]
    for cloud in dict.fromkeys(cloud for step in steps for cloud in step.depth_V):
        least = min(step.depth_V[cloud] for step in steps if cloud in step.depth_V)
        yield f"- {cloud}: {amount(least, 'V')} deep at least"
    for (cloud, quantity), value in steps[-1].stated.items():
        named = cloud in steps[-1].words.split()
        if named or any(cloud in step.depth_V for step in steps):
            yield f"- {cloud}: {quantity} {amount(value, STATED[quantity])}, as stated"


def _name(documents: Documents, path: str, token: Token) -> Iterator[str]:
    found = definition(documents, path, token.line, token.column)
    trap = documents.trap(path)
    if found is not None and not found[0].file.endswith(".toml"):
        place = found[1]
        source = documents.text(place.file) or ""
        written = outline(source, place.file).at(place)
        text = written.text if written is not None else ""
        inner = written is not None and written.verb in ("pattern", "cloud")
        yield f"```\n{_whole(source, place) if inner else text}\n```"
    elif trap is not None:
        yield from _hardware(trap, str(token.value))


def _whole(source: str, place: Place) -> str:
    """A definition as it is written, cut where it gets long."""
    lines = source.removeprefix("\ufeff").replace("\r\n", "\n").replace("\r", "\n").split("\n")
    return "\n".join(lines[place.line - 1 : place.end_line][:12])


def _hardware(trap: Trap, name: str) -> Iterator[str]:
    for one in trap.electrodes:
        if one.name == name:
            output = trap.output(one.output)
            reach = ""
            if isinstance(output, Converter):
                reach = ", " + " to ".join(amount(end, "V") for end in output.reach_V)
            ends = f"{amount(one.from_m, 'm')} to {amount(one.to_m, 'm')}"
            yield f"electrode **{name}**: {ends}, on output {one.output}{reach}"
    for line in trap.lines:
        if line.name == name:
            yield f"line **{name}**: {', '.join(line.states)}; begins {line.initial}"
    for trigger in trap.triggers:
        if trigger.name == name:
            wait = trigger.within_s
            longest = amount(float(wait), "s") if wait is not None else "as each step says"
            yield f"trigger **{name}**: waits at most {longest}"
    for output in trap.outputs:
        if output.name == name:
            yield f"output **{name}** of {', '.join(trap.electrodes_of(name)) or 'no electrode'}"
