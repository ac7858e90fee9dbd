"""Mistakes are kept once, listed by place, counted beyond a hundred."""

from __future__ import annotations

from wellseq.base.finding import Mistake
from wellseq.base.place import Place
from wellseq.model.reporter import COMPARISONS_MAX, KEPT_MAX, LISTED_MAX, Reporter


def at(file: str, line: int, message: str = "wrong") -> Mistake:
    return Mistake("syntax", Place(file, line), message)


def test_a_mistake_met_twice_is_kept_once():
    reporter = Reporter()
    for _ in range(3):
        reporter.add(at("a", 1))
    reporter.add(at("a", 1, "otherwise wrong"))
    assert len(reporter) == 2


def test_files_come_in_the_order_given_and_places_in_theirs():
    reporter = Reporter()
    for file, line in (("b", 1), ("a", 9), ("z", 1), ("a", 2)):
        reporter.add(at(file, line))
    listed = [(m.place.file, m.place.line) for m in reporter.listed(["a", "b"])]
    assert listed == [("a", 2), ("a", 9), ("b", 1), ("z", 1)]


def test_beyond_a_hundred_only_their_number_is_told():
    reporter = Reporter()
    for line in range(LISTED_MAX + 7):
        reporter.add(at("a", line + 1))
    listed = reporter.listed(["a"])
    assert len(listed) == LISTED_MAX + 1
    assert listed[-1].message == "7 more mistakes in this file are not listed"
    fewer = Reporter()
    for line in range(LISTED_MAX):
        fewer.add(at("a", line + 1))
    assert len(fewer.listed(["a"])) == LISTED_MAX


def test_of_very_many_mistakes_the_number_is_a_least_one():
    reporter = Reporter()
    for line in range(KEPT_MAX + 50):
        reporter.add(at("a", line + 1))
    message = f"at least {KEPT_MAX - LISTED_MAX} more mistakes in this file are not listed"
    assert reporter.listed(["a"])[-1].message == message


def test_the_nearest_name_is_looked_for_while_it_costs_little():
    reporter = Reporter()
    known = [f"name_{n}" for n in range(COMPARISONS_MAX // 2)]
    assert reporter.near("name_17x", known, "name") != ""
    assert reporter.near("name_17x", known, "name") != ""
    assert reporter.near("name_17x", known, "name") == ""
