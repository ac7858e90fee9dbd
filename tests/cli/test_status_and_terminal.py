"""Which exit status several files come to, and when output is coloured."""

from __future__ import annotations

import pytest

from wellseq.cli.status import worst
from wellseq.cli.terminal import colour_wanted


@pytest.mark.parametrize(
    ("statuses", "decides"),
    [
        ([0], 0),
        ([0, 1, 0], 1),
        ([1, 78], 78),
        ([78, 66, 1], 66),
        ([66, 73], 73),
        ([73, 70, 0], 70),
        ([], 70),
    ],
)
def test_the_worst_status_decides(statuses: list[int], decides: int) -> None:
    assert worst(statuses) == decides


@pytest.mark.parametrize(
    ("environment", "terminal", "colour"),
    [
        ({}, True, True),
        ({}, False, False),
        ({"NO_COLOR": "1"}, True, False),
        ({"NO_COLOR": ""}, True, True),
        ({"NO_COLOR": "1", "FORCE_COLOR": "1"}, True, False),
        ({"FORCE_COLOR": "1"}, False, True),
        ({"CLICOLOR_FORCE": "1"}, False, True),
        ({"CLICOLOR_FORCE": "0"}, False, False),
        ({"CLICOLOR": "0"}, True, False),
        ({"CLICOLOR": "0", "FORCE_COLOR": "1"}, True, True),
        ({"TERM": "dumb"}, True, False),
    ],
)
def test_colour(environment: dict[str, str], terminal: bool, colour: bool) -> None:
    assert colour_wanted(environment, terminal) is colour
