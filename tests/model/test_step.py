"""What every step kind shares."""

from __future__ import annotations

from fractions import Fraction

import pytest

from wellseq.model.step import Duration, Step


class Wait(Step):
    """A step kind that says what it takes and not yet what it draws."""

    for_: Duration


def test_a_kind_without_a_drawing_cannot_be_drawn(pen):
    with pytest.raises(TypeError, match="Wait draws nothing"):
        Wait(for_=Fraction(1)).draw(pen)


def test_a_step_objects_to_nothing_by_itself(sandpit):
    step = Wait(for_=Fraction(1))
    assert list(step.objections(sandpit)) == []
    assert step.clash(step) == ""


def test_a_step_has_the_fields_of_its_kind_and_no_others():
    with pytest.raises(ValueError, match="Extra inputs"):
        Wait.model_validate({"for_": Fraction(1), "over": Fraction(1)})


def test_equal_steps_are_equal():
    assert Wait(for_=Fraction(1, 2)) == Wait(for_=Fraction(2, 4))
    assert Wait(for_=Fraction(1, 2)) != Wait(for_=Fraction(1, 3))
