"""The rulebook, the timeline as shipped, and the wells → what came of every rule."""

from __future__ import annotations

from dataclasses import dataclass, field, replace
from fractions import Fraction

from wellseq.model import rulebook as book
from wellseq.rules import cuts
from wellseq.rules.axis import Axis, Run
from wellseq.rules.blame import blame
from wellseq.rules.choices import Choices, Look
from wellseq.rules.margins import margin_of
from wellseq.rules.reading import Reading
from wellseq.rules.rulings import Breach, Outcome, Ruling, Rulings
from wellseq.rules.sentences import Breach as Found
from wellseq.rules.sentences import breaches
from wellseq.rules.signals import Signals
from wellseq.rules.strips import shown, strip
from wellseq.timeline.shipped import Shipped
from wellseq.timeline.timeline import Timeline
from wellseq.wells.wells import Wells

BREACHES_MAX = 200
SHOWN_MAX = 3
"""Breaches of one rule that come with values and a strip."""
SEVERAL = (
    "a window of the rule reaches over several waits at once, and not every choice of their "
    "lengths was looked at"
)


def examine(
    rules: book.Rulebook,
    timeline: Timeline,
    shipped: Shipped,
    wells: Wells,
    shown_most: int = SHOWN_MAX,
) -> Rulings:
    """Judge every rule of a book on one sequence; so many breaches of each come with a strip."""
    windows_s = [
        window_s
        for rule in rules.rules
        if rule.sentence is not None
        for window_s in _windows_s(rule.sentence)
    ]
    axis = Axis(timeline, shipped, windows_s)
    judging = _Judging(Signals(axis, shipped, wells), shown_most)
    return Rulings(tuple(judging.ruling(rule) for rule in rules.rules))


def _windows_s(sentence: book.Sentence) -> list[Fraction]:
    found = [w for one in book.conditions_of(sentence) for w in book.windows_in(one)]
    if isinstance(sentence, book.Counted) and sentence.window_s is not None:
        found.append(sentence.window_s)
    return found


