"""The axis of steps: every step has a row, time goes on evenly inside, half an hour beside 1 us."""

from __future__ import annotations

from dataclasses import replace
from fractions import Fraction

import made_case
import numpy as np
import pytest

from wellseq.base.finding import Origin
from wellseq.emit.pictures import score as module
from wellseq.emit.pictures.score import WHOLE, score
from wellseq.timeline.timeline import StepSpan, Timeline


def timeline(*durations: str, labels: dict[int, str] | None = None) -> Timeline:
    """One block of steps with these durations in s."""
    spans, now = [], Fraction(0)
    for number, duration in enumerate(durations):
        spans.append(StepSpan(number, now, now + Fraction(duration)))
        now += Fraction(duration)
    block = replace(
        made_case.blocks()[0],
        pieces=(),
        edges=(),
        changes=(),
        drives=(),
        events=(),
        spans=tuple(spans),
        duration_s=now,
    )
    origins = tuple(
        Origin(made_case.PLACE, "hold", (labels or {}).get(number, ""), (), (), number)
        for number in range(len(durations))
    )
    return Timeline(made_case.trap(), (block,), origins, ())


def test_half_an_hour_and_a_microsecond_are_read_side_by_side() -> None:
    axis = score(timeline("1800", "1/1000000"))
    long, short = axis.row(0), axis.row(1)
    assert long is not None
    assert short is not None
    assert long[1] - long[0] < 5 * (short[1] - short[0])
    by_seconds = 1e-6 / 1800 * WHOLE
    assert short[1] - short[0] > 1e6 * by_seconds


def test_a_step_without_a_duration_has_a_row_and_time_is_even_within_rows() -> None:
    axis = score(timeline("1", "0", "0", "2"))
    rows = [axis.row(number) for number in range(4)]
    assert all(row is not None and row[1] > row[0] for row in rows)
    assert [row[0] for row in rows[1:] if row] == pytest.approx([row[1] for row in rows[:3] if row])
    assert axis.before(0, 1.0) == pytest.approx(rows[1][0])  # type: ignore[index]
    assert axis.after(0, 1.0) == pytest.approx(rows[3][0])  # type: ignore[index]
    assert axis.after(0, 2.0) == pytest.approx(sum(rows[3]) / 2)  # type: ignore[arg-type]
    places = axis.after(0, np.linspace(0, 3, 200))
    assert np.all(np.diff(places) >= 0)


def test_parts_go_from_label_to_label_and_a_wait_stands_before_its_block() -> None:
    axis = score(timeline("1", "1", "1", labels={1: "cool"}))
    assert [(part.label, part.first) for part in axis.parts] == [("", 0), ("cool", 1)]
    assert axis.parts[1].top == pytest.approx(axis.row(1)[0])  # type: ignore[index]
    two = score(made_case.case().timeline)  # type: ignore[arg-type]
    waits = [cell for cell in two.cells if cell.wait]
    assert [cell.block for cell in waits] == [1]
    assert two.wait_top(1) == waits[0].top
    assert two.wait_top(0) is None


def test_very_many_steps_share_rows_and_none_is_lost(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(module, "CELLS_MOST", 10)
    axis = score(timeline(*["1"] * 95))
    assert len(axis.cells) <= 11
    assert all(axis.row(number) is not None for number in range(95))
    assert axis.before(0, 95.0) == pytest.approx(WHOLE)
