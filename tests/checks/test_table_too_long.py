"""`table-too-long`: rows of a block against the card's memory."""

from wellseq.checks.judging import check
from wellseq.model.trap import Margins
from wellseq.timeline.shipped import Stray

NAME = "table-too-long"


def case(make, rows, memory=5, strays=(), allowances=()):
    trap = make.trap(margins=Margins(table_rows=memory))
    block = make.block(trap, spans=[(0 * make.us, make.us), (make.us, 9 * make.us)])
    shipped = make.shipped(trap, block, ticks=range(rows), strays=strays)
    return make.case(trap, [block], shipped=shipped, allowances=allowances)


def test_exactly_as_many_rows_as_the_card_holds_and_one_more(make):
    assert make.verdicts(case(make, 2), NAME) == ["pass"]
    assert make.verdicts(case(make, 5), NAME) == ["pass"]
    (found,) = make.findings(case(make, 6), NAME)
    assert (found.verdict, found.margin) == ("fail", -1.0)
    assert found.message == "the block 'run' takes 6 rows, the card holds 5 rows"


def test_it_points_at_the_step_that_takes_most_rows(make):
    strays = [
        Stray(0, "a", 0 * make.us, make.us, 0.0, 2),
        Stray(1, "a", make.us, 9 * make.us, 0.0, 4),
        Stray(1, "b", make.us, 9 * make.us, 0.0, 4),
    ]
    (found,) = make.findings(case(make, 6, strays=strays), NAME)
    assert (found.place, found.hint) == (make.place(1), "this step alone takes 4 rows")


def test_it_may_not_be_allowed(make):
    assert not check(NAME).WAIVABLE
    assert make.verdicts(case(make, 6, allowances=[make.allow(NAME)]), NAME) == ["fail"]