@dataclass(slots=True)
class _Judging:
    """All rules on one axis; what an atom means is found out once for all of them."""

    signals: Signals
    shown_most: int
    _readings: dict[Run, Reading] = field(default_factory=dict)

    def _reading(self, run: Run) -> Reading:
        """Conditions on a run; runs of the whole axis come back for every rule."""
        if run.high < cuts.after(run.end) or run.low > 0:
            return Reading(self.signals, run)
        if run not in self._readings:
            self._readings[run] = Reading(self.signals, run)
        return self._readings[run]

    def ruling(self, rule: book.Rule) -> Ruling:
        """What came of one rule."""
        sentence = rule.sentence
        if sentence is None:
            return Ruling(rule, Outcome.NOT_APPLICABLE, arises=False, why=rule.lacking)
        choices = Choices(self.signals, sentence)
        met: dict[tuple[int, bool, int], tuple[Breach, Look, Found]] = {}
        for look in choices.looks():
            reading = self._reading(look.run)
            for found in breaches(sentence, reading):
                if look.low <= found.start >> 1 <= look.high and len(met) < BREACHES_MAX:
                    self._meet(met, sentence, reading, look, found)
        sure = [one for one in met.values() if one[0].sure]
        if sure:
            return Ruling(rule, Outcome.BROKEN, self._shown(sentence, sure))
        if met:
            return self._unsure(rule, sentence, list(met.values()))
        if not choices.complete:
            return Ruling(rule, Outcome.UNSURE, why=SEVERAL)
        return self._kept(rule, sentence)

    def _meet(
        self,
        met: dict[tuple[int, bool, int], tuple[Breach, Look, Found]],
        sentence: book.Sentence,
        reading: Reading,
        look: Look,
        found: Found,
    ) -> None:
        """Keep a breach unless the same step has one already that is as sure."""
        breach = self._placed(sentence, look, found)
        key = breach.block, bool(breach.awaiting), breach.number
        if key in met and (met[key][0].sure or not breach.sure):
            if met[key][0].sure == breach.sure and not look.waits:
                # With the longest waits and with the shortest: it takes no particular one.
                met[key] = replace(met[key][0], waits=None), *met[key][1:]
            return
        if not breach.sure:
            breach = replace(breach, unknown=self._unknown(sentence, reading, found))
        met[key] = breach, look, found

    def _placed(self, sentence: book.Sentence, look: Look, found: Found) -> Breach:
        """A breach in the time of a block, at its step."""
        axis, run = self.signals.axis, look.run
        stretch, at = axis.where(run, found.start >> 1)
        length = (found.end >> 1) - (found.start >> 1)
        waits = self._waits(sentence, look, found)
        start_s, end_s = axis.seconds(at), axis.seconds(at + length)
        if not stretch.waits:
            number = blame(self.signals, sentence, run, found)
            return Breach(found.sure, stretch.index, start_s, end_s, number, waits=waits)
        block = axis.timeline.blocks[stretch.index]
        before = axis.timeline.blocks[stretch.index - 1]
        return Breach(
            found.sure,
            before.index,
            before.duration_s + start_s,
            before.duration_s + end_s,
            block.spans[0].number if block.spans else -1,
            block.trigger,
            waits,
        )

    def _waits(
        self, sentence: book.Sentence, look: Look, found: Found
    ) -> dict[str, Fraction] | None:
        """The waits that a window reaches over from a breach, as long as they were in this run."""
        axis, run = self.signals.axis, look.run
        reach = sum(axis.units(window_s) for window_s in _windows_s(sentence))
        at = found.start >> 1
        waits = {
            axis.timeline.blocks[stretch.index].trigger: axis.seconds(length)
            for stretch, start, length in zip(axis.stretches, run.starts, run.lengths, strict=True)
            if stretch.waits
            and stretch.shortest < stretch.longest
            and start <= at + reach
            and start + length >= at - reach
        }
        return waits if reach and waits else None

    def _unknown(self, sentence: book.Sentence, reading: Reading, found: Found) -> tuple[str, ...]:
        """What is not known within reach of a breach that is not sure."""
        reach = sum(reading.axis.units(window_s) for window_s in _windows_s(sentence))
        side = sentence.side if isinstance(sentence, book.Around) else ""
        # Conditions look back; only what is wanted after an event looks ahead.
        start = found.start - 2 * reach - (side == "before")
        end = found.end + (2 * reach + 1 if side == "after" else 0)
        names = [
            text
            for one in book.conditions_of(sentence)
            for text, when in reading.unknown(one).items()
            if cuts.touches(when, start, end)
        ]
        if start < 0 and reading.run.low == 0:
            names.append("the time before the first row")
        last = cuts.after(reading.run.end)
        if end > last and reading.run.high == last:
            names.append("the time after the last row")
        return tuple(dict.fromkeys(names))

    def _shown(
        self, sentence: book.Sentence, met: list[tuple[Breach, Look, Found]]
    ) -> tuple[Breach, ...]:
        """The breaches in order of time, the first of them with values and a strip."""
        ordered = sorted(met, key=lambda one: (one[0].block, one[0].start_s, one[0].number))
        found = []
        for at, (breach, look, one) in enumerate(ordered):
            if at < self.shown_most:
                reading = self._reading(look.run)
                breach = replace(
                    breach,
                    shown=shown(sentence, reading, one),
                    strip=strip(sentence, reading, one),
                )
            found.append(breach)
        return tuple(found)

    def _unsure(
        self, rule: book.Rule, sentence: book.Sentence, met: list[tuple[Breach, Look, Found]]
    ) -> Ruling:
        """Not sure where values have intervals, not examined where something is not known."""
        breaches_shown = self._shown(sentence, met)
        unknown = tuple(dict.fromkeys(name for one in breaches_shown for name in one.unknown))
        if not unknown:
            return Ruling(rule, Outcome.UNSURE, breaches_shown)
        why = f"not known: {', '.join(unknown)}"
        return Ruling(rule, Outcome.NOT_EXAMINED, breaches_shown, why=why)

    def _kept(self, rule: book.Rule, sentence: book.Sentence) -> Ruling:
        axis = self.signals.axis
        longest = self._reading(axis.run())
        shortest = self._reading(axis.run([one.shortest for one in axis.stretches if one.waits]))
        margin, arises = margin_of(sentence, longest, shortest)
        return Ruling(rule, Outcome.KEPT, arises=arises, margin=margin)
