"""A number → a valid sequence file for the trap `lagoon`, always the same for the same number.

Voltages stay within ±12 V and ramps are slow enough to be followed, so that whatever differs later
is a mistake and no limit of the hardware.  A program is first a nested list of statements and then
laid out with comments, blanks, semicolons and line ends that mean nothing.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Collection
from dataclasses import dataclass, field
from fractions import Fraction
from random import Random

from layout import Item, laid_out
from spelling import Speller

GROUPS: dict[str, tuple[str, ...]] = {
    "far": ("G1",),
    "a1": ("C1",),
    "a2": ("C2",),
    "twin": ("C3", "C4"),
    "fine": ("R5",),
    "drawn": ("C6",),
    "pair": ("C7", "C8"),
    "near": ("C9", "G2"),
}
"""What must move together → the electrodes that may be named for it."""
STEEP = ("twin", "drawn", "near")
"""Groups on cards that draw lines: their straight ramps may be fast."""
SPANS = {
    "C1..C9": ("a1", "a2", "twin", "fine", "drawn", "pair", "near"),
    "C1..C4": ("a1", "a2", "twin"),
    "C6..C8": ("drawn", "pair"),
    "C2, C1": ("a1", "a2"),
}
"""Targets that take several groups at once."""
STATES = {"shutter": ("shut", "open"), "lamp": ("off", "on", "dim")}
MS = Fraction(1, 1000)


@dataclass
class Reach:
    """What the statements of one body may touch, and the names that it sees besides."""

    groups: tuple[str, ...] = tuple(GROUPS)
    lines: tuple[str, ...] = tuple(STATES)
    clouds: tuple[str, ...] = ()
    volts: tuple[str, ...] = ()
    times: tuple[str, ...] = ()
    rings: tuple[str, ...] = ()
    in_lane: bool = False
    in_procedure: bool = False
    depth: int = 0

    def narrowed(self, **changes: object) -> Reach:
        """The same with some changes, one level deeper."""
        return Reach(**{**self.__dict__, "depth": self.depth + 1, **changes})


@dataclass
class Called:
    """A procedure: what its parameters take, and what it touches."""

    name: str
    takes: tuple[str, ...]
    reach: Reach
    steps: int


@dataclass
class Program:
    """The text of a sequence file and of the file that it uses, if any."""

    text: str
    used: str | None


class Writer:
    """Writes one program."""

    def __init__(self, number: int) -> None:
        self.rng = Random(f"lagoon {number}")
        self.spell = Speller(self.rng)
        self.procedures: list[Called] = []
        self.patterns: dict[str, tuple[str, ...]] = {}
        self.named: set[str] = set()
        self.labels = 0
        self.clouds = {"coolant": "electron", "bunch": "antiproton", "Прибыль": "positron"}

    def volts(self, reach: Reach | None = None) -> str:
        """A voltage within ±12 V."""
        if reach and reach.volts and self.rng.random() < 0.6:
            name = self.rng.choice(reach.volts)
            forms = ["{}", "-{}", "{} / 2", "2 * {}", "{} + 1.5 V", "3 V - {}", "({})", "-({} / 4)"]
            return self.rng.choice(forms).format(name)
        return self.spell.value(Fraction(self.rng.randint(-4800, 4800), 400), "V")

    def time(self, reach: Reach | None = None) -> str:
        """A duration of 2 ms to 12 ms, now and then on nobody's clock."""
        if reach and reach.times and self.rng.random() < 0.5:
            name = self.rng.choice(reach.times)
            return self.rng.choice(["{}", "{} + 1 ms", "2 * {}", "({})"]).format(name)
        return self.spell.value(self.duration(), "s")

    def duration(self) -> Fraction:
        """Seconds: mostly whole clocks of all outputs, else of some or of none."""
        kind = self.rng.random()
        if kind < 0.6:
            return Fraction(self.rng.randint(1000, 6000), 500_000)
        if kind < 0.8:
            return Fraction(self.rng.randint(200_000, 1_200_000), 10**8)
        return Fraction(self.rng.randint(2000, 12_000), 10**6) + Fraction(self.rng.randint(1, 6), 7 * 10**6)

    def pattern_lines(self, reach: Reach, groups: Collection[str], *, named: bool) -> list[Item]:
        """Assignments for these groups; a named pattern sees no arguments."""
        inner = Reach() if named else reach
        groups = self.rng.sample(sorted(groups), len(groups))
        lines: list[Item] = []
        for span, covered in SPANS.items():
            if set(covered) <= set(groups) and self.rng.random() < 0.4:
                lines.append(f"{span} = {self.volts(inner)}")
                groups = [group for group in groups if group not in covered]
        for group in groups:
            names = list(GROUPS[group])
            if len(names) > 1 and self.rng.random() < 0.3:
                names = names[:1]
            target = ", ".join(names)
            if names in (["C3", "C4"], ["C7", "C8"]) and self.rng.random() < 0.6:
                target = "..".join(names)
            lines.append(f"{target} = {self.volts(inner)}")
        return lines

    def some(self, among: Collection[str], most: int = 4) -> list[str]:
        """A few of these, at least one."""
        among = sorted(among)
        return self.rng.sample(among, self.rng.randint(1, min(most, len(among))))

    def pattern(self, reach: Reach) -> str | tuple[str, list[Item]]:
        """A pattern in place, or the name of one."""
        known = [name for name, groups in self.patterns.items() if set(groups) <= set(reach.groups)]
        if known and self.rng.random() < 0.4:
            name = self.rng.choice(known)
            self.named.add(name)
            return name
        lines = self.pattern_lines(reach, self.some(reach.groups), named=False)
        everything = len(reach.groups) == len(GROUPS)
        lines += self._others(lines, reach) if everything else []
        if self.rng.random() < 0.1 and not any(str(line).startswith("others") for line in lines):
            lines.append("others keep")
        return ("", lines)

    def _others(self, lines: list[Item], reach: Reach) -> list[Item]:
        """`others = V`, where no output would be told two things."""
        halves = [line for line in lines if str(line).split(" =")[0] in ("C3", "C7")]
        return [] if halves or self.rng.random() > 0.3 else [f"others = {self.volts(reach)}"]

    def ramp(self, reach: Reach) -> list[Item]:
        """A ramp, straight or smooth; fast ones only on cards that can draw them."""
        steep = [group for group in STEEP if group in reach.groups]
        if steep and self.rng.random() < 0.15:
            lines = self.pattern_lines(reach, self.some(steep), named=False)
            time = self.spell.value(Fraction(self.rng.randint(2000, 50_000), 10**8), "s")
            return [("ramp", lines, f" over {time}")]
        smoothly = self.rng.choice(["", " smoothly"])
        return [self._with_pattern("ramp ", self.pattern(reach), f" over {self.time(reach)}{smoothly}")]

    def _with_pattern(self, head: str, pattern: str | tuple[str, list[Item]], tail: str) -> Item:
        if isinstance(pattern, str):
            return f"{head}{pattern}{tail}"
        return (head.rstrip(), pattern[1], tail)

    def hold(self, reach: Reach) -> list[Item]:
        """hold, or a cool, which holds too."""
        if reach.clouds and self.rng.random() < 0.3:
            cooled = self.rng.choice(reach.clouds)
            others = [cloud for cloud in reach.clouds if cloud != cooled]
            using = f" with {self.rng.choice(others)}" if others and self.rng.random() < 0.5 else ""
            return [f"cool {cooled}{using} for {self.time(reach)}"]
        return [f"hold for {self.time(reach)}"]

    def setting(self, reach: Reach) -> list[Item]:
        """A line is set, perhaps expected to be so, and time passes."""
        if not reach.lines:
            return self.hold(reach)
        line = self.rng.choice(reach.lines)
        state = self.rng.choice(STATES[line])
        items: list[Item] = [f"set {line} {state}"]
        if self.rng.random() < 0.4:
            items.append(f"expect {line} {state}")
        return [*items, *self.hold(reach)]

    def expecting(self, reach: Reach) -> list[Item]:
        """An input is expected to be in a state, and time passes."""
        if reach.in_lane:
            return self.hold(reach)
        return [f"expect vacuum_ok {self.rng.choice(['on', 'off'])}", *self.hold(reach)]

    def throwing(self, reach: Reach) -> list[Item]:
        """Switches leave their converters and come back; what is between does not touch them."""
        gates = [group for group in ("far", "near") if group in reach.groups]
        if not gates:
            return self.ramp(reach)
        thrown = self.some(gates)
        left = tuple(group for group in reach.groups if group not in thrown)
        names = ", ".join({"far": "G1", "near": "G2"}[group] for group in thrown)
        between = self.body(reach.narrowed(groups=left, in_procedure=True), 3) if left else []
        back: list[Item] = [
            {"far": "throw G1 to behind1", "near": "throw G2 to behind2"}[group] for group in thrown
        ]
        between = between or self.hold(reach)
        if len(reach.groups) == len(GROUPS) and self.rng.random() < 0.4:
            pattern: list[Item] = [f"C1 = {self.volts(reach)}", f"others = {self.volts(reach)}"]
            between = [*between, ("ramp", pattern, f" over {self.time(reach)}")]
        if "near" in thrown and self.rng.random() < 0.5:
            level = self.volts(reach)  # the converter may move while the switch is away from it
            between = [*between, ("ramp", [f"C9 = {level}"], f" over {self.time(reach)}")]
        return [f"throw {names} to {self.spell.value(Fraction(-60), 'V')}", *between, *back]

    def drive(self, reach: Reach) -> list[Item]:
        """A rotating drive on the ring."""
        if "fine" not in reach.groups or not reach.clouds:
            return self.ramp(reach)
        ring = self.rng.choice(["R5", *reach.rings])
        first, last = (Fraction(self.rng.randint(1, 80), 40) * 10**6 for _ in "12")
        words = self.rng.choice(["", " backwards", " quadrupole", " quadrupole backwards"])
        return [
            f"rotate {self.rng.choice(reach.clouds)} on {ring} from {self.spell.value(first, 'Hz')}"
            f" to {self.spell.value(last, 'Hz')} at {self.spell.literal(Fraction(1, 2), 'V')}"
            f" for {self.time(reach)}{words}"
        ]

    def clouding(self, reach: Reach) -> list[Item]:
        """A cloud is loaded, released and loaded again, claimed, or brought around another."""
        if not reach.clouds:
            return self.hold(reach)
        cloud = self.rng.choice(reach.clouds)
        group = self.rng.choice(sorted(reach.groups))
        name = GROUPS[group][0]
        load = f"load {cloud} at {name} for {self.time(reach)}"
        kind = self.rng.randrange(4)
        if kind == 0:
            release = f"release {cloud} through {', '.join(GROUPS[group])} to {self.volts(reach)}"
            return [f"{release} over {self.time(reach)}", load]
        if kind == 1 and len(reach.clouds) > 1:
            other = self.rng.choice([item for item in reach.clouds if item != cloud])
            head = f"nest {cloud} {self.rng.choice(['around', 'beside'])} {other} using "
            tail = f" over {self.time(reach)}{self.rng.choice(['', ' smoothly'])}"
            return [self._with_pattern(head, self.pattern(reach), tail)]
        if kind == 2:
            return [
                f'assume temperature of {cloud} 140 K {self.rng.choice(["±", "+-"])} 40 K'
                ' because "measured; twice"'
            ]
        return [load]

    def claim(self, reach: Reach) -> list[Item]:
        """A labelled step, and a claim about the time since."""
        if reach.depth or self.labels > 3:
            return self.hold(reach)
        self.labels += 1
        label = f'"mark {self.labels}"'
        bound = self.spell.value(Fraction(1000), "s")
        return [f"{label} {self.hold(reach)[0]}", f"require time after {label} below {bound}"]

    def repeat(self, reach: Reach) -> list[Item]:
        """A body several times over."""
        count = self.rng.choice([1, 2, 2, 3])
        written = self.spell.value(Fraction(count), "", 1)
        return [(f"repeat {written}", self.body(reach.narrowed(), 3), "")]

    def each(self, reach: Reach) -> list[Item]:
        """A body for each of several values."""
        name = f"Größe{self.rng.randint(1, 99)}_{reach.depth}"
        if self.rng.random() < 0.6:
            values = [self.small_volts() for _ in range(self.rng.randint(1, 3))]
            inner = reach.narrowed(volts=(*reach.volts, name))
            use = ("ramp", [f"{self.plain_target(reach)} = {name}"], f" over {self.time(reach)}")
        else:
            values = [self.time() for _ in range(self.rng.randint(1, 3))]
            inner = reach.narrowed(times=(*reach.times, name))
            use = f"hold for {name}"
        body = [use, *self.body(inner, 2)]
        return [(f"each {name} of {', '.join(values)}", body, "")]

    def small_volts(self) -> str:
        """A voltage that stays within range when doubled and shifted."""
        return self.spell.value(Fraction(self.rng.randint(-2000, 2000), 400), "V")

    def plain_target(self, reach: Reach) -> str:
        """One electrode."""
        return GROUPS[self.rng.choice(sorted(reach.groups))][0]

    def call(self, reach: Reach) -> list[Item]:
        """A call of a procedure that touches nothing out of reach."""
        fitting = [
            made
            for made in self.procedures
            if set(made.reach.groups) <= set(reach.groups)
            and set(made.reach.lines) <= set(reach.lines)
            and (not reach.in_lane or made.reach.in_lane)
            and (reach.clouds or "cloud" not in made.takes)
        ]
        if not fitting:
            return self.ramp(reach)
        made = self.rng.choice(fitting)
        self.named.add(made.name)
        given = {
            "volts": self.small_volts,
            "time": self.time,
            "cloud": lambda: self.rng.choice(reach.clouds),
            "electrode": lambda: "R5",
        }
        return [f"do {made.name}({', '.join(given[kind]() for kind in made.takes)})"]

    def lanes(self, reach: Reach) -> list[Item]:
        """Two or three lanes, each with its own outputs, lines and clouds."""
        if len(reach.groups) < 4 or reach.depth > 2:
            return self.ramp(reach)
        count = self.rng.choice([2, 2, 3])
        shuffled = [self.rng.sample(list(part), len(part)) for part in (reach.groups, reach.lines, reach.clouds)]
        lanes: list[Item] = []
        for lane in range(count):
            groups, lines, clouds = (tuple(sorted(part[lane::count])) for part in shuffled)
            inner = reach.narrowed(groups=groups, lines=lines, clouds=clouds, in_lane=True)
            lanes.append(("lane", self.body(inner, 3), ""))
        return [("alongside", lanes, "")]

    def waiting(self, reach: Reach) -> list[Item]:
        """A new block at a trigger, perhaps with a catch."""
        if reach.in_lane or reach.in_procedure or reach.depth > 1:
            return self.hold(reach)
        if self.rng.random() < 0.5:
            return [self.rng.choice(["await arrival", "await arrival within 5 s", "await pulse within 1 min"])]
        trigger = self.rng.choice(["arrival", "pulse"])
        closing = self.spell.value(Fraction(self.rng.randint(60, 300), 10**8), "s")
        clauses: list[Item] = ["between G1 and G2", f"at {self.spell.value(Fraction(-60), 'V')}", f"closing {closing} after {trigger}"]
        if trigger == "pulse" or self.rng.random() < 0.4:
            clauses.append("within 20 s")
        return [
            "throw G2 to -60 V",
            ("catch bunch", clauses, ""),
            *self.ramp(reach.narrowed(groups=("a1", "a2", "pair", "fine"))),
            "throw G1 to behind1",
            "throw G2 to behind2",
        ]

    def body(self, reach: Reach, most: int) -> list[Item]:
        """A few statements; composite ones are rarer the deeper it gets."""
        simple: list[tuple[Callable[[Reach], list[Item]], int]] = [
            (self.ramp, 6),
            (self.hold, 2),
            (self.setting, 2),
            (self.expecting, 1),
            (self.drive, 1),
            (self.clouding, 2),
            (self.claim, 1),
        ]
        composite = [(self.throwing, 3), (self.repeat, 2), (self.each, 1), (self.call, 3), (self.lanes, 2), (self.waiting, 2)]
        chances = simple + ([] if reach.depth > 2 else composite)
        makers, weights = zip(*chances, strict=True)
        items: list[Item] = []
        for _ in range(self.rng.randint(1, most)):
            (maker,) = self.rng.choices(makers, weights)
            items += maker(reach)
        return items

    def procedure(self, name: str) -> Item:
        """Define a procedure."""
        kinds = ["volts", "volts", "time", "time", "cloud", "electrode"]
        takes = tuple(self.rng.sample(kinds, self.rng.randint(0, 3)))
        names = [f"{kind}_{number}" for number, kind in enumerate(takes)]
        of = {kind: tuple(n for n in names if n.startswith(kind)) for kind in takes}
        in_lane = self.rng.random() < 0.6
        reach = Reach(
            groups=tuple(sorted(self.some(GROUPS, 3))) if in_lane else tuple(GROUPS),
            lines=() if in_lane else tuple(STATES),
            clouds=of.get("cloud", ()),
            volts=of.get("volts", ()),
            times=of.get("time", ()),
            rings=of.get("electrode", ()),
            in_lane=in_lane,
            in_procedure=True,
            depth=1,
        )
        body = self.body(reach, 3)
        self.procedures.append(Called(name, takes, reach, len(body)))
        return (f"procedure {name}({', '.join(names)})", body, "")


def program(number: int) -> Program:
    """The program of a number."""
    writer = Writer(number)
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
    body += writer.body(reach, 6)
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
