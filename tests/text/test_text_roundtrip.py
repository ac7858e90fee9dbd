"""Random valid statements, written in a random layout, are read back as what they were."""

from __future__ import annotations

import random
from fractions import Fraction

from hypothesis import given, settings
from hypothesis import strategies as st

from wellseq.base.names import RESERVED
from wellseq.base.quantity import UNITS
from wellseq.text.parse import parse
from wellseq.text.tree import Assignment


class Writer:
    """Writes random valid statements; each method gives the text and its outline."""

    def __init__(self, seed):
        self.random = random.Random(seed)

    def name(self):
        """No reserved word, no unit, none of the words that make another shape."""
        taken = {*RESERVED, *UNITS, "let", "set", "expect", "others"}
        while True:
            rest = "".join(self.random.choices("abcdenosvé_0189", k=self.random.randrange(6)))
            name = self.random.choice("aCGkréл_") + rest
            if name not in taken:
                return name

    def gap(self):
        """What may stand where a line may end without ending the statement."""
        return self.random.choice([" ", "  ", "\n", " # remark {\n\t", "\r\n", "\u00a0"])

    def end(self):
        """An end of a statement."""
        return self.random.choice(["\n", ";", " ;\n", "\r\n\n", ' # "end\n', "\r"])

    def atom(self):
        if self.random.random() < 0.5:
            name = self.name()
            return name, ("name", name)
        digits, value = self.random.choice(
            [
                ("0", 0),
                ("12.5", Fraction(25, 2)),
                ("3e2", 300),
                ("6E-3", Fraction(3, 500)),
                ("7.", 7),
            ]
        )
        unit = self.random.choice(["", *UNITS])
        blank = self.random.choice(["", " "]) if unit else ""
        return digits + blank + unit, ("number", value, unit)

    def value(self, depth=2):
        if depth == 0 or self.random.random() < 0.5:
            return self.atom()
        text, shape = self.value(depth - 1)
        if self.random.random() < 0.2:
            return f"-({text})", ("minus", shape)
        sign, (other, second) = self.random.choice("+-*/"), self.value(depth - 1)
        return f"({text}) {sign}{self.gap()}({other})", (sign, shape, second)

    def spread(self):
        text, shape = self.value()
        if self.random.random() < 0.7:
            return text, shape
        other, second = self.value()
        return f"{text} {self.random.choice(['±', '+-'])} {other}", ("±", shape, second)

    def several(self, make, least, most):
        """A comma-separated list."""
        pairs = [make() for _ in range(self.random.randint(least, most))]
        return ("," + self.gap()).join(text for text, _ in pairs), [shape for _, shape in pairs]

    def assignment(self):
        targets, names = self.several(lambda: (self.name(),) * 2, 1, 3)
        text, shape = self.spread()
        return f"{targets} = {text}", ("=", names, shape)

    def block(self, depth):
        pairs = [self.statement(depth) for _ in range(self.random.randrange(4))]
        inner = "".join(text + self.end() for text, _ in pairs)
        return f"{{{self.gap()}{inner}{self.gap()}}}", ("block", [shape for _, shape in pairs])

    def statement(self, depth=2):
        if self.random.random() < 0.2:
            return self.assignment()
        verb, label = self.name(), self.random.choice([None, "", "a {b} # é;"])
        text = verb if label is None else f'"{label}"{self.gap()}{verb}'
        operands, shapes = self.several(self.spread, 0, 3)
        text += " " + operands
        clauses, words, reasons = [], [], []
        for _ in range(self.random.randrange(3)):
            word = self.random.choice(sorted(RESERVED - {"allow", "because"}))
            inner, inner_shapes = self.several(self.spread, 1, 2)
            text += f"{self.gap()}{word} {inner}"
            clauses.append([word, inner_shapes])
        if (shapes or clauses) and depth and self.random.random() < 0.5:
            inner, shape = self.block(depth - 1)
            text += " " + inner
            shapes.append(shape)
        if (shapes or clauses) and self.random.random() < 0.3:
            words = [self.name() + "ly"]
            text += " " + words[0]
        if self.random.random() < 0.3:
            text += f'{self.gap()}allow well-lost{self.gap()}because "r;{{"'
            reasons = ["r;{"]
        return text, ("step", label, verb, shapes, clauses, words, reasons)


def shape_of(node):
    """The outline of a tree's node, in the notation of the strategies."""
    name = type(node).__name__
    if name == "Name":
        return ("name", node.text)
    if name == "Number":
        return ("number", node.value, node.unit)
    if name == "Negative":
        return ("minus", shape_of(node.operand))
    if name == "Binary":
        return (node.op, shape_of(node.left), shape_of(node.right))
    if name == "Spreading":
        return ("±", shape_of(node.value), shape_of(node.spread))
    if name == "Block":
        return ("block", [shape_of(item) for item in node.items])
    if isinstance(node, Assignment):
        return ("=", [target.text for target in node.targets], shape_of(node.value))
    return (
        "step",
        node.label and node.label.text,
        node.verb.text,
        [shape_of(item) for item in node.operands],
        [[each.word.text, [shape_of(item) for item in each.operands]] for each in node.clauses],
        [word.text for word in node.words],
        [allowed.reason.text for allowed in node.allowances],
    )


@settings(max_examples=150, deadline=None)
@given(st.integers(0, 2**32))
def test_what_is_rendered_is_read_back(seed):
    writer = Writer(seed)
    pairs = [writer.statement() for _ in range(4)]
    source = "".join(text + writer.end() for text, _ in pairs)
    tree = parse(source, "f")
    assert tree.mistakes == ()
    assert [shape_of(item) for item in tree.statements] == [shape for _, shape in pairs]
