"""A number → a valid sequence file for the trap `lagoon`, always the same for the same number.

A program is first a nested list of statements and then laid out with comments, blanks, semicolons
and line ends that mean nothing; some of its definitions stand in a second file.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from fractions import Fraction
from random import Random

from layout import Item, laid_out
from reach import GROUPS, MS, Reach
from statements import Writer


@dataclass
class Program:
    """The text of a sequence file and of the file that it uses, if any."""

    text: str
    used: str | None


def program(number: int, pace: Fraction = Fraction(1)) -> Program:
    """The program of a number; a pace below 1 makes its ramps faster than rows can follow."""
    writer = Writer(Random(f"lagoon {number}"), pace)
    rng = writer.rng
    shared, own = _definitions(writer)
    present = rng.sample(sorted(writer.clouds), rng.randint(0, 3))
    body: list[Item] = []
    if present and rng.random() < 0.5:
        lines = writer.pattern_lines(Reach(), writer.some(GROUPS), named=False)
        own["start"] = ("pattern start", lines, "")
        body += [f"begin with {cloud} in start at C{n + 6}" for n, cloud in enumerate(present)]
    else:
        body += [f"load {cloud} at C{n + 6} for {writer.time()}" for n, cloud in enumerate(present)]
    reach = Reach(clouds=tuple(present))
    body += writer.body(reach, 5)
    items = [*own.values(), (f"sequence run_{number}", body, "")]
    return _assembled(writer, shared, items)


def _definitions(writer: Writer) -> tuple[dict[str, Item], dict[str, Item]]:
    """Definitions for the used file and for the file itself, by name."""
    rng = writer.rng
    shared: dict[str, Item] = {}
    own: dict[str, Item] = {}
    for place in (shared, own):
        for number in range(rng.randint(0, 2)):
            name = rng.choice(["wall", "τοίχος", "pause"]) + str(number + 5 * (place is own))
            unit = "s" if name.startswith("pause") else "V"
            value = Fraction(rng.randint(4, 20), 4) * (1 if unit == "V" else MS)
            place[name] = f"let {name} = {writer.spell.value(value, unit)}"
            writer.spell.lets.setdefault(unit, {})[name] = value
        for number in range(rng.randint(0, 2)):
            name = f"shape{number + 5 * (place is own)}"
            groups = writer.some(GROUPS, 6)
            lines = writer.pattern_lines(Reach(), groups, named=True)
            place[name] = (f"pattern {name}", lines, "")
            writer.patterns[name] = tuple(groups)
        for number in range(rng.randint(0, 2)):
            name = f"proc{number + 5 * (place is own)}"
            place[name] = writer.procedure(name)
    return shared, own


def _assembled(writer: Writer, shared: dict[str, Item], items: list[Item]) -> Program:
    """Header, the definitions that something uses, the sequence; and the used file."""
    rng = writer.rng
    items = _used_only(items, writer)
    head: list[Item] = ["wellseq 1", 'trap "lagoon.trap.toml"']
    used = None
    if shared:
        head.append('use "shared.well"')
        used = laid_out(["wellseq 1", *shared.values()], rng)
    mentioned = _words(laid_out(items, Random(0)))
    for name, species in writer.clouds.items():
        if name in mentioned:
            number = writer.spell.value(Fraction(5000), "")
            facts: list[Item] = [f"number ({number}) ± 10 %", "temperature 300 K"]
            head.append((f"cloud {name} is {species}", facts, ""))
    return Program(laid_out([*head, *items], rng), used)


def _used_only(items: list[Item], writer: Writer) -> list[Item]:
    """Without the definitions that nothing mentions; each may be all that mentions another."""
    while True:
        texts = [laid_out([item], Random(0)) for item in items]
        kept = []
        for place, item in enumerate(items[:-1]):
            name = texts[place].split("(")[0].split("{")[0].split("=")[0].split()[1]
            if any(name in _words(text) for other, text in enumerate(texts) if other != place):
                kept.append(item)
        if len(kept) == len(items) - 1:
            return items
        items = [*kept, items[-1]]


def _words(text: str) -> set[str]:
    return set(re.findall(r"\w+", re.sub("#.*", "", text)))
