"""The trap drawn in text."""

from __future__ import annotations

import made_case
import pytest

from wellseq.emit.stack import drawing


def test_every_part_and_its_abilities_are_told() -> None:
    lines = drawing(made_case.trap(), 100).splitlines()
    assert lines[0] == "Gorse | bench: 4 electrodes on 4 outputs, field 1.2 T, open ends"
    for line in (
        "R3         10 mm   1 mm       15 mm   4        lv3",
        "lv2        -10 V to 10 V    76.29 uV  1 MV/s   10 us  line",
        "hv      lv3 or -900 V  90 ns  10 ns  yes",
        "vacuum_ok  input   on, off       on",
        "bunch    130 s          250 ns ± 20 ns",
        "staircase off its ramp at most       50 mV",
    ):
        assert line in lines


def test_a_sectored_ring_has_another_wall() -> None:
    upper = drawing(made_case.trap(), 100).splitlines()[3]
    assert upper == "[==C1==] [==C2==] [##R3##] [======G4======]"


@pytest.mark.parametrize("width", [20, 40, 60, 100])
def test_the_stack_is_broken_to_the_width_of_the_page(width: int) -> None:
    trap = made_case.trap()
    text = drawing(trap, width)
    drawn = [line for line in text.splitlines() if line.startswith("[")]
    assert all(len(line) <= width for line in drawn)
    names = " ".join(drawn).replace("=", " ").replace("#", " ").replace("[", " ").replace("]", " ")
    assert names.split() == [one.name for one in trap.electrodes]
