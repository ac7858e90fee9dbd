"""A source of chance → valid statements for the trap `lagoon`, as nested lists.

Voltages stay within ±12 V and ramps are slow enough to be followed, so that whatever differs later
is a mistake and no limit of the hardware.  What a body may touch is its `Reach`: lanes share
nothing, and nothing names an electrode whose switch is away from its converter.
"""

from __future__ import annotations

from collections.abc import Callable, Collection
from fractions import Fraction
from random import Random

from layout import Item
from reach import GROUPS, SPANS, STATES, STEEP, Called, Reach
from spelling import Speller


class Writer:
    """Writes one program."""

    def __init__(self, rng: Random, pace: Fraction) -> None:
        self.rng = rng
        self.pace = pace
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
        """Seconds: mostly whole clocks of all outputs, else of some or of none; times the pace."""
        kind = self.rng.random()
        if kind < 0.6:
            return self.pace * Fraction(self.rng.randint(1000, 6000), 500_000)
        if kind < 0.8:
            return self.pace * Fraction(self.rng.randint(200_000, 1_200_000), 10**8)
        whole = Fraction(self.rng.randint(2000, 12_000), 10**6)
        return self.pace * (whole + Fraction(self.rng.randint(1, 6), 7 * 10**6))

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
        return [
            self._with_pattern("ramp ", self.pattern(reach), f" over {self.time(reach)}{smoothly}")
        ]

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
                f"assume temperature of {cloud} 140 K {self.rng.choice(['±', '+-'])} 40 K"
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
        inner, count = reach.narrowed(), self.rng.randint(1, 3)
        kind = self.rng.randrange(3)
        if kind == 0:
            values = [self.small_volts() for _ in range(count)]
            inner.volts = (*reach.volts, name)
            target = GROUPS[self.rng.choice(sorted(reach.groups))][0]
        elif kind == 1:
            values = [self.time() for _ in range(count)]
            inner.times = (*reach.times, name)
            return [(f"each {name} of {', '.join(values)}", self.body(inner, 3), "")]
        else:
            values = [GROUPS[group][0] for group in self.some(reach.groups, 3)]
            target = name
        wished = name if kind == 0 else self.volts(reach)
        use = ("ramp", [f"{target} = {wished}"], f" over {self.time(reach)}")
        return [(f"each {name} of {', '.join(values)}", [use, *self.body(inner, 2)], "")]

    def small_volts(self) -> str:
        """A voltage that stays within range when doubled and shifted."""
        return self.spell.value(Fraction(self.rng.randint(-2000, 2000), 400), "V")

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
        shuffled = [
            self.rng.sample(list(part), len(part))
            for part in (reach.groups, reach.lines, reach.clouds)
        ]
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
            return [
                self.rng.choice(
                    ["await arrival", "await arrival within 5 s", "await pulse within 1 min"]
                )
            ]
        trigger = self.rng.choice(["arrival", "pulse"])
        closing = self.spell.value(Fraction(self.rng.randint(60, 300), 10**8), "s")
        clauses: list[Item] = [
            "between G1 and G2",
            f"at {self.spell.value(Fraction(-60), 'V')}",
            f"closing {closing} after {trigger}",
        ]
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
        composite = [
            (self.throwing, 3),
            (self.repeat, 2),
            (self.each, 1),
            (self.call, 3),
            (self.lanes, 2),
            (self.waiting, 2),
        ]
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
