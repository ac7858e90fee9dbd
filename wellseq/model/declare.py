"""The definitions of a file → its names: lets with values, clouds, patterns, procedures."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from fractions import Fraction

from wellseq.base.finding import Mistake
from wellseq.base.names import printable
from wellseq.base.place import Place
from wellseq.base.quantity import PLAIN, Quantity, Spread, kind_name, kind_of
from wellseq.model.headers import Header
from wellseq.model.scope import Defined, FileScope, Names
from wellseq.model.sequence import CloudDeclared
from wellseq.model.species import SPECIES, Species, ion, species
from wellseq.model.values import UNKNOWN, Unknown, Value, evaluate, needs
from wellseq.text.parse import parse
from wellseq.text.tree import Block, Call, Name, Operand, Statement

FIGURES = {"number": "", "radius": "m", "temperature": "K", "energy": "eV", "duration": "s"}
"""What is declared of a cloud, and the unit of its kind; all are above zero."""
ION_FIGURES = {"mass": "u", "charge": "e"}
ION = "ion"
COMMAND_LINE = "--let"
"""The file name that places bear in a value given on the command line."""


def declare(scope: FileScope, header: Header, replaced: Mapping[str, str]) -> None:
    """Enter every definition of a file and settle the lets and clouds, in the order of the text.

    `replaced` are the values given on the command line; each must name a let of this file.
    """
    made = [(item, _enter(scope, item)) for item in header.definitions]
    if header.sequence is not None and isinstance(header.sequence.operands[0], Name):
        scope.define(header.sequence.operands[0], "sequence")
    names = Names(scope)
    for item, defined in made:
        if defined is None:
            continue
        if defined.sort == "let" and item.value is not None:
            defined.value = _value(item.value, defined.name, names, replaced)
        elif defined.sort == "procedure":
            _check_parameters(scope, defined)
        elif defined.sort == "cloud" and not scope.used:
            defined.declared = _cloud(item, defined.name, names)
    for name in replaced:
        _must_be_let(name, scope)


def _enter(scope: FileScope, item: Statement) -> Defined | None:
    subject = item.operands[0]
    name = subject.name if isinstance(subject, Call) else subject
    if item.verb is None or not isinstance(name, Name):
        return None
    made = scope.define(name, item.verb.text)
    if made is not None:
        made.block = item.block()
        if isinstance(subject, Call):
            made.parameters = tuple(_parameters(scope, subject))
    return made


def _parameters(scope: FileScope, call: Call) -> list[Name]:
    good = []
    for argument in call.arguments:
        if isinstance(argument, Name):
            good.append(argument)
        else:
            message = "an argument of a procedure is declared by a name"
            scope.reporter.add(Mistake("syntax", argument.place, message, "procedure lift(height)"))
    return good


def _check_parameters(scope: FileScope, procedure: Defined) -> None:
    before: set[str] = set()
    for parameter in procedure.parameters:
        scope.free(parameter, "an argument", before)
        before.add(parameter.text)


def _value(written: Operand, name: str, names: Names, replaced: Mapping[str, str]) -> Value:
    value = evaluate(written, names)
    if name not in replaced:
        return value
    tree = parse(f"let {name} = {replaced[name]}", COMMAND_LINE)
    for mistake in tree.mistakes:
        names.scope.reporter.add(mistake)
    if tree.mistakes:
        return UNKNOWN
    given = tree.statements[0] if len(tree.statements) == 1 else None
    if not isinstance(given, Statement) or given.value is None or given.clauses or given.words:
        place = Place(COMMAND_LINE)
        return names.report("syntax", place, f"'{printable(replaced[name])}' is not one value")
    other = evaluate(given.value, names)
    if isinstance(other, Unknown) or isinstance(value, Unknown):
        return other
    if other.kind != value.kind:
        return names.report(
            "unit-mismatch",
            given.value.place,
            f"'{printable(name)}' is in {kind_name(value.kind)} in the file, and this is in "
            f"{kind_name(other.kind)}",
        )
    return other


def _must_be_let(name: str, scope: FileScope) -> None:
    found = scope.known.get(name)
    if found is not None and found.sort == "let" and found.scope is scope:
        return
    lets = [item.name for item in scope.own("let")]
    where = f"; it is {scope.whose(found)}" if found is not None else ""
    message = f"this file has no let '{printable(name)}' whose value could be replaced{where}"
    near = scope.reporter.near(name, lets, "let")
    scope.reporter.add(Mistake("unknown-name", Place(scope.file), message, near))


@dataclass(slots=True)
class _Figures:
    """What the block of a cloud says, by key."""

    values: dict[str, Spread]
    places: dict[str, Place]


def _cloud(item: Statement, name: str, names: Names) -> CloudDeclared | None:
    kind = item.clauses[0].operands[0]
    if [clause.word.text for clause in item.clauses] != ["is"] or len(item.clauses[0].operands) > 1:
        names.report(
            "syntax", item.clauses[0].place, "after a cloud's name stands `is` and its species"
        )
        return None
    is_ion = isinstance(kind, Name) and kind.text == ION
    figures = _figures(item.block(), {**FIGURES, **ION_FIGURES} if is_ion else FIGURES, names)
    found = _ion(figures, kind.place, names) if is_ion else _species(kind, names)
    if found is None or item.verb is None:
        return None
    return CloudDeclared(
        name, found, item.place, **{key: figures.values.get(key) for key in FIGURES}
    )


def _species(kind: Operand, names: Names) -> Species | None:
    if isinstance(kind, Name) and kind.text in SPECIES:
        return species(kind.text)
    said = f"'{printable(kind.text)}'" if isinstance(kind, Name) else "this"
    near = names.scope.reporter.near(said.strip("'"), (*SPECIES, ION), "species")
    names.report("unknown-name", kind.place, f"{said} is no species", near)
    return None


def _figures(block: Block | None, known: Mapping[str, str], names: Names) -> _Figures:
    figures = _Figures({}, {})
    for item in block.items if block is not None else ():
        verb = item.verb if isinstance(item, Statement) else None
        if not isinstance(item, Statement) or verb is None:
            names.report("syntax", item.place, "here stand figures of a cloud: number 6e7 ± 10 %")
        elif verb.text not in known:
            near = names.scope.reporter.near(verb.text, list(known), "figures of a cloud")
            said = f"'{printable(verb.text)}' is no figure of this cloud"
            names.report("unknown-name", verb.place, said, near)
        elif verb.text in figures.places:
            names.report("name-reused", verb.place, f"'{verb.text}' is given twice")
        else:
            figures.places[verb.text] = verb.place
            _figure(item, verb, known[verb.text], figures, names)
    return figures


def _figure(item: Statement, verb: Name, unit: str, figures: _Figures, names: Names) -> None:
    extra = (*item.clauses, *item.words, *item.allowances)
    if len(item.operands) != 1 or extra or item.value is not None or item.label is not None:
        names.report("syntax", verb.place, f"`{verb.text}` is followed by one value")
        return
    value = evaluate(item.operands[0], names)
    sign = "any" if verb.text == "charge" else "positive"
    if isinstance(value, Unknown) or not needs(
        value, kind_of(unit), sign, item.operands[0].place, f"`{verb.text}`", names
    ):
        return
    if isinstance(value, Quantity):
        value = Spread(value.value, Fraction(0), value.kind)
    figures.values[verb.text] = value


def _ion(figures: _Figures, place: Place, names: Names) -> Species | None:
    for key in ION_FIGURES:
        if key not in figures.places:
            names.report("syntax", place, f"an ion needs `{key}`", "mass 9.01 u; charge 1 e")
    mass, charge = figures.values.get("mass"), figures.values.get("charge")
    if mass is None or charge is None:
        return None
    if mass.half_width or charge.half_width or charge.value.denominator != 1:
        names.report("unit-mismatch", place, "mass and whole charge of an ion stand without ±")
        return None
    try:
        return ion(float(mass.value), int(charge.value))
    except ValueError as error:
        names.report("unit-mismatch", place, str(error))
        return None


def whole_number(operand: Operand, what: str, names: Names) -> int | None:
    """A count of at least one, None when a mistake was reported."""
    value = evaluate(operand, names)
    if isinstance(value, Unknown):
        return None
    if not needs(value, PLAIN, "positive", operand.place, what, names):
        return None
    if isinstance(value, Spread) or value.value.denominator != 1:
        names.report("unit-mismatch", operand.place, f"{what} needs a whole number")
        return None
    return int(value.value)
