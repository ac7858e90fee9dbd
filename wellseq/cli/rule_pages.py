"""An interlock rule's name → its text and its comment, from the house's files and a trap's own."""

from __future__ import annotations

from wellseq.cli.members import TYPE_CHECKING

if TYPE_CHECKING:
    from wellseq.text.rules_tree import RulesTree, RuleText

PARAGRAPH = 78


class NoTrap(Exception):
    """A trap file that was named cannot be read; the sentence says why."""


def rules_known(trap_file: str | None) -> dict[str, tuple[RuleText, bool]]:
    """Name → rule as written, and whether it comes with wellseq.

    With a trap file also the rules that it names.  Raises NoTrap when that cannot be read.
    """
    from wellseq.model.rule_files import house_trees

    found = {rule.name.text: (rule, True) for _, tree in house_trees() for rule in tree.rules}
    for tree in _own(trap_file) if trap_file is not None else ():
        for rule in tree.rules:
            found.setdefault(rule.name.text, (rule, False))
    return found


def _own(trap_file: str) -> list[RulesTree]:
    from pathlib import Path

    from wellseq.model.rule_files import own_trees
    from wellseq.model.trap_file import read_trap

    path = Path(trap_file)
    trap, mistakes = read_trap(path, path.as_posix())
    if trap is None:
        first = mistakes[0]
        raise NoTrap(f"{first.place}: {first.message}")
    return own_trees(trap, path)


def page(rule: RuleText, house: bool) -> str:
    """What is said of a rule: where it comes from, its text, its comment."""
    from textwrap import wrap

    place = rule.place
    origin = "comes with wellseq" if house else "is one of the laboratory's own"
    waivable = "It may never be allowed." if rule.never_waivable else "A step may allow a breach."
    head = f"# {rule.name.text}\n\nThis interlock rule {origin}: {place.file}, line {place.line}."
    words, _, sentence = rule.text.partition(":")
    text = "\n".join(f"    {line}" for line in wrap(f"{words}:", PARAGRAPH))
    said = "\n".join(f"      {line}" for line in wrap(sentence.strip(), PARAGRAPH))
    comment = "\n".join(wrap(rule.comment or "No comment stands above it.", PARAGRAPH))
    return f"{head} {waivable}\n\n{text}\n{said}\n\n{comment}"
