"""A breach → the step that it is put down to, which is the one that an `allow` would stand at.

The step that the rule itself speaks of, where it begins or ends just then; else the step that sets
or expects a line of the rule just then; else the step that is being played.
"""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.model import rulebook as book
from wellseq.rules.axis import Run
from wellseq.rules.sentences import Breach
from wellseq.rules.signals import Signals
from wellseq.timeline.timeline import Block


def blame(signals: Signals, sentence: book.Sentence, run: Run, breach: Breach) -> int:
    """The number of the step behind a breach within a block; -1 in a block without steps."""
    time = breach.start >> 1
    events = list(_events(signals, sentence, run, time))
    if events:
        return events[-1]
    stretch, at = signals.axis.where(run, time)
    block = signals.timeline.blocks[stretch.index]
    lines = {
        atom.line
        for one in book.conditions_of(sentence)
        for atom in book.atoms_in(one)
        if isinstance(atom, book.LineIn)
    }
    emitted = {
        (one.number, one.output): one.emitted_s
        for one in signals.shipped.blocks[block.index].roundings
    }
    set_then = [
        change.number
        for change in block.changes
        if change.line in lines
        and signals.axis.units(emitted.get((change.number, change.line), change.time_s)) == at
    ]
    return set_then[-1] if set_then else _played(signals, block, at)


def _events(signals: Signals, sentence: book.Sentence, run: Run, time: int) -> Iterator[int]:
    """The steps that a sentence watches for and that begin, or for `after` end, at an instant."""
    if not isinstance(sentence, book.Around | book.Counted):
        return
    ends = isinstance(sentence, book.Around) and sentence.side == "after"
    for atom in book.atoms_in(sentence.event):
        if isinstance(atom, book.Playing | book.Driven):
            for one in signals.spans(atom):
                if run.starts[one.stretch] + (one.end if ends else one.start) == time:
                    yield one.number
        elif isinstance(atom, book.InBlock) and not ends:
            for number, stretch in enumerate(signals.axis.stretches):
                block = signals.timeline.blocks[stretch.index]
                named = atom.block == (block.trigger or "run") and not stretch.waits
                if named and run.starts[number] == time and block.spans:
                    yield block.spans[0].number


def _played(signals: Signals, block: Block, at: int) -> int:
    """Of the steps begun, the last that still lasts; where none does, the last one begun."""
    units = signals.axis.units
    begun = [span for span in block.spans if units(span.start_s) <= at]
    lasting = [span for span in begun if units(span.end_s) > at]
    chosen = lasting or begun or list(block.spans[:1])
    return chosen[-1].number if chosen else -1
